import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact.source import LineSource
from groundroll.exact.transform import band_of

TIMES = np.arange(400) * 2e-3


def test_pulse_comes_back(ricker):
    pulse = ricker(20, 0.1)
    band = band_of(pulse, TIMES)
    found = band.traces(np.ones((1, len(band.omega))), "displacement")[0]
    assert_allclose(found, pulse(TIMES), rtol=0, atol=1e-6)


def test_velocity_is_the_slope(ricker):
    pulse, h = ricker(20, 0.1), 1e-6
    band = band_of(pulse, TIMES)
    slope = (pulse(TIMES + h) - pulse(TIMES - h)) / (2 * h)
    found = band.traces(np.ones((1, len(band.omega))), "velocity")[0]
    assert_allclose(found, slope, rtol=0, atol=3e-6 * np.abs(slope).max())


def test_samples_as_pulse(ricker):
    pulse = ricker(20, 0.1)
    one, other = band_of(pulse, TIMES), band_of(pulse(TIMES), TIMES)
    assert_allclose(other.spectrum[:40], one.spectrum[:40], rtol=0, atol=1e-9)


def test_coarse_output_samples(ricker):
    """Asked for at 10 ms, a 40 Hz pulse is still resolved inside."""
    times = np.arange(80) * 1e-2
    pulse = ricker(40, 0.1)
    band = band_of(pulse, times)
    found = band.traces(np.ones((1, len(band.omega))), "displacement")[0]
    assert_allclose(found, pulse(times), rtol=0, atol=1e-6)


@pytest.mark.parametrize(
    "pulse, times, words",
    [
        (lambda t: np.ones_like(t), TIMES, "give a smoother pulse"),
        (lambda t: 0 * t, TIMES, "zero throughout"),
        (lambda t: t, TIMES + 1, "must be 0, dt, 2 dt"),
        (lambda t: t, TIMES**2, "evenly spaced"),
        (np.ones(3), TIMES, "has shape"),
    ],
)
def test_refusals(pulse, times, words):
    with pytest.raises(InputError, match=words):
        band_of(pulse, times)


def test_source_without_strength():
    with pytest.raises(InputError, match="force or a moment that is not zero"):
        LineSource(0, 0)
