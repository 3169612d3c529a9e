"""A vertical section of ground: values on mesh nodes, flat or following a terrain, with what stands in it."""

import math
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.figure import Figure

from groundroll.figures.style import INK, SMALL, VERMILION, dress
from groundroll.records import Records

_MOST_ROWS = 1600  # of a picture; more would not be seen
_COARSE = 800  # nodes a side; fewer are stretched over the panel and are joined smoothly


@dataclass(frozen=True)
class Section:
    """Mesh nodes: x (nx,), evenly spaced, z (nz,) in m, positive down; elevation (nz, nx) where the mesh follows a terrain.

    The vertical axis of a flat section is depth, growing downward; with a terrain it is elevation.
    """

    x: np.ndarray
    z: np.ndarray
    elevation: np.ndarray | None

    @property
    def limits(self) -> tuple[float, float, float, float]:
        """left, right, bottom, top of the axes."""
        if self.elevation is None:
            return self.x[0], self.x[-1], self.z[-1], self.z[0]
        low, high = self.elevation.min(), self.elevation.max()
        return self.x[0], self.x[-1], low, high + 0.04 * (high - low)

    def height(self, depth: np.ndarray) -> np.ndarray:
        """Where a depth below the datum stands on the vertical axis."""
        return np.asarray(depth) if self.elevation is None else -np.asarray(depth)

    def draw(self, axes: Axes, values: np.ndarray, smooth: bool, **colours) -> ScalarMappable:
        """Colour the section by values (z, x); `smooth` for fields, not for properties that jump."""
        left, right, bottom, top = self.limits
        half_x, half_z = 0.5 * (self.x[1] - self.x[0]), 0.0
        if self.elevation is None and _even(self.z):
            half_z = 0.5 * (self.z[1] - self.z[0])
        else:
            values = _levelled(self, values, smooth)
        if self.elevation is not None:
            axes.fill_between(self.x, self.elevation[0], top, color="white", linewidth=0.0, zorder=1.5)
        coarse = max(values.shape) < _COARSE
        return axes.imshow(
            values, extent=(left - half_x, right + half_x, bottom + half_z, top - half_z), origin="upper",
            interpolation=("bilinear" if coarse else "antialiased") if smooth else "nearest", **colours,
        )  # fmt: skip


def frame_section(axes: Axes, section: Section, equal: bool) -> None:
    """Limits, labels and, if `equal`, one scale for both directions."""
    left, right, bottom, top = section.limits
    axes.set(xlim=(left, right), ylim=(bottom, top))
    axes.set_aspect("equal" if equal else "auto")
    dress(axes, "x (m)", "depth (m)" if section.elevation is None else "elevation (m)")


def mark_interfaces(axes: Axes, section: Section, records: Records) -> None:
    """Interfaces of the ground as thin lines."""
    for line in records.scene.get("interfaces", []):
        axes.plot(line["x"], section.height(line["depth"]), color=INK, linewidth=0.6, alpha=0.65)


def mark_scene(axes: Axes, section: Section, records: Records) -> None:
    """Terrain as a line, sources as stars, receivers as triangles."""
    surface = records.scene.get("surface")
    if surface:
        axes.plot(surface["x"], section.height(surface["depth"]), color=INK, linewidth=1.0)
    lines = records.seismograms.values()
    x = np.concatenate([line.x for line in lines]) if lines else np.empty(0)
    elevation = np.concatenate([line.elevation for line in lines]) if lines else np.empty(0)
    receivers = {"marker": "v", "s": 22 if len(x) <= 40 else 9, "facecolor": "white", "edgecolor": INK}
    _mark(axes, section, x, -elevation, zorder=5, **receivers)
    sources = records.scene.get("sources", [])
    places = [source["x"] for source in sources], [source["depth"] for source in sources]
    _mark(axes, section, *map(np.array, places), marker="*", s=110, facecolor=VERMILION, edgecolor="white", zorder=6)


def _mark(axes: Axes, section: Section, x: np.ndarray, depth: np.ndarray, **look) -> None:
    """Marks of what lies in the section, whole even where they stand on its edge."""
    left, right, bottom, top = section.limits
    y = section.height(depth)
    inside = (x >= left) & (x <= right) & (y >= min(bottom, top)) & (y <= max(bottom, top))
    axes.scatter(x[inside], y[inside], linewidth=0.6, clip_on=False, **look)


def what_is_marked(records: Records) -> str:
    """The marks of sources and receivers in words, for captions."""
    words = []
    if records.scene.get("sources"):
        words.append("star: source")
    if records.seismograms:
        words.append("triangles: receivers")
    return "; ".join(words).capitalize() + "." if words else ""


def panel_layout(count: int, section: Section) -> tuple[int, int, float]:
    """Rows, columns and the height (inches) of one panel on a page 10 inches wide, so that equal scales fit well."""
    left, right, bottom, top = section.limits
    shape = (right - left) / abs(top - bottom)
    columns = min(count, 1 if shape > 5.0 else 2 if shape > 1.3 else 3)
    rows = math.ceil(count / columns)
    height = min(max(8.2 / columns / shape, 0.8), 5.5)
    return rows, columns, height


def panels(figure: Figure, count: int, rows: int, columns: int) -> list[Axes]:
    """`count` axes that share both directions; only the outer ones carry labels."""
    grid = figure.subplots(rows, columns, squeeze=False, sharex=True, sharey=True).ravel()
    for axes in grid[count:]:
        axes.remove()
    return list(grid[:count])


def outer_labels(all_axes: list[Axes], columns: int) -> None:
    """Take the labels off the panels that have a neighbour below or to the left."""
    for number, axes in enumerate(all_axes):
        below = number + columns < len(all_axes)
        axes.tick_params(labelbottom=not below)
        if below:
            axes.set_xlabel("")
        if number % columns:
            axes.set_ylabel("")


def panel_title(axes: Axes, text: str) -> None:
    """A small title at the left, clear of the marks on the surface."""
    axes.set_title(text, loc="left", fontsize=SMALL + 1.0, color=INK, pad=7.0)


def _levelled(section: Section, values: np.ndarray, smooth: bool) -> np.ndarray:
    """Values (z, x) of rows that follow the terrain, or lie unevenly, on even rows from the top of the axes to its foot.

    Each column is read where its nodes stand, between two nodes linearly if `smooth`, else at the nearer one.
    """
    _, _, bottom, top = section.limits
    levels = np.linspace(top, bottom, min(2 * len(section.z), _MOST_ROWS))
    heights = section.elevation if section.elevation is not None else np.broadcast_to(section.z[:, None], values.shape)
    sign = 1.0 if section.elevation is None else -1.0  # np.interp wants growing places
    numbers = np.arange(len(section.z))
    drawn = np.empty((len(levels), len(section.x)))
    for column in range(len(section.x)):
        row = np.interp(sign * levels, sign * heights[:, column], numbers)
        if smooth:
            drawn[:, column] = np.interp(row, numbers, values[:, column])
        else:
            drawn[:, column] = values[np.rint(row).astype(int), column]
    return drawn


def _even(nodes: np.ndarray) -> bool:
    steps = np.diff(nodes)
    return len(steps) > 0 and bool(np.allclose(steps, steps[0], rtol=1e-6, atol=0.0))
