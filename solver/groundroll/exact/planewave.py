"""Plane P and SV waves at a free surface and at a welded interface, in displacement.

Zoeppritz (1919); Aki & Richards (2002), eqs 5.40. Unit displacements, z down, slowness p along x, angles i (P), j (SV)
from the vertical: downgoing P (sin i, cos i), upgoing P (sin i, -cos i), downgoing SV (cos j, -sin j), upgoing SV
(cos j, sin j). Under exp(i omega t) a cosine past the critical angle is -i sqrt(p²v² - 1): waves decay away from the
interface.
"""

import numpy as np

from groundroll.errors import InputError


def _cosine(slowness, speed):
    return np.conj(np.sqrt(1 - (slowness * speed) ** 2 + 0j))


def _wave(medium, slowness, kind, down):
    """(ux, uz, tx, tz) of a unit wave, tractions over -i omega."""
    speed = medium.vp if kind == "P" else medium.vs
    sine, cosine = slowness * speed, _cosine(slowness, speed)
    sign = 1 if down else -1
    ux, uz = (sine, sign * cosine) if kind == "P" else (cosine, -sign * sine)
    vertical = sign * cosine / speed
    mu = medium.density * medium.vs**2
    stiff = medium.density * medium.vp**2
    tx = mu * (slowness * uz + vertical * ux)
    tz = (stiff - 2 * mu) * slowness * ux + stiff * vertical * uz
    return np.array([ux, uz, tx, tz])


def _slowness(medium, angle, kind):
    if kind not in ("P", "SV"):
        raise InputError(f'wave = "{kind}" is not P or SV.')
    if not 0 <= angle < 90:
        raise InputError(f"angle = {angle} degrees must be from 0 to below 90.")
    return np.sin(np.radians(angle)) / (medium.vp if kind == "P" else medium.vs)


def free_surface(medium, angle, wave):
    """Upgoing `wave` ("P" or "SV") at `angle` degrees: reflected (P, SV) and surface motion (ux, uz), per unit wave.

    Complex; the motion of an upgoing P at 0 degrees is (0, -2).
    """
    p = _slowness(medium, angle, wave)
    incident = _wave(medium, p, wave, down=False)
    down = np.column_stack([_wave(medium, p, kind, down=True) for kind in ("P", "SV")])
    reflected = np.linalg.solve(down[2:], -incident[2:])
    return reflected, incident[:2] + down[:2] @ reflected


def interface(upper, lower, angle, wave):
    """Downgoing `wave` at `angle` degrees in `upper`: (R_P, R_SV, T_P, T_SV), complex displacement coefficients."""
    p = _slowness(upper, angle, wave)
    scale = np.array([1, 1, *[1 / (upper.density * upper.vp)] * 2])[:, None]
    kinds = ("P", "SV")
    columns = [-_wave(upper, p, kind, down=False) for kind in kinds]
    columns += [_wave(lower, p, kind, down=True) for kind in kinds]
    matrix = np.column_stack(columns) * scale
    return np.linalg.solve(matrix, _wave(upper, p, wave, down=True) * scale[:, 0])
