"""Rayleigh modes of a stack of elastic layers, by second-order minors (Dunkin 1965, BSSA 55:335).

Vectors (i ux, uz, -i tx, tz), of unit wavenumber, are real combinations of dP, dS, uP, uS with
r_P = sqrt(1 - c²/vp²), r_S = sqrt(1 - c²/vs²), g = 2 - c²/vs² (columns of `_basis`). The minors of the two solutions
that decay downwards are carried up in each layer's own wave basis, where they only decay; the last, of the two
tractions at the surface, vanishes at a mode.
"""

from itertools import combinations

import numpy as np
from scipy.optimize import brentq

from groundroll.errors import InputError

PAIRS = list(combinations(range(4), 2))
GRID = 3000
STEP = 1e-3


def secular(layers, frequency, speed):
    """Traction minor (speed,) at the surface, real up to a positive factor; speeds below the half-space's vs.

    Attenuation (qp, qs) is not used.
    """
    c = np.atleast_1d(np.asarray(speed, dtype=float))
    k = 2 * np.pi * frequency / c
    basis, _, _ = _basis(layers[-1], layers[-1].density * layers[-1].vs ** 2, c)
    scale = layers[-1].density * layers[-1].vs ** 2
    minors = _compound(basis)[:, 0]
    for layer in reversed(layers[:-1]):
        basis, back, rates = _basis(layer, scale, c)
        exponents = np.concatenate([rates, -rates]) * k * layer.thickness
        least = np.sum(np.abs(rates.real), axis=0) * k * layer.thickness
        growth = np.exp(np.array([exponents[i] + exponents[j] for i, j in PAIRS]) - least)
        in_waves = np.einsum("pqn,qn->pn", _compound(back), minors) * growth
        minors = np.einsum("pqn,qn->pn", _compound(basis), in_waves)
    return minors[-1].real


def _basis(layer, scale, c):
    """Columns dP, dS, uP, uS (4, 4, n), the inverse matrix, and (r_P, r_S) (2, n); tractions over `scale`."""
    x = (c / layer.vs) ** 2
    a = np.sqrt(1 - (c / layer.vp) ** 2 + 0j)
    b = np.sqrt(1 - x + 0j)
    g, one, m = 2 - x + 0j, np.ones_like(a), layer.density * layer.vs**2 / scale
    basis = np.array([[one, b, one, -b], [-a, -one, a, -one],
                      [2 * m * a, m * g, -2 * m * a, m * g], [m * g, 2 * m * b, m * g, -2 * m * b]])
    p, s = np.array([2 * one, 0 * one, 0 * one, -one / m]), np.array([0 * one, -2 * one, -one / m, 0 * one])
    dp, ds = np.array([0 * one, g, one / m, 0 * one]) / a, np.array([-g, 0 * one, 0 * one, one / m]) / b
    return basis, np.array([p + dp, s + ds, p - dp, s - ds]) / (2 * x), np.array([a, b])


def _compound(matrix):
    """Second compound (6, 6, n) of (4, 4, n): all 2 x 2 minors."""
    return np.array([[matrix[i, p] * matrix[j, q] - matrix[i, q] * matrix[j, p] for p, q in PAIRS]
                     for i, j in PAIRS])


def modal_speed(layers, frequencies, mode=0):
    """Phase velocity (frequency,), m/s, of a mode (0: the slowest); nan where it is not trapped.

    Roots are bracketed on 3000 speeds between 0.8 of the least vs and the half-space's vs: two modes closer than
    1/3000 of that range would be missed.
    """
    if not len(layers) or not np.isinf(layers[-1].thickness):
        raise InputError("The last layer must have thickness inf.")
    grid = np.linspace(0.8 * min(layer.vs for layer in layers), layers[-1].vs * (1 - 1e-9), GRID)
    result = np.full(len(frequencies), np.nan)
    for n, frequency in enumerate(frequencies):
        value = secular(layers, frequency, grid)
        roots = np.nonzero(np.sign(value[:-1]) * np.sign(value[1:]) < 0)[0]
        if mode < len(roots):
            low, high = grid[roots[mode]], grid[roots[mode] + 1]
            result[n] = brentq(lambda c, f=frequency: secular(layers, f, c)[0], low, high, xtol=1e-10)
    return result


def group_speed(layers, frequencies, mode=0):
    """Group velocity (frequency,), m/s: d omega / d k by central differences of f (1 +- 1e-3), extrapolated to 0."""
    f = np.asarray(frequencies, dtype=float)

    def slope(step):
        high, low = f * (1 + step), f * (1 - step)
        return (high - low) / (high / modal_speed(layers, high, mode) - low / modal_speed(layers, low, mode))

    return (4 * slope(STEP) - slope(2 * STEP)) / 3
