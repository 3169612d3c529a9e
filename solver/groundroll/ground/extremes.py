"""The fastest and slowest waves of a ground model, and how slow it still is below each depth."""

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from .columns import Columns

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
    x = _looked_at(model)
    first, last = (math.ceil(z / model.spacing) for z in (-model.surface.highest, model.depth))
    depth = model.spacing * np.arange(first, last + 1)
    slowest = np.full(len(depth), np.inf)
    vp_least, vp_most, vs_most = np.inf, 0.0, 0.0
    for begin in range(0, len(x), CHUNK):
        vp, vs, bottom = _met(model.columns(x[begin : begin + CHUNK]))
        vp_least, vp_most = min(vp_least, vp.min(initial=np.inf)), max(vp_most, vp.max(initial=0.0))
        vs_most = max(vs_most, vs.max(initial=0.0))
        # A piece counts for every depth above its bottom: note it at the last such depth, then sweep upward.
        np.minimum.at(slowest, np.maximum(np.searchsorted(depth, bottom) - 1, 0), vs)
    slowest = np.minimum.accumulate(slowest[::-1])[::-1]
    return Extremes(float(vp_most), float(vp_least), float(vs_most), depth, slowest)


def _met(columns: Columns) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """vp, vs and bottom z of all the pieces that have a thickness below the surface and are no voids."""
    bottom = columns.bottom
    there = (bottom > np.maximum(columns.top, columns.surface[:, None])) & (columns.vs > 0.0)
    return columns.vp[there], columns.vs[there], bottom[there]


def _looked_at(model: "GroundModel") -> np.ndarray:
    """The x (m) at which profiles are looked at."""
    if model.laterally_uniform:
        return np.zeros(1)
    even = np.linspace(0.0, model.length, math.ceil(model.length / model.spacing) + 1)
    corners = [np.clip(body.landmarks(), 0.0, model.length) for body in model.bodies]
    return np.unique(np.concatenate([even, *corners]))
