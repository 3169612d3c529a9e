"""An empty round cavity in a full space, hit by the waves of a line source (Pao & Mow 1973, ch. 3; derived anew).

Polar coordinates r, theta about the cavity's centre, u = grad phi + curl psi:
    u_r = phi,r + psi,theta / r,   u_theta = phi,theta / r - psi,r,
    s_rr = lambda del² phi + 2 mu u_r,r,   s_rt = mu (u_r,theta / r + u_theta,r - u_theta / r).
A source at (R, theta_s), r < R, sends out H0(k d), d the distance from it, by Graf's addition theorem
    H0(k d) = sum_n e_n J_n(k r) H_n(k R) cos n(theta - theta_s),   e_0 = 1, e_n = 2   (H = H(2), exp(+i omega t)).
The cavity answers with phi = sum A_n H_n(k_a r) cos, psi = sum B_n H_n(k_b r) sin for an explosion (for a source that
turns the ground with sin in phi and cos in psi), A_n and B_n from s_rr = s_rt = 0 at r = radius.
"""

import numpy as np
from scipy.special import hankel2, jv

from groundroll.errors import InputError

from .media import complex_moduli
from .transform import band_of

TERMS_BEYOND = 16
"""Terms summed beyond k_b radius, at the highest frequency."""


def displacement(medium, radius, source, moment, receivers, omega, wave="P", reference_frequency=10.0, law="kjartansson"):
    """Displacement (receiver, 2, frequency), m·s per unit pulse spectrum; components x and z (down).

    The cavity of `radius` (m) has its centre at x = 0, z = 0; `source` (x, z) and `receivers` (receiver, 2) in m lie
    outside it. wave "P": an explosion, Mxx = Mzz = `moment` (N). wave "S": a couple that turns the ground, of the
    antisymmetric moment Mxz = -Mzx = `moment`, u_i = -M_jk dG_ij/dx_k. omega: complex rad/s, not 0.
    InputError where the source or a receiver is inside, or for another wave.
    """
    if wave not in ("P", "S"):
        raise InputError(f'wave = "{wave}" is not P or S.')
    receivers = np.asarray(receivers, dtype=float).reshape(-1, 2)
    if np.hypot(*source) <= radius or np.any(np.hypot(*receivers.T) < radius):
        raise InputError("The source and all receivers must lie outside the cavity.")
    omega = np.asarray(omega, dtype=complex)
    moduli = complex_moduli(medium, omega, reference_frequency, law)
    k_a, k_b = (omega * np.sqrt(medium.density / m) for m in moduli)
    strength = potential(moment, moduli[0 if wave == "P" else 1])
    result = incident(strength, k_a if wave == "P" else k_b, source, receivers, wave)
    return result + scattered(strength, k_a, k_b, moduli, radius, source, receivers, wave)


def potential(moment, modulus):
    """Return c of the incident potential c H0(k d): body force -div(moment delta), modulus del² phi + .. = moment delta.

    The outgoing solution of (del² + k²) g = -delta is -(i/4) H0, so phi = -(moment/modulus) g for an explosion.
    """
    return 0.25j * moment / modulus


def incident(strength, k, source, receivers, wave):
    """Displacement of the source alone."""
    offset = receivers - np.asarray(source, dtype=float)
    distance = np.hypot(*offset.T)[:, None]
    slope = -strength * k * hankel2(1, k * distance) / distance
    x, z = offset[:, :1] * slope, offset[:, 1:] * slope
    # psi: u_x = psi,z and u_z = -psi,x.
    return np.stack([x, z] if wave == "P" else [z, -x], axis=1)


def derivatives(cylinder, n, k, r):
    """C_n(kr) and its first and second derivatives by r."""
    here, below = cylinder(n, k * r), cylinder(n - 1, k * r)
    first = k * below - n / r * here
    return here, first, (n**2 / r**2 - k**2) * here - first / r


def motion_and_traction(cylinder, n, k, r, moduli, kind, sign):
    """(u_r, u_theta, s_rr, s_rt) of the potential `kind` = C_n(kr) times a function of theta, which is left out.

    `sign` +1: phi with cos n theta, psi with sin; then u_r, s_rr go with cos and u_theta, s_rt with sin.
    `sign` -1: phi with sin, psi with cos; then u_r, s_rr go with sin and u_theta, s_rt with cos.
    """
    p_modulus, mu = moduli
    lame = p_modulus - 2 * mu
    c, c1, c2 = derivatives(cylinder, n, k, r)
    if kind == "phi":
        u_r, u_t = c1, -sign * n * c / r
        du_r, du_t = c2, -sign * n * (c1 / r - c / r**2)
        s_rr = -lame * k**2 * c + 2 * mu * du_r
    else:
        u_r, u_t = sign * n * c / r, -c1
        du_r, du_t = sign * n * (c1 / r - c / r**2), -c2
        s_rr = 2 * mu * du_r
    return u_r, u_t, s_rr, mu * (-sign * n * u_r / r + du_t - u_t / r)


def scattered(strength, k_a, k_b, moduli, radius, source, receivers, wave):
    """Displacement of what the cavity adds."""
    away, towards = np.hypot(*source), np.arctan2(source[1], source[0])
    r, theta = np.hypot(*receivers.T)[:, None], np.arctan2(receivers[:, 1], receivers[:, 0])[:, None]
    k, kind = (k_a, "phi") if wave == "P" else (k_b, "psi")
    sign = 1 if wave == "P" else -1
    u_r = np.zeros((len(receivers), len(k_a)), dtype=complex)
    u_t = np.zeros_like(u_r)
    for n in range(int(np.abs(k_b).max() * radius) + TERMS_BEYOND):
        arriving = strength * (1 if n == 0 else 2) * hankel2(n, k * away)
        _, _, rr, rt = motion_and_traction(jv, n, k, radius, moduli, kind, sign)
        _, _, a_rr, a_rt = motion_and_traction(hankel2, n, k_a, radius, moduli, "phi", sign)
        _, _, b_rr, b_rt = motion_and_traction(hankel2, n, k_b, radius, moduli, "psi", sign)
        if n == 0:
            a, b = (-rr / a_rr, 0.0) if wave == "P" else (0.0, -rt / b_rt)
        else:
            determinant = a_rr * b_rt - b_rr * a_rt
            a, b = (b_rr * rt - rr * b_rt) / determinant, (a_rt * rr - a_rr * rt) / determinant
        of_phi = motion_and_traction(hankel2, n, k_a, r, moduli, "phi", sign)
        of_psi = motion_and_traction(hankel2, n, k_b, r, moduli, "psi", sign)
        along, across = np.cos(n * (theta - towards)), np.sin(n * (theta - towards))
        if wave == "S":
            along, across = across, along
        u_r += along * arriving * (a * of_phi[0] + b * of_psi[0])
        u_t += across * arriving * (a * of_phi[1] + b * of_psi[1])
    return np.stack([np.cos(theta) * u_r - np.sin(theta) * u_t, np.sin(theta) * u_r + np.cos(theta) * u_t], axis=1)


def seismograms(medium, radius, source, moment, receivers, pulse, times, *, wave="P", quantity="velocity",
                reference_frequency=10.0, law="kjartansson"):
    """Traces (x component, z component), each (receiver, time), in m/s (or m, m/s²). See `displacement`, `band_of`."""
    band = band_of(pulse, times)
    response = displacement(medium, radius, source, moment, receivers, band.omega, wave, reference_frequency, law)
    return band.traces(response[:, 0], quantity), band.traces(response[:, 1], quantity)
