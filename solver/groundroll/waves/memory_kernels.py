"""Attenuation: memory variables of a generalised Maxwell body, advanced with the strain rates.

Stress rate = M (e' - sum_l Y_l xi_l),  xi_l' + w_l xi_l = w_l e'  for each of exx, ezz, 2exz
(Emmerich & Korn 1987; material-independent xi: Kristek & Moczo 2003). Stored is x_l = xi_l/(1 - E_l); over a step,
by the trapezoidal rule,

    x_l <- E_l x_l + e,  E_l = (1 - w_l dt/2)/(1 + w_l dt/2),

and the stress takes the mean of old and new xi_l.

The moduli's Y_l of a ground of any Q is written as a1 y_l + a2 z_l with two fixed shapes y, z, so a cell
holds two numbers for P and two for S. With P = sum_l Y_l^P xi_l and S = sum_l Y_l^S xi_l of a component,

    dx = exx - Pxx,  dz = ezz - Pzz,  w = (P - S)/2,  n = c11 + c33 - 2 c13,
    sxx += c11 dx + c13 dz - n wzz,   szz += c13 dx + c33 dz - n wxx,   sxz += mu (2exz - Sxz):

P relaxes (lambda + 2 mu), S relaxes mu. The matrix that acts on P and S is symmetric in ground of any c11, c33.
"""

from groundroll.waves.access import FIRST, FOURTH, GROUND, SECOND, STRESS, THIRD, VELOCITY, WORK, at, put
from groundroll.waves.jit import inline, kernel
from groundroll.waves.stencils import ONE, add, to_half, to_node


@inline
def recall(x, j, e, decay, y, z):
    """Advance the four x_l of a component at entry j by its strain rate e; return its sums over y and z."""
    r0, r1, r2, r3 = at(x[0], j, FIRST), at(x[1], j, SECOND), at(x[2], j, THIRD), at(x[3], j, FOURTH)
    put(x[0], j, decay[0] * r0 + e, FIRST)
    put(x[1], j, decay[1] * r1 + e, SECOND)
    put(x[2], j, decay[2] * r2 + e, THIRD)
    put(x[3], j, decay[3] * r3 + e, FOURTH)
    y_sum = (y[4] * e + y[0] * r0) + (y[1] * r1 + y[2] * r2) + y[3] * r3
    z_sum = (z[4] * e + z[0] * r0) + (z[1] * r1 + z[2] * r2) + z[3] * r3
    return y_sum, z_sum


@inline
def of_component(xi, component):
    """Return the four memory variables of a component: 0 exx, 1 ezz, 2 2exz."""
    first = 4 * component
    return xi[first], xi[first + 1], xi[first + 2], xi[first + 3]


@inline
def constants(memory):
    """Return E_l, and the weights of the shapes for old xi_l and for the strain rate."""
    d, y, z = memory.decay, memory.y, memory.z
    return (d[0], d[1], d[2], d[3]), (y[0], y[1], y[2], y[3], y[4]), (z[0], z[1], z[2], z[3], z[4])


@kernel
def fast_lossy_normal(a, b, pitch, c, p, f, c11, c13, c33, memory):
    """Advance sxx and szz of a plain row, flat entries a..b-1; `p` (3,): coefficients along z."""
    vx, vz, sxx, szz = f.vx, f.vz, f.sxx, f.szz
    p1, p2, w1, w2 = memory.p1, memory.p2, memory.w1, memory.w2
    decay, y, z = constants(memory)
    x_xx, x_zz = of_component(memory.xi, 0), of_component(memory.xi, 1)
    along1, along2, along3, down1, down2, down3 = c[0], c[1], c[2], p[0], p[1], p[2]
    for j in range(a, b):
        ex = to_node(vx, j, ONE, along1, along2, along3, VELOCITY)
        ez = to_node(vz, j, pitch, down1, down2, down3, VELOCITY)
        yx, zx = recall(x_xx, j, ex, decay, y, z)
        yz, zz = recall(x_zz, j, ez, decay, y, z)
        a1, a2, b1, b2 = at(p1, j, GROUND), at(p2, j, GROUND), at(w1, j, GROUND), at(w2, j, GROUND)
        l11, l13, l33 = at(c11, j, GROUND), at(c13, j, GROUND), at(c33, j, GROUND)
        dx, dz = ex - (a1 * yx + a2 * zx), ez - (a1 * yz + a2 * zz)
        less = (l11 - l13) + (l33 - l13)
        add(sxx, j, (l11 * dx + l13 * dz) - less * (b1 * yz + b2 * zz), STRESS)
        add(szz, j, (l13 * dx + l33 * dz) - less * (b1 * yx + b2 * zx), STRESS)


