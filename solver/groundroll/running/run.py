"""Run one scenario: plan, set up, step, record."""

import hashlib
import time
from datetime import UTC, datetime
from importlib.metadata import version
from pathlib import Path

import numpy as np

from groundroll.errors import Interrupted, StorageError
from groundroll.records import Records, RecordsWriter, SnapshotFrame
from groundroll.running import choices, machine, scene
from groundroll.running.error_law import PEAK_TO_HIGHEST
from groundroll.running.ground_on_mesh import OnMesh, sample
from groundroll.running.interruption import Interruption
from groundroll.running.observers import Seismograms, Snapshots, Totals
from groundroll.running.plan import Plan, edge_recipe, plan, room_for
from groundroll.running.progress import progress_for
from groundroll.scenario import Scenario
from groundroll.waves.absorbing import EdgeDamping
from groundroll.waves.march import Order
from groundroll.waves.simulation import PointSource, Simulation


def run(
    scenario: Scenario, out: str | Path | None = None, threads: int | None = None, quiet: bool = True, order: Order | None = None
) -> Records:
    """Compute `scenario` and return its records, written to the folder `out` or kept in memory (None).

    `threads` and the marching `order` change the speed and not a bit of the records; both are chosen if not given.

    Raises InputError before anything is written, ComputationError if the fields blow up, StorageError if
    records cannot be written, Interrupted on Ctrl-C; what was recorded until then is kept in the folder.
    """
    made = plan(scenario, threads)
    folder = None if out is None else Path(out)
    if folder is not None:
        room_for(made, folder)
        make_folder(folder)
    threads = threads or machine.available_threads()
    lines = [scene.receiver_line(line, made.model) for line in scenario.receivers]
    frame = snapshot_frame(made)
    texts = {"scenario": scenario.text or scenario.resolved_text(), "resolved": made.scenario.resolved_text()}
    with RecordsWriter(folder, lines, frame, provenance(made, threads), texts) as writer:
        if folder is not None:
            (folder / "scenario.toml").write_text(texts["scenario"], encoding="utf-8")
            (folder / "resolved.toml").write_text(texts["resolved"], encoding="utf-8")
            (folder / "run.log").write_text(f"{made}\n", encoding="utf-8")
        writer.put_scene(**scene.describe(made))
        seconds = compute(made, lines, frame, writer, threads, quiet, order)
        writer.finish(True, **seconds)
        if folder is not None:
            note_end(folder, made, seconds)
    return writer.records()


def make_folder(folder: Path) -> None:
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise StorageError(f"{folder}: the folder cannot be made ({error.strerror}); choose another with --out") from error


def provenance(made: Plan, threads: int) -> dict:
    return {
        "version": version("groundroll"),
        "scenario_sha256": hashlib.sha256((made.scenario.text or made.scenario.resolved_text()).encode()).hexdigest(),
        "created": datetime.now(UTC).isoformat(timespec="seconds"),
        "mesh_cells": made.mesh.cells,
        "spacing": made.mesh.spacing,
        "time_step": made.clock.dt,
        "steps": made.clock.steps,
        "threads": threads,
        "precision": made.scenario.mesh.precision,
        "expected_error": made.choice.misfit,
        "points_per_wavelength": made.choice.points_per_wavelength,
        "highest_frequency": made.scenario.section.highest_frequency,
        "axes": "x right, z and depth down: velocity_z > 0 is downward motion",
        "warnings": "\n".join(made.warnings),
    }


def snapshot_frame(made: Plan) -> SnapshotFrame | None:
    if made.scenario.snapshots is None:
        return None
    mesh = made.mesh
    elevation = mesh.node_elevation()
    if elevation is not None:
        elevation = elevation[mesh.section_rows, mesh.section_columns]
    x, z = mesh.x_node[mesh.section_columns], mesh.depth_node[mesh.section_rows]
    return SnapshotFrame(made.scenario.snapshots.fields, x, z, elevation)


