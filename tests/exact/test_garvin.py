import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact import garvin, quadrature
from groundroll.exact.media import half_space

CLAY = half_space(800, 400, 1800)


@pytest.mark.parametrize(
    "x, t, expected",
    [
        (20, 0.053033, (1.099157e-5, -7.847708e-6)),
        (100, 0.191213, (3.530492e-6, 2.317121e-7)),
        (100, 0.254951, (3.468768e-6, 2.449285e-6)),
    ],
)
def test_values(x, t, expected):
    """Garvin 1956, values computed twice outside; times are rounded to 1e-6 s, worth 1e-6 of the peak."""
    found = garvin.step_displacement(CLAY, 20, x, [t], 1e6)[:, 0]
    assert_allclose(found, expected, rtol=0, atol=2e-6 * 1.1e-5)


def test_static_end():
    """ux = M0 x/(pi (lambda + mu) r²), uz = -M0 h/(pi (lambda + mu) r²): the static line of dilatation."""
    found = garvin.step_displacement(CLAY, 20, 35, [100.0], 1e6)[:, 0]
    factor = 1e6 / (np.pi * 1800 * (800**2 - 400**2) * (35**2 + 20**2))
    assert_allclose(found, [35 * factor, -20 * factor], rtol=1e-6, atol=0)


def test_nothing_before_p():
    assert not garvin.step_displacement(CLAY, 20, 35, np.linspace(0, 0.0503, 9), 1e6).any()


def test_panels_are_fine_enough(ricker, misfit, monkeypatch):
    times, pulse = np.arange(300) * 2e-3, ricker(15, 0.1)
    found = garvin.seismograms(CLAY, 5, [3, 90], pulse, times)
    monkeypatch.setattr(garvin, "even_panels", lambda a, b, width: quadrature.even_panels(a, b, width / 2))
    assert misfit(found, garvin.seismograms(CLAY, 5, [3, 90], pulse, times)).max() < 1e-8


def test_surface_explosion_is_refused(ricker):
    with pytest.raises(InputError, match="depth must be above 0"):
        garvin.seismograms(CLAY, 0, [3], ricker(15, 0.1), np.arange(10) * 1e-3)
