"""Measures of a site from its layers."""

import math
from collections.abc import Sequence

DEPTH = 30.0


def vs30(layers: Sequence[tuple[float, ...]]) -> float:
    """Vs30 = 30/sum(h/Vs) over the uppermost 30 m (m/s): the speed of the same vertical travel time.

    `layers` from the surface down, each beginning with thickness (m, inf for the last), vp, vs (m/s), as
    `GroundModel.layers_under` gives them; 0 where a void lies above 30 m.
    """
    time, top = 0.0, 0.0
    for thickness, _, vs, *_ in layers:
        part = min(thickness, DEPTH - top)
        if part <= 0.0:
            break
        time += part / vs if vs > 0.0 else math.inf
        top += part
    return top / time
