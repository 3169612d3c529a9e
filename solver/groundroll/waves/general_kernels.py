"""General row kernels: one row of any kind, derivative by derivative.

Each derivative is formed in a scratch row, corrected by edges and absorbing layers, and then used. They
serve rows near closed edges, in absorbing layers, under terrain or with attenuation, and the columns near
the ends of the mesh.
"""

import numpy as np

from groundroll.waves.access import GROUND, STRESS, VELOCITY, WORK, at, put
from groundroll.waves.cell import HALF_MOMENTUM, HALF_STRAIN, NODE_MOMENTUM, NODE_STRAIN
from groundroll.waves.edge_kernels import absorb_along_x, absorb_along_z, fade
from groundroll.waves.jit import inline, kernel
from groundroll.waves.memory_kernels import relax, take_difference
from groundroll.waves.stencils import ONE, add, sum_rows, to_half, to_node
from groundroll.waves.terrain_kernels import (
    depth_force_x,
    depth_force_z,
    depth_strain_normal,
    depth_strain_shear,
    times_stretch,
)

U = np.uint64


@inline
def derivative_x(out, f, family, base, k, a, b, operator, ground):
    """out[i] = d_x f on columns a..b-1 of the row whose column 0 is entry `base`, edges included."""
    columns = ground.columns
    c1, c2, c3 = columns.c[0], columns.c[1], columns.c[2]
    if operator == HALF_STRAIN or operator == HALF_MOMENTUM:
        for i in range(a, b):
            put(out, i, to_half(f, base + i, ONE, c1, c2, c3, family), WORK)
    else:
        for i in range(a, b):
            put(out, i, to_node(f, base + i, ONE, c1, c2, c3, family), WORK)
    for i in range(a, min(b, columns.closed_left)):
        out[i] = closed_column(f, base, i, operator, columns)
    for i in range(max(a, columns.closed_right), b):
        out[i] = closed_column(f, base, i, operator, columns)
    absorb_along_x(out, k, a, b, operator, ground.sides)


@inline
def closed_column(f, base, i, operator, columns):
    """d_x f at a column near a closed edge."""
    first = base + columns.first[operator, i]
    total = columns.weight[operator, i, 0] * f[first]
    for tap in range(1, 8):
        total += columns.weight[operator, i, tap] * f[first + U(tap)]
    return total


@inline
def derivative_z(out, f, family, k, a, b, operator, ground):
    """out[i] = d_z f on columns a..b-1 of row k, by the row's own operator (closures included)."""
    rows = ground.rows
    sum_rows(out, WORK, f, family, rows.first[operator, k], rows.weight[operator, k], a, b, ground.frame.pitch)
    absorb_along_z(out, k, a, b, operator, ground.layers)


@inline
def times_sum(f, factor, p, q, base, a, b, family):
    """f += factor (p + q) on columns a..b-1 of a row; p and q are scratch."""
    for i in range(a, b):
        add(f, base + i, at(factor, base + i, GROUND) * (at(p, i, WORK) + at(q, i, WORK)), family)


@kernel
def general_velocity(k, a, b, ground, f, scratch):
    """Advance vx and vz of one row of any kind on columns a..b-1.

    Level rows: vx += bx (d_x sxx + d_z sxz), vz += bz (d_x sxz + d_z szz); under terrain the x derivative
    acts on J s and the z derivative on Tx, Tz (`terrain_kernels.py`), and bx, bz hold 1/J.
    """
    m = ground.material
    base = ground.frame.origin + k * ground.frame.pitch
    p, q, t = scratch[0], scratch[1], scratch[2]
    if k < ground.terrain.rows:
        times_stretch(t, f.sxx, k, a, b, 0, ground)
        derivative_x(p, t, WORK, ground.frame.margin, k, a, b, HALF_MOMENTUM, ground)
        depth_force_x(q, k, a, b, ground)
    else:
        derivative_x(p, f.sxx, STRESS, base, k, a, b, HALF_MOMENTUM, ground)
        derivative_z(q, f.sxz, STRESS, k, a, b, NODE_MOMENTUM, ground)
    times_sum(f.vx, m.bx, p, q, base, a, b, VELOCITY)
    fade(f.vx, k, a, b, 1, 0, ground)
    if k < ground.terrain.rows:
        times_stretch(t, f.sxz, k, a, b, 1, ground)
        derivative_x(p, t, WORK, ground.frame.margin, k, a, b, NODE_MOMENTUM, ground)
        depth_force_z(q, k, a, b, ground)
    else:
        derivative_x(p, f.sxz, STRESS, base, k, a, b, NODE_MOMENTUM, ground)
        derivative_z(q, f.szz, STRESS, k, a, b, HALF_MOMENTUM, ground)
    times_sum(f.vz, m.bz, p, q, base, a, b, VELOCITY)
    fade(f.vz, k, a, b, 0, 1, ground)


@kernel
def strain_rates(k, a, b, ground, f, scratch):
    """Form exx, ezz and 2exz of one row on columns a..b-1 in scratch rows 0, 1 and 2."""
    base = ground.frame.origin + k * ground.frame.pitch
    ex, ez, g, q = scratch[0], scratch[1], scratch[2], scratch[3]
    derivative_x(ex, f.vx, VELOCITY, base, k, a, b, NODE_STRAIN, ground)
    derivative_x(g, f.vz, VELOCITY, base, k, a, b, HALF_STRAIN, ground)
    if k < ground.terrain.rows:
        depth_strain_normal(ex, ez, k, a, b, ground, scratch)
        depth_strain_shear(g, k, a, b, ground, scratch)
    else:
        derivative_z(ez, f.vz, VELOCITY, k, a, b, NODE_STRAIN, ground)
        derivative_z(q, f.vx, VELOCITY, k, a, b, HALF_STRAIN, ground)
        for i in range(a, b):
            add(g, i, at(q, i, WORK), WORK)


@kernel
def general_stress(k, a, b, ground, f, scratch):
    """Advance the stresses of one row of any kind on columns a..b-1.

    sxx += c11 exx + c13 ezz,  szz += c13 exx + c33 ezz,  sxz += mu 2exz, each less what relaxes
    (`memory_kernels.py`).
    """
    strain_rates(k, a, b, ground, f, scratch)
    if ground.memory.count > 0:
        relax(k, a, b, ground, scratch)
    m = ground.material
    base = ground.frame.origin + k * ground.frame.pitch
    ex, ez, g = scratch[0], scratch[1], scratch[2]
    for i in range(a, b):
        j = base + i
        x, z, across = at(ex, i, WORK), at(ez, i, WORK), at(m.c13, j, GROUND)
        add(f.sxx, j, at(m.c11, j, GROUND) * x + across * z, STRESS)
        add(f.szz, j, across * x + at(m.c33, j, GROUND) * z, STRESS)
    for i in range(a, b):
        j = base + i
        add(f.sxz, j, at(m.mu, j, GROUND) * at(g, i, WORK), STRESS)
    if ground.memory.count > 0:
        take_difference(k, a, b, ground, f, scratch)
    fade(f.sxx, k, a, b, 0, 0, ground)
    fade(f.szz, k, a, b, 0, 0, ground)
    fade(f.sxz, k, a, b, 1, 1, ground)
