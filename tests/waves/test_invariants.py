"""What must hold whatever the ground: symmetry, reciprocity, linearity, momentum and energy."""

from functools import partial

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.waves import absorbing, operators, placement, pulses
from groundroll.waves.assembly import Properties
from groundroll.waves.ledger import Ledger
from groundroll.waves.march import Order
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import PointSource

from .drive import FREE_BOX, FREE_TOP, FULL_SPACE, all_steps, interior, ricker, rough, uniform, unlayered

VP = 400.0
SHORT = ricker(60.0, 0.025)


def _mirrored(mesh, ground):
    """The ground seen in a mirror: nodes of column i go to nx-1-i, half points to nx-2-i."""
    last = mesh.nx - 1

    def node(a):
        return a[:, ::-1]

    def half(a):
        return a[:, np.r_[last - 1 : -1 : -1, last]]

    return Properties(half(ground.density_x), node(ground.density_z), node(ground.c11), node(ground.c13),
                      node(ground.c33), half(ground.shear))


@pytest.mark.parametrize(
    ("edges", "tolerance"),
    [(FREE_BOX, 1e-12), (("rigid", "rigid", "free", "absorb"), 1e-12), (FREE_TOP, 0.02 * absorbing.REFLECTION)],
)
def test_mirror(edges, tolerance):
    """Rounding between closed sides. Absorbing layers differ by half a column at their outer end, whose echo is
    REFLECTION by design; half a cell shifts its phase by a few hundredths (measured 0.008 of REFLECTION)."""
    mesh = even_mesh(1.0, 40.0, 26.0, edges, 12)
    ground = rough(mesh, VP)
    records = []
    for side, seen in ((1.0, ground), (-1.0, _mirrored(mesh, ground))):
        def put(x):
            return 20.0 + side * (x - 20.0)

        source = PointSource(put(13.3), 4.2, SHORT, force=(side * 1e5, 2e5), moment=(1e5, 2e5, side * 3e5))
        run = all_steps(mesh, seen, VP, [source], [(put(28.4), 0.0), (put(9.1), 17.2)], 120)
        run.advance(120)
        records.append(run.traces * (side, 1.0))
    assert_allclose(records[1], records[0], rtol=0, atol=tolerance * np.abs(records[0]).max())


def _without_norms(mesh, field, cells):
    return np.outer(cells.row_weight, cells.column_weight) / mesh.spacing**2


def _seen(edges, source, receiver, force, steps=150):
    mesh = even_mesh(1.0, 40.0, 26.0, edges, 8)
    run = all_steps(mesh, rough(mesh, VP), VP, [PointSource(*source, SHORT, force=force)], [receiver], steps)
    run.advance(steps)
    return run.traces[:, 0]


@pytest.mark.parametrize("edges", [FREE_BOX, FREE_TOP, FULL_SPACE, ("rigid", "free", "free", "absorb")])
@pytest.mark.parametrize(
    ("one", "two"),
    [((12.3, 9.4), (27.7, 14.2)), ((8.45, 0.7), (30.1, 2.3)), ((20.6, 1.9), (24.2, 0.4)), ((3.2, 3.3), (36.9, 22.8))],
)
def test_reciprocity(edges, one, two):
    """Betti: i of B due to a force along j at A = j of A due to i at B, in rough ground, between nodes; to rounding."""
    if edges[2] == "absorb":  # six points about a source must lie clear of the layer, where cells are stretched
        one, two = ((x, z + 3.0) if z < 3.0 else (x, z) for x, z in (one, two))
    for i in (0, 1):
        for j in (0, 1):
            there = _seen(edges, one, two, tuple(1e5 * np.eye(2)[j]))[:, i]
            back = _seen(edges, two, one, tuple(1e5 * np.eye(2)[i]))[:, j]
            assert_allclose(there, back, rtol=0, atol=1e-11 * max(np.abs(there).max(), 1e-3 * np.abs(back).max()))


def test_reciprocity_of_surface_points():
    """A horizontal force and vx on the surface itself are adjoint too."""
    there = _seen(FREE_TOP, (8.45, 0.0), (30.1, 0.0), (1e5, 0.0))[:, 0]
    back = _seen(FREE_TOP, (30.1, 0.0), (8.45, 0.0), (1e5, 0.0))[:, 0]
    assert_allclose(there, back, rtol=0, atol=1e-11 * np.abs(there).max())


