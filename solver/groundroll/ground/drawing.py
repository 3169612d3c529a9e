"""Lines of the ground model to draw: interfaces, outlines of bodies, the water table."""

from typing import TYPE_CHECKING

import numpy as np

from .strata import Strata

if TYPE_CHECKING:
    from .model import GroundModel

POINTS = 801
"""Points along a line that is not level."""

Line = tuple[np.ndarray, np.ndarray]


def interfaces(model: "GroundModel") -> list[Line]:
    """Lines (x, z) in m within the section; interfaces that lie below it or nowhere below the surface are left out."""
    x = np.linspace(0.0, model.length, 2 if model.laterally_uniform else POINTS)
    depths = _jumps(model.base, x) if isinstance(model.base, Strata) else []
    if model.water is not None:
        depths.append(np.full(len(x), model.water[0]))
    surface = 0.0 - model.surface_elevation(x)
    lines = [(x, np.maximum(depth + model.reference(x), surface)) for depth in depths]
    shown = [(x, z) for x, z in lines if (z > surface).any() and (z < model.depth).any()]
    return shown + [_outline(model, body) for body in model.bodies]


def _jumps(strata: Strata, x: np.ndarray) -> list[np.ndarray]:
    """Depths of the interfaces across which a property jumps."""
    pairs = zip(strata.strata, strata.strata[1:], strata.tops(x).T[1:])
    return [depth for above, below, depth in pairs if above.lower != below.upper]


def _outline(model: "GroundModel", body) -> Line:
    x, depth = body.outline()
    inside = np.clip(x, 0.0, model.length)
    return inside, depth + model.reference(inside)
