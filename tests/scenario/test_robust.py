"""Whatever stands in place of a value, the answer is a scenario or one InputError of well-formed lines."""

import re

import pytest

from groundroll.errors import InputError
from groundroll.scenario import Scenario, template_text

EVERYTHING = re.sub(
    # The optional parts that can stand beside what the template sets.
    r"^# (?=\[(?:snapshots|ground\.random|ground\.fill_missing|ground\.terrain)\])",
    "",
    template_text(),
    flags=re.MULTILINE,
)
STRANGE = [
    "0",
    "-1",
    "1e300",
    "nan",
    "true",
    '""',
    '"a \\n b {key}"',
    "[]",
    "[[]]",
    "{}",
    '{ shape = ["ricker"], "odd key" = 1 }',
    "[{}, 1]",
    "2001-02-03",
    "0x" + 5000 * "f",
]
KEYS = [match for match in re.finditer(r"^(?:# )?(\w+) = (\S.*?)(?:  #.*)?$", EVERYTHING, re.MULTILINE)]
LINE = re.compile(r"s\.toml:\d+: .+ \(received .+\); allowed .+; .+")


@pytest.mark.parametrize("strange", STRANGE, ids=lambda text: text[:12])
def test_strange_values(strange):
    refused = 0
    for match in KEYS:
        text = EVERYTHING[: match.start()] + f"{match[1]} = {strange}" + EVERYTHING[match.end() :]
        try:
            Scenario.from_text(text, "s.toml")
        except InputError as error:
            refused += 1
            for line in str(error).splitlines():
                assert LINE.fullmatch(line), line
    assert refused > len(KEYS) / 2


def test_every_line_left_out_in_turn():
    lines = EVERYTHING.splitlines()
    for number in range(len(lines)):
        text = "\n".join(lines[:number] + lines[number + 1 :])
        try:
            Scenario.from_text(text, "s.toml")
        except InputError as error:
            for line in str(error).splitlines():
                assert LINE.fullmatch(line), line
