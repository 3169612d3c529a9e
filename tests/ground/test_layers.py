"""What lies where: layers, gradients, lines, terrain, water table, edges of the section, extremes, interfaces."""

import numpy as np
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.ground.model import build_ground

HILL = '[ground.terrain]\nshape = "hill"\ncentre = 120.0\nheight = 6.0\nhalf_width = 60.0\n'
LEVEL = '[ground]\ndepth_from = "datum"\n'
SOFT = (8.0, 400.0, 150.0, 1800.0, 40.0, 20.0)
HARD = (np.inf, 1400.0, 600.0, 2100.0, np.inf, np.inf)


def test_flat_layers(scenario_of):
    ground = build_ground(scenario_of(), 0.5)
    assert ground.laterally_uniform
    assert ground.layers_under(10.0) == [SOFT, HARD]
    assert_array_equal(ground.surface_elevation(np.array([0.0, 5.0])), [0.0, 0.0])
    assert_array_equal(ground.surface_slope(np.array([0.0, 5.0])), [0.0, 0.0])
    assert (ground.slowest_shear, ground.fastest_shear, ground.slowest_p, ground.fastest_p) == (150.0, 600.0, 400.0, 1400.0)
    assert_array_equal(ground.slowest_wave_below(np.array([-1.0, 0.0, 7.4, 8.0, 30.0, 90.0])), [150, 150, 150, 600, 600, 600])
    ((x, z),) = ground.interfaces()
    assert_array_equal((x, z), ([0.0, 240.0], [8.0, 8.0]))


def test_layers_that_follow_the_terrain(scenario_of, layers):
    ground = build_ground(scenario_of(layers + HILL), 0.5)
    assert not ground.laterally_uniform
    assert_allclose(ground.pieces(120.0).top, [-6.0, 2.0], rtol=0.0, atol=1e-12)
    assert_allclose(ground.layers_under(100.0)[0], SOFT, rtol=1e-12, atol=0.0)
    ((x, z),) = ground.interfaces()
    assert_allclose(z, 8.0 - ground.surface_elevation(x), rtol=0.0, atol=1e-12)


def test_level_layers_are_cut_by_the_surface(scenario_of, layers):
    hill = build_ground(scenario_of(LEVEL + layers + HILL), 0.5)
    assert_allclose(hill.pieces(120.0).top, [-6.0, 8.0], rtol=0.0, atol=1e-12)
    deep = HILL.replace("hill", "valley").replace("6.0", "9.0")
    valley = build_ground(scenario_of(LEVEL + layers + deep), 0.5)
    assert valley.layers_under(120.0) == [HARD]
    assert valley.layers_under(0.0) == [SOFT, HARD]


GRADIENT = """
[[ground.layer]]
thickness = 4.0
vp = 400.0
vs = 150.0
density = 1800.0
vp_bottom = 800.0
density_bottom = 1900.0
[[ground.layer]]
vp = 1400.0
vs = 600.0
density = 2100.0
"""


def test_gradient(scenario_of):
    pieces = build_ground(scenario_of(GRADIENT), 0.5).pieces(0.0)
    assert np.diff(pieces.top).max() <= 0.125 + 1e-12
    middle = pieces.top[:-1] + 0.5 * np.diff(pieces.top)
    assert_allclose(pieces.vp[:-1], 400.0 + 100.0 * middle, rtol=1e-13, atol=0.0)
    assert_allclose(pieces.density[:-1], 1800.0 + 25.0 * middle, rtol=1e-13, atol=0.0)
    assert_array_equal(pieces.vs, [150.0] * 32 + [600.0])
    assert pieces.top[-1] == 4.0


LINED = """
[[ground.layer]]
thickness = 5.0
vp = 400.0
vs = 150.0
density = 1800.0
[[ground.layer]]
vp = 800.0
vs = 300.0
density = 1900.0
[[ground.layer]]
top_line = [[40.0, 0.0], [80.0, 20.0], [160.0, 10.0]]
vp = 1400.0
vs = 600.0
density = 2100.0
"""


