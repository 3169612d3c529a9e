"""The fastest and slowest waves of a ground model, and how slow it still is below each depth."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from .model import GroundModel

CHUNK = 64
"""Columns looked at together."""


@dataclass(frozen=True)
class Extremes:
    """Speeds in m/s, voids aside; `slowest[i]` is the least vs at any z >= `depth[i]` (increasing)."""

    fastest_p: float
    slowest_p: float
    fastest_shear: float
    depth: np.ndarray
    slowest: np.ndarray


def extremes(model: "GroundModel") -> Extremes:
    """Extremes over profiles one `spacing` apart, and at the corners and in the middle of each body."""
    x = looked_at(model)
    depth = model.spacing * np.arange(*_rows(model))
    slowest = np.full(len(depth), np.inf)
    limits = [np.inf, 0.0, np.inf, 0.0]
    for begin in range(0, len(x), CHUNK):
        columns = model.columns(x[begin : begin + CHUNK])
        bottom = columns.bottom
        there = (bottom > np.maximum(columns.top, columns.surface[:, None])) & (columns.vs > 0.0)
        vp, vs, bottom = columns.vp[there], columns.vs[there], bottom[there]
        limits = [min(limits[0], vp.min()), max(limits[1], vp.max()), min(limits[2], vs.min()), max(limits[3], vs.max())]
        # A piece counts for every depth above its bottom: note it at the last such depth, then sweep upward.
        last = np.searchsorted(depth, bottom) - 1
        np.minimum.at(slowest, np.clip(last, 0, None), vs)
    slowest = np.minimum.accumulate(slowest[::-1])[::-1]
    return Extremes(float(limits[1]), float(limits[0]), float(limits[3]), depth, slowest)


def looked_at(model: "GroundModel") -> np.ndarray:
    """The x (m) at which profiles are looked at."""
    if model.laterally_uniform:
        return np.zeros(1)
    even = np.linspace(0.0, model.length, int(np.ceil(model.length / model.spacing)) + 1)
    corners = [np.clip(body.landmarks(), 0.0, model.length) for body in model.bodies]
    return np.unique(np.concatenate([even, *corners]))


def _rows(model: "GroundModel") -> tuple[int, int]:
    """First and end index of depths, in spacings, from the highest ground to below the section."""
    even = np.linspace(0.0, model.length, int(np.ceil(model.length / model.spacing)) + 1)
    highest = float(model.surface_elevation(even).max())
    return -int(np.ceil(highest / model.spacing)), int(np.ceil(model.depth / model.spacing)) + 1
