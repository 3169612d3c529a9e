"""The ground sampled onto the staggered positions of a mesh, absorbing layers included.

Each property is averaged over the rectangle around its own position, so an interface may lie anywhere
between nodes: density arithmetically at the velocity points, shear modulus harmonically at sxz, stiffness
by the orthorhombic effective medium at the nodes. Absorbing layers continue the section's outermost cells.
"""

import numpy as np

from groundroll.ground.averaging import effective
from groundroll.ground.model import GroundModel
from groundroll.waves.assembly import Properties
from groundroll.waves.mesh import Mesh


def row_bounds(mesh: Mesh) -> tuple[np.ndarray, np.ndarray]:
    """Return depths (section rows + 1,) bounding the cells of node rows and of half rows.

    A node row on a free or rigid edge has half a cell.
    """
    node, half = mesh.depth_node[mesh.section_rows], mesh.depth_half[mesh.section_rows]
    above = node[0] if mesh.edges[2] != "absorb" else node[0] - (half[0] - node[0])
    below = half[-1] + (half[-1] - node[-1])
    node_bounds = np.concatenate([[above], half])
    if mesh.edges[3] != "absorb":
        node_bounds[-1] = node[-1]
    return node_bounds, np.concatenate([node, [below]])


def _extended(values: np.ndarray, mesh: Mesh) -> np.ndarray:
    """Continue section values (rows, columns or 1) into the absorbing layers; one column stays one column."""
    left, right, top, bottom = mesh.absorbing
    sides = (left, right) if values.shape[1] > 1 else (0, 0)
    return np.pad(values, ((top, bottom), sides), mode="edge")


def sample(model: GroundModel, mesh: Mesh) -> Properties:
    """Return the effective properties on `mesh`, (nz, nx), or (nz, 1) where all columns are alike."""
    node_x, half_x = mesh.x_node[mesh.section_columns], mesh.x_half[mesh.section_columns]
    node_rows, half_rows = (bounds[:, None] for bounds in row_bounds(mesh))
    h = mesh.spacing

    def mean(x, bounds, kind):
        return effective(model, x, h, bounds, kind)

    stiffness = mean(node_x, node_rows, "stiffness")
    shear = mean(half_x, half_rows, "shear")
    return Properties(
        density_x=_extended(mean(half_x, node_rows, "density"), mesh),
        density_z=_extended(mean(node_x, half_rows, "density"), mesh),
        c11=_extended(stiffness.c11, mesh),
        c13=_extended(stiffness.c13, mesh),
        c33=_extended(stiffness.c33, mesh),
        shear=_extended(shear.shear, mesh),
    )
