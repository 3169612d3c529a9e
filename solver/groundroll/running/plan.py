"""The plan of a run: everything chosen and checked before anything is computed."""

import math
import os
import shutil
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from groundroll.errors import InputError
from groundroll.ground.model import GroundModel, build_ground
from groundroll.running import choices, machine
from groundroll.running.choices import Choice
from groundroll.running.grading import grade
from groundroll.running.losses import LossModel, fastest_unrelaxed, loss_model
from groundroll.running.pulses_of import pulse_function, resolved_delay
from groundroll.scenario import Scenario
from groundroll.waves import absorbing
from groundroll.waves.mesh import Mesh, even_mesh, with_depths, with_terrain
from groundroll.waves.simulation import Clock, clock

# A section is at least this many times deeper than the relief of its ground, and no slope steeper than this.
LEAST_FADE, STEEPEST = 2.0, 1.0
# Flat arrays a run holds: five fields and six properties.
ARRAYS = 11


@dataclass(frozen=True)
class Plan:
    """What a run will do; `print(plan)` shows it.

    `scenario` has every default spelled out; `model` is its ground; `mesh`, `clock`, `choice` are as in
    their own modules; `losses` its attenuation or None, `fastest` its fastest wave (m/s); `memory` and `disk` in bytes, `seconds`
    the expected time of stepping.
    """

    scenario: Scenario
    model: GroundModel
    mesh: Mesh
    clock: Clock
    choice: Choice
    pulses: list = field(repr=False)
    losses: LossModel | None
    fastest: float
    memory: float
    disk: float
    seconds: float
    warnings: list[str]

    @property
    def dtype(self):
        return np.float32 if self.scenario.mesh.precision == "single" else np.float64

    def __str__(self) -> str:
        return plan_text(self)


def plan(scenario: Scenario, threads: int | None = None) -> Plan:
    """Choose mesh and time step, estimate the cost and collect warnings. Runs nothing.

    Raises InputError where the scenario cannot be computed as it stands.
    """
    refuse_unknown_to_the_solver(scenario)
    pulses = [pulse_function(s.pulse, scenario.folder) for s in scenario.sources]
    model = build_ground(scenario, choices.provisional_spacing(scenario))
    choice = choices.choose_spacing(scenario, model)
    model = build_ground(scenario, choice.spacing)
    losses = loss_model(scenario, model)
    fastest = fastest_unrelaxed(scenario, model, losses)
    mesh = make_mesh(scenario, model, choice)
    dt = choices.time_step(mesh, fastest)
    time = clock(scenario.section.duration, dt, scenario.section.highest_frequency, pulses)
    resolved = resolve(scenario, choice.spacing)
    made = Plan(
        scenario=resolved,
        model=model,
        mesh=mesh,
        clock=time,
        choice=choice,
        pulses=pulses,
        losses=losses,
        fastest=fastest,
        memory=memory(scenario, mesh, time),
        disk=disk(resolved, mesh),
        seconds=mesh.cells * time.steps / machine.expected_rate(threads),
        warnings=[],
    )
    refuse_too_large(made)
    made.warnings.extend(warnings(made))
    return made


def refuse_unknown_to_the_solver(scenario: Scenario) -> None:
    """Refuse what the scenario file knows and the solver does not compute yet."""
    if scenario.section.geometry == "point":
        raise InputError('section.geometry: "point" is not computed yet; allowed "line"; remove the key')


def make_mesh(scenario: Scenario, model: GroundModel, choice: Choice) -> Mesh:
    """Return the mesh: even or graded in depth, level or laid under the terrain."""
    edges, section = scenario.mesh.edges, scenario.section
    conditions = (edges.left, edges.right, edges.top, edges.bottom)
    # The level mesh begins at the middle of the relief and ends at section.depth below the datum.
    heights = model.surface_elevation(np.linspace(0.0, section.length, 2001))
    depth = section.depth + 0.5 * float(heights.max() + heights.min())
    if scenario.mesh.graded:
        grading = grade(model, choice.spacing, depth, choices.surface_wavelength(scenario, model))
        rows = math.ceil(grading.zeta_at(depth) / choice.spacing - 1e-9)
        mesh = even_mesh(choice.spacing, section.length, rows * choice.spacing, conditions, edge_recipe(model).cells)
        mesh = with_depths(mesh, grading.depth_of, grading.stretch_of)
    else:
        mesh = even_mesh(choice.spacing, section.length, depth, conditions, edge_recipe(model).cells)
    if scenario.ground.terrain is None:
        return mesh
    refuse_steep_relief(scenario, model)
    return with_terrain(mesh, model.surface_elevation, model.surface_slope)


