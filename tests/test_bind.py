from __future__ import annotations

import operator
from typing import TYPE_CHECKING, Any

import books
import pytest

from calcbook.errors import DeclarationError, ReadingError

if TYPE_CHECKING:
    from collections.abc import Callable

    from calcbook.workbook import Workbook


def error(book: Workbook, name: str) -> str:
    """Return the message of an item that could not be accepted."""
    item = books.item(book, name)
    assert item["kind"] == "error"
    return str(item["text"])


@pytest.mark.parametrize(
    ("formula", "message"),
    [
        ("x = (a + ", "closed"),
        ("x = aa + b", "did you mean"),
        ("x = a + L", "length"),
        ("x = a.real", "a dot after a name"),
        ("x = open('f')", "open"),
        ("x = a[0]", "square brackets"),
        ("x = 9**9**9", "power"),
        ("x == a", "'='"),
    ],
)
def test_a_line_that_cannot_be_accepted_stands_in_its_place(formula: str, message: str) -> None:
    """The line becomes an error item with the reason and the text typed; the rest stands."""
    book = books.lines(formula, "y = a + 1", entries={"a": "2", "b": "1", "L:length": "3 m"})
    found = list(books.items(book.statement()).values())
    broken = found[3]
    assert broken["kind"] == "error"
    assert message in broken["text"]
    assert 'trial, section "Trial"' in broken["text"]
    assert found[4]["value"]["si"] == 3.0
    assert book.statement()["counts"]["problems"] == 1


def test_what_needs_a_broken_line_reads_as_an_ordinary_line() -> None:
    """A line or check on a name that was not accepted keeps its kind and says what it lacks."""
    book = books.lines("p = a +", "q = 2*p", "r = q + 1", entries={"a": "1"})
    with book.section("More") as s:
        s.check("q <= 3", "Limit")
        s.line("t", "Cases", cases=[("p > 1", "q"), ("p <= 1", "r")], unit="number")
    statement = book.statement()
    found = books.items(statement)
    assert found["q"]["kind"] == "line"
    assert found["q"]["problem"] == "not available because of p"
    assert (found["q"]["formula"], found["q"]["value"]["text"]) == ("2*p", "")
    assert found["r"]["problem"] == "not available because of q"
    assert found["t"]["problem"] == "not available because of p"
    check = next(i for i in found.values() if i["kind"] == "check")
    assert (check["satisfied"], check["problem"]) == (None, "not available because of q")
    assert found["p"]["used_by"] == ["1.3", "2.2"]
    assert statement["counts"]["undecided"] == 1


def test_a_name_declared_twice_is_refused_with_the_first_place() -> None:
    """The second declaration is the error, and says where the first one stands."""
    book = books.lines("x = 1")
    with book.section("Other") as s:
        s.line("x = 2", "Again")
        s.entry("y", "y", "1")
        with s.schedule("y", "A schedule of the same name"):
            pass
        with s.schedule("rows", "Rows", key="x", rows=[{"key": "1"}]):
            pass
    found = [i for p in book.statement()["parts"] for i in p["items"]]
    texts = [i["text"] for i in found if i["kind"] == "error"]
    assert len(texts) == 3
    assert 'x is already declared in 1.1, section "Trial"' in texts[0]
    assert "y is already declared in 2.2" in texts[1]
    assert "x is already declared in 1.1" in texts[2]


def test_a_line_before_what_it_needs() -> None:
    """A name that is declared further down is not 'unknown': the message says to move it."""
    book = books.book()
    with book.section("S") as s:
        s.line("cap = 2", "cap")
        s.line("x = cap + p", "x")
        s.entry("p", "p", "1")
    text = error(book, "x")
    assert "p is used before it is declared" in text
    caret = text.splitlines()[-2]
    assert caret.index("^") == text.splitlines()[-3].rindex("p")
    assert "move this item below it" in text


@pytest.mark.parametrize("name", ["a b", "1a", "max", "if", "K-zt", "\u03c1"])
def test_names_of_entries_are_checked_like_those_of_lines(name: str) -> None:
    """An entry, choice or schedule with a name formulas cannot use is refused."""
    book = books.book()
    with book.section("S") as s:
        s.entry(name, "Entry", "1")
        s.choice(name, "Choice", ["a"], "a")
        with s.schedule(name, "Schedule"):
            pass
    kinds = [i["kind"] for p in book.statement()["parts"] for i in p["items"]]
    assert kinds == ["error"] * 3


def _two_schedules(formula: str, *, inside: bool, **cases: Any) -> Workbook:
    rows = {n: [(str(k), {f"w{n}": "2"}) for k in range(3)] for n in "ab"}
    book = books.book(rows=rows)
    with book.section("S") as s:
        for name in "ab":
            with s.schedule(name, "Rows") as t:
                t.entry(f"w{name}", "w")
                if inside and name == "b":
                    t.line(formula, "x", **cases)
        if not inside:
            s.line(formula, "x", **cases)
    return book


def test_columns_of_other_rows_do_not_mix() -> None:
    """A column of another schedule is refused even where the number of rows happens to agree."""
    book = _two_schedules("x = wa*2", inside=True)
    item = books.items(book.statement())["b"]
    assert "a column of a, which has other rows" in item["errors"][0]
    assert [c["name"] for c in item["columns"]] == ["wb"]
    summed = books.items(_two_schedules("x = wb + sum(wa)", inside=True).statement())["b"]
    assert books.columns(summed)["x"]["si"] == [8.0] * 3


