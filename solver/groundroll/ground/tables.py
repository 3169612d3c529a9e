"""Columns of numbers read from a file, which know where each value stands, and the refusals about them."""

from collections.abc import Callable
from dataclasses import dataclass
from typing import NoReturn

import numpy as np
from pydantic_core import PydanticCustomError

from groundroll.errors import InputError
from groundroll.scenario.literal import plain
from groundroll.scenario.parts import Within


def refuse(place: str, name: str, what: str, received: str, allowed: str, fix: str) -> NoReturn:
    """Raise InputError: `place: name: what (received …); allowed …; fix`."""
    raise InputError(f"{place}: {name}: {what} (received {received}); allowed {allowed}; {fix}")


@dataclass(frozen=True)
class Column:
    """A column: its name, the range of its values, and whether a file may lack it."""

    name: str
    within: Within | None = None
    optional: bool = False


@dataclass(frozen=True)
class Table:
    """Columns (rows,) by name; `place(row)` says where in the file a row stands."""

    values: dict[str, np.ndarray]
    place: Callable[[int], str]

    def __getitem__(self, name: str) -> np.ndarray:
        return self.values[name]

    def get(self, name: str) -> np.ndarray | None:
        return self.values.get(name)

    def refuse(self, row: int, name: str, what: str, allowed: str, fix: str) -> NoReturn:
        """Raise InputError about one value."""
        refuse(self.place(row), name, what, plain(float(self.values[name][row])), allowed, fix)

    def must_rise(self, name: str) -> None:
        """InputError unless each value of the column is greater than the one before."""
        for row in np.flatnonzero(np.diff(self.values[name]) <= 0.0)[:1]:
            allowed = f"above {plain(float(self.values[name][row]))} m, that of the line before"
            fix = f"put the lines in order of {name}, each {name} once"
            self.refuse(row + 1, name, f"{name} does not increase", allowed, fix)

    def must_lie_within(self, column: Column) -> None:
        """InputError unless all values of the column lie in its range."""
        within, values = column.within, self.get(column.name)
        if within is None or values is None:
            return
        for row in np.flatnonzero((values < within.at_least) | (values > within.at_most))[:1]:
            try:
                within.check(float(values[row]))
            except PydanticCustomError as error:
                problem = error.context["problems"][0]
                self.refuse(row, column.name, problem.what, problem.allowed, fix_of(problem.fix))


def fix_of(words: str) -> str:
    """The fix for a key of the scenario, said of a value in a file."""
    return words.replace("{key} = ", "") or "correct it"
