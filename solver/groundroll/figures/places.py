"""Where the traces of a receiver line stand when they are drawn side by side."""

from dataclasses import dataclass

import numpy as np

from groundroll.records.reading import Seismograms


@dataclass(frozen=True)
class Places:
    """A place for each trace, the label of that axis, and whether it is x (guides of direct waves need that)."""

    values: np.ndarray
    label: str
    along_x: bool


def places_of(line: Seismograms) -> Places:
    """By x along the ground, by depth in a borehole, by number where neither parts the receivers."""
    if np.ptp(line.x) >= np.ptp(line.depth) and len(np.unique(line.x)) == len(line.x):
        return Places(line.x, "x (m)", True)
    if len(np.unique(line.depth)) == len(line.depth):
        return Places(line.depth, "depth below the surface (m)", False)
    return Places(np.arange(1.0, len(line.x) + 1.0), "receiver number", False)
