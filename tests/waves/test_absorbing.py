"""Absorbing edges against sections so large that nothing comes back from theirs; and that they stay quiet for ever."""

from dataclasses import dataclass, replace

import numpy as np
import pytest

from groundroll.waves import absorbing
from groundroll.waves.assembly import EdgeDamping, Properties
from groundroll.waves.ledger import Ledger
from groundroll.waves.march import Order
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import Clock, PointSource, Simulation

from .drive import COURANT, DENSITY, FREE_TOP, FREQUENCY, LAYER, VS, all_steps, interior, ricker, spacing

PPW, WIDE, DEEP = 6, 60, 40
# Receivers (column, row) beside the edges and in the middle of the small section.
POINTS = [(4, 0), (40, 0), (56, 0), (4, 20), (56, 20), (30, 36), (4, 36), (56, 36)]
SURFACE = PointSource(20.3, 0.0, None, force=(0.0, 1e5))
DEEP_INSIDE = PointSource(20.3, 15.2, None, force=(7e4, 1e5))


@dataclass(frozen=True)
class Ground:
    """Layers (first row, vs, Vp/Vs), from the top."""

    layers: tuple

    def fastest(self):
        return max(vs * ratio for _, vs, ratio in self.layers)

    def properties(self, mesh):
        row = np.arange(mesh.nz)
        vs, vp = np.empty(mesh.nz), np.empty(mesh.nz)
        for start, speed, ratio in self.layers:
            vs[row >= start], vp[row >= start] = speed, speed * ratio
        p, s = DENSITY * vp[:, None] ** 2, DENSITY * vs[:, None] ** 2
        one = np.full((1, 1), DENSITY)
        return Properties(one, one, p, p - 2.0 * s, p, s)


def _half_space(ratio):
    return Ground(((0, VS, ratio),))


LAYERED = Ground(((0, VS, 2.0), (8, 300.0, 3.0), (22, 450.0, 2.0)))


def _traces(ground, source, duration, offset, recipe, dtype=np.float32):
    """Raw traces (step, receiver, 2) of the small section, laid `offset` columns into one that is as much larger."""
    h, vp = spacing(PPW), ground.fastest()
    mesh = even_mesh(h, (WIDE + 2 * offset) * h, (DEEP + offset) * h, FREE_TOP, recipe.cells)
    dt = COURANT * h / vp
    time = Clock(dt, int(duration / dt), duration, 60.0)
    placed = PointSource((offset + source.x) * h, source.depth * h, ricker(), source.force, source.moment)
    points = [((offset + column) * h, row * h) for column, row in POINTS]
    damping = EdgeDamping(vp, np.pi * FREQUENCY, recipe)
    run = Simulation(mesh, ground.properties(mesh), damping, time, [placed], points, dtype, Order(8, 512), 1)
    run.advance(time.steps)
    return run.traces


def _reflected(ground, source, recipe=absorbing.UNIFORM, duration=0.85):
    """Greatest difference over the record's peak, per receiver.

    A P wave needs longer than `duration` to the large section's edge and back.
    """
    h = spacing(PPW)
    offset = int(0.5 * duration * ground.fastest() / h) + 10
    large, small = _traces(ground, source, duration, offset, recipe), _traces(ground, source, duration, 0, recipe)
    return np.abs(small - large).max(axis=(0, 2)) / np.abs(large).max(axis=(0, 2))


@pytest.mark.parametrize(
    ("ratio", "source", "allowed"),
    [
        (np.sqrt(3.0), SURFACE, 0.005),
        (np.sqrt(3.0), DEEP_INSIDE, 0.001),
        (3.0, SURFACE, 0.005),
        (3.0, DEEP_INSIDE, 0.001),
        (6.0, SURFACE, 0.005),
        (6.0, DEEP_INSIDE, 0.001),
    ],
)
def test_half_space(ratio, source, allowed):
    """0.1 % of the peak of body waves, 0.5 % of Rayleigh waves, 20 cells at 6 ppw; measured 0.004 to 0.022 % and 0.008
    to 0.024 %, more the higher Vp/Vs."""
    assert _reflected(_half_space(ratio), source).max() <= allowed


@pytest.mark.parametrize("source", [SURFACE, DEEP_INSIDE])
def test_layered_ground(source):
    """Layers run into the side layers; the softest and the stiffest share one damping. Asked 0.5 % with 20 cells; the layers
    that stay stable where waves are guided need 48. Measured 0.33 % (surface)."""
    assert _reflected(LAYERED, source, absorbing.GUIDING).max() <= 0.005


# (thickness m, vp, vs): soft over stiff, saturated, an inversion. Vp/Vs from 1.25 to 10.
GUIDING_GROUND = {
    "saturated over rock": [(8.0, 1500.0, 200.0), (None, 2400.0, 1000.0)],
    "saturated profile": [(2.0, 400.0, 150.0), (8.0, 1500.0, 150.0), (None, 1800.0, 450.0)],
    "inversion": [(4.0, 600.0, 300.0), (5.0, 400.0, 180.0), (None, 1000.0, 500.0)],
    "soft over rock": [(8.0, 320.0, 160.0), (None, 2000.0, 1000.0)],
}


