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
    return Memory(0, none, none, none, (none,) * (3 * MECHANISMS), *(none,) * 6)


def memory(mesh, p, loss: Loss | None, dt: float, dtype) -> Memory:
    """Return memory variables at rest and their coefficients; E_l by the trapezoidal rule (`relaxation.py`).

    Old and new xi_l have the mean (1 - E_l) ((1 + E_l) x_l + e)/2, which `y` and `z` weight.
    """
    if loss is None:
        return no_memory(dtype)
    decay = decay_factor(loss.omega, dt)
    old, new = 0.5 * (1.0 - decay) * (1.0 + decay), 0.5 * (1.0 - decay)
    y, z = (np.append(shape * old, shape @ new) for shape in loss.shapes)
    flat = flat_zeros(mesh, 6 + 3 * MECHANISMS, dtype)
    at_p, at_s = at_edges(mesh, p, loss)
    for target, value in zip(flat, (*at_p, *(0.5 * (at_p - at_s)), *loss.s_corner), strict=False):
        inner(target, mesh)[:] = value
    xi = tuple(flat[6:])
    return Memory(MECHANISMS, *(v.astype(dtype) for v in (decay, y, z)), xi, *flat[:6])


def at_edges(mesh, p, loss: Loss) -> tuple[np.ndarray, np.ndarray]:
    """Return the coefficients (2, nz, nx) of P and S at nodes, on free edges those of what acts there.

    Along a free edge acts E' = 4 mu (M - mu)/M alone, M = lambda + 2 mu. Its loss, to first order in 1/Q, is
    ((M - 2 mu) S + mu P)/(M - mu), for P and for S alike.
    """
    shape = (2, mesh.nz, mesh.nx)
    at_p, at_s = (np.array(np.broadcast_to(c, shape)) for c in (loss.p_node, loss.s_node))
    left, right, top, bottom = (edge == "free" for edge in mesh.edges)
    for edge in [np.s_[:, 0]] * top + [np.s_[:, -1]] * bottom + [np.s_[:, :, 0]] * left + [np.s_[:, :, -1]] * right:
        m, lame = (np.broadcast_to(c, shape)[edge] for c in (p.c11, p.c13))
        mu = 0.5 * (m - lame)
        share = np.divide(mu, m - mu, out=np.ones_like(m), where=m > mu)
        at_p[edge] = at_s[edge] = share * at_p[edge] + (1.0 - share) * at_s[edge]
    return at_p, at_s
