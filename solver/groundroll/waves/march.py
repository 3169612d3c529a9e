"""The time loop's engine: fields, and passes of several steps over them in plain or fast order."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from groundroll.waves.cell import ALIGNED, BAND, MECHANISMS, REACH, SCRATCH_ROWS, TERRAIN_REACH
from groundroll.waves.handover import SPREAD
from groundroll.waves.marching import plain_pass, strip_passes
from groundroll.waves.points import Receivers, Sources
from groundroll.waves.state import Fields, Ground


@dataclass(frozen=True)
class Order:
    """How passes visit the mesh: `steps` per pass, strips about `strip` columns wide; None for the plain order."""

    steps: int = 8
    strip: int | None = 3000


PLAIN = Order(steps=1, strip=None)
# A call of compiled code makes about this many steps, in passes: it is not interrupted, and it begins and ends slowly.
STEPS_A_CALL = 64
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

    Many steps per pass spare memory but want wide strips.
    """
    arrays = ELASTIC_ARRAYS + MEMORY_ARRAYS * (ground.memory.count > 0) + TERRAIN_ARRAYS * (ground.terrain.rows > 0)
    share = CACHE_SHARE * (cache or last_cache()) / threads
    for move in (ALIGNED, TERRAIN_REACH):
        for steps in (16, 8, 4):
            stages = ground.frame.phases * steps
            strip = int(share / (BAND * ground.rows.lag * stages * arrays * itemsize))
            if strip >= LEAST_STRIP and width >= threads * least_strip(move, stages):
                return Order(steps, strip)
    return Order(2, LEAST_STRIP)


def least_strip(move: int, stages: int) -> int:
    """Return the columns that a strip needs: what its bounds move by in a pass, and a line for a closed edge, whose
    columns read further than a stage's reach."""
    return move * stages + ALIGNED


def strip_bounds(width: int, strip: int, threads: int, stages: int, reach: int) -> tuple[np.ndarray, int]:
    """Return the bounds of the strips at a pass's first stage, and the columns that those inside move per stage.

    There are about width/strip strips, in a multiple of `threads`, or fewer in a narrow mesh. Bounds lie and move by
    whole cache lines where there is room. In the mean over a pass all strips are about equally wide.
    """
    wanted = threads * max(1, round(width / strip / threads))
    for move in (ALIGNED, reach):
        count = min(wanted, max(1, width // least_strip(move, stages)))
        if count >= min(wanted, threads):
            break
    bounds = np.linspace(0, width, count + 1)
    if count > 1:
        line = ALIGNED if move == ALIGNED else 1
        bounds[1:-1] = (bounds[1:-1] + 0.5 * move * (stages - 1)) // line * line
    return bounds.astype(np.int64), move


class March:
    """Advances fields over a mesh; every call of `advance` ends with all cells at the same step."""

    def __init__(self, mesh, ground: Ground, fields: Fields, sources: Sources, receivers: Receivers, order: Order, threads: int):
        self.mesh, self.ground, self.fields = mesh, ground, fields
        self.sources, self.receivers = sources, receivers
        self.order, self.step = order, 0
        self._scratch = [np.zeros((SCRATCH_ROWS, mesh.pitch), dtype=fields.vx.dtype) for _ in range(threads)]
        self._pool = ThreadPoolExecutor(threads) if threads > 1 and order.strip is not None else None

    def advance(self, steps: int) -> None:
        """Advance `steps` steps; receivers' traces begin at row 0."""
        self.receivers.trace[:steps] = 0.0
        if self.order.strip is None:
            plain_pass(self.step, steps, self.mesh.nx, self.mesh.bands, *self._data, self._scratch[0])
        else:
            passes, rest = divmod(steps, self.order.steps)
            self._go(0, passes, self.order.steps)
            if rest:
                self._go(passes * self.order.steps, 1, rest)
        self.step += steps

    @property
    def _data(self):
        return self.ground, self.fields, self.sources, self.receivers

    def _go(self, done: int, passes: int, steps: int) -> None:
        """Make `passes` passes of `steps` steps, `done` steps after the first of this call."""
        stages = self.ground.frame.phases * steps
        reach = REACH if self.mesh.terrain is None else TERRAIN_REACH
        bounds, move = strip_bounds(self.mesh.nx, self.order.strip, len(self._scratch), stages, reach)
        strips, workers = len(bounds) - 1, min(len(self._scratch), len(bounds) - 1)
        shares = np.linspace(0, strips, workers + 1).round().astype(int)
        progress = np.zeros(strips * SPREAD, dtype=np.int64)

        def work(worker):
            mine = shares[worker], shares[worker + 1], bounds, move
            times = self.step, done, passes, steps, self.mesh.bands
            strip_passes(*mine, *times, *self._data, self._scratch[worker], progress)

        self.side_by_side(work, workers)

    def side_by_side(self, work, count: int) -> None:
        """Call work(0) ... work(count - 1), on all threads if there are several."""
        if self._pool is None or count == 1:
            for number in range(count):
                work(number)
        else:
            list(self._pool.map(work, range(count)))

    def close(self) -> None:
        if self._pool is not None:
            self._pool.shutdown()
