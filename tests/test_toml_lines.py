"""Lines of keys in TOML texts, against keys that say their own line."""

from __future__ import annotations

import tomllib

import pytest

from behavgen.toml_lines import key_lines, line_of

TEXT = """\
one = 1
[two]
three.four = 4
"quoted key" = 5
[[list]]
seven = 7
  [list.sub]
  nine = 9
[[list]]
seven = 11
[list.sub]
nine = 13
inline = { a = 14, b = { c = 14 } }
[ spaced . out ]   # with a comment
sixteen = [
  17,
]
"""


@pytest.mark.parametrize(
    ("path", "line"),
    [
        (("one",), 1),
        (("two",), 2),
        (("two", "three", "four"), 3),
        (("two", "quoted key"), 4),
        (("list", 0), 5),
        (("list", 0, "seven"), 6),
        (("list", 0, "sub", "nine"), 8),
        (("list", 1), 9),
        (("list", 1, "seven"), 10),
        (("list", 1, "sub", "nine"), 12),
        (("list", 1, "sub", "inline", "b", "c"), 13),
        (("spaced", "out", "sixteen", 0), 15),
        (("list", 1, "missing"), 9),
        (("nowhere",), None),
    ],
)
def test_every_key_has_its_line_and_what_has_none_that_of_its_holder(path, line):
    tomllib.loads(TEXT)  # the text must be what it claims to be
    assert line_of(path, key_lines(TEXT)) == line
