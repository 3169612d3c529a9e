"""Source pulses s(t): dimensionless, peak 1.

    ricker          (1 - 2 a) exp(-a),  a = (pi f (t - delay))^2
    gaussian        exp(-a)
    gaussian_slope  d/dt of it scaled to peak 1:  -sqrt(2 e) pi f (t - delay) exp(-a)
    half_sine       sin(pi (t - delay)/duration) for 0 < t - delay < duration
"""

from dataclasses import dataclass

import numpy as np

# The amplitude spectrum of a Ricker pulse falls to 5 % of its peak at this multiple of its frequency.
RICKER_BAND = 2.3966362
# A delay of 1.5/f starts a ricker at 5e-9 of its peak.
DEFAULT_DELAY = 1.5


def ricker(t, frequency, delay):
    a = (np.pi * frequency * (t - delay)) ** 2
    return (1.0 - 2.0 * a) * np.exp(-a)


def gaussian(t, frequency, delay):
    return np.exp(-((np.pi * frequency * (t - delay)) ** 2))


def gaussian_slope(t, frequency, delay):
    u = np.pi * frequency * (t - delay)
    return -np.sqrt(2.0 * np.e) * u * np.exp(-(u**2))


def half_sine(t, duration, delay):
    u = (np.asarray(t) - delay) / duration
    return np.where((u > 0.0) & (u < 1.0), np.sin(np.pi * np.clip(u, 0.0, 1.0)), 0.0)


@dataclass(frozen=True)
class Sampled:
    """A pulse read from a file: linear between its samples, 0 before and after them."""

    time: np.ndarray
    value: np.ndarray

    def __call__(self, t):
        return np.interp(t, self.time, self.value, left=0.0, right=0.0)