@kernel
def fast_lossy_shear(a, b, pitch, c, p, f, mu, memory):
    """Advance sxz of a plain row, flat entries a..b-1; `p` (3,): coefficients along z."""
    vx, vz, sxz, h1, h2 = f.vx, f.vz, f.sxz, memory.h1, memory.h2
    decay, y, z = constants(memory)
    x_xz = of_component(memory.xi, 2)
    along1, along2, along3, down1, down2, down3 = c[0], c[1], c[2], p[0], p[1], p[2]
    for j in range(a, b):
        e = to_half(vz, j, ONE, along1, along2, along3, VELOCITY) + to_half(vx, j, pitch, down1, down2, down3, VELOCITY)
        y_sum, z_sum = recall(x_xz, j, e, decay, y, z)
        left = e - (at(h1, j, GROUND) * y_sum + at(h2, j, GROUND) * z_sum)
        add(sxz, j, at(mu, j, GROUND) * left, STRESS)


@kernel
def relax(k, a, b, ground, scratch):
    """Advance the memory variables of one row of any kind on columns a..b-1.

    Scratch rows 0, 1, 2 hold exx, ezz, 2exz and become dx, dz and 2exz - Sxz; rows 3 and 4 become wxx, wzz.
    """
    memory = ground.memory
    base = ground.frame.origin + k * ground.frame.pitch
    ex, ez, g, wx, wz = scratch[0], scratch[1], scratch[2], scratch[3], scratch[4]
    p1, p2, w1, w2, h1, h2 = memory.p1, memory.p2, memory.w1, memory.w2, memory.h1, memory.h2
    decay, y, z = constants(memory)
    x_xx, x_zz, x_xz = of_component(memory.xi, 0), of_component(memory.xi, 1), of_component(memory.xi, 2)
    for i in range(a, b):
        j = base + i
        y_sum, z_sum = recall(x_xx, j, at(ex, i, WORK), decay, y, z)
        put(ex, i, at(ex, i, WORK) - (at(p1, j, GROUND) * y_sum + at(p2, j, GROUND) * z_sum), WORK)
        put(wx, i, at(w1, j, GROUND) * y_sum + at(w2, j, GROUND) * z_sum, WORK)
    for i in range(a, b):
        j = base + i
        y_sum, z_sum = recall(x_zz, j, at(ez, i, WORK), decay, y, z)
        put(ez, i, at(ez, i, WORK) - (at(p1, j, GROUND) * y_sum + at(p2, j, GROUND) * z_sum), WORK)
        put(wz, i, at(w1, j, GROUND) * y_sum + at(w2, j, GROUND) * z_sum, WORK)
    for i in range(a, b):
        j = base + i
        y_sum, z_sum = recall(x_xz, j, at(g, i, WORK), decay, y, z)
        put(g, i, at(g, i, WORK) - (at(h1, j, GROUND) * y_sum + at(h2, j, GROUND) * z_sum), WORK)


@kernel
def take_difference(k, a, b, ground, f, scratch):
    """Take n w, left by `relax`, from sxx and szz of one row."""
    m = ground.material
    base = ground.frame.origin + k * ground.frame.pitch
    wx, wz = scratch[3], scratch[4]
    for i in range(a, b):
        j = base + i
        across = at(m.c13, j, GROUND)
        less = (at(m.c11, j, GROUND) - across) + (at(m.c33, j, GROUND) - across)
        add(f.sxx, j, -less * at(wz, i, WORK), STRESS)
        add(f.szz, j, -less * at(wx, i, WORK), STRESS)
