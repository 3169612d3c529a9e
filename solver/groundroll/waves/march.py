"""The time loop's engine: fields, and passes of several steps over them in plain or fast order."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

import numpy as np

from groundroll.waves.cell import ALIGNED, BAND, MECHANISMS, REACH, SCRATCH_ROWS, TERRAIN_REACH
from groundroll.waves.marching import plain_pass, strip_pass
from groundroll.waves.points import Receivers, Sources
from groundroll.waves.state import Fields, Ground


@dataclass(frozen=True)
class Order:
    """How a pass visits the mesh: `steps` per pass, `strip` columns wide; None for the plain order."""

    steps: int = 8
    strip: int | None = 3000


PLAIN = Order(steps=1, strip=None)
# The rows in flight may fill this share of the last cache, which other work needs as well.
CACHE_SHARE = 0.7
# Narrower strips spend their time on starting rows.
LEAST_STRIP = 2000
# Flat arrays that a band touches: fields and properties, attenuation, terrain helpers.
ELASTIC_ARRAYS, MEMORY_ARRAYS, TERRAIN_ARRAYS = 10, 3 * MECHANISMS + 6, 4


def last_cache(default: int = 8 * 2**20) -> int:
    """Return the size (bytes) of the largest cache of this machine, as the system tells it."""
    sizes = [default]
    for file in Path("/sys/devices/system/cpu/cpu0/cache").glob("index*/size"):
        text = file.read_text().strip()
        if text[:-1].isdigit() and text[-1] in "KM":
            sizes.append(int(text[:-1]) * (2**10 if text[-1] == "K" else 2**20))
    return max(sizes[1:], default=default)


def fitting_order(ground: Ground, width: int, itemsize: int, threads: int, cache: int | None = None) -> Order:
    """Return the order whose rows in flight fit the cache: BAND lag stages rows of every array, for each thread.

    Many steps per pass spare memory but want wide strips, and blocks much wider than the wedges between them.
    """
    arrays = ELASTIC_ARRAYS + MEMORY_ARRAYS * (ground.memory.count > 0) + TERRAIN_ARRAYS * (ground.terrain.rows > 0)
    share = CACHE_SHARE * (cache or last_cache()) / threads
    for move in (ALIGNED, TERRAIN_REACH):
        for steps in (16, 8, 4):
            stages = ground.frame.phases * steps
            strip = int(share / (BAND * ground.rows.lag * stages * arrays * itemsize))
            if strip >= LEAST_STRIP and width >= threads * 4 * move * stages:
                return Order(steps, strip)
    return Order(2, LEAST_STRIP)


def strip_blocks(width: int, strip: int, blocks: int, stages: int, reach: int):
    """Return (bounds, slopes) of each block of strips, and of the wedges between the blocks.

    A block's outer bounds stand still at the ends of the mesh and move inward by a stage's reach where it meets
    another block; bounds inside move left. Where there is room a bound moves by whole cache lines. A block is at
    least wide enough to shrink.
    """
    move = ALIGNED if width >= 4 * ALIGNED * stages * blocks else reach
    blocks = max(1, min(blocks, width // (2 * move * stages + 1)))
    cuts = on_lines(0, width, blocks)
    result = []
    for low, high in pairwise(cuts):
        bounds = on_lines(low, high, max(1, round((high - low) / strip)))
        slopes = np.full(len(bounds), -move)
        slopes[0] = move if low > 0 else 0
        slopes[-1] = -move if high < width else 0
        result.append((bounds, slopes))
    wedges = [(np.array([cut, cut]), np.array([-move, move])) for cut in cuts[1:-1]]
    return result, wedges


def on_lines(low: int, high: int, parts: int) -> np.ndarray:
    """Return the bounds of at most `parts` about equal parts of low..high, inside at whole cache lines.

    Both ends keep a line or more to themselves: the columns of a closed edge read further than a stage's reach.
    """
    bounds = np.linspace(low, high, parts + 1).astype(np.int64)[1:-1]
    bounds = np.unique(bounds - bounds % ALIGNED)
    return np.array([low, *bounds[(bounds >= low + ALIGNED) & (bounds <= high - ALIGNED)], high])


class March:
    """Advances fields over a mesh; every pass ends with all cells at the same step."""

    def __init__(self, mesh, ground: Ground, fields: Fields, sources: Sources, receivers: Receivers, order: Order, threads: int):
        self.mesh, self.ground, self.fields = mesh, ground, fields
        self.sources, self.receivers = sources, receivers
        self.order, self.step = order, 0
        self._scratch = [self._new_scratch() for _ in range(threads)]
        self._pool = ThreadPoolExecutor(threads) if threads > 1 and order.strip is not None else None

    def _new_scratch(self):
        return np.zeros((SCRATCH_ROWS, self.mesh.pitch), dtype=self.fields.vx.dtype)

    def advance(self, steps: int) -> None:
        """Advance `steps` steps in one pass; receivers' traces of the pass begin at row 0."""
        self.receivers.trace[:steps] = 0.0
        if self.order.strip is None:
            plain_pass(self.step, steps, self.mesh.nx, self.mesh.bands, *self._data(0))
        else:
            stages = self.ground.frame.phases * steps
            reach = REACH if self.mesh.terrain is None else TERRAIN_REACH
            blocks, wedges = strip_blocks(self.mesh.nx, self.order.strip, len(self._scratch), stages, reach)
            for group in (blocks, wedges):
                self._side_by_side(group, steps)
        self.step += steps

    def _data(self, worker: int):
        return self.ground, self.fields, self.sources, self.receivers, self._scratch[worker]

    def _side_by_side(self, group, steps: int) -> None:
        def work(worker):
            bounds, slopes = group[worker]
            strip_pass(bounds, slopes, self.step, steps, self.mesh.bands, *self._data(worker))

        if self._pool is None or len(group) < 2:
            for worker in range(len(group)):
                work(worker)
        else:
            list(self._pool.map(work, range(len(group))))

    def close(self) -> None:
        if self._pool is not None:
            self._pool.shutdown()
