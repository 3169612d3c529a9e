"""A scenario that runs in a moment: 30 by 15 m, a vertical surface force, two receiver lines, a few snapshots."""

from groundroll import Scenario

SMALL = """
title = "Small"
[section]
length = 30.0
depth = 15.0
duration = 0.25
highest_frequency = 40.0
[[ground.layer]]
thickness = 4.0
vp = 350.0
vs = 180.0
density = 1800.0
[[ground.layer]]
vp = 600.0
vs = 300.0
density = 2000.0
[[source]]
name = "hammer"
kind = "force"
x = 8.0
depth = 0.0
force = [0.0, 1.0e4]
pulse = { shape = "ricker", frequency = 16.0 }
[[receivers]]
name = "line"
from = [12.0, 0.0]
to = [24.0, 0.0]
count = 4
[[receivers]]
name = "hole"
at = [[15.0, 0.0], [15.0, 3.0]]
[snapshots]
every = 0.05
[output]
sample_interval = 0.002
quantities = ["displacement", "velocity", "acceleration"]
"""


def small(*changes: tuple[str, str]) -> Scenario:
    """The scenario with each (old, new) text replaced once; the old text must be there."""
    return Scenario.from_text(changed(SMALL, *changes))


def changed(text: str, *changes: tuple[str, str]) -> str:
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text