def _energies(layers, steps, parts=12, recipe=absorbing.GUIDING):
    """Energy of a section of 60 by 24 m `parts` times in `steps` steps from velocity at random, the grid's own
    wavelengths among it."""
    h = min(vs for _, _, vs in layers) / 24.0 / 7.0
    mesh = even_mesh(h, 60.0, 24.0, FREE_TOP, recipe.cells)
    tops = np.cumsum([0.0] + [thickness for thickness, *_ in layers[:-1]])
    rows = tuple((int(top / h), vs, vp / vs) for top, (_, vp, vs) in zip(tops, layers, strict=True))
    ground = Ground(rows)
    vp = ground.fastest()
    dt = COURANT * h / vp
    damping = EdgeDamping(vp, np.pi * FREQUENCY, recipe)
    run = Simulation(mesh, ground.properties(mesh), damping, Clock(dt, steps + 1, steps * dt, 60.0), [], [], np.float64, Order(8, 512), 1)
    draw = np.random.default_rng(0)
    for field in interior(run)[:2]:
        field[:] = 1e-3 * draw.normal(size=field.shape)
    ledger = Ledger(mesh, run.march, dt)
    for _ in range(parts):
        run.advance(steps // parts)
        ledger.note()
    return np.array([v[2] + v[3] for v in ledger.values])


def _falls(energy):
    return bool((energy[1:] <= 1.001 * np.minimum.accumulate(energy)[:-1]).all())


@pytest.mark.parametrize("name", GUIDING_GROUND)
def test_guided_waves_do_not_grow(name):
    """Waves guided by layers can run backward in phase; a layer that damps along one axis alone feeds them. Measured: with
    the recipe for uniform ground 1e3 to 1e7 times the least after 8,000 steps."""
    assert _falls(_energies(GUIDING_GROUND[name], 6_000))


@pytest.mark.slow
@pytest.mark.parametrize("name", GUIDING_GROUND)
def test_guided_waves_do_not_grow_for_long(name):
    assert _falls(_energies(GUIDING_GROUND[name], 200_000, 50))


def test_guided_waves_grow_in_layers_meant_for_uniform_ground():
    """Mutation: with the other recipe they do grow."""
    assert not _falls(_energies(GUIDING_GROUND["saturated over rock"], 6_000, recipe=absorbing.UNIFORM))


def test_too_weak_a_layer_reflects(monkeypatch):
    """Mutations: without damping, and with a tenth of its exponent, the edges reflect."""
    whole = absorbing.recursion

    def weak(u, thickness, damping, dt):
        return whole(u, thickness, replace(damping, speed=0.1 * damping.speed), dt)

    def none(u, thickness, damping, dt):
        return whole(u, thickness, replace(damping, speed=0.0), dt)

    for spoilt in (none, weak):
        monkeypatch.setattr(absorbing, "recursion", spoilt)
        assert _reflected(_half_space(np.sqrt(3.0)), DEEP_INSIDE).max() > 0.02


def _speeds(ratio, steps, rounds=10):
    """Greatest velocity anywhere at the end of each of `rounds` equal parts of a run, over the greatest at its start.

    The start is a push of velocity over a few cells at the surface, the grid's own wavelengths among it.
    """
    h, vp = spacing(PPW), VS * ratio
    mesh = even_mesh(h, 24 * h, 14 * h, FREE_TOP, LAYER)
    run = all_steps(mesh, _half_space(ratio).properties(mesh), vp, [], [], steps, np.float32, Order(16, 512))
    vx, vz, *_ = interior(run)
    rows, columns = np.arange(mesh.nz)[:, None], np.arange(mesh.nx)
    vx[:] = np.exp(-((columns - 30.0) ** 2) / 4.0 - rows**2 / 9.0)
    vz[:] = 2.0 * np.exp(-((columns - 33.0) ** 2) / 2.0 - (rows - 2.0) ** 2 / 4.0)
    found = []
    for _ in range(rounds):
        run.advance(steps // rounds)
        found.append(max(np.abs(vx).max(), np.abs(vz).max()))
    return np.array(found) / 2.0


def _stays_quiet(ratio, steps):
    """Bounded from the first part on and lower in the second half than in the first. Waves of two or three cells have
    next to no group velocity, so the last thousandth of such a push takes long to leave: measured 1e-3 of the start
    after 10,000 steps, 1e-5 to 3e-4 after 100,000."""
    speeds = _speeds(ratio, steps)
    assert speeds.max() < 0.02
    assert speeds[5:].max() < speeds[:5].max()
    assert speeds[-1] < 1e-3
    return speeds


@pytest.mark.parametrize("ratio", [1.5, 5.0])
def test_long_after(ratio):
    _stays_quiet(ratio, 30_000)


@pytest.mark.slow
@pytest.mark.parametrize("ratio", [1.5, np.sqrt(3.0), 2.5, 4.0, 6.0, 8.0])
def test_very_long_after(ratio):
    _stays_quiet(ratio, 200_000)


def test_long_after_sees_a_layer_that_feeds(monkeypatch):
    """Mutation: with the damping's sign turned the layer feeds the waves."""
    whole = absorbing.recursion

    def feeding(*given):
        b, a, *others = whole(*given)
        return b, -a, *others

    monkeypatch.setattr(absorbing, "recursion", feeding)
    with np.errstate(all="ignore"):
        speeds = _speeds(2.0, 2_000)
    assert not speeds.max() < 0.02
