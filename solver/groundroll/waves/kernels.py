"""The physics, row by row: one half step of velocity or stress between two columns.

    rho dv/dt = div sigma + f            velocity_band   (v at n - 1/2 -> n + 1/2)
    d sigma/dt = C : sym grad v - g      stress_band     (sigma at n -> n + 1)

The ledger of symbols is in `cell.py` and `state.py`. Fast kernels advance two rows of plain ground at
once; general kernels serve every other row and the columns near the ends of the mesh: they form each
derivative in a scratch row, let an edge correct it, and then update. A cell is served by the same
kernel in every marching order, so all orders give the same bits.

All indices are unsigned: a signed index would be tested for Python's wrap-around in every load, which
keeps the loops from vectorising.
"""

import numpy as np

from groundroll.waves.cell import HALF_MOMENTUM, HALF_STRAIN, NODE_MOMENTUM, NODE_STRAIN
from groundroll.waves.edge_kernels import absorb_along_x, absorb_along_z
from groundroll.waves.jit import inline, kernel

U = np.uint64
ONE, TWO, THREE = U(1), U(2), U(3)
HALF_ABOVE, NODE_ABOVE = U(3), U(2)


@inline
def to_half(f, i, s, c1, c2, c3):
    """c1 (f1 - f0) + c2 (f2 - f-1) + c3 (f3 - f-2), stride s: from nodes to the half point after i."""
    return c1 * (f[i + s] - f[i]) + c2 * (f[i + TWO * s] - f[i - s]) + c3 * (f[i + THREE * s] - f[i - TWO * s])


@inline
def to_node(f, i, s, c1, c2, c3):
    """The same from half points to node i."""
    return c1 * (f[i] - f[i - s]) + c2 * (f[i + s] - f[i - TWO * s]) + c3 * (f[i + TWO * s] - f[i - THREE * s])


@kernel
def fast_velocity(a, b, pitch, c, zn, zh, f, bx, bz):
    """Advance vx and vz of two plain rows, flat entries a..b-1 and the same a row further down.

    vx += bx (d_x sxx + d_z sxz),  vz += bz (d_x sxz + d_z szz); `zn`, `zh` (2, 3): coefficients along
    z at the node and half rows.
    """
    vx, vz, sxx, szz, sxz = f.vx, f.vz, f.sxx, f.szz, f.sxz
    c1, c2, c3 = c[0], c[1], c[2]
    p1, p2, p3, q1, q2, q3 = zn[0, 0], zn[0, 1], zn[0, 2], zn[1, 0], zn[1, 1], zn[1, 2]
    for i in range(a, b):
        j = i + pitch
        upper = bx[i] * (to_half(sxx, i, ONE, c1, c2, c3) + to_node(sxz, i, pitch, p1, p2, p3))
        lower = bx[j] * (to_half(sxx, j, ONE, c1, c2, c3) + to_node(sxz, j, pitch, q1, q2, q3))
        vx[i] += upper
        vx[j] += lower
    p1, p2, p3, q1, q2, q3 = zh[0, 0], zh[0, 1], zh[0, 2], zh[1, 0], zh[1, 1], zh[1, 2]
    for i in range(a, b):
        j = i + pitch
        upper = bz[i] * (to_node(sxz, i, ONE, c1, c2, c3) + to_half(szz, i, pitch, p1, p2, p3))
        lower = bz[j] * (to_node(sxz, j, ONE, c1, c2, c3) + to_half(szz, j, pitch, q1, q2, q3))
        vz[i] += upper
        vz[j] += lower


@kernel
def fast_stress(a, b, pitch, c, zn, zh, f, c11, c13, c33, mu):
    """Advance the stresses of two plain rows.

    sxx += c11 exx + c13 ezz,  szz += c13 exx + c33 ezz,  sxz += mu (d_x vz + d_z vx).
    """
    vx, vz, sxx, szz, sxz = f.vx, f.vz, f.sxx, f.szz, f.sxz
    c1, c2, c3 = c[0], c[1], c[2]
    p1, p2, p3, q1, q2, q3 = zn[0, 0], zn[0, 1], zn[0, 2], zn[1, 0], zn[1, 1], zn[1, 2]
    for i in range(a, b):
        j = i + pitch
        ex, ez = to_node(vx, i, ONE, c1, c2, c3), to_node(vz, i, pitch, p1, p2, p3)
        gx, gz = to_node(vx, j, ONE, c1, c2, c3), to_node(vz, j, pitch, q1, q2, q3)
        sxx[i] += c11[i] * ex + c13[i] * ez
        szz[i] += c13[i] * ex + c33[i] * ez
        sxx[j] += c11[j] * gx + c13[j] * gz
        szz[j] += c13[j] * gx + c33[j] * gz
    p1, p2, p3, q1, q2, q3 = zh[0, 0], zh[0, 1], zh[0, 2], zh[1, 0], zh[1, 1], zh[1, 2]
    for i in range(a, b):
        j = i + pitch
        upper = mu[i] * (to_half(vz, i, ONE, c1, c2, c3) + to_half(vx, i, pitch, p1, p2, p3))
        lower = mu[j] * (to_half(vz, j, ONE, c1, c2, c3) + to_half(vx, j, pitch, q1, q2, q3))
        sxz[i] += upper
        sxz[j] += lower


