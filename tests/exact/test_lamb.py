import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.signal import hilbert
from scipy.special import erf

from groundroll.errors import InputError
from groundroll.exact import lamb, rayleigh
from groundroll.exact.media import half_space

POISSON = half_space(200 * np.sqrt(3), 200, 1800)


@pytest.mark.parametrize("poisson, constant", [(0.25, 0.183486), (1 / 3, 0.155584), (0.45, 0.121691)])
def test_rayleigh_pulse_far_off(ricker, poisson, constant):
    """Lamb 1904: uz -> C |Hilbert F|/mu, |ux| -> C (H/V) F(t - x/c)/mu; 120 wavelengths off, body waves are below 1 %.

    For a force down, F > 0, ux points to the source (z down): the same sign as in the static limit below.
    """
    v = np.sqrt((2 - 2 * poisson) / (1 - 2 * poisson))
    ground, x = half_space(200 * v, 200, 1800), 1200.0
    c = 200 * rayleigh.speed_ratio(v)
    pulse, times = ricker(20, x / c + 0.1), np.arange(4000) * 2e-3
    ux, uz = lamb.seismograms(ground, (0, 1), [x], ricker(20, 0.1), times, quantity="displacement")
    near = np.abs(times - x / c - 0.1) < 0.06
    scale = constant / (1800 * 200**2)
    assert_allclose(-ux[0, near], scale * rayleigh.ellipticity(v) * pulse(times)[near], rtol=0, atol=0.01 * scale)
    turned = np.imag(hilbert(pulse(times)))
    error = min(np.abs(uz[0, near] - sign * scale * turned[near]).max() for sign in (1, -1))
    assert error < 0.01 * scale


@pytest.mark.parametrize("poisson", [0.25, 1 / 3, 0.45])
def test_static_end(poisson):
    """Flamant's line load: long after a step of force down, the surface has moved (1 - 2 nu) F/(4 mu) towards it.

    Johnson 1985, Contact Mechanics, section 2.3 (from memory).
    """
    v = np.sqrt((2 - 2 * poisson) / (1 - 2 * poisson))
    ground, times = half_space(200 * v, 200, 1800), np.arange(300) * 2e-3
    ux, _ = lamb.seismograms(ground, (0, 1), [20, -20], lambda t: (1 + erf((t - 0.1) / 0.02)) / 2, times,
                             quantity="displacement")
    expected = (1 - 2 * poisson) / (4 * 1800 * 200**2)
    assert_allclose(ux[:, -1], [-expected, expected], rtol=1e-7, atol=0)


def test_mirror(ricker):
    times, pulse = np.arange(200) * 2e-3, ricker(15, 0.1)
    ux, uz = lamb.seismograms(POISSON, (0, 1), [20, -20], pulse, times)
    assert_allclose(ux[1], -ux[0], rtol=0, atol=0)
    assert_allclose(uz[1], uz[0], rtol=0, atol=0)


def test_receiver_on_source(ricker):
    with pytest.raises(InputError, match="sits on the line source"):
        lamb.seismograms(POISSON, (0, 1), [0.0], ricker(15, 0.1), np.arange(10) * 1e-3)
