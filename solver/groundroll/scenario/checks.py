"""Checks between the parts of a scenario; they run only when each part has passed alone."""

from collections.abc import Iterator
from typing import TYPE_CHECKING

from .literal import plain
from .parts import Problem

if TYPE_CHECKING:
    from .schema import Scenario


def scenario_problems(scenario: "Scenario") -> Iterator[Problem]:
    """Every disagreement between the parts of a scenario."""
    if not scenario.sources:
        yield Problem("no source", "one or more [[source]]", path=("source",))
    if not scenario.receivers and scenario.snapshots is None:
        yield Problem("nothing would be recorded", "one or more [[receivers]], or [snapshots]", path=("receivers",))
    yield from _repeated_names([source.name for source in scenario.sources], "source")
    yield from _repeated_names([receivers.name for receivers in scenario.receivers], "receivers")
    for index, source in enumerate(scenario.sources):
        path = ("source", index)
        yield from _outside_length(scenario, source.x, (*path, "x"))
        yield from _outside_depth(scenario, source.depth, source.depth_from, (*path, "depth"))
    for index, receivers in enumerate(scenario.receivers):
        for path, (x, depth) in receivers.places():
            yield from _outside_length(scenario, x, ("receivers", index, *path))
            yield from _outside_depth(scenario, depth, receivers.depth_from, ("receivers", index, *path))
    yield from _bodies_outside(scenario)
    yield from _deep_terrain(scenario)
    yield from _coarse_samples(scenario)


def _repeated_names(names: list[str], key: str) -> Iterator[Problem]:
    # Records are files too, and some systems do not tell "Street" from "street".
    folded = [name.casefold() for name in names]
    for index, name in enumerate(folded):
        if name in folded[:index]:
            number = 2
            while f"{name}_{number}" in folded:
                number += 1
            yield Problem(
                "this name is taken by an earlier one",
                "each name once, capitals not counting",
                f'write {{key}} = "{names[index]}_{number}"',
                (key, index, "name"),
            )


def _outside_length(scenario: "Scenario", x: float, path: tuple[str | int, ...]) -> Iterator[Problem]:
    length = scenario.section.length
    if not 0.0 <= x <= length:
        nearest = length if x > length else 0.0
        yield Problem(
            "outside the section",
            f"x from 0 to section.length = {plain(length)} m",
            f"write x as {nearest!r}",
            path,
        )


def _outside_depth(scenario: "Scenario", depth: float, depth_from: str, path: tuple[str | int, ...]) -> Iterator[Problem]:
    terrain = scenario.ground.terrain
    if depth < 0.0 and terrain is None:
        yield Problem(
            "above the ground surface, which is flat at the datum",
            "a depth of 0 m or more",
            f"write a depth of {-depth!r}",
            path,
        )
    highest = 0.0 if terrain is None or depth_from == "datum" else terrain.highest()
    if highest is not None and depth > scenario.section.depth + max(highest, 0.0):
        yield Problem(
            "below the section",
            f"a depth up to section.depth = {plain(scenario.section.depth)} m",
            f"write section.depth = {depth!r} or more",
            path,
        )


def _bodies_outside(scenario: "Scenario") -> Iterator[Problem]:
    length = scenario.section.length
    for index, body in enumerate(scenario.ground.bodies):
        least, greatest = body.reach()
        if greatest <= 0.0 or least >= length:
            yield Problem(
                f"the body lies beside the section, from x = {plain(least)} to {plain(greatest)} m",
                f"a body that reaches into x from 0 to section.length = {plain(length)} m",
                "move it or remove it",
                ("ground", "body", index),
            )


def _deep_terrain(scenario: "Scenario") -> Iterator[Problem]:
    terrain, depth = scenario.ground.terrain, scenario.section.depth
    if terrain is None:
        return
    lows = [(("points", index), point[1]) for index, point in enumerate(terrain.points or ())]
    if terrain.shape == "valley":
        lows.append((("height",), -terrain.height))
    for path, low in lows:
        if low <= -depth:
            yield Problem(
                "the ground surface would lie below the section",
                f"elevations above -{plain(depth)} m (section.depth)",
                f"write section.depth = {float(round(-2.0 * low + 1.0))!r}",
                ("ground", "terrain", *path),
            )


def _coarse_samples(scenario: "Scenario") -> Iterator[Problem]:
    interval, frequency = scenario.output.sample_interval, scenario.section.highest_frequency
    # The margin of 1e-9 lets through a rounded 1/(2 f).
    if interval is not None and interval > (1.0 + 1e-9) / (2.0 * frequency):
        yield Problem(
            f"too long to show {plain(frequency)} Hz (section.highest_frequency)",
            f"up to 1/(2 x {plain(frequency)} Hz) = {plain(0.5 / frequency)} s",
            f"write {{key}} = {float(f'{0.1 / frequency:.2g}')!r}",
            ("output", "sample_interval"),
        )
