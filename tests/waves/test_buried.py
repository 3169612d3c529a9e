"""Buried sources under a free surface, receivers on it 2 to 10 Rayleigh wavelengths off."""

from functools import partial

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.exact import garvin, layered, rayleigh
from groundroll.exact.media import half_space
from groundroll.exact.source import LineSource
from groundroll.waves import pulses
from groundroll.waves.assembly import EdgeDamping
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import Clock, PointSource, Simulation

from . import mutations
from .drive import COURANT, DENSITY, FREE_TOP, FREQUENCY, STRIPS, VS, joint_misfit, shoot, spacing, uniform

POISSON = np.sqrt(3.0)
WAVELENGTH = VS * rayleigh.speed_ratio(POISSON) / FREQUENCY
DISTANCES = np.array([2.0, -5.0, 10.0]) * WAVELENGTH
# Depth in cells at 8 ppw; two wavelengths of S at the centre frequency are 38.35.
TWO_WAVELENGTHS = 2.0 * VS / FREQUENCY / spacing(8)
RATE_IS_RICKER = partial(pulses.gaussian_slope, frequency=FREQUENCY, delay=0.17)
def _shoot(depth, ppw, pulse=None, quantity="velocity", **kind):
    source = PointSource(0.0, depth, None, **kind)
    duration = 10.0 / FREQUENCY + 0.5
    return shoot(POISSON, ppw, source, [(x, 0.0) for x in DISTANCES], duration, pulse=pulse, quantity=quantity)


def _against_layered(cells, ppw, pulse=None, **kind):
    depth = cells * spacing(8)
    record = _shoot(depth, ppw, pulse, **kind)
    source = LineSource(0.0, depth, **kind)
    points = [(x, 0.0) for x in DISTANCES]
    return joint_misfit(record.found, layered.seismograms([record.medium], source, points, record.pulse, record.times))


def _against_garvin(cells, ppw, pulse=None, quantity="velocity"):
    depth = cells * spacing(8)
    record = _shoot(depth, ppw, pulse, quantity, moment=(1e5, 1e5, 0.0))
    exact = garvin.seismograms(record.medium, depth, DISTANCES, record.pulse, record.times, 1e5, quantity=quantity)
    return joint_misfit(record.found, exact)


@pytest.mark.parametrize("cells", [2.0, 2.37, 3.5, 5.0, 7.8, 16.0, TWO_WAVELENGTHS])
def test_vertical_force(cells):
    """1 % at 8 ppw; measured 0.001 to 0.009."""
    assert _against_layered(cells, 8, force=(0.0, 1e5)).max() <= 0.01


# At 2 cells the horizontal force is 1.3 % off, more than the 1 % aimed at; its bound says so.
@pytest.mark.parametrize(("cells", "bound"), [(2.0, 0.015), (3.5, 0.01), (5.0, 0.01), (16.0, 0.01), (TWO_WAVELENGTHS, 0.01)])
def test_horizontal_force(cells, bound):
    """1 % at 8 ppw; measured 0.004 to 0.009, 0.0133 at 2 cells."""
    assert _against_layered(cells, 8, force=(1e5, 0.0)).max() <= bound


# A shear moment between the third and fourth half row is 2.7 % off (plain Lagrange weights: 7.6 %).
@pytest.mark.parametrize(("cells", "bound"), [(1.0, 0.01), (3.5, 0.03), (8.0, 0.01), (TWO_WAVELENGTHS, 0.01)])
def test_shear_moment(cells, bound):
    """1 % at 8 ppw, rate a Ricker pulse."""
    assert _against_layered(cells, 8, RATE_IS_RICKER, moment=(0.0, 0.0, 1e5)).max() <= bound


@pytest.mark.parametrize("cells", [2.0, 2.37, 3.5, 5.0, 7.8, 16.0, TWO_WAVELENGTHS])
def test_explosion(cells):
    """Garvin, 1 % at 8 ppw, displacement of a Ricker moment; measured 0.003 to 0.009, more the deeper."""
    assert _against_garvin(cells, 8, quantity="displacement").max() <= 0.01


