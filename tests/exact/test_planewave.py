"""Aki & Richards, Quantitative Seismology, ch. 5; six digits, so atol 6e-7."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.errors import InputError
from groundroll.exact import planewave
from groundroll.exact.media import half_space

POISSON = half_space(400 * np.sqrt(3), 400, 1800)
CLAY, GRAVEL = half_space(1600, 180, 1750), half_space(1900, 400, 2000)


@pytest.mark.parametrize(
    "angle, ux, uz",
    [(0, 0, 2), (15, 0.593462, 1.918624), (30, 1.121089, 1.690105), (45, 1.521284, 1.360678), (60, 1.732051, 1.0)],
)
def test_p_at_the_surface(angle, ux, uz):
    """An upgoing P moves the surface along its own way: to +x and up."""
    assert_allclose(planewave.free_surface(POISSON, angle, "P")[1], [ux, -uz], rtol=0, atol=6e-7)


@pytest.mark.parametrize("angle", [60.0, 77.2061])
def test_no_reflected_p(angle):
    assert abs(planewave.free_surface(POISSON, angle, "P")[0][0]) < 2e-6


@pytest.mark.parametrize(
    "angle, ux, uz",
    [(0, 2, 0), (10, 1.951479, 0.397126), (20, 1.819303, 0.755643), (30, 1.732051, 1.0), (45, 0, 1.414214)],
)
def test_sv_at_the_surface(angle, ux, uz):
    assert_allclose(np.abs(planewave.free_surface(POISSON, angle, "SV")[1]), [ux, uz], rtol=0, atol=6e-7)


def test_sv_at_45_degrees_for_any_ground():
    assert_allclose(np.abs(planewave.free_surface(CLAY, 45, "SV")[1]), [0, np.sqrt(2)], rtol=0, atol=1e-12)


@pytest.mark.parametrize(
    "angle, expected",
    [
        (0, (0.151515, 0, 0.848485, 0)),
        (20, (0.154164, -0.112658, 0.858796, -0.066870)),
        (40, (0.194117, -0.164741, 0.913461, -0.095237)),
    ],
)
def test_p_at_an_interface(angle, expected):
    assert_allclose(planewave.interface(CLAY, GRAVEL, angle, "P"), expected, rtol=0, atol=6e-7)


def test_sv_at_an_interface():
    found = planewave.interface(CLAY, GRAVEL, 0, "SV")
    assert_allclose([abs(found[1]), found[3]], [0.434978, 0.565022], rtol=0, atol=6e-7)


@pytest.mark.parametrize("wave, angle", [("P", 35.0), ("SV", 5.0), ("SV", 20.0), ("SV", 60.0)])
def test_energy_is_kept(wave, angle):
    """The flux rho v cos|A|² over waves that travel equals the incident one (Aki & Richards, section 5.2)."""
    p = np.sin(np.radians(angle)) / (CLAY.vp if wave == "P" else CLAY.vs)
    parts = [(CLAY, CLAY.vp), (CLAY, CLAY.vs), (GRAVEL, GRAVEL.vp), (GRAVEL, GRAVEL.vs)]
    flux = [m.density * v * np.sqrt(max(1 - (p * v) ** 2, 0)) for m, v in parts]
    found = np.abs(planewave.interface(CLAY, GRAVEL, angle, wave)) ** 2
    assert_allclose(found @ flux, flux[0] if wave == "P" else flux[1], rtol=1e-12, atol=0)


def test_refusals():
    with pytest.raises(InputError, match='wave = "SH" is not P or SV'):
        planewave.free_surface(CLAY, 10, "SH")
    with pytest.raises(InputError, match="must be from 0 to below 90"):
        planewave.interface(CLAY, GRAVEL, 95, "P")
