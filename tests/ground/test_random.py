"""Random ground: its statistics against the correlation functions, and that it depends on the scenario alone."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.errors import InputError
from groundroll.ground.averaging import effective
from groundroll.ground.model import build_ground
from groundroll.ground.random_field import correlation, points_per_length, standard_field
from groundroll.scenario import RandomGround

BASE = "[[ground.layer]]\nthickness = 30.0\nvp = 800.0\nvs = 300.0\ndensity = 2000.0\n[[ground.layer]]\nvp = 1600.0\nvs = 700.0\ndensity = 2200.0\n"
CHANGE = '[ground.random]\nkind = "von_karman"\nhurst = 0.3\nstandard_deviation = 0.05\nlength_x = 20.0\nlength_z = 4.0\nseed = 7\n'


def random(kind, seed=1, hurst=None, length_x=4.0, length_z=2.0):
    return RandomGround(kind=kind, standard_deviation=0.1, length_x=length_x, length_z=length_z, hurst=hurst, seed=seed)


CLOSED = {
    # exp(-r^2), exp(-r), and von Karman at H = 1/2, where r^(1/2) K_(1/2)(r) is exp(-r) too.
    "gaussian": (random("gaussian"), lambda r: np.exp(-(r**2))),
    "exponential": (random("exponential"), lambda r: np.exp(-r)),
    "von_karman": (random("von_karman", hurst=0.5), lambda r: np.exp(-r)),
}


@pytest.mark.parametrize("kind", CLOSED)
def test_variance_and_correlation(kind):
    form, closed = CLOSED[kind]
    fields = [standard_field(form.model_copy(update={"seed": seed}), 400.0, 0.0, 100.0) for seed in range(4)]
    values = np.stack([field.values for field in fields])
    step_x, step_z = fields[0].x[1], fields[0].depth[1]
    # 4 fields of 100 x 50 correlation areas of about 2 pi: some 3000 independent values, so variances are known
    # to sqrt(2/3000) = 2.6 % and correlations to about 2 %; three times that.
    assert abs(values.mean()) < 3.0 / np.sqrt(3000.0)
    assert_allclose(values.var(), 1.0, rtol=0.0, atol=0.08)
    for lag in (0.25, 0.5, 1.0, 2.0):
        i, k = round(lag * 4.0 / step_x), round(lag * 2.0 / step_z)
        assert_allclose((values[:, :, i:] * values[:, :, :-i]).mean(), closed(lag), rtol=0.0, atol=0.07)
        assert_allclose((values[:, k:] * values[:, :-k]).mean(), closed(lag), rtol=0.0, atol=0.07)


@pytest.mark.parametrize("place", [(0.5, 0.5), (0.5, 0.0), (0.0, 0.5), (0.2, 0.7)])
def test_the_variance_is_the_same_between_the_points(place):
    form = random("von_karman", hurst=0.3)
    fields = [standard_field(form.model_copy(update={"seed": seed}), 400.0, 0.0, 100.0) for seed in range(4)]
    ratios = []
    for field in fields:
        x, depth = (axis[:-1] + share * axis[1] for axis, share in zip((field.x, field.depth), place))
        between = field.at(x, np.broadcast_to(depth, (len(x), len(depth))))
        ratios.append(between.var() / field.values.var())
    # Without the division the first would be 0.855 (measured); neighbours share most of their sampling error.
    assert_allclose(np.mean(ratios), 1.0, rtol=0.0, atol=0.01)


def test_von_karman_correlation():
    # H = 1/3 from Airy functions (Abramowitz & Stegun 10.4.14): K_(1/3)(s) = pi sqrt(3/x) Ai(x), s = 2/3 x^(3/2).
    from scipy.special import airy, gamma

    r = np.array([0.1, 0.5, 1.0, 3.0])
    x = (1.5 * r) ** (2.0 / 3.0)
    closed = 2.0 ** (2.0 / 3.0) / gamma(1.0 / 3.0) * r ** (1.0 / 3.0) * np.pi * np.sqrt(3.0 / x) * airy(x)[0]
    assert_allclose(correlation(random("von_karman", hurst=1.0 / 3.0), r), closed, rtol=1e-12, atol=0.0)
    assert_array_equal(correlation(random("von_karman", hurst=0.3), np.zeros(1)), np.ones(1))


def test_the_same_seed_gives_the_same_bits():
    first = standard_field(random("exponential"), 80.0, 0.0, 20.0).values.copy()
    standard_field.cache_clear()
    assert_array_equal(standard_field(random("exponential"), 80.0, 0.0, 20.0).values, first)
    other = standard_field(random("exponential", seed=2), 80.0, 0.0, 20.0).values
    assert np.abs(np.corrcoef(first.ravel(), other.ravel())[0, 1]) < 0.2


def test_every_mesh_sees_the_same_field(scenario_of):
    scenario = scenario_of(BASE + CHANGE)
    coarse, fine = build_ground(scenario, 0.8), build_ground(scenario, 0.1)
    assert_array_equal(coarse.random.field.values, fine.random.field.values)
    x = np.array([3.0, 77.7, 200.0])
    field = coarse.random.field
    for ground in (coarse, fine):
        columns = ground.given_columns(x)
        bottom = columns.bottom
        piece = (columns.top > 1.0) & (bottom < 29.0) & (bottom > columns.top)
        assert (bottom - columns.top)[piece].max() <= 0.5 * ground.spacing + 1e-12
        factor = 1.0 + 0.05 * field.at(x, columns.middle())
        assert_allclose(columns.vs[piece], 300.0 * factor[piece], rtol=1e-12, atol=0.0)
        assert_allclose(columns.vp[piece], 800.0 * factor[piece], rtol=1e-12, atol=0.0)
        assert_array_equal(columns.density[piece], 2000.0)


def test_the_mesh_keeps_the_deviation(scenario_of):
    ground = build_ground(scenario_of(BASE + CHANGE.replace("20.0", "4.0"), length=400.0), 0.5)
    shear = effective(ground, np.arange(0.0, 400.0, 0.5), 0.5, np.arange(0.0, 30.1, 0.5)[:, None], "shear").shear
    speed = np.sqrt(shear / 2000.0)
    # Cells of an eighth of the length: for H = 0.3 their mean has some 80 % of the variance (1 - C(1/16) to
    # C(1/8) of it is lost within a cell, C(1/16) = 0.79), so 0.04 to 0.05.
    assert 0.040 < speed.std() / 300.0 < 0.050
    assert_allclose(speed.mean(), 300.0, rtol=0.01, atol=0.0)


def test_only_between_the_given_depths(scenario_of):
    ground = build_ground(scenario_of(BASE + CHANGE + "depth = [5.0, 12.3]\n"), 0.5)
    pieces = ground.pieces(50.0)
    changed = (pieces.top >= 5.0) & (pieces.top < 12.3)
    assert_array_equal(np.unique(pieces.vs[~changed]), [300.0, 700.0])
    assert (pieces.vs[changed] != 300.0).all() and changed.sum() == 30
    uniform = BASE.split("[[ground.layer]]")[2]
    last = build_ground(scenario_of("[[ground.layer]]" + uniform + CHANGE + "depth = [5.0, 12.3]\n"), 0.5).pieces(50.0)
    assert (last.vs[0], last.vs[-1], last.top[-1]) == (700.0, 700.0, 12.3)


def test_speeds_stay_positive(scenario_of):
    wild = CHANGE.replace("0.05", "0.5")
    ground = build_ground(scenario_of(BASE + wild), 0.5)
    assert ground.slowest_shear == 0.25 * 300.0


def test_the_field_follows_the_terrain_to_its_top(scenario_of):
    hill = '[ground.terrain]\nshape = "hill"\ncentre = 120.0\nheight = 12.0\nhalf_width = 60.0\n'
    for datum, top, bottom in (("", 0.0, 72.0), ('[ground]\ndepth_from = "datum"\n', -12.0, 60.0)):
        field = build_ground(scenario_of(datum + BASE + CHANGE + hill), 0.5).random.field
        assert field.depth[0] == top and field.depth[-1] >= bottom


def test_too_fine_a_field(scenario_of):
    with pytest.raises(InputError) as caught:
        build_ground(scenario_of(BASE + CHANGE.replace("20.0", "0.02").replace("4.0", "0.02")), 0.5)
    assert str(caught.value) == (
        "ground.random: correlation lengths too short for so large a section (received length_x = 0.02 m, "
        "length_z = 0.02 m); allowed 16777216 points at 4 per length in each direction; "
        "write length_x = 0.14 and length_z = 0.14, or a smaller section"
    )
    assert points_per_length((240.0, 60.0), (0.14, 0.14)) > 4.0