def test_a_line_outside_a_schedule_gives_one_value() -> None:
    """A column as a single value, or as the condition of a single value, is refused."""
    assert "gives a column" in error(_two_schedules("x = 2*wa", inside=False), "x")
    cases = [("wa > 1", "1"), ("wa <= 1", "2")]
    assert "gives a column" in error(_two_schedules("x", inside=False, cases=cases), "x")


def test_cases_agree_in_kind_and_have_conditions() -> None:
    """Cases of unequal dimension are refused, and a case's condition is a comparison."""
    book = books.lines(entries={"a": "1", "L:length": "2 m"})
    with book.section("C") as s:
        s.line("x", "x", cases=[("a > 1", "L"), ("a <= 1", "a")])
        s.line("y", "y", cases=[("a", "L"), ("a <= 1", "L")])
        s.line("z = L", "z", unit="pressure")
    assert "this case gives" in error(book, "x")
    assert "condition" in error(book, "y")
    assert "the line is to be shown as pressure" in error(book, "z")


def test_conditions_are_checked_against_the_options() -> None:
    """An option that does not exist is found when it is declared, with a near match."""
    book = books.book()
    with book.section("S") as s:
        s.choice("roof", "Roof", ["flat", "gable"], "flat")
        s.line("x = 1", "x", when="roof == 'gabel'")
        s.line("y = 1", "y", when="roof")
        s.check("roof + 1", "Not a comparison")
    assert "did you mean 'gable'?" in error(book, "x")
    assert "condition" in error(book, "y")
    assert books.items(book.statement())["1.4"]["kind"] == "error"


def test_a_schedule_says_what_it_is_asked_for_and_cannot_have() -> None:
    """A total of a column that is not there is an error in the schedule; its columns stand."""
    book = books.book(rows={"r": [("1", {"w": "2"})]})
    with book.section("S") as s:
        with s.schedule("r", "Rows") as t:
            t.entry("w", "w")
            t.line("u = 2*w", "u")
            t.total("uu")
            t.governing("u")
        s.line("x = sum(u)", "x")
    found = books.items(book.statement())
    assert "schedule r has no column 'uu'" in found["r"]["errors"][0]
    assert "did you mean 'u'?" in found["r"]["errors"][0]
    assert found["x"]["value"]["si"] == 4.0


def test_same_rows_need_a_schedule_above() -> None:
    """Sharing the rows of a schedule that is not there is refused; its columns are then missed."""
    book = books.book()
    with book.section("S") as s:
        with s.schedule("q", "Rows", same_rows="levels") as t:
            t.line("u = 1", "u")
        s.line("x = sum(u)", "x")
    assert "there is no schedule 'levels' above this one" in error(book, "q")
    assert books.item(book, "x")["problem"] == "not available because of u"


@pytest.mark.parametrize(
    "declare",
    [
        lambda s: s.check("1 <= 2", "Check", claus="5"),
        lambda s: s.remark("Text", "warning"),
        lambda s: s.entry("x", "x", "1", unit="pressur"),
        lambda s: s.entry("x", "x", "1 m", unit="length", low="1 kN"),
        lambda s: s.carry("x", "design-basis", "x"),
        lambda s: s.clause("velocity presure"),
        lambda s: s.figure("wind-elevatoin", "Picture"),
        lambda s: s.check("1 < 2 < 3", "Chain"),
    ],
)
def test_whatever_cannot_be_accepted_stands_in_its_place(declare: Callable[[Any], object]) -> None:
    """No declaration of a section stops the notebook; each refusal is an item."""
    book = books.book()
    with book.section("S") as s:
        declare(s)
        s.line("y = 1", "y")
    found = books.items(book.statement())
    assert next(iter(found.values()))["kind"] == "error"
    assert found["y"]["value"]["si"] == 1.0


def test_a_clause_that_cannot_be_accepted_keeps_its_symbol() -> None:
    """What uses the symbol of a refused clause says so, and does not call the symbol unknown."""
    book = books.book()
    with book.section("S") as s:
        s.clause("gust effect factor", unit="presure", G="G_f")
        s.line("y = 2*G_f", "y")
    found = books.items(book.statement())
    assert found["G_f"]["kind"] == "error"
    assert found["y"]["problem"] == "not available because of G_f"


def test_a_misspelt_governing_rank_is_refused_at_once() -> None:
    """What a schedule is asked for outside its columns is refused where it is written."""
    book = books.book()
    with (
        pytest.raises(DeclarationError, match="no row is the 'bigest'"),
        book.section("S") as s,
        s.schedule("r", "R") as t,
    ):
        t.governing("w", "bigest")


@pytest.mark.parametrize(
    "read",
    [
        bool, float, int, len, abs, round, list, complex,
        lambda h: h > 1, lambda h: h == 1, lambda h: h != 1, lambda h: h >= 1,
        lambda h: h + 1, lambda h: 2 * h, lambda h: h / 2, lambda h: 2 - h, lambda h: h**2,
        lambda h: -h, lambda h: h[0], lambda h: h % 2, lambda h: h // 2, lambda h: 1 in h,
        operator.index,
    ],
)  # fmt: skip
def test_notebook_code_cannot_read_a_value(read: Callable[[Any], object]) -> None:
    """What a declaration returns is no number: reading it raises and says what to declare."""
    book = books.book()
    with book.section("S") as s:
        handle = s.entry("V", "Speed", "70 m/s", unit="speed")
    with pytest.raises(ReadingError, match="reads the value of V") as caught:
        read(handle)
    assert "when=" in caught.value.hint
    assert isinstance(caught.value, TypeError)
    assert repr(handle) == "<V>"
    assert len({handle}) == 1
