"""Columns of numbers from a CSV file, each mistake told with its line."""

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from pydantic_core import PydanticCustomError

from groundroll.errors import InputError
from groundroll.scenario.literal import plain
from groundroll.scenario.messages import sentence
from groundroll.scenario.parts import Within


@dataclass(frozen=True)
class Column:
    """A column: its name, the range of its values, and whether a file may lack it."""

    name: str
    within: Within | None = None
    optional: bool = False


@dataclass(frozen=True)
class Table:
    """Columns read from `path`, one value per row; `lines` (rows,) are the lines of the file."""

    path: Path
    values: dict[str, np.ndarray]
    lines: np.ndarray

    def __getitem__(self, name: str) -> np.ndarray:
        return self.values[name]

    def get(self, name: str) -> np.ndarray | None:
        return self.values.get(name)

    def refuse(self, row: int, name: str, what: str, allowed: str, fix: str) -> None:
        """Raise InputError about one value."""
        received = plain(float(self.values[name][row]))
        raise InputError(sentence(str(self.path), int(self.lines[row]), name, what, received, allowed, fix))

    def must_rise(self, name: str) -> None:
        """InputError unless each value of the column is greater than the one before."""
        wrong = np.flatnonzero(np.diff(self.values[name]) <= 0.0)
        if wrong.size:
            before = plain(float(self.values[name][wrong[0]]))
            fix = f"put the lines in order of {name}, each {name} once"
            self.refuse(wrong[0] + 1, name, f"{name} does not increase", f"above {before} m, that of the line before", fix)


def read_text(path: Path, example: str) -> str:
    """The text of a file; InputError if it cannot be read as UTF-8."""
    try:
        return path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError:
        reason = "not UTF-8 text"
    except FileNotFoundError:
        reason = "no such file"
    except IsADirectoryError:
        reason = "a folder"
    except OSError as error:
        reason = f"cannot be read ({error.strerror})"
    raise InputError(f"{path}: {reason}; allowed a CSV file with columns {example}; correct the file's name or save it so")


def read_columns(path: Path, columns: Sequence[Column], rows_needed: int = 2) -> Table:
    """The columns of a CSV file: separated by commas or semicolons, lines that begin with # left out.

    A first line of names says which column is which; without one they stand in the order of `columns`.
    InputError with file and line for anything else, and for values out of range.
    """
    example = ",".join(column.name for column in columns)
    lines = [(n, _cells(line)) for n, line in enumerate(read_text(path, example).splitlines(), 1) if _counts(line)]
    names = [column.name for column in columns]
    if lines and not _is_number(lines[0][1][0]):
        number, head = lines.pop(0)
        names = _names(path, number, [word.strip('"').lower() for word in head], columns)
    elif lines:
        names = names[: len(lines[0][1])]
        _all_there(path, lines[0][0], names, columns)
    if len(lines) < rows_needed:
        raise InputError(sentence(str(path), 1, "rows", "too few", str(len(lines)), f"{rows_needed} rows or more", "add rows"))
    values = np.array([_row(path, number, cells, names) for number, cells in lines])
    table = Table(path, dict(zip(names, values.T, strict=True)), np.array([number for number, _ in lines]))
    for column in columns:
        _in_range(table, column)
    return table


def _cells(line: str) -> list[str]:
    return [cell.strip() for cell in line.replace(";", ",").split(",")]


def _counts(line: str) -> bool:
    return bool(line.strip()) and not line.lstrip().startswith("#")


def _is_number(word: str) -> bool:
    try:
        float(word)
    except ValueError:
        return False
    return True


def _names(path: Path, line: int, head: list[str], columns: Sequence[Column]) -> list[str]:
    known = [column.name for column in columns]
    for name in head:
        if name not in known or head.count(name) > 1:
            what = "two columns of this name" if name in known else "not a known column"
            raise InputError(sentence(str(path), line, "header", what, name or "nothing", ", ".join(known), "rename or remove it"))
    _all_there(path, line, head, columns)
    return head


def _all_there(path: Path, line: int, names: list[str], columns: Sequence[Column]) -> None:
    for column in columns:
        if not column.optional and column.name not in names:
            received, allowed = ",".join(names), ",".join(c.name for c in columns)
            fix = f"add a column {column.name}"
            raise InputError(sentence(str(path), line, column.name, "a column is missing", received, allowed, fix))


def _row(path: Path, line: int, cells: list[str], names: list[str]) -> list[float]:
    if len(cells) != len(names):
        what = f"not {len(names)} values"
        raise InputError(sentence(str(path), line, "row", what, ",".join(cells), ",".join(names), "write one value per column"))
    try:
        row = [float(cell) for cell in cells]
    except ValueError:
        row = []
    if not row or not all(abs(value) < np.inf for value in row):
        name, cell = next((n, c) for n, c in zip(names, cells) if not _is_number(c) or not abs(float(c)) < np.inf)
        raise InputError(sentence(str(path), line, name, "not a finite number", cell or "nothing", "a number in SI", "correct it"))
    return row


def _in_range(table: Table, column: Column) -> None:
    within, values = column.within, table.get(column.name)
    if within is None or values is None:
        return
    low = within.at_least if within.at_least is not None else within.above
    for row in np.flatnonzero((values < low) | (values > within.at_most))[:1]:
        try:
            within.check(float(values[row]))
        except PydanticCustomError as error:
            problem = error.context["problems"][0]
            fix = problem.fix.replace("write {key} =", "write") or "correct it"
            table.refuse(row, column.name, problem.what, problem.allowed, fix)
