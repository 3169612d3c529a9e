"""The look of all figures: colours, type sizes, units for people. Nothing global is set."""

import textwrap

import numpy as np
from matplotlib.axes import Axes
from matplotlib.colors import LinearSegmentedColormap
from matplotlib.figure import Figure

from groundroll.records import Records

INK = "#22303c"
QUIET = "#6b7783"
HAIR = "#d9dee3"
TITLE, LABEL, SMALL = 12.5, 10.0, 8.5  # points
_PAD = 0.08  # inches

# Hues that stay apart for colour-blind eyes: Okabe & Ito 2008, "Color Universal Design".
BLUE, VERMILION, GREEN, SKY, PURPLE = "#0072b2", "#d55e00", "#009e73", "#56b4e9", "#cc79a7"
WAVE_COLOURS = {"P": BLUE, "S": VERMILION, "Rayleigh": GREEN}

DIVERGING = LinearSegmentedColormap.from_list(
    "cold to warm", ["#08306b", "#2f75b5", "#a9cbe3", "#fbfaf7", "#f3bf94", "#cf6a24", "#6e2b05"]
)
SEQUENTIAL = LinearSegmentedColormap.from_list(
    "sand to deep water", ["#f5efdf", "#dccf9f", "#a3b894", "#5d9694", "#2d6a84", "#153a5b"]
).with_extremes(bad=HAIR)

# by units: (from this peak on, divisor, unit); motion on site is read in mm/s even where it is small
_SCALES = {
    "m s-1": ((1.0, 1.0, "m/s"), (1e-5, 1e-3, "mm/s"), (1e-8, 1e-6, "µm/s"), (0.0, 1e-9, "nm/s")),
    "m": ((1.0, 1.0, "m"), (1e-4, 1e-3, "mm"), (1e-7, 1e-6, "µm"), (0.0, 1e-9, "nm")),
    "m s-2": ((0.1, 1.0, "m/s²"), (1e-4, 1e-3, "mm/s²"), (0.0, 1e-6, "µm/s²")),
    "Pa": ((1e6, 1e6, "MPa"), (1e3, 1e3, "kPa"), (1.0, 1.0, "Pa"), (0.0, 1e-3, "mPa")),
    "s-1": ((1.0, 1.0, "1/s"), (1e-3, 1e-3, "×10⁻³/s"), (1e-6, 1e-6, "×10⁻⁶/s"), (0.0, 1e-9, "×10⁻⁹/s")),
}
_PLAIN = {"m s-1": "m/s", "m s-2": "m/s²", "s-1": "1/s", "kg m-3": "kg/m³", "1": ""}


def display_scale(peak: float, units: str) -> tuple[float, str]:
    """(divisor, unit) in which values of this peak are read with ease; SI as it stands for silence."""
    steps = _SCALES.get(units, ((0.0, 1.0, plain_units(units)),))
    if peak == 0.0:
        return 1.0, plain_units(units)
    return next((divisor, unit) for least, divisor, unit in steps if peak >= least)


def plain_units(units: str) -> str:
    """Units of the file as people write them."""
    return _PLAIN.get(units, units)


def with_units(words: str, units: str) -> str:
    """`words (units)`, or the words alone for a pure number."""
    return f"{words} ({units})" if units else words


def new_figure(width: float, height: float, records: Records, subject: str, caption: str) -> Figure:
    """An empty figure (inches) with the scenario's title, what is shown, and a caption at its foot."""
    figure = Figure(figsize=(width, height), layout="compressed", facecolor="white")
    figure.get_layout_engine().set(w_pad=0.12, h_pad=_PAD, hspace=0.03, wspace=0.03)
    title = _wrapped(records.scene.get("title", ""), 9.0 * width)
    figure.suptitle(f"{title}\n ", x=0.015, ha="left", fontsize=TITLE, color=INK, weight="bold", linespacing=1.3)
    below = _PAD + (title.count("\n") + 1.0) * 1.3 * 1.2 * TITLE / 72.0  # inches from the top, under the title
    figure.text(0.015, 1.0 - below / height, subject, ha="left", va="top", fontsize=TITLE - 1.0, color=QUIET)
    if not records.complete:
        caption += "\nINCOMPLETE RUN: it ended, or was read, before its time."
    figure.supxlabel(_wrapped(caption, 16.0 * width), x=0.015, ha="left", fontsize=SMALL, color=QUIET)
    return figure


def dress(axes: Axes, horizontal: str, vertical: str) -> None:
    """Labels and a quiet frame."""
    axes.set_xlabel(horizontal, fontsize=LABEL, color=INK)
    axes.set_ylabel(vertical, fontsize=LABEL, color=INK)
    axes.tick_params(labelsize=SMALL + 0.5, colors=INK, color=QUIET, width=0.7, length=3.5)
    for spine in axes.spines.values():
        spine.set_color(QUIET)
        spine.set_linewidth(0.7)


def dress_legend(legend) -> None:
    """Legends without a frame line, in ink."""
    legend.get_frame().set(linewidth=0.0, facecolor="white", alpha=0.85)
    for text in legend.get_texts():
        text.set(color=INK, fontsize=SMALL + 0.5)


def _wrapped(text: str, letters: float) -> str:
    return "\n".join(textwrap.fill(line, int(letters)) for line in text.splitlines())


def short(value: float) -> str:
    """Three significant digits."""
    return np.format_float_positional(float(f"{value:.3g}"), trim="-") if 1e-3 <= abs(value) < 1e6 else f"{value:.3g}"
