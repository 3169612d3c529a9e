"""One computation: mesh, ground, sources and receivers put together and stepped; no files.

Records are raw (velocity at half steps of the scheme) until `velocity` frees them of time dispersion.
"""

import time as clock_time
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from groundroll.waves import dispersion
from groundroll.waves.assembly import EdgeDamping, Properties, assemble
from groundroll.waves.attenuation import Loss
from groundroll.waves.march import STEPS_A_CALL, March, Order, fitting_order
from groundroll.waves.mesh import Mesh
from groundroll.waves.placement import SIX, Entries, add_force, add_moment, injection, on_surface, receivers
from groundroll.waves.points import Sources
from groundroll.waves.state import new_fields

# Records are computed this many periods of the highest frequency beyond their end, and tapered there.
RUN_OUT = 4.0
# The pulse's spectrum counts as ended where it stays below this part of its peak.
SPECTRUM_END = 1e-6
# A rough pulse has no end; what lies above this multiple of the highest frequency is left out of the records.
WIDEST = 5.0


@dataclass(frozen=True)
class PointSource:
    """A point source at (x, depth) m: `force` (Fx, Fz) N/m or `moment` (Mxx, Mzz, Mxz) N, times pulse(t)."""

    x: float
    depth: float
    pulse: Callable
    force: tuple[float, float] | None = None
    moment: tuple[float, float, float] | None = None


@dataclass(frozen=True)
class Clock:
    """Time step (s), steps of the whole run, duration of the records and highest frequency kept (Hz)."""

    dt: float
    steps: int
    duration: float
    top: float


def clock(duration: float, dt: float, highest_frequency: float, pulses) -> Clock:
    """Return the clock of a run whose records last `duration` s.

    The scheme's own time runs behind at frequency f by about (2 pi f dt)^2 / 24 of the time passed and its
    group delay by three times that, so the run goes on until the slowest component kept has come in.
    """
    end = max([highest_frequency, *(spectrum_end(p, duration, dt) for p in pulses)])
    # A record fades out over the last quarter below `top`, see `dispersion.correct`.
    top = min(end / 0.75, WIDEST * highest_frequency, 0.25 / dt)
    late = duration * (2.0 * np.pi * highest_frequency * dt) ** 2 / 8.0
    steps = int(np.ceil((duration + late + RUN_OUT / highest_frequency) / dt)) + 1
    return Clock(dt, steps, duration, top)


def spectrum_end(pulse, duration: float, dt: float) -> float:
    """Return the frequency (Hz) above which the pulse's amplitude spectrum stays below SPECTRUM_END of its peak."""
    samples = pulse(dt * np.arange(int(duration / dt) + 1))
    amplitude = np.abs(np.fft.rfft(samples, 4 * len(samples)))
    loud = np.flatnonzero(amplitude > SPECTRUM_END * amplitude.max())
    return loud[-1] / (4 * len(samples) * dt) if len(loud) else 0.0


