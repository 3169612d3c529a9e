"""The terrain-following mapping: where it lies on the mesh and what the kernels need of it.

z(x, zeta) = Z(zeta) + shift(x) blend(Z / H),  blend(u) = (1 - u)^2 (1 + 2 u) for u < 1, else 0 (z down).

blend has no slope at u = 0, so J = Z' on the surface. H is FADE times the relief, or the depth
of the section if that is less. On row 0 one number kappa
softens the stiffness of the stress state that violates the traction-free condition: with p = q^2,
d = (1, p) the direction of a traction-free state (szz = p sxx), C the stiffness of (sxx, szz) and S = C^-1,

    C0 = kappa C + (1 - kappa) d d^T / (d^T S d).

kappa = 0 on level ground is the held traction of a flat free surface; the interpolation of
`terrain_interpolation.json` belongs to KAPPA.
"""

import json
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import numpy as np

from groundroll.waves.cell import MARGIN_COLUMNS, MARGIN_ROWS
from groundroll.waves.operators import TAPS, closure
from groundroll.waves.state import Terrain, flat_zeros

FADE = 4.0
KAPPA = 0.3
_EXTENT = 24
# Taps of the interpolation along z: the interior's eight, near the surface up to ten.
TEN = 10


@dataclass(frozen=True)
class Relief:
    """The mapping on a mesh. `shift`, `slope` (2, nx): z of the surface less that of the level mesh, and its
    x derivative, at node and half columns; `depth` H (m) below which the mesh is level; `rows` mapped rows;
    `blend`, `bend`, `rise` (2, nz) at node and half rows."""

    shift: np.ndarray
    slope: np.ndarray
    depth: float
    rows: int
    blend: np.ndarray
    bend: np.ndarray
    rise: np.ndarray

    def blend_at(self, level: np.ndarray) -> np.ndarray:
        """Return the blend at level depths (m)."""
        return blend(level / self.depth)

    def stretch(self, half_row: bool, half_column: bool) -> np.ndarray:
        """Return J (nz, nx) at the given kind of position."""
        row, column = int(half_row), int(half_column)
        return self.rise[row][:, None] + self.shift[column][None, :] * self.bend[row][:, None]

    def skew(self, half_row: bool, half_column: bool) -> np.ndarray:
        """Return q (nz, nx) at the given kind of position."""
        return self.blend[int(half_row)][:, None] * self.slope[int(half_column)][None, :]


def blend(u):
    u = np.clip(u, 0.0, 1.0)
    return (1.0 - u) ** 2 * (1.0 + 2.0 * u)


def blend_slope(u):
    u = np.clip(u, 0.0, 1.0)
    return -6.0 * u * (1.0 - u)


def relief(shift, slope, level, rise, greatest: float, deepest: float) -> Relief:
    """Build the mapping from `shift`, `slope` (2, nx), the level depths Z and Z' (2, nz), the relief and the
    depth by which the mesh must be level (m)."""
    depth = min(FADE * greatest, deepest)
    # Below the last row with a slope its helpers still carry some of it, as far as the operators reach.
    mapped = int(np.searchsorted(level[0], depth)) + 1 + TAPS
    return Relief(shift, slope, depth, mapped, blend(level / depth), blend_slope(level / depth) / depth * rise, rise)


@cache
def interpolation() -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the interior stencil (TAPS,), and Mh, Mn near the surface, (row, column) square matrices."""
    table = json.loads(Path(__file__).with_name("terrain_interpolation.json").read_text())
    stencil, n = np.array(table["interior_stencil"]), _EXTENT
    r = sum(w * np.eye(n, k=t - 3) for t, w in enumerate(stencil))
    block = np.array(table["R_softened_0_3"])
    r[: block.shape[0], : block.shape[1]] = block
    ha, hb = np.ones(n), np.ones(n)
    ha[: len(closure().node_norm)], hb[: len(closure().half_norm)] = closure().node_norm, closure().half_norm
    return stencil, r / hb[:, None], r.T / ha[:, None]


def row_interpolation(n: int) -> tuple[np.ndarray, np.ndarray]:
    """Return `first` (2, n) and `weight` (2, n, TEN) of Mh (from nodes) and Mn (from halves)."""
    stencil, to_half, to_node = interpolation()
    first = np.stack([np.arange(n) - 3, np.arange(n) - 4])
    weight = np.zeros((2, n, TEN))
    weight[:, :, :TAPS] = stencil
    for kind, matrix in enumerate((to_half, to_node)):
        for k in range(min(8, n)):
            start = int(np.flatnonzero(matrix[k])[0])
            first[kind, k] = start
            weight[kind, k] = matrix[k, start : start + TEN]
    return first, weight


def flat_terrain(dtype) -> Terrain:
    """Return the mapping of level ground: nothing."""
    none, rows, table = np.zeros(0, dtype), np.zeros((2, 0), dtype), np.zeros((2, 0, TEN), dtype)
    first = np.zeros((2, 0), np.uint64)
    zero = np.uint64(0)
    return Terrain(zero, zero, rows, rows, rows, rows, rows, first, table, table, first, table, none, none, none, none, none)


def kernel_terrain(mesh, dtype) -> Terrain:
    """Return what the kernels need of `mesh.terrain`, or of level ground if it has none."""
    if mesh.terrain is None:
        return flat_terrain(dtype)
    r = mesh.terrain
    first, weight = row_interpolation(mesh.nz)
    last = np.minimum(first[:, :, None] + np.arange(TEN), mesh.nz - 1).clip(0)
    blended = weight * np.stack([r.blend[0][last[0]], r.blend[1][last[1]]])
    # The vertical operators of the mapped rows, not divided by J.
    vertical = mesh.rows
    columns = np.zeros((2, 2, mesh.pitch))
    columns[:, :, MARGIN_COLUMNS : MARGIN_COLUMNS + mesh.nx] = np.stack([r.slope, r.shift])
    return Terrain(
        rows=np.uint64(r.rows),
        helper_rows=np.uint64(min(r.rows + TAPS, mesh.nz)),
        slope=columns[0].astype(dtype),
        shift=columns[1].astype(dtype),
        blend=r.blend.astype(dtype),
        bend=r.bend.astype(dtype),
        rise=r.rise.astype(dtype),
        first=((first + MARGIN_ROWS) * mesh.pitch).astype(np.uint64),
        plain=weight.astype(dtype),
        blended=blended.astype(dtype),
        operator_first=((vertical.first + MARGIN_ROWS) * mesh.pitch + MARGIN_COLUMNS).astype(np.uint64),
        operator=vertical.weight.astype(dtype),
        across=interpolation()[0].astype(dtype),
        **dict(zip(("tx", "tz", "gx", "gz"), flat_zeros(mesh, 4, dtype), strict=True)),
    )


def softened(c11, c13, c33, slope):
    """Return C0 = (c11, c13, c33) of row 0 for the stiffness C there and the surface `slope` q."""
    p = slope**2
    determinant = c11 * c33 - c13**2
    # d^T S d with S = C^-1, times the determinant; both are 0 in a void.
    compliance_times = c33 - 2.0 * p * c13 + p**2 * c11
    soft = (1.0 - KAPPA) * np.divide(determinant, compliance_times, out=np.zeros_like(c11), where=compliance_times > 0.0)
    return KAPPA * c11 + soft, KAPPA * c13 + soft * p, KAPPA * c33 + soft * p**2
