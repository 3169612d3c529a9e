"""Values as TOML literals, for resolved scenarios, templates and messages."""

import json


def literal(value) -> str:
    """One line of TOML for a number, a text, a truth value or a (nested) list of them.

    Floats are written with `repr`, so reading them back gives the same bits.
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        # JSON leaves DEL bare, TOML forbids it.
        return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
    if isinstance(value, (list, tuple)):
        return "[" + ", ".join(literal(item) for item in value) + "]"
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{key} = {literal(item)}" for key, item in value.items()) + " }"
    return str(value)


def plain(number: float) -> str:
    """A number for a sentence: whole numbers without a point, others to 6 digits."""
    if number == int(number) and abs(number) < 1e10:
        return str(int(number))
    return f"{number:.6g}"
