"""Kramer 1996, Geotechnical Earthquake Engineering, ch. 7 (form; numbers computed outside)."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact import column
from groundroll.exact.media import Layer, half_space

ROCK = half_space(1600, 800, 2200)


def soil(damping=None):
    return Layer(20, 400, 200, 1800) if damping is None else Layer(20, 400, 200, 1800, qs=1 / (2 * damping))


@pytest.mark.parametrize(
    "damping, expected",
    [(0.02, (1.235581, 31.843264, 0.998035, 10.600508)), (0.05, (1.233059, 12.763146, 0.988004, 4.220223))],
)
def test_rigid_base(damping, expected):
    found = np.abs(column.surface_over_base([soil(damping)], [1, 2.5, 5, 7.5]))
    assert_allclose(found, expected, rtol=0, atol=6e-7)


def test_elastic_rock():
    found = np.abs(column.surface_over_outcrop([soil(), ROCK], [1, 2.5]))
    assert_allclose(found, [1.222641, 4.888889], rtol=0, atol=6e-7)


def test_damped_peak():
    f = np.linspace(2.4, 2.55, 1501)
    found = np.abs(column.surface_over_outcrop([soil(0.05), ROCK], f))
    assert_allclose([found.max(), f[found.argmax()]], [3.5345, 2.4685], rtol=0, atol=6e-5 + 1e-4)


def test_resonances():
    """f = (2n - 1) Vs/4H."""
    f = np.linspace(1, 20, 19001)
    found = np.abs(column.surface_over_base([soil(1e-4)], f))
    peaks = f[1:-1][(found[1:-1] > found[:-2]) & (found[1:-1] > found[2:])]
    assert_allclose(peaks, [2.5, 7.5, 12.5, 17.5], rtol=0, atol=1.1e-3)


def test_cut_layer_and_p_waves():
    """A layer cut in two is the same layer; P waves are shear waves of another speed."""
    f = np.array([1.0, 3.3, 8.0])
    cut = [Layer(7, 400, 200, 1800, qs=10), Layer(13, 400, 200, 1800, qs=10), ROCK]
    whole = column.surface_over_outcrop([soil(0.05), ROCK], f)
    assert_allclose(column.surface_over_outcrop(cut, f), whole, rtol=1e-12, atol=0)
    found = column.surface_over_outcrop([Layer(20, 200, 80, 1800), half_space(800, 300, 2200)], f, "P")
    assert_allclose(found, column.surface_over_outcrop([soil(), ROCK], f), rtol=1e-12, atol=0)


def test_refusals():
    with pytest.raises(InputError, match="last layer must have thickness inf"):
        column.surface_over_outcrop([soil()], [1.0])
    with pytest.raises(InputError, match="must have a thickness"):
        column.surface_over_base([soil(), ROCK], [1.0])
