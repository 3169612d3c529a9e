"""The commented scenario that `groundroll new` writes, made from the schema."""

from .catalogue import Key, Table, kinds, tables
from .documents import shared
from .literal import literal

_STARTER = {
    # A small job that runs as it stands: a hammer blow on two layers.
    (): [{"title": "A first scenario"}],
    ("section",): [{"length": 120.0, "depth": 40.0, "duration": 0.8, "highest_frequency": 40.0}],
    ("mesh",): [{}],
    ("mesh", "edges"): [{}],
    ("ground",): [{}],
    ("ground", "layer"): [
        {"thickness": 6.0, "vp": 400.0, "vs": 180.0, "density": 1800.0, "qp": 40.0, "qs": 20.0},
        {"vp": 1400.0, "vs": 500.0, "density": 2000.0, "qp": 80.0, "qs": 40.0},
    ],
    ("source", "force"): [{"name": "hammer", "kind": "force", "x": 30.0, "depth": 0.0, "force": [0.0, 1.0e5]}],
    ("source", "force", "pulse"): [{"shape": "ricker", "frequency": 16.0}],
    ("receivers",): [{"name": "line", "from": [40.0, 0.0], "to": [100.0, 0.0], "count": 13}],
    ("output",): [{}],
}
"""What the template sets, a list of tables for each path; every other key stands in it as a comment."""

_WIDTH = 100


def template_text() -> str:
    """A scenario file to start from: the needed keys set, all others as comments with range and default."""
    lines = [
        "# A scenario for groundroll. SI units: m, s, kg, N, Pa, Hz. x grows to the right, depth downward.",
        "# Take the # before a key away to use it (and the # before the [table] that it stands in).",
    ]
    for table in tables().values():
        lines += _table(table)
    return "\n".join(lines) + "\n"


def _table(table: Table) -> list[str]:
    """A table as often as the template sets it; else once as a comment."""
    items = _STARTER.get(table.path)
    if items is None:
        if _under_unused_kind(table):
            return []
        return ["", f"# {table.header}{_note(table)}", *_keys(table, {}, _fit_for_comment(table))]
    lines = ["", table.header] if table.header else [""]
    lines += _keys(table, items[0], table.keys)
    for item in items[1:]:
        lines += ["", table.header, *(f"{key} = {literal(value)}" for key, value in item.items())]
    return lines


def _under_unused_kind(table: Table) -> bool:
    """Whether the table lies in another kind of table than the template sets, which is told there."""
    above = [tables()[table.path[:size]] for size in range(len(table.path)) if table.path[:size] in tables()]
    return any(outer.chooser and outer.path not in _STARTER for outer in above)


def _fit_for_comment(table: Table) -> tuple[Key, ...]:
    """The keys of a table that stands as a comment: of a kind of table, those that make it this kind."""
    first = _first_kind(table)
    return tuple(key for key in table.keys if first or key.name == table.chooser or not shared(key, table))


def _note(table: Table) -> str:
    return "" if _first_kind(table) else "  # of another kind: all else as in the first, but"


def _first_kind(table: Table) -> bool:
    return not table.chooser or kinds(table)[0] == table.path[-1]


def _keys(table: Table, values: dict, keys: tuple[Key, ...]) -> list[str]:
    lines = []
    for key in keys:
        if not key.is_table:
            start = "" if key.name in values else "# "
            lines += _with_comment(f"{start}{key.name} = {literal(values.get(key.name, key.example))}", key)
    return lines


def _with_comment(setting: str, key: Key) -> list[str]:
    """The setting with its meaning behind it, or above it where the line would be long."""
    comment = f"# {key.meaning} ({key.allowed})" + (f"; left out: {key.without}" if key.without else "")
    line = f"{setting}  {comment}"
    return [line] if len(line) <= _WIDTH else [comment, setting]
