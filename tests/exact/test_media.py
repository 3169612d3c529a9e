import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact.media import Layer, complex_moduli, complex_speeds, half_space

GROUND = half_space(400, 200, 1800, qp=40, qs=20)


def phase_speed(frequency):
    return 1 / (1 / complex_speeds(GROUND, 2 * np.pi * np.asarray(frequency), 10.0)[1]).real


def test_constant_q_dispersion():
    """1.037295 a decade at Q = 20: Kjartansson 1979, c ~ f^(arctan(1/Q)/pi)."""
    assert_allclose(phase_speed(10.0), 200.0, rtol=1e-12, atol=0)
    assert_allclose(phase_speed([1.0, 100.0]) / 200, [1 / 1.037295, 1.037295], rtol=6e-7, atol=0)


def test_constant_q_is_constant():
    """Q = Re M / Im M at every frequency (Kjartansson 1979)."""
    _, modulus = complex_moduli(GROUND, 2 * np.pi * np.array([0.1, 10.0, 1000.0]))
    assert_allclose(modulus.real / modulus.imag, 20.0, rtol=1e-10, atol=0)


def test_decay_with_distance():
    """exp(-pi f x/(Q c)) = 0.207880 at 20 Hz, 100 m, Q = 20, c = 200: right to first order, next share 1/(4Q²)."""
    slowness = (1 / complex_speeds(GROUND, 2 * np.pi * np.array([20.0]), 20.0)[1])[0]
    decay = np.exp(2 * np.pi * 20 * 100 * slowness.imag)
    exact = np.exp(-2 * np.pi * 20 * 100 / 200 * np.tan(np.arctan(1 / 20) / 2))
    assert_allclose(decay, exact, rtol=1e-12, atol=0)
    assert_allclose(np.log(decay), np.log(0.207880), rtol=1.01 / (4 * 20**2), atol=0)


def test_elastic_has_no_frequency():
    p, s = complex_moduli(half_space(400, 200, 1800), 2 * np.pi * np.array([1.0, 100.0]) - 3j)
    assert_allclose(p, 1800 * 400**2, rtol=1e-14, atol=0)
    assert_allclose(s, 1800 * 200**2, rtol=1e-14, atol=0)


@pytest.mark.parametrize(
    "values, words",
    [
        ((10, 400, -1, 1800), "vs = -1 of a layer must be a positive number"),
        ((0, 400, 200, 1800), "thickness = 0 of a layer must be above 0"),
        ((10, 200, 200, 1800), "vp = 200 m/s of a layer must be above its vs = 200 m/s"),
    ],
)
def test_bad_layer(values, words):
    with pytest.raises(InputError, match=words):
        Layer(*values)


def test_unknown_law():
    with pytest.raises(InputError, match='law = "linear" is not known; choose one of kjartansson, hysteretic'):
        complex_moduli(GROUND, np.array([1.0]), law="linear")
