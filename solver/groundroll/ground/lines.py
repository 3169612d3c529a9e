"""Interfaces along x given by points: straight pieces or a smooth curve, level beyond the ends."""

from collections.abc import Callable

import numpy as np
from scipy.interpolate import CubicHermiteSpline, PchipInterpolator

Line = Callable[[np.ndarray], np.ndarray]
"""Depth (m) of an interface at x (m), array in, array out."""


def line_through(points: tuple[tuple[float, float], ...], smooth: bool) -> Line:
    """Depth of the interface as a function of x.

    Smooth: cubic pieces that never overshoot the points (Fritsch & Carlson 1980), level at the ends.
    """
    x, depth = np.array(points, dtype=float).T
    if not smooth:
        return lambda at: np.interp(at, x, depth)
    slope = PchipInterpolator(x, depth).derivative()(x)
    slope[[0, -1]] = 0.0
    curve = CubicHermiteSpline(x, depth, slope)
    return lambda at: curve(np.clip(at, x[0], x[-1]))
