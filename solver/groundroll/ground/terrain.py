"""The ground surface along x: elevation (m, positive up) and its slope, smooth enough to bend a mesh by."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

DEGREE = 2
"""Degree of the B-spline that rounds kinks: its slope is continuous, so elevation has three continuous derivatives."""


def _bspline_integral(t: np.ndarray, times: int) -> np.ndarray:
    """The B-spline of DEGREE on [-1, 1], area 1, integrated `times` times from -1, for -1 <= t <= 1.

    With n = DEGREE, N = n + 1 and u = N (t + 1)/2:  (2/N)^(times-1) sum_k (-1)^k C(N, k) (u - k)_+^(n+times) / (n+times)!
    (truncated powers; Schoenberg 1946).
    """
    count, power = DEGREE + 1, DEGREE + times
    u = 0.5 * count * (t + 1.0)
    terms = ((-1) ** k * math.comb(count, k) * np.maximum(u - k, 0.0) ** power for k in range(count + 1))
    return (2.0 / count) ** (times - 1) * sum(terms) / math.factorial(power)


@dataclass(frozen=True)
class RoundedLine:
    """A polyline with its kinks rounded, level beyond its ends: the polyline convolved with a B-spline.

    `x`, `y` (n,) are its corners, `radius` the half width of the B-spline (m). Away from kinks by more than
    `radius` the curve is the polyline itself; below, each kink adds slope jump x twice integrated B-spline.
    """

    x: np.ndarray
    y: np.ndarray
    radius: float

    def value(self, x: np.ndarray) -> np.ndarray:
        """The curve at x (m)."""
        return np.interp(x, self.x, self.y) + self.radius * self._kinks(x, 2)

    def slope(self, x: np.ndarray) -> np.ndarray:
        """Its exact derivative; exactly 0 beyond the ends by more than `radius`."""
        gradient = self._slopes()[np.searchsorted(self.x, x, side="right")] + self._kinks(x, 1)
        beyond = (x <= self.x[0] - self.radius) | (x >= self.x[-1] + self.radius)
        return np.where(beyond, 0.0, gradient)

    def _slopes(self) -> np.ndarray:
        """Slope of each straight piece, the level ones before and after included (n + 1,)."""
        return np.concatenate([[0.0], np.diff(self.y) / np.diff(self.x), [0.0]])

    def _kinks(self, x: np.ndarray, times: int) -> np.ndarray:
        """What the rounding of the kinks within `radius` adds, in units of radius^(times - 1)."""
        jump = np.diff(self._slopes())
        first = np.searchsorted(self.x, x - self.radius)
        last = np.searchsorted(self.x, x + self.radius)
        total = np.zeros(np.shape(x))
        for step in range(int(np.max(last - first, initial=0))):
            kink = np.minimum(first + step, len(self.x) - 1)
            t = np.clip((x - self.x[kink]) / self.radius, -1.0, 1.0)
            sharp = np.maximum(t, 0.0) if times == 2 else (t >= 0.0)
            added = jump[kink] * (_bspline_integral(t, times) - sharp)
            total += np.where(first + step < last, added, 0.0)
        return total


@dataclass(frozen=True)
class Surface:
    """The ground surface: `elevation(x)` (m) and `slope(x)`, arrays in, arrays out; `highest` elevation as given (m)."""

    elevation: Callable[[np.ndarray], np.ndarray]
    slope: Callable[[np.ndarray], np.ndarray]
    highest: float


def flat() -> Surface:
    return Surface(np.zeros_like, np.zeros_like, 0.0)


def through_points(x: np.ndarray, elevation: np.ndarray, length: float, radius: float) -> Surface:
    """A polyline rounded over `radius` (m), and level outside 0 to `length` with the end kinks rounded inside."""
    radius = min(radius, 0.25 * length)
    inner = (x > radius) & (x < length - radius)
    corners = np.concatenate([[radius], x[inner], [length - radius]])
    line = RoundedLine(corners, np.interp(corners, x, elevation), radius)
    return Surface(line.value, line.slope, float(np.max(elevation)))


def bell(centre: float, height: float, half_width: float, length: float, radius: float) -> Surface:
    """height/2 (1 + cos(pi (x - centre)/half_width)) within half_width of the centre, 0 elsewhere.

    Where the bell reaches beyond the section it is made level there: x is replaced by a coordinate that
    stands still outside 0 to `length` and is x itself from 2 `radius` inside on.
    """
    inside = through_points(np.array([0.0, length]), np.array([0.0, length]), length, radius)

    def share(x):
        return np.clip((inside.elevation(x) - centre) / half_width, -1.0, 1.0)

    def elevation(x):
        return 0.5 * height * (1.0 + np.cos(np.pi * share(x)))

    def slope(x):
        steep = -0.5 * height * np.pi / half_width * np.sin(np.pi * share(x)) * inside.slope(x)
        return np.where(np.abs(share(x)) < 1.0, steep, 0.0)

    return Surface(elevation, slope, max(height, 0.0))