def edge_recipe(model: GroundModel) -> absorbing.Recipe:
    """Return how the absorbing layers damp: ground of more than one material guides waves."""
    return absorbing.UNIFORM if model.of_one_material else absorbing.GUIDING


def refuse_steep_relief(scenario: Scenario, model: GroundModel) -> None:
    """Refuse terrain that the mesh cannot follow: closed sides, a relief too great for the depth, cliffs."""
    edges, section = scenario.mesh.edges, scenario.section
    if edges.top != "free":
        raise InputError('mesh.edges.top: "absorb" does not go with ground.terrain; allowed: "free"; remove [ground.terrain] or the key')
    x = np.linspace(0.0, section.length, 2001)
    heights, slopes = model.surface_elevation(x), np.abs(model.surface_slope(x))
    relief = float(heights.max() - heights.min())
    if section.depth < LEAST_FADE * relief:
        raise InputError(
            f"section.depth: {section.depth:g} m is too shallow for a relief of {relief:.4g} m; "
            f"allowed: at least {LEAST_FADE:g} times the relief; write section.depth = {math.ceil(LEAST_FADE * relief):g}"
        )
    if slopes.max() > STEEPEST:
        place = float(x[slopes.argmax()])
        raise InputError(
            f"ground.terrain: the slope at x = {place:.4g} m is {np.degrees(np.arctan(slopes.max())):.0f} degrees; "
            f"allowed: up to {np.degrees(np.arctan(STEEPEST)):.0f} degrees; flatten the terrain there"
        )


def resolve(scenario: Scenario, spacing: float) -> Scenario:
    """Return the scenario with the planner's choices and all delays written out."""
    sources = tuple(
        s.model_copy(update={"pulse": s.pulse.model_copy(update={"delay": resolved_delay(s.pulse)})})
        for s in scenario.sources
    )
    copy = scenario.model_copy(
        update={
            "mesh": scenario.mesh.model_copy(update={"spacing": spacing}),
            "output": scenario.output.model_copy(update={"sample_interval": choices.sample_interval(scenario)}),
            "ground": scenario.ground.model_copy(update={"reference_frequency": choices.reference_frequency(scenario)}),
            "sources": sources,
        }
    )
    copy._text, copy._folder = scenario.text, scenario.folder
    return copy


def receiver_count(scenario: Scenario) -> int:
    return sum(line.count if line.count is not None else len(line.at) for line in scenario.receivers)


def memory(scenario: Scenario, mesh: Mesh, time: Clock) -> float:
    """Return the bytes a run holds at its height: arrays, property set-up and raw records."""
    item = 4 if scenario.mesh.precision == "single" else 8
    arrays = ARRAYS * mesh.padded_rows * mesh.pitch * item
    setup = 8 * 8 * mesh.cells
    return arrays + setup + 16.0 * time.steps * receiver_count(scenario)


def disk(scenario: Scenario, mesh: Mesh) -> float:
    """Return the bytes of the records before compression."""
    samples = len(choices.sample_times(scenario)) * receiver_count(scenario)
    total = 2.0 * 4 * samples * len(scenario.output.quantities)
    if scenario.snapshots is not None:
        rows, columns = mesh.depth_node[mesh.section_rows].size, mesh.x_node[mesh.section_columns].size
        frames = int(scenario.section.duration / scenario.snapshots.every) + 1
        total += 4.0 * frames * rows * columns * len(scenario.snapshots.fields)
    return total


def refuse_too_large(made: Plan) -> None:
    available = os.sysconf("SC_PHYS_PAGES") * os.sysconf("SC_PAGE_SIZE")
    if made.memory > 0.9 * available:
        fit = made.choice.spacing * math.sqrt(made.memory / (0.8 * available))
        raise InputError(
            f"mesh: {made.mesh.cells / 1e6:.0f} million cells need {made.memory / 1e9:.1f} GB of memory; "
            f"this machine has {available / 1e9:.1f} GB; write mesh.spacing = {fit:.2g} or a smaller section"
        )