class Simulation:
    """Steps the momentum equation on `mesh`; `traces` (step, receiver, 2) holds raw vx, vz at (n + 1/2) dt."""

    def __init__(
        self,
        mesh: Mesh,
        properties: Properties,
        damping: EdgeDamping,
        time: Clock,
        sources: list[PointSource],
        points: list[tuple[float, float]],
        dtype=np.float32,
        order: Order | None = None,
        threads: int = 1,
        loss: Loss | None = None,
    ):
        self.mesh, self.clock, self.properties = mesh, time, properties
        self._sources, self._series = sources, predistorted(sources, time)
        ground = assemble(mesh, properties, time.dt, damping, dtype, loss)
        order = order or fitting_order(ground, mesh.nx, np.dtype(dtype).itemsize, threads)
        self.longest_call = max(order.steps, STEPS_A_CALL // order.steps * order.steps)
        self.march = March(
            mesh,
            ground,
            new_fields(mesh, dtype),
            inject(mesh, properties, sources, self._series, time.dt, dtype),
            receivers(mesh, points, self.longest_call),
            order,
            threads,
        )
        self.traces = np.zeros((time.steps, len(points), 2))

    @property
    def step(self) -> int:
        return self.march.step

    def advance(self, steps: int) -> None:
        """Advance up to `steps` steps, call by call, and keep what the receivers read."""
        end = min(self.step + steps, self.clock.steps)
        while self.step < end:
            n = min(self.longest_call, end - self.step)
            start = self.step
            self.march.advance(n)
            by_column = self.march.receivers.trace[:n].reshape(n, self.traces.shape[1], 2, SIX)
            self.traces[start : start + n] = by_column.sum(axis=3)

    def motion(self, times: np.ndarray, quantity: str = "velocity") -> np.ndarray:
        """Return `quantity` (receiver, 2, time) at `times` (s), freed of time dispersion, of the steps done so far.

        Past the last step velocity is zero; the last half of RUN_OUT periods before it are faded out.
        """
        n = max(self.step, 2)
        done = self.traces[:n].transpose(1, 2, 0).reshape(-1, n)
        if not len(done):
            return np.zeros((0, 2, len(times)))
        start = 0.5 * self.clock.dt
        clean = dispersion.correct(done * self._fade(n), self.clock.dt, times, self.clock.top, start, quantity)
        return clean.reshape(-1, 2, len(times))

    def velocity(self, times: np.ndarray) -> np.ndarray:
        """Return velocity (receiver, 2, time), see `motion`."""
        return self.motion(times, "velocity")

    def impulse(self) -> np.ndarray:
        """Return the impulse (N s/m) that the forces have given after each step, (step, 2).

        A force acts as dt F s(n dt); a surface traction is prescribed by increments, so it acts as s(n dt) - s(0).
        """
        total = np.zeros((self.clock.steps, 2))
        for source, series in zip(self._sources, self._series, strict=True):
            for component, amount in enumerate(source.force or (0.0, 0.0)):
                prescribed = component == 1 and self.mesh.terrain is None and on_surface(self.mesh, source.depth)
                acting = series[:-1] - (series[0] if prescribed else 0.0)
                total[:, component] += self.clock.dt * amount * np.cumsum(acting)
        return total

    def warm_up(self) -> float:
        """Compile the kernels, or load them from the cache, without taking a step; return the seconds it took."""
        start = clock_time.perf_counter()
        self.march.advance(0)
        return clock_time.perf_counter() - start

    def close(self) -> None:
        """Let the worker threads go."""
        self.march.close()

    def _fade(self, n: int) -> np.ndarray:
        length = min(n, int(0.5 * RUN_OUT / self.clock.top / self.clock.dt))
        fade = np.ones(n)
        if length:
            fade[-length:] = 0.5 + 0.5 * np.cos(np.pi * (np.arange(length) + 0.5) / length)
        return fade


def predistorted(sources: list[PointSource], time: Clock) -> np.ndarray:
    """Return the sources' series (source, steps + 1), predistorted for the scheme's time dispersion."""
    fine = time.dt * np.arange(time.steps + 1)
    series = [dispersion.predistort(s.pulse(fine), fine, time.dt, time.steps + 1, top=time.top) for s in sources]
    return np.array(series).reshape(len(sources), time.steps + 1)


def inject(mesh, properties, sources, series, dt: float, dtype) -> Sources:
    """Place all sources with their `series` (source, steps + 1)."""
    forces, moments = Entries(), Entries()
    for number, source in enumerate(sources):
        if source.force is not None:
            add_force(mesh, properties, forces, moments, source.x, source.depth, source.force, number, dt)
        if source.moment is not None:
            add_moment(mesh, properties, moments, source.x, source.depth, source.moment, number)
    return Sources(
        injection(mesh, forces, series[:, :-1], dtype),
        injection(mesh, moments, np.diff(series, axis=1), dtype),
    )
