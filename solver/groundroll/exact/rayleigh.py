"""Rayleigh waves of a half-space (Rayleigh 1885; Aki & Richards 2002, ch. 5).

With x = (c/Vs)², e = (Vs/Vp)²: x³ - 8x² + (24 - 16e)x - 16(1 - e) = 0, the root in 0 < x < 1. Decay rates over k:
q = sqrt(1 - e x) of the P part, s = sqrt(1 - x) of the S part. Every function takes Vp/Vs, above sqrt(4/3).
"""

import numpy as np
from scipy.optimize import brentq

from groundroll.errors import InputError


def speed_ratio(vp_over_vs):
    """c / Vs."""
    if not vp_over_vs > np.sqrt(4 / 3):
        raise InputError(f"Vp/Vs = {vp_over_vs} must be above 1.1547 (a positive bulk modulus).")
    e = vp_over_vs**-2.0
    return np.sqrt(brentq(lambda x: ((x - 8) * x + 24 - 16 * e) * x - 16 * (1 - e), 1e-9, 1.0, xtol=1e-15))


def _decays(vp_over_vs):
    c = speed_ratio(vp_over_vs)
    return np.sqrt(1 - (c / vp_over_vs) ** 2), np.sqrt(1 - c**2)


def ellipticity(vp_over_vs):
    """H/V of the motion at the surface: (1 + s² - 2qs) / (q (1 - s²))."""
    q, s = _decays(vp_over_vs)
    return (1 + s**2 - 2 * q * s) / (q * (1 - s**2))


def reversal_depth(vp_over_vs):
    """Depth over wavelength where retrograde turns prograde: exp(-q k z) = 2qs/(1 + s²) exp(-s k z)."""
    q, s = _decays(vp_over_vs)
    return np.log((1 + s**2) / (2 * q * s)) / (q - s) / (2 * np.pi)


def line_load_constant(vp_over_vs):
    """C of the Rayleigh pulse of a vertical line force F(t) (Lamb 1904): |uz| = C |Hilbert F| / mu.

    C = q / (2 |dR/dx|), R(x) = (2 - x)² - 4qs: the residue of the surface response at the Rayleigh pole.
    """
    q, s = _decays(vp_over_vs)
    slope = -2 * (1 + s**2) + 2 * (s / (q * vp_over_vs**2) + q / s)
    return q / (2 * abs(slope))
