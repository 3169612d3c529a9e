"""The rounded surface: against a direct convolution, its own numerical derivatives, and its ends."""

import numpy as np
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.ground.model import build_ground
from groundroll.ground.terrain import RoundedLine, bell, through_points

CORNERS = np.array([0.0, 20.0, 21.0, 60.0, 100.0])
HEIGHTS = np.array([1.0, 5.0, 4.0, 9.0, 2.0])


def test_rounding_is_a_convolution_with_a_quadratic_b_spline():
    line = RoundedLine(CORNERS, HEIGHTS, 3.0)
    step = 1e-3
    box = np.full(2000, 1.0)
    spline = np.convolve(np.convolve(box, box), box)
    spline /= spline.sum()
    x = np.arange(-20.0, 120.0, step)
    middle = len(spline) // 2
    direct = np.convolve(np.interp(x, CORNERS, HEIGHTS), spline)[middle : middle + len(x)]
    inside = slice(5000, -5000)
    # The boxes of 2 m are sampled at 1 mm: the centre is uncertain by half a sample, times the slope of 1.
    assert_allclose(line.value(x)[inside], direct[inside], rtol=0.0, atol=1.5 * step)


def test_slope_is_the_derivative_and_curvature_is_smooth():
    surface = through_points(CORNERS, HEIGHTS, 100.0, 2.5)
    x, d = np.linspace(0.5, 99.5, 4001), 1e-4
    numerical = (surface.elevation(x + d) - surface.elevation(x - d)) / (2 * d)
    # Third derivatives are about jump/radius^2 < 1, so the difference quotient errs by d^2/6; rounding by 1e-15/d.
    assert_allclose(surface.slope(x), numerical, rtol=0.0, atol=2e-9)
    fine = np.linspace(0.0, 100.0, 200001)
    curvature = np.gradient(surface.slope(fine), fine)
    jump = 1.13 / 2.5  # greatest slope jump 1.2, over the radius: scale of the curvature
    assert np.abs(np.diff(curvature)).max() < 2e-3 * jump


def test_level_outside_the_section():
    surface = through_points(CORNERS, HEIGHTS, 100.0, 2.5)
    outside = np.array([-50.0, -1e-9, 0.0, 100.0, 100.0 + 1e-9, 300.0])
    assert_array_equal(surface.slope(outside), np.zeros(6))
    assert_array_equal(surface.elevation(outside[:3]), np.full(3, surface.elevation(np.zeros(1))[0]))
    assert_allclose(surface.elevation(outside[3:]), surface.elevation(np.array([100.0]))[0], rtol=0.0, atol=1e-14)
    assert (surface.slope(np.array([0.5, 99.5])) != 0.0).all()


def test_straight_parts_stay_where_they_are():
    surface = through_points(CORNERS, HEIGHTS, 100.0, 2.5)
    x = np.linspace(24.0, 57.0, 50)
    assert_allclose(surface.elevation(x), np.interp(x, CORNERS, HEIGHTS), rtol=0.0, atol=1e-14)


def test_many_points_within_the_radius():
    x = np.linspace(0.0, 100.0, 1001)
    surface = through_points(x, 3.0 * np.sin(x / 10.0), 100.0, 1.0)
    at = np.linspace(3.0, 97.0, 333)
    # A B-spline of half width r has variance r^2/9 for degree 2 (three boxes of 2r/3): sin(kx) is damped by
    # sinc(k r/3 pi)^3, closed form.
    damped = 3.0 * np.sin(at / 10.0) * (np.sin(1.0 / 30.0) * 30.0) ** 3
    assert_allclose(surface.elevation(at), damped, rtol=0.0, atol=3.0 * 0.01**2 / 8 + 1e-6)


def test_bell_is_the_formula_of_the_scenario():
    surface = bell(50.0, 6.0, 30.0, 100.0, 2.0)
    x = np.linspace(0.0, 100.0, 301)
    formula = np.where(np.abs(x - 50.0) < 30.0, 3.0 * (1.0 + np.cos(np.pi * (x - 50.0) / 30.0)), 0.0)
    assert_allclose(surface.elevation(x), formula, rtol=0.0, atol=1e-13)
    d = 1e-5
    numerical = (surface.elevation(x + d) - surface.elevation(x - d)) / (2 * d)
    assert_allclose(surface.slope(x), numerical, rtol=0.0, atol=3e-6)


def test_bell_cut_by_the_end_of_the_section_is_made_level():
    surface = bell(10.0, 6.0, 30.0, 100.0, 2.0)
    assert_array_equal(surface.slope(np.array([-30.0, -5.0, 0.0, 40.0, 100.0, 120.0])), np.zeros(6))
    x, d = np.linspace(0.1, 99.9, 401), 1e-5
    numerical = (surface.elevation(x + d) - surface.elevation(x - d)) / (2 * d)
    assert_allclose(surface.slope(x), numerical, rtol=0.0, atol=3e-6)


def test_from_the_scenario(scenario_of, layers, tmp_path):
    points = "[ground.terrain]\npoints = [[0.0, 0.0], [120.0, 6.0], [240.0, 0.0]]\n"
    (tmp_path / "terrain.csv").write_text("# surveyed\nx,elevation\n0,0\n120,6\n240,0\n")
    x = np.linspace(-10.0, 250.0, 99)
    given = build_ground(scenario_of(layers + points), 0.5)
    read = build_ground(scenario_of(layers + '[ground.terrain]\nfile = "terrain.csv"\n'), 0.5)
    assert_array_equal(given.surface_elevation(x), read.surface_elevation(x))
    assert_allclose(given.surface_slope(np.array([60.0, 180.0])), [0.05, -0.05], rtol=0.0, atol=1e-15)
    # The mean distance from a kink under the B-spline, 13/48 of the radius 2 m, times half the slope jump.
    top = given.surface_elevation(np.array([120.0]))
    assert_allclose(top, 6.0 - 0.05 * 2.0 * 13.0 / 48.0, rtol=0.0, atol=1e-12)
    valley = '[ground.terrain]\nshape = "valley"\ncentre = 100.0\nheight = 5.0\nhalf_width = 40.0\n'
    assert_allclose(build_ground(scenario_of(layers + valley), 0.5).surface_elevation(np.array([100.0])), -5.0, rtol=1e-14, atol=0.0)
