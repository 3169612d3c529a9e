"""Attenuation: memory variables of a generalised Maxwell body, advanced with the strain rates.

Stress rate = M (e' - sum_l Y_l xi_l),  xi_l' + w_l xi_l = w_l e'  for each of exx, ezz, 2exz
(Emmerich & Korn 1987; material-independent xi: Kristek & Moczo 2003). Over a step, by the trapezoidal rule,

    xi_l <- E_l xi_l + (1 - E_l) e,  E_l = (1 - w_l dt/2)/(1 + w_l dt/2),

and the stress takes the mean of old and new xi_l.

The moduli's Y_l of a ground of any Q is written as a1 y_l + a2 z_l with two fixed shapes y, z, so a cell
holds two numbers for P and two for S. Normal stresses, with P = sum_l Y_l^P xi_l, S = sum_l Y_l^S xi_l:

    sxx -= c11 (Pxx + Pzz) - (c11 - c13) Szz,   szz -= c33 (Pxx + Pzz) - (c33 - c13) Sxx,   sxz -= mu Sxz.
"""

from groundroll.waves.cell import MECHANISMS
from groundroll.waves.jit import kernel


@kernel
def shaped_sums(y_sum, z_sum, e, base, a, b, memory, component):
    """Form sum_l y_l mean(xi_l) and sum_l z_l mean(xi_l) of a strain component, and advance its xi_l.

    Four mechanisms in one loop: each memory variable is loaded and stored once.
    """
    xi, first = memory.xi, MECHANISMS * component
    x0, x1, x2, x3 = xi[first], xi[first + 1], xi[first + 2], xi[first + 3]
    d0, d1, d2, d3 = memory.decay[0], memory.decay[1], memory.decay[2], memory.decay[3]
    g0, g1, g2, g3 = memory.gain[0], memory.gain[1], memory.gain[2], memory.gain[3]
    y0, y1, y2, y3 = memory.y_old[0], memory.y_old[1], memory.y_old[2], memory.y_old[3]
    z0, z1, z2, z3 = memory.z_old[0], memory.z_old[1], memory.z_old[2], memory.z_old[3]
    y_new, z_new = memory.y_new[0], memory.z_new[0]
    for i in range(a, b):
        j = base + i
        now, r0, r1, r2, r3 = e[i], x0[j], x1[j], x2[j], x3[j]
        y_sum[i] = y_new * now + y0 * r0 + y1 * r1 + y2 * r2 + y3 * r3
        z_sum[i] = z_new * now + z0 * r0 + z1 * r1 + z2 * r2 + z3 * r3
        x0[j] = d0 * r0 + g0 * now
        x1[j] = d1 * r1 + g1 * now
        x2[j] = d2 * r2 + g2 * now
        x3[j] = d3 * r3 + g3 * now


@kernel
def relax_normal(k, a, b, ground, f, scratch):
    """Take from sxx and szz of one row what relaxes; strain rates are in scratch rows 0 and 1."""
    m, memory = ground.material, ground.memory
    base = ground.frame.origin + k * ground.frame.pitch
    ex, ez = scratch[0], scratch[1]
    yx, zx, yz, zz = scratch[3], scratch[4], scratch[5], scratch[6]
    shaped_sums(yx, zx, ex, base, a, b, memory, 0)
    shaped_sums(yz, zz, ez, base, a, b, memory, 1)
    p1, p2, s1, s2 = memory.p1, memory.p2, memory.s1, memory.s2
    for i in range(a, b):
        j = base + i
        p = p1[j] * (yx[i] + yz[i]) + p2[j] * (zx[i] + zz[i])
        f.sxx[j] -= m.c11[j] * p - (m.c11[j] - m.c13[j]) * (s1[j] * yz[i] + s2[j] * zz[i])
        f.szz[j] -= m.c33[j] * p - (m.c33[j] - m.c13[j]) * (s1[j] * yx[i] + s2[j] * zx[i])


@kernel
def relax_shear(k, a, b, ground, f, scratch):
    """Take from sxz of one row what relaxes; the shear strain rate is in scratch row 2."""
    m, memory = ground.material, ground.memory
    base = ground.frame.origin + k * ground.frame.pitch
    y_sum, z_sum = scratch[3], scratch[4]
    shaped_sums(y_sum, z_sum, scratch[2], base, a, b, memory, 2)
    for i in range(a, b):
        j = base + i
        f.sxz[j] -= m.mu[j] * (memory.h1[j] * y_sum[i] + memory.h2[j] * z_sum[i])
