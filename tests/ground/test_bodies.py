"""Bodies: areas that the mesh sees against the formulas of geometry, and their order."""

import math

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.ground.averaging import effective
from groundroll.ground.model import build_ground

BASE = "[[ground.layer]]\nvp = 800.0\nvs = 300.0\ndensity = 2000.0\n"
FILL = "vp = 700.0\nvs = 250.0\ndensity = 1000.0\n"


def body(form, fill=FILL):
    return "[[ground.body]]\n" + form + fill


LENS = 'shape = "lens"\ncentre = [20.3, 8.1]\nwidth = 9.0\nheight = 5.0\n'
TRIANGLE = 'shape = "polygon"\npoints = [[12.2, 3.0], [31.7, 4.5], [18.0, 14.0]]\n'
# A letter U: its arms stand apart, so a vertical line may cross it once or, through the notch, the foot alone.
LETTER = 'shape = "polygon"\npoints = [[10.0, 3.0], [14.0, 3.0], [14.0, 9.0], [20.0, 9.0], [20.0, 3.0], [24.0, 3.0], [24.0, 13.0], [10.0, 13.0]]\n'
SIDEWAYS = 'shape = "polygon"\npoints = [[10.0, 2.0], [20.0, 2.0], [20.0, 5.0], [13.0, 5.0], [13.0, 9.0], [20.0, 9.0], [20.0, 12.0], [10.0, 12.0]]\n'
RECTANGLE = 'shape = "rectangle"\nx = [11.0, 15.5]\ndepth = [2.25, 6.5]\n'

AREAS = {
    LENS: math.pi / 4.0 * 9.0 * 5.0,
    TRIANGLE: 0.5 * abs((31.7 - 12.2) * (14.0 - 3.0) - (18.0 - 12.2) * (4.5 - 3.0)),
    LETTER: 14.0 * 10.0 - 6.0 * 6.0,
    SIDEWAYS: 10.0 * 10.0 - 7.0 * 4.0,
    RECTANGLE: 4.5 * 4.25,
}


@pytest.mark.parametrize("form", AREAS, ids=["lens", "triangle", "letter", "sideways", "rectangle"])
def test_area(scenario_of, form):
    ground = build_ground(scenario_of(BASE + body(form), length=40.0, depth=20.0), 0.5)
    x = 0.25 + 0.5 * np.arange(80)
    density = effective(ground, x, 0.5, np.arange(0.0, 20.1, 0.5)[:, None], "density")
    area = ((2000.0 - density) / 1000.0).sum() * 0.25
    # Exact down each sub-column; across, the midpoint rule of step 0.125 m at the ends of an ellipse or triangle.
    assert_allclose(area, AREAS[form], rtol=1e-3, atol=0.0)


def test_a_line_may_cross_a_body_twice(scenario_of):
    ground = build_ground(scenario_of(BASE + body(SIDEWAYS), length=40.0, depth=20.0), 0.5)
    pieces = ground.pieces(16.0)
    assert_array_equal(pieces.top, [0.0, 2.0, 5.0, 9.0, 12.0])
    assert_array_equal(pieces.density, [2000.0, 1000.0, 2000.0, 1000.0, 2000.0])


def test_a_line_through_a_corner(scenario_of):
    triangle = build_ground(scenario_of(BASE + body(TRIANGLE), length=40.0, depth=20.0), 0.5)
    assert_allclose(triangle.pieces(18.0).top, [0.0, 3.0 + 1.5 * 5.8 / 19.5, 14.0], rtol=1e-12, atol=0.0)
    letter = build_ground(scenario_of(BASE + body(LETTER), length=40.0, depth=20.0), 0.5)
    tops = [letter.pieces(x).top[1:].tolist() for x in (10.0, 14.0, 20.0, 24.0)]
    assert tops == [[3.0, 13.0], [9.0, 13.0], [3.0, 13.0], []]


def test_later_bodies_lie_over_earlier_ones(scenario_of):
    trench = body('shape = "rectangle"\nx = [12.0, 13.0]\ndepth = [0.0, 4.0]\n', "void = true\n")
    ground = build_ground(scenario_of(BASE + body(RECTANGLE) + trench, length=40.0, depth=20.0), 0.5)
    assert_array_equal(ground.pieces(12.5).density, [0.0, 1000.0, 2000.0])
    assert_array_equal(ground.pieces(12.5).top, [0.0, 4.0, 6.5])
    assert_array_equal(ground.pieces(11.5).top, [0.0, 2.25, 6.5])
    below = build_ground(scenario_of(BASE + trench + body(RECTANGLE), length=40.0, depth=20.0), 0.5)
    assert_array_equal(below.pieces(12.5).density, [0.0, 1000.0, 2000.0])
    assert_array_equal(below.pieces(12.5).top, [0.0, 2.25, 6.5])


def test_bodies_follow_the_terrain_or_lie_level(scenario_of):
    hill = '[ground.terrain]\nshape = "hill"\ncentre = 13.0\nheight = 2.0\nhalf_width = 10.0\n'
    follows = build_ground(scenario_of(BASE + body(RECTANGLE) + hill, length=40.0, depth=20.0), 0.5)
    assert_allclose(follows.pieces(13.0).top, [-2.0, 0.25, 4.5], rtol=0.0, atol=1e-12)
    level = build_ground(scenario_of('[ground]\ndepth_from = "datum"\n' + BASE + body(RECTANGLE) + hill, length=40.0, depth=20.0), 0.5)
    assert_allclose(level.pieces(13.0).top, [-2.0, 2.25, 6.5], rtol=0.0, atol=1e-12)


def test_outlines(scenario_of):
    ground = build_ground(scenario_of(BASE + body(LENS) + body(RECTANGLE), length=40.0, depth=20.0), 0.5)
    (lens_x, lens_z), (x, z) = ground.interfaces()
    assert_allclose(((lens_x - 20.3) / 4.5) ** 2 + ((lens_z - 8.1) / 2.5) ** 2, np.ones(len(lens_x)), rtol=1e-12, atol=0.0)
    assert (x.min(), x.max(), z.min(), z.max()) == (11.0, 15.5, 2.25, 6.5)
    assert (x[0], z[0]) == (x[-1], z[-1])
