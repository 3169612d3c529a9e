"""Published relations between density and wave speeds, SI in and out; none of them holds in dry soil.

Brocher 2005 (Bull. Seism. Soc. Am. 95:2081): density by eq. 1, vs by eq. 6, vp by eq. 9. Gardner, Gardner &
Gregory 1974 (Geophysics 39:770): density. Castagna, Batzle & Eastwood 1985 (Geophysics 50:571): vp. Ranges of
validity, equation numbers and all relations but the two densities are from memory.
"""

from dataclasses import dataclass
from collections.abc import Callable

import numpy as np


@dataclass(frozen=True)
class Relation:
    """A relation that gives a quantity from the speed `given` ("vp" or "vs", m/s) within `least` to `most`."""

    given: str
    least: float
    most: float
    formula: Callable

    def __call__(self, speed):
        """The quantity in SI at `speed` (m/s), scalar or array."""
        return 1000.0 * self.formula(np.asarray(speed, dtype=float) / 1000.0)


def _brocher_density(vp):
    """1.6612 Vp - 0.4721 Vp^2 + 0.0671 Vp^3 - 0.0043 Vp^4 + 0.000106 Vp^5 (g/cm3, km/s)."""
    return np.polyval([0.000106, -0.0043, 0.0671, -0.4721, 1.6612, 0.0], vp)


def _brocher_vs(vp):
    """0.7858 - 1.2344 Vp + 0.7949 Vp^2 - 0.1238 Vp^3 + 0.0064 Vp^4 (km/s)."""
    return np.polyval([0.0064, -0.1238, 0.7949, -1.2344, 0.7858], vp)


def _brocher_vp(vs):
    """0.9409 + 2.0947 Vs - 0.8206 Vs^2 + 0.2683 Vs^3 - 0.0251 Vs^4 (km/s)."""
    return np.polyval([-0.0251, 0.2683, -0.8206, 2.0947, 0.9409], vs)


def _gardner_density(vp):
    """1.74 Vp^0.25 (g/cm3, km/s)."""
    return 1.74 * vp**0.25


def _castagna_vp(vs):
    """1.16 Vs + 1.36 (km/s)."""
    return 1.16 * vs + 1.36


RELATIONS = {
    ("density", "brocher_2005"): Relation("vp", 1500.0, 8500.0, _brocher_density),
    ("density", "gardner_1974"): Relation("vp", 1500.0, 6100.0, _gardner_density),
    ("vs", "brocher_2005"): Relation("vp", 1500.0, 8000.0, _brocher_vs),
    ("vp", "brocher_2005"): Relation("vs", 0.0, 4500.0, _brocher_vp),
    ("vp", "castagna_1985"): Relation("vs", 0.0, 4500.0, _castagna_vp),
}
"""By the quantity given and the name in [ground.fill_missing]."""
