"""A line force on the surface of a half-space, seen at the surface: closed form in time (Lamb 1904; de Hoop 1960).

With p = t/x, a = sqrt(p² - 1/alpha²), b = sqrt(p² - 1/beta²) (Im > 0 below the root), g = 2p² - 1/beta²,
R = g² - 4p²ab, an impulse of force gives u(t) = Re G(t/x) / (pi x), x > 0, where
    G_zz = -a / (beta² mu R),  G_xx = -b / (beta² mu R),  G_xz = -G_zx = i p (g - 2ab) / (mu R)
(G_xz: ux of a vertical force). Past the S arrival G_zz and G_xx have a pole at the Rayleigh slowness, taken as a
principal value; G_xz is imaginary there and leaves B delta(t - x/c), B its residue over i.
"""

import numpy as np

from groundroll.errors import InputError

from .quadrature import even_panels, order_of, response
from .rayleigh import speed_ratio
from .transform import check_times


def _green(medium, p):
    """(G_xx, G_zz, G_xz) at slownesses p."""
    mu = medium.density * medium.vs**2
    a = np.sqrt(p**2 - medium.vp**-2 + 0j)
    b = np.sqrt(p**2 - medium.vs**-2 + 0j)
    g = 2 * p**2 - medium.vs**-2
    r = mu * (g**2 - 4 * p**2 * a * b)
    return np.array([-b / medium.vs**2 / r, -a / medium.vs**2 / r, 1j * p * (g - 2 * a * b) / r])


def _pulse_strength(medium):
    """B: residue of G_xz at the Rayleigh slowness over i."""
    c = medium.vs * speed_ratio(medium.vp / medium.vs)
    p = 1 / c
    mu = medium.density * medium.vs**2
    a, b = np.sqrt(p**2 - medium.vp**-2), np.sqrt(p**2 - medium.vs**-2)
    g = 2 * p**2 - medium.vs**-2
    slope = 8 * p * g - 8 * p * a * b - 4 * p**3 * (b / a + a / b)
    return p * (g - 2 * a * b) / (mu * slope)


def _nodes(medium, x, last, width):
    """Nodes and weights over tau from the P arrival to `last`, the pole straddled evenly.

    Between P and S tau = middle - half cos(theta); from S to twice the way to the Rayleigh pulse, pairs tau_R +- y with
    y = d - w² (square roots at S and 1/y even about the pole); then plain panels.
    """
    p_time, s_time = x / medium.vp, x / medium.vs
    r_time = s_time / speed_ratio(medium.vp / medium.vs)
    d = r_time - s_time
    half = (s_time - p_time) / 2
    theta, w = even_panels(0.0, np.pi, width / half)
    nodes, weights = [p_time + half * (1 - np.cos(theta))], [w * half * np.sin(theta)]
    root, w = even_panels(0.0, np.sqrt(d), width / (2 * np.sqrt(d)))
    y = d - root**2
    nodes += [r_time - y, r_time + y]
    weights += [2 * root * w] * 2
    if last > r_time + d:
        tau, w = even_panels(r_time + d, last, width)
        nodes.append(tau)
        weights.append(w)
    return np.concatenate(nodes), np.concatenate(weights), r_time


def seismograms(medium, force, distances, pulse, times, *, quantity="velocity"):
    """Traces (x component, z component), each (receiver, time), in m/s (or m), at distances (m, of either sign, not 0).

    medium: elastic Layer; force (Fx, Fz) N/m; pulse: callable s(t), smooth.
    """
    interval = check_times(times)
    order = order_of(quantity, 0)
    strength = _pulse_strength(medium)
    fx, fz = force
    out = []
    for x in np.asarray(distances, dtype=float):
        if x == 0:
            raise InputError("A receiver sits on the line source, where motion is infinite; move it.")
        side = np.sign(x)
        tau, weight, r_time = _nodes(medium, abs(x), times[-1], 2 * interval)
        g_xx, g_zz, g_xz = weight * _green(medium, tau / abs(x)).real / (np.pi * abs(x))
        kernel = np.array([fx * g_xx + side * fz * g_xz, fz * g_zz - side * fx * g_xz])
        trace = response(tau, kernel, pulse, times, order)
        sharp = response(np.array([r_time]), np.array([[strength]]), pulse, times, order)[0]
        trace[0] += side * fz * sharp
        trace[1] -= side * fx * sharp
        out.append(trace)
    traces = np.array(out)
    return traces[:, 0], traces[:, 1]
