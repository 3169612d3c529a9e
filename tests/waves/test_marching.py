"""Every marching order gives the same bits: plain against strips, any width, any depth of pass, 1 to 3 threads."""

import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from numpy.testing import assert_array_equal

from groundroll.waves import assembly, march
from groundroll.waves.cell import ALIGNED
from groundroll.waves.march import PLAIN, Order, strip_bounds
from groundroll.waves.mesh import even_mesh
from groundroll.waves.simulation import PointSource

from .drive import FREE_BOX, FREE_TOP, FULL_SPACE, all_steps, ricker, rough

RIGID_BOX = ("rigid", "rigid", "free", "rigid")
MIXED = ("free", "absorb", "free", "rigid")
STEPS = 21
LEAST = 16  # nodes along a closed axis: two closures of six rows and what they read


def _run(edges, nx, nz, order, threads, dtype, layer=4, positions=(0.31, 0.5, 0.74)):
    """A short run whose sources and receivers stand across the whole width, so that strips cut through them."""
    length, depth = float(nx - 1), float(nz - 1)
    layer_x = sum(layer for e in edges[:2] if e == "absorb")
    layer_z = sum(layer for e in edges[2:] if e == "absorb")
    mesh = even_mesh(1.0, max(length - layer_x, 2.0), max(depth - layer_z, 2.0), edges, layer)
    wide, deep = mesh.nx - 1 - layer_x, mesh.nz - 1 - layer_z
    sources = [
        PointSource(p * wide, q * deep, ricker(80.0, 0.006), force=(1e5, 2e5), moment=(1e5, -2e5, 3e5))
        for p, q in zip(positions, (0.5, 0.0, 0.9), strict=True)
    ]
    points = [(p * wide, q * deep) for p in (0.0, *positions, 1.0) for q in (0.0, 0.4)]
    run = all_steps(mesh, rough(mesh, 400.0), 400.0, sources, points, STEPS, dtype, order, threads)
    run.advance(STEPS)
    run.close()
    return run


def _same_bits(edges, nx, nz, order, threads, dtype, **more):
    plain, fast = _run(edges, nx, nz, PLAIN, 1, dtype, **more), _run(edges, nx, nz, order, threads, dtype, **more)
    assert np.abs(plain.march.fields.vx).max() > 0.0
    for name, a, b in zip(plain.march.fields._fields, plain.march.fields, fast.march.fields, strict=True):
        assert_array_equal(a, b, err_msg=name)
    assert_array_equal(plain.traces, fast.traces)
    assert_array_equal(plain.march.ground.sides.psi, fast.march.ground.sides.psi)
    assert_array_equal(plain.march.ground.layers.psi, fast.march.ground.layers.psi)


@pytest.mark.parametrize("dtype", [np.float32, np.float64])
@pytest.mark.parametrize("edges", [FREE_TOP, FULL_SPACE, FREE_BOX, RIGID_BOX, MIXED])
@pytest.mark.parametrize(
    ("nx", "nz", "order", "threads"),
    [
        (140, 40, Order(1, 20), 1),
        (140, 41, Order(2, 25), 2),
        (141, 40, Order(3, 40), 3),
        (250, 37, Order(5, 70), 2),
        (200, 38, Order(8, 1000), 2),
        (700, 20, Order(2, 150), 2),
        (1100, 18, Order(4, 200), 2),
        (530, 18, Order(4, 100), 1),
        (60, 22, Order(4, 30), 2),
        (LEAST, 60, Order(8, 20), 3),
        (60, LEAST, Order(8, 20), 2),
        (LEAST, LEAST, Order(8, 8), 3),
        (17, 17, Order(16, 8), 1),
    ],
)
def test_plain_and_fast(edges, nx, nz, order, threads, dtype):
    _same_bits(edges, nx, nz, order, threads, dtype)


@settings(max_examples=60, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(
    edges=st.sampled_from([FREE_TOP, FULL_SPACE, FREE_BOX, MIXED]),
    nx=st.integers(LEAST, 130),
    nz=st.integers(LEAST, 45),
    steps=st.integers(1, 12),
    strip=st.integers(4, 140),
    threads=st.integers(1, 3),
    layer=st.integers(1, 6),
    positions=st.tuples(*[st.floats(0.02, 0.98)] * 3),
)
def test_any_mesh_and_any_order(edges, nx, nz, steps, strip, threads, layer, positions):
    _same_bits(edges, nx, nz, Order(steps, strip), threads, np.float32, layer=layer, positions=positions)


@pytest.mark.parametrize("stages", [2, 8, 16])
@pytest.mark.parametrize("threads", [1, 2, 3])
@pytest.mark.parametrize(("width", "strip"), [(17, 8), (40, 20), (333, 50), (1000, 768), (2000, 100)])
def test_strips_have_room_and_share_the_columns(width, strip, threads, stages):
    bounds, move = strip_bounds(width, strip, threads, stages, 3)
    assert bounds[0] == 0 and bounds[-1] == width
    if len(bounds) == 2:
        return
    assert move in (3, ALIGNED)
    last = bounds.copy()
    last[1:-1] -= move * (stages - 1)
    # Inside, a line stays between a bound and both ends of the mesh, and a strip is wider than its bounds move.
    assert last[1] >= ALIGNED and bounds[-2] <= width - ALIGNED
    assert (np.diff(bounds)[1:-1] > move * (stages - 1) + 3).all()
    mean = 0.5 * (np.diff(bounds) + np.diff(last))
    assert mean.max() - mean.min() <= 2 * ALIGNED


@pytest.mark.parametrize("what", ["reach", "lag"])
def test_too_short_a_reach_shows(monkeypatch, what):
    """Mutations: strips that give up two columns a stage, or bands that lag one too few, read what is overwritten."""
    if what == "reach":
        monkeypatch.setattr(march, "REACH", 2)
        with pytest.raises(AssertionError):
            _same_bits(FREE_TOP, 140, 40, Order(5, 40), 2, np.float64)
        return
    plain = _run(FREE_TOP, 140, 40, PLAIN, 1, np.float64)
    monkeypatch.setattr(assembly, "lag_of", lambda mesh: 1)
    fast = _run(FREE_TOP, 140, 40, Order(5, 40), 1, np.float64)
    assert not np.array_equal(plain.march.fields.vx, fast.march.fields.vx)
