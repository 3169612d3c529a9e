"""Columns of numbers from a CSV file, each mistake told with its line."""

from collections.abc import Sequence
from pathlib import Path

import numpy as np

from groundroll.errors import InputError

from .tables import Column, Table, refuse


def read_columns(path: Path, columns: Sequence[Column], rows_needed: int) -> Table:
    """The columns of a CSV file: separated by commas or semicolons, lines that begin with # left out.

    A first line of names says which column is which; without one they stand in the order of `columns`.
    InputError with file and line for anything else, and for values out of range.
    """
    text = _read(path, ",".join(column.name for column in columns))
    lines = [(number, _cells(line)) for number, line in enumerate(text.splitlines(), 1) if _counts(line)]
    names = [column.name for column in columns]
    if lines and not _is_number(lines[0][1][0]):
        names = _names(path, *lines.pop(0), columns)
    elif lines:
        names = names[: len(lines[0][1])]
        _all_there(f"{path}:{lines[0][0]}", names, columns)
    if len(lines) < rows_needed:
        refuse(str(path), "rows", "too few lines of numbers", str(len(lines)), f"{rows_needed} or more", "add lines")
    values = np.array([_row(f"{path}:{number}", cells, names) for number, cells in lines])
    numbers = [number for number, _ in lines]
    table = Table(dict(zip(names, values.T, strict=True)), lambda row: f"{path}:{numbers[row]}")
    for column in columns:
        table.must_lie_within(column)
    return table


def _read(path: Path, example: str) -> str:
    try:
        return path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError:
        reason, fix = "not UTF-8 text", "save it as CSV in UTF-8"
    except FileNotFoundError:
        reason, fix = "no such file", "correct its name in the scenario"
    except IsADirectoryError:
        reason, fix = "a folder", "name the file in it"
    except OSError as error:
        reason, fix = f"cannot be read ({error.strerror})", "check its permissions"
    raise InputError(f"{path}: {reason}; allowed a CSV file of columns {example}; {fix}")


def _cells(line: str) -> list[str]:
    return [cell.strip().strip('"') for cell in line.replace(";", ",").split(",")]


def _counts(line: str) -> bool:
    return bool(line.strip()) and not line.lstrip().startswith("#")


def _is_number(word: str) -> bool:
    try:
        float(word)
    except ValueError:
        return False
    return True


def _names(path: Path, line: int, head: list[str], columns: Sequence[Column]) -> list[str]:
    """The names in the header."""
    place, known = f"{path}:{line}", [column.name for column in columns]
    head = [word.lower() for word in head]
    for name in head:
        if name not in known:
            refuse(place, "header", "not a known column", name or "nothing", ", ".join(known), "rename or remove it")
        if head.count(name) > 1:
            refuse(place, "header", "two columns of one name", name, ", ".join(known), "rename or remove one of them")
    _all_there(place, head, columns)
    return head


def _all_there(place: str, names: list[str], columns: Sequence[Column]) -> None:
    for column in columns:
        if not column.optional and column.name not in names:
            allowed = ",".join(c.name for c in columns)
            refuse(place, column.name, "a column is missing", ",".join(names), allowed, f"add a column {column.name}")


def _row(place: str, cells: list[str], names: list[str]) -> list[float]:
    """The numbers of a line."""
    if len(cells) != len(names):
        what = f"not {len(names)} value{'s' if len(names) > 1 else ''}"
        refuse(place, "line", what, ",".join(cells), ",".join(names), "write one value per column")
    for name, cell in zip(names, cells):
        if not _is_number(cell) or not abs(float(cell)) < np.inf:
            refuse(place, name, "not a finite number", cell or "nothing", "a number in SI units, no unit written", "correct it")
    return [float(cell) for cell in cells]
