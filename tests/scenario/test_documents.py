"""Template, table of keys and JSON Schema come from the one schema and agree with it."""

import json
import re
import tomllib

import pytest

from groundroll.scenario import Scenario, json_schema, keys_table, template_text
from groundroll.scenario.catalogue import keys, tables


def test_template_loads():
    scenario = Scenario.from_text(template_text(), "template")
    assert [source.name for source in scenario.sources] == ["hammer"]
    assert len(scenario.ground.layers) == 2


def test_template_shows_every_key():
    text = template_text()
    for key in keys().values():
        if not key.is_table:
            assert re.search(rf"^(# )?{key.name} = ", text, re.MULTILINE), key.path
    for table in tables().values():
        assert table.header in text


def test_commented_examples_of_the_template_are_toml():
    settings = re.findall(r"^(?:# )?(\w+ = .*)$", template_text(), re.MULTILINE)
    assert len(settings) > 60
    for setting in settings:
        tomllib.loads(setting)


def test_optional_parts_of_the_template_work_when_used():
    text = template_text()
    for header in ("snapshots", "ground.random", "ground.fill_missing"):
        block = re.search(rf"^# \[{re.escape(header)}\]\n(?:.+\n)+", text, re.MULTILINE).group()
        text = text.replace(block, re.sub(r"^# (?=\[|\w+ = )", "", block, flags=re.MULTILINE))
    scenario = Scenario.from_text(text)
    assert scenario.snapshots.every == 0.02
    assert scenario.ground.random.kind == "von_karman"
    assert scenario.ground.fill_missing.vs == "brocher_2005"


def test_table_of_keys_has_each_key_once():
    rows = keys_table().splitlines()
    assert rows[0] == "| key | allowed | default | meaning |"
    assert {".".join(key.written) for key in keys().values()} == {row.split("`")[1] for row in rows[2:]}
    assert len(rows) == len(set(rows))
    assert all(row.count(" | ") == 3 for row in rows[2:])


@pytest.mark.parametrize(
    "row",
    [
        "| `section.length` | above 0, up to 1000000 m | required | length along x, from 0 |",
        '| `mesh.precision` | "single", "double" | `"single"` | length of the numbers in the computation |',
        "| `mesh.spacing` | above 0, up to 1000000 m | chosen from highest_frequency, the slowest wave and accuracy | distance between mesh points |",
        '| `source.kind` | "force", "moment", "explosion" | required | force: a push; moment: a moment tensor; explosion: the same push in all directions |',
        '| `source.force` | [fx, fz] in N per metre of line, fz downward | required | peak force along x and down (with kind = "force") |',
        "| `receivers.from` | [x, depth] in m | the receivers are listed in `at` | first receiver of a line |",
    ],
)
def test_rows_of_the_table(row):
    assert row in keys_table().splitlines()


def test_every_key_is_described_and_says_what_holds_without_it():
    for key in keys().values():
        assert key.meaning, key.path
        if not key.required and key.default is None and not key.is_table:
            assert key.without, key.path


def test_json_schema():
    schema = json.loads(json.dumps(json_schema()))
    assert schema["required"] == ["section", "ground", "source"]
    assert schema["additionalProperties"] is False
    parts = schema["$defs"]
    length = parts["Section"]["properties"]["length"]
    assert (length["exclusiveMinimum"], length["maximum"], length["x-unit"]) == (0.0, 1e6, "m")
    assert length["description"] == "length along x, from 0"
    assert set(parts["Receivers"]["properties"]) == {"name", "from", "to", "count", "at", "depth_from"}
    assert schema["properties"]["source"]["items"]["discriminator"]["propertyName"] == "kind"


def test_json_schema_takes_what_the_schema_takes():
    """The words that JSON Schema and the template must share: each key of the template is a property."""
    names = {name for part in (json_schema(), *json_schema()["$defs"].values()) for name in part["properties"]}
    assert names == {key.name for key in keys().values()}
