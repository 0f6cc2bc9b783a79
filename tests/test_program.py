from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import books
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook import cases

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.program import Results
    from calcbook.workbook import Workbook


def evaluated(book: Workbook) -> Workbook:
    """Return a workbook after evaluation."""
    book.evaluate()
    return book


def problem(book: Workbook, name: str) -> str:
    """Return why a named item has no value."""
    return str(books.item(book, name)["problem"])


# --- what has no value --------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("formula", "reason"),
    [
        ("x = 1/a", "a division by zero"),
        ("x = sqrt(a - 1)", "a function outside its range"),
        ("x = ln(a)", "a function outside its range"),
        ("x = asin(a + 2)/'1 rad'", "a function outside its range"),
        ("x = exp(1000 + a)", "the number is too large"),
        ("x = (a - 8)**0.5", "a function outside its range"),
        ("x = (1e300 + a)*1e300", "no finite value"),
    ],
)
def test_what_cannot_be_computed_says_so_and_stops_nothing_else(formula: str, reason: str) -> None:
    """The line says why, what depends on it names it, and the rest is computed."""
    found = books.items(
        books.lines(formula, "y = 2*x", "z = y + 1", "w = 3 + a", entries={"a": "0"}).statement()
    )
    assert reason in found["x"]["problem"]
    assert found["x"]["value"]["si"] is None
    assert found["x"]["value"]["text"] == ""
    assert found["y"]["problem"] == "not available because of x"
    assert found["z"]["problem"] == "not available because of y"
    assert (found["w"]["problem"], found["w"]["value"]["si"]) == (None, 3.0)


def test_a_missing_entry_is_named_by_what_needs_it() -> None:
    """An entry without a value says so; a line that needs it names it, another stands."""
    found = books.items(
        books.lines("x = 2*a", "y = b + 1", entries={"a": "", "b": "1"}).statement()
    )
    assert found["a"]["problem"] == "has no value yet"
    assert found["x"]["problem"] == "not available because of a"
    assert found["y"]["value"]["si"] == 2.0


def _levels(cells: Mapping[str, str]) -> Workbook:
    book = books.book(rows={"levels": [(k, {"z": c}) for k, c in cells.items()]})
    with book.section("Levels") as s:
        with s.schedule("levels", "Levels") as t:
            t.entry("z", "Elevation", unit="length", low="0 m")
            t.line("q = '1 m'/z", "Inverse")
            t.line("u = where(z > '3 m', 1, 2)", "Zone")
            t.line("k = 5", "Constant")
            t.total("q")
            t.governing("q")
        s.line("total = sum(q)", "Sum")
        s.line("zones = sum(u)", "Sum of zones")
        s.line("alone = sum(k)", "Sum of constants")
        s.check("max(z) <= '20 m'", "Height")
    return book


def test_a_bad_row_is_named_and_the_others_are_computed() -> None:
    """A refused cell: its row says why, rows of columns built on it follow, others stand."""
    statement = _levels({"Roof": "10 m", "Mid": "1,5 m", "Low": "4 m"}).statement()
    found = books.items(statement)
    columns = books.columns(found["levels"])
    assert columns["z"]["problem"][0] == columns["z"]["problem"][2] == ""
    assert columns["z"]["problem"][1].startswith("row Mid: ")
    assert columns["q"]["si"] == [0.1, None, 0.25]
    assert columns["q"]["problem"] == ["", "row Mid: not available because of z", ""]
    assert columns["u"]["si"] == [1.0, None, 1.0]
    assert columns["k"]["si"] == [5.0, 5.0, 5.0]
    assert columns["q"]["total"]["text"] == ""
    assert found["levels"]["governing"]["row"] == "Low"
    for name in ("total", "zones"):
        assert "row Mid" in found[name]["problem"]
    assert found["alone"]["value"]["si"] == 15.0
    check = next(i for i in found.values() if i["kind"] == "check")
    assert check["satisfied"] is None
    assert "row Mid" in check["problem"]


def test_a_row_that_cannot_be_computed_is_named_by_the_sum() -> None:
    """A division by zero in one row leaves the others; the sum says which row."""
    found = books.items(_levels({"Roof": "10 m", "Ground": "0 m"}).statement())
    columns = books.columns(found["levels"])
    assert columns["q"]["si"] == [0.1, None]
    assert columns["q"]["problem"] == ["", "row Ground: has no finite value"]
    assert (
        found["total"]["problem"] == "not available because of q (row Ground: has no finite value)"
    )
    assert found["zones"]["value"]["si"] == 3.0


def test_a_schedule_without_rows_leaves_no_sum() -> None:
    """No rows: the schedule says so, and a sum over it is not quietly zero."""
    found = books.items(_levels({}).statement())
    assert found["levels"]["problem"] == "the schedule has no rows"
    for name in ("total", "zones", "alone"):
        assert found[name]["problem"].startswith("not available because of")


# --- conditions ---------------------------------------------------------------------------------


