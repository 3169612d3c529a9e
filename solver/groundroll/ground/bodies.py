"""Bodies laid over the layers: where a vertical line enters and leaves each, and their outlines."""

import math
from dataclasses import dataclass

import numpy as np

from groundroll.scenario import Ground, LensBody, PolygonBody, RectangleBody

from .columns import VOID
from .fill import Filling

OUTLINE_POINTS = 32
"""Points along each side of an outline, and four times as many around a lens."""


@dataclass(frozen=True)
class Body:
    """A body by its `form`, filled with `material` (density, vp, vs, qp, qs; zeros for a void)."""

    form: RectangleBody | PolygonBody | LensBody
    material: dict[str, float]

    def spans(self, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Depths (m, k) at which the vertical line at each x (m,) enters and leaves; inf to inf where it passes by."""
        if isinstance(self.form, LensBody):
            return _lens_spans(self.form, x)
        return _polygon_spans(self._corners(), x)

    def landmarks(self) -> np.ndarray:
        """x (m) of its ends, corners and middle."""
        corners = np.array(self.form.reach()) if isinstance(self.form, LensBody) else self._corners()[:, 0]
        return np.append(corners, np.mean(self.form.reach()))

    def outline(self) -> tuple[np.ndarray, np.ndarray]:
        """x and depth (m) along its closed outline."""
        if isinstance(self.form, LensBody):
            angle = np.linspace(0.0, 2.0 * math.pi, 4 * OUTLINE_POINTS + 1)
            (x, depth), width, height = self.form.centre, self.form.width, self.form.height
            return x + 0.5 * width * np.cos(angle), depth + 0.5 * height * np.sin(angle)
        corners = self._corners()
        share = np.arange(OUTLINE_POINTS)[:, None] / OUTLINE_POINTS
        sides = [a + share * (b - a) for a, b in zip(corners, np.roll(corners, -1, axis=0), strict=True)]
        x, depth = np.concatenate([*sides, corners[:1]]).T
        return x, depth

    def _corners(self) -> np.ndarray:
        if isinstance(self.form, PolygonBody):
            return np.array(self.form.points, dtype=float)
        (left, right), (top, bottom) = self.form.x, self.form.depth
        return np.array([[left, top], [right, top], [right, bottom], [left, bottom]], dtype=float)


def _lens_spans(lens: LensBody, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    along = (x - lens.centre[0]) / (0.5 * lens.width)
    half = 0.5 * lens.height * np.sqrt(np.maximum(1.0 - along**2, 0.0))
    begin = np.where(half > 0.0, lens.centre[1] - half, np.inf)
    end = np.where(half > 0.0, lens.centre[1] + half, np.inf)
    return begin[:, None], end[:, None]


def _polygon_spans(corners: np.ndarray, x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Crossings of the sides taken in pairs from above; a side counts from its left end up to its right end."""
    (x1, d1), (x2, d2) = corners.T, np.roll(corners, -1, axis=0).T
    at = x[:, None]
    crosses = (at >= np.minimum(x1, x2)) & (at < np.maximum(x1, x2))
    share = np.divide(at - x1, x2 - x1, out=np.zeros(crosses.shape), where=crosses)
    depth = np.sort(np.where(crosses, d1 + share * (d2 - d1), np.inf), axis=1)
    pairs = len(corners) // 2
    return depth[:, 0 : 2 * pairs : 2], depth[:, 1 : 2 * pairs : 2]


def bodies_of(ground: Ground, filling: Filling) -> tuple[Body, ...]:
    """The bodies of a scenario, in their order. InputError outside the range of a relation."""
    return tuple(Body(form, _material(form, filling, number)) for number, form in enumerate(ground.bodies, 1))


def _material(form: RectangleBody | PolygonBody | LensBody, filling: Filling, number: int) -> dict[str, float]:
    if form.void:
        return VOID
    speeds = {name: getattr(form, name) for name in ("density", "vp", "vs")}
    arrays = {name: None if value is None else np.array([value]) for name, value in speeds.items()}
    filled = filling.complete(arrays, f"ground.body[{number}].")
    quality = {name: math.inf if getattr(form, name) is None else getattr(form, name) for name in ("qp", "qs")}
    return {name: float(values[0]) for name, values in filled.items()} | quality
