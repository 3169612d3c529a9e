"""Ground under a curved surface: Lamb's problem on a tilted plane, energy, both marching orders."""

from dataclasses import replace
from functools import partial

import numpy as np
import pytest

from groundroll.exact import lamb
from groundroll.exact.media import half_space
from groundroll.exact.rayleigh import speed_ratio
from groundroll.motion.misfit import relative_misfit
from groundroll.running.choices import COURANT_SHARE, stable_step
from groundroll.waves import pulses, relaxation
from groundroll.waves.assembly import EdgeDamping, Properties
from groundroll.waves.attenuation import Loss
from groundroll.waves.ledger import Ledger
from groundroll.waves.march import PLAIN, Order
from groundroll.waves.mesh import even_mesh, with_terrain
from groundroll.waves.simulation import Clock, PointSource, Simulation, clock
from groundroll.waves.state import inner

ABSORB = ("absorb", "absorb", "free", "absorb")
VS, DENSITY, FREQUENCY = 200.0, 1800.0, 10.0
FIVE_PER_CENT = 2.3966362  # Ricker spectrum, checks of closed forms: 5 % at 2.396636 f0


def bend(u):
    u = np.clip(u, 0.0, 1.0)
    return u**3 * (10.0 - 15.0 * u + 6.0 * u**2)


def uniform(vp):
    one = np.ones((1, 1))
    m, mu = DENSITY * vp**2 * one, DENSITY * VS**2 * one
    return Properties(DENSITY * one, DENSITY * one, m, m - 2.0 * mu, m, mu)


def tilted(degrees, ppw, ratio, force, order=Order()):
    """Misfits at 10 Rayleigh wavelengths along a tilted plane, (tangential, normal), of a surface force given so.

    The plane is long enough that nothing from its bends arrives in the record.
    """
    angle, vp = np.radians(degrees), VS * ratio
    h = VS / (FIVE_PER_CENT * FREQUENCY) / ppw
    speed = VS * speed_ratio(ratio)
    wavelength, delay = speed / FREQUENCY, 1.5 / FREQUENCY
    distance = 10.0 * wavelength
    duration = distance / speed + delay + 1.5 / FREQUENCY
    plane = max(wavelength, (vp * duration - distance) / 2.0 - 0.6 * vp * delay) * np.cos(angle)
    ramp = 3.0 * wavelength
    x0 = plane + ramp + 2.0 * wavelength
    x1 = x0 + distance * np.cos(angle)
    length = np.ceil((x1 + x0) / h) * h

    def slope(x):
        return np.tan(angle) * bend((x - (x0 - plane - ramp)) / ramp) * bend((x1 + plane + ramp - x) / ramp)

    fine = np.linspace(-60.0 * h, length + 60.0 * h, 400_001)
    heights = np.concatenate([[0.0], np.cumsum(0.5 * (slope(fine)[1:] + slope(fine)[:-1]) * np.diff(fine))])
    depth = np.ceil((4.0 * heights.max() + 4.0 * wavelength) / h) * h
    mesh = with_terrain(even_mesh(h, length, depth, ABSORB, 20), lambda x: np.interp(x, fine, heights), slope)
    pulse = partial(pulses.ricker, frequency=FREQUENCY, delay=delay)
    time = clock(duration, COURANT_SHARE * stable_step(mesh, vp), FIVE_PER_CENT * FREQUENCY, [pulse])
    along, into = force
    # Uphill is towards +x and z points down: tangent (cos, -sin), inward normal (sin, cos).
    cos, sin = np.cos(angle), np.sin(angle)
    source = PointSource(x0 + 0.3 * h, 0.0, pulse, force=(along * cos + into * sin, into * cos - along * sin))
    damping = EdgeDamping(vp, np.pi * FREQUENCY)
    run = Simulation(mesh, uniform(vp), damping, time, [source], [(x0 + 0.3 * h + distance * cos, 0.0)], np.float32, order, 2)
    run.advance(time.steps)
    times = np.linspace(0.0, duration, 800)
    vx, vz = run.velocity(times)[0]
    truth = lamb.seismograms(half_space(vp, VS, DENSITY), force, [distance], pulse, times)
    found = (vx * cos - vz * sin, vx * sin + vz * cos)
    return [relative_misfit(f, t[0]) for f, t in zip(found, truth, strict=True)]


# Truth: Lamb's closed form (de Hoop 1960), rotated. Bounds: the targets for raw velocity misfit.
@pytest.mark.parametrize(("degrees", "ppw", "bound"), [(10.0, 6.0, 0.02), (20.0, 6.0, 0.02), (30.0, 6.0, 0.035)])
def test_lamb_on_a_tilted_plane(degrees, ppw, bound):
    assert max(tilted(degrees, ppw, 3.0**0.5, (0.0, 1e5))) < bound


@pytest.mark.slow
@pytest.mark.parametrize(
    ("degrees", "ratio", "force", "bound"),
    [(d, r, f, b) for d, b in ((10.0, 0.007), (20.0, 0.01), (30.0, 0.02)) for r in (3.0**0.5, 4.0) for f in ((0.0, 1e5), (1e5, 0.0))],
)
def test_lamb_on_a_tilted_plane_at_eight_points(degrees, ratio, force, bound):
    assert max(tilted(degrees, 8.0, ratio, force)) < bound


