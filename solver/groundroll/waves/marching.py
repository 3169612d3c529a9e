"""Which rows, columns and time steps are visited when.

A time step is a few stages (`Frame.phases`): velocity, then stress; under terrain with a helper stage before
each. The plain order visits all bands of one stage, then all of the next. The fast order advances `steps` steps in one pass
over memory, inside strips of columns, so that a strip's rows are still in cache when the next stage
needs them:

    wave w visits, for stage s = 0, 1, ..., the band  w - lag s      (a wavefront running down the rows)
    stage s of a strip covers columns  left + left_slope s  ...  right + right_slope s - 1.

A stage reads what earlier stages wrote up to its reach (`cell.py`) away. Neighbouring strips are skewed, each
bound moving the reach of a stage to the left per stage, and go from left to right: what a strip still needs
from its left neighbour has not been overwritten, since the neighbour has stopped one reach short
for each stage it is ahead. Threads take blocks of strips; a block's own left bound moves right instead,
and when all blocks are done the wedges left between them are filled the same way. The lag is the number of
bands that any row reads up or down, closures included (`assembly.reach_in_bands`).
"""

import numpy as np

from groundroll.waves.cell import ALIGNED
from groundroll.waves.jit import entry, inline, kernel
from groundroll.waves.kernels import force_band, strain_band, stress_band, velocity_band
from groundroll.waves.points import add_sources, note_receivers


@kernel
def stage(number, first_step, band, a, b, ground, fields, sources, receivers, scratch):
    """Do stage `number` of a pass that begins at step `first_step`, on one band, columns a..b-1.

    A time step has the phases velocity, stress; under terrain force helpers, velocity, strain helpers, stress.
    """
    phases = ground.frame.phases
    step, phase = number // phases, number % phases
    if phases == 4:
        if phase == 0:
            force_band(band, a, b, ground, fields, scratch)
        elif phase == 2:
            strain_band(band, a, b, ground, fields)
        if phase % 2 == 0:
            return
    if phase == phases // 2 - 1:
        velocity_band(band, a, b, ground, fields, scratch)
        add_sources(band, a, b, first_step + step, ground.frame, fields, sources.force)
        note_receivers(band, a, b, step, ground.frame, fields, receivers)
    else:
        stress_band(band, a, b, ground, fields, scratch)
        add_sources(band, a, b, first_step + step, ground.frame, fields, sources.moment)


@entry
def plain_pass(first_step, steps, width, bands, ground, fields, sources, receivers, scratch):
    """Advance `steps` steps, each stage over all bands before the next stage begins."""
    a, b = np.uint64(0), np.uint64(width)
    for number in range(ground.frame.phases * steps):
        for band in range(bands):
            stage(number, first_step, np.uint64(band), a, b, ground, fields, sources, receivers, scratch)


@inline
def bound_at(j, number, bounds, slopes):
    """Return bound j at a stage. One that comes near the first joins it: the columns of a closed edge read
    further than a stage's reach, so they are never cut off from what they read."""
    first, bound = bounds[0] + slopes[0] * number, bounds[j] + slopes[j] * number
    inside = 0 < j and j < len(bounds) - 1
    return np.uint64(first if inside and bound < first + ALIGNED else bound)


@entry
def strip_pass(bounds, slopes, first_step, steps, bands, ground, fields, sources, receivers, scratch):
    """Advance `steps` steps inside each strip in turn.

    Strip j lies between bounds[j] and bounds[j + 1]; bound j moves slopes[j] columns per stage.
    """
    stages, lag = ground.frame.phases * steps, ground.rows.lag
    for j in range(len(bounds) - 1):
        for wave in range(bands + lag * (stages - 1)):
            earliest = max(0, (wave - bands + lag) // lag)
            for number in range(earliest, min(stages, wave // lag + 1)):
                a = bound_at(j, number, bounds, slopes)
                b = bound_at(j + 1, number, bounds, slopes)
                band = np.uint64(wave - lag * number)
                if a < b:
                    stage(number, first_step, band, a, b, ground, fields, sources, receivers, scratch)
