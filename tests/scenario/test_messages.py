"""The whole text of the message for each mistake: a table of edits of the contract's example."""

import tomllib
from pathlib import Path

import pytest

from groundroll.errors import InputError
from groundroll.scenario import Scenario

HERE = Path(__file__).parent
CONTRACT = (HERE / "contract.toml").read_text()
CASES = [case for path in sorted(HERE.glob("messages_*.toml")) for case in tomllib.loads(path.read_text())["case"]]


def message(text):
    with pytest.raises(InputError) as caught:
        Scenario.from_text(text, "pile.toml")
    return str(caught.value)


@pytest.mark.parametrize("case", CASES, ids=lambda case: case["name"])
def test_message(case):
    text = CONTRACT
    for old, new in case["edits"]:
        assert old in text
        text = text.replace(old, new, 1)
    assert message(text) == case["message"]


def test_an_empty_file():
    assert message("").splitlines() == [
        "pile.toml:1: section: missing (received nothing); allowed a table [section]; add [section]",
        "pile.toml:1: ground: missing (received nothing); allowed a table [ground]; add [ground]",
        "pile.toml:1: source: missing (received nothing); allowed one or more tables [[source]]; add [[source]]",
    ]


def test_numbers_that_toml_cannot_hold():
    text = CONTRACT.replace("count = 15", "count = 0x1" + 9999 * "0").replace("to = [220.0, 0.0]", f"to = [220.0, {2**63}]")
    assert message(text).splitlines() == [
        "pile.toml:43: receivers[1].to[2]: a number too long for TOML (received 64 bits); allowed 63 bits and a sign; write fewer digits",
        "pile.toml:44: receivers[1].count: a number too long for TOML (received 39997 bits); allowed 63 bits and a sign; write fewer digits",
    ]


def test_every_line_of_every_message_has_all_its_parts():
    for case in CASES:
        for line in case["message"].splitlines():
            place, _, rest = line.partition(" (received ")
            assert place.startswith("pile.toml:") and ": " in place
            received, _, rest = rest.partition("); allowed ")
            allowed, _, fix = rest.rpartition("; ")
            assert received and allowed and fix, line
