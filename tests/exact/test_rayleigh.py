"""Closed forms: Rayleigh 1885, Lamb 1904; Aki & Richards, Quantitative Seismology, ch. 5 (six digits, so atol 6e-7)."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact import rayleigh

# Poisson ratio: c/Vs, H/V, depth over wavelength where the motion turns prograde.
TABLE = {
    0.0: (0.874032, 0.786151, 0.255050),
    0.25: (0.919402, 0.681250, 0.192495),
    0.30: (0.927413, 0.656264, 0.180966),
    1 / 3: (0.932526, 0.638897, 0.173454),
    0.40: (0.942195, 0.602488, 0.158816),
    0.45: (0.948960, 0.573723, 0.148141),
    0.48: (0.952820, 0.555858, 0.141844),
}
LOAD = {0.25: 0.183486, 0.30: 0.166370, 1 / 3: 0.155584, 0.40: 0.135496, 0.45: 0.121691}


def ratio(poisson):
    return np.sqrt((2 - 2 * poisson) / (1 - 2 * poisson))


@pytest.mark.parametrize("poisson", TABLE)
def test_table(poisson):
    v = ratio(poisson)
    found = rayleigh.speed_ratio(v), rayleigh.ellipticity(v), rayleigh.reversal_depth(v)
    assert_allclose(found, TABLE[poisson], rtol=0, atol=6e-7)


def test_closed_speeds():
    assert_allclose(rayleigh.speed_ratio(np.sqrt(3)), np.sqrt(2 - 2 / np.sqrt(3)), rtol=0, atol=1e-13)
    assert_allclose(rayleigh.speed_ratio(np.sqrt(2)), np.sqrt(3 - np.sqrt(5)), rtol=0, atol=1e-13)


@pytest.mark.parametrize("poisson", LOAD)
def test_line_load(poisson):
    assert_allclose(rayleigh.line_load_constant(ratio(poisson)), LOAD[poisson], rtol=0, atol=6e-7)


def test_line_load_horizontal():
    v = np.sqrt(3)
    assert_allclose(rayleigh.line_load_constant(v) * rayleigh.ellipticity(v), 0.125, rtol=0, atol=1e-12)


def test_impossible_ground():
    with pytest.raises(InputError, match="must be above 1.1547"):
        rayleigh.speed_ratio(1.1)
