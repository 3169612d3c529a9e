"""Vertical profiles side by side: pieces of constant material between breaks, cut up and changed column by column.

    top[c, 0] = -inf     piece 0      (everything above the first break)
    top[c, 1]            piece 1
    ...                  ...
    top[c, n-1]          piece n-1    (down to infinity)          z points down

Every column of a set has the same number of pieces; a piece that a column lacks has no thickness there.
"""

from dataclasses import dataclass, replace

import numpy as np

MATERIAL = ("density", "vp", "vs", "qp", "qs")
QUALITY = ("qp", "qs")
VOID = {"density": 0.0, "vp": 0.0, "vs": 0.0, "qp": np.inf, "qs": np.inf}


@dataclass(frozen=True)
class Columns:
    """Profiles of m columns: `surface` (m,) is z of the ground surface, the others are (m, n).

    `top` (m), `density` (kg/m3), `vp`, `vs` (m/s), `qp`, `qs` (inf: elastic); all 0 but the last two: void.
    """

    surface: np.ndarray
    top: np.ndarray
    density: np.ndarray
    vp: np.ndarray
    vs: np.ndarray
    qp: np.ndarray
    qs: np.ndarray

    @property
    def bottom(self) -> np.ndarray:
        """z of the lower end of each piece (m, n), inf for the last."""
        return np.concatenate([self.top[:, 1:], np.full((len(self.top), 1), np.inf)], axis=1)

    def middle(self) -> np.ndarray:
        """A depth inside each piece: its middle; for the first and the last one their only finite end."""
        top, bottom = self.top, self.bottom
        with np.errstate(invalid="ignore"):
            middle = 0.5 * (top + bottom)
        middle = np.where(np.isinf(top), bottom, middle)
        return np.where(np.isposinf(bottom), top, middle)


def split(columns: Columns, breaks: np.ndarray) -> Columns:
    """The same ground with each column also cut at `breaks` (m, k), in any order; inf cuts nothing."""
    breaks = np.sort(breaks, axis=1)
    count = columns.top.shape[1]
    together = np.concatenate([columns.top, breaks], axis=1)
    order = np.argsort(together, axis=1, kind="stable")
    piece = np.cumsum(order < count, axis=1) - 1
    material = {name: np.take_along_axis(getattr(columns, name), piece, axis=1) for name in MATERIAL}
    return replace(columns, top=np.take_along_axis(together, order, axis=1), **material)


def overlaid(columns: Columns, begin: np.ndarray, end: np.ndarray, material: dict[str, float]) -> Columns:
    """The ground with `material` from z = `begin` to `end` (m, k) in each column; nothing where end <= begin."""
    missing = ~(end > begin)
    begin, end = np.where(missing, np.inf, begin), np.where(missing, np.inf, end)
    cut = split(columns, np.concatenate([begin, end], axis=1))
    inside = np.zeros(cut.top.shape, dtype=bool)
    for a, b in zip(begin.T, end.T, strict=True):
        inside |= (cut.top >= a[:, None]) & (cut.top < b[:, None])
    return replace(cut, **{name: np.where(inside, material[name], getattr(cut, name)) for name in MATERIAL})


def faster_below(columns: Columns, z: np.ndarray, least: float) -> Columns:
    """The ground with vp at least `least` (m/s) below z (m,), voids left as they are."""
    cut = split(columns, z[:, None])
    wet = (cut.top >= z[:, None]) & (cut.vp > 0.0)
    return replace(cut, vp=np.where(wet, np.maximum(cut.vp, least), cut.vp))


def deepened(columns: Columns, z: float) -> Columns:
    """The ground that goes on below `z` as it is just above it."""
    return replace(columns, top=np.where(columns.top >= z, np.inf, columns.top))
