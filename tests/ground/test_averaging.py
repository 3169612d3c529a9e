"""Effective properties of cells against closed forms worked out here from the moduli and the fractions."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.ground.averaging import effective
from groundroll.ground.model import build_ground

EXACT = dict(rtol=2e-13, atol=0.0)
UPPER = dict(vp=400.0, vs=150.0, density=1800.0, qp=40.0, qs=20.0)
LOWER = dict(vp=1400.0, vs=600.0, density=2100.0, qp=100.0, qs=50.0)


def layer(values, more=""):
    return "[[ground.layer]]\n" + more + "".join(f"{name} = {value}\n" for name, value in values.items())


def two_layers(depth):
    return layer(UPPER, f"thickness = {depth!r}\n") + layer(LOWER)


def moduli(values):
    """M, lambda, mu."""
    m, mu = values["density"] * values["vp"] ** 2, values["density"] * values["vs"] ** 2
    return m, m - 2.0 * mu, mu


def backus(share):
    """c11, c13, c33 of a fine layering of `share` UPPER in LOWER (Backus 1962, eq. 13, in his form with mu)."""
    parts = [(share, *moduli(UPPER)), (1.0 - share, *moduli(LOWER))]
    c33 = 1.0 / sum(f / m for f, m, _, _ in parts)
    coupling = sum(f * lam / m for f, m, lam, _ in parts)
    c11 = sum(f * 4.0 * mu * (lam + mu) / m for f, m, lam, mu in parts) + coupling**2 * c33
    return c11, coupling * c33, c33


def harmonic(share, upper, lower):
    return 1.0 / (share / upper + (1.0 - share) / lower)


def effective_loss(share, modulus_upper, modulus_lower, q):
    compliances = share / modulus_upper, (1.0 - share) / modulus_lower
    return (compliances[0] / UPPER[q] + compliances[1] / LOWER[q]) / sum(compliances)


EDGES = np.arange(0.0, 21.0)[:, None]


@pytest.mark.parametrize("position", np.append(np.linspace(7.0, 8.0, 11), 7.0 + np.sqrt(0.5)))
def test_an_interface_anywhere_in_a_cell(scenario_of, position):
    ground = build_ground(scenario_of(two_layers(float(position))), 1.0)
    share = position - 7.0
    (m1, _, mu1), (m2, _, mu2) = moduli(UPPER), moduli(LOWER)
    x = np.arange(5.0)
    density = effective(ground, x, 1.0, EDGES, "density")
    shear = effective(ground, x, 1.0, EDGES, "shear")
    stiffness = effective(ground, x, 1.0, EDGES, "stiffness")
    assert density.shape == shear.shear.shape == stiffness.c11.shape == (20, 1)
    assert_allclose(density[7], share * 1800.0 + (1.0 - share) * 2100.0, **EXACT)
    assert_allclose(shear.shear[7], harmonic(share, mu1, mu2), **EXACT)
    assert_allclose(shear.inverse_qs[7], effective_loss(share, mu1, mu2, "qs"), **EXACT)
    for found, closed in zip(stiffness[:3], backus(share)):
        assert_allclose(found[7], closed, **EXACT)
    assert_allclose(stiffness.inverse_qp[7], effective_loss(share, m1, m2, "qp"), **EXACT)
    assert_allclose(stiffness.inverse_qs[7], effective_loss(share, mu1, mu2, "qs"), **EXACT)
    assert_array_equal(density[:7], 1800.0)
    assert_array_equal(density[8:], 2100.0)


def test_a_periodic_stack(scenario_of):
    thick = [layer(UPPER, "thickness = 0.1\n") + layer(LOWER, "thickness = 0.3\n")] * 20
    ground = build_ground(scenario_of("".join(thick) + layer(LOWER)), 1.0)
    stiffness = effective(ground, np.zeros(1), 1.0, np.array([[0.0], [4.0], [8.0], [9.0]]), "stiffness")
    for found, closed in zip(stiffness[:3], backus(0.25)):
        assert_allclose(found[:2, 0], [closed, closed], rtol=1e-12, atol=0.0)


def beside(position):
    """LOWER, and UPPER to the right of an upright interface."""
    body = f'[[ground.body]]\nshape = "rectangle"\nx = [{position!r}, 240.0]\ndepth = [0.0, 60.0]\n'
    return layer(LOWER) + body + "".join(f"{name} = {value}\n" for name, value in UPPER.items())


# Four sub-columns stand at 1/8, 3/8, 5/8, 7/8 of the cell: an interface between two of them counts as half-way.
@pytest.mark.parametrize(("true_share", "share"), [(0.25, 0.25), (0.5, 0.5), (0.75, 0.75), (0.2, 0.25), (0.3, 0.25)])
def test_an_upright_interface_is_a_level_one_turned(scenario_of, true_share, share):
    ground = build_ground(scenario_of(beside(101.0 - true_share)), 1.0)
    stiffness = effective(ground, np.array([99.5, 100.5, 101.5]), 1.0, EDGES, "stiffness")
    c11, c13, c33 = backus(share)
    assert_allclose(stiffness.c11[:, 1], np.full(20, c33), **EXACT)
    assert_allclose(stiffness.c13[:, 1], np.full(20, c13), **EXACT)
    assert_allclose(stiffness.c33[:, 1], np.full(20, c11), **EXACT)
    shear = effective(ground, np.array([100.5]), 1.0, EDGES, "shear")
    assert_allclose(shear.shear[3], harmonic(share, moduli(UPPER)[2], moduli(LOWER)[2]), **EXACT)
    assert_allclose(shear.inverse_qs[3], effective_loss(share, moduli(UPPER)[2], moduli(LOWER)[2], "qs"), **EXACT)


def inclination_bias(scenario_of, contrast):
    """c11/c33 - 1 of a cell cut in two by an interface at 45 degrees, at which speeds jump by `contrast`."""
    upper = dict(vp=400.0, vs=150.0, density=1800.0)
    lower = dict(vp=400.0 * contrast, vs=150.0 * contrast, density=1800.0)
    line = "top_line = [[0.0, 0.0], [50.0, 50.0]]\n"
    ground = build_ground(scenario_of(layer(upper) + layer(lower, line)), 1.0)
    stiffness = effective(ground, np.array([10.5]), 1.0, np.array([[10.0], [11.0]]), "stiffness", samples=32)
    assert moduli(upper)[0] < stiffness.c33[0, 0] < moduli(lower)[0]
    return float(stiffness.c11[0, 0] / stiffness.c33[0, 0] - 1.0)


def test_an_inclined_interface_favours_no_direction(scenario_of):
    # Averaging down first and then across is right for level and for upright interfaces; between them the order
    # leaves a difference of second order in the contrast: (ln 1.2/ln 1.1)^2 = 3.66.
    small, larger = (inclination_bias(scenario_of, contrast) for contrast in (1.1, 1.2))
    assert abs(inclination_bias(scenario_of, 1.5)) < 0.03
    assert_allclose(larger / small, 3.66, rtol=0.05, atol=0.0)


def test_cells_of_one_material_are_isotropic_to_the_bit(scenario_of):
    lens = '[[ground.body]]\nshape = "lens"\ncentre = [120.0, 4.3]\nwidth = 4.0\nheight = 2.0\nvoid = true\n'
    wet = "[ground]\nwater_table = 12.7\nwater_vp = 1100.0\n"
    ground = build_ground(scenario_of(wet + two_layers(7.3) + lens), 1.0)
    stiffness = effective(ground, np.arange(0.0, 240.0), 1.0, EDGES, "stiffness")
    pure = np.ones((20, 240), dtype=bool)
    pure[7] = pure[3:6, 118:123] = False
    for found, upper, lower in zip(stiffness, _exact(UPPER), _exact(LOWER), strict=True):
        expected = np.where(np.arange(20) < 7, upper, lower)[:, None]
        assert_array_equal(found[pure], np.broadcast_to(expected, pure.shape)[pure])
    assert (stiffness.c11[pure] == stiffness.c33[pure]).all()


def _exact(values):
    m, lam, _ = moduli(values)
    return m, lam, m, 1.0 / values["qp"], 1.0 / values["qs"]


@pytest.mark.parametrize("number", range(1, 20))
def test_an_interface_on_an_edge_but_for_rounding(scenario_of, number):
    # 0.1 x 3 is 0.30000000000000004: which of the two is greater must not matter, nor to the cell beyond a void.
    edges = 0.1 * np.arange(21.0)[:, None]
    depth = float(f"{0.1 * number:.1f}")
    ground = build_ground(scenario_of(two_layers(depth)), 0.1)
    stiffness = effective(ground, np.zeros(1), 0.1, edges, "stiffness")
    for found, upper, lower in zip(stiffness, _exact(UPPER), _exact(LOWER), strict=True):
        assert_array_equal(found[:, 0], np.where(np.arange(20) < number, upper, lower))
    void = f'[[ground.body]]\nshape = "rectangle"\nx = [0.0, 9.0]\ndepth = [0.0, {depth!r}]\nvoid = true\n'
    shear = effective(build_ground(scenario_of(layer(LOWER) + void), 0.1), np.ones(1), 0.1, edges, "shear").shear
    assert_array_equal(shear[:, 0], np.where(np.arange(20) < number, 0.0, moduli(LOWER)[2]))


VOID = '[[ground.body]]\nshape = "rectangle"\nx = [100.5, 104.25]\ndepth = [2.5, 6.0]\nvoid = true\n'


def test_voids(scenario_of):
    ground = build_ground(scenario_of(two_layers(8.0) + VOID), 1.0)
    x = np.arange(99.0, 107.0) + 0.5
    density = effective(ground, x, 1.0, EDGES, "density")
    assert_array_equal(density[2, :7], [1800.0, 1350.0, 900.0, 900.0, 900.0, 1575.0, 1800.0])
    assert_array_equal(density[3, :7], [1800.0, 900.0, np.inf, np.inf, np.inf, 1350.0, 1800.0])
    shear = effective(ground, x, 1.0, EDGES, "shear")
    stiffness = effective(ground, x, 1.0, EDGES, "stiffness")
    # Half void or more; what is less has the stiffness of its ground.
    empty = np.zeros((20, 8), dtype=bool)
    empty[2:6, 2:5] = empty[3:6, 1] = True
    for modulus in (shear.shear, *stiffness[:3]):
        assert_array_equal(modulus == 0.0, empty)
    assert_allclose(shear.shear[:6][~empty[:6]], shear.shear[0, 0], rtol=1e-12, atol=0.0)
    for loss in (shear.inverse_qs, stiffness.inverse_qp, stiffness.inverse_qs):
        assert np.isfinite(loss).all()
    assert_allclose(stiffness.c11[~empty], stiffness.c33[~empty], rtol=1e-12, atol=0.0)


HILL = '[ground.terrain]\nshape = "hill"\ncentre = 120.0\nheight = 12.0\nhalf_width = 60.0\n'


def test_a_mesh_that_follows_the_terrain_sees_flat_layers(scenario_of):
    ground = build_ground(scenario_of(two_layers(7.3) + HILL), 1.0)
    flat = build_ground(scenario_of(two_layers(7.3)), 1.0)
    x = np.arange(20.0, 220.0)
    edges = EDGES - ground.surface_elevation(x)
    for kind in ("shear", "stiffness"):
        bent, level = effective(ground, x, 1.0, edges, kind), effective(flat, x, 1.0, EDGES, kind)
        for found, expected in zip(bent, level, strict=True):
            # Within a cell the surface departs from its chord by curvature/8 = 2 mm of 1 m; the cell's compliance
            # changes 17-fold across the interface.
            assert_allclose(found, np.broadcast_to(expected, found.shape), rtol=0.02, atol=0.0)
            assert_array_equal(found[:7], np.broadcast_to(expected[:7], found[:7].shape))


def test_only_ground_counts_at_the_surface(scenario_of):
    ground = build_ground(scenario_of(two_layers(0.25)), 1.0)
    edges = np.array([[-1.5], [-0.5], [0.5]])
    density = effective(ground, np.zeros(1), 1.0, edges, "density")
    assert_array_equal(density[:, 0], [1800.0, 1950.0])


def test_an_uneven_mesh_adds_up(scenario_of):
    ground = build_ground(scenario_of(two_layers(7.3)), 1.0)
    edges = np.array([0.0, 0.2, 3.0, 7.29, 7.31, 9.0, 20.0])[:, None]
    density = effective(ground, np.zeros(1), 1.0, edges, "density")
    mass = (density[:, 0] * np.diff(edges[:, 0])).sum()
    assert_allclose(mass, 7.3 * 1800.0 + 12.7 * 2100.0, rtol=1e-14, atol=0.0)


def test_the_size_of_chunks_changes_nothing(scenario_of, monkeypatch):
    ground = build_ground(scenario_of(two_layers(7.3) + HILL + VOID), 1.0)
    x = np.arange(80.0, 140.0)
    whole = effective(ground, x, 1.0, EDGES, "stiffness")
    monkeypatch.setattr("groundroll.ground.averaging.CHUNK_PIECES", 300)
    for a, b in zip(whole, effective(ground, x, 1.0, EDGES, "stiffness"), strict=True):
        assert_array_equal(a, b)
