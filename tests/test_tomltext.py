"""TOML read strictly: where each refusal points."""

from __future__ import annotations

import string

import pytest
import tomlkit
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.errors import RecordError
from calcbook.tomltext import TomlText

TEXT = '''# comment with V = { in it
format = 1
"odd key" = """several
lines with [x] = 3
"""
entries.V.value = '70 "m/s"' # V =
[a.b] # [c]
when = 2026-10-02 10:00:00
n = -1.5e3
rows = [
  { key = "x = 1", cells = { z = "1 m" } }, # { key
  [ 1, [2.5, 3] ],
]
[[list]]
x = 1
[[list]]
x = 2
'''


def toml(text: str) -> TomlText:
    """Return a text as a file of records."""
    return TomlText("x.toml", text, RecordError)


@pytest.mark.parametrize(
    ("path", "place"),
    [
        (("format",), "line 2, column 1"),
        (("odd key",), "line 3, column 1"),
        (("entries", "V", "value"), "line 6, column 11"),
        (("a", "b", "when"), "line 8, column 1"),
        (("a", "b", "rows"), "line 10, column 1"),
        (("a", "b", "rows", 0, "cells", "z"), "line 11, column 30"),
        (("a", "b", "rows", 1, 1, 1), "line 12, column 14"),
        (("list", 1, "x"), "line 17, column 1"),
        (("a", "b", "gone", "deep"), "line 7, column 4"),
    ],
)
def test_refusal_names_line_and_column(path: tuple[str | int, ...], place: str) -> None:
    """A refusal points at the key or list element, or at the nearest table around it."""
    toml(TEXT).data()
    assert toml(TEXT).refuse("no", path).where == f"x.toml, {place}"


@pytest.mark.parametrize(
    ("text", "place", "marked"),
    [
        ("a = 1\r\nb = = 2\r\n", "x.toml, line 2, column 5", "    b = = 2\n        ^"),
        ('a = "\u2028"\nb = [1,\n', "x.toml, line 2, column 8", "    b = [1,\n           ^"),
        ("a = 1\na = 2\n", "x.toml, line 2, column 6", "    a = 2\n         ^"),
    ],
)
def test_broken_toml_names_line_and_column(text: str, place: str, marked: str) -> None:
    """Broken TOML is refused with its line, its column and a caret."""
    with pytest.raises(RecordError, match="broken TOML") as caught:
        toml(text).data()
    assert (caught.value.where, caught.value.marked()) == (place, marked)


def test_deep_nesting_is_refused() -> None:
    """Ten thousand brackets are an error of the record, not of Python."""
    with pytest.raises(RecordError, match="nested too deeply"):
        toml("a = " + "[" * 10_000 + "]" * 10_000).data()


def test_text_that_is_not_utf8_is_refused() -> None:
    """Bytes of another encoding are refused with their line; a byte order mark is dropped."""
    assert TomlText.decoded("x.toml", b"\xef\xbb\xbfa = 1", RecordError).data() == {"a": 1}
    with pytest.raises(RecordError, match=r"x\.toml, line 2: this file is not UTF-8"):
        TomlText.decoded("x.toml", b'a = 1\nb = "\xe9"\n', RecordError)


leaves = st.one_of(
    st.integers(-(2**40), 2**40), st.floats(allow_nan=False), st.text(), st.dates(), st.booleans()
)
keys = st.text(string.printable, min_size=1, max_size=6)
trees = st.dictionaries(
    keys,
    st.recursive(leaves, lambda t: st.lists(t, max_size=3) | st.dictionaries(keys, t, max_size=3)),
    max_size=4,
)


def paths(value: object, path: tuple[str | int, ...] = ()) -> list[tuple[str | int, ...]]:
    """Return the paths of every key and list element."""
    members = value.items() if isinstance(value, dict) else enumerate(value)  # type: ignore[arg-type]
    found = []
    for key, member in members:
        found.append((*path, key))
        if isinstance(member, dict | list):
            found += paths(member, (*path, key))
    return found


@settings(max_examples=60, deadline=None)
@given(trees)
def test_every_path_has_its_own_place(tree: dict[str, object]) -> None:
    """In any document the places of all keys are found, and no two are the same."""
    document = tomlkit.document()
    for key, value in tree.items():
        document.append(tomlkit.key(key), tomlkit.item(value))
    written = toml(tomlkit.dumps(document))
    data = written.data()
    every = [path for path in paths(data) if not contains_table_list(data, path)]
    places = {written.refuse("no", path).where for path in every}
    assert "x.toml" not in places
    assert len(places) == len(every)


def contains_table_list(data: object, path: tuple[str | int, ...]) -> bool:
    """Tell whether a path leads through [[name]], where name and element share a place."""
    for step in path:
        if isinstance(data, list) and any(isinstance(item, dict) for item in data):
            return True
        data = data[step]  # type: ignore[index]
    return False
