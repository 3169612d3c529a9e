import math

from numpy.testing import assert_allclose

from groundroll.ground.model import build_ground
from groundroll.ground.site import vs30


def stack(*rows):
    return [(thickness, 2.0 * vs, vs, 1800.0, math.inf, math.inf) for thickness, vs in rows]


def test_vs30():
    # 30/sum(h/Vs), computed twice by hand formula.
    assert_allclose(vs30(stack((4.0, 150.0), (8.0, 250.0), (math.inf, 400.0))), 289.389068, rtol=1e-8, atol=0.0)
    assert_allclose(vs30(stack((5.0, 180.0), (10.0, 300.0), (15.0, 600.0), (math.inf, 9.0))), 348.387097, rtol=1e-8, atol=0.0)


def test_vs30_over_a_void():
    assert vs30(stack((4.0, 150.0), (2.0, 0.0), (math.inf, 400.0))) == 0.0


QUENNET = """
[[ground.layer]]
thickness = 16.0
vp = 1500.0
vs = 150.0
density = 1650.0
[[ground.layer]]
vp = 1800.0
vs = 420.0
density = 2050.0
[[ground.layer]]
top_line = [[300.0, 0.0], [360.0, 40.0], [1040.0, 40.0], [1100.0, 0.0]]
vp = 2600.0
vs = 1100.0
density = 2350.0
"""


def test_vs30_across_a_basin(scenario_of):
    ground = build_ground(scenario_of(QUENNET, length=1600.0, depth=300.0), 2.0)
    # By hand: 30/(16/150 + 14/420); at x = 330 the rock begins at 20 m; beside the basin it is all there is.
    by_hand = [214.285714, 30.0 / (16.0 / 150.0 + 4.0 / 420.0 + 10.0 / 1100.0), 1100.0]
    assert_allclose([vs30(ground.layers_under(x)) for x in (700.0, 330.0, 100.0)], by_hand, rtol=1e-8, atol=0.0)
