"""Snapshots of the wavefield: several instants over the ground, one colour scale for all."""

import numpy as np
from matplotlib.colors import Normalize
from matplotlib.figure import Figure

from groundroll.errors import InputError
from groundroll.figures.section import (
    Section, frame_section, mark_interfaces, mark_scene, outer_labels, panel_layout, panel_title, panels, what_is_marked,
)  # fmt: skip
from groundroll.figures.style import DIVERGING, INK, LABEL, SMALL, display_scale, new_figure, short
from groundroll.records import QUANTITIES, Records

_MOST_INSTANTS = 6
_SILENT = 0.01  # of the greatest value; what is less counts as not yet reached
_WITHIN = 0.9  # share of the values that are reached, over all panels, that lie within the colours


def draw_wavefield(records: Records, field: str) -> Figure:
    """Up to six evenly chosen instants of one field. Raises InputError if it was not stored."""
    snapshots = records.snapshots
    if snapshots is None or len(snapshots) == 0:
        raise InputError("these records hold no snapshots")
    section = Section(snapshots.x, snapshots.z, snapshots.elevation)
    chosen = _chosen(len(snapshots))
    frames = [snapshots.frame(field, index) for index in chosen]
    clip, greatest = _clip(frames)
    step, unit = display_scale(clip, QUANTITIES[field].units)
    rows, columns, height = panel_layout(len(chosen), section)
    caption = (
        f"Colours end at ±{short(clip / step)} {unit}; the greatest value is {short(greatest / step)} {unit}. "
        + what_is_marked(records)
        + (" Thin lines: interfaces." if records.scene.get("interfaces") else "")
    )
    subject = "Wavefield: " + QUANTITIES[field].long_name.split(",")[0]
    figure = new_figure(10.0, 1.9 + rows * (height + 0.42), records, subject, caption)
    all_axes = panels(figure, len(chosen), rows, columns)
    norm = Normalize(-clip / step, clip / step)
    for axes, index, values in zip(all_axes, chosen, frames, strict=True):
        image = section.draw(axes, values / step, smooth=True, cmap=DIVERGING, norm=norm)
        mark_interfaces(axes, section, records)
        mark_scene(axes, section, records)
        frame_section(axes, section, equal=True)
        panel_title(axes, f"t = {snapshots.time[index]:.3f} s")
    outer_labels(all_axes, columns)
    bar = figure.colorbar(image, ax=all_axes, location="bottom", shrink=0.6, aspect=50, pad=0.02, extend="both")
    bar.set_label(f"{QUANTITIES[field].long_name} ({unit})", fontsize=LABEL, color=INK)
    bar.ax.tick_params(labelsize=SMALL + 0.5, colors=INK)
    bar.outline.set_visible(False)
    return figure


def _chosen(count: int) -> list[int]:
    """Evenly spread over the run; the first instant, mostly silent, gives way if there are more than are shown."""
    if count <= _MOST_INSTANTS:
        return list(range(count))
    return [round(step * (count - 1) / _MOST_INSTANTS) for step in range(1, _MOST_INSTANTS + 1)]


def _clip(frames: list[np.ndarray]) -> tuple[float, float]:
    """The size within which most of the waves lie, and the greatest size; 1 and 0 for silence."""
    sizes = np.concatenate([np.abs(frame).ravel() for frame in frames])
    greatest = float(sizes.max())
    if greatest == 0.0:
        return 1.0, 0.0
    return float(np.quantile(sizes[sizes >= _SILENT * greatest], _WITHIN)), greatest
