"""Profiles, gridded sections and terrain from files, and the whole text of what is said about bad ones."""

import h5py
import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from groundroll.errors import InputError
from groundroll.ground.averaging import effective
from groundroll.ground.model import build_ground

PROFILE = '[ground]\nprofile = "profile.csv"\n'
GRID = '[ground]\ngrid = "grid.csv"\n'
HDF5 = '[ground]\ngrid = "grid.h5"\n'
FILLED = '[ground.fill_missing]\ndensity = "brocher_2005"\nvs = "brocher_2005"\n'

BOREHOLE = """depth,vp,vs,density,qp,qs
0,400,150,1800,40,10
4,400,250,1900,40,20
4,1600,300,2000,100,50
10,1600,300,2000,100,50
"""


def test_profile(scenario_of, tmp_path):
    (tmp_path / "profile.csv").write_text(BOREHOLE)
    ground = build_ground(scenario_of(PROFILE), 0.5)
    pieces = ground.pieces(0.0)
    upper = pieces.top < 4.0
    middle = pieces.top[upper] + 0.0625
    assert_allclose(pieces.vs[upper], 150.0 + 25.0 * middle, rtol=1e-13, atol=0.0)
    assert_allclose(pieces.density[upper], 1800.0 + 25.0 * middle, rtol=1e-13, atol=0.0)
    assert_allclose(1.0 / pieces.qs[upper], 0.1 - 0.0125 * middle, rtol=1e-13, atol=0.0)
    assert_array_equal(pieces.top[~upper], [4.0])
    assert ground.layers_under(3.0)[-1] == (np.inf, 1600.0, 300.0, 2000.0, 100.0, 50.0)
    assert ground.laterally_uniform
    ((_, z),) = ground.interfaces()
    assert_array_equal(z, [4.0, 4.0])


def test_profile_without_header_in_any_dress(scenario_of, tmp_path):
    (tmp_path / "profile.csv").write_bytes("\ufeff# a comment\r\n1 ; 400; 150; 1800\r\n\r\n3; 500; 200; 1900\r\n".encode())
    pieces = build_ground(scenario_of(PROFILE), 8.0).pieces(0.0)
    assert_array_equal(pieces.top, [0.0, 1.0, 3.0])
    assert_array_equal(pieces.vs, [150.0, 175.0, 200.0])
    assert_array_equal(pieces.qs, [np.inf] * 3)


def test_profile_filled_in(scenario_of, tmp_path):
    (tmp_path / "profile.csv").write_text("depth,vp\n0,1500\n10,3000\n")
    last = build_ground(scenario_of(PROFILE + FILLED), 0.5).layers_under(0.0)[-1]
    # checks: Brocher's density at 3 km/s; his vs from the polynomial written out.
    assert_allclose(last[2:4], (1412.5, 2223.858), rtol=1e-6, atol=0.0)


X, DEPTH = np.array([0.0, 100.0, 240.0]), np.array([0.0, 10.0, 30.0, 60.0])


def plane(x, depth):
    return 300.0 + x + 2.0 * depth


def write_hdf5(path, **arrays):
    with h5py.File(path, "w") as file:
        for name, values in arrays.items():
            file[name] = values


def whole_grid():
    vs = plane(X, DEPTH[:, None])
    return dict(x=X, depth=DEPTH, vp=3.0 * vs, vs=vs, density=np.full(vs.shape, 2000.0), qs=vs / 10.0)


def grid_lines(grid):
    names = ["x", "depth", "vp", "vs", "density", "qs"]
    rows = [(x, d, *(grid[n][k, i] for n in names[2:])) for i, x in enumerate(grid["x"]) for k, d in enumerate(grid["depth"])]
    return "\n".join([",".join(names), *(",".join(map(repr, map(float, row))) for row in rows)])


def test_grid(scenario_of, tmp_path):
    grid = whole_grid()
    write_hdf5(tmp_path / "grid.h5", **grid)
    (tmp_path / "grid.csv").write_text(grid_lines(grid))
    ground, same = (build_ground(scenario_of(text), 1.0) for text in (HDF5, GRID))
    assert not ground.laterally_uniform
    x = np.array([0.0, 30.0, 170.0, 240.0])
    columns = ground.given_columns(x)
    assert_array_equal(columns.vs, same.given_columns(x).vs)
    inner = slice(2, 121)
    depth = columns.middle()[:, inner]
    assert_allclose(np.diff(columns.top[0, 1:122]), np.full(120, 0.5), rtol=1e-12, atol=0.0)
    # A plane is what bilinear interpolation keeps exactly.
    assert_allclose(columns.vs[:, inner], plane(x[:, None], depth), rtol=1e-13, atol=0.0)
    assert_allclose(columns.vp[:, inner], 3.0 * plane(x[:, None], depth), rtol=1e-13, atol=0.0)
    assert_array_equal(columns.qp, np.full(columns.qp.shape, np.inf))
    # Quality goes by its inverse: from 1/30 at 0 m to 1/32 at 10 m, here in the middle of the first half metre.
    assert_allclose(1.0 / columns.qs[0, :2], [1.0 / 30.0, 0.975 / 30.0 + 0.025 / 32.0], rtol=1e-12, atol=0.0)
    beyond = ground.columns(np.array([-50.0, 300.0]))
    assert_array_equal(beyond.vs, ground.columns(np.array([0.0, 240.0])).vs)


