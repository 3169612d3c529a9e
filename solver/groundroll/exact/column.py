"""Vertically travelling shear or P waves in a column of layers: transfer functions (Thomson 1950; Haskell 1953).

In layer m motion is A exp(i k z) + B exp(-i k z), k = omega / v, z down from its top, under exp(i omega t): A rises,
B sinks.
With the impedance ratio r = rho_m v_m / (rho_(m+1) v_(m+1)),
    A' = A (1 + r)/2 exp(ikh) + B (1 - r)/2 exp(-ikh),  B' = A (1 - r)/2 exp(ikh) + B (1 + r)/2 exp(-ikh)
from A = B = 1 at the surface (Kramer 1996, Geotechnical Earthquake Engineering, ch. 7).
"""

import numpy as np

from groundroll.errors import InputError

from .media import complex_speeds


def _speed(layer, omega, wave, reference_frequency, law):
    if wave not in ("S", "P"):
        raise InputError(f'wave = "{wave}" is not S or P.')
    return complex_speeds(layer, omega, reference_frequency, law)["PS".index(wave)]


def _down(layers, frequencies, wave, reference_frequency, law):
    """A, B at the top of the last layer, and its speed."""
    omega = 2 * np.pi * np.asarray(frequencies, dtype=float)
    a = b = np.ones(len(omega), dtype=complex)
    speed = _speed(layers[0], omega, wave, reference_frequency, law)
    for upper, lower in zip(layers[:-1], layers[1:]):
        below = _speed(lower, omega, wave, reference_frequency, law)
        ratio = upper.density * speed / (lower.density * below)
        shift = np.exp(1j * omega * upper.thickness / speed)
        a, b = ((a * shift * (1 + ratio) + b / shift * (1 - ratio)) / 2,
                (a * shift * (1 - ratio) + b / shift * (1 + ratio)) / 2)
        speed = below
    return a, b, speed


def surface_over_outcrop(layers, frequencies, wave="S", *, reference_frequency=10.0, law="hysteretic"):
    """Complex transfer function (frequency,) from motion of the bare half-space (the last layer) to the surface."""
    if not np.isinf(layers[-1].thickness):
        raise InputError("The last layer must have thickness inf.")
    a, _, _ = _down(layers, frequencies, wave, reference_frequency, law)
    return 1 / a


def surface_over_base(layers, frequencies, wave="S", *, reference_frequency=10.0, law="hysteretic"):
    """Complex transfer function (frequency,) from the motion of a base under the last layer to the surface.

    Every layer has a thickness; the base moves as given, whatever the column does (a rigid base, or motion recorded
    there).
    """
    if np.isinf(layers[-1].thickness):
        raise InputError("The last layer must have a thickness: its bottom is the base.")
    a, b, speed = _down(layers, frequencies, wave, reference_frequency, law)
    shift = np.exp(2j * np.pi * np.asarray(frequencies, dtype=float) * layers[-1].thickness / speed)
    return 2 / (a * shift + b / shift)