@pytest.mark.parametrize("cells", [2.0, 5.0, TWO_WAVELENGTHS])
def test_explosion_whose_rate_is_a_ricker_pulse(cells):
    """The same in velocity, whose spectrum then ends where that of a Ricker force does."""
    assert _against_garvin(cells, 8, RATE_IS_RICKER).max() <= 0.01


@pytest.mark.parametrize("cells", [3.5, 16.0, TWO_WAVELENGTHS])
def test_explosion_of_a_ricker_moment(cells):
    """Motion follows the moment's rate, which holds more of the high frequencies than the moment: 1 % takes 12 ppw
    (at 8 ppw u_z alone is 0.022 off at 16 cells)."""
    assert _against_garvin(cells, 12).max() <= 0.01


@pytest.mark.parametrize(
    "mutation",
    [
        mutations.second_order,
        mutations.source_half_a_column_off,
        mutations.source_half_a_row_off,
        mutations.receivers_on_the_first_half_row,
        mutations.time_dispersion_left_in,
    ],
)
def test_mistakes_are_caught(monkeypatch, mutation):
    """Out of the 1 % allowed above for either source; measured 0.02 (first half row) to 0.78 (second order)."""
    mutation(monkeypatch)
    assert _against_garvin(5.0, 8, RATE_IS_RICKER).max() > 0.015
    assert _against_layered(5.0, 8, force=(0.0, 1e5)).max() > 0.015


def _static_end():
    """Displacement 0.7 s after a moment step at 12.3 m depth over M0/(pi (lambda + mu)), (receiver, 2): found, the
    static limit, and Garvin's at that time."""
    vp, h, depth = 2.0 * VS, 1.0, 12.3
    until, step = 0.75, 0.05
    mesh = even_mesh(h, 320.0, 160.0, FREE_TOP, 20)

    def pulse(t):
        """A step that ends smoothly, long after the motion is read, so that its series is compact."""
        rise, fall = ((t - at) / 0.012 for at in (step, until + 0.15))
        return 0.5 * (np.tanh(rise) - np.tanh(fall))

    dt = COURANT * h / vp
    time = Clock(dt, int(1.3 / dt), 1.2, 120.0)
    xs = np.array([9.0, -14.0, 20.0])
    source = PointSource(160.3, depth, pulse, moment=(1e5, 1e5, 0.0))
    points = [(160.3 + x, 0.0) for x in xs]
    run = Simulation(mesh, uniform(vp), EdgeDamping(vp, np.pi * FREQUENCY), time, [source], points, np.float64, STRIPS, 1)
    run.advance(time.steps)
    scale = 1e5 / (np.pi * DENSITY * (vp**2 - VS**2))
    found = run.motion(np.linspace(0.0, until, 301), "displacement")[:, :, -1] / scale
    limit = np.stack([xs, np.full(3, -depth)], axis=1) / (xs**2 + depth**2)[:, None]
    ground = half_space(vp, VS, DENSITY)
    then = [garvin.step_displacement(ground, depth, x, [until - step], 1e5)[:, 0] / scale for x in xs]
    return found, limit, np.array(then)


def test_static_end():
    """u_x = M0 x/(pi (lambda + mu) r²), u_z = -M0 h/(pi (lambda + mu) r²) (static limit of Garvin 1956).

    1 % of the greatest: what the motion still lacks of its end after 0.7 s, measured 0.7 %. Against the closed form at
    that very time 0.1 %, of which half is the layers' bound 160 m off.
    """
    found, limit, then = _static_end()
    assert_allclose(found, limit, rtol=0, atol=0.01 * np.abs(limit).max())
    assert_allclose(found, then, rtol=0, atol=0.001 * np.abs(limit).max())


def test_static_end_sees_half_a_row(monkeypatch):
    mutations.source_half_a_row_off(monkeypatch)
    found, limit, _ = _static_end()
    assert np.abs(found - limit).max() > 0.02 * np.abs(limit).max()
