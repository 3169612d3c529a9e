"""Which rows, columns and time steps are visited when.

A time step is a few stages (`Frame.phases`): velocity, then stress; under terrain with a helper stage before
each. The plain order visits all bands of one stage, then all of the next. The fast order advances `steps` steps in one pass
over memory, inside strips of columns, so that a strip's rows are still in cache when the next stage
needs them:

    wave w visits, for stage s = 0, 1, ..., the band  w - lag s      (a wavefront running down the rows)
    stage s of a strip covers columns  left + left_slope s  ...  right + right_slope s - 1.

A stage reads what earlier stages wrote up to its reach (`cell.py`) away. The bounds between strips move the
reach of a stage or more to the left per stage: what a strip needs of its left neighbour has then not been
overwritten, since the neighbour has stopped a reach short for each stage it is ahead. The lag is the number of
bands that any row reads up or down, closures included (`assembly.reach_in_bands`).

Threads take neighbouring strips and go through pass after pass, each strip keeping in step with its neighbours:

    wave w of a pass begins when the left strip has done wave w of this pass (it then reads what it must find
    there, and nothing that it will overwrite is still to be read), and when the right strip has
    done all of the pass before that acts on the bands near w, its last stage running lag (stages - 1) behind.
"""

import numpy as np

from groundroll.waves.handover import publish, wait_for
from groundroll.waves.jit import entry, inline, kernel
from groundroll.waves.kernels import force_band, strain_band, stress_band, velocity_band
from groundroll.waves.points import add_sources, note_receivers


@kernel
def stage(number, first_step, first_noted, band, a, b, ground, fields, sources, receivers, scratch):
    """Do stage `number` of a pass that begins at step `first_step`, on one band, columns a..b-1.

    Receivers' traces begin at step `first_noted`.

    A time step has the phases velocity, stress; under terrain force helpers, velocity, strain helpers, stress.
    """
    phases = ground.frame.phases
    step, phase = first_step + number // phases, number % phases
    if phases == 4:
        if phase == 0:
            force_band(band, a, b, ground, fields, scratch)
        elif phase == 2:
            strain_band(band, a, b, ground, fields)
        if phase % 2 == 0:
            return
    if phase == phases // 2 - 1:
        velocity_band(band, a, b, ground, fields, scratch)
        add_sources(band, a, b, step, ground.frame, fields, sources.force)
        note_receivers(band, a, b, step - first_noted, ground.frame, fields, receivers)
    else:
        stress_band(band, a, b, ground, fields, scratch)
        add_sources(band, a, b, step, ground.frame, fields, sources.moment)


@entry
def plain_pass(first_step, steps, width, bands, ground, fields, sources, receivers, scratch):
    """Advance `steps` steps, each stage over all bands before the next stage begins."""
    a, b = np.uint64(0), np.uint64(width)
    for number in range(ground.frame.phases * steps):
        for band in range(bands):
            stage(number, first_step, first_step, np.uint64(band), a, b, ground, fields, sources, receivers, scratch)


@inline
def wait_for_neighbours(j, strips, done, wave, waves, margin, progress):
    """Return when strip j may begin `wave` of a pass, `done` waves having been done in the passes before."""
    if j > 0:
        wait_for(progress, j - 1, done + wave + 1)
    if j < strips - 1:
        wait_for(progress, j + 1, done - waves + min(waves, wave + margin))


@entry
def strip_passes(first_strip, last_strip, bounds, move, first_step, skip, passes, steps, bands, ground, fields, sources, receivers, scratch, progress):
    """Advance `passes` passes of `steps` steps in the strips first_strip..last_strip-1, in step with the others.

    Strip j lies between bounds[j] and bounds[j + 1]; bounds inside the mesh move `move` columns left per stage.
    The first pass begins `skip` steps after `first_step`, at which the receivers' traces begin. `progress` counts
    the waves that each strip has done; it starts at 0.
    """
    stages, lag, strips = ground.frame.phases * steps, ground.rows.lag, len(bounds) - 1
    waves = bands + lag * (stages - 1)
    for number_of_pass in range(passes):
        step, done = first_step + skip + number_of_pass * steps, number_of_pass * waves
        for j in range(first_strip, last_strip):
            from_left, from_right = (move if j > 0 else 0), (move if j < strips - 1 else 0)
            for wave in range(waves):
                wait_for_neighbours(j, strips, done, wave, waves, lag * (stages + 1), progress)
                earliest = max(0, (wave - bands + lag) // lag)
                for number in range(earliest, min(stages, wave // lag + 1)):
                    a, b = np.uint64(bounds[j] - from_left * number), np.uint64(bounds[j + 1] - from_right * number)
                    band = np.uint64(wave - lag * number)
                    stage(number, step, first_step, band, a, b, ground, fields, sources, receivers, scratch)
                publish(progress, j, done + wave + 1)
