"""Attenuation on the mesh: what the memory kernels need of the ground's losses."""

from dataclasses import dataclass

import numpy as np

from groundroll.waves.cell import MECHANISMS
from groundroll.waves.relaxation import decay_factor
from groundroll.waves.state import Memory, flat_zeros, inner


@dataclass(frozen=True)
class Loss:
    """Losses on the mesh: relaxation angular frequencies `omega` (count,), two `shapes` (2, count), and their
    coefficients (2, nz, nx or broadcast to it) for P and S at nodes and for S at sxz."""

    omega: np.ndarray
    shapes: np.ndarray
    p_node: np.ndarray
    s_node: np.ndarray
    s_corner: np.ndarray


def no_memory(dtype) -> Memory:
    """Return the attenuation of an elastic ground: nothing."""
    none = np.zeros(0, dtype)
    return Memory(0, none, none, none, none, none, none, np.zeros((0, 0), dtype), none, none, none, none, none, none)


def memory(mesh, loss: Loss | None, dt: float, dtype) -> Memory:
    """Return memory variables at rest and their coefficients; E_l by the trapezoidal rule (`relaxation.py`)."""
    if loss is None:
        return no_memory(dtype)
    decay = decay_factor(loss.omega, dt)
    gain = 1.0 - decay
    old, new = 0.5 * (1.0 + decay), 0.5 * gain
    count = MECHANISMS
    size = mesh.padded_rows * mesh.pitch
    flat = flat_zeros(mesh, 6, dtype)
    for target, value in zip(flat, (*loss.p_node, *loss.s_node, *loss.s_corner), strict=True):
        inner(target, mesh)[:] = value
    y, z = loss.shapes
    scalars = (decay, gain, y * old, np.array([y @ new]), z * old, np.array([z @ new]))
    return Memory(count, *(v.astype(dtype) for v in scalars), np.zeros((3 * count, size), dtype), *flat)
