"""Rows that a shape gives while a choice says so, and typed rows otherwise."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import books
import pytest

from calcbook.cases import evaluate
from calcbook.commands.common import read_rows
from calcbook.errors import InputError
from calcbook.live.gridrow import editable
from calcbook.standing import unconfirmed_rows
from calcbook.statement import fingerprint

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

    from calcbook.workbook import Workbook

TAKES = {"form": "form", "span": "l", "height": "h", "low end": "d", "panels": "n", "web": "web"}
GIVES = {"x": "x", "y": "y"}
TYPED = {"joints": [("P", {"x": "1 m", "y": "2 m"}), ("Q", {"x": "5 m", "y": "2 m"})]}


def joints(
    entries: Mapping[str, str] | None = None, *, typed: bool = False, **shape: Any
) -> Workbook:
    """Return a workbook with the joints of a gable truss of 8 m, or those typed."""
    book = books.book(entries, TYPED if typed else None)
    with book.section("Truss") as s:
        s.choice("by", "Joints", ["shape", "tables"], "shape")
        s.choice("form", "Form", ["gable", "flat"], "gable")
        s.choice("web", "Web", ["Pratt", "Howe"], "Pratt")
        s.entry("l", "Span", "8 m", unit="length", low="0.1 m")
        s.entry("h", "Height", "3 m", unit="length")
        s.entry("d", "Heel", "0 m", unit="length")
        s.entry("n", "Panels", "1")
        s.line("l_2 = 2*l", "Twice")
        rows = [{"key": "A", "x": "0 m", "y": "0 m"}]
        with s.schedule("joints", "Joints", key="joint", rows=rows) as t:
            t.entry("x", "Right", unit="length")
            t.entry("y", "Up", unit="length")
            told = {"when": ("by", "shape"), "takes": TAKES, "gives": GIVES} | shape
            t.shaped(told.pop("by", "truss joints"), **told)
            t.line("r = sqrt(x**2 + y**2)", "From the origin", unit="length")
        s.line("r_m = max(r)", "Farthest", result=True)
    return book


def schedule(book: Workbook) -> dict[str, Any]:
    """Return the schedule of joints of the evaluated workbook."""
    items = book.statement()["parts"][0]["items"]
    return next(i for i in items if i["name"] == "joints" or i["kind"] == "error")


def texts(found: Mapping[str, Any], name: str) -> list[str]:
    """Return a column as printed."""
    return next(list(c["texts"]) for c in found["columns"] if c["name"] == name)


def test_a_shape_gives_keys_and_columns_and_lines_compute_on_them() -> None:
    """A king post truss of 8 m by 3 m: three joints below, one above; the lines follow."""
    book = joints()
    found = schedule(book)
    assert found["rows"] == ["L0", "L1", "L2", "U1"]
    assert texts(found, "x") == ["0", "4", "8", "4"]
    assert texts(found, "y") == ["0", "0", "0", "3"]
    assert book.results.values["r_m"] == pytest.approx(8.0)


def test_such_rows_are_not_typed_and_not_confirmed() -> None:
    """The statement says what they come from; nobody edits or confirms them."""
    found = schedule(joints())
    assert found["shaped"] == "rows from the shape, by form, l, h, d, n, web"
    assert found["fixed"]
    assert not editable(found)
    assert unconfirmed_rows(found) == []
    assert {c["role"] for c in found["columns"]} == {"carried", "computed"}


def test_the_choice_brings_typed_rows_back() -> None:
    """Rows on record stand while the shape does not, and are editable again."""
    found = schedule(joints({"by": "tables"}, typed=True))
    assert found["rows"] == ["P", "Q"]
    assert found["shaped"] == ""
    assert editable(found)
    assert schedule(joints(typed=True))["rows"] == ["L0", "L1", "L2", "U1"]
    assert schedule(joints({"by": "tables"}))["rows"] == ["A"]


def test_rows_follow_what_the_shape_takes_and_so_does_the_fingerprint() -> None:
    """Another panel count gives other rows; the fingerprint changes with it, and not else."""
    book, other = joints(), joints({"n": "3"})
    assert len(schedule(other)["rows"]) == 12
    assert schedule(book)["rows"] != schedule(other)["rows"]
    again = joints()
    schedule(again)
    assert fingerprint(book) != fingerprint(other)
    assert fingerprint(book) == fingerprint(again)


@pytest.mark.parametrize(("entries", "said"), [
    ({"n": "1.5"}, "the truss has 1.5 panels"),
    ({"d": "4 m"}, "The depth at the heel is 4"),
    ({"l": "0 m"}, "not available because of l"),
])  # fmt: skip
def test_a_shape_that_cannot_be_is_said_once(entries: dict[str, str], said: str) -> None:
    """The rows say why there are none; what depends on them is not available because of them."""
    book = joints(entries)
    assert said in schedule(book)["problem"]
    items = book.statement()["parts"][0]["items"]
    assert next(i for i in items if i["name"] == "r_m")["problem"].startswith("not available")


@pytest.mark.parametrize(("shape", "said"), [
    ({"by": "truss joint"}, "did you mean 'truss joints'"),
    ({"takes": {k: v for k, v in TAKES.items() if k != "web"}}, "'web', which lacks"),
    ({"takes": TAKES | {"spam": "l"}}, "the shape truss joints takes no 'spam'"),
    ({"takes": TAKES | {"span": "l_2"}}, "l_2 is none"),
    ({"takes": TAKES | {"span": "web"}}, "web is a choice"),
    ({"when": ("by", "shapes")}, "by has no option 'shapes'"),
    ({"when": ("form", "domed")}, "form has no option 'domed'"),
    ({"gives": GIVES | {"z": "y"}}, "joints has no column 'z' to enter"),
    ({"gives": {"x": "x", "y": "up"}}, "the shape truss joints gives no 'up'"),
])  # fmt: skip
def test_a_shape_wrongly_declared_is_an_error_in_its_place(
    shape: dict[str, Any], said: str
) -> None:
    """What a shape takes and gives is checked as the section is declared."""
    found = schedule(joints(**shape))
    assert found["kind"] == "error"
    assert said in found["text"]


def test_rows_from_a_file_are_refused_while_the_shape_stands(tmp_path: Path) -> None:
    """Nothing typed is ignored silently: the message says what to choose."""
    file = tmp_path / "joints.csv"
    file.write_text("key,x,y\nA,0 m,0 m\n")
    book = joints()
    schedule(book)
    with pytest.raises(InputError, match=r"come from the shape while by is 'shape'"):
        read_rows([f"joints={file}"], book)
    other = joints({"by": "tables"})
    schedule(other)
    assert [row.key for row in read_rows([f"joints={file}"], other)["joints"]] == ["A"]


def test_many_cases_share_their_rows() -> None:
    """What rows depend on cannot vary by case; anything else can."""
    book = joints()
    schedule(book)
    with pytest.raises(InputError, match="the rows of joints depend on l"):
        evaluate(book, {"l": ["8 m", "9 m"]})
    with pytest.raises(InputError, match="depend on by"):
        evaluate(book, {"by": ["shape", "tables"]})
    tables = joints({"by": "tables"}, typed=True)
    schedule(tables)
    assert evaluate(tables, {"l": ["8 m", "9 m"]})["r_m"] == pytest.approx([29**0.5] * 2)
