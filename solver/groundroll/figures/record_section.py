"""A record section: the traces of one receiver line side by side, time downward, as near-surface people read it."""

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import LineCollection, PolyCollection
from matplotlib.figure import Figure

from groundroll.figures.places import places_of
from groundroll.figures.style import (
    GREEN, INK, QUIET, WAVE_COLOURS, display_scale, dress, dress_legend, new_figure, short,
)  # fmt: skip
from groundroll.records import QUANTITIES, Records

_FILLED = 60  # traces; beyond this many, filled lobes turn the page grey
_FLOOR = 1e-4  # of the greatest peak; what is smaller is not blown up to full width
_DASHES = {"P": (0, (6, 2)), "S": (0, (3, 2)), "Rayleigh": "solid"}


def draw_record_section(records: Records, line_name: str, quantity: str, common_gain: bool = False) -> Figure:
    """Wiggles of one quantity (`velocity_z`, …) of one receiver line.

    Traces stand at the receivers' x, or at their depth in a borehole. Each is scaled to its own peak, or all by
    one factor with `common_gain`; the caption says which. Guides of direct waves come from the scene.
    """
    line = records.seismograms[line_name]
    values = line.arrays[quantity]
    places = places_of(line)
    place, room = places.values, _room(places.values)
    gains, gain_words = _gains(values, common_gain, QUANTITIES[quantity].units)
    caption = f"{gain_words} Deflection to the right: {_sense(quantity)}."
    subject = f"{line_name}: {QUANTITIES[quantity].long_name.split(',')[0]}"
    figure = new_figure(8.0, 7.2, records, subject, caption)
    axes = figure.add_subplot()
    _wiggle(axes, line.time, values * (room * gains)[:, None], place)
    axes.set_xlim(place.min() - 1.3 * room, place.max() + 1.3 * room)
    axes.set_ylim(line.time[-1], line.time[0])
    axes.grid(axis="y", color=QUIET, alpha=0.18, linewidth=0.6)
    axes.set_axisbelow(True)
    dress(axes, places.label, "time (s)")
    axes.xaxis.tick_top()
    axes.xaxis.set_label_position("top")
    if places.along_x and records.scene.get("guides"):
        _guide(axes, records.scene["guides"])
    return figure


def _room(place: np.ndarray) -> float:
    """Width of the widest deflection: somewhat over one gap, but never lost on a dense line."""
    if len(place) < 2:
        return 1.0
    return max(1.2 * float(np.diff(np.sort(place)).min()), np.ptp(place) / 50.0)


def _gains(values: np.ndarray, common: bool, units: str) -> tuple[np.ndarray, str]:
    peaks = np.abs(values).max(axis=1)
    greatest = float(peaks.max())
    floor = greatest if common else _FLOOR * greatest
    gains = 1.0 / np.maximum(peaks, floor) if greatest > 0.0 else np.zeros_like(peaks)
    step, unit = display_scale(greatest, units)
    widest = f"{short(greatest / step)} {unit}"
    if common:
        return gains, f"All traces to one scale; the widest deflection is {widest}."
    words = f"Each trace is scaled to its own peak; the greatest of them is {widest}."
    if (peaks < floor).any():
        words += f" Traces below {_FLOOR:g} of it stay small."
    return gains, words


def _sense(quantity: str) -> str:
    return "motion downward" if quantity.endswith("_z") else "motion to the right"


def _wiggle(axes: Axes, time: np.ndarray, offsets: np.ndarray, place: np.ndarray) -> None:
    curves = [np.column_stack([x + offset, time]) for x, offset in zip(place, offsets, strict=True)]
    if len(place) <= _FILLED:
        lobes = [_lobe(time, offset, x) for x, offset in zip(place, offsets, strict=True)]
        axes.add_collection(PolyCollection(lobes, facecolor="#8fa3b3", edgecolor="none", alpha=0.55))
    width = 0.8 if len(place) <= _FILLED else 0.5
    axes.add_collection(LineCollection(curves, colors=INK, linewidths=width))


def _lobe(time: np.ndarray, offset: np.ndarray, x: float) -> np.ndarray:
    """Outline of what lies to the right of the trace's rest line."""
    right = np.column_stack([x + np.maximum(offset, 0.0), time])
    return np.vstack([[x, time[0]], right, [x, time[-1]]])


def _guide(axes: Axes, guides: list[dict]) -> None:
    """Straight travel-time lines t = t0 + |x - x0| / speed, on both sides of x0."""
    left, right = axes.get_xlim()
    for guide in guides:
        x = np.unique(np.clip([left, guide["x0"], right], left, right))
        time = guide["t0"] + np.abs(x - guide["x0"]) / guide["speed"]
        axes.plot(
            x, time, color=WAVE_COLOURS.get(guide["wave"], GREEN), linestyle=_DASHES.get(guide["wave"], "solid"),
            linewidth=1.6, zorder=0.9, label=f"direct {guide['wave']}, {short(guide['speed'])} m/s",
        )  # fmt: skip
    dress_legend(axes.legend(loc="upper right", bbox_to_anchor=(1.0, -0.005), ncols=len(guides), borderaxespad=0.2))
