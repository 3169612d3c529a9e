"""The derivative against polynomials and sines."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.motion.derivative import differentiate


@pytest.mark.parametrize("samples", [5, 6, 40])
def test_exact_on_a_quartic_up_to_both_ends(samples):
    time = np.linspace(-1.0, 1.5, samples)
    curve = np.polynomial.Polynomial([0.3, -1.0, 2.0, 0.7, -1.9])
    slope = differentiate(curve(time)[None, :], time[1] - time[0])
    assert_allclose(slope[0], curve.deriv()(time), rtol=0, atol=2e-12)


def test_not_exact_on_a_quintic():
    time = np.linspace(-1.0, 1.5, 40)
    assert np.abs(differentiate(time**5, time[1] - time[0]) - 5.0 * time**4).max() > 1e-5


@pytest.mark.parametrize("n", [10, 20])
def test_loss_on_a_sine_inside(n):
    """Fourier: D(θ)/θ = (8 sin θ - sin 2θ)/(6θ) = 1 - θ⁴/30 + …, θ = 2π/n."""
    theta = 2.0 * np.pi / n
    phase = theta * np.arange(6 * n)
    slope = differentiate(np.sin(phase), theta)[3:-3]
    ratio = (8.0 * np.sin(theta) - np.sin(2.0 * theta)) / (6.0 * theta)
    assert_allclose(slope, ratio * np.cos(phase[3:-3]), rtol=0, atol=1e-12)
    assert_allclose(1.0 - ratio, theta**4 / 30.0, rtol=0.1, atol=0)


def test_error_falls_with_the_fourth_power_of_the_interval():
    errors = []
    for samples in (101, 201, 401):
        time = np.linspace(0.0, 1.0, samples)
        errors.append(np.abs(differentiate(np.exp(2.0 * time), time[1]) - 2.0 * np.exp(2.0 * time)).max())
    slopes = np.log2(np.array(errors[:-1]) / np.array(errors[1:]))
    assert np.all((slopes > 3.8) & (slopes < 4.2)), slopes


def test_single_precision_traces_are_differentiated_in_double():
    assert differentiate(np.zeros((2, 9), "f4"), 0.1).dtype == np.float64


def test_too_few_samples_and_bad_intervals_are_refused():
    with pytest.raises(InputError, match="at least 5 samples, these traces have 4"):
        differentiate(np.zeros(4), 0.1)
    with pytest.raises(InputError, match="must be positive, not 0.0"):
        differentiate(np.zeros(9), 0.0)
