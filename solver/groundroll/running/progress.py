"""Progress of a run: a bar with rate and time left in a terminal, a line every few per cent in a log."""

import sys
import time

from rich.progress import BarColumn, Progress, TextColumn, TimeRemainingColumn

from groundroll.running.observers import even_steps
from groundroll.waves.simulation import Simulation


class Quiet:
    """Shows nothing."""

    due: list[int] = []

    def see(self, simulation: Simulation) -> None:
        pass

    def close(self) -> None:
        pass


class LogLines:
    """Prints a line every 5 per cent."""

    def __init__(self, steps: int, cells: int):
        self.due, self._cells, self._start = even_steps(20, steps), cells, time.perf_counter()

    def see(self, simulation: Simulation) -> None:
        done, total = simulation.step, simulation.clock.steps
        rate = self._cells * done / max(time.perf_counter() - self._start, 1e-9)
        left = (total - done) * self._cells / rate
        print(f"{100 * done // total:3d} %  step {done} of {total}, {rate / 1e6:.0f} million cell-steps/s, {left:.0f} s left", flush=True)

    def close(self) -> None:
        pass


class Bar:
    """Draws a progress bar on the terminal."""

    def __init__(self, steps: int, cells: int):
        self.due, self._cells = even_steps(200, steps), cells
        columns = (TextColumn("stepping"), BarColumn(), TextColumn("{task.percentage:3.0f} %"), TextColumn("{task.fields[rate]}"), TimeRemainingColumn())
        self._progress = Progress(*columns, transient=True)
        self._task = self._progress.add_task("", total=steps, rate="")
        self._progress.start()
        self._start = time.perf_counter()

    def see(self, simulation: Simulation) -> None:
        rate = self._cells * simulation.step / max(time.perf_counter() - self._start, 1e-9)
        self._progress.update(self._task, completed=simulation.step, rate=f"{rate / 1e6:.0f} million cell-steps/s")

    def close(self) -> None:
        self._progress.stop()


def progress_for(steps: int, cells: int, quiet: bool):
    """Return what fits: nothing if `quiet`, a bar on a terminal, log lines elsewhere."""
    if quiet:
        return Quiet()
    return Bar(steps, cells) if sys.stdout.isatty() else LogLines(steps, cells)
