"""A scenario file becomes the attributes that the rest of the program reads; bad files become one InputError."""

from pathlib import Path

import pytest

from groundroll.errors import InputError
from groundroll.scenario import ExplosionSource, Layer, MomentSource, Scenario

CONTRACT = Path(__file__).with_name("contract.toml")


def with_edit(old, new):
    text = CONTRACT.read_text()
    assert text.count(old) == 1
    return Scenario.from_text(text.replace(old, new))


def test_example_of_the_contract():
    scenario = Scenario.load(CONTRACT)
    assert scenario.title == "Pile driving beside a clinic"
    section = scenario.section
    assert (section.length, section.depth, section.duration, section.highest_frequency) == (240.0, 60.0, 1.2, 40.0)
    assert section.geometry == "line"
    mesh = scenario.mesh
    assert (mesh.spacing, mesh.graded, mesh.accuracy, mesh.precision) == (0.5, False, 0.01, "single")
    edges = scenario.mesh.edges
    assert (edges.left, edges.right, edges.bottom, edges.top) == ("absorb", "absorb", "absorb", "free")
    assert scenario.ground.reference_frequency == 10.0
    assert scenario.ground.layers == (
        Layer(thickness=8.0, vp=400.0, vs=150.0, density=1800.0, qp=40.0, qs=20.0),
        Layer(vp=1400.0, vs=600.0, density=2100.0),
    )
    assert scenario.ground.terrain.points == ((0.0, 0.0), (120.0, 6.0), (240.0, 0.0))
    (source,) = scenario.sources
    assert (source.name, source.kind, source.x, source.depth, source.depth_from) == ("pile", "force", 60.0, 0.0, "surface")
    assert source.force == (0.0, 1.0e5)
    assert (source.pulse.shape, source.pulse.frequency, source.pulse.delay, source.pulse.file) == ("ricker", 20.0, 0.075, None)
    street, clinic = scenario.receivers
    assert (street.start, street.end, street.count, street.at) == ((80.0, 0.0), (220.0, 0.0), 15, None)
    assert clinic.at == ((150.0, 0.0), (150.0, 3.0))
    assert (scenario.snapshots.every, scenario.snapshots.fields) == (0.02, ("velocity_x", "velocity_z"))
    assert (scenario.output.sample_interval, scenario.output.quantities) == (0.001, ("velocity",))


def piece(begins, ends):
    text = CONTRACT.read_text()
    return text[text.index(begins) : text.index(ends)]


def test_what_is_left_out():
    needed = [("title", "[mesh]"), ("[[ground.layer]]", "[ground.terrain]"), ("[[source]]", "[snapshots]")]
    scenario = Scenario.from_text("".join(piece(*ends) for ends in needed))
    assert (scenario.mesh.spacing, scenario.mesh.accuracy, scenario.mesh.precision) == (None, 0.01, "single")
    assert scenario.mesh.edges.top == "free"
    assert (scenario.ground.reference_frequency, scenario.ground.depth_from, scenario.ground.terrain) == (None, "surface", None)
    assert scenario.snapshots is None
    assert (scenario.output.sample_interval, scenario.output.quantities) == (None, ("velocity",))


def test_text_and_folder():
    scenario = Scenario.load(CONTRACT)
    assert scenario.text == CONTRACT.read_text()
    assert scenario.folder == CONTRACT.parent
    assert Scenario.from_text(scenario.text) == scenario


def test_scenarios_that_ask_something_else_differ():
    assert Scenario.load(CONTRACT) != with_edit("vs = 150.0", "vs = 151.0")


def test_a_scenario_is_frozen_and_hashable():
    scenario = Scenario.load(CONTRACT)
    assert hash(scenario) == hash(Scenario.load(CONTRACT))
    with pytest.raises(ValueError, match="frozen"):
        scenario.title = "another"


def test_whole_numbers_serve_as_numbers():
    scenario = with_edit("length = 240.0", "length = 240")
    assert scenario == Scenario.load(CONTRACT)
    assert isinstance(scenario.section.length, float)


def test_other_kinds_of_source():
    force = piece('kind = "force"', "pulse = {")
    moment = with_edit(force, 'kind = "moment"\nx = 60\ndepth = 2\nmoment = [1, -1, 0.5]\n').sources[0]
    assert isinstance(moment, MomentSource)
    assert moment.moment == (1.0, -1.0, 0.5)
    explosion = with_edit(force, 'kind = "explosion"\nx = 60\ndepth = 2\nmoment = 3e6\n').sources[0]
    assert isinstance(explosion, ExplosionSource)
    assert explosion.moment == 3e6


