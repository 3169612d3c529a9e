"""The scheme's error as measured: relative L2 misfit of a velocity seismogram, nothing shifted or scaled.

Measured on Lamb's problem (vertical surface force, Ricker pulse, Vp/Vs 1.73 and 3, the worse of both
components and both ratios; `scripts/measure_error_law.py` repeats it): the misfit grows with the distance
travelled,

    misfit = near(ppw) max(1, 6/N) + growth(ppw) N,

ppw = points per wavelength of the slowest S wave at the highest frequency (5 % of the Ricker spectrum's
peak), N = distance in dominant wavelengths (at the frequency of the peak). Beyond 10 points the growth is
that of the surface closure and hardly falls any more.
"""

import numpy as np

PEAK_TO_HIGHEST = 2.3966362
POINTS = np.array([4.0, 5.0, 6.0, 7.0, 8.0, 10.0, 12.0, 16.0])
NEAR = np.array([0.045, 0.013, 0.0045, 0.0028, 0.0022, 0.0019, 0.0017, 0.0012])
GROWTH = np.array([3.1e-3, 5.0e-4, 2.6e-4, 2.0e-4, 1.7e-4, 1.6e-4, 1.5e-4, 1.4e-4])
MOST_POINTS = 10.0


def expected_misfit(points_per_wavelength: float, wavelengths: float) -> float:
    """Return the expected misfit at `points_per_wavelength` after `wavelengths` dominant wavelengths.

    Log-log interpolation between the measured points; outside them the end slopes go on.
    """
    p = np.log(points_per_wavelength)
    near, growth = (np.exp(_interpolate(p, np.log(POINTS), np.log(v))) for v in (NEAR, GROWTH))
    return float(near * max(1.0, 6.0 / max(wavelengths, 1.0)) + growth * wavelengths)


def needed_points(misfit: float, wavelengths: float) -> float:
    """Return the least points per wavelength, in tenths from 5, whose expected misfit is at most `misfit`.

    MOST_POINTS if that is not enough: more would cost much and gain little.
    """
    for points in np.arange(5.0, MOST_POINTS, 0.1):
        if expected_misfit(points, wavelengths) <= misfit:
            return round(float(points), 1)
    return MOST_POINTS


def _interpolate(x, xs, ys):
    j = int(np.clip(np.searchsorted(xs, x) - 1, 0, len(xs) - 2))
    return ys[j] + (x - xs[j]) * (ys[j + 1] - ys[j]) / (xs[j + 1] - xs[j])
