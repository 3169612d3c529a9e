"""The scanner finds the line of every key that the standard TOML parser finds."""

import tomllib

from groundroll.scenario.lines import line_numbers

TEXT = '''# a comment with [brackets] and = signs
title = "a # no comment" # one
"quoted key" = 'it'
a.b.c = 1
[table] # [not] another
text = """
two = 2
three"""
list = [
  1, # one
  [2,
   3],
  { x = 4, y = "]" },
]
inline = { k = [1, 2], "m" = { n = 'p}' } }
[[items]]
x = 1
[items.inner]
y = 2
[[items]]
x = 3
[[items.deep]]
z = 1979-05-27 07:32:00
[[items.deep]]
empty = []
nothing = {}
'''

EXPECTED = {
    ("title",): 2,
    ("quoted key",): 3,
    ("a", "b", "c"): 4,
    ("table",): 5,
    ("table", "text"): 6,
    ("table", "list", 0): 10,
    ("table", "list", 1): 11,
    ("table", "list", 1, 1): 12,
    ("table", "list", 2, "y"): 13,
    ("table", "inline", "m", "n"): 15,
    ("items", 0): 16,
    ("items", 0, "inner", "y"): 19,
    ("items", 1): 20,
    ("items", 1, "x"): 21,
    ("items", 1, "deep", 0, "z"): 23,
    ("items", 1, "deep", 1): 24,
    ("items", 1, "deep", 1, "nothing"): 26,
}


def paths(value, path=()):
    """Every path in parsed TOML."""
    yield path
    if isinstance(value, dict):
        value = value.items()
    elif isinstance(value, list):
        value = enumerate(value)
    else:
        return
    for name, item in value:
        yield from paths(item, (*path, name))


def test_lines_of_a_rich_text():
    lines = line_numbers(TEXT)
    assert {path: lines[path] for path in EXPECTED} == EXPECTED


def test_every_path_of_the_parser_has_a_line():
    assert set(line_numbers(TEXT)) == set(paths(tomllib.loads(TEXT)))


def test_line_ends_of_another_system():
    assert line_numbers("a = 1\r\n[b]\r\nc = 'x'\r\n")[("b", "c")] == 3
