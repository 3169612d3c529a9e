"""What happens besides stepping, each at steps fixed beforehand: seismograms, snapshots, ledger, watch.

An observer has `due`, the sorted steps after which it wants to be called, and `see(simulation)`.
"""

import numpy as np

from groundroll.errors import ComputationError
from groundroll.records import RecordsWriter, SnapshotFrame
from groundroll.waves.ledger import Ledger
from groundroll.waves.simulation import Simulation
from groundroll.waves.state import inner

COMPONENTS = ("x", "z")


def even_steps(count: int, last: int) -> list[int]:
    """Return up to `count` steps spread evenly over 1..last, the last one included."""
    return sorted({int(s) for s in np.linspace(0, last, count + 1)[1:]})


class Seismograms:
    """Writes all records so far, corrected, at half time and at the end."""

    def __init__(self, writer: RecordsWriter, lines, quantities, times: np.ndarray, steps: int):
        self._writer, self._lines, self._quantities, self._times = writer, lines, quantities, times
        self.due = even_steps(2, steps)

    def see(self, simulation: Simulation) -> None:
        done = simulation.step * simulation.clock.dt
        times = self._times if simulation.step >= simulation.clock.steps else self._times[self._times <= done]
        if len(times) < 2:
            return
        start = 0
        motion = {q: simulation.motion(times, q) for q in self._quantities}
        for line in self._lines:
            chosen = slice(start, start + len(line.x))
            parts = {f"{q}_{c}": motion[q][chosen, k] for q in self._quantities for k, c in enumerate(COMPONENTS)}
            self._writer.put_seismograms(line.name, times, parts)
            start = chosen.stop


class Snapshots:
    """Writes the velocity over the section; its time is that of the half step nearest to the one asked for."""

    def __init__(self, writer: RecordsWriter, frame: SnapshotFrame, every: float, duration: float, dt: float):
        self._writer, self._fields = writer, frame.fields
        wanted = every * np.arange(int(duration / every + 1e-9) + 1)
        # After n steps velocity stands at (n - 1/2) dt.
        self.due = sorted({max(1, round(t / dt + 0.5)) for t in wanted})

    def see(self, simulation: Simulation) -> None:
        mesh, fields = simulation.mesh, simulation.march.fields
        section = (mesh.section_rows, mesh.section_columns)
        arrays = {"velocity_x": at_nodes(inner(fields.vx, mesh), 1)[section], "velocity_z": at_nodes(inner(fields.vz, mesh), 0)[section]}
        time = (simulation.step - 0.5) * simulation.clock.dt
        self._writer.add_snapshot(time, {name: arrays[name] for name in self._fields})


def at_nodes(values: np.ndarray, axis: int) -> np.ndarray:
    """Return values given at half points along `axis` as means of both neighbours, at the nodes."""
    out = np.array(values)
    later = tuple(slice(1, None) if a == axis else slice(None) for a in range(2))
    earlier = tuple(slice(None, -1) if a == axis else slice(None) for a in range(2))
    out[later] = 0.5 * (values[later] + values[earlier])
    return out


class Totals:
    """Keeps the ledger of momentum and energy, and stops a run whose energy is no longer a number."""

    COUNT = 40

    def __init__(self, writer: RecordsWriter, simulation: Simulation):
        self._writer = writer
        self._ledger = Ledger(simulation.mesh, simulation.march, simulation.clock.dt)
        self._impulse = simulation.impulse()
        self.warm_up = self._ledger.warm_up
        self.due = even_steps(self.COUNT, simulation.clock.steps)

    def see(self, simulation: Simulation) -> None:
        values = self._ledger.note()
        if not np.isfinite(values).all():
            raise ComputationError(
                f"the fields grew beyond all bounds by step {simulation.step} "
                f"(t = {simulation.step * simulation.clock.dt:.4g} s); what was recorded before is kept; "
                "report the scenario, or try a smaller mesh.spacing"
            )
        steps, table = np.array(self._ledger.steps), np.array(self._ledger.values)
        impulse = self._impulse[steps - 1]
        self._writer.put_ledger(
            (steps - 0.5) * simulation.clock.dt,
            {
                "momentum_x": (table[:, 0], "N s m-1", "momentum along x of the section, absorbing layers left out"),
                "momentum_z": (table[:, 1], "N s m-1", "downward momentum of the section, absorbing layers left out"),
                "kinetic_energy": (table[:, 2], "J m-1", "kinetic energy of the section"),
                "strain_energy": (table[:, 3], "J m-1", "strain energy of the section, discrete form whose sum with the kinetic is constant"),
                "impulse_x": (impulse[:, 0], "N s m-1", "impulse of the source forces along x so far"),
                "impulse_z": (impulse[:, 1], "N s m-1", "downward impulse of the source forces so far"),
            },
        )
