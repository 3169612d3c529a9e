"""Where a point between cells acts: interpolation weights, and sources and receivers made of them.

A value at a point is a tensor product of SIX-point Lagrange interpolations along the column and row
index (6th order, the order of the scheme); near an end of the mesh the six points are shifted inward.
On a free surface itself vx is row 0 and vz the closure's trace l of the first four half rows; half rows just
below it are weighted so that the closure's own error is not felt (`blind_to_closure`).

A point source is the adjoint: weight over the quadrature weight H of the cell, so that the work it does
is force times interpolated velocity. Force f (N/m):  v += dt f w / (rho H h^2).  Moment M (N):
sigma -= w dM / (H h^2). H holds the norms and the stretch J.
"""

from dataclasses import dataclass

import numpy as np

from groundroll.waves.assembly import Properties, ratio
from groundroll.waves.cell import BAND
from groundroll.waves.mesh import Mesh
from groundroll.waves.operators import CLOSED_HALVES, closure
from groundroll.waves.points import Injection, Receivers
from groundroll.waves.terrain import KAPPA, softened

SIX = 6
# Half rows that a source or receiver near a free surface is spread over.
BLIND_ROWS = 8
U = np.uint64
VX, VZ, SXX, SZZ, SXZ = range(5)
# (half column?, half row?) of each field
POSITION = {VX: (True, False), VZ: (False, True), SXX: (False, False), SZZ: (False, False), SXZ: (True, True)}


