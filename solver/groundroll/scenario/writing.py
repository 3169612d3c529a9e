"""A scenario back to TOML, every default spelled out."""

from typing import TYPE_CHECKING

from .catalogue import LEFT_OUT
from .literal import literal
from .parts import Part

if TYPE_CHECKING:
    from .schema import Scenario


def resolved_text(scenario: "Scenario") -> str:
    """TOML that reads back as an equal scenario; what stays open is said in a comment."""
    return "\n".join(_table(scenario, "")).strip("\n") + "\n"


def _table(part: Part, path: str) -> list[str]:
    """The lines of a table: its own keys first, then the tables inside it."""
    own, inner = [], []
    for field, info in type(part).model_fields.items():
        key, value = info.alias or field, getattr(part, field)
        inside = f"{path}.{key}" if path else key
        if isinstance(value, Part):
            inner += ["", f"[{inside}]", *_table(value, inside)]
        elif isinstance(value, tuple) and value and isinstance(value[0], Part):
            for item in value:
                inner += ["", f"[[{inside}]]", *_table(item, inside)]
        elif value is None:
            own.append(f"# {key} left out: {info.description.partition(LEFT_OUT)[2]}")
        else:
            own.append(f"{key} = {literal(value)}")
    return own + inner
