"""What the planner chooses: spacing, time step, sampling; by the error law and the stability limit."""

import math
from dataclasses import dataclass

import numpy as np

from groundroll.ground.model import GroundModel
from groundroll.running.error_law import PEAK_TO_HIGHEST, expected_misfit, needed_points
from groundroll.scenario import Scenario
from groundroll.waves.cell import INTERIOR
from groundroll.waves.mesh import Mesh

# Share of the stability limit at which the time step is set; time dispersion is removed, so it costs nothing.
COURANT_SHARE = 0.95
# Limit of Vp dt/h at a softened surface without slope (kappa = 0.3), measured.
TERRAIN_LIMIT = 0.516


@dataclass(frozen=True)
class Choice:
    """Spacing h (m), points per wavelength, distance in dominant wavelengths and expected misfit."""

    spacing: float
    points_per_wavelength: float
    wavelengths: float
    misfit: float


def longest_path(scenario: Scenario) -> float:
    """Return the greatest distance (m) from a source to a receiver, or the section's length without any."""
    places = [p for line in scenario.receivers for _, p in line.places()]
    gaps = [math.dist((s.x, s.depth), p) for s in scenario.sources for p in places]
    return max(gaps, default=scenario.section.length)


def choose_spacing(scenario: Scenario, model: GroundModel) -> Choice:
    """Choose the spacing that meets `accuracy`, or judge the user's own."""
    frequency = scenario.section.highest_frequency
    shortest = model.slowest_shear / frequency
    wavelengths = longest_path(scenario) / (shortest * PEAK_TO_HIGHEST)
    spacing = scenario.mesh.spacing
    if spacing is None:
        spacing = rounded_down(shortest / needed_points(scenario.mesh.accuracy, wavelengths))
    spacing = fitted(spacing, scenario)
    points = shortest / spacing
    return Choice(spacing, points, wavelengths, expected_misfit(points, wavelengths))


def rounded_down(value: float, digits: int = 2) -> float:
    """Return `value` rounded down to `digits` significant digits."""
    unit = 10.0 ** (math.floor(math.log10(value)) - digits + 1)
    return round(math.floor(value / unit + 1e-9) * unit, 12)


def fitted(spacing: float, scenario: Scenario) -> float:
    """Return the spacing made to divide the section's length if both of its ends are closed, else as it is."""
    edges, section = scenario.mesh.edges, scenario.section
    if edges.left != "absorb" or edges.right != "absorb":
        return section.length / math.ceil(section.length / spacing - 1e-9)
    if edges.bottom != "absorb":
        return section.depth / math.ceil(section.depth / spacing - 1e-9)
    return spacing


def stable_step(mesh: Mesh, fastest: float) -> float:
    """Return a stable time step (s) of `mesh` where waves are at most `fastest` (m/s).

    On a level mesh the limit is h / (Vp sum|c| sqrt(1 + 1/J^2)), with J >= 1 its least at J = 1. Under
    terrain it is h / (Vp sum|c| sqrt((1 + |q|/J)^2 + 1/J^2)), and TERRAIN_LIMIT h/Vp at the softened surface.
    """
    total = sum(abs(c) for c in INTERIOR)
    if mesh.terrain is None:
        stretch = min(mesh.stretch_node.min(), mesh.stretch_half.min())
        return mesh.spacing / (total * math.sqrt(1.0 + stretch**-2) * fastest)
    stretch, skew = mesh.terrain.stretch(False, False), np.abs(mesh.terrain.skew(False, False))
    interior = float((1.0 / (total * np.sqrt((1.0 + skew / stretch) ** 2 + stretch**-2))).min())
    return min(interior, TERRAIN_LIMIT) * mesh.spacing / fastest


def time_step(mesh: Mesh, fastest: float) -> float:
    return rounded_down(COURANT_SHARE * stable_step(mesh, fastest), 4)


def sample_interval(scenario: Scenario) -> float:
    """Return the asked interval of the seismograms, or at least ten samples a period of the highest frequency."""
    if scenario.output.sample_interval is not None:
        return scenario.output.sample_interval
    finest = 0.1 / scenario.section.highest_frequency
    decade = 10.0 ** math.floor(math.log10(finest))
    return float(max(s * decade for s in (1.0, 2.0, 5.0) if s * decade <= finest * (1.0 + 1e-9)))


def sample_times(scenario: Scenario) -> np.ndarray:
    """Return t = 0, dt, 2 dt, ... up to the duration."""
    interval = sample_interval(scenario)
    return interval * np.arange(int(scenario.section.duration / interval + 1e-9) + 1)


def reference_frequency(scenario: Scenario) -> float | None:
    """Return the frequency at which vp and vs are phase speeds: given, or the middle of the band; None if elastic."""
    return scenario.ground.reference_frequency or round(scenario.section.highest_frequency / PEAK_TO_HIGHEST, 6)


def provisional_spacing(scenario: Scenario) -> float:
    """Return a spacing good enough to build the ground once and learn its slowest wave."""
    return scenario.mesh.spacing or min(scenario.section.length, scenario.section.depth) / 200.0


def surface_wavelength(scenario: Scenario, model: GroundModel) -> float:
    """Return the dominant Rayleigh wavelength (m) of the slowest ground, c about 0.92 Vs."""
    return 0.92 * model.slowest_shear * PEAK_TO_HIGHEST / scenario.section.highest_frequency
