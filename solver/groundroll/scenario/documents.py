"""The schema for readers and editors: a Markdown table of all keys, and the JSON Schema."""

from .catalogue import Key, Table, keys, kinds, tables
from .literal import literal

_HEAD = ("| key | allowed | default | meaning |", "|---|---|---|---|")


def json_schema() -> dict:
    """The JSON Schema of the scenario file, for editors that complete and check TOML."""
    from .schema import Scenario

    return Scenario.model_json_schema(by_alias=True)


def keys_table() -> str:
    """A Markdown table of every key of the scenario file; what all kinds of a table share stands once."""
    rows = dict.fromkeys(_row(key, table) for table in tables().values() for key in table.keys)
    return "\n".join((*_HEAD, *rows)) + "\n"


def _row(key: Key, table: Table) -> str:
    allowed, meaning = key.allowed, key.meaning
    if key.name == table.chooser:
        allowed = ", ".join(literal(kind) for kind in kinds(table))
    elif not shared(key, table):
        meaning += f" (with {table.chooser} = {literal(table.path[-1])})"
    return f"| `{'.'.join(key.written)}` | {allowed} | {default_words(key)} | {meaning} |"


def shared(key: Key, table: Table) -> bool:
    """Whether every kind of the table has this very key; true where there is but one kind."""
    twins = [keys().get((*table.path[:-1], kind, key.name)) for kind in kinds(table)]
    return all(twin is not None and twin.allowed == key.allowed and twin.meaning == key.meaning for twin in twins)


def default_words(key: Key) -> str:
    """What holds when the key is left out."""
    if key.required:
        return "required"
    if key.without:
        return key.without
    if key.is_table:
        return "none" if key.is_list else "see its keys"
    return f"`{literal(key.default)}`"
