"""Straight-line interpolation between points of an axis, level beyond its ends."""

import numpy as np


def bracket(axis: np.ndarray, at: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Indices of the two points of `axis` (n,), increasing, about each place, and the share of the way between them."""
    upper = np.clip(np.searchsorted(axis, at, side="right"), 1, max(len(axis) - 1, 1))
    lower = upper - 1
    upper = np.minimum(upper, len(axis) - 1)
    step = axis[upper] - axis[lower]
    share = np.divide(at - axis[lower], step, out=np.zeros(np.shape(at)), where=step > 0.0)
    return lower, upper, np.clip(share, 0.0, 1.0)


def between(values: np.ndarray, axis_points: np.ndarray, at: np.ndarray) -> np.ndarray:
    """`values` (n, ...) known at `axis_points` (n,), at places along their first axis."""
    lower, upper, share = bracket(axis_points, at)
    share = share.reshape(share.shape + (1,) * (values.ndim - 1))
    return values[lower] * (1.0 - share) + values[upper] * share
