"""Relations against the figures of their papers and against their formulas written out."""

import numpy as np
import pytest

from groundroll.errors import InputError
from groundroll.ground.model import build_ground
from groundroll.ground.relations import RELATIONS

# Density: computed from the published polynomials. Speeds: coefficients from memory, written out by hand below.
FIGURES = [
    ("density", "brocher_2005", 1500.0, 1635.074),
    ("density", "brocher_2005", 3000.0, 2223.858),
    ("density", "gardner_1974", 2000.0, 2069.220),
    ("vs", "brocher_2005", 2000.0, 1000.0 * (0.7858 - 2.4688 + 3.1796 - 0.9904 + 0.1024)),
    ("vp", "brocher_2005", 1000.0, 1000.0 * (0.9409 + 2.0947 - 0.8206 + 0.2683 - 0.0251)),
    ("vp", "castagna_1985", 500.0, 1940.0),
]


@pytest.mark.parametrize(("quantity", "name", "speed", "value"), FIGURES)
def test_figures(quantity, name, speed, value):
    np.testing.assert_allclose(RELATIONS[quantity, name](speed), value, rtol=0.0, atol=6e-4)


def test_brocher_speeds_undo_each_other():
    # Brocher 2005: eq. 9 is a fit to the inverse of eq. 6; over 2 to 7 km/s they agree within 3 per cent.
    vp = np.linspace(2000.0, 7000.0, 11)
    there_and_back = RELATIONS["vp", "brocher_2005"](RELATIONS["vs", "brocher_2005"](vp))
    np.testing.assert_allclose(there_and_back, vp, rtol=0.03, atol=0.0)


FILLED = """
[ground.fill_missing]
density = "brocher_2005"
vp = "castagna_1985"
vs = "brocher_2005"
[[ground.layer]]
thickness = 10.0
vs = 500.0
[[ground.layer]]
vp = 3000.0
"""


def test_layers_are_filled(scenario_of):
    upper, lower = build_ground(scenario_of(FILLED), 1.0).layers_under(0.0)
    vs = 1000.0 * (0.7858 - 1.2344 * 3 + 0.7949 * 9 - 0.1238 * 27 + 0.0064 * 81)
    np.testing.assert_allclose(upper[1:3], (1940.0, 500.0), rtol=1e-12, atol=0.0)
    np.testing.assert_allclose(lower[1:4], (3000.0, vs, 2223.858), rtol=1e-6, atol=0.0)


def test_gradient_is_filled_at_each_depth(scenario_of):
    ground = build_ground(scenario_of(FILLED.replace("vs = 500.0", "vp = 1500.0\nvp_bottom = 3000.0")), 1.0)
    pieces = ground.pieces(0.0)
    density = RELATIONS["density", "brocher_2005"](pieces.vp)
    np.testing.assert_array_equal(pieces.density, density)
    assert len(np.unique(pieces.density)) == 41


def message(scenario):
    with pytest.raises(InputError) as caught:
        build_ground(scenario, 1.0)
    return str(caught.value)


def test_out_of_range(scenario_of):
    slow = FILLED.replace("vs = 500.0", "vp = 400.0\nvs = 150.0")
    assert message(scenario_of(slow)) == (
        "ground.layer[1].density: left out, and brocher_2005 does not reach that far (received vp = 400 m/s); "
        "allowed vp from 1500 to 8500 m/s; give density there"
    )
    body = '\n[[ground.body]]\nshape = "rectangle"\nx = [1.0, 2.0]\ndepth = [0.0, 1.0]\nvp = 1200.0\ndensity = 2000.0\n'
    assert message(scenario_of(FILLED + body)) == (
        "ground.body[1].vs: left out, and brocher_2005 does not reach that far (received vp = 1200 m/s); "
        "allowed vp from 1500 to 8000 m/s; give vs there"
    )