@pytest.mark.parametrize(
    "pulse",
    [
        'shape = "gaussian", frequency = 12.0',
        'shape = "gaussian_slope", frequency = 12.0, delay = 0.2',
        'shape = "half_sine", duration = 0.012',
        'file = "pulse.csv"',
        # A pulse that carries more than highest_frequency is a warning of the plan, no error here.
        'shape = "ricker", frequency = 80.0',
    ],
)
def test_pulses(pulse):
    with_edit('shape = "ricker", frequency = 20.0, delay = 0.075', pulse)


def test_depths_that_are_fine():
    with_edit("depth = 0.0\nforce", 'depth = -3.0\ndepth_from = "datum"\nforce')
    # 6 m of terrain above the datum: 66 m below the surface may still be inside.
    with_edit("depth = 0.0\nforce", "depth = 66.0\nforce")
    with_edit("to = [220.0, 0.0]\ncount = 15", "to = [80.0, 0.0]\ncount = 1")


@pytest.mark.parametrize(
    "old, new",
    [
        ("qs = 20.0", "qs = 2.0"),
        ("accuracy = 0.01", "accuracy = 0.2"),
        ("sample_interval = 0.001", "sample_interval = 0.0125"),
        ("x = 60.0", "x = 240.0"),
        ("x = 60.0", "x = 0.0"),
        ("vs = 150.0", "vs = 10.0"),
        # sqrt(4/3) 150 = 173.205: the least vp that leaves the bulk modulus positive.
        ("vp = 400.0", "vp = 173.21"),
        ("highest_frequency = 40.0", "highest_frequency = 0.001"),
    ],
)
def test_values_at_the_ends_of_their_ranges(old, new):
    with_edit(old, new)


def test_real_ground():
    scenario = with_edit(
        "[ground.terrain]",
        """[[ground.body]]
shape = "rectangle"
x = [100.0, 101.0]
depth = [0.0, 4.0]
void = true
[[ground.body]]
shape = "lens"
centre = [120.0, 4.0]
width = 4.0
height = 2.0
vs = 90.0
[[ground.body]]
shape = "polygon"
points = [[90.0, 2.0], [130.0, 2.0], [110.0, 8.0]]
vp = 300.0
vs = 120.0
density = 1700.0
[ground.random]
kind = "von_karman"
standard_deviation = 0.05
length_x = 20.0
length_z = 4.0
hurst = 0.3
depth = [2.0, 30.0]
[ground.fill_missing]
vp = "castagna_1985"
density = "gardner_1974"
[ground.terrain]""",
    )
    trench, lens, wedge = scenario.ground.bodies
    assert (trench.void, trench.x, trench.depth, trench.vs) == (True, (100.0, 101.0), (0.0, 4.0), None)
    assert (lens.centre, lens.width, lens.height, lens.vs, lens.vp) == ((120.0, 4.0), 4.0, 2.0, 90.0, None)
    assert wedge.points[2] == (110.0, 8.0)
    assert (scenario.ground.random.seed, scenario.ground.random.hurst) == (0, 0.3)
    assert (scenario.ground.fill_missing.vp, scenario.ground.fill_missing.vs) == ("castagna_1985", None)


def test_a_layer_with_a_bent_top():
    scenario = with_edit(
        piece("thickness = 8.0", "vp = 1400.0"),
        "vp = 400.0\nvs = 150.0\ndensity = 1800.0\n"
        "[[ground.layer]]\ntop_line = [[0.0, 5.0], [240.0, 9.0]]\ntop_smooth = true\n",
    )
    assert scenario.ground.layers[1].top_line == ((0.0, 5.0), (240.0, 9.0))
    assert scenario.ground.layers[1].top_smooth


@pytest.mark.parametrize("way", ['profile = "profile.csv"', 'grid = "section.h5"'])
def test_ground_from_a_file(way):
    layers = piece("[[ground.layer]]", "[ground.terrain]")
    ground = with_edit(layers, f"{way}\nwater_table = 4.0\nwater_vp = 1500.0\n").ground
    assert (ground.layers, ground.water_table, ground.water_vp) == ((), 4.0, 1500.0)


def refusal(path):
    with pytest.raises(InputError) as caught:
        Scenario.load(path)
    return str(caught.value)


def test_no_file(tmp_path):
    path = tmp_path / "pile.toml"
    assert refusal(path) == f"{path}: no such file; allowed a scenario file in TOML; `groundroll new {path}` writes one"


