"""What every part of the schema is made of: the base class, refusals, ranges, rows of numbers, names."""

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, model_validator
from pydantic_core import PydanticCustomError, core_schema

from .literal import literal, plain


@dataclass(frozen=True)
class Problem:
    """One reason to refuse a scenario; `{key}` in `fix` stands for the name of the key.

    `path` leads from the part that found the problem to the key that it is about.
    An empty `allowed` or `fix` is filled in from the schema; so is what was received.
    """

    what: str
    allowed: str = ""
    fix: str = ""
    path: tuple[str | int, ...] = ()


def refuse(problems: Iterable[Problem]) -> None:
    """Raise one validation error that carries all the problems, if there are any."""
    problems = tuple(problems)
    if problems:
        words = "; ".join(problem.what for problem in problems)
        raise PydanticCustomError("refused", "{words}", {"words": words, "problems": problems})


def _tuples(value: Any) -> Any:
    """The same value with each list, however deep, turned into a tuple."""
    if isinstance(value, (list, tuple)):
        return tuple(_tuples(item) for item in value)
    if isinstance(value, dict):
        return {key: _tuples(item) for key, item in value.items()}
    return value


class Part(BaseModel):
    """A table of the scenario: frozen, strict about types, closed to unknown keys."""

    model_config = ConfigDict(
        extra="forbid",
        frozen=True,
        strict=True,
        allow_inf_nan=False,
        use_attribute_docstrings=True,
    )

    @model_validator(mode="before")
    @classmethod
    def _lists_become_tuples(cls, value: Any) -> Any:
        return _tuples(value)

    @model_validator(mode="after")
    def _fields_agree(self):
        refuse(self.find_problems())
        return self

    def find_problems(self) -> Iterator[Problem]:
        """Checks between keys of this part; they run only when each key has passed alone."""
        yield from ()


@dataclass(frozen=True)
class Suspicion:
    """A value from `least` to `most` is taken for a slip: `what` asks, and the value times `factor` is offered."""

    least: float
    most: float
    what: str
    factor: float | None = None

    def fix(self, value: float) -> str:
        return f"write {{key}} = {float(f'{value * self.factor:.12g}')!r}" if self.factor else ""


@dataclass(frozen=True)
class Within:
    """Annotation of a number: its unit, its range and the slips that are recognised outside the range."""

    unit: str = ""
    above: float | None = None
    at_least: float | None = None
    at_most: float | None = None
    suspicions: tuple[Suspicion, ...] = ()

    def words(self) -> str:
        unit = f" {self.unit}" if self.unit else ""
        low = self.above if self.above is not None else self.at_least
        if low is None:
            return f"at most {plain(self.at_most)}{unit}"
        if self.at_most is None:
            return f"above {plain(low)}{unit}" if self.above is not None else f"{plain(low)}{unit} or more"
        if self.above is not None:
            return f"above {plain(low)}, up to {plain(self.at_most)}{unit}"
        return f"{plain(low)} to {plain(self.at_most)}{unit}"

    def check(self, value: float) -> float:
        too_small = (self.above is not None and value <= self.above) or (
            self.at_least is not None and value < self.at_least
        )
        too_large = self.at_most is not None and value > self.at_most
        if too_small or too_large:
            refuse([self._problem(value, "too small" if too_small else "too large")])
        return value

    def _problem(self, value: float, plain_reason: str) -> Problem:
        for suspicion in self.suspicions:
            if suspicion.least <= value <= suspicion.most:
                return Problem(suspicion.what, self.words(), suspicion.fix(value))
        return Problem(plain_reason, self.words())

    def __get_pydantic_core_schema__(self, source, handler):
        return core_schema.no_info_after_validator_function(self.check, handler(source))

    def __get_pydantic_json_schema__(self, schema, handler):
        bounds = {"exclusiveMinimum": self.above, "minimum": self.at_least, "maximum": self.at_most}
        json_schema = handler(schema)
        json_schema.update({word: bound for word, bound in bounds.items() if bound is not None})
        if self.unit:
            json_schema["x-unit"] = self.unit
        return json_schema


@dataclass(frozen=True)
class Row:
    """Annotation of a short row of numbers of fixed length, such as `[x, depth]`."""

    names: tuple[str, ...]
    unit: str

    def words(self) -> str:
        return f"[{', '.join(self.names)}] in {self.unit}"

    def check(self, value: Any) -> Any:
        whole = isinstance(value, tuple) and len(value) == len(self.names)
        if not whole or not all(type(number) in (int, float) for number in value):
            refuse([Problem(f"not a row of {len(self.names)} numbers", self.words())])
        return value

    def __get_pydantic_core_schema__(self, source, handler):
        return core_schema.no_info_before_validator_function(self.check, handler(source))


@dataclass(frozen=True)
class NameRule:
    """Annotation of a name that must serve as an HDF5 group and as a file name on any system."""

    longest: int = 64

    def words(self) -> str:
        return f'1 to {self.longest} of the letters a to z, digits, "-", "_" and ".", beginning with a letter or a digit'

    def check(self, value: str) -> str:
        if not re.fullmatch(r"[A-Za-z0-9][A-Za-z0-9_.-]*", value) or len(value) > self.longest or value[-1] == ".":
            better = re.sub(r"[^A-Za-z0-9_.-]+", "_", value).strip("_.-")[: self.longest].rstrip("_.-")
            fix = f"write {{key}} = {literal(better)}" if better else ""
            refuse([Problem("not usable as the name of a group and of files", self.words(), fix)])
        return value

    def __get_pydantic_core_schema__(self, source, handler):
        return core_schema.no_info_after_validator_function(self.check, handler(source))


@dataclass(frozen=True)
class FileRule:
    """Annotation of the name of a file, taken from the folder of the scenario file."""

    def words(self) -> str:
        return "the name of a file, seen from the folder of the scenario"

    def check(self, value: str) -> str:
        if not value.strip() or "\0" in value:
            refuse([Problem("not the name of a file", self.words())])
        return value

    def __get_pydantic_core_schema__(self, source, handler):
        return core_schema.no_info_after_validator_function(self.check, handler(source))


def above_ground(path: tuple[str | int, ...], depth: float) -> Problem:
    """A depth measured from the surface that is negative."""
    return Problem(
        "above the ground surface; depth grows downward",
        "0 m or more (negative only with depth_from = \"datum\" under a hill)",
        f"write a depth of {-depth!r}",
        path,
    )


def rising(points: tuple[tuple[float, float], ...], key: str) -> Iterator[Problem]:
    """Lines by points need two points or more, x increasing."""
    if len(points) < 2:
        yield Problem("too few points for a line", "two or more points, x increasing", path=(key,))
    for index in range(1, len(points)):
        if points[index][0] <= points[index - 1][0]:
            yield Problem(
                "x does not increase",
                f"x above {points[index - 1][0]!r} m, that of the point before",
                "put the points in order of x, each x once",
                (key, index),
            )


DepthFrom = Literal["surface", "datum"]
Name = Annotated[str, NameRule()]
FileName = Annotated[str, FileRule()]
Position = Annotated[tuple[float, float], Row(("x", "depth"), "m")]
Length = Annotated[float, Within("m", above=0.0, at_most=1e6)]
Along = Annotated[float, Within("m", at_least=0.0, at_most=1e6)]
Frequency = Annotated[
    float,
    Within(
        "Hz",
        at_least=1e-3,
        at_most=1e5,
        suspicions=(Suspicion(1e5, 1e12, "hertz? this looks like a number in another unit"),),
    ),
]