def test_a_half_cell_shift_would_be_seen(monkeypatch):
    from groundroll.waves import placement

    true_cells = placement.cells_of
    monkeypatch.setattr(placement, "cells_of", lambda mesh, f, x, d: true_cells(mesh, f, x + 0.5 * mesh.spacing, d) if d == 0 and f == 0 else true_cells(mesh, f, x, d))
    assert max(tilted(20.0, 6.0, 3.0**0.5, (0.0, 1e5))) > 0.02


def rough_case(seed, steepest, loss=None, closed=False, dtype=np.float64, order=Order(), threads=1, steps=400, cells=(160, 80)):
    """Random ground of Vp/Vs 1.6 to 6 under a random surface, level at its ends; fields set at random."""
    rng = np.random.default_rng(seed)
    length, depth = cells
    x = np.linspace(-60.0, length + 60.0, 20_001)
    raw = sum(rng.normal() * np.sin(2.0 * np.pi * (j + 2) * x / length + rng.uniform(0.0, 6.28)) / (j + 2) ** 0.5 for j in range(12))
    heights = raw * bend((x - 15.0) / 20.0) * bend((length - 15.0 - x) / 20.0)
    heights *= np.tan(np.radians(steepest)) / np.abs(np.gradient(heights, x)).max()
    slopes = np.gradient(heights, x)
    mesh = with_terrain(even_mesh(1.0, length, depth, ABSORB, 20), lambda q: np.interp(q, x, heights), lambda q: np.interp(q, x, slopes))
    if closed:
        mesh = replace(mesh, absorbing=(0, 0, 0, 0))  # the cut-off interior stencil is its own closed edge
    shape = (mesh.nz, mesh.nx)
    vs, ratio = VS * np.exp(0.3 * rng.normal(size=shape)), rng.uniform(1.6, 6.0, size=shape)
    density = DENSITY * np.exp(0.1 * rng.normal(size=shape))
    m, mu = density * (vs * ratio) ** 2, density * vs**2
    fastest = (vs * ratio).max()
    dt = COURANT_SHARE * stable_step(mesh, fastest)
    time = Clock(dt, steps + 2, steps * dt, 60.0)
    ground = Properties(density, density, m, m - 2.0 * mu, m, mu)
    run = Simulation(mesh, ground, EdgeDamping(fastest, np.pi * 15.0), time, [], [(30.3, 0.0), (70.2, 4.4)], dtype, order, threads, loss)
    k = run.march.ground.material
    for field, property_, size in zip(run.march.fields, (k.bx, k.bz, k.c11, k.c33, k.mu), (1, 1, 3e5, 3e5, 3e5), strict=True):
        inner(field, mesh)[:] = 1e-3 * size * rng.normal(size=shape) * (inner(property_, mesh) > 0.0)
    return run


def losses(q=15.0):
    omega = relaxation.band_frequencies(1.0, 100.0, 4)
    shape = np.moveaxis(relaxation.shape_coefficients(np.full((1, 1), q), omega, 1.0, 100.0), -1, 0)
    return Loss(omega, relaxation.shapes(omega, 1.0, 100.0), shape, shape, shape)


def energies(run, steps, parts=4):
    ledger = Ledger(run.mesh, run.march, run.clock.dt)
    run.advance(2)
    ledger.note()
    for _ in range(parts):
        run.advance(steps // parts)
        ledger.note()
    return np.array([v[2] + v[3] for v in ledger.values])


def test_energy_is_constant_on_rough_terrain():
    # Summation by parts: constant to rounding; 1e-12 leaves room for the sum over 24,000 cells.
    energy = energies(rough_case(0, 35.0, closed=True, steps=2000), 2000)
    np.testing.assert_allclose(energy / energy[0], 1.0, rtol=0, atol=1e-12)


def test_energy_only_falls_with_attenuation_on_rough_terrain():
    energy = energies(rough_case(0, 35.0, loss=losses(), closed=True, steps=1200), 1200)
    assert (np.diff(energy) < 0.0).all()


@pytest.mark.slow
@pytest.mark.parametrize("seed", [0, 1, 2])
def test_fifty_thousand_steps_on_rough_terrain(seed):
    energy = energies(rough_case(seed, 35.0, closed=True, steps=50_000), 50_000)
    np.testing.assert_allclose(energy / energy[0], 1.0, rtol=0, atol=1e-10)


@pytest.mark.parametrize("order", [Order(3, 40), Order(8, 90), Order(5, 3000)])
def test_both_marching_orders_give_the_same_bits(order):
    """Terrain, attenuation, absorbing edges and receivers together, single precision."""
    runs = [rough_case(3, 25.0, loss=losses(), dtype=np.float32, order=o, threads=t, steps=30, cells=(150, 61)) for o, t in ((PLAIN, 1), (order, 2))]
    for run in runs:
        run.advance(30)
    for a, b in zip(runs[0].march.fields, runs[1].march.fields, strict=True):
        np.testing.assert_array_equal(a, b)
    np.testing.assert_array_equal(runs[0].traces, runs[1].traces)
    assert np.abs(runs[0].traces).max() > 0.0


def test_level_ground_under_the_mapping_equals_level_ground():
    """A terrain of 1 mm gives Lamb's record within what a flat surface gives."""
    assert max(tilted(0.001, 6.0, 3.0**0.5, (0.0, 1e5))) < 0.012
