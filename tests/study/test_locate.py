"""The line of each key of a TOML text."""

from __future__ import annotations

import json
import tomllib
from functools import partial

from hypothesis import given
from hypothesis import strategies as st

from reanalysis.study.locate import KeyPath, line_of, locate_keys

TEXT = '''# comment with [brackets] and = signs
title = "a # no comment"   # comment
"odd key".'x.y' = 1

[data]
note = """
[not.a.header]
fake = 1 \\"""
"""
levels = { liner = ["none", "film"], "c d" = [
  "u", # ]
  "v",
] }

[[prior]]
name = "one"
terms."liner[film]" = { dist = "normal", sd = 1.0 }
[prior.terms.x]
dist = 'flat'

[[prior]]
name = \'\'\'two\'\'\'
[prior.auxiliary]
sigma.dist = "half_flat"
date = 2026-11-04 10:00:00
'''


def test_every_kind_of_key_has_its_line() -> None:
    """Headers, dotted and quoted keys, elements of arrays and keys of inline tables are all found."""
    tomllib.loads(TEXT)
    lines = locate_keys(TEXT)

    assert lines[("title",)] == 2
    assert lines[("odd key", "x.y")] == 3
    assert lines[("data",)] == 5
    assert lines[("data", "note")] == 6
    assert lines[("data", "levels", "liner", 1)] == 10
    assert lines[("data", "levels", "c d", 0)] == 11
    assert lines[("data", "levels", "c d", 1)] == 12
    assert lines[("prior", 0)] == 15
    assert lines[("prior", 0, "terms", "liner[film]", "sd")] == 17
    assert lines[("prior", 0, "terms", "x")] == 18
    assert lines[("prior", 0, "terms", "x", "dist")] == 19
    assert lines[("prior", 1)] == 21
    assert lines[("prior", 1, "name")] == 22
    assert lines[("prior", 1, "auxiliary", "sigma", "dist")] == 24
    assert lines[("prior", 1, "auxiliary", "date")] == 25
    assert ("data", "fake") not in lines


def test_a_missing_key_gets_the_line_of_its_section() -> None:
    """Where a key is not in the file, the closest section around it is named."""
    lines = locate_keys("[a]\nx = 1\n\n[a.b]\ny = 2\n")

    assert line_of(lines, ("a", "b", "z")) == 4
    assert line_of(lines, ("a", "z")) == 1
    assert line_of(lines, ("z",)) is None


def test_windows_line_ends_count_once() -> None:
    """A carriage return before the line end makes no line of its own."""
    assert locate_keys("a = 1\r\n\r\nb = 2\r\n")[("b",)] == 3


def test_the_header_of_a_section_wins_over_a_child_above_it() -> None:
    """A section that first shows up as the parent of another has the line of its own header."""
    assert locate_keys("[a.b]\nx = 1\n[a]\ny = 2\n")[("a",)] == 3


def test_quotes_before_the_end_of_a_long_text() -> None:
    """Up to two quotation marks may stand right before the three closing ones."""
    text = 'a = """x"""""\nb = \'\'\'y\'\'\'\'\nc = ""\nd = """"""\ne = 1\n'

    assert tomllib.loads(text)["a"] == 'x""'
    assert [locate_keys(text)[(key,)] for key in "abcde"] == [1, 2, 3, 4, 5]


KEYS = st.text(min_size=1, max_size=8).filter(str.isprintable) | st.sampled_from(
    ["a", "b-1", "c d", "[x]", "a.b", '"']
)
SCALARS = (
    st.integers(-999, 999).map(str)
    | st.sampled_from(
        ["true", "1.5e3", "2026-11-04", "'[=#'", '"""\n[a]\nb = 1\n"""', "'''\n'x' ] }\n'''", '""']
    )
    | KEYS.map(partial(json.dumps, ensure_ascii=False))
)
ARRAYS = st.lists(SCALARS, max_size=4).map(
    lambda items: "[" + "".join(f"\n  {item}, # ]" for item in items) + "\n]"
)
VALUES = SCALARS | ARRAYS
SECTIONS = st.lists(
    st.tuples(
        KEYS, st.booleans(), st.lists(st.tuples(KEYS, VALUES), max_size=4, unique_by=lambda pair: pair[0])
    ),
    max_size=5,
    unique_by=lambda section: section[0],
)


@given(SECTIONS)
def test_lines_are_right_in_any_file(sections: list[tuple[str, bool, list[tuple[str, str]]]]) -> None:
    """Each key is found on the line on which it was written, whatever stands around it."""
    text, expected = "", dict[KeyPath, int]()
    for name, many, items in sections:
        header = json.dumps(name, ensure_ascii=False)
        path: KeyPath = (name, 0) if many else (name,)
        expected[path] = text.count("\n") + 1
        text += f"[[{header}]]\n" if many else f"[{header}] # =\n"
        for key, value in items:
            expected[(*path, key)] = text.count("\n") + 1
            text += f"{json.dumps(key, ensure_ascii=False)} = {value}\n\n"
    tomllib.loads(text)

    lines = locate_keys(text)

    assert {path: lines[path] for path in expected} == expected
