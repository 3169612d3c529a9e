"""A line source of P-SV waves and where motion is recorded."""

from dataclasses import dataclass
from math import isfinite

from groundroll.errors import InputError


@dataclass(frozen=True)
class LineSource:
    """A line across the section at x, depth (m), with either or both of

    force (Fx, Fz) in N/m: body force F s(t) delta(x) delta(z);
    moment (Mxx, Mzz, Mxz) in N: body force -div(M s(t) delta(x) delta(z)), s being moment, not its rate.
    """

    x: float
    depth: float
    force: tuple[float, float] = (0.0, 0.0)
    moment: tuple[float, float, float] = (0.0, 0.0, 0.0)

    def __post_init__(self):
        if not (isfinite(self.x) and isfinite(self.depth)):
            raise InputError("x and depth of a source must be numbers.")
        if not any(self.force) and not any(self.moment):
            raise InputError("A source needs a force or a moment that is not zero.")


def explosion(x, depth, moment):
    """A line explosion: Mxx = Mzz = moment (N)."""
    return LineSource(x, depth, moment=(moment, moment, 0.0))
