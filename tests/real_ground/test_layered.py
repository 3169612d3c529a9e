"""Layered half-spaces, elastic and with attenuation, against the frequency-wavenumber solution of `exact/`."""

from functools import partial

import numpy as np
import pytest

from groundroll import Scenario, plan, run
from groundroll.exact import layered
from groundroll.exact.media import Layer
from groundroll.exact.source import LineSource
from groundroll.motion.misfit import relative_misfit
from groundroll.waves import pulses, relaxation

FREQUENCY, FIVE_PER_CENT = 20.0, 2.3966362
# thickness, vp, vs, density, qp, qs
SOFT_OVER_STIFF = [(5.0, 400.0, 200.0, 1800.0, 40.0, 20.0), (None, 800.0, 400.0, 2000.0, 80.0, 40.0)]
SATURATED = [(2.0, 400.0, 150.0, 1800.0, 25.0, 12.0), (8.0, 1500.0, 150.0, 1700.0, 50.0, 15.0), (None, 1800.0, 450.0, 2000.0, 100.0, 40.0)]
INVERSION = [(4.0, 600.0, 300.0, 1900.0, 40.0, 20.0), (5.0, 400.0, 180.0, 1700.0, 30.0, 10.0), (None, 1000.0, 500.0, 2100.0, 80.0, 40.0)]
DISTANCES = np.array([10.0, 30.0])
DURATION = 0.6
# Far enough from the edges that what they send back, 0.5 % of the peak or so, comes late.
SOURCE = 50.0


def scenario(layers, points, lossy, depth=0.0, graded=False, section_depth=None):
    slowest = min(vs for _, _, vs, *_ in layers)
    highest = FIVE_PER_CENT * FREQUENCY
    down = section_depth or sum(t for t, *_ in layers[:-1]) + slowest / FREQUENCY + 23.0
    text = f"""
[section]
length = {SOURCE + 44.0 + DISTANCES[-1]}
depth = {down}
duration = {DURATION}
highest_frequency = {highest}
[mesh]
spacing = {slowest / highest / points}
graded = {str(graded).lower()}
[ground]
reference_frequency = {FREQUENCY}
"""
    for thickness, vp, vs, density, qp, qs in layers:
        text += "[[ground.layer]]\n" + (f"thickness = {thickness}\n" if thickness else "")
        text += f"vp = {vp}\nvs = {vs}\ndensity = {density}\n" + (f"qp = {qp}\nqs = {qs}\n" if lossy else "")
    text += f"""
[[source]]
name = "hammer"
kind = "force"
x = {SOURCE}
depth = {depth}
force = [0.0, 1.0e5]
pulse = {{ shape = "ricker", frequency = {FREQUENCY} }}
[[receivers]]
name = "line"
at = {[[SOURCE + float(d), 0.0] for d in DISTANCES]}
[output]
sample_interval = 0.002
"""
    return Scenario.from_text(text)


def modulus(losses, density, speed, q):
    """The complex modulus that the solver's own relaxations make of a speed and a Q, as a function of omega."""
    weights = losses.coefficients(1.0 / q) @ losses.shapes
    unrelaxed = density * speed**2 * relaxation.unrelaxed_factor(weights, losses.omega, losses.reference)
    return lambda omega: relaxation.complex_modulus(unrelaxed, weights, losses.omega, omega)


def exact_layers(layers, losses):
    found = []
    for thickness, vp, vs, density, qp, qs in layers:
        moduli = {}
        if losses is not None:
            moduli = {"p_modulus": modulus(losses, density, vp, qp), "s_modulus": modulus(losses, density, vs, qs)}
        found.append(Layer(thickness or np.inf, vp, vs, density, **moduli))
    return found


def misfits(layers, points, lossy, **options):
    """Misfits (receiver, component) of raw velocity traces, nothing shifted or scaled."""
    asked = scenario(layers, points, lossy, **options)
    line = run(asked, threads=2).seismograms["line"]
    pulse = partial(pulses.ricker, frequency=FREQUENCY, delay=1.5 / FREQUENCY)
    source = LineSource(0.0, options.get("depth", 0.0), force=(0.0, 1e5))
    receivers = np.stack([DISTANCES, 0.0 * DISTANCES], axis=1)
    vx, vz = layered.seismograms(exact_layers(layers, plan(asked).losses), source, receivers, pulse, line.time)
    pairs = ((line.velocity_x, vx), (line.velocity_z, vz))
    return np.array([[relative_misfit(found[r], true[r]) for found, true in pairs] for r in range(len(DISTANCES))])


# Bound: 2 % of the whole trace at 8 points per wavelength; measured 0.7 to 1.1 %.
@pytest.mark.parametrize("lossy", [False, True])
@pytest.mark.parametrize("layers", [SOFT_OVER_STIFF, SATURATED], ids=["soft over stiff", "saturated, Vp/Vs 10"])
def test_layers_at_eight_points(layers, lossy):
    assert misfits(layers, 8.0, lossy).max() < 0.02


# A velocity inversion traps waves that meet its interfaces many times: 8 points leave 2.7 % (2.1 % with Q), more
# than the 2 % aimed at, since an interface inside a cell is second order; 12 points leave 1.4 %.
@pytest.mark.parametrize(("points", "bound"), [(8.0, 0.03), (12.0, 0.02)])
@pytest.mark.parametrize("lossy", [False, True])
def test_velocity_inversion(lossy, points, bound):
    assert misfits(INVERSION, points, lossy).max() < bound


def test_misfit_of_interfaces_falls_with_second_order():
    """(12/8)^2 = 2.25 less what closure and absorbing layers leave; measured 1.97."""
    coarse, fine = misfits(INVERSION, 8.0, False).max(), misfits(INVERSION, 12.0, False).max()
    assert fine < coarse / 1.7


def test_without_its_losses_the_lossy_record_is_missed():
    """Mutation: the reference keeps Q, the run leaves it out."""
    asked = scenario(SOFT_OVER_STIFF, 8.0, True)
    elastic = run(scenario(SOFT_OVER_STIFF, 8.0, False), threads=2).seismograms["line"]
    pulse = partial(pulses.ricker, frequency=FREQUENCY, delay=1.5 / FREQUENCY)
    receivers = np.stack([DISTANCES, 0.0 * DISTANCES], axis=1)
    truth = layered.seismograms(exact_layers(SOFT_OVER_STIFF, plan(asked).losses), LineSource(0.0, 0.0, force=(0.0, 1e5)), receivers, pulse, elastic.time)
    assert relative_misfit(elastic.velocity_z[1], truth[1][1]) > 0.2


def test_graded_mesh_keeps_the_accuracy():
    """Rows grow below the layers, where the ground is faster, to a deep section's bottom."""
    even, graded = (misfits(SOFT_OVER_STIFF, 8.0, False, graded=g, section_depth=60.0).max() for g in (False, True))
    assert graded < 0.02 and graded < 1.5 * even
