"""A scenario written out with every default reads back as an equal scenario."""

import string
import tomllib
from pathlib import Path

from hypothesis import given, settings
from hypothesis import strategies as st

from groundroll.scenario import Scenario, template_text

CONTRACT = Path(__file__).with_name("contract.toml")


def numbers(low, high):
    return st.one_of(st.floats(low, high), st.integers(int(low) + 1, int(high)).map(float))


def fixed(**values):
    """A table of the given strategies, every key there."""
    return st.fixed_dictionaries(values)


def some(**values):
    """A table of the given strategies, each key there or not."""
    return st.fixed_dictionaries({}, optional=values)


positions = st.tuples(numbers(0.0, 1000.0), numbers(0.0, 400.0))
names = st.text(string.ascii_lowercase + string.digits, min_size=1, max_size=8)
depth_from = st.sampled_from(["surface", "datum"])
texts = st.text(st.characters(codec="utf-8"), max_size=20)
files = st.text(st.characters(codec="utf-8", exclude_categories=["C", "Z"]), min_size=1, max_size=12)

properties = {
    "vp": numbers(1200.0, 10000.0),
    "vs": numbers(10.0, 1000.0),
    "density": numbers(20.0, 10000.0),
}
quality = some(qp=numbers(2.0, 1e6), qs=numbers(2.0, 1e6))
bottoms = some(vp_bottom=numbers(1200.0, 10000.0), vs_bottom=numbers(10.0, 1000.0), density_bottom=numbers(20.0, 10000.0))


def joined(*tables):
    return st.tuples(*tables).map(lambda parts: {key: value for part in parts for key, value in part.items()})


layer = joined(st.fixed_dictionaries({"thickness": numbers(0.01, 100.0), **properties}), quality, bottoms)
last_layer = joined(st.fixed_dictionaries(properties), quality)
layers = st.tuples(st.lists(layer, max_size=3), last_layer).map(lambda parts: [*parts[0], parts[1]])

terrain = st.one_of(
    st.dictionaries(st.integers(0, 1000).map(float), numbers(-50.0, 50.0), min_size=2, max_size=5).map(
        lambda points: {"points": sorted(points.items())}
    ),
    st.fixed_dictionaries({"file": files}),
    st.fixed_dictionaries(
        {
            "shape": st.sampled_from(["hill", "valley"]),
            "centre": numbers(-100.0, 1100.0),
            "height": numbers(0.01, 100.0),
            "half_width": numbers(0.01, 500.0),
        }
    ),
)
inside = st.one_of(st.just({"void": True}), joined(st.fixed_dictionaries(properties), quality))
span = st.tuples(numbers(0.0, 100.0), numbers(101.0, 200.0))
body = st.one_of(
    joined(st.fixed_dictionaries({"shape": st.just("rectangle"), "x": span, "depth": span}), inside),
    joined(fixed(shape=st.just("polygon"), points=st.just([[1.0, 1.0], [9.0, 1.5], [4.0, 8.0]])), inside),
    joined(fixed(shape=st.just("lens"), centre=positions, width=numbers(0.1, 50.0), height=numbers(0.1, 9.0)), inside),
)
random_ground = joined(
    st.fixed_dictionaries({"kind": st.just("von_karman"), "hurst": st.floats(0.01, 1.0)}),
    fixed(standard_deviation=st.floats(0.001, 0.5), length_x=numbers(0.1, 99.0), length_z=numbers(0.1, 99.0)),
    some(seed=st.integers(0, 2**32 - 1), depth=span),
)
fill = some(density=st.sampled_from(["brocher_2005", "gardner_1974"]), vp=st.just("castagna_1985"))
ground = joined(
    st.one_of(st.fixed_dictionaries({"layer": layers}), st.fixed_dictionaries({"profile": files}), st.fixed_dictionaries({"grid": files})),
    some(
        reference_frequency=numbers(0.1, 100.0),
        depth_from=depth_from,
        terrain=terrain,
        body=st.lists(body, max_size=3),
        random=random_ground,
        water_table=numbers(0.0, 30.0),
        fill_missing=fill,
    ),
)
delay = some(delay=numbers(0.0, 9.0))
pulse = st.one_of(
    joined(fixed(shape=st.sampled_from(["ricker", "gaussian", "gaussian_slope"]), frequency=numbers(0.1, 100.0)), delay),
    joined(fixed(shape=st.just("half_sine"), duration=numbers(0.001, 9.0)), delay),
    st.fixed_dictionaries({"file": files}),
)
strength = st.one_of(
    st.fixed_dictionaries({"kind": st.just("force"), "force": st.tuples(numbers(1.0, 1e9), numbers(-1e9, 1e9))}),
    fixed(kind=st.just("moment"), moment=st.tuples(numbers(1.0, 1e9), numbers(-1e9, 1e9), numbers(-1e9, 1e9))),
    st.fixed_dictionaries({"kind": st.just("explosion"), "moment": numbers(1.0, 1e9)}),
)
source = joined(
    st.fixed_dictionaries({"name": names, "x": numbers(0.0, 1000.0), "depth": numbers(0.0, 400.0), "pulse": pulse}),
    strength,
    some(depth_from=depth_from),
)
receivers = joined(
    st.fixed_dictionaries({"name": names}),
    st.one_of(
        st.fixed_dictionaries({"at": st.lists(positions, min_size=1, max_size=4)}),
        st.fixed_dictionaries(
            {"from": st.just([1.0, 2.0]), "to": st.tuples(numbers(3.0, 900.0), numbers(0.0, 9.0)), "count": st.integers(1, 500)}
        ),
    ),
    some(depth_from=depth_from),
)


