"""A buried line explosion seen at the surface of a half-space: closed form in time.

Garvin (1956, Proc. R. Soc. A 234:528). For a moment step M0 at depth h, r² = x² + h²:
    s = sqrt(t² - r²/alpha²), p = (xt + ihs)/r², q_a = (ht - ixs)/r², q_b = sqrt(1/beta² - p²), Re > 0,
    p' = i q_a / s, R = (1/beta² - 2p²)² + 4p² q_a q_b,
    ux = M0/(2 pi rho alpha²) Im[4p q_b p'/(beta² R)],
    uz (down) = -M0/(2 pi rho alpha²) Im[2 (1/beta² - 2p²) p'/(beta² R)].
"""

import numpy as np

from groundroll.errors import InputError

from .quadrature import even_panels, order_of, response
from .transform import check_times


def step_displacement(medium, depth, x, time, moment=1.0):
    """(ux, uz), m, (2, time), at the surface point x (m, 0 or either sign) after a moment step (N) at t = 0."""
    return moment * _times_root(medium, depth, x, np.asarray(time, dtype=float))


def _times_root(medium, h, x, t, since=None):
    """Step displacement; with `since` = sqrt(t - arrival), times that root, so that nothing is singular."""
    alpha, beta = medium.vp, medium.vs
    r = np.hypot(x, h)
    arrival = r / alpha
    if since is None:
        later = t > arrival
        s = np.where(later, np.sqrt(np.abs(t**2 - arrival**2)), 1.0)
        root = s
    else:
        later, root = True, np.sqrt(t + arrival)
        s = since * root
    p = (abs(x) * t + 1j * h * s) / r**2
    q_a = (h * t - 1j * abs(x) * s) / r**2
    q_b = np.sqrt(beta**-2 - p**2)
    g = beta**-2 - 2 * p**2
    common = 1j * q_a / root / beta**2 / (g**2 + 4 * p**2 * q_a * q_b)
    scale = 1 / (2 * np.pi * medium.density * alpha**2)
    ux = np.sign(x) * scale * (4 * p * q_b * common).imag
    uz = -scale * (2 * g * common).imag
    return np.where(later, np.array([ux, uz]), 0.0)


def seismograms(medium, depth, distances, pulse, times, moment=1.0, *, quantity="velocity"):
    """Traces (x component, z component), each (receiver, time), in m/s (or m), at the surface.

    medium: elastic Layer; distances (receiver,) m from above the source; pulse: callable s(t), smooth, of moment.
    u = int U(tau) s'(t - tau) dtau with tau = arrival + y², which removes 1/sqrt at the P arrival; panels of two
    samples and of a quarter of depth / vs (the breadth of the Rayleigh pulse of a step) at most.
    """
    interval = check_times(times)
    if not depth > 0:
        raise InputError("The explosion must be buried: depth must be above 0.")
    order = order_of(quantity, 1)
    out = []
    for x in np.asarray(distances, dtype=float):
        arrival = np.hypot(x, depth) / medium.vp
        if arrival >= times[-1]:
            out.append(np.zeros((2, len(times))))
            continue
        end = np.sqrt(times[-1] - arrival)
        finest = min(2 * interval, 0.25 * depth / medium.vs)
        y, weight = even_panels(0.0, end, min(finest / (2 * end), np.sqrt(finest)))
        t = arrival + y**2
        kernel = _times_root(medium, depth, x, t, since=y)
        out.append(moment * response(t, 2 * weight * kernel, pulse, times, order))
    traces = np.array(out)
    return traces[:, 0], traces[:, 1]
