"""Line sources in a homogeneous full space: closed form in frequency (Aki & Richards 2002, ch. 4, in two dimensions).

With g_c(r) = -(i/4) H0(2)(k_c r), the outgoing solution of (del² + k_c²) g = -delta, k_c = omega / c,
    G_ij = [ k_b² g_b delta_ij + d_i d_j (g_b - g_a) ] / (rho omega²),
a moment tensor gives u_i = -M_jk dG_ij/dx_k. Derivatives follow from (1/r d/dr)^m H0(kr) = (-k/r)^m H_m(kr).
"""

import numpy as np
from scipy.special import hankel2

from groundroll.errors import InputError

from .media import complex_speeds
from .transform import band_of


def displacement(medium, source, receivers, omega, reference_frequency=10.0, law="kjartansson"):
    """Displacement (receiver, 2, frequency), m·s per unit pulse spectrum; components x and z (down).

    medium: Layer (its thickness is not used); receivers (receiver, 2): x, depth in m;
    omega: complex rad/s, not 0. InputError where a receiver sits on the source.
    """
    offset = np.asarray(receivers, dtype=float).reshape(-1, 2) - (source.x, source.depth)
    radius = np.hypot(offset[:, 0], offset[:, 1])[:, None]
    if not np.all(radius > 0):
        raise InputError("A receiver sits on the line source, where motion is infinite; move it.")
    omega = np.asarray(omega, dtype=complex)
    alpha, beta = complex_speeds(medium, omega, reference_frequency, law)
    g_s, a, b, c, grad_s = _radial(radius, omega / alpha, omega / beta)
    force = np.array(source.force)
    mxx, mzz, mxz = source.moment
    moment = np.array([[mxx, mxz], [mxz, mzz]])
    along = moment @ offset.T                      # M_ij x_j, (2, receiver)
    twice = np.sum(along * offset.T, axis=0)       # x_i M_ij x_j, (receiver,)
    reach = offset @ force
    k_s2 = (omega / beta) ** 2
    result = np.empty((len(offset), 2, len(omega)), dtype=complex)
    for i in range(2):
        x_i = offset[:, i, None]
        result[:, i] = force[i] * (k_s2 * g_s + a) + b * x_i * reach[:, None]
        result[:, i] -= k_s2 * grad_s * along[i][:, None]
        result[:, i] -= b * (2 * along[i][:, None] + np.trace(moment) * x_i) + c * x_i * twice[:, None]
    return result / (medium.density * omega**2)


def _radial(r, k_p, k_s):
    """g_b, and A, B, C of g_b - g_a where d_i d_j = A delta_ij + B x_i x_j and C = B'/r; and g_b'/r."""

    def parts(k):
        scale, q = -0.25j, -k / r
        return [scale * q**m * hankel2(m, k * r) for m in range(4)]

    p, s = parts(k_p), parts(k_s)
    return s[0], s[1] - p[1], s[2] - p[2], s[3] - p[3], s[1]


def seismograms(medium, source, receivers, pulse, times, *, quantity="velocity",
                reference_frequency=10.0, law="kjartansson"):
    """Traces (x component, z component), each (receiver, time), in m/s (or m, m/s²). See `displacement`, `band_of`."""
    band = band_of(pulse, times)
    response = displacement(medium, source, receivers, band.omega, reference_frequency, law)
    return band.traces(response[:, 0], quantity), band.traces(response[:, 1], quantity)
