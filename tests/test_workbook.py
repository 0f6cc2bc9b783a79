from __future__ import annotations

from typing import TYPE_CHECKING

import books
import pytest

from calcbook import codes
from calcbook.errors import CalcbookError, DeclarationError, InputError
from calcbook.workbook import Workbook

if TYPE_CHECKING:
    from collections.abc import Sequence


def cell(book: Workbook, name: str, *titles: str) -> None:
    """Run a cell that declares sections of these titles, each with a line named after it."""
    book.cell = name
    for title in titles:
        with book.section(title) as s:
            s.line(f"{title.lower()}_x = {len(title)}", title)


def titles(book: Workbook) -> list[str]:
    """Return the titles of a workbook's sections, in order."""
    return [s.title for s in book.sections]


@pytest.mark.parametrize(
    ("again", "order"),
    [
        (["B"], ["A", "B", "C", "D"]),
        (["Bb"], ["A", "Bb", "C", "D"]),
        (["New", "B"], ["A", "New", "B", "C", "D"]),
        (["B", "New"], ["A", "B", "New", "C", "D"]),
        (["Y", "Z"], ["A", "Y", "Z", "C", "D"]),
    ],
)
def test_running_a_cell_again_replaces_what_it_declared(
    again: Sequence[str], order: list[str]
) -> None:
    """The new sections stand where the former ones stood, renamed or of another number."""
    book = books.book()
    cell(book, "one", "A")
    cell(book, "two", "B")
    cell(book, "three", "C", "D")
    cell(book, "two", *again)
    assert titles(book) == order
    found = books.items(book.statement())
    assert [i["kind"] for i in found.values()] == ["line"] * len(order)


@pytest.mark.parametrize(
    ("again", "order"),
    [
        (["D", "C"], ["A", "D", "C", "E"]),
        (["C"], ["A", "C", "E"]),
        (["New", "C", "D"], ["A", "New", "C", "D", "E"]),
    ],
)
def test_a_cell_with_several_sections(again: Sequence[str], order: list[str]) -> None:
    """Order follows the cell; what it no longer declares is gone."""
    book = books.book()
    cell(book, "one", "A")
    cell(book, "two", "C", "D")
    cell(book, "three", "E")
    cell(book, "two", *again)
    assert titles(book) == order


def test_a_cell_that_stops_leaves_what_it_declared_before() -> None:
    """An error inside the block keeps the former section in force."""
    book = books.book()
    cell(book, "one", "A")
    book.cell = "one"
    with pytest.raises(ZeroDivisionError), book.section("A") as s:
        s.line(f"y = {1 / 0}", "y")
    assert list(books.items(book.statement())) == ["a_x"]


def test_sections_of_deleted_cells_are_left_over() -> None:
    """A deleted cell's sections are marked until its cell is back or a fresh run."""
    book = books.book()
    cell(book, "one", "A")
    cell(book, "two", "B")
    book.mark_left_over(["one"])
    assert [p["left_over"] for p in book.statement()["parts"]] == [False, True]
    book.mark_left_over(["one", "two"])
    assert [p["left_over"] for p in book.statement()["parts"]] == [False, False]


def test_a_title_declared_again_is_replaced_in_place() -> None:
    """Without cells, the same title takes the place of the former section."""
    book = books.book()
    cell(book, "", "A", "B", "A")
    assert titles(book) == ["A", "B"]


def test_each_section_is_shown_when_its_block_ends() -> None:
    """The screen is told of every complete section, once."""
    book, shown = books.book(), []
    book.on_show = lambda section: shown.append(section.title)
    cell(book, "one", "A", "B")
    assert shown == ["A", "B"]


def _wide() -> Workbook:
    book = books.book()
    with book.section("S") as s:
        s.entry("L", "Length", "2 m", unit="length")
        s.entry("z_e", "Ground", "0 m", unit="length", codes=("ASCE 7-16",))
        s.line("x = 2*L", "x")
        with s.schedule("levels", "Levels", rows=[{"key": "A", "z": "1 m"}]) as t:
            t.entry("z", "z", unit="length")
            t.line("u = 2*z", "u")
    return book


def test_inputs_are_looked_up_strictly() -> None:
    """An unknown name is refused with the nearest; a computed one says that it is computed."""
    book = _wide()
    assert book.input_item("L").meaning == "Length"
    with pytest.raises(InputError, match=r"entries are L$"):
        book.input_item("Q")
    with pytest.raises(InputError, match="computed by this workbook"):
        book.input_item("x")
    with pytest.raises(InputError, match="did you mean 'levels'"):
        book.schedule_item("level")
    assert book.accept_cell("levels", "z", "3 m") == "3 m"
    with pytest.raises(InputError, match="no column 'u' to enter"):
        book.accept_cell("levels", "u", "3 m")
    with pytest.raises(CalcbookError, match="length"):
        book.accept("L", "3 kN")


def test_inputs_that_no_item_takes_are_refused_or_listed() -> None:
    """Unknown names are errors; entries of another code set are kept and listed as not used."""
    book = _wide()
    book.inputs.entries["z_e"] = books.Given("6 m")
    book.refuse_unknown()
    assert book.not_used() == ["z_e"]
    book.inputs.rows["levels"] = [books.GivenRow("A", {"zz": "1 m"})]
    with pytest.raises(InputError, match="did you mean 'z'") as caught:
        book.refuse_unknown()
    assert "row A" in caught.value.where
    book.inputs.rows.clear()
    book.inputs.entries["LL"] = books.Given("1 m")
    with pytest.raises(InputError, match="there is no entry 'LL'"):
        book.refuse_unknown()


def test_a_unit_system_is_one_of_two() -> None:
    """Anything but SI and US is refused."""
    with pytest.raises(DeclarationError, match="no unit system 'metric'"):
        Workbook("w", "W", code=codes.get("NSCP 2015"), system="metric")


def test_an_entry_changed_is_computed_anew() -> None:
    """Evaluating again takes the inputs as they are now, without declaring anything again."""
    book = _wide()
    assert books.item(book, "x")["value"]["si"] == 4.0
    book.inputs.entries["L"] = books.Given("3 m")
    assert books.item(book, "x")["value"]["si"] == 6.0
