"""The schema as a list of keys, for messages, documents and templates."""

import types
from dataclasses import dataclass
from functools import cache
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel
from pydantic.fields import FieldInfo
from pydantic_core import PydanticUndefined

from .literal import literal
from .parts import FileRule, NameRule, Row, Within

LEFT_OUT = "left out: "


@dataclass(frozen=True)
class Key:
    """One key of the scenario file.

    `written` is the path as it stands in the file; `path` is the same but where a list mixes tables of
    several kinds: there the kind follows the list's key, as in ("source", "force", "x"), so that each
    kind has keys of its own.
    """

    path: tuple[str, ...]
    written: tuple[str, ...]
    is_table: bool
    is_list: bool
    allowed: str
    required: bool
    default: Any
    example: Any
    meaning: str
    without: str

    @property
    def name(self) -> str:
        return self.path[-1]


@dataclass(frozen=True)
class Table:
    """One table of the scenario file and the keys in it."""

    path: tuple[str, ...]
    written: tuple[str, ...]
    is_list: bool
    keys: tuple[Key, ...]
    chooser: str = ""

    @property
    def header(self) -> str:
        """The line that begins the table; empty for the top of the file."""
        name = ".".join(self.written)
        return f"[[{name}]]" if self.is_list else f"[{name}]" if name else ""


@dataclass(frozen=True)
class _Shape:
    """What an annotation comes down to."""

    core: Any
    marks: tuple[Any, ...]
    is_list: bool


def _unfold(annotation: Any, marks: tuple[Any, ...] = (), is_list: bool = False) -> _Shape:
    origin = get_origin(annotation)
    if origin is Annotated:
        core, *more = get_args(annotation)
        return _unfold(core, (*marks, *more), is_list)
    if origin in (Union, types.UnionType):
        choices = [choice for choice in get_args(annotation) if choice is not type(None)]
        if len(choices) == 1:
            return _unfold(choices[0], marks, is_list)
    if origin is tuple and Ellipsis in get_args(annotation):
        return _unfold(get_args(annotation)[0], marks, True)
    return _Shape(annotation, marks, is_list)


def _is_model(core: Any) -> bool:
    return isinstance(core, type) and issubclass(core, BaseModel)


def _choices(shape: _Shape) -> tuple[str, dict[str, type[BaseModel]]] | None:
    """The key that tells the kinds of table apart, and the kinds; None for anything else."""
    for mark in shape.marks:
        if isinstance(mark, FieldInfo) and mark.discriminator:
            chooser = mark.discriminator
            models = get_args(shape.core)
            return chooser, {get_args(model.model_fields[chooser].annotation)[0]: model for model in models}
    return None


def _words(shape: _Shape) -> str:
    """Allowed values in words."""
    words = {str: "text", bool: "true or false"}.get(shape.core, "")
    if get_origin(shape.core) is Literal:
        words = ", ".join(literal(word) for word in get_args(shape.core))
    for mark in shape.marks:
        if isinstance(mark, (Within, Row, NameRule, FileRule)):
            words = mark.words()
    if shape.core is int:
        words = f"a whole number, {words}"
    return f"a list of {words}" if shape.is_list else words


def _default(info: FieldInfo) -> Any:
    return None if info.default is PydanticUndefined or isinstance(info.default, BaseModel) else info.default


def _key(path: tuple[str, ...], written: tuple[str, ...], info: FieldInfo, shape: _Shape) -> Key:
    is_table = _is_model(shape.core) or _choices(shape) is not None
    allowed = _words(shape)
    meaning, _, without = (info.description or "").partition("; " + LEFT_OUT)
    if is_table:
        name = ".".join(written)
        allowed = f"one or more tables [[{name}]]" if shape.is_list else f"a table [{name}]"
    default = _default(info)
    return Key(
        path=path,
        written=written,
        is_table=is_table,
        is_list=shape.is_list,
        allowed=allowed,
        required=info.is_required(),
        default=default,
        example=info.examples[0] if info.examples else default,
        meaning=meaning,
        without=without,
    )


def _walk(model: type[BaseModel], path=(), written=(), is_list=False, chooser="") -> list[Table]:
    own, inner = [], []
    for name, info in model.model_fields.items():
        key = info.alias or name
        shape = _unfold(info.annotation, tuple(info.metadata))
        own.append(_key((*path, key), (*written, key), info, shape))
        choices = _choices(shape)
        if choices:
            for kind, kind_model in choices[1].items():
                inner += _walk(kind_model, (*path, key, kind), (*written, key), True, choices[0])
        elif _is_model(shape.core):
            inner += _walk(shape.core, (*path, key), (*written, key), shape.is_list)
    return [Table(path, written, is_list, tuple(own), chooser), *inner]


@cache
def tables() -> dict[tuple[str, ...], Table]:
    """Every table of the scenario file by its path, in the order of the schema."""
    from .schema import Scenario

    return {table.path: table for table in _walk(Scenario)}


@cache
def keys() -> dict[tuple[str, ...], Key]:
    """Every key of the scenario file by its path, in the order of the schema."""
    return {key.path: key for table in tables().values() for key in table.keys}


@cache
def mixed_lists() -> dict[tuple[str, ...], str]:
    """The lists whose tables are of several kinds, with the key that tells the kind."""
    return {table.path[:-1]: table.chooser for table in tables().values() if table.chooser}


def kinds(table: Table) -> list[str]:
    """All the kinds of table in the mixed list that a table belongs to; empty for other tables."""
    if not table.chooser:
        return []
    return [path[-1] for path, other in tables().items() if other.chooser and path[:-1] == table.path[:-1]]
