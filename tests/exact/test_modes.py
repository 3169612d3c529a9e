"""Rayleigh modes of 10 m of 400/200/1800 over 800/400/2000 (project's table of outside values, computed twice)."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact import modes, rayleigh
from groundroll.exact.media import Layer, half_space

LAYERS = [Layer(10, 400, 200, 1800), half_space(800, 400, 2000)]
FREQUENCIES = [5, 8, 10, 15, 20, 40]


def test_fundamental():
    expected = [332.4076, 275.5268, 221.4377, 192.1918, 187.8843, 186.5146]
    assert_allclose(modes.modal_speed(LAYERS, FREQUENCIES), expected, rtol=0, atol=6e-5)


def test_first_higher():
    expected = [np.nan, 385.1488, 352.2914, 330.4440, 304.3608, 213.4993]
    assert_allclose(modes.modal_speed(LAYERS, FREQUENCIES, 1), expected, rtol=0, atol=6e-5)


def test_group():
    expected = [293.352, 136.335, 129.114, 169.156, 180.800, 186.423]
    assert_allclose(modes.group_speed(LAYERS, FREQUENCIES), expected, rtol=0, atol=6e-4)


def test_half_space_and_identical_layers():
    ground = half_space(400, 200, 1800)
    c = 200 * rayleigh.speed_ratio(2.0)
    assert_allclose(modes.modal_speed([ground], [3.0, 300.0]), c, rtol=1e-9, atol=0)
    assert_allclose(modes.modal_speed([Layer(7, 400, 200, 1800), ground], [3.0, 30.0]), c, rtol=1e-9, atol=0)


def test_thick_layer_at_high_frequency():
    """At 2 kHz the layer is over 100 wavelengths thick: the fundamental runs at the layer's own Rayleigh speed."""
    found = modes.modal_speed(LAYERS, [2000.0])
    assert_allclose(found, 200 * rayleigh.speed_ratio(2.0), rtol=1e-9, atol=0)


def test_no_half_space():
    with pytest.raises(InputError, match="last layer must have thickness inf"):
        modes.modal_speed(LAYERS[:1], [10.0])
