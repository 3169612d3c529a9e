"""On which line of a TOML text each key stands."""

import re
from bisect import bisect_right

Path = tuple[str | int, ...]

_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_TEXT = re.compile(
    r'"""(?:\\.|[^\\])*?"""(?!")' r"|'''.*?'''(?!')" r'|"(?:\\.|[^"\\\n])*"' r"|'[^'\n]*'",
    re.DOTALL,
)
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_SCALAR = re.compile(r"[^,\]}#\n]*")


def line_numbers(text: str) -> dict[Path, int]:
    """The line (from 1) of every table, key and list item of a TOML text that has been parsed without error.

    Paths hold keys and, for items of lists, their index from 0; `()` is the text itself, line 1.
    """
    return _Scanner(text).scan()


class _Scanner:
    """A walk through the text that notes where things begin and leaves all judging to the parser."""

    def __init__(self, text: str):
        self.text = text
        self.at = 0
        self.starts = [0] + [match.end() for match in re.finditer("\n", text)]
        self.lines: dict[Path, int] = {(): 1}
        self.last_index: dict[Path, int] = {}

    def scan(self) -> dict[Path, int]:
        table: Path = ()
        while self._skip_blank() < len(self.text):
            start = self.at
            if self.text[self.at] == "[":
                table = self._header()
                self.lines.setdefault(table, self._line(start))
            else:
                self._pair(table)
        return self.lines

    def _line(self, at: int) -> int:
        return bisect_right(self.starts, at)

    def _skip_blank(self) -> int:
        self.at = _BLANK.match(self.text, self.at).end()
        return self.at

    def _take(self, pattern: re.Pattern) -> str:
        match = pattern.match(self.text, self.at)
        self.at = match.end()
        return match.group()

    def _key(self) -> list[str]:
        """A dotted key and the mark behind it ("=", "]")."""
        names = []
        while True:
            self._skip_blank()
            quoted = self.text[self.at] in "\"'"
            names.append(self._take(_TEXT)[1:-1] if quoted else self._take(_BARE_KEY))
            self._skip_blank()
            self.at += 1
            if self.text[self.at - 1] != ".":
                return names

    def _header(self) -> Path:
        listed = self.text.startswith("[[", self.at)
        self.at += 2 if listed else 1
        names = self._key()
        table = self._enter((), names[:-1])
        table += (names[-1],)
        if listed:
            self.at += 1
            self.last_index[table] = self.last_index.get(table, -1) + 1
            self.lines.setdefault(table, self._line(self.at - 1))
        return self._enter((), names)

    def _enter(self, table: Path, names: list[str]) -> Path:
        """The path of a table, a list of tables standing for its last item."""
        for name in names:
            table += (name,)
            if table in self.last_index:
                table += (self.last_index[table],)
        return table

    def _pair(self, table: Path) -> None:
        line = self._line(self.at)
        for name in self._key():
            table += (name,)
            self.lines.setdefault(table, line)
        self._value(table)

    def _value(self, path: Path) -> None:
        self._skip_blank()
        self.lines.setdefault(path, self._line(self.at))
        first = self.text[self.at : self.at + 1]
        if first == "[":
            self._items("]", lambda index: self._value((*path, index)))
        elif first == "{":
            self._items("}", lambda index: self._pair(path))
        else:
            self._take(_TEXT if first in ("'", '"') else _SCALAR)

    def _items(self, end: str, one_item) -> None:
        self.at += 1
        index = 0
        while self._skip_blank() < len(self.text) and self.text[self.at] != end:
            one_item(index)
            index += 1
            self._skip_blank()
            if self.text[self.at] == ",":
                self.at += 1
        self.at += 1
