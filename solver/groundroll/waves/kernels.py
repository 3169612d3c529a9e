"""The physics, row by row: one half step of velocity or stress between two columns.

    rho dv/dt = div sigma + f            velocity_band   (v at n - 1/2 -> n + 1/2)
    d sigma/dt = C : sym grad v - g      stress_band     (sigma at n -> n + 1)

The ledger of symbols is in `cell.py` and `state.py`. Fast kernels advance two rows of plain ground at
once; general kernels (`general_kernels.py`) serve every other row and the columns near the ends of the
mesh. A cell is served by the same kernel in every marching order, so all orders give the same bits.

All indices are unsigned: a signed index would be tested for Python's wrap-around in every load, which
keeps the loops from vectorising.
"""

import numpy as np

from groundroll.waves.access import GROUND, STRESS, VELOCITY, at
from groundroll.waves.edge_kernels import side_stress, side_velocity
from groundroll.waves.general_kernels import general_stress, general_velocity
from groundroll.waves.jit import inline, kernel
from groundroll.waves.memory_kernels import fast_lossy_normal, fast_lossy_shear
from groundroll.waves.stencils import ONE, TWO, add, to_half, to_node
from groundroll.waves.terrain_kernels import force_helpers, strain_helpers

U = np.uint64


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
        upper = to_half(sxx, i, ONE, c1, c2, c3, STRESS) + to_node(sxz, i, pitch, p1, p2, p3, STRESS)
        lower = to_half(sxx, j, ONE, c1, c2, c3, STRESS) + to_node(sxz, j, pitch, q1, q2, q3, STRESS)
        add(vx, i, at(bx, i, GROUND) * upper, VELOCITY)
        add(vx, j, at(bx, j, GROUND) * lower, VELOCITY)
    p1, p2, p3, q1, q2, q3 = zh[0, 0], zh[0, 1], zh[0, 2], zh[1, 0], zh[1, 1], zh[1, 2]
    for i in range(a, b):
        j = i + pitch
        upper = to_node(sxz, i, ONE, c1, c2, c3, STRESS) + to_half(szz, i, pitch, p1, p2, p3, STRESS)
        lower = to_node(sxz, j, ONE, c1, c2, c3, STRESS) + to_half(szz, j, pitch, q1, q2, q3, STRESS)
        add(vz, i, at(bz, i, GROUND) * upper, VELOCITY)
        add(vz, j, at(bz, j, GROUND) * lower, VELOCITY)


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
        ex, ez = to_node(vx, i, ONE, c1, c2, c3, VELOCITY), to_node(vz, i, pitch, p1, p2, p3, VELOCITY)
        gx, gz = to_node(vx, j, ONE, c1, c2, c3, VELOCITY), to_node(vz, j, pitch, q1, q2, q3, VELOCITY)
        add(sxx, i, at(c11, i, GROUND) * ex + at(c13, i, GROUND) * ez, STRESS)
        add(szz, i, at(c13, i, GROUND) * ex + at(c33, i, GROUND) * ez, STRESS)
        add(sxx, j, at(c11, j, GROUND) * gx + at(c13, j, GROUND) * gz, STRESS)
        add(szz, j, at(c13, j, GROUND) * gx + at(c33, j, GROUND) * gz, STRESS)
    p1, p2, p3, q1, q2, q3 = zh[0, 0], zh[0, 1], zh[0, 2], zh[1, 0], zh[1, 1], zh[1, 2]
    for i in range(a, b):
        j = i + pitch
        upper = to_half(vz, i, ONE, c1, c2, c3, VELOCITY) + to_half(vx, i, pitch, p1, p2, p3, VELOCITY)
        lower = to_half(vz, j, ONE, c1, c2, c3, VELOCITY) + to_half(vx, j, pitch, q1, q2, q3, VELOCITY)
        add(sxz, i, at(mu, i, GROUND) * upper, STRESS)
        add(sxz, j, at(mu, j, GROUND) * lower, STRESS)


@inline
def fast_span(band, a, b, plain, ground):
    """Return the columns of a..b-1 that the fast kernels serve, as a span (empty at b if none)."""
    left = min(b, max(a, ground.columns.left)) if plain[band] else b
    return left, max(left, min(b, ground.columns.right))


@inline
def side_spans(left, right, ground):
    """Return the absorbing columns among left..right-1: (first, end, shift) on both sides, see `Sides`."""
    sides = ground.sides
    near, far = min(right, sides.left), max(left, sides.right)
    return (left, near, U(0)), (far, right, sides.right - sides.left)


@kernel
def plain_velocity(band, a, b, ground, f):
    """Advance the velocity of both rows of a plain band, columns a..b-1."""
    m, rows, pitch = ground.material, ground.rows, ground.frame.pitch
    k = TWO * band
    row = ground.frame.origin + k * pitch
    fast_velocity(row + a, row + b, pitch, ground.columns.c, rows.node[k : k + TWO], rows.half[k : k + TWO], f, m.bx, m.bz)
    for first, end, shift in side_spans(a, b, ground):
        if first < end:
            side_velocity(k, first, end, shift, ground, f)


@kernel
def velocity_band(band, a, b, ground, f, scratch):
    """Advance the velocity of both rows of a band on columns a..b-1."""
    left, right = fast_span(band, a, b, ground.rows.plain, ground)
    if left < right:
        plain_velocity(band, left, right, ground, f)
    for row in range(TWO * band, min(TWO * band + TWO, ground.rows.count)):
        begin, end = a, left
        for _ in range(2):
            if begin < end:
                general_velocity(row, begin, end, ground, f, scratch)
            begin, end = right, b


@kernel
def plain_stress(band, a, b, ground, f):
    """Advance the stresses of both rows of a plain band, columns a..b-1."""
    m, rows, pitch, c = ground.material, ground.rows, ground.frame.pitch, ground.columns.c
    c33 = m.c11 if m.even[band] else m.c33
    k = TWO * band
    row = ground.frame.origin + k * pitch
    if ground.memory.count > 0:
        for half in range(TWO):
            first, end = row + half * pitch + a, row + half * pitch + b
            fast_lossy_normal(first, end, pitch, c, rows.node[k + half], f, m.c11, m.c13, c33, ground.memory)
            fast_lossy_shear(first, end, pitch, c, rows.half[k + half], f, m.mu, ground.memory)
    else:
        zn, zh = rows.node[k : k + TWO], rows.half[k : k + TWO]
        fast_stress(row + a, row + b, pitch, c, zn, zh, f, m.c11, m.c13, c33, m.mu)
    for first, end, shift in side_spans(a, b, ground):
        if first < end:
            side_stress(k, first, end, shift, ground, f)


@kernel
def stress_band(band, a, b, ground, f, scratch):
    """Advance the stresses of both rows of a band on columns a..b-1."""
    left, right = fast_span(band, a, b, ground.rows.plain, ground)
    if left < right:
        plain_stress(band, left, right, ground, f)
    for row in range(TWO * band, min(TWO * band + TWO, ground.rows.count)):
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
