import pytest

from groundroll.scenario import Scenario

HEAD = """
[section]
length = {length}
depth = {depth}
duration = 1.0
highest_frequency = 20.0
[[source]]
name = "shot"
kind = "force"
x = 1.0
depth = 0.0
force = [0.0, 1.0]
pulse = {{ shape = "ricker", frequency = 10.0 }}
[[receivers]]
name = "line"
at = [[2.0, 0.0]]
"""

LAYERS = """
[[ground.layer]]
thickness = 8.0
vp = 400.0
vs = 150.0
density = 1800.0
qp = 40.0
qs = 20.0
[[ground.layer]]
vp = 1400.0
vs = 600.0
density = 2100.0
"""


@pytest.fixture
def scenario_of(tmp_path):
    """A scenario from the text of its ground, whose files are looked for in `tmp_path`."""

    def make(ground=LAYERS, length=240.0, depth=60.0):
        path = tmp_path / "scenario.toml"
        path.write_text(HEAD.format(length=length, depth=depth) + ground)
        return Scenario.load(path)

    return make


@pytest.fixture
def layers():
    return LAYERS