def _roofs(roof: str, theta: str) -> Workbook:
    book = books.book({"roof": roof, "theta": theta})
    with book.section("Roof") as s:
        s.choice("roof", "Roof", ["flat", "gable"], "flat")
        s.entry("theta", "Slope", unit="angle", when="roof == 'gable'")
    with book.section("Gable", when="roof == 'gable'") as s:
        s.line("a = sin(theta)", "Sine")
        s.line("b = 1/a", "Steep only", when="theta >= '10 deg'")
        s.remark("Steep.", when="theta >= '10 deg'")
        s.check("a <= 0.5", "Not too steep", when="theta >= '10 deg'")
    with book.section("Any") as s:
        s.line("C", "Coefficient", cases=[("roof == 'flat'", "2"), ("theta < '10 deg'", "3 + a"),
                                          ("theta < '60 deg'", "4")])  # fmt: skip
        s.line("D = C + 1", "Next")
        s.line("E = a + 1", "Needs the gable")
    return book


def test_guards_of_section_and_item_hold_together() -> None:
    """A section's condition and an item's both count, and the statement says which fact decides."""
    flat = books.items(_roofs("flat", "20 deg").statement())
    assert [flat[n]["applies"] for n in ("theta", "a", "b")] == [False] * 3
    assert flat["b"]["why"] == "roof is flat"
    low = books.items(_roofs("gable", "5 deg").statement())
    assert (low["a"]["applies"], low["b"]["applies"]) == (True, False)
    assert low["b"]["why"] == "theta is 5°"
    assert [i["applies"] for i in low.values() if i["kind"] in {"remark", "check"}] == [False] * 2
    steep = books.items(_roofs("gable", "20 deg").statement())
    assert steep["b"]["value"]["si"] == pytest.approx(1 / math.sin(math.radians(20)))
    assert [i["satisfied"] for i in steep.values() if i["kind"] == "check"] == [True]


def test_the_case_that_holds_is_said_with_its_reason() -> None:
    """One name with cases: the first that holds gives the value, the formula and the reason."""
    flat, low, steep = (
        books.items(_roofs(*typed).statement())
        for typed in (("flat", ""), ("gable", "5 deg"), ("gable", "30 deg"))
    )
    assert (flat["C"]["value"]["si"], flat["C"]["why"]) == (2.0, "roof is flat")
    assert (low["C"]["formula"], low["C"]["why"]) == ("3 + a", "theta is 5°")
    assert [c["holds"] for c in steep["C"]["cases"]] == [False, False, True]
    assert flat["D"]["value"]["si"] == 3.0


def test_no_case_holds() -> None:
    """Where none of the cases holds the line says so."""
    found = books.items(_roofs("gable", "70 deg").statement())
    assert found["C"]["problem"] == "has no value: none of its cases holds"
    assert found["D"]["problem"] == "not available because of C"


def test_what_does_not_apply_is_named_by_what_needs_it() -> None:
    """A line that uses a name that does not apply says so instead of computing with it."""
    found = books.items(_roofs("flat", "").statement())
    assert found["E"]["problem"] == "not available because a does not apply"


def test_a_condition_that_lacks_its_value_is_no_silent_no() -> None:
    """A missing choice makes its section not available, instead of quietly not applied."""
    found = books.items(_roofs("round", "20 deg").statement())
    assert found["a"]["applies"]
    assert found["a"]["problem"] == "not available because of roof"
    assert found["C"]["problem"] == "not available because of roof"


def test_a_case_that_does_not_hold_needs_nothing() -> None:
    """A missing value matters only to the case that uses it."""
    found = books.items(_roofs("flat", "1,5 deg").statement())
    assert found["C"]["value"]["si"] == 2.0


def test_guards_on_columns_and_schedules() -> None:
    """A column, or a whole schedule, that does not apply has no values and asks for none."""
    book = books.book(rows={"r": [("1", {"x": "2"})]})
    with book.section("S") as s:
        s.choice("way", "Way", ["a", "b"], "a")
        with s.schedule("r", "Rows") as t:
            t.entry("x", "x")
            t.line("y = 2*x", "y", when="way == 'b'")
        with s.schedule("q", "Not used", same_rows="r", when="way == 'b'") as t:
            t.line("v = 3*x", "v")
    found = books.items(book.statement())
    assert not books.columns(found["r"])["y"]["applies"]
    assert books.columns(found["r"])["y"]["si"] == [None]
    assert not found["q"]["applies"]
    assert found["q"]["why"] == "way is a"


# --- one program, three ways --------------------------------------------------------------------

_NUMBERS = st.floats(-50, 50).map(lambda x: round(x, 3))
_FORMULAS = (
    "{a} + {b}", "{a}*{b} - 1", "{a}/({b} + 0.5)", "sqrt({a})", "where({a} > {b}, {a}, 2*{b})",
    "max({a}, {b}, 1)", "min({a}, 2)**2", "abs({a})**1.5", "ln({a} + 3)", "floor({a}) + ceil({b})",
    "atan({a})/'1 rad'", "exp({a}/20)",
)  # fmt: skip


