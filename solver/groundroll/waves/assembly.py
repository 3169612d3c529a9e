"""From a mesh and the properties on it to what the kernels work on."""

from dataclasses import dataclass

import numpy as np

from groundroll.waves import absorbing
from groundroll.waves.absorbing import EdgeDamping
from groundroll.waves.cell import BAND, INTERIOR, MARGIN_COLUMNS, MARGIN_ROWS
from groundroll.waves.mesh import Mesh
from groundroll.waves.operators import CLOSED_NODES
from groundroll.waves.attenuation import Loss, memory
from groundroll.waves.state import Columns, Ground, Material, Rows, aligned_span, flat_zeros, frame, inner
from groundroll.waves.terrain import kernel_terrain, row_interpolation, softened

U = np.uint64


@dataclass(frozen=True)
class Properties:
    """Effective properties on the staggered positions, SI, each (nz, nx) or broadcast to it.

    `density_x` at vx, `density_z` at vz (kg/m3); `c11`, `c13`, `c33` at nodes and `shear` at sxz (Pa).
    """

    density_x: np.ndarray
    density_z: np.ndarray
    c11: np.ndarray
    c13: np.ndarray
    c33: np.ndarray
    shear: np.ndarray


def stiffness_at_edges(mesh: Mesh, p: Properties) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return c11, c13, c33 with the traction across each free edge held at zero on its nodes.

    On a level edge szz' = 0 gives ezz = -(c13/c33) exx, so sxx' = (c11 - c13^2/c33) exx; on an upright
    edge the same with 1 and 3 exchanged.
    """
    shape = (mesh.nz, mesh.nx)
    c11, c13, c33 = (np.array(np.broadcast_to(c, shape), dtype=float) for c in (p.c11, p.c13, p.c33))
    left, right, top, bottom = (edge == "free" for edge in mesh.edges)
    if mesh.terrain is not None:
        c11[0], c13[0], c33[0] = softened(c11[0], c13[0], c33[0], mesh.terrain.slope[0])
        top = False
    for row in [0] * top + [-1] * bottom:
        c11[row] -= ratio(c13[row] ** 2, c33[row])
        c13[row] = c33[row] = 0.0
    for column in [0] * left + [-1] * right:
        c33[:, column] -= ratio(c13[:, column] ** 2, c11[:, column])
        # A corner between two free edges holds no stress at all.
        c33[[0] * top + [-1] * bottom, column] = 0.0
        c11[:, column] = c13[:, column] = 0.0
    return c11, c13, c33


def ratio(above: np.ndarray, below: np.ndarray) -> np.ndarray:
    """Return above / below, 0 where `below` is 0 (a void)."""
    return np.divide(above, below, out=np.zeros_like(above), where=below > 0.0)


def velocity_mask(mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return masks (nz, nx) of vx and vz: 0 on a rigid edge and at half points outside a closed one."""
    left, right, top, bottom = mesh.edges
    x, z = np.ones((mesh.nz, mesh.nx)), np.ones((mesh.nz, mesh.nx))
    if bottom != "absorb":
        z[-1] = 0.0
    if right != "absorb":
        x[:, -1] = 0.0
    if top == "rigid":
        x[0] = 0.0
    if bottom == "rigid":
        x[-1] = 0.0
    if left == "rigid":
        z[:, 0] = 0.0
    if right == "rigid":
        z[:, -1] = 0.0
    return x, z


def material(mesh: Mesh, p: Properties, dt: float, dtype) -> Material:
    """Scale the properties by dt/h and lay them into flat arrays with margins."""
    flat = flat_zeros(mesh, 6, dtype)
    mask_x, mask_z = velocity_mask(mesh)
    c11, c13, c33 = stiffness_at_edges(mesh, p)
    shear = np.array(np.broadcast_to(p.shear, (mesh.nz, mesh.nx)), dtype=float)
    if mesh.edges[3] != "absorb":
        shear[-1] = 0.0
    if mesh.edges[1] != "absorb":
        shear[:, -1] = 0.0
    scale = dt / mesh.spacing
    mass_x = p.density_x * mesh.stretch(False, True) if mesh.terrain is not None else p.density_x
    mass_z = p.density_z * mesh.stretch(True, False) if mesh.terrain is not None else p.density_z
    values = (scale * mask_x / mass_x, scale * mask_z / mass_z, *(scale * c for c in (c11, c13, c33, shear)))
    for target, value in zip(flat, values, strict=True):
        inner(target, mesh)[:] = value
    even_row = (c11 == c33).all(axis=1)
    even = np.array([even_row[BAND * b : BAND * (b + 1)].all() for b in range(mesh.bands)], dtype=np.uint8)
    return Material(*flat, even)


