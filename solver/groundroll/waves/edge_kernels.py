"""Corrections of a derivative in absorbing columns and rows; the layer itself is set up in `absorbing.py`.

With the recursion psi <- b psi + a d the absorbing layer replaces a derivative d by d + psi (Roden & Gedney
2000, Microw. Opt. Technol. Lett. 27, 334; Komatitsch & Martin 2007, Geophysics 72, SM155).
"""

import numpy as np

from groundroll.waves.cell import HALF_MOMENTUM, HALF_STRAIN
from groundroll.waves.jit import inline, kernel

U = np.uint64


@inline
def lies_half(operator):
    """1 if the derivative stands at half points, 0 at nodes."""
    return 1 if operator == HALF_STRAIN or operator == HALF_MOMENTUM else 0


@kernel
def absorb_along_x(d, k, a, b, operator, sides):
    """Correct d[a..b-1] = d_x of a field on row k in the absorbing columns of both sides."""
    psi, half = sides.psi[operator, k], lies_half(operator)
    rb, ra = sides.b[half], sides.a[half]
    for i in range(a, min(b, sides.left)):
        psi[i] = rb[i] * psi[i] + ra[i] * d[i]
        d[i] += psi[i]
    for i in range(max(a, sides.right), b):
        w = i - sides.right + sides.left
        psi[w] = rb[w] * psi[w] + ra[w] * d[i]
        d[i] += psi[w]


@kernel
def absorb_along_z(d, k, a, b, operator, layers):
    """Correct d[a..b-1] = d_z of a field on row k if the row lies in an absorbing layer."""
    r = layers.index[k]
    if r < 0:
        return
    psi, half = layers.psi[operator, U(r)], lies_half(operator)
    rb, ra = layers.b[half, U(r)], layers.a[half, U(r)]
    for i in range(a, b):
        psi[i] = rb * psi[i] + ra * d[i]
    for i in range(a, b):
        d[i] += psi[i]


@kernel
def fade(f, k, a, b, half_column, half_row, ground):
    """Multiply a field on row k, columns a..b-1, by the fading of the absorbing columns and rows it lies in."""
    base = ground.frame.origin + k * ground.frame.pitch
    sides, layers = ground.sides, ground.layers
    factor = sides.fade[half_column]
    for i in range(a, min(b, sides.left)):
        f[base + i] *= factor[i]
    for i in range(max(a, sides.right), b):
        f[base + i] *= factor[i - sides.right + sides.left]
    r = layers.index[k]
    if r >= 0:
        across = layers.fade[half_row, U(r)]
        for i in range(base + a, base + b):
            f[i] *= across
