"""The ground sampled onto the staggered positions of a mesh, absorbing layers included.

Each property is averaged over the cell around its own position, so an interface may lie anywhere between
nodes: density arithmetically at the velocity points, shear modulus harmonically at sxz, stiffness by the
orthorhombic effective medium at the nodes. Absorbing layers continue the section's outermost cells.
"""

from typing import NamedTuple

import numpy as np

from groundroll.ground.averaging import Shear, Stiffness, effective
from groundroll.ground.model import GroundModel
from groundroll.running.losses import LossModel
from groundroll.waves.assembly import Properties
from groundroll.waves.attenuation import Loss
from groundroll.waves.mesh import Mesh


def row_bounds(mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return level depths (section rows + 1,) bounding the cells of node rows and of half rows.

    A node row on a free or rigid edge has half a cell.
    """
    node, half = mesh.depth_node[mesh.section_rows], mesh.depth_half[mesh.section_rows]
    above = node[0] if mesh.edges[2] != "absorb" else node[0] - (half[0] - node[0])
    below = half[-1] + (half[-1] - node[-1])
    node_bounds = np.concatenate([[above], half])
    if mesh.edges[3] != "absorb":
        node_bounds[-1] = node[-1]
    return node_bounds, np.concatenate([node, [below]])


def z_bounds(mesh: Mesh, level: np.ndarray, half_column: bool) -> np.ndarray:
    """Return z (rows + 1, columns or 1) of level depths on the mapped mesh, in the section's columns."""
    if mesh.terrain is None:
        return level[:, None]
    shift = mesh.terrain.shift[int(half_column)][mesh.section_columns]
    return mesh.datum + level[:, None] + shift[None, :] * mesh.terrain.blend_at(level)[:, None]


def extended(values: np.ndarray, mesh: Mesh) -> np.ndarray:
    """Continue section values (rows, columns or 1) into the absorbing layers; one column stays one column."""
    left, right, top, bottom = mesh.absorbing
    sides = (left, right) if values.shape[1] > 1 else (0, 0)
    return np.pad(values, ((top, bottom), sides), mode="edge")


class Sampler:
    """Averages of a ground over the cells of a mesh."""

    def __init__(self, model: GroundModel, mesh: Mesh):
        self._model, self._mesh = model, mesh
        self._levels = row_bounds(mesh)

    def mean(self, kind: str, half_column: bool, half_row: bool):
        """Return the average `kind` of `averaging.effective` at one kind of position, absorbing layers included."""
        mesh = self._mesh
        x = (mesh.x_half if half_column else mesh.x_node)[mesh.section_columns]
        x = np.clip(x, mesh.x_node[mesh.section_columns][0], mesh.x_node[mesh.section_columns][-1])
        bounds = z_bounds(mesh, self._levels[int(half_row)], half_column)
        found = effective(self._model, x, mesh.spacing, bounds, kind)
        if isinstance(found, np.ndarray):
            return extended(found, mesh)
        return type(found)(*(extended(v, mesh) for v in found))


class OnMesh(NamedTuple):
    """Properties and losses on the mesh, (nz, nx), or (nz, 1) where all columns are alike; with losses the moduli are
    the unrelaxed ones. `shown`: vp along z, vs, density, qp, qs as they were meant, for pictures."""

    properties: Properties
    loss: Loss | None
    shown: dict[str, np.ndarray]


def sample(model: GroundModel, mesh: Mesh, losses: LossModel | None) -> OnMesh:
    """Return the effective ground on `mesh`."""
    sampler = Sampler(model, mesh)
    density_x, density_z = sampler.mean("density", True, False), sampler.mean("density", False, True)
    stiffness, shear = sampler.mean("stiffness", False, False), sampler.mean("shear", True, True)
    density_x, density_z = beside_voids(density_x, density_z, stiffness, shear)
    shown = at_reference(density_x, stiffness, shear)
    loss = None
    if losses is not None:
        loss = loss_on_mesh(losses, stiffness, shear)
        stiffness, shear = unrelaxed(losses, stiffness, shear)
    properties = Properties(density_x, density_z, stiffness.c11, stiffness.c13, stiffness.c33, shear.shear)
    return OnMesh(properties, loss, shown)


def beside_voids(density_x, density_z, stiffness: Stiffness, shear: Shear) -> tuple[np.ndarray, np.ndarray]:
    """Return the densities with inf (no motion) where no stress acts, and with a mass wherever one does.

    A velocity cell that is wholly void can have a stress beside it that is not; it takes the least density about it.
    """
    if not (stiffness.c33 == 0.0).any() and not (shear.shear == 0.0).any():
        return density_x, density_z
    normal, across = stiffness.c33 > 0.0, shear.shear > 0.0
    # vx lies between nodes i, i + 1 and between half rows k - 1/2, k + 1/2; vz between rows k, k + 1 and half columns.
    acts_x = normal | shifted(normal, -1, 1) | across | shifted(across, 1, 0)
    acts_z = normal | shifted(normal, -1, 0) | across | shifted(across, 1, 1)
    return with_mass(density_x, acts_x), with_mass(density_z, acts_z)


def shifted(values: np.ndarray, by: int, axis: int) -> np.ndarray:
    """Return values[k - by] along `axis`, the ends repeated."""
    index = np.clip(np.arange(values.shape[axis]) - by, 0, values.shape[axis] - 1)
    return np.take(values, index, axis=axis)


def with_mass(density: np.ndarray, acts: np.ndarray) -> np.ndarray:
    about = np.minimum.reduce([shifted(density, by, axis) for by in (-1, 1) for axis in (0, 1)])
    return np.where(acts, np.where(np.isfinite(density), density, about), np.inf)


def at_reference(density, stiffness: Stiffness, shear: Shear) -> dict[str, np.ndarray]:
    """Return speeds (NaN in a void), density and quality factors (inf: elastic)."""
    with np.errstate(divide="ignore", invalid="ignore"):
        vp, vs = np.sqrt(stiffness.c33 / density), np.sqrt(shear.shear / density)
        return {"vp": vp, "vs": vs, "density": density, "qp": 1.0 / stiffness.inverse_qp, "qs": 1.0 / stiffness.inverse_qs}


def unrelaxed(losses: LossModel, stiffness: Stiffness, shear: Shear) -> tuple[Stiffness, Shear]:
    """Scale moduli meant at the reference frequency to infinite frequency: M by its own factor, c11 - c13 = 2 mu by its own."""
    p, s = losses.unrelaxed(stiffness.inverse_qp), losses.unrelaxed(stiffness.inverse_qs)
    coupling = stiffness.c11 * p - (stiffness.c11 - stiffness.c13) * s
    scaled = stiffness._replace(c11=stiffness.c11 * p, c13=coupling, c33=stiffness.c33 * p)
    return scaled, shear._replace(shear=shear.shear * losses.unrelaxed(shear.inverse_qs))


def loss_on_mesh(losses: LossModel, stiffness: Stiffness, shear: Shear) -> Loss:
    """Return the coefficients of both shapes."""
    return Loss(
        omega=losses.omega,
        shapes=losses.shapes,
        p_node=losses.coefficients(stiffness.inverse_qp),
        s_node=losses.coefficients(stiffness.inverse_qs),
        s_corner=losses.coefficients(shear.inverse_qs),
    )
