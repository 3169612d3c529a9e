"""Corrections of a derivative in absorbing columns and rows; the layer itself is set up in `absorbing.py`.

With the recursion psi <- b psi + a d the absorbing layer replaces a derivative d by d + psi (Roden & Gedney
2000, Microw. Opt. Technol. Lett. 27, 334; Komatitsch & Martin 2007, Geophysics 72, SM155).
"""

import numpy as np

from groundroll.waves.access import EDGES, GROUND, STRESS, VELOCITY, WORK, at, put
from groundroll.waves.cell import HALF_MOMENTUM, HALF_STRAIN, NODE_MOMENTUM, NODE_STRAIN
from groundroll.waves.jit import inline, kernel
from groundroll.waves.stencils import ONE, to_half, to_node

U = np.uint64
NODE, HALF = 0, 1


@inline
def lies_half(operator):
    """1 if the derivative stands at half points, 0 at nodes."""
    return 1 if operator == HALF_STRAIN or operator == HALF_MOMENTUM else 0


@inline
def kept_after(psi, w, b, a, derivative):
    """Return psi <- b psi + a d of entry w."""
    kept = b * at(psi, w, EDGES) + a * derivative
    put(psi, w, kept, EDGES)
    return kept


@inline
def convolve(d, i, psi, w, rb, ra):
    """psi <- rb psi + ra d,  d += psi."""
    derivative = at(d, i, WORK)
    put(d, i, derivative + kept_after(psi, w, rb, ra, derivative), WORK)


@kernel
def absorb_along_x(d, k, a, b, operator, sides):
    """Correct d[a..b-1] = d_x of a field on row k in the absorbing columns of both sides."""
    psi, half = sides.psi[operator, k], lies_half(operator)
    rb, ra = sides.b[half], sides.a[half]
    for i in range(a, min(b, sides.left)):
        convolve(d, i, psi, i, rb[i], ra[i])
    for i in range(max(a, sides.right), b):
        w = i - sides.right + sides.left
        convolve(d, i, psi, w, rb[w], ra[w])


@kernel
def absorb_along_z(d, k, a, b, operator, layers):
    """Correct d[a..b-1] = d_z of a field on row k if the row lies in an absorbing layer."""
    r = layers.index[k]
    if r < 0:
        return
    psi, half = layers.psi[operator, U(r)], lies_half(operator)
    rb, ra = layers.b[half, U(r)], layers.a[half, U(r)]
    for i in range(a, b):
        convolve(d, i, psi, i, rb, ra)


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


@inline
def corrected(f, j, factor, amount, family):
    """f[j] <- factor (f[j] + amount)."""
    put(f, j, factor * (at(f, j, family) + amount), family)


@kernel
def side_velocity(k, first, end, shift, ground, f):
    """Add what the absorbing columns first..end-1 of rows k and k + 1 lack after the fast kernel, and fade them.

    vx <- fade (vx + bx psi), vz <- fade (vz + bz psi); column i is entry i - shift of the sides' arrays.
    """
    m, sides, pitch = ground.material, ground.sides, ground.frame.pitch
    base = ground.frame.origin + k * pitch + shift
    c1, c2, c3 = ground.columns.c[0], ground.columns.c[1], ground.columns.c[2]
    vx, vz, sxx, sxz, bx, bz = f.vx, f.vz, f.sxx, f.sxz, m.bx, m.bz
    first, end = first - shift, end - shift
    upper, lower = sides.psi[HALF_MOMENTUM, k], sides.psi[HALF_MOMENTUM, k + ONE]
    b, a, factor = sides.b[HALF], sides.a[HALF], sides.fade[HALF]
    for w in range(first, end):
        j = base + w
        rb, ra, less = at(b, w, GROUND), at(a, w, GROUND), at(factor, w, GROUND)
        kept = kept_after(upper, w, rb, ra, to_half(sxx, j, ONE, c1, c2, c3, STRESS))
        corrected(vx, j, less, at(bx, j, GROUND) * kept, VELOCITY)
        kept = kept_after(lower, w, rb, ra, to_half(sxx, j + pitch, ONE, c1, c2, c3, STRESS))
        corrected(vx, j + pitch, less, at(bx, j + pitch, GROUND) * kept, VELOCITY)
    upper, lower = sides.psi[NODE_MOMENTUM, k], sides.psi[NODE_MOMENTUM, k + ONE]
    b, a, factor = sides.b[NODE], sides.a[NODE], sides.fade[NODE]
    for w in range(first, end):
        j = base + w
        rb, ra, less = at(b, w, GROUND), at(a, w, GROUND), at(factor, w, GROUND)
        kept = kept_after(upper, w, rb, ra, to_node(sxz, j, ONE, c1, c2, c3, STRESS))
        corrected(vz, j, less, at(bz, j, GROUND) * kept, VELOCITY)
        kept = kept_after(lower, w, rb, ra, to_node(sxz, j + pitch, ONE, c1, c2, c3, STRESS))
        corrected(vz, j + pitch, less, at(bz, j + pitch, GROUND) * kept, VELOCITY)


@kernel
def side_stress(k, first, end, shift, ground, f):
    """The same of the stresses: psi of d_x vx acts through c11 and c13, that of d_x vz through mu."""
    m, sides, pitch = ground.material, ground.sides, ground.frame.pitch
    base = ground.frame.origin + k * pitch + shift
    c1, c2, c3 = ground.columns.c[0], ground.columns.c[1], ground.columns.c[2]
    vx, vz, sxx, szz, sxz, c11, c13, mu = f.vx, f.vz, f.sxx, f.szz, f.sxz, m.c11, m.c13, m.mu
    first, end = first - shift, end - shift
    for row in range(2):
        psi, b, a, factor = sides.psi[NODE_STRAIN, k + U(row)], sides.b[NODE], sides.a[NODE], sides.fade[NODE]
        for w in range(first, end):
            j = base + U(row) * pitch + w
            rb, ra, less = at(b, w, GROUND), at(a, w, GROUND), at(factor, w, GROUND)
            kept = kept_after(psi, w, rb, ra, to_node(vx, j, ONE, c1, c2, c3, VELOCITY))
            corrected(sxx, j, less, at(c11, j, GROUND) * kept, STRESS)
            corrected(szz, j, less, at(c13, j, GROUND) * kept, STRESS)
    upper, lower = sides.psi[HALF_STRAIN, k], sides.psi[HALF_STRAIN, k + ONE]
    b, a, factor = sides.b[HALF], sides.a[HALF], sides.fade[HALF]
    for w in range(first, end):
        j = base + w
        rb, ra, less = at(b, w, GROUND), at(a, w, GROUND), at(factor, w, GROUND)
        kept = kept_after(upper, w, rb, ra, to_half(vz, j, ONE, c1, c2, c3, VELOCITY))
        corrected(sxz, j, less, at(mu, j, GROUND) * kept, STRESS)
        kept = kept_after(lower, w, rb, ra, to_half(vz, j + pitch, ONE, c1, c2, c3, VELOCITY))
        corrected(sxz, j + pitch, less, at(mu, j + pitch, GROUND) * kept, STRESS)