def rows(mesh: Mesh, absorbing_rows: np.ndarray, dtype) -> Rows:
    """Set up the z derivatives; `absorbing_rows` (nz,) marks rows inside an absorbing layer."""
    line = mesh.rows
    stretch = np.stack([mesh.stretch_node, mesh.stretch_half])
    weight = line.weight / stretch[[0, 1, 0, 1]][:, :, None]
    first = (line.first + MARGIN_ROWS) * mesh.pitch + MARGIN_COLUMNS
    node, half = (np.array(INTERIOR) / s[:, None] for s in stretch)
    general = line.closed | absorbing_rows
    if mesh.terrain is not None:
        general[: mesh.terrain.rows] = True
    plain = np.array([not g.any() and len(g) == BAND for g in np.split(general, range(BAND, mesh.nz, BAND))])
    return Rows(
        count=U(mesh.nz),
        first=first.astype(U),
        weight=weight.astype(dtype),
        node=node.astype(dtype),
        half=half.astype(dtype),
        plain=plain.astype(np.uint8),
        lag=lag_of(mesh),
    )


def lag_of(mesh: Mesh) -> int:
    """Return the bands by which a stage must lag: the reach of all operators along z."""
    lag = reach_in_bands(mesh.rows.first, mesh.rows.weight)
    if mesh.terrain is None:
        return lag
    return max(lag, reach_in_bands(*row_interpolation(mesh.nz)))


def reach_in_bands(first: np.ndarray, weight: np.ndarray) -> int:
    """Return how many bands away a row reads at most: what one stage of a wavefront must lag behind the last."""
    row = np.arange(weight.shape[1])[:, None]
    read = first[:, :, None] + np.arange(weight.shape[2])
    away = np.abs(read // BAND - row // BAND)
    return int(away[(weight != 0.0) & (read >= 0) & (read < weight.shape[1])].max())


def columns(mesh: Mesh, sides, elastic: bool, dtype) -> Columns:
    """Set up the x derivatives; in elastic ground the fast kernels also serve the absorbing columns."""
    closed_left = CLOSED_NODES if mesh.edges[0] != "absorb" else 0
    closed_right = mesh.nx - (CLOSED_NODES if mesh.edges[1] != "absorb" else 0)
    left, right = closed_left, closed_right
    if not elastic:
        left, right = max(left, int(sides.left)), min(right, int(sides.right))
    left, right = aligned_span(left, right)
    line = mesh.columns
    return Columns(
        c=np.array(INTERIOR, dtype=dtype),
        left=U(left),
        right=U(right),
        closed_left=U(closed_left),
        closed_right=U(closed_right),
        first=np.maximum(line.first, 0).astype(U),
        weight=line.weight.astype(dtype),
    )


def assemble(mesh: Mesh, p: Properties, dt: float, damping: EdgeDamping, dtype, loss: Loss | None = None) -> Ground:
    """Return all that the kernels need of mesh, ground, edges and attenuation for steps of `dt` s."""
    sides = absorbing.sides(mesh, damping, dt, dtype)
    layers = absorbing.layers(mesh, damping, dt, dtype)
    return Ground(
        frame=frame(mesh),
        material=material(mesh, p, dt, dtype),
        rows=rows(mesh, layers.index >= 0, dtype),
        columns=columns(mesh, sides, loss is None, dtype),
        sides=sides,
        layers=layers,
        terrain=kernel_terrain(mesh, dtype),
        memory=memory(mesh, p, loss, dt, dtype),
    )
