"""From a mesh and the properties on it to what the kernels work on."""

from dataclasses import dataclass

import numpy as np

from groundroll.waves import absorbing
from groundroll.waves.cell import BAND, INTERIOR, MARGIN_COLUMNS, MARGIN_ROWS
from groundroll.waves.mesh import Mesh
from groundroll.waves.operators import CLOSED_NODES
from groundroll.waves.state import Columns, Ground, Material, Rows, flat_zeros, frame, inner

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


@dataclass(frozen=True)
class EdgeDamping:
    """What the absorbing layers are tuned to: `speed` (m/s) and frequency `shift` (1/s)."""

    speed: float
    shift: float


def stiffness_at_edges(mesh: Mesh, p: Properties) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return c11, c13, c33 with the traction across each free edge held at zero on its nodes.

    On a level edge szz' = 0 gives ezz = -(c13/c33) exx, so sxx' = (c11 - c13^2/c33) exx; on an upright
    edge the same with 1 and 3 exchanged.
    """
    shape = (mesh.nz, mesh.nx)
    c11, c13, c33 = (np.array(np.broadcast_to(c, shape), dtype=float) for c in (p.c11, p.c13, p.c33))
    left, right, top, bottom = (edge == "free" for edge in mesh.edges)
    for row in [0] * top + [-1] * bottom:
        c11[row] -= c13[row] ** 2 / c33[row]
        c13[row] = c33[row] = 0.0
    for column in [0] * left + [-1] * right:
        stiff = np.where(c33[:, column] > 0.0, c33[:, column], 0.0)
        coupling = np.divide(c13[:, column] ** 2, c11[:, column], out=np.zeros(mesh.nz), where=c11[:, column] > 0)
        c33[:, column] = np.where(stiff > 0.0, stiff - coupling, 0.0)
        c11[:, column] = c13[:, column] = 0.0
    return c11, c13, c33


def velocity_mask(mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return masks (nz, nx) of vx and vz: 0 on a rigid edge and at half points outside a closed one."""
    left, right, top, bottom = mesh.edges
    x, z = np.ones((mesh.nz, mesh.nx)), np.ones((mesh.nz, mesh.nx))
    if bottom != "absorb":
        z[-1] = 0.0
    if right != "absorb":
        x[:, -1] = 0.0
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
    values = (scale * mask_x / p.density_x, scale * mask_z / p.density_z, *(scale * c for c in (c11, c13, c33, shear)))
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
    plain = [
        len(g) == BAND and not g.any() for g in (general[BAND * b : BAND * (b + 1)] for b in range(mesh.bands))
    ]
    return Rows(
        count=U(mesh.nz),
        first=first.astype(U),
        weight=weight.astype(dtype),
        node=node.astype(dtype),
        half=half.astype(dtype),
        plain=np.array(plain, dtype=np.uint8),
    )


def columns(mesh: Mesh, sides, dtype) -> Columns:
    """Set up the x derivatives."""
    closed_left = CLOSED_NODES if mesh.edges[0] != "absorb" else 0
    closed_right = mesh.nx - (CLOSED_NODES if mesh.edges[1] != "absorb" else 0)
    left = max(closed_left, int(sides.left) if sides is not None else 0)
    right = min(closed_right, int(sides.right) if sides is not None else mesh.nx)
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


def assemble(mesh: Mesh, p: Properties, dt: float, damping: EdgeDamping, dtype) -> Ground:
    """Return all that the kernels need of mesh, ground and edges for steps of `dt` s."""
    sides = absorbing.sides(mesh, damping.speed, damping.shift, dt, dtype)
    layers = absorbing.layers(mesh, damping.speed, damping.shift, dt, dtype)
    in_layer = layers.index >= 0 if layers is not None else np.zeros(mesh.nz, dtype=bool)
    return Ground(
        frame=frame(mesh),
        material=material(mesh, p, dt, dtype),
        rows=rows(mesh, in_layer, dtype),
        columns=columns(mesh, sides, dtype),
        sides=sides,
        layers=layers,
    )