def test_reciprocity_sees_the_norm(monkeypatch):
    """Mutation: sources near the surface not divided by their norms are no adjoints of the receivers."""
    monkeypatch.setattr(placement, "over_norm", _without_norms)
    there = _seen(FREE_TOP, (8.45, 0.7), (30.1, 7.3), (1e5, 0.0))[:, 0]
    back = _seen(FREE_TOP, (30.1, 7.3), (8.45, 0.7), (1e5, 0.0))[:, 0]
    assert np.abs(there - back).max() > 0.01 * np.abs(there).max()


@pytest.mark.parametrize("dtype", [np.float32, np.float64])
@pytest.mark.parametrize("edges", [FREE_TOP, FREE_BOX])
def test_silence_stays_silent(edges, dtype):
    mesh = even_mesh(1.0, 40.0, 26.0, edges, 8)
    quiet = PointSource(12.3, 0.0, lambda t: 0.0 * t, force=(1e5, 1e5), moment=(1e5, 1e5, 1e5))
    run = all_steps(mesh, rough(mesh, VP), VP, [quiet], [(20.0, 0.0)], 60, dtype)
    run.advance(60)
    for field in run.march.fields:
        assert_array_equal(field, 0.0)
    assert_array_equal(run.traces, 0.0)


def test_twice_the_source_is_twice_the_motion():
    """A factor of two is exact in binary: not a bit may differ. Two sources add up to rounding."""
    mesh = even_mesh(1.0, 40.0, 26.0, FREE_TOP, 8)

    def traces(*sources):
        run = all_steps(mesh, rough(mesh, VP), VP, list(sources), [(20.0, 0.0), (11.1, 7.7)], 100)
        run.advance(100)
        return run.traces

    one = PointSource(12.3, 0.0, SHORT, force=(1e5, 2e5))
    two = PointSource(12.3, 0.0, SHORT, force=(2e5, 4e5))
    other = PointSource(25.3, 8.8, SHORT, moment=(1e5, 2e5, 3e5))
    alone = traces(one)
    assert_array_equal(traces(two), 2.0 * alone)
    peak = np.abs(alone).max()
    assert_allclose(traces(one, other), alone + traces(other), rtol=0, atol=1e-12 * peak)


def _noisy_box(edges, vp, size, steps_at_once):
    mesh = unlayered(even_mesh(1.0, *size, edges, 0))
    run = all_steps(mesh, rough(mesh, vp), vp, [], [], 110_000, np.float64, Order(steps_at_once, 64))
    material, draw = run.march.ground.material, np.random.default_rng(3)
    for field, stiff in zip(interior(run), (material.bx, material.bz, material.c11, material.c33, material.mu), strict=True):
        loose = stiff.reshape(mesh.padded_rows, mesh.pitch)[
            run.march.ground.frame.origin // mesh.pitch :, run.march.ground.frame.margin :
        ][: mesh.nz, : mesh.nx] > 0.0
        field[:] = draw.normal(size=field.shape) * loose
    for stress in interior(run)[2:]:
        stress *= 1800.0 * vp
    return run


def _energies(run, rounds, steps):
    ledger = Ledger(run.mesh, run.march, run.clock.dt)
    run.advance(1)
    ledger.note()
    for _ in range(rounds):
        run.advance(steps)
        ledger.note()
    return np.array(ledger.values)[:, 2:].sum(axis=1)


@pytest.mark.parametrize(
    ("edges", "vp", "rounds"),
    [
        (FREE_BOX, 400.0, 10),
        (("rigid", "rigid", "free", "rigid"), 400.0, 1),
        (("rigid", "free", "free", "rigid"), 1000.0, 1),
        (FULL_SPACE, 400.0, 1),
    ],
)
def test_energy_is_constant_in_a_closed_box(edges, vp, rounds):
    """100,000 steps of rough ground filled with noise, free on all sides (10,000 for the other edges): 1e-10."""
    energy = _energies(_noisy_box(edges, vp, (20.0, 17.0), 16), rounds, 10_000)
    assert_allclose(energy, energy[0], rtol=1e-10, atol=0)