@kernel
def derivative_x(out, f, base, k, a, b, operator, ground):
    """out[i] = d_x f on columns a..b-1 of the row whose column 0 is entry `base`, edges included."""
    columns = ground.columns
    c1, c2, c3 = columns.c[0], columns.c[1], columns.c[2]
    if operator == HALF_STRAIN or operator == HALF_MOMENTUM:
        for i in range(a, b):
            out[i] = to_half(f, base + i, ONE, c1, c2, c3)
    else:
        for i in range(a, b):
            out[i] = to_node(f, base + i, ONE, c1, c2, c3)
    for i in range(a, min(b, columns.closed_left)):
        out[i] = closed_column(f, base, i, operator, columns)
    for i in range(max(a, columns.closed_right), b):
        out[i] = closed_column(f, base, i, operator, columns)
    if ground.sides is not None:
        absorb_along_x(out, k, a, b, operator, ground.sides)


@inline
def closed_column(f, base, i, operator, columns):
    """d_x f at a column near a closed edge."""
    first = base + columns.first[operator, i]
    total = columns.weight[operator, i, 0] * f[first]
    for tap in range(1, 8):
        total += columns.weight[operator, i, tap] * f[first + U(tap)]
    return total


@kernel
def derivative_z(out, f, k, a, b, operator, ground):
    """out[i] = d_z f on columns a..b-1 of row k, by the row's own operator (closures included)."""
    pitch = ground.frame.pitch
    w = ground.rows.weight[operator, k]
    w0, w1, w2, w3, w4, w5, w6, w7 = w[0], w[1], w[2], w[3], w[4], w[5], w[6], w[7]
    r = ground.rows.first[operator, k]
    for i in range(r + a, r + b):
        j = i + U(4) * pitch
        upper = w0 * f[i] + w1 * f[i + pitch] + w2 * f[i + TWO * pitch] + w3 * f[i + THREE * pitch]
        lower = w4 * f[j] + w5 * f[j + pitch] + w6 * f[j + TWO * pitch] + w7 * f[j + THREE * pitch]
        out[i - r] = upper + lower
    if ground.layers is not None:
        absorb_along_z(out, k, a, b, operator, ground.layers)


@kernel
def general_velocity(k, a, b, ground, f, scratch):
    """Advance vx and vz of one row of any kind on columns a..b-1."""
    m = ground.material
    base = ground.frame.origin + k * ground.frame.pitch
    p, q = scratch[0], scratch[1]
    derivative_x(p, f.sxx, base, k, a, b, HALF_MOMENTUM, ground)
    derivative_z(q, f.sxz, k, a, b, NODE_MOMENTUM, ground)
    for i in range(a, b):
        f.vx[base + i] += m.bx[base + i] * (p[i] + q[i])
    derivative_x(p, f.sxz, base, k, a, b, NODE_MOMENTUM, ground)
    derivative_z(q, f.szz, k, a, b, HALF_MOMENTUM, ground)
    for i in range(a, b):
        f.vz[base + i] += m.bz[base + i] * (p[i] + q[i])


@kernel
def general_stress(k, a, b, ground, f, scratch):
    """Advance the stresses of one row of any kind on columns a..b-1."""
    m = ground.material
    base = ground.frame.origin + k * ground.frame.pitch
    ex, ez, p, q = scratch[0], scratch[1], scratch[2], scratch[3]
    derivative_x(ex, f.vx, base, k, a, b, NODE_STRAIN, ground)
    derivative_z(ez, f.vz, k, a, b, NODE_STRAIN, ground)
    derivative_x(p, f.vz, base, k, a, b, HALF_STRAIN, ground)
    derivative_z(q, f.vx, k, a, b, HALF_STRAIN, ground)
    for i in range(a, b):
        f.sxx[base + i] += m.c11[base + i] * ex[i] + m.c13[base + i] * ez[i]
    for i in range(a, b):
        f.szz[base + i] += m.c13[base + i] * ex[i] + m.c33[base + i] * ez[i]
    for i in range(a, b):
        f.sxz[base + i] += m.mu[base + i] * (p[i] + q[i])


@inline
def fast_span(band, a, b, ground):
    """Return the columns of a..b-1 that the fast kernels serve, as a span (empty at b if none)."""
    left = min(b, max(a, ground.columns.left)) if ground.rows.plain[band] else b
    return left, max(left, min(b, ground.columns.right))


@kernel
def velocity_band(band, a, b, ground, f, scratch):
    """Advance the velocity of both rows of a band on columns a..b-1."""
    m, rows, pitch = ground.material, ground.rows, ground.frame.pitch
    k = TWO * band
    at = ground.frame.origin + k * pitch
    left, right = fast_span(band, a, b, ground)
    if left < right:
        zn, zh = rows.node[k : k + TWO], rows.half[k : k + TWO]
        fast_velocity(at + left, at + right, pitch, ground.columns.c, zn, zh, f, m.bx, m.bz)
    for row in range(k, min(k + TWO, rows.count)):
        if a < left:
            general_velocity(row, a, left, ground, f, scratch)
        if right < b:
            general_velocity(row, right, b, ground, f, scratch)


@kernel
def stress_band(band, a, b, ground, f, scratch):
    """Advance the stresses of both rows of a band on columns a..b-1."""
    m, rows, pitch = ground.material, ground.rows, ground.frame.pitch
    k = TWO * band
    at = ground.frame.origin + k * pitch
    left, right = fast_span(band, a, b, ground)
    if left < right:
        zn, zh = rows.node[k : k + TWO], rows.half[k : k + TWO]
        c33 = m.c11 if m.even[band] else m.c33
        fast_stress(at + left, at + right, pitch, ground.columns.c, zn, zh, f, m.c11, m.c13, c33, m.mu)
    for row in range(k, min(k + TWO, rows.count)):
        if a < left:
            general_stress(row, a, left, ground, f, scratch)
        if right < b:
            general_stress(row, right, b, ground, f, scratch)
