"""The mesh: where each row and column lies, and which of them belong to absorbing layers."""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from groundroll.waves.cell import BAND, MARGIN_COLUMNS, MARGIN_ROWS
from groundroll.waves.operators import Line, line
from groundroll.waves.terrain import Relief, relief

SIDES = ("left", "right", "top", "bottom")


@dataclass(frozen=True)
class Mesh:
    """A mesh of `nz` rows and `nx` columns, absorbing layers included; level unless `terrain` maps it.

    `datum` is z (m, down from the scenario's datum) of the level mesh's row at depth 0.

    `spacing` h (m) is the width of a column and of a row index; row k lies at depth `depth_node[k]`
    (m), its half row at `depth_half[k]`; `stretch_node`, `stretch_half` are J = dz/d(k h) there.
    Column i lies at x = `x0` + i h. `absorbing` counts the cells of the absorbing layer on each side
    (left, right, top, bottom), 0 where the edge is "free" or "rigid" (`edges`, same order).
    """

    spacing: float
    nx: int
    nz: int
    x0: float
    edges: tuple[str, str, str, str]
    absorbing: tuple[int, int, int, int]
    depth_node: np.ndarray
    depth_half: np.ndarray
    stretch_node: np.ndarray
    stretch_half: np.ndarray
    terrain: Relief | None = None
    datum: float = 0.0

    @property
    def pitch(self) -> int:
        """Columns of the padded arrays: whole cache lines, an odd number of them.

        A pitch that is a multiple of 4 kB would map every row onto the same sets of the first cache.
        """
        lines = -(-(self.nx + 2 * MARGIN_COLUMNS) // 16)
        return 16 * (lines + 1 - lines % 2)

    @property
    def padded_rows(self) -> int:
        return self.nz + 2 * MARGIN_ROWS

    @property
    def bands(self) -> int:
        return -(-self.nz // BAND)

    @property
    def cells(self) -> int:
        return self.nx * self.nz

    @property
    def x_node(self) -> np.ndarray:
        return self.x0 + self.spacing * np.arange(self.nx)

    @property
    def x_half(self) -> np.ndarray:
        return self.x_node + 0.5 * self.spacing

    @cached_property
    def columns(self) -> Line:
        """Operators along x."""
        return line(self.nx, self.edges[0], self.edges[1])

    @cached_property
    def rows(self) -> Line:
        """Operators along z, before division by the stretch J."""
        top = "sloped" if self.terrain is not None else self.edges[2]
        return line(self.nz, top, self.edges[3])

    def stretch(self, half_row: bool, half_column: bool) -> np.ndarray:
        """Return J = dz/d(k h) at the given kind of position, (nz, nx) or (nz, 1)."""
        if self.terrain is not None:
            return self.terrain.stretch(half_row, half_column)
        return (self.stretch_half if half_row else self.stretch_node)[:, None]

    def node_elevation(self) -> np.ndarray | None:
        """Return the elevation (m, positive up) of all nodes, (nz, nx), or None on a level mesh."""
        if self.terrain is None:
            return None
        mapped = self.terrain.blend[0][:, None] * self.terrain.shift[0][None, :]
        return -(self.datum + self.depth_node[:, None] + mapped)

    @property
    def section_columns(self) -> slice:
        return slice(self.absorbing[0], self.nx - self.absorbing[1])

    @property
    def section_rows(self) -> slice:
        return slice(self.absorbing[2], self.nz - self.absorbing[3])


def even_mesh(spacing, length, depth, edges, layer) -> Mesh:
    """Mesh of even spacing over a section, with absorbing layers of `layer` cells laid outside it.

    `edges` = (left, right, top, bottom), each "absorb", "free" or "rigid". A closed edge lies on the
    node nearest to the section's bound.
    """
    absorbing = tuple(layer if edge == "absorb" else 0 for edge in edges)
    nx = round(length / spacing) + 1 + absorbing[0] + absorbing[1]
    nz = round(depth / spacing) + 1 + absorbing[2] + absorbing[3]
    k = np.arange(nz) - absorbing[2]
    return Mesh(
        spacing=spacing,
        nx=nx,
        nz=nz,
        x0=-absorbing[0] * spacing,
        edges=tuple(edges),
        absorbing=absorbing,
        depth_node=spacing * k,
        depth_half=spacing * (k + 0.5),
        stretch_node=np.ones(nz),
        stretch_half=np.ones(nz),
    )


def with_depths(mesh: Mesh, depth_of, stretch_of) -> Mesh:
    """Return `mesh` with rows at z = depth_of(k h), J = stretch_of(k h)."""
    zeta = mesh.spacing * (np.arange(mesh.nz) - mesh.absorbing[2])
    half = zeta + 0.5 * mesh.spacing
    return replace(
        mesh,
        depth_node=depth_of(zeta),
        depth_half=depth_of(half),
        stretch_node=stretch_of(zeta),
        stretch_half=stretch_of(half),
    )


def with_terrain(mesh: Mesh, elevation, slope) -> Mesh:
    """Return `mesh` laid under a ground surface: elevation(x) and its derivative slope(x), both functions.

    The level mesh stands for the middle between the highest and the lowest ground, where it is neither
    stretched nor squeezed. Outside the section the ground must be level.
    """
    x = np.stack([mesh.x_node, mesh.x_half])
    heights = elevation(x.ravel()).reshape(x.shape)
    middle = 0.5 * (heights.max() + heights.min())
    shift = -(heights - middle)
    level = np.stack([mesh.depth_node, mesh.depth_half])
    rise = np.stack([mesh.stretch_node, mesh.stretch_half])
    mapping = relief(shift, -slope(x.ravel()).reshape(x.shape), level, rise, 2.0 * np.abs(shift).max(), mesh.depth_node[mesh.section_rows][-1])
    return replace(mesh, terrain=mapping, datum=-middle)
