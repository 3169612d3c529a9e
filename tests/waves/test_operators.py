"""Summation by parts, exactness on polynomials and conservation of the one-dimensional operators."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from groundroll.waves.cell import HALF_MOMENTUM, HALF_STRAIN, NODE_MOMENTUM, NODE_STRAIN
from groundroll.waves.operators import CLOSED_HALVES, CLOSED_NODES, TAPS, closure, edge_operators, line

N = 30
EDGES = ["free", "rigid", "absorb"]
# Sums of at most 8 products of order 1.
ROUNDING = 2e-14


def _matrix(table, operator):
    """(N, N) matrix of one operator; points outside the mesh read zeros."""
    matrix = np.zeros((N, N))
    for row in range(N):
        for tap in range(TAPS):
            column = table.first[operator, row] + tap
            if 0 <= column < N:
                matrix[row, column] += table.weight[operator, row, tap]
    return matrix


def _all(near, far):
    table = line(N, near, far)
    return table, [_matrix(table, o) for o in (NODE_STRAIN, HALF_STRAIN, NODE_MOMENTUM, HALF_MOMENTUM)]


@pytest.mark.parametrize("far", EDGES)
@pytest.mark.parametrize("near", EDGES)
def test_momentum_is_the_negative_adjoint_of_strain(near, far):
    """<v, H A s> + <D v, H s> = 0 with s = 0 on a free edge's node, v = 0 on a rigid edge's node."""
    table, (dn, dh, an, ah) = _all(near, far)
    ha, hb = table.node_norm[:, None], table.half_norm[:, None]
    # velocity at halves, stress at nodes: traction is held at zero on free nodes
    normal = hb * ah + (ha * dn).T
    # velocity at nodes, stress at halves: velocity is held at zero on rigid nodes
    shear = ha * an + (hb * dh).T
    for end, edge in ((0, near), (-1, far)):
        if edge == "free":
            normal[:, end] = 0.0
        if edge == "rigid":
            shear[end] = 0.0
    if far != "absorb":
        normal[-1], shear[:, -1] = 0.0, 0.0
    assert_allclose(normal, 0.0, rtol=0, atol=ROUNDING)
    assert_allclose(shear, 0.0, rtol=0, atol=ROUNDING)


def test_a_sloped_edge_needs_no_held_traction():
    """Under terrain the traction is free, not held: the identity holds with the edge's own node too."""
    table, (dn, dh, an, ah) = _all("sloped", "absorb")
    ha, hb = table.node_norm[:, None], table.half_norm[:, None]
    assert_allclose(hb * ah + (ha * dn).T, 0.0, rtol=0, atol=ROUNDING)
    assert_allclose(ha * an + (hb * dh).T, 0.0, rtol=0, atol=ROUNDING)


def test_interior_alone_breaks_the_identity():
    """Mutation: with unit norms at a free edge the sum does not vanish."""
    table, (dn, *_, ah) = _all("free", "absorb")
    broken = ah + dn.T
    assert np.abs(broken[:, 1:]).max() > 0.01


@pytest.mark.parametrize("far", ["free", "absorb"])
@pytest.mark.parametrize("near", ["free", "rigid"])
def test_polynomials(near, far):
    """Strain operators: degree 2 at a free closure; degree 6 in the interior (Taylor; scaled coordinate, order 1)."""
    _, (dn, dh, _, _) = _all(near, far)
    node, half = np.arange(N) / N, (np.arange(N) + 0.5) / N
    ends = slice(None, None if far == "free" else -4)
    strain_near = 0 if near == "free" else CLOSED_NODES
    for degree in range(7):
        slope_node, slope_half = degree * node ** max(degree - 1, 0), degree * half ** max(degree - 1, 0)
        found_node, found_half = N * dn @ half**degree, N * dh @ node**degree
        rows = slice(strain_near, ends.stop) if degree <= 2 else slice(CLOSED_NODES, N - CLOSED_NODES - 1)
        assert_allclose(found_node[rows], slope_node[rows], rtol=0, atol=1e-12)
        rows = slice(0, -1 if far == "free" else -4) if degree <= 2 else slice(CLOSED_HALVES, N - CLOSED_NODES - 1)
        assert_allclose(found_half[rows], slope_half[rows], rtol=0, atol=1e-12)


def test_momentum_operators_on_polynomials():
    """At a free edge An is exact for fields that vanish there, and Ah = Dh; at a sloped one Ah as An."""
    _, (_, _, an, ah) = _all("free", "free")
    node, half = np.arange(N) / N, (np.arange(N) + 0.5) / N
    vanish_half, vanish_node = half * (half - (N - 1) / N), node**2
    assert_allclose((N * an @ vanish_half)[:], 2 * node - (N - 1) / N, rtol=0, atol=1e-12)
    assert_allclose((N * ah @ vanish_node)[:-1], 2 * half[:-1], rtol=0, atol=1e-12)


def test_degree_three_is_not_exact_at_the_closure():
    """The closure is second order there: a test that passed at degree 3 would not be looking at it."""
    _, (dn, *_) = _all("free", "absorb")
    half, node = (np.arange(N) + 0.5) / N, np.arange(N) / N
    assert np.abs((N * dn @ half**3 - 3 * node**2)[:CLOSED_NODES]).max() > 1e-6


@pytest.mark.parametrize("far", ["free", "rigid"])
@pytest.mark.parametrize("near", ["free", "rigid"])
def test_stress_gives_no_net_momentum(near, far):
    """Column sums of HA An vanish between free ends: shear stress gives no net momentum along x."""
    table, (_, _, an, _) = _all(near, far)
    sums = table.node_norm @ an
    low = 0 if near == "free" else TAPS
    high = N - 1 if far == "free" else N - 1 - TAPS
    assert_allclose(sums[low:high], 0.0, rtol=0, atol=ROUNDING)


def test_trace_is_exact_to_degree_two():
    half = np.arange(4) + 0.5
    for degree in range(3):
        assert_allclose(closure().trace @ half**degree, float(degree == 0), rtol=0, atol=ROUNDING)


def test_norms_integrate():
    """Both norms integrate degree 1 over the first rows exactly (the order of the closure less one)."""
    table = line(N, "free", "free")
    length = N - 1.0
    node, half = np.arange(N), np.arange(N) + 0.5
    for degree in range(2):
        exact = length ** (degree + 1) / (degree + 1)
        assert_allclose(table.node_norm @ node**degree, exact, rtol=1e-13, atol=0)
        assert_allclose(table.half_norm @ half**degree, exact, rtol=1e-13, atol=0)


def test_far_end_mirrors_the_near_end():
    _, near = _all("free", "free")
    for operator, half in zip(near, (0, 1, 0, 1), strict=True):
        rows = N - half
        columns = N - (1 - half)
        block = operator[:rows, :columns]
        assert_allclose(block, -block[::-1, ::-1], rtol=0, atol=0)


def test_an_unknown_edge_is_refused():
    with pytest.raises(ValueError, match="^soft$"):
        edge_operators("soft")
