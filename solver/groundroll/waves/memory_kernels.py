"""Attenuation: memory variables of a generalised Maxwell body, advanced with the strain rates.

Stress rate = M (e' - sum_l Y_l xi_l),  xi_l' + w_l xi_l = w_l e'  for each of exx, ezz, 2exz
(Emmerich & Korn 1987; material-independent xi: Kristek & Moczo 2003). Over a step, by the trapezoidal rule,

    xi_l <- E_l xi_l + (1 - E_l) e,  E_l = (1 - w_l dt/2)/(1 + w_l dt/2),

and the stress takes the mean of old and new xi_l.

The moduli's Y_l of a ground of any Q is written as a1 y_l + a2 z_l with two fixed shapes y, z, so a cell
holds two numbers for P and two for S. Normal stresses, with P = sum_l Y_l^P xi_l, S = sum_l Y_l^S xi_l:

    sxx -= c11 (Pxx + Pzz) - (c11 - c13) Szz,   szz -= c33 (Pxx + Pzz) - (c33 - c13) Sxx,   sxz -= mu Sxz.
"""

import numpy as np

from groundroll.waves.jit import kernel

U = np.uint64


@kernel
def shaped_sums(y_sum, z_sum, xi, e, base, a, b, memory, component):
    """Form sum_l y_l mean(xi_l) and sum_l z_l mean(xi_l) of a strain component, then advance its xi_l."""
    count = memory.count
    for i in range(a, b):
        y_sum[i] = 0.0
    for i in range(a, b):
        z_sum[i] = 0.0
    for m in range(count):
        decay = memory.decay[m]
        row = xi[component * count + m]
        y_old, y_new = memory.y_old[m], memory.y_new[m]
        z_old, z_new = memory.z_old[m], memory.z_new[m]
        gain = memory.gain[m]
        for i in range(a, b):
            y_sum[i] += y_old * row[base + i] + y_new * e[i]
        for i in range(a, b):
            z_sum[i] += z_old * row[base + i] + z_new * e[i]
        for i in range(base + a, base + b):
            row[i] = decay * row[i] + gain * e[i - base]


@kernel
def relax_normal(k, a, b, ground, f, scratch):
    """Take from sxx and szz of one row what relaxes; strain rates are in scratch rows 0 and 1."""
    m, memory = ground.material, ground.memory
    base = ground.frame.origin + k * ground.frame.pitch
    ex, ez = scratch[0], scratch[1]
    yx, zx, yz, zz = scratch[3], scratch[4], scratch[5], scratch[6]
    shaped_sums(yx, zx, memory.xi, ex, base, a, b, memory, 0)
    shaped_sums(yz, zz, memory.xi, ez, base, a, b, memory, 1)
    p1, p2, s1, s2 = memory.p1, memory.p2, memory.s1, memory.s2
    for i in range(a, b):
        j = base + i
        p = p1[j] * (yx[i] + yz[i]) + p2[j] * (zx[i] + zz[i])
        f.sxx[j] -= m.c11[j] * p - (m.c11[j] - m.c13[j]) * (s1[j] * yz[i] + s2[j] * zz[i])
    for i in range(a, b):
        j = base + i
        p = p1[j] * (yx[i] + yz[i]) + p2[j] * (zx[i] + zz[i])
        f.szz[j] -= m.c33[j] * p - (m.c33[j] - m.c13[j]) * (s1[j] * yx[i] + s2[j] * zx[i])


@kernel
def relax_shear(k, a, b, ground, f, scratch):
    """Take from sxz of one row what relaxes; the shear strain rate is in scratch row 2."""
    m, memory = ground.material, ground.memory
    base = ground.frame.origin + k * ground.frame.pitch
    y_sum, z_sum = scratch[3], scratch[4]
    shaped_sums(y_sum, z_sum, memory.xi, scratch[2], base, a, b, memory, 2)
    for i in range(a, b):
        j = base + i
        f.sxz[j] -= m.mu[j] * (memory.h1[j] * y_sum[i] + memory.h2[j] * z_sum[i])
