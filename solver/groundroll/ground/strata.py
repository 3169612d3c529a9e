"""Layers one below the other, each uniform or linear in depth, as vertical profiles."""

import math
from dataclasses import dataclass

import numpy as np

from groundroll.scenario import Ground, Layer

from .columns import MATERIAL, QUALITY, Columns
from .fill import Filling
from .lines import Line, line_through

Values = dict[str, float]
"""density, vp, vs, qp, qs; None where a relation is to fill in."""


@dataclass(frozen=True)
class Stratum:
    """A layer whose top is a `line` (depth of x) or lies `thickness` below the top of the layer above.

    Values go linearly from `upper` at its top to `lower` at its bottom; quality factors by their inverse.
    """

    thickness: float
    line: Line | None
    upper: Values
    lower: Values
    where: str

    def sheets(self, thickest: float, filling: Filling) -> tuple[np.ndarray, dict[str, np.ndarray]]:
        """Depths (n,) below its top at which thin uniform sheets begin, and their values, taken in mid-sheet."""
        if self.upper == self.lower:
            share, offset = np.zeros(1), np.zeros(1)
        else:
            count = max(1, math.ceil(self.thickness / thickest - 1e-9))
            share = (np.arange(count) + 0.5) / count
            offset = self.thickness * np.arange(count) / count
        return offset, filling.complete(self._between(share), self.where)

    def _between(self, share: np.ndarray) -> dict[str, np.ndarray | None]:
        return {name: _between(name, self.upper[name], self.lower[name], share) for name in MATERIAL}


def _between(name: str, upper: float | None, lower: float | None, share: np.ndarray) -> np.ndarray | None:
    """`upper` to `lower` at shares of the way, quality factors by their inverse."""
    if upper is None:
        return None
    if upper == lower:
        return np.full(len(share), upper)
    if name in QUALITY:
        return 1.0 / (1.0 / upper + (1.0 / lower - 1.0 / upper) * share)
    return upper + (lower - upper) * share


class Strata:
    """A stack of strata as columns, depths measured from a reference z per column."""

    def __init__(self, strata: list[Stratum], filling: Filling, thickest: float):
        self.strata = strata
        self.sheets = [stratum.sheets(thickest, filling) for stratum in strata]

    def tops(self, x: np.ndarray) -> np.ndarray:
        """Depth of the top of each stratum (m, strata); a lower stratum cuts away what lies above its top."""
        tops = self._uncut(x)
        return np.minimum.accumulate(tops[:, ::-1], axis=1)[:, ::-1]

    def _uncut(self, x: np.ndarray) -> np.ndarray:
        tops = np.zeros((len(x), len(self.strata)))
        for j, stratum in enumerate(self.strata):
            if stratum.line is not None:
                tops[:, j] = stratum.line(x)
            elif j > 0:
                tops[:, j] = tops[:, j - 1] + self.strata[j - 1].thickness
        return tops

    def columns(self, x: np.ndarray, reference: np.ndarray, surface: np.ndarray) -> Columns:
        """The strata at `x` (m,) below z = `reference` (m,)."""
        tops = self._uncut(x)
        depth = np.concatenate([tops[:, j, None] + offset for j, (offset, _) in enumerate(self.sheets)], axis=1)
        depth = np.minimum.accumulate(depth[:, ::-1], axis=1)[:, ::-1]
        top = depth + reference[:, None]
        top[:, 0] = -np.inf
        material = {name: np.concatenate([values[name] for _, values in self.sheets]) for name in MATERIAL}
        return Columns(surface, top, **{name: np.broadcast_to(v, top.shape) for name, v in material.items()})


def strata_of_layers(ground: Ground) -> list[Stratum]:
    """The layers of a scenario."""
    return [_stratum(layer, f"ground.layer[{number}].") for number, layer in enumerate(ground.layers, 1)]


def _stratum(layer: Layer, where: str) -> Stratum:
    upper = {name: getattr(layer, name) for name in ("density", "vp", "vs")}
    lower = {name: _given(getattr(layer, f"{name}_bottom"), upper[name]) for name in upper}
    quality = {name: _given(getattr(layer, name), math.inf) for name in ("qp", "qs")}
    line = None if layer.top_line is None else line_through(layer.top_line, layer.top_smooth)
    return Stratum(_given(layer.thickness, math.inf), line, upper | quality, lower | quality, where)


def _given(value: float | None, otherwise: float | None) -> float | None:
    return otherwise if value is None else value
