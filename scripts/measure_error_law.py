"""Measure the scheme's error on Lamb's problem: the table behind `groundroll/running/error_law.py`.

Prints the relative L2 misfit of raw velocity (the worse of both components) by points per wavelength and
distance in dominant Rayleigh wavelengths, for Vp/Vs 1.73 and 3. Takes a few minutes.
"""

from functools import partial

import numpy as np

from groundroll.exact import lamb
from groundroll.exact.media import half_space
from groundroll.exact.rayleigh import speed_ratio
from groundroll.motion.misfit import relative_misfit
from groundroll.running.choices import time_step
from groundroll.running.error_law import PEAK_TO_HIGHEST
from groundroll.waves import pulses
from groundroll.waves.assembly import EdgeDamping, Properties
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import PointSource, Simulation, clock

VS, DENSITY, FREQUENCY = 200.0, 1800.0, 10.0
WAVELENGTHS = np.array([2.0, 5.0, 10.0, 20.0, 40.0])
POINTS = (4.0, 5.0, 6.0, 7.0, 8.0, 10.0, 12.0, 16.0)


def uniform(vp: float) -> Properties:
    one = np.ones((1, 1))
    m, mu = DENSITY * vp**2 * one, DENSITY * VS**2 * one
    return Properties(DENSITY * one, DENSITY * one, m, m - 2.0 * mu, m, mu)


def misfits(ratio: float, points: float) -> np.ndarray:
    """Return the worse misfit of both components at each distance."""
    vp, h = VS * ratio, VS / (PEAK_TO_HIGHEST * FREQUENCY) / points
    speed = VS * speed_ratio(ratio)
    wavelength, delay = speed / FREQUENCY, 1.5 / FREQUENCY
    distances = WAVELENGTHS * wavelength
    duration = distances[-1] / speed + 2.0 * delay + 2.0 / FREQUENCY
    margin = 4.0 * wavelength
    length, depth = (np.ceil(v / h) * h for v in (distances[-1] + 2.0 * margin, margin))
    mesh = even_mesh(h, length, depth, ("absorb", "absorb", "free", "absorb"), 20)
    pulse = partial(pulses.ricker, frequency=FREQUENCY, delay=delay)
    time = clock(duration, time_step(mesh, vp), PEAK_TO_HIGHEST * FREQUENCY, [pulse])
    source = PointSource(margin, 0.0, pulse, force=(0.0, 1e5))
    damping = EdgeDamping(vp, np.pi * FREQUENCY)
    run = Simulation(mesh, uniform(vp), damping, time, [source], [(margin + d, 0.0) for d in distances], threads=2)
    run.advance(time.steps)
    times = np.linspace(0.0, duration, 1000)
    found = run.velocity(times)
    truth = lamb.seismograms(half_space(vp, VS, DENSITY), (0.0, 1e5), distances, pulse, times)
    return np.array([max(relative_misfit(found[r, c], truth[c][r]) for c in (0, 1)) for r in range(len(distances))])


def main() -> None:
    print("Vp/Vs  points  " + "  ".join(f"{w:6.0f} l" for w in WAVELENGTHS))
    for ratio in (3.0**0.5, 3.0):
        for points in POINTS:
            row = misfits(ratio, points)
            print(f"{ratio:5.3f}  {points:6.1f}  " + "  ".join(f"{100 * m:6.2f} %" for m in row), flush=True)


if __name__ == "__main__":
    main()