def test_a_lower_layer_cuts_those_above(scenario_of):
    ground = build_ground(scenario_of(LINED), 0.5)
    assert [row[:2] for row in ground.layers_under(10.0)] == [(np.inf, 1400.0)]
    assert [row[:2] for row in ground.layers_under(48.0)] == [(4.0, 400.0), (np.inf, 1400.0)]
    assert [row[:2] for row in ground.layers_under(80.0)] == [(5.0, 400.0), (15.0, 800.0), (np.inf, 1400.0)]
    assert [row[:2] for row in ground.layers_under(120.0)] == [(5.0, 400.0), (10.0, 800.0), (np.inf, 1400.0)]
    assert [row[:2] for row in ground.layers_under(239.0)] == [(5.0, 400.0), (5.0, 800.0), (np.inf, 1400.0)]


def test_a_smooth_line_goes_through_its_points_without_overshoot(scenario_of):
    text = LINED.replace("top_line = [[40.0, 0.0]", "top_smooth = true\ntop_line = [[40.0, 6.0]")
    ground = build_ground(scenario_of(text), 0.5)
    depths = np.array([ground.pieces(x).top[-1] for x in (10.0, 40.0, 80.0, 160.0, 200.0)])
    assert_allclose(depths, [6.0, 6.0, 20.0, 10.0, 10.0], rtol=0.0, atol=1e-12)
    x = np.arange(30.0, 170.0, 0.05)
    line = ground.base.tops(x)[:, 2]
    assert line.min() >= 6.0 and line.max() <= 20.0
    slope = np.diff(line) / 0.05
    # A straight polyline has a jump of 0.35 at each of its ends; a smooth one none beyond step x curvature.
    assert np.abs(np.diff(slope)).max() < 0.005


def test_water_table(scenario_of, layers):
    wet = "[ground]\nwater_table = 4.0\nwater_vp = 1500.0\n"
    ground = build_ground(scenario_of(wet + layers), 0.5)
    assert [row[:3] for row in ground.layers_under(0.0)] == [(4.0, 400.0, 150.0), (4.0, 1500.0, 150.0), (np.inf, 1500.0, 600.0)]
    assert ground.laterally_uniform and ground.fastest_p == 1500.0
    dry = build_ground(scenario_of("[ground]\nwater_table = 4.0\n" + layers), 0.5)
    assert dry.layers_under(0.0) == [SOFT, HARD]
    assert sorted(float(z[0]) for _, z in dry.interfaces()) == [4.0, 8.0]


def test_beyond_the_section_the_ground_goes_on_as_at_its_edge(scenario_of):
    ground = build_ground(scenario_of(LINED, length=100.0, depth=18.0), 0.5)
    columns = ground.columns(np.array([-20.0, 0.0, 90.0, 100.0, 130.0]))
    assert_array_equal(columns.top[0], columns.top[1])
    assert_array_equal(columns.top[4], columns.top[3])
    assert_array_equal(columns.top[3, 1:], [5.0, 17.5])
    # The line is at 18.75 m at x = 90: below the section, so it is not computed with, but it is still told.
    assert columns.top[2, -1] == np.inf
    assert_allclose(ground.pieces(90.0).top, [0.0, 5.0, 18.75], rtol=1e-14, atol=0.0)


def test_extremes_see_a_thin_body_between_the_profiles(scenario_of, layers):
    body = '[[ground.body]]\nshape = "rectangle"\nx = [10.1, 10.2]\ndepth = [1.0, 2.0]\nvp = 200.0\nvs = 60.0\ndensity = 1500.0\n'
    ground = build_ground(scenario_of(layers + body), 1.0)
    assert (ground.slowest_shear, ground.slowest_p) == (60.0, 200.0)
    assert_array_equal(ground.slowest_wave_below(np.array([1.9, 2.0, 9.0])), [60.0, 150.0, 600.0])
    void = build_ground(scenario_of(layers + body.split("vp")[0] + "void = true\n"), 1.0)
    assert (void.slowest_shear, void.slowest_p) == (150.0, 400.0)
