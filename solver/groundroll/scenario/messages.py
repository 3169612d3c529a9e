"""Validation errors in the user's terms: `file:line: key.path: what (received …); allowed …; one fix`."""

import difflib
import math
import re
from collections.abc import Iterator
from typing import Any

from .catalogue import Key, keys, mixed_lists, tables
from .lines import Path
from .literal import literal
from .parts import Problem

_NOTHING = object()


def explain(errors: list[dict], data: dict, lines: dict[Path, int], where: str) -> str:
    """All the errors of a validation, one a line, in the order of the lines they are on.

    A key that is missing because it is misspelt is told once, as the misspelt key.
    """
    unknown = [error["loc"] for error in errors if error["type"] == "extra_forbidden"]
    misspelt = {(*place[:-1], name) for place in unknown for name in _near(place)}
    reports = [
        _report(place, problem, data, lines, where)
        for error in errors
        if error["type"] != "missing" or error["loc"] not in misspelt
        for place, problem in _problems(error)
    ]
    return "\n".join(text for _, text in sorted(reports, key=lambda report: report[0]))


def sentence(where: str, line: int, path: str, what: str, received: str, allowed: str, fix: str) -> str:
    """One message."""
    return f"{where}:{line}: {path}: {what} (received {received}); allowed {allowed}; {fix}"


def _report(place: Path, problem: Problem, data: dict, lines: dict[Path, int], where: str) -> tuple[int, str]:
    path = _written(place)
    key = keys().get(_schema_path(path, data))
    line = next(lines[path[:size]] for size in range(len(path), -1, -1) if path[:size] in lines)
    value = _look_up(data, path)
    name = next((str(name) for name in reversed(path) if isinstance(name, str)), "")
    fix = problem.fix.replace("{key}", name) or _usual_fix(key, name, value is _NOTHING)
    allowed = problem.allowed or (key.allowed if key else "")
    return line, sentence(where, line, dotted(path), problem.what, received_words(value), allowed, fix)


def _usual_fix(key: Key | None, name: str, absent: bool) -> str:
    if key is None or key.is_table:
        return f"add {_header(key)}" if key else f"correct {name}"
    return f"{'add' if absent else 'write, say,'} {name} = {literal(key.example)}"


def _header(key: Key) -> str:
    name = ".".join(key.written)
    return f"[[{name}]]" if key.is_list else f"[{name}]"


def _problems(error: dict) -> Iterator[tuple[Path, Problem]]:
    """Each problem that an error carries, with the place it is about."""
    place, kind, value = error["loc"], error["type"], error.get("input")
    if kind == "refused":
        for problem in error["ctx"]["problems"]:
            yield (*place, *problem.path), problem
    elif kind in ("union_tag_invalid", "union_tag_not_found"):
        yield _kind_problem(place, value)
    elif kind in _REASONS:
        yield place, _REASONS[kind](place, value)
    else:
        yield place, Problem(error["msg"])


def _kind_problem(place: Path, value: Any) -> tuple[Path, Problem]:
    """A table of a mixed list whose kind is missing or unknown."""
    chooser = mixed_lists()[_names(place)]
    words = [path[-1] for path, table in tables().items() if table.chooser and path[:-1] == _names(place)]
    allowed = ", ".join(literal(word) for word in words)
    if chooser not in value:
        return (*place, chooser), Problem("missing", allowed, f"add {chooser} = {literal(words[0])}")
    return (*place, chooser), Problem("not one of the known words", allowed, _nearest(value[chooser], words, chooser))


def _closest(word: Any, known: list[str]) -> list[str]:
    """The known word that is nearest to a word, capitals not counting; empty if none is near."""
    return difflib.get_close_matches(word.casefold(), known, 1) if isinstance(word, str) else []


def _nearest(word: Any, known: list[str], name: str) -> str:
    close = _closest(word, known)
    return f"did you mean {name} = {literal(close[0])}?" if close else f"write, say, {name} = {literal(known[0])}"


def _siblings(place: Path) -> list[str]:
    return [key.name for key in tables()[_names(place[:-1])].keys]


def _near(place: Path) -> list[str]:
    """The known key that is nearest to an unknown one, if any is near."""
    return _closest(place[-1], _siblings(place))


def _unknown(place: Path, value: Any) -> Problem:
    """A key that the table does not have; the nearest one it has, or the table that has one of this name."""
    siblings = _siblings(place)
    close = _near(place)
    fix = f"did you mean {close[0]}?" if close else _home(place)
    return Problem("unknown key", ", ".join(siblings), fix)