def test_a_folder(tmp_path):
    assert refusal(tmp_path) == f"{tmp_path}: a folder; allowed a scenario file in TOML; name the file in it"


def test_not_utf8(tmp_path):
    path = tmp_path / "pile.toml"
    path.write_bytes(b'# first line\ntitle = "Stra\xdfe"\n')
    assert refusal(path) == f"{path}:2: not UTF-8 text; allowed TOML in UTF-8; save the file as UTF-8"


def test_a_file_as_a_folder(tmp_path):
    path = tmp_path / "pile.toml"
    path.write_text("")
    inside = path / "x.toml"
    assert refusal(inside) == f"{inside}: cannot be read (Not a directory); allowed a readable file; check its permissions"


def test_byte_order_mark_is_no_matter(tmp_path):
    path = tmp_path / "pile.toml"
    path.write_text(CONTRACT.read_text(), encoding="utf-8-sig")
    assert Scenario.load(path) == Scenario.load(CONTRACT)


def test_messages_name_the_file(tmp_path):
    path = tmp_path / "pile.toml"
    path.write_text(CONTRACT.read_text().replace("vp = 400.0", "vp = 0.4"))
    assert refusal(path).startswith(f"{path}:19: ground.layer[1].vp: ")


SYNTAX = [
    ("a = 1\nb 2\n", "2: TOML: no = after the key (received b 2)", "write key = value"),
    ("a = 1\nb = two\n", "2: TOML: not a value of TOML (received b = two)", 'write numbers plainly (400.0), texts in quotes ("pile"), lists in brackets'),
    ("a = 1\na = 2\n", "2: TOML: this key is given twice (received a = 2)", "keep one of the two"),
    ("[a]\nx = 1\n[a]\n", "3: TOML: this table is begun twice (received [a])", "join the two, or write [[double brackets]] for a list of tables"),
    ("a = {x = 1}\na.b = 1\n", "2: TOML: this table was closed where it was first written (received a.b = 1)", "write all its keys in one place"),
    ("a = 1 m\n", "1: TOML: something follows the value (received a = 1 m)", "end the line after the value; numbers carry no units"),
    ("= 1\n", "1: TOML: not the beginning of a line of TOML (received = 1)", "write key = value or a [table]"),
    ("[]\n", "1: TOML: not the beginning of a key (received [])", "write key = value"),
    ("[a\nx = 1\n", "1: TOML: the brackets of this table are not closed (received [a)", "write [table] or [[table]]"),
    ("a = [1 2]\n", "1: TOML: a list is not closed (received a = [1 2])", "add the missing ] and a comma between the items"),
    ("a = {x = 1\n", "1: TOML: a table in braces is not closed (received a = {x = 1)", "add the missing } and a comma between the keys"),
    ("a = {x = 1, x = 2}\n", "1: TOML: this key is given twice (received a = {x = 1, x = 2})", "keep one of the two"),
    ('a = "ab\n', '1: TOML: a character that may not stand here, such as a line end inside quotes (received a = "ab)', "close the quotes or remove it"),
    ('a = "\x01"\n', '1: TOML: a character that may not stand here, such as a line end inside quotes (received a = "?")', "close the quotes or remove it"),
    ('a = "ab', '1: TOML: a text is not closed (received a = "ab)', "add the missing quote"),
    ("a = 'ab", "1: TOML: a text is not closed (received a = 'ab)", "add the missing quote"),
    ('a = "\\q"\n', '1: TOML: a backslash that means nothing (received a = "\\q")', "write two backslashes, or use single quotes"),
    ('a = "\\uD800"\n', '1: TOML: a character code that stands for none (received a = "\\uD800")', "write the character itself"),
    ("a = 1" + 5000 * "0" + "\n", f"1: TOML: a number of too many digits (received a = 1{55 * '0'})", "write it as a power of ten, such as 1.0e30"),
]


@pytest.mark.parametrize("text, begins, fix", SYNTAX)
def test_syntax_errors(text, begins, fix):
    with pytest.raises(InputError) as caught:
        Scenario.from_text(text, "pile.toml")
    assert str(caught.value) == f"pile.toml:{begins}; allowed a file in TOML; {fix}"


@pytest.mark.parametrize("levels", [600, 5000])
def test_lists_too_deep(levels):
    with pytest.raises(InputError) as caught:
        Scenario.from_text("title = " + levels * "[" + levels * "]", "pile.toml")
    assert str(caught.value) == "pile.toml: lists within lists too deep; allowed 3 levels; remove brackets"
