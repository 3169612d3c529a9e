"""Which rows, columns and time steps are visited when.

Stages alternate: 2 s is the velocity half step of step s, 2 s + 1 its stress half step. The plain order
visits all bands of one stage, then all of the next. The fast order advances `steps` steps in one pass
over memory, inside strips of columns, so that a strip's rows are still in cache when the next stage
needs them:

    wave w visits, for stage s = 0, 1, ..., the band  w - LAG s      (a wavefront running down the rows)
    stage s of a strip covers columns  left + left_slope s  ...  right + right_slope s - 1.

A stage reads the other field up to REACH rows or columns away. Neighbouring strips are skewed, each
bound moving REACH columns to the left per stage, and go from left to right: what a strip still needs
from its left neighbour has not been overwritten, since the neighbour has stopped REACH columns short
for each stage it is ahead. Threads take blocks of strips; a block's own left bound moves right instead,
and when all blocks are done the wedges left between them are filled the same way. LAG bands of two rows
hold both the interior's reach of REACH rows and the closures' of 5 rows and more near an edge.
"""

import numpy as np

from groundroll.waves.cell import REACH
from groundroll.waves.jit import kernel
from groundroll.waves.kernels import stress_band, velocity_band
from groundroll.waves.points import add_sources, note_receivers

LAG = 2


@kernel
def stage(number, first_step, band, a, b, ground, fields, sources, receivers, scratch):
    """Do stage `number` of a pass that begins at step `first_step`, on one band, columns a..b-1."""
    step = first_step + number // 2
    if number % 2 == 0:
        velocity_band(band, a, b, ground, fields, scratch)
        add_sources(band, a, b, step, ground.frame, fields, sources.force)
        note_receivers(band, a, b, number // 2, ground.frame, fields, receivers)
    else:
        stress_band(band, a, b, ground, fields, scratch)
        add_sources(band, a, b, step, ground.frame, fields, sources.moment)


@kernel
def plain_pass(first_step, steps, width, bands, ground, fields, sources, receivers, scratch):
    """Advance `steps` steps, each stage over all bands before the next stage begins."""
    for number in range(2 * steps):
        for band in range(bands):
            stage(number, first_step, np.uint64(band), np.uint64(0), np.uint64(width), ground, fields, sources, receivers, scratch)


@kernel
def strip_pass(bounds, slopes, first_step, steps, bands, ground, fields, sources, receivers, scratch):
    """Advance `steps` steps inside each strip in turn.

    Strip j lies between bounds[j] and bounds[j + 1]; bound j moves slopes[j] columns per stage.
    """
    stages = 2 * steps
    for j in range(len(bounds) - 1):
        for wave in range(bands + LAG * (stages - 1)):
            earliest = max(0, (wave - bands + LAG) // LAG)
            for number in range(earliest, min(stages, wave // LAG + 1)):
                a = np.uint64(bounds[j] + slopes[j] * number)
                b = np.uint64(bounds[j + 1] + slopes[j + 1] * number)
                band = np.uint64(wave - LAG * number)
                stage(number, first_step, band, a, b, ground, fields, sources, receivers, scratch)