def warnings(made: Plan) -> list[str]:
    """Return what the user should know before running, each with a way out."""
    scenario, choice = made.scenario, made.choice
    found = []
    if choice.misfit > scenario.mesh.accuracy:
        found.append(
            f"expected error {100 * choice.misfit:.2g} % is above the accuracy asked for "
            f"({100 * scenario.mesh.accuracy:.2g} %) over {choice.wavelengths:.0f} wavelengths: "
            + ("use a smaller mesh.spacing" if choice.points_per_wavelength < 9.9 else "a finer mesh would gain little")
        )
    for source, pulse in zip(scenario.sources, made.pulses, strict=True):
        share = share_above(pulse, scenario.section.highest_frequency, scenario.section.duration, made.clock.dt)
        if share > 0.02:
            found.append(
                f'source "{source.name}": {100 * share:.2g} % of its pulse (root energy) lies above highest_frequency '
                f"= {scenario.section.highest_frequency:g} Hz and is not computed accurately: raise it or use a smoother pulse"
            )
    slowest = 0.9 * made.model.slowest_shear
    arrival = choices.longest_path(scenario) / slowest
    if arrival > scenario.section.duration:
        found.append(
            f"the slowest surface wave needs about {arrival:.2g} s to the farthest receiver, longer than section.duration = "
            f"{scenario.section.duration:g} s"
        )
    return found


def share_above(pulse, frequency: float, duration: float, dt: float) -> float:
    """Return the root of the share of a pulse's energy that lies above `frequency` (Hz)."""
    energy = np.abs(np.fft.rfft(pulse(dt * np.arange(int(duration / dt) + 1)))) ** 2
    above = np.fft.rfftfreq(int(duration / dt) + 1, dt) > frequency
    return float(np.sqrt(energy[above].sum() / max(energy.sum(), 1e-300)))


def plan_text(made: Plan) -> str:
    """Return the plan as the command line prints it."""
    mesh, time, choice = made.mesh, made.clock, made.choice
    rows = [
        ("spacing", f"{choice.spacing:.4g} m ({choice.points_per_wavelength:.1f} points per shortest wavelength)"),
        ("mesh", f"{mesh.nx} x {mesh.nz} = {mesh.cells / 1e6:.2f} million cells, absorbing layers included"),
        *grading_rows(made),
        ("time step", f"{time.dt:.4g} s, {time.steps} steps for {time.duration:g} s"),
        *attenuation_rows(made),
        ("precision", made.scenario.mesh.precision),
        ("memory", size_text(made.memory)),
        ("disk", f"at most {size_text(made.disk)}"),
        ("time", f"about {duration_text(made.seconds)} of stepping"),
        ("expected error", f"{100 * choice.misfit:.2g} % of a trace after {choice.wavelengths:.0f} wavelengths (numerical, not geological)"),
    ]
    lines = [f"{key:<16}{value}" for key, value in rows]
    return "\n".join(lines + [f"warning: {text}" for text in made.warnings])


def grading_rows(made: Plan) -> list[tuple[str, str]]:
    if not made.scenario.mesh.graded:
        return []
    mesh = made.mesh
    even = even_mesh(mesh.spacing, made.scenario.section.length, made.scenario.section.depth, mesh.edges, edge_recipe(made.model).cells).cells
    deepest = mesh.spacing * mesh.stretch_node[mesh.section_rows][-1]
    return [("graded", f"rows grow from {mesh.spacing:.3g} to {deepest:.3g} m; {even / mesh.cells:.1f} times fewer cells than an even mesh")]


def attenuation_rows(made: Plan) -> list[tuple[str, str]]:
    if made.losses is None:
        return []
    low, high = made.losses.low, made.losses.high
    worst = max(made.losses.worst_fit(q) for q in (10.0, 30.0, 100.0))
    text = f"Q constant within {100 * worst:.1f} % from {low:.3g} to {high:.3g} Hz; speeds meant at {made.losses.reference:.3g} Hz"
    return [("attenuation", text)]


def size_text(size: float) -> str:
    return f"{size / 1e9:.1f} GB" if size >= 1e9 else f"{max(size / 1e6, 0.1):.1f} MB"


def duration_text(seconds: float) -> str:
    if seconds < 90.0:
        return f"{max(seconds, 1.0):.0f} s"
    return f"{seconds / 60.0:.0f} min" if seconds < 5400.0 else f"{seconds / 3600.0:.1f} h"


def room_for(made: Plan, folder: Path) -> None:
    """Refuse a run whose records do not fit on the disk of `folder`."""
    place = next(p for p in [folder, *folder.resolve().parents] if p.exists())
    free = shutil.disk_usage(place).free
    if made.disk > free:
        raise InputError(
            f"{folder}: the records take up to {size_text(made.disk)}; {size_text(free)} are free; "
            "write a larger snapshots.every or choose another folder with --out"
        )
