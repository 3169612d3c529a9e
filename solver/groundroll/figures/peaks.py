"""Peak particle velocity against distance along a receiver line."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

from groundroll.errors import InputError
from groundroll.figures.places import Places, places_of
from groundroll.figures.style import BLUE, INK, QUIET, VERMILION, display_scale, dress, dress_legend, new_figure, short
from groundroll.motion.peaks import peak_motion
from groundroll.records import QUANTITIES, Records

_MARKED = 60  # receivers; beyond this many, marks run together
_SPREAD_FOR_LOGARITHM = 3.0


def draw_peaks(records: Records, line_name: str) -> Figure:
    """Peaks of both components and of the resultant; logarithmic where distances spread widely.

    Raises InputError if velocity was not recorded.
    """
    line = records.seismograms[line_name]
    if not {"velocity_x", "velocity_z"} <= set(line.arrays):
        raise InputError(f"peak velocities of {line_name!r} need velocity_x and velocity_z in the records")
    peaks = peak_motion(line.time, line.velocity_x, line.velocity_z)
    distance, label, from_source = _distance(records, places_of(line))
    step, unit = display_scale(float(peaks.resultant.max()), QUANTITIES["velocity_x"].units)
    caption = "Greatest sample of each trace; the resultant is √(vx² + vz²), taken instant by instant."
    figure = new_figure(7.5, 5.2, records, f"{line_name}: peak particle velocity", caption)
    axes = figure.add_subplot()
    order = np.argsort(distance, kind="stable")
    shown = (
        (peaks.resultant, "resultant", INK, "o"),
        (peaks.vertical, "vertical", BLUE, "v"),
        (peaks.horizontal, "horizontal", VERMILION, "s"),
    )
    for values, name, colour, marker in shown:
        axes.plot(
            distance[order], values[order] / step, color=colour, linewidth=1.2, label=name,
            marker=marker if len(order) <= _MARKED else "", markersize=4.5, markerfacecolor="white", markeredgewidth=1.1,
        )  # fmt: skip
    if from_source and _wide(distance) and all(values.min() > 0.0 for values, *_ in shown):
        _logarithmic(axes)
    else:
        axes.set_ylim(bottom=0.0)
    axes.grid(which="both", color=QUIET, alpha=0.2, linewidth=0.6)
    dress(axes, label, f"peak particle velocity ({unit})")
    dress_legend(axes.legend())
    return figure


def _distance(records: Records, places: Places) -> tuple[np.ndarray, str, bool]:
    """Distance from the first source along the ground; in a borehole, or without a source, the place itself."""
    sources = records.scene.get("sources")
    if not sources or not places.along_x:
        return places.values, places.label, False
    label = f"horizontal distance from {sources[0]['name']} (m)"
    return np.abs(places.values - sources[0]["x"]), label, True


def _logarithmic(axes: Axes) -> None:
    """Both axes logarithmic, with plain numbers at 1, 2 and 5 of each decade."""
    axes.set(xscale="log", yscale="log")
    for axis in (axes.xaxis, axes.yaxis):
        axis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0)))
        axis.set_major_formatter(FuncFormatter(lambda value, _: short(value)))
        axis.set_minor_formatter(NullFormatter())


def _wide(distance: np.ndarray) -> bool:
    return distance.min() > 0.0 and distance.max() / distance.min() >= _SPREAD_FOR_LOGARITHM
