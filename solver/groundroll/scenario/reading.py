"""TOML text to scenario; every mistake becomes one line of one InputError."""

import re
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

from pydantic import ValidationError

from groundroll.errors import InputError

from .lines import Path as KeyPath
from .lines import line_numbers
from .messages import dotted, explain, sentence

if TYPE_CHECKING:
    from .schema import Scenario

_PLAIN_REASONS = (
    # What the standard parser says, the same in plain words, and one fix.
    (r"Expected '=' after a key", "no = after the key", "write key = value"),
    (
        r"Invalid value",
        "not a value of TOML",
        'write numbers plainly (400.0), texts in quotes ("pile"), lists in brackets',
    ),
    (r"Cannot overwrite a value", "this key is given twice", "keep one of the two"),
    (
        r"Cannot declare .* twice",
        "this table is begun twice",
        "join the two, or write [[double brackets]] for a list of tables",
    ),
    (
        r"Cannot mutate immutable namespace",
        "this table was closed where it was first written",
        "write all its keys in one place",
    ),
    (
        r"Expected newline or end of document",
        "something follows the value",
        "end the line after the value; numbers carry no units",
    ),
    (r"Invalid initial character for a key part", "not the beginning of a key", "write key = value"),
    (r"Invalid statement", "not the beginning of a line of TOML", "write key = value or a [table]"),
    (r"Expected '\]+' at the end of", "the brackets of this table are not closed", "write [table] or [[table]]"),
    (r"Unclosed array", "a list is not closed", "add the missing ] and a comma between the items"),
    (r"Unclosed inline table", "a table in braces is not closed", "add the missing } and a comma between the keys"),
    (r"Duplicate inline table key", "this key is given twice", "keep one of the two"),
    (r"Unterminated string", "a text is not closed", "add the missing quote"),
    (r"Expected \"'\"", "a text is not closed", "add the missing quote"),
    (
        r"Illegal character",
        "a character that may not stand here, such as a line end inside quotes",
        "close the quotes or remove it",
    ),
    (r"Exceeds the limit", "a number of too many digits", "write it as a power of ten, such as 1.0e30"),
    (r"Escaped character is not", "a character code that stands for none", "write the character itself"),
    (r"Unescaped '\\'", "a backslash that means nothing", "write two backslashes, or use single quotes"),
)


def load(path: str | Path) -> "Scenario":
    """The scenario in a file; file names inside it are seen from the file's folder."""
    path = Path(path)
    scenario = from_text(_read(path), str(path))
    scenario._folder = path.absolute().parent
    return scenario


def from_text(text: str, where: str) -> "Scenario":
    """The scenario in a TOML text; `where` stands for the file's name in messages."""
    try:
        scenario = _validated(_parse(text, where), text, where)
    except RecursionError:
        raise InputError(f"{where}: lists within lists too deep; allowed 3 levels; remove brackets") from None
    scenario._text = text
    return scenario


def _validated(data: dict, text: str, where: str) -> "Scenario":
    from .schema import Scenario

    lines = line_numbers(text)
    too_long = [_too_long(where, lines, path, bits) for path, bits in _long_numbers(data)]
    if too_long:
        raise InputError("\n".join(too_long))
    try:
        return Scenario.model_validate(data)
    except ValidationError as error:
        raise InputError(explain(error.errors(include_url=False), data, lines, where)) from None


def _long_numbers(value: Any, path: KeyPath = ()) -> Iterator[tuple[KeyPath, int]]:
    """The whole numbers that the 64 bits of TOML cannot hold, with their length in bits."""
    if isinstance(value, int) and not -(2**63) <= value < 2**63:
        yield path, value.bit_length()
    elif isinstance(value, dict):
        for key, item in value.items():
            yield from _long_numbers(item, (*path, key))
    elif isinstance(value, list):
        for index, item in enumerate(value):
            yield from _long_numbers(item, (*path, index))


def _too_long(where: str, lines: dict[KeyPath, int], path: KeyPath, bits: int) -> str:
    what, allowed, fix = "a number too long for TOML", "63 bits and a sign", "write fewer digits"
    return sentence(where, lines.get(path, 1), dotted(path), what, f"{bits} bits", allowed, fix)


def _read(path: Path) -> str:
    try:
        return path.read_bytes().decode("utf-8-sig")
    except FileNotFoundError:
        fix = f"`groundroll new {path}` writes one"
        raise InputError(f"{path}: no such file; allowed a scenario file in TOML; {fix}") from None
    except IsADirectoryError:
        raise InputError(f"{path}: a folder; allowed a scenario file in TOML; name the file in it") from None
    except UnicodeDecodeError as error:
        line = path.read_bytes()[: error.start].count(b"\n") + 1
        raise InputError(f"{path}:{line}: not UTF-8 text; allowed TOML in UTF-8; save the file as UTF-8") from None
    except OSError as error:
        raise InputError(f"{path}: cannot be read ({error.strerror}); allowed a readable file; check its permissions") from None


def _parse(text: str, where: str) -> dict:
    try:
        return tomllib.loads(text)
    except ValueError as error:
        raise InputError(_syntax_message(str(error), text, where)) from None


def _syntax_message(reason: str, text: str, where: str) -> str:
    lines = text.splitlines() or [""]
    place = re.search(r" \(at (?:line (\d+), column \d+|end of document)\)$", reason)
    line = int(place[1]) if place and place[1] else len(lines)
    what, fix = reason[: place.start()] if place else reason, "correct this line"
    for pattern, plain_words, plain_fix in _PLAIN_REASONS:
        if re.match(pattern, reason):
            what, fix = plain_words, plain_fix
            break
    received = lines[min(line, len(lines)) - 1].strip()[:60]
    shown = "".join(letter if letter.isprintable() else "?" for letter in received)
    return sentence(where, line, "TOML", what, shown or "an empty line", "a file in TOML", fix)
