"""The ground as the solver sees it: one section for each property stored with the records."""

import numpy as np
from matplotlib.colors import Normalize
from matplotlib.figure import Figure

from groundroll.errors import InputError
from groundroll.figures.section import (
    Section, frame_section, mark_scene, outer_labels, panel_layout, panel_title, panels, what_is_marked,
)  # fmt: skip
from groundroll.figures.style import INK, SEQUENTIAL, SMALL, new_figure, plain_units, with_units
from groundroll.records import Records


def draw_ground(records: Records, equal: bool = True) -> Figure:
    """Sections of all properties on the mesh; `equal` keeps one scale for x and depth. InputError if none is stored."""
    ground = records.ground
    if ground is None or not ground.arrays:
        raise InputError("these records hold no ground properties")
    section = Section(ground.x, ground.z, ground.elevation)
    rows, columns, height = panel_layout(len(ground.arrays), section)
    height = height if equal else 1.9
    gaps = any(not np.isfinite(values).all() for values in ground.arrays.values())
    caption = "Values on the mesh nodes, as they are computed with. " + what_is_marked(records)
    caption += " Grey: no finite value (a quality factor there: elastic)." if gaps else ""
    figure = new_figure(10.0, 1.2 + rows * (height + 0.42), records, "Ground on the mesh", caption)
    all_axes = panels(figure, len(ground.arrays), rows, columns)
    for axes, (name, values) in zip(all_axes, ground.arrays.items(), strict=True):
        shown = np.ma.masked_invalid(values)
        image = section.draw(axes, shown, smooth=False, cmap=SEQUENTIAL, norm=_norm(shown))
        mark_scene(axes, section, records)
        frame_section(axes, section, equal)
        panel_title(axes, with_units(ground.long_names[name], plain_units(ground.units[name])))
        bar = figure.colorbar(image, cax=axes.inset_axes((1.015, 0.0, 0.022, 1.0)))
        bar.ax.tick_params(labelsize=SMALL, colors=INK)
        bar.outline.set_visible(False)
    outer_labels(all_axes, columns)
    return figure


def _norm(values: np.ma.MaskedArray) -> Normalize:
    """From the least to the greatest value; a band about it where there is but one."""
    if values.count() == 0:
        return Normalize(0.0, 1.0)
    low, high = float(values.min()), float(values.max())
    if high - low <= 1e-6 * abs(high):
        return Normalize(low - 0.1 * abs(low), high + 0.1 * abs(high))
    return Normalize(low, high)