def lagrange(position: float, low: int, high: int) -> tuple[np.ndarray, np.ndarray]:
    """Return six consecutive indices within low..high around `position` and their Lagrange weights."""
    start = int(np.clip(np.floor(position) - SIX // 2 + 1, low, high - SIX + 1))
    index = start + np.arange(SIX)
    others = index[:, None] != index[None, :]
    gap = np.where(others, index[:, None] - index[None, :], 1)
    return index, np.prod(np.where(others, (position - index[None, :]) / gap, 1.0), axis=1)


@dataclass(frozen=True)
class Cells:
    """Weighted cells (row, column, weight), arrays (row or column,) of a tensor product."""

    row: np.ndarray
    column: np.ndarray
    row_weight: np.ndarray
    column_weight: np.ndarray


def row_position(mesh: Mesh, x: float, depth: float) -> float:
    """Return the fractional row index at `depth` (m) below the surface at `x`, node rows at whole numbers."""
    below = np.stack([mesh.depth_node, mesh.depth_half], axis=1)
    if mesh.terrain is not None:
        index, weight = lagrange((x - mesh.x0) / mesh.spacing, 0, mesh.nx - 1)
        below = below + (weight @ mesh.terrain.shift[0][index]) * (mesh.terrain.blend.T - 1.0)
    return float(np.interp(depth, below.ravel(), 0.5 * np.arange(below.size)))


def cells_of(mesh: Mesh, field: int, x: float, depth: float) -> Cells:
    """Return the cells of `field` that interpolate it at (x, depth)."""
    half_column, half_row = POSITION[field]
    last_column = mesh.nx - 1 - (half_column and mesh.edges[1] != "absorb")
    last_row = mesh.nz - 1 - (half_row and mesh.edges[3] != "absorb")
    column, column_weight = lagrange((x - mesh.x0) / mesh.spacing - 0.5 * half_column, 0, last_column)
    if on_surface(mesh, depth):
        trace = closure().trace if half_row else np.ones(1)
        return Cells(np.arange(len(trace)), column, trace, column_weight)
    position = row_position(mesh, x, depth) - 0.5 * half_row
    row, row_weight = lagrange(position, 0, last_row)
    if half_row and mesh.edges[2] == "free" and row[0] < CLOSED_HALVES and last_row >= BLIND_ROWS:
        row, row_weight = blind_to_closure(position, row, row_weight)
    return Cells(row, column, row_weight, column_weight)


def blind_to_closure(position: float, row: np.ndarray, weight: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return half rows and weights that interpolate near a free surface without feeling the closure's error.

    The closure's derivative of a cubic is off by 6 t, t = (Dh z^3 - 3 z^2)/6, on its half rows; a source spread with
    weights w excites that error in the measure w.t. The weights returned are the given ones plus the smallest
    change (least squares) that keeps polynomials to degree 3 exact and makes w.t = 0, over BLIND_ROWS rows or more.
    """
    count = max(BLIND_ROWS, row[-1] + 1)
    w = np.zeros(count)
    w[row] = weight
    dh = closure().dh
    nodes, halves = np.arange(dh.shape[1], dtype=float), np.arange(len(dh)) + 0.5
    error = np.zeros(count)
    error[: len(dh)] = (dh @ nodes**3 - 3.0 * halves**2) / 6.0
    # Powers about the point, in units of 4 rows to keep the system well conditioned.
    conditions = np.stack([*(((np.arange(count) - position) / 4.0) ** degree for degree in range(4)), error])
    wanted = np.array([1.0, 0.0, 0.0, 0.0, 0.0])
    return np.arange(count), w + np.linalg.pinv(conditions) @ (wanted - conditions @ w)


def on_surface(mesh: Mesh, depth: float) -> bool:
    return mesh.edges[2] == "free" and abs(depth) < 1e-9 * mesh.spacing


def over_norm(mesh: Mesh, field: int, cells: Cells) -> np.ndarray:
    """Return the weights (row, column) divided by H h^2, where H is not 0."""
    half_column, half_row = POSITION[field]
    columns = mesh.columns.half_norm if half_column else mesh.columns.node_norm
    rows = mesh.rows.half_norm if half_row else mesh.rows.node_norm
    stretch = np.broadcast_to(mesh.stretch(half_row, half_column), (mesh.nz, mesh.nx))
    weight = np.outer(cells.row_weight / rows[cells.row], cells.column_weight / columns[cells.column])
    return weight / stretch[np.ix_(cells.row, cells.column)] / mesh.spacing**2


class Entries:
    """Collects (field, row, column, weight, pulse) and sorts them by band."""

    def __init__(self):
        self._parts = []

    def add(self, field, rows, columns, weight, pulse) -> None:
        r, c = np.meshgrid(rows, columns, indexing="ij")
        size = r.size
        self._parts.append((r.ravel(), c.ravel(), np.full(size, field), np.ravel(weight), np.full(size, pulse)))

    def sorted(self, mesh: Mesh):
        """Return `first` (bands + 1,) and the five columns in the order of rows, kept stable."""
        if self._parts:
            row, column, field, weight, pulse = (np.concatenate(p) for p in zip(*self._parts, strict=True))
        else:
            row, column, field, weight, pulse = (np.zeros(0, dtype=t) for t in (int, int, int, float, int))
        order = np.argsort(row, kind="stable")
        row, column, field, weight, pulse = (v[order] for v in (row, column, field, weight, pulse))
        first = np.searchsorted(row // BAND, np.arange(mesh.bands + 1))
        return first, row.astype(U), column.astype(U), field, weight, pulse


def add_force(mesh, p: Properties, forces: Entries, tractions: Entries, x, depth, force, pulse, dt) -> None:
    """Add a point force (Fx, Fz) N/m.

    A vertical force on a free surface prescribes the traction there: szz(0) = -F s(t) w / h, and with it
    sxx(0) += (c13/c33) szz(0), so that szz' = 0 of the free surface becomes szz' = -F s'(t)/h.
    """
    for field, amount in ((VX, force[0]), (VZ, force[1])):
        if amount == 0.0:
            continue
        if field == VZ and on_surface(mesh, depth) and mesh.terrain is None:
            column, weight = cells_of(mesh, SZZ, x, depth).column, cells_of(mesh, SZZ, x, depth).column_weight
            traction = -amount * weight / (mesh.columns.node_norm[column] * mesh.spacing)
            tractions.add(SZZ, [0], column, traction, pulse)
            tractions.add(SXX, [0], column, traction * surface_coupling(mesh, p, column), pulse)
            continue
        cells = cells_of(mesh, field, x, depth)
        density = np.broadcast_to(p.density_x if field == VX else p.density_z, (mesh.nz, mesh.nx))
        weight = dt * amount * over_norm(mesh, field, cells) / density[np.ix_(cells.row, cells.column)]
        forces.add(field, cells.row, cells.column, weight, pulse)
    if on_surface(mesh, depth) and mesh.terrain is not None:
        add_sloped_traction(mesh, p, tractions, x, force, pulse)


def add_sloped_traction(mesh, p: Properties, tractions: Entries, x, force, pulse) -> None:
    """Add what the softened row 0 under terrain lacks of a surface force (fx, fz per metre of x).

    (sxx, szz) += -(1 - kappa) (dfz + q dfx) (lam - L p, L - lam p) / (p^2 L - 2 p lam + L), with p = q^2 and
    the stiffness (L, lam, L) of the ground; here for any (c11, c13, c33).
    """
    cells = cells_of(mesh, SZZ, x, 0.0)
    column = cells.column
    slope = mesh.terrain.slope[0][column]
    square = slope**2
    c11, c13, c33 = (np.broadcast_to(c, (mesh.nz, mesh.nx))[0, column] for c in (p.c11, p.c13, p.c33))
    share = (1.0 - KAPPA) / (square**2 * c11 - 2.0 * square * c13 + c33)
    normal = -(force[1] + slope * force[0]) * cells.column_weight / (mesh.columns.node_norm[column] * mesh.spacing)
    tractions.add(SXX, [0], column, normal * share * (c13 - c11 * square), pulse)
    tractions.add(SZZ, [0], column, normal * share * (c33 - c13 * square), pulse)


def surface_coupling(mesh, p: Properties, column) -> np.ndarray:
    """Return c13/c33 of row 0 at `column`."""
    shape = (mesh.nz, mesh.nx)
    return ratio(np.broadcast_to(p.c13, shape)[0, column], np.broadcast_to(p.c33, shape)[0, column])


def add_moment(mesh, p: Properties, moments: Entries, x, depth, moment, pulse) -> None:
    """Add a moment tensor (Mxx, Mzz, Mxz) N: stress is lowered by its rate, sigma -= w dM/(H h^2).

    On the row of a free surface the stiffness C is replaced by C0, and so is what the moment does:
    sigma -= w C0 C^-1 dM/(H h^2).
    """
    mxx, mzz, mxz = moment
    cells = cells_of(mesh, SXX, x, depth)
    weight = over_norm(mesh, SXX, cells)
    pull_x, pull_z = np.full(weight.shape, float(mxx)), np.full(weight.shape, float(mzz))
    if cells.row[0] == 0 and mesh.edges[2] == "free":
        pull_x[0], pull_z[0] = surface_moment(mesh, p, cells.column, mxx, mzz)
    moments.add(SXX, cells.row, cells.column, -weight * pull_x, pulse)
    moments.add(SZZ, cells.row, cells.column, -weight * pull_z, pulse)
    if mxz != 0.0:
        cells = cells_of(mesh, SXZ, x, depth)
        moments.add(SXZ, cells.row, cells.column, -mxz * over_norm(mesh, SXZ, cells), pulse)


def surface_moment(mesh, p: Properties, column, mxx, mzz) -> tuple[np.ndarray, np.ndarray]:
    """Return C0 C^-1 (Mxx, Mzz) on row 0 at `column`."""
    c11, c13, c33 = (np.broadcast_to(c, (mesh.nz, mesh.nx))[0, column] for c in (p.c11, p.c13, p.c33))
    determinant = c11 * c33 - c13**2
    ex, ez = (c33 * mxx - c13 * mzz) / determinant, (c11 * mzz - c13 * mxx) / determinant
    slope = mesh.terrain.slope[0][column] if mesh.terrain is not None else None
    if slope is None:
        return determinant / c33 * ex, np.zeros(len(column))
    s11, s13, s33 = softened(c11, c13, c33, slope)
    return s11 * ex + s13 * ez, s13 * ex + s33 * ez


def injection(mesh: Mesh, entries: Entries, series: np.ndarray, dtype) -> Injection:
    """Return the entries with their `series` (pulse, step) in the form the kernels take."""
    first, row, column, field, weight, pulse = entries.sorted(mesh)
    return Injection(first, row, column, field, weight.astype(dtype), pulse, series.astype(dtype))


def receivers(mesh: Mesh, points, longest_call: int) -> Receivers:
    """Return what reads vx and vz at `points` ((x, depth), ...): slot = (receiver, component, column)."""
    entries = Entries()
    for r, (x, depth) in enumerate(points):
        for component, field in enumerate((VX, VZ)):
            cells = cells_of(mesh, field, x, depth)
            for c, (column, weight) in enumerate(zip(cells.column, cells.column_weight, strict=True)):
                slot = (2 * r + component) * SIX + c
                entries.add(field, cells.row, [column], cells.row_weight * weight, slot)
    first, row, column, field, weight, slot = entries.sorted(mesh)
    trace = np.zeros((longest_call, len(points) * 2 * SIX))
    return Receivers(first, row, column, field, weight, slot, trace)
