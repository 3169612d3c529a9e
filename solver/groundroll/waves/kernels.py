"""The physics, row by row: one half step of velocity or stress between two columns.

    rho dv/dt = div sigma + f            velocity_band   (v at n - 1/2 -> n + 1/2)
    d sigma/dt = C : sym grad v - g      stress_band     (sigma at n -> n + 1)

The ledger of symbols is in `cell.py` and `state.py`. Fast kernels advance two rows of plain ground at
once; general kernels (`general_kernels.py`) serve every other row and the columns near the ends of the
mesh. A cell is served by the same kernel in every marching order, so all orders give the same bits.

All indices are unsigned: a signed index would be tested for Python's wrap-around in every load, which
keeps the loops from vectorising.
"""

from groundroll.waves.general_kernels import general_stress, general_velocity
from groundroll.waves.jit import inline, kernel
from groundroll.waves.stencils import ONE, TWO, to_half, to_node
from groundroll.waves.terrain_kernels import force_helpers, strain_helpers


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


@inline
def fast_span(band, a, b, plain, ground):
    """Return the columns of a..b-1 that the fast kernels serve, as a span (empty at b if none)."""
    left = min(b, max(a, ground.columns.left)) if plain[band] else b
    return left, max(left, min(b, ground.columns.right))


@kernel
def velocity_band(band, a, b, ground, f, scratch):
    """Advance the velocity of both rows of a band on columns a..b-1."""
    m, rows, pitch = ground.material, ground.rows, ground.frame.pitch
    k = TWO * band
    at = ground.frame.origin + k * pitch
    left, right = fast_span(band, a, b, rows.plain_velocity, ground)
    if left < right:
        zn, zh = rows.node[k : k + TWO], rows.half[k : k + TWO]
        fast_velocity(at + left, at + right, pitch, ground.columns.c, zn, zh, f, m.bx, m.bz)
    for row in range(k, min(k + TWO, rows.count)):
        begin, end = a, left
        for _ in range(2):
            if begin < end:
                general_velocity(row, begin, end, ground, f, scratch)
            begin, end = right, b


@kernel
def stress_band(band, a, b, ground, f, scratch):
    """Advance the stresses of both rows of a band on columns a..b-1."""
    m, rows, pitch = ground.material, ground.rows, ground.frame.pitch
    k = TWO * band
    at = ground.frame.origin + k * pitch
    left, right = fast_span(band, a, b, rows.plain_stress, ground)
    if left < right:
        zn, zh = rows.node[k : k + TWO], rows.half[k : k + TWO]
        c33 = m.c11 if m.even[band] else m.c33
        fast_stress(at + left, at + right, pitch, ground.columns.c, zn, zh, f, m.c11, m.c13, c33, m.mu)
    for row in range(k, min(k + TWO, rows.count)):
        begin, end = a, left
        for _ in range(2):
            if begin < end:
                general_stress(row, begin, end, ground, f, scratch)
            begin, end = right, b


@kernel
def force_band(band, a, b, ground, f, scratch):
    """Form the terrain's Tx, Tz on both rows of a band, columns a..b-1; nothing on level ground."""
    for row in range(TWO * band, min(TWO * band + TWO, ground.terrain.helper_rows)):
        force_helpers(row, a, b, ground, f, scratch)


@kernel
def strain_band(band, a, b, ground, f):
    """Form the terrain's gx, gz on both rows of a band, columns a..b-1; nothing on level ground."""
    for row in range(TWO * band, min(TWO * band + TWO, ground.terrain.helper_rows)):
        strain_helpers(row, a, b, ground, f)