def test_grid_deeper_than_its_last_row(scenario_of, tmp_path):
    grid = whole_grid()
    write_hdf5(tmp_path / "grid.h5", **grid)
    ground = build_ground(scenario_of(HDF5, depth=100.0), 1.0)
    edges = np.array([[70.0], [90.0]])
    shear = effective(ground, np.array([100.0]), 1e-6, edges, "shear")
    assert_allclose(shear.shear, [[2000.0 * 520.0**2]], rtol=1e-6, atol=0.0)
    assert_allclose(shear.inverse_qs, [[1.0 / 52.0]], rtol=1e-6, atol=0.0)


def message(scenario, tmp_path):
    with pytest.raises(InputError) as caught:
        build_ground(scenario, 1.0)
    return str(caught.value).replace(str(tmp_path) + "/", "")


COLUMNS = "depth,vp,vs,density,qp,qs"
BAD_PROFILES = {
    BOREHOLE.replace("4,400,250", "4,400,abc"): (
        "profile.csv:3: vs: not a finite number (received abc); allowed a number in SI units, no unit written; correct it"
    ),
    BOREHOLE.replace("4,400,250,", "4,400,,"): (
        "profile.csv:3: vs: not a finite number (received nothing); allowed a number in SI units, no unit written; correct it"
    ),
    BOREHOLE.replace("4,400,250", "4,400,nan"): (
        "profile.csv:3: vs: not a finite number (received nan); allowed a number in SI units, no unit written; correct it"
    ),
    BOREHOLE.replace(",1900,40,20", ",1900"): (
        f"profile.csv:3: line: not 6 values (received 4,400,250,1900); allowed {COLUMNS}; write one value per column"
    ),
    BOREHOLE.replace("vs,density", "v_s,density"): (
        "profile.csv:1: header: not a known column (received v_s); allowed depth, vp, vs, density, qp, qs; rename or remove it"
    ),
    BOREHOLE.replace("qp,qs", "qs,qs"): (
        "profile.csv:1: header: two columns of one name (received qs); allowed depth, vp, vs, density, qp, qs; "
        "rename or remove one of them"
    ),
    "depth,vp,vs\n0,400,150\n": (
        f"profile.csv:1: density: a column is missing (received depth,vp,vs); allowed {COLUMNS}; add a column density"
    ),
    "\n0,400,150\n": (
        f"profile.csv:2: density: a column is missing (received depth,vp,vs); allowed {COLUMNS}; add a column density"
    ),
    "depth,vp,vs,density\n": ("profile.csv: rows: too few lines of numbers (received 0); allowed 1 or more; add lines"),
    BOREHOLE.replace("0,400,150", "0,0.4,150"): (
        "profile.csv:2: vp: metres per second? this looks like km/s (received 0.4); allowed 50 to 10000 m/s; write 400.0"
    ),
    BOREHOLE.replace("1800", "18000"): (
        "profile.csv:2: density: too large (received 18000); allowed 20 to 10000 kg/m3; correct it"
    ),
    BOREHOLE.replace("0,400,150", "0,400,390"): (
        "profile.csv:2: vp: the bulk modulus would not be positive: vp must exceed 1.1547 times vs = 390 m/s "
        "(received 400); allowed above 450.333 m/s; write 675.0 (1.73 times vs)"
    ),
    BOREHOLE.replace("10,1600", "3,1600"): (
        "profile.csv:5: depth: depth decreases (received 3); allowed 4 m or more, the depth of the line before; "
        "put the lines in order of depth"
    ),
    BOREHOLE.replace("10,1600", "4,1600"): (
        "profile.csv:5: depth: the third line of this depth (received 4); allowed a depth twice at most, for a jump; "
        "remove one of them"
    ),
}


@pytest.mark.parametrize("text", BAD_PROFILES)
def test_bad_profile(scenario_of, tmp_path, text):
    (tmp_path / "profile.csv").write_text(text)
    assert message(scenario_of(PROFILE), tmp_path) == BAD_PROFILES[text]


def test_profile_that_cannot_be_read(scenario_of, tmp_path):
    what = f"allowed a CSV file of columns {COLUMNS}"
    path = tmp_path / "profile.csv"
    assert message(scenario_of(PROFILE), tmp_path) == f"profile.csv: no such file; {what}; correct its name in the scenario"
    path.write_bytes(b"depth\xff")
    assert message(scenario_of(PROFILE), tmp_path) == f"profile.csv: not UTF-8 text; {what}; save it as CSV in UTF-8"
    path.unlink()
    path.mkdir()
    assert message(scenario_of(PROFILE), tmp_path) == f"profile.csv: a folder; {what}; name the file in it"


def test_profile_outside_a_relation(scenario_of, tmp_path):
    (tmp_path / "profile.csv").write_text("depth,vp\n0,400\n")
    assert message(scenario_of(PROFILE + FILLED), tmp_path) == (
        "profile.csv: vs: left out, and brocher_2005 does not reach that far (received vp = 400 m/s); "
        "allowed vp from 1500 to 8000 m/s; give vs there"
    )