def _home(place: Path) -> str:
    """Where a key that is unknown here would be known."""
    here = tables()[_names(place[:-1])]
    for table in tables().values():
        for key in table.keys:
            if key.name == place[-1]:
                if table.written == here.written:
                    return f"it goes with {table.chooser} = {literal(table.path[-1])}"
                if key.is_table:
                    return f"write {_header(key)}"
                return f"move it to {table.header}" if table.header else "move it above the first [table]"
    return "remove it"


def _wrong_number(place: Path, value: Any) -> Problem:
    key = keys().get(_names(place))
    whole = key is not None and key.allowed.startswith("a whole number")
    what = "not a whole number" if whole else "not a number"
    if isinstance(value, float) and value.is_integer():
        return Problem(what, fix=f"write {{key}} = {int(value)}")
    if isinstance(value, str):
        return _number_in_quotes(value, what, int if whole else float)
    return Problem(what)


def _number_in_quotes(text: str, what: str, read: type) -> Problem:
    """A text where a number is wanted; where it begins with one, that is the fix."""
    begins = re.match(r"\s*([-+]?[0-9.]+(?:[eE][-+]?[0-9]+)?)(?:\s|$)", text)
    try:
        number = read(begins[1]) if begins else math.nan
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        return Problem(what)
    return Problem(f"{what} but a text", fix=f"write {{key}} = {literal(number)}")


def _wrong_text(place: Path, value: Any) -> Problem:
    quotable = isinstance(value, (int, float)) and len(literal(value)) < 20
    return Problem("not a text", fix=f"write {{key}} = {literal(literal(value))}" if quotable else "")


def _wrong_word(place: Path, value: Any) -> Problem:
    key = keys()[_names(place)]
    known = [word.strip('"') for word in key.allowed.removeprefix("a list of ").split(", ")]
    close = _closest(value, known)
    if key.is_list:
        fix = f"did you mean {literal(close[0])}?" if close else f"write, say, {key.name} = {literal([known[0]])}"
        return Problem("not one of the known words", ", ".join(literal(word) for word in known), fix)
    return Problem("not one of the known words", fix=_nearest(value, known, key.name))


def _wrong_list(place: Path, value: Any) -> Problem:
    key = keys()[_names(place)]
    if key.is_table:
        return Problem("not a list of tables", fix=f"write {_header(key)} above it")
    return Problem("not a list")


def _wrong_table(place: Path, value: Any) -> Problem:
    return Problem("not a table", fix=f"write its keys under {_header(keys()[_names(place)])}")


_REASONS = {
    "missing": lambda place, value: Problem("missing"),
    "extra_forbidden": _unknown,
    "float_type": _wrong_number,
    "int_type": _wrong_number,
    "finite_number": lambda place, value: Problem("not a finite number"),
    "string_type": _wrong_text,
    "bool_type": lambda place, value: Problem("neither true nor false"),
    "literal_error": _wrong_word,
    "tuple_type": _wrong_list,
    "model_type": _wrong_table,
    "model_attributes_type": _wrong_table,
}


def received_words(value: Any) -> str:
    """What stood in the file, short enough for a message."""
    if value is _NOTHING:
        return "nothing"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, (list, tuple)) and value and isinstance(value[0], dict):
        return "a list of tables"
    text = literal(value)
    return text if len(text) <= 60 else f"{text[:57]}..."


def _look_up(data: Any, path: Path) -> Any:
    for name in path:
        try:
            data = data[name]
        except (KeyError, IndexError, TypeError):
            return _NOTHING
    return data


def _names(place: Path) -> tuple[str, ...]:
    return tuple(name for name in place if isinstance(name, str))


def _written(place: Path) -> Path:
    """The place without the kinds that the schema adds after the items of mixed lists."""
    return tuple(
        name
        for index, name in enumerate(place)
        if not (_names(place[:index]) in mixed_lists() and isinstance(name, str) and _names(place[: index + 1]) in tables())
    )


def _schema_path(path: Path, data: Any) -> tuple[str, ...]:
    """The path of a key in the schema: by names, with the kind of each table of a mixed list."""
    names: tuple[str, ...] = ()
    for size, name in enumerate(path, 1):
        if isinstance(name, str):
            names += (name,)
        elif names in mixed_lists():
            kind = _look_up(data, (*path[:size], mixed_lists()[names]))
            names += (kind,) if isinstance(kind, str) else ()
    return names


def dotted(path: Path) -> str:
    """The path as it is said: `ground.layer[2].vp`, items counted from 1."""
    words = ""
    for name in path:
        if isinstance(name, int):
            words += f"[{name + 1}]"
        else:
            words += "." + (name if re.fullmatch(r"[\w-]+", name) else literal(name))
    return words.lstrip(".") or "the scenario"