@st.composite
def _books(draw: st.DrawFn) -> tuple[Workbook, dict[str, str]]:
    entries = {name: repr(draw(_NUMBERS)) for name in "abc"}
    book = books.book(entries, {"r": [(str(n), {"w": repr(draw(_NUMBERS))}) for n in range(3)]})
    known = list(entries)
    with book.section("Trial") as s:
        for name in entries:
            s.entry(name, name)
        with s.schedule("r", "Rows") as t:
            t.entry("w", "w")
            t.line(f"u = {draw(st.sampled_from(_FORMULAS)).format(a='w', b='a')}", "u")
            t.line("v", "v", cases=[("w > b", "u + w"), ("w <= b", "u - w")])
            t.line("g = running(w) - previous(w, a) + following(w, c)", "g")
        s.line("sums = sum(v) + max(g) - min(w)", "sums")
        for count in range(draw(st.integers(1, 6))):
            one, other = (draw(st.sampled_from([*known, "sums"])) for _ in "ab")
            text = draw(st.sampled_from(_FORMULAS)).format(a=one, b=other)
            guard = draw(st.sampled_from(["", "", f"{one} > {other}", "not (a > b and b > c)"]))
            if draw(st.booleans()):
                s.line(f"x{count} = {text}", "x", when=guard)
            else:
                pairs = [(f"{one} > 1", text), (f"{one} <= 1", f"{other} + 1")]
                s.line(f"x{count}", "x", cases=pairs, when=guard)
            known.append(f"x{count}")
            s.check(f"x{count} <= {one}", "check")
    return book, entries


def _alike(one: Any, other: Any) -> bool:
    if one is None or other is None:
        return one is None and other is None
    if isinstance(one, str):
        return bool(one == other)
    pair = np.asarray(one, float), np.asarray(other, float)
    return bool(np.allclose(*pair, rtol=1e-12, atol=1e-12, equal_nan=True))


def _line_by_line(book: Workbook) -> Results:
    """Evaluate without the compiled function: an input nobody uses is said to have no value."""
    read = book.readings
    problems = {**read.problems, "nothing": "a reason to go line by line"}
    return book.program.evaluate(read.values, read.rows, problems, read.row_problems, read.keys)


@settings(max_examples=120, deadline=None)
@given(_books())
def test_at_once_and_line_by_line_agree(drawn: tuple[Workbook, dict[str, str]]) -> None:
    """The compiled function and the lines one by one give the same values and verdicts."""
    book, _ = drawn
    book.evaluate()
    quick, slow = book.results, _line_by_line(book)
    assert quick.values.keys() == slow.values.keys()
    differing = {n for n, v in quick.values.items() if not _alike(v, slow.values[n])}
    assert differing == set()
    assert (quick.applies, quick.problems) == (slow.applies, slow.problems)
    assert quick.checks == slow.checks
    held = {n: b for n, b in quick.branch.items() if quick.applies.get(n, True)}
    assert held == {n: b for n, b in slow.branch.items() if n in held}


@settings(max_examples=60, deadline=None)
@given(_books(), st.lists(st.tuples(*[_NUMBERS] * 3), min_size=1, max_size=4))
def test_many_cases_agree_with_each_alone(
    drawn: tuple[Workbook, dict[str, str]], more: list[tuple[float, float, float]]
) -> None:
    """Many cases at once give in each case what that case alone gives; nan where it has none."""
    book, entries = drawn
    book.evaluate()
    texts = {name: [repr(case[n]) for case in more] for n, name in enumerate(entries)}
    many = cases.read(book, texts)
    found = cases.compute(book.many(), many.values, many.rows)
    for place, case in enumerate(more):
        for name, value in zip(entries, case, strict=True):
            book.inputs.entries[name] = books.Given(repr(value))
        book.evaluate()
        for bound in book.program.lines:
            array = np.asarray(found[bound.name], float)
            one = array[..., place] if array.shape[-1:] == (len(more),) else array[..., 0]
            alone = book.results.values[bound.name]
            if alone is not None:
                assert _alike(one, alone), bound.name


def test_an_inapplicable_name_in_a_branch_not_taken_keeps_its_numbers() -> None:
    """A column whose other branch has no value at all is still a column of numbers."""
    book = books.book(rows={"r": [("1", {"w": "2"}), ("2", {"w": "3"})]})
    with book.section("S") as s:
        s.choice("way", "Way", ["a", "b"], "a")
        s.line("k = 7", "k", when="way == 'b'")
        with s.schedule("r", "Rows") as t:
            t.entry("w", "w")
            t.line("v", "v", cases=[("way == 'b'", "k*w"), ("way == 'a'", "2*w")])
            t.total("v")
    column = books.columns(books.item(book, "r"))["v"]
    assert column["si"] == [4.0, 6.0]
    assert column["total"]["si"] == 10.0
