"""Row kernels of ground under a curved surface: the terrain-following mapping x = xi, z = z(xi, zeta).

With J = dz/dzeta and q = dz/dxi (z down), Cartesian velocity and stress on the usual staggering, I_x the
8-point interpolation between node and half columns and M the interpolation between node and half rows
(`terrain_interpolation.json`: Mh to half rows, Mn to node rows, HB Mh = (HA Mn)^T):

    gx = Dh vx,  gz = Dn vz                                               strain_helpers
    exx = D_x vx - (q/J) Mn I_x gx,   ezz = gz/J
    2exz = D_x vz + gx/J - (q/J) Mh I_x gz
    Tx = sxz - Mh I_x (q sxx),   Tz = szz - Mn I_x (q sxz)                force_helpers
    rho J dvx/dt = D_x(J sxx) + An Tx,   rho J dvz/dt = D_x(J sxz) + Ah Tz

The momentum side is the exact negative adjoint of the strain side. gx, gz, Tx, Tz are stored fields, formed
in stages of their own before the stage that reads them. The mapping is separable:
z = Z(zeta) + shift(x) blend(Z), so q = slope blend with slope = shift'(x), and J = rise + shift bend with
rise = Z'(zeta), bend = d blend/d zeta.

Scratch rows here are counted in padded columns (margin + i), so that stencils may reach beyond column 0.
"""

import numpy as np

from groundroll.waves.access import GROUND, HELPERS, STRESS, VELOCITY, WORK, at, put
from groundroll.waves.jit import inline, kernel
from groundroll.waves.stencils import interpolate_rows, sum_columns, sum_rows

U = np.uint64
THREE, FOUR = U(3), U(4)
# The two kinds of interpolation along z.
FROM_NODES, FROM_HALVES = 0, 1


@inline
def stretch(t, k, j, half_row, half_column):
    """J at row k, padded column j."""
    return t.rise[half_row, k] + t.shift[half_column, j] * t.bend[half_row, k]


@kernel
def force_helpers(k, a, b, ground, f, scratch):
    """Form Tx and Tz of one row on columns a..b-1."""
    t, margin, pitch = ground.terrain, ground.frame.margin, ground.frame.pitch
    start = ground.frame.origin - margin + k * pitch
    a, b = a + margin, b + margin
    p, r = scratch[0], scratch[1]
    interpolate_rows(p, f.sxx, STRESS, t.first[FROM_NODES, k], t.blended[FROM_NODES, k], a - THREE, b + FOUR, pitch)
    times_slope(p, a - THREE, b + FOUR, t, 0)
    sum_columns(r, p, THREE, t.across, a, b)
    for j in range(a, b):
        put(t.tx, start + j, at(f.sxz, start + j, STRESS) - at(r, j, WORK), HELPERS)
    interpolate_rows(p, f.sxz, STRESS, t.first[FROM_HALVES, k], t.blended[FROM_HALVES, k], a - FOUR, b + THREE, pitch)
    times_slope(p, a - FOUR, b + THREE, t, 1)
    sum_columns(r, p, FOUR, t.across, a, b)
    for j in range(a, b):
        put(t.tz, start + j, at(f.szz, start + j, STRESS) - at(r, j, WORK), HELPERS)


@inline
def times_slope(p, a, b, t, half_column):
    """p *= slope on padded columns a..b-1."""
    slope = t.slope[half_column]
    for j in range(a, b):
        put(p, j, at(p, j, WORK) * at(slope, j, GROUND), WORK)


@kernel
def strain_helpers(k, a, b, ground, f):
    """Form gx = Dh vx and gz = Dn vz of one row on columns a..b-1, not divided by J."""
    t, pitch = ground.terrain, ground.frame.pitch
    base = ground.frame.origin + k * pitch
    sum_rows(t.gz[base:], HELPERS, f.vz, VELOCITY, t.operator_first[0, k], t.operator[0, k], a, b, pitch)
    sum_rows(t.gx[base:], HELPERS, f.vx, VELOCITY, t.operator_first[1, k], t.operator[1, k], a, b, pitch)


@kernel
def times_stretch(out, f, k, a, b, half, ground):
    """out = J f of one row at nodes (half 0) or at sxz (half 1), three columns beyond a..b-1 on both sides."""
    t, margin = ground.terrain, ground.frame.margin
    start = ground.frame.origin - margin + k * ground.frame.pitch
    rise, shift, bend = t.rise[half, k], t.shift[half], t.bend[half, k]
    for j in range(a + margin - THREE, b + margin + THREE):
        put(out, j, at(f, start + j, STRESS) * (rise + at(shift, j, GROUND) * bend), WORK)


@kernel
def depth_force_x(out, k, a, b, ground):
    """out = An Tx of one row."""
    t = ground.terrain
    sum_rows(out, WORK, t.tx, HELPERS, t.operator_first[2, k], t.operator[2, k], a, b, ground.frame.pitch)


@kernel
def depth_force_z(out, k, a, b, ground):
    """out = Ah Tz of one row."""
    t = ground.terrain
    sum_rows(out, WORK, t.tz, HELPERS, t.operator_first[3, k], t.operator[3, k], a, b, ground.frame.pitch)


@kernel
def depth_strain_normal(ex, ez, k, a, b, ground, scratch):
    """ex -= (q/J) Mn I_x gx and ez = gz/J of one row."""
    t, margin, pitch = ground.terrain, ground.frame.margin, ground.frame.pitch
    start = ground.frame.origin - margin + k * pitch
    p, r = scratch[3], scratch[4]
    low, high = a + margin - FOUR, b + margin + THREE
    interpolate_rows(p, t.gx, HELPERS, t.first[FROM_HALVES, k], t.plain[FROM_HALVES, k], low, high, pitch)
    sum_columns(r, p, FOUR, t.across, a + margin, b + margin)
    slope, shift = t.slope[0], t.shift[0]
    blend, rise, bend = t.blend[0, k], t.rise[0, k], t.bend[0, k]
    for i in range(a, b):
        j = i + margin
        over = rise + at(shift, j, GROUND) * bend
        put(ex, i, at(ex, i, WORK) - at(slope, j, GROUND) * blend * at(r, j, WORK) / over, WORK)
        put(ez, i, at(t.gz, start + j, HELPERS) / over, WORK)


@kernel
def depth_strain_shear(g, k, a, b, ground, scratch):
    """g += (gx - q Mh I_x gz)/J of one row at sxz."""
    t, margin, pitch = ground.terrain, ground.frame.margin, ground.frame.pitch
    start = ground.frame.origin - margin + k * pitch
    p, r = scratch[3], scratch[4]
    low, high = a + margin - THREE, b + margin + FOUR
    interpolate_rows(p, t.gz, HELPERS, t.first[FROM_NODES, k], t.plain[FROM_NODES, k], low, high, pitch)
    sum_columns(r, p, THREE, t.across, a + margin, b + margin)
    slope, shift = t.slope[1], t.shift[1]
    blend, rise, bend = t.blend[1, k], t.rise[1, k], t.bend[1, k]
    for i in range(a, b):
        j = i + margin
        rest = at(t.gx, start + j, HELPERS) - at(slope, j, GROUND) * blend * at(r, j, WORK)
        put(g, i, at(g, i, WORK) + rest / (rise + at(shift, j, GROUND) * bend), WORK)