def point_sources(made: Plan) -> list[PointSource]:
    """Return the scenario's sources as the solver takes them."""
    found = []
    for source, pulse in zip(made.scenario.sources, made.pulses, strict=True):
        depth = scene.source_depth(source, made.model)
        if source.kind == "force":
            found.append(PointSource(source.x, depth, pulse, force=source.force))
        else:
            moment = source.moment if source.kind == "moment" else (source.moment, source.moment, 0.0)
            found.append(PointSource(source.x, depth, pulse, moment=moment))
    return found


def set_up(made: Plan, ground: OnMesh, lines, threads: int, order: Order | None = None) -> Simulation:
    """Place everything on the mesh."""
    points = [(x, depth) for line in lines for x, depth in zip(line.x, line.depth, strict=True)]
    shift = np.pi * made.scenario.section.highest_frequency / PEAK_TO_HIGHEST
    damping = EdgeDamping(made.fastest, shift, edge_recipe(made.model))
    sources = point_sources(made)
    return Simulation(made.mesh, ground.properties, damping, made.clock, sources, points, made.dtype, order, threads, ground.loss)


def compute(made: Plan, lines, frame, writer: RecordsWriter, threads: int, quiet: bool, order: Order | None) -> dict:
    """Step through the run, calling each observer at its steps; return the seconds spent."""
    ground = sample(made.model, made.mesh, made.losses)
    simulation = set_up(made, ground, lines, threads, order)
    writer.put_ground(*scene.ground_arrays(made, ground.shown))
    announce_compiling(quiet)
    totals = Totals(writer, simulation)
    compile_seconds = simulation.warm_up() + totals.warm_up()
    times = choices.sample_times(made.scenario)
    observers = [totals, Seismograms(writer, lines, made.scenario.output.quantities, times, made.clock.steps)]
    if frame is not None:
        every = made.scenario.snapshots.every
        observers.append(Snapshots(writer, frame, every, made.clock.duration, made.clock.dt))
    progress = progress_for(made.clock.steps, made.mesh.cells, quiet)
    observers.append(progress)
    try:
        stepping, recording = march_through(simulation, observers)
    except KeyboardInterrupt:
        observers[1].see(simulation)
        done = simulation.step * made.clock.dt
        raise Interrupted(f"interrupted at t = {done:.4g} s of {made.clock.duration:g} s; what was recorded is kept") from None
    finally:
        progress.close()
        simulation.close()
    machine.remember_rate(made.mesh.cells * made.clock.steps / max(stepping, 1e-9), threads)
    return {"stepping_seconds": stepping, "recording_seconds": recording, "compile_seconds": compile_seconds}


def announce_compiling(quiet: bool) -> None:
    if not quiet and not machine.has_compiled():
        print("compiling the kernels: half a minute or so, once for this version", flush=True)


def march_through(simulation: Simulation, observers) -> tuple[float, float]:
    """Advance to the end, stopping at every step that an observer has asked for.

    Return the seconds of stepping and those of the observers.

    Raises KeyboardInterrupt after the pass, or the observers' call, during which the user pressed Ctrl-C.
    """
    stops = sorted({step for o in observers for step in o.due if step < simulation.clock.steps} | {simulation.clock.steps})
    waiting = {id(o): set(o.due) for o in observers}
    stepping, begun = 0.0, time.perf_counter()
    with Interruption() as interruption:
        for stop in stops:
            start = time.perf_counter()
            while simulation.step < stop:
                simulation.advance(min(simulation.longest_call, stop - simulation.step))
                interruption.obey()
            stepping += time.perf_counter() - start
            for observer in observers:
                if stop in waiting[id(observer)]:
                    observer.see(simulation)
            interruption.obey()
    return stepping, time.perf_counter() - begun - stepping


def note_end(folder: Path, made: Plan, seconds: dict) -> None:
    rate = made.mesh.cells * made.clock.steps / max(seconds["stepping_seconds"], 1e-9) / 1e6
    with (folder / "run.log").open("a", encoding="utf-8") as log:
        log.write(f"stepped {seconds['stepping_seconds']:.1f} s ({rate:.0f} million cell-steps/s), compiled {seconds['compile_seconds']:.1f} s; complete\n")
