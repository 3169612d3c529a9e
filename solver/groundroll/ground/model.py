"""The ground of a scenario: what lies where, before it is averaged onto a mesh."""

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from groundroll.scenario import Scenario

from .bodies import Body, bodies_of
from .columns import MATERIAL, Columns, deepened, faster_below, overlaid
from .drawing import interfaces
from .extremes import Extremes, extremes
from .fill import Filling
from .grid import Grid, grid_of
from .profile import strata_of_profile
from .random_field import RandomChange, random_change_of
from .strata import Strata, strata_of_layers
from .surface import surface_of
from .terrain import Surface

ROUNDING = 4.0
"""Half width over which kinks of the terrain are rounded, in units of `spacing`."""
GRADIENT_SHEET = 0.25
"""Greatest thickness of the uniform sheets that stand for a gradient, in units of `spacing`."""
SAMPLED_SHEET = 0.5
"""The same for ground given on a grid or changed at random."""


@dataclass(frozen=True)
class Pieces:
    """One vertical profile: piece j from top[j] to top[j+1] (z, m), the last one down to infinity.

    The first piece begins at the ground surface. `density` (kg/m3), `vp`, `vs` (m/s), `qp`, `qs` (inf where
    elastic), each (n,); density and speeds are 0 in a void.
    """

    top: np.ndarray
    density: np.ndarray
    vp: np.ndarray
    vs: np.ndarray
    qp: np.ndarray
    qs: np.ndarray


@dataclass(frozen=True)
class GroundModel:
    """The ground in x (right) and z (down from the datum). Beyond its ends the section goes on level.

    `length`, `depth` (m) of the section; `spacing` (m) sets the radius of rounded kinks and how finely
    gradients, grids and random ground are cut into uniform pieces.
    """

    surface: Surface
    follows_terrain: bool
    base: Strata | Grid
    bodies: tuple[Body, ...]
    random: RandomChange | None
    water: tuple[float, float | None] | None
    length: float
    depth: float
    spacing: float
    laterally_uniform: bool

    @property
    def of_one_material(self) -> bool:
        """Whether the ground is level and the same everywhere."""
        return self.laterally_uniform and len(self.pieces(0.0).top) == 1

    def surface_elevation(self, x: np.ndarray) -> np.ndarray:
        """Elevation of the ground surface (m, positive up) at x (m)."""
        return self.surface.elevation(np.asarray(x, dtype=float))

    def surface_slope(self, x: np.ndarray) -> np.ndarray:
        """d elevation / dx at x (m)."""
        return self.surface.slope(np.asarray(x, dtype=float))

    def reference(self, x: np.ndarray) -> np.ndarray:
        """z (m) from which the depths of layers and bodies are measured at x (m): the surface, or the datum."""
        return 0.0 - self.surface_elevation(x) if self.follows_terrain else np.zeros(np.shape(x))

    def given_columns(self, x: np.ndarray) -> Columns:
        """The profiles at x (m,), however deep; outside 0 to length as at the nearer end."""
        x = np.clip(np.asarray(x, dtype=float), 0.0, self.length)
        reference = self.reference(x)
        columns = self.base.columns(x, reference, 0.0 - self.surface_elevation(x))
        for body in self.bodies:
            begin, end = body.spans(x)
            columns = overlaid(columns, begin + reference[:, None], end + reference[:, None], body.material)
        if self.random is not None:
            columns = self.random.change(columns, x, reference)
        if self.water is not None and self.water[1] is not None:
            columns = faster_below(columns, reference + self.water[0], self.water[1])
        return columns

    def columns(self, x: np.ndarray) -> Columns:
        """The profiles that are computed with: below the section the ground goes on as at its bottom."""
        return deepened(self.given_columns(x), self.depth)

    def pieces(self, x: float) -> Pieces:
        """The vertical profile at one x (m), from the ground surface down, however deep."""
        columns = self.given_columns(np.array([x]))
        top = np.maximum(columns.top[0], columns.surface[0])
        values = np.stack([getattr(columns, name)[0] for name in MATERIAL])
        there = np.append(top[1:], np.inf) > top
        top, values = top[there], values[:, there]
        differs = np.append(True, (values[:, 1:] != values[:, :-1]).any(axis=0))
        return Pieces(top[differs], *values[:, differs])

    def layers_under(self, x: float) -> list[tuple[float, float, float, float, float, float]]:
        """Uniform layers from the surface down: (thickness (m, inf for the last), vp, vs, density, qp, qs)."""
        p = self.pieces(x)
        thickness = np.diff(p.top, append=np.inf)
        rows = zip(thickness, p.vp, p.vs, p.density, p.qp, p.qs, strict=True)
        return [tuple(float(value) for value in row) for row in rows]

    @property
    def slowest_shear(self) -> float:
        """Least vs (m/s) anywhere in the section, voids aside."""
        return float(self._speeds.slowest[0])

    @property
    def fastest_shear(self) -> float:
        return self._speeds.fastest_shear

    @property
    def slowest_p(self) -> float:
        return self._speeds.slowest_p

    @property
    def fastest_p(self) -> float:
        """Greatest vp (m/s) anywhere in the section."""
        return self._speeds.fastest_p

    def slowest_wave_below(self, depth: np.ndarray) -> np.ndarray:
        """Least vs (m/s) at any z >= `depth` (m below the datum, any shape), voids aside."""
        index = np.searchsorted(self._speeds.depth, depth, side="right") - 1
        return self._speeds.slowest[np.maximum(index, 0)]

    @cached_property
    def _speeds(self) -> Extremes:
        return extremes(self)

    def interfaces(self) -> list[tuple[np.ndarray, np.ndarray]]:
        """Lines (x, z) in m to draw: tops of layers below the first, outlines of bodies, the water table."""
        return interfaces(self)


def build_ground(scenario: Scenario, spacing: float, rounding: float = ROUNDING) -> GroundModel:
    """The ground of `scenario` for a mesh of `spacing` (m).

    `rounding`: half width over which kinks of the terrain are rounded, in spacings. Raises InputError for
    a bad terrain, profile or grid file, and outside the range of a relation in [ground.fill_missing].
    """
    ground, section = scenario.ground, scenario.section
    filling = Filling(ground.fill_missing)
    surface = surface_of(scenario, rounding * spacing)
    if ground.grid is not None:
        base = grid_of(scenario.folder / ground.grid, filling, SAMPLED_SHEET * spacing)
    else:
        from_file = ground.profile is not None
        strata = strata_of_profile(scenario.folder / ground.profile, filling) if from_file else strata_of_layers(ground)
        base = Strata(strata, filling, GRADIENT_SHEET * spacing)
    bent = any(layer.top_line is not None for layer in ground.layers)
    return GroundModel(
        surface=surface,
        follows_terrain=ground.depth_from == "surface",
        base=base,
        bodies=bodies_of(ground, filling),
        random=random_change_of(scenario, surface.highest, SAMPLED_SHEET * spacing),
        water=None if ground.water_table is None else (ground.water_table, ground.water_vp),
        length=section.length,
        depth=section.depth,
        spacing=spacing,
        laterally_uniform=not (bent or ground.terrain or ground.grid or ground.bodies or ground.random),
    )
