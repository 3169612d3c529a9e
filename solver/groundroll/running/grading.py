"""A mesh whose rows grow with depth where the ground is faster, by limits measured on the scheme.

The stretch J = dz/d(k h) never exceeds the ratio of the slowest S wave below a depth to the slowest of all,
so no wave has fewer points than the planner chose; it is 1 near the surface, at most 2 within the first
1.5 dominant Rayleigh wavelengths and at most MOST below 3 of them, and grows smoothly: log J is the mean of
its bound over the SMOOTHING cells above (twice), which stays below a bound that grows with depth.
"""

from dataclasses import dataclass

import numpy as np
from scipy.ndimage import uniform_filter1d

from groundroll.ground.model import GroundModel
from groundroll.waves.terrain import FADE, blend

MOST = 5.0
NEAR, FAR = 1.5, 3.0
SMOOTHING = 8
# The bound is tabulated this finely, in mesh spacings.
FINE = 0.1


@dataclass(frozen=True)
class Grading:
    """Level depth Z and stretch J, tabulated at even steps of Z from the surface down; constant J below."""

    depth: np.ndarray
    stretch: np.ndarray
    zeta: np.ndarray

    def depth_of(self, zeta):
        """Return Z (m) at row coordinate `zeta` = k h; rows above the surface and below the table go on evenly."""
        below = np.interp(zeta, self.zeta, self.depth) + self.stretch[-1] * np.maximum(zeta - self.zeta[-1], 0.0)
        return below + np.minimum(zeta, 0.0)

    def stretch_of(self, zeta):
        """Return J at row coordinate `zeta`."""
        return np.interp(self.depth_of(zeta), self.depth, self.stretch)

    def zeta_at(self, depth: float) -> float:
        return float(np.interp(depth, self.depth, self.zeta))


def grade(model: GroundModel, spacing: float, depth: float, wavelength: float) -> Grading:
    """Return the grading of a section of `depth` (m) for a dominant surface wavelength (m).

    Under terrain a row rises and falls with the ground; the bound takes the highest place it reaches.
    """
    step = FINE * spacing
    z = step * np.arange(int(np.ceil(depth / step)) + 1)
    heights = model.surface_elevation(np.linspace(0.0, model.length, 401))
    middle, half = 0.5 * (heights.max() + heights.min()), 0.5 * (heights.max() - heights.min())
    rise = half * blend(z / (2.0 * FADE * half)) if half > 0.0 else 0.0
    reach = z - middle - rise
    faster = model.slowest_wave_below(reach) / model.slowest_shear
    cap = np.interp(z / wavelength, [0.0, NEAR, FAR], [2.0, 2.0, MOST])
    bound = np.log(np.minimum(np.maximum.accumulate(np.maximum(faster, 1.0)), cap))
    window = int(SMOOTHING / FINE)
    padded = np.concatenate([np.zeros(2 * window), bound])
    # Two running means, each delayed by half its window: only what lies above counts.
    smooth = uniform_filter1d(uniform_filter1d(padded, window, mode="nearest"), window, mode="nearest")
    stretch = np.exp(smooth[window : window + len(z)])
    zeta = np.concatenate([[0.0], np.cumsum(0.5 * step * (1.0 / stretch[1:] + 1.0 / stretch[:-1]))])
    return Grading(z, stretch, zeta)