def test_bad_terrain(scenario_of, layers, tmp_path):
    scenario = scenario_of(layers + '[ground.terrain]\nfile = "terrain.csv"\n')
    (tmp_path / "terrain.csv").write_text("0,0\n10,1\n10,2\n")
    assert message(scenario, tmp_path) == (
        "terrain.csv:3: x: x does not increase (received 10); allowed above 10 m, that of the line before; "
        "put the lines in order of x, each x once"
    )
    (tmp_path / "terrain.csv").write_text("0,0\n10,-61.5\n")
    assert message(scenario, tmp_path) == (
        "terrain.csv:2: elevation: the ground surface would lie below the section (received -61.5); "
        "allowed above -60 m (section.depth); make section.depth greater"
    )
    (tmp_path / "terrain.csv").write_text("x,elevation\n0,0\n")
    assert message(scenario, tmp_path) == "terrain.csv: rows: too few lines of numbers (received 1); allowed 2 or more; add lines"


def test_bad_grid_csv(scenario_of, tmp_path):
    lines = grid_lines(whole_grid()).splitlines()
    path = tmp_path / "grid.csv"
    path.write_text("\n".join(lines[:6] + lines[7:]))
    assert message(scenario_of(GRID), tmp_path) == (
        "grid.csv: grid: no line at x = 100 m, depth = 10 m (received 11 points for 3 x and 4 depths); "
        "allowed every x with every depth; add that line"
    )
    path.write_text("\n".join([*lines, lines[6]]))
    assert message(scenario_of(GRID), tmp_path) == (
        "grid.csv:14: depth: x = 100 m has this depth twice (received 10); allowed each point once; remove one of the two lines"
    )


def without(name):
    return lambda grid: grid.pop(name)


def changed(name, at, value):
    def change(grid):
        grid[name] = grid[name].copy()
        grid[name][at] = value

    return change


def replaced(name, value):
    return lambda grid: grid.update({name: value(grid[name])})


BAD_GRIDS = [
    (without("x"), "grid.h5: x: missing (received nothing); allowed one or more increasing numbers in m; add a dataset x"),
    (
        changed("x", 2, 50.0),
        "grid.h5 at [2]: x: x does not increase (received 50 after 100); allowed one or more increasing numbers in m; sort the grid by x",
    ),
    (
        changed("depth", 1, np.nan),
        "grid.h5: depth: not finite everywhere (received nan or inf); allowed one or more increasing numbers in m; correct it",
    ),
    (
        replaced("depth", lambda depth: depth[None]),
        "grid.h5: depth: not a row of numbers (received shape (1, 4)); allowed one or more increasing numbers in m; "
        "write depth as a one-dimensional dataset",
    ),
    (without("vs"), "grid.h5: vs: missing (received nothing); allowed shape (4, 3), (depth, x); add a dataset vs"),
    (
        replaced("vp", np.transpose),
        "grid.h5: vp: not the shape of the grid (received shape (3, 4)); allowed shape (4, 3), (depth, x); transpose it",
    ),
    (
        replaced("vp", lambda vp: vp[:3]),
        "grid.h5: vp: not the shape of the grid (received shape (3, 3)); allowed shape (4, 3), (depth, x); "
        "write one value per point of the grid",
    ),
    (
        changed("vs", (3, 1), np.inf),
        "grid.h5 at [3, 1]: vs: not a finite number (received inf); allowed numbers in SI; fill it in",
    ),
    (
        changed("vs", (3, 1), 0.5),
        "grid.h5 at [3, 1]: vs: metres per second? this looks like km/s (received 0.5); allowed 10 to 6000 m/s; write 500.0",
    ),
    (
        changed("vp", (3, 1), 500.0),
        "grid.h5 at [3, 1]: vp: the bulk modulus would not be positive: vp must exceed 1.1547 times vs = 520 m/s "
        "(received 500); allowed above 600.444 m/s; write 901.0 (1.73 times vs)",
    ),
    (
        replaced("vs", lambda vs: np.full(vs.shape, b"fast")),
        "grid.h5: vs: not numbers (received |S4); allowed an array of numbers; write it as float64",
    ),
]


@pytest.mark.parametrize(("change", "text"), BAD_GRIDS)
def test_bad_grid_hdf5(scenario_of, tmp_path, change, text):
    grid = whole_grid()
    change(grid)
    write_hdf5(tmp_path / "grid.h5", **grid)
    assert message(scenario_of(HDF5), tmp_path) == text


def test_grid_that_cannot_be_read(scenario_of, tmp_path):
    what = "allowed an HDF5 file with datasets x, depth, vp, vs, density, qp, qs"
    assert message(scenario_of(HDF5), tmp_path) == f"grid.h5: no such file; {what}; correct its name in the scenario"
    (tmp_path / "grid.h5").write_text("x")
    assert message(scenario_of(HDF5), tmp_path) == f"grid.h5: not an HDF5 file that can be read; {what}; save it as HDF5 or netCDF-4"
