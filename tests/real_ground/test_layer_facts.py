"""Facts of plane layers read off a record section as a surveyor would: dispersion and a head wave."""

import numpy as np
import pytest

from groundroll import Scenario, run
from groundroll.exact import modes
from groundroll.exact.media import Layer

# Rayleigh modes of 10 m of 400/200/1800 over 800/400/2000 (fundamental mode, closed form, shared check values): f (Hz), c (m/s).
FUNDAMENTAL = {10.0: 221.4377, 15.0: 192.1918, 20.0: 187.8843}


def line_of(layers, highest, length, depth, duration, receivers, pulse):
    text = f"""
[section]
length = {length}
depth = {depth}
duration = {duration}
highest_frequency = {highest}
"""
    for thickness, vp, vs, density in layers:
        text += "[[ground.layer]]\n" + (f"thickness = {thickness}\n" if thickness else "") + f"vp = {vp}\nvs = {vs}\ndensity = {density}\n"
    first, last, count = receivers
    text += f"""
[[source]]
name = "hammer"
kind = "force"
x = 30.0
depth = 0.0
force = [0.0, 1.0e5]
pulse = {pulse}
[[receivers]]
name = "spread"
from = [{30.0 + first}, 0.0]
to = [{30.0 + last}, 0.0]
count = {count}
"""
    return run(Scenario.from_text(text), threads=2).seismograms["spread"]


def phase_velocity(line, frequency, trial):
    """The trial speed at which the phase-shifted spectra of a spread add up to most (Park, Miller & Xia 1998)."""
    spectrum = (line.velocity_z * np.exp(-2j * np.pi * frequency * line.time)).sum(axis=1)
    spectrum /= np.abs(spectrum)
    stack = np.abs((spectrum * np.exp(2j * np.pi * frequency * line.x / trial[:, None])).sum(axis=1))
    return trial[stack.argmax()]


def test_dispersion_of_a_layer_from_a_record_section():
    """1 %: a spread of 160 m resolves a peak about c/(f 160 m) wide and other modes pull its top; measured below."""
    layers = [(10.0, 400.0, 200.0, 1800.0), (None, 800.0, 400.0, 2000.0)]
    pulse = '{ shape = "ricker", frequency = 15.0 }'
    line = line_of(layers, 36.0, 260.0, 40.0, 1.8, (40.0, 200.0, 81), pulse)
    truth = modes.modal_speed([Layer(*layers[0]), Layer(np.inf, *layers[1][1:])], list(FUNDAMENTAL))
    np.testing.assert_allclose(truth, list(FUNDAMENTAL.values()), rtol=1e-5, atol=0)
    found = [phase_velocity(line, f, np.arange(150.0, 300.0, 0.1)) for f in FUNDAMENTAL]
    np.testing.assert_allclose(found, list(FUNDAMENTAL.values()), rtol=0.01, atol=0)


@pytest.fixture(scope="module")
def refracted():
    """5 m of 400 m/s over 1600 m/s: critical angle 14.477512 degrees, intercept 24.206146 ms, crossover 12.909944 m."""
    layers = [(5.0, 400.0, 200.0, 1800.0), (None, 1600.0, 800.0, 2200.0)]
    pulse = '{ shape = "ricker", frequency = 60.0 }'
    return line_of(layers, 144.0, 120.0, 30.0, 0.16, (24.0, 48.0, 13), pulse)


def onset(line, r, share):
    """The time at which a trace first reaches `share` of the head wave's peak, as a first break is picked."""
    fine = np.arange(0.0, 0.16, 2e-5)
    trace = np.abs(np.interp(fine, line.time, line.velocity_z[r]))
    arrival = 0.025 + 0.024206 + (line.x[r] - 30.0) / 1600.0
    head = trace[(fine > arrival - 0.012) & (fine < arrival + 0.006)].max()
    return fine[np.argmax(trace > share * head)]


def test_speed_of_the_head_wave(refracted):
    """First breaks between 32 and 48 m lie on a line of 1600 m/s, the speed of the layer below, within 4 %."""
    picks = np.array([onset(refracted, r, 0.2) for r in range(4, 13)])
    slope = np.polyfit(refracted.x[4:13], picks, 1)[0]
    np.testing.assert_allclose(1.0 / slope, 1600.0, rtol=0.04, atol=0)


def test_intercept_of_the_head_wave(refracted):
    """Quiet before x/1600 m/s + 24.206 ms, moving after: the pulse's first sizeable motion is 12 ms before its peak."""
    line = refracted
    for r, x in enumerate(line.x - 30.0):
        arrival = 0.025 + 0.024206 + x / 1600.0
        trace = np.abs(line.velocity_z[r])
        head = trace[(line.time > arrival - 0.012) & (line.time < arrival + 0.012)].max()
        assert trace[line.time < arrival - 0.016].max() < 0.05 * head