def named(item):
    return st.lists(item, min_size=1, max_size=3, unique_by=lambda table: table["name"])


edge = st.sampled_from(["absorb", "free", "rigid"])
edges = some(left=edge, right=edge, bottom=edge, top=st.sampled_from(["free", "absorb"]))
quantities = st.lists(st.sampled_from(["displacement", "velocity", "acceleration"]), min_size=1, unique=True)
scenarios = joined(
    st.fixed_dictionaries(
        {
            "section": joined(
                fixed(
                    length=st.just(1000.0),
                    depth=st.just(500.0),
                    duration=numbers(0.01, 600.0),
                    highest_frequency=numbers(0.1, 100.0),
                ),
                some(geometry=st.sampled_from(["line", "point"])),
            ),
            "ground": ground,
            "source": named(source),
            "receivers": named(receivers),
        }
    ),
    some(
        title=texts,
        mesh=some(
            spacing=numbers(0.01, 9.0),
            graded=st.booleans(),
            accuracy=st.floats(1e-4, 0.2),
            precision=st.sampled_from(["single", "double"]),
            edges=edges,
        ),
        snapshots=st.fixed_dictionaries({"every": numbers(0.001, 9.0)}, optional={"fields": st.just(["velocity_z"])}),
        output=some(sample_interval=st.floats(1e-6, 0.004), quantities=quantities),
    ),
)


@settings(max_examples=150, deadline=None)
@given(scenarios)
def test_any_scenario_reads_back_equal(tables):
    scenario = Scenario.model_validate(tables)
    text = scenario.resolved_text()
    again = Scenario.from_text(text)
    assert again == scenario
    assert again.resolved_text() == text


def test_titles_of_awkward_letters_read_back_equal():
    template = Scenario.from_text(template_text())
    for title in ('"', "\\", "a\tb\nc\r", "\x00\x1f\x7f\x85", "\u2028é山\U0001f30d", "# = [x]"):
        scenario = template.model_copy(update={"title": title})
        assert Scenario.from_text(scenario.resolved_text()) == scenario


def test_contract_and_template_read_back_equal():
    for scenario in (Scenario.load(CONTRACT), Scenario.from_text(template_text())):
        assert Scenario.from_text(scenario.resolved_text()) == scenario


def test_every_default_is_spelled_out():
    resolved = tomllib.loads(Scenario.from_text(template_text()).resolved_text())
    assert resolved["mesh"] == {
        "graded": False,
        "accuracy": 0.01,
        "precision": "single",
        "edges": {"left": "absorb", "right": "absorb", "bottom": "absorb", "top": "free"},
    }
    assert resolved["output"] == {"quantities": ["velocity"]}
    assert resolved["section"]["geometry"] == "line"
    assert resolved["source"][0]["depth_from"] == "surface"


def test_what_stays_open_is_said_in_a_comment():
    lines = Scenario.from_text(template_text()).resolved_text().splitlines()
    assert "# spacing left out: chosen from highest_frequency, the slowest wave and accuracy" in lines
    assert "# delay left out: 1.5 / frequency (starts below 1e-5 of its peak), half_sine 0" in lines


def test_a_lost_key_would_be_noticed():
    scenario = Scenario.load(CONTRACT)
    text = scenario.resolved_text()
    assert text.count("delay = 0.075\n") == 1
    assert Scenario.from_text(text.replace("delay = 0.075\n", "")) != scenario