def test_energy_sees_a_wrong_closure(monkeypatch):
    """Mutation: one coefficient of one closed row a hundredth off, and the energy drifts or blows up."""
    run = _noisy_box(FREE_BOX, 400.0, (20.0, 17.0), 16)
    run.march.ground.rows.weight[2, 2] *= 1.01
    energy = _energies(run, 5, 200)
    assert not np.allclose(energy, energy[0], rtol=1e-6, atol=0)


@pytest.mark.parametrize("ratio", [1.7, 5.0])
def test_energy_never_grows_once_sources_are_silent(ratio):
    """Absorbing edges only take. A Gaussian of 60 Hz is 1e-9 of its peak 0.024 s after its middle; what comes back
    through the layers' bound from one step to the next stays under 1e-5 of the greatest energy."""
    vp = 200.0 * ratio
    mesh = even_mesh(1.0, 60.0, 40.0, FREE_TOP, 20)
    pulse = partial(pulses.gaussian, frequency=30.0, delay=0.05)
    source = PointSource(30.3, 0.0, pulse, force=(1e5, 2e5))
    run = all_steps(mesh, uniform(vp), vp, [source], [], 900)
    ledger = Ledger(mesh, run.march, run.clock.dt)
    while run.step < 900:
        run.advance(8)
        ledger.note()
    energy = np.array(ledger.values)[:, 2:].sum(axis=1)
    after = energy[np.array(ledger.steps) * run.clock.dt > 0.11]
    assert len(after) > 20
    assert np.diff(after).max() <= 1e-5 * energy.max()
    assert after[-1] < 1e-2 * after[0]


@pytest.mark.parametrize(("dtype", "tolerance"), [(np.float64, 1e-12), (np.float32, 1e-5)])
@pytest.mark.parametrize("place", [(30.3, 0.0), (28.7, 1.3), (30.3, 12.4)])
def test_momentum_is_the_impulse_of_the_forces(dtype, tolerance, place):
    """Sum of H rho v h² = sum of dt F s: exact in space until waves reach the sides (here free sides: always)."""
    mesh = even_mesh(1.0, 60.0, 40.0, FREE_BOX, 0)
    pulse = partial(pulses.gaussian, frequency=30.0, delay=0.05)
    source = PointSource(*place, pulse, force=(1e5, 2e5))
    run = all_steps(mesh, rough(mesh, VP), VP, [source], [], 160, dtype)
    ledger = Ledger(mesh, run.march, run.clock.dt)
    while run.step < 160:
        run.advance(8)
        ledger.note()
    found = np.array(ledger.values)[:, :2]
    impulse = run.impulse()[np.array(ledger.steps) - 1]
    assert_allclose(found, impulse, rtol=0, atol=tolerance * np.abs(impulse).max())


def test_momentum_until_the_edges_are_reached():
    """With absorbing sides the same holds while everything is still inside them (P needs 70 steps to the side)."""
    mesh = even_mesh(1.0, 80.0, 45.0, FREE_TOP, 10)
    source = PointSource(40.3, 2.2, partial(pulses.gaussian, frequency=60.0, delay=0.02), force=(1e5, 2e5))
    run = all_steps(mesh, uniform(VP), VP, [source], [], 40)
    ledger = Ledger(mesh, run.march, run.clock.dt)
    run.advance(40)
    ledger.note()
    impulse = run.impulse()[run.step - 1]
    assert_allclose(ledger.values[0][:2], impulse, rtol=0, atol=1e-9 * np.abs(impulse).max())


def test_momentum_sees_the_norm(monkeypatch):
    """Mutation: a source between surface rows divided by unit norms gives another impulse."""
    closed = operators.closure()
    monkeypatch.setattr(placement, "over_norm", _without_norms)
    mesh = even_mesh(1.0, 60.0, 40.0, FREE_BOX, 0)
    source = PointSource(30.3, 0.0, partial(pulses.gaussian, frequency=30.0, delay=0.05), force=(1e5, 0.0))
    run = all_steps(mesh, uniform(VP), VP, [source], [], 64)
    ledger = Ledger(mesh, run.march, run.clock.dt)
    run.advance(64)
    ledger.note()
    share = ledger.values[0][0] / run.impulse()[63, 0]
    assert_allclose(share, closed.node_norm[0], rtol=1e-9, atol=0)
