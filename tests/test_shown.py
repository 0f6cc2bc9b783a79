from __future__ import annotations

import functools
from typing import TYPE_CHECKING, Any

import books
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.run import Filling, Runner

if TYPE_CHECKING:
    from calcbook.workbook import Workbook

WIND = [
    {},
    {"units": "US"},
    {"code_set": "ASCE 7-16"},
    {"code_set": "ASCE 7-16", "units": "US", "V": "130 mph"},
    {"roof": "gable", "ridge": "X", "theta": "20 deg", "r_r": "2.293 m", "h": "8.347 m"},
    {"roof": "gable", "ridge": "Y", "theta": "35 deg", "r_r": "6.5 m", "h": "10.4 m",
     "units": "US"},
    {"roof": "gable", "ridge": "X", "theta": "5 deg", "r_r": "0.551 m", "exposure": "B"},
    {"hill": "escarpment", "H": "31 m", "x_h": "12.5 m", "enclosure": "partially enclosed"},
    {"hill": "ridge", "code_set": "ASCE 7-16", "z_e": "1234 m", "roof": "gable", "ridge": "Y",
     "theta": "27.3 deg", "r_r": "4.8 m", "h": "9.6 m", "V": "201.7 km/h"},
]  # fmt: skip
BASIS = [
    {},
    {"units": "US"},
    {"roof": "gable", "ridge": "X", "pitch": "17.5 deg", "o_x": "137 mm"},
    {"roof": "gable", "ridge": "Y", "pitch": "31 deg", "units": "US", "o_y": "5'-6 1/2\""},
]
TAKE_OFF = [
    {},
    {"code_set": "ASCE 7-16", "units": "US"},
    {"roof": "gable", "ridge": "Y", "theta": "31 deg", "r_r": "5.588 m", "z_b": "3.7 m"},
]
SETTINGS = [("wind-pressure", s) for s in WIND] + [("design-basis", s) for s in BASIS]
SETTINGS += [("dead-load-take-off", s) for s in TAKE_OFF]


@functools.cache
def _run(workbook: str, typed: tuple[tuple[str, str], ...]) -> tuple[Workbook, dict[str, Any]]:
    notebook = books.TEMPLATES / f"{workbook}.ipynb"
    return Runner().run(Filling(notebook, sets=dict(typed)), strict=True)


def _named(workbook: str, typed: dict[str, str]) -> str:
    return f"{workbook} {' '.join(typed.values())}"


EVERY = pytest.mark.parametrize(
    ("workbook", "typed"), SETTINGS, ids=[_named(*setting) for setting in SETTINGS]
)


@EVERY
def test_every_line_closes_by_hand(workbook: str, typed: dict[str, str]) -> None:
    """The printed values, worked by hand, give the printed result within one last figure."""
    found, statement = _run(workbook, tuple(typed.items()))
    reader = books.Reader(found, statement)
    missed = {
        name: (hand, line["value"]["text"], line["values"])
        for name, line, hand in reader.every_line()
        if books.misses(hand, line["value"]["text"]) > 1
    }
    assert missed == {}


@EVERY
def test_every_column_and_total_closes_by_hand(workbook: str, typed: dict[str, str]) -> None:
    """Every printed cell follows from the printed cells, and every total from its rows."""
    found, statement = _run(workbook, tuple(typed.items()))
    reader = books.Reader(found, statement)
    missed = {}
    for name, column, hand in reader.every_column():
        for row, (one, text) in enumerate(zip(hand, column["texts"], strict=True)):
            if books.misses(float(one), text) > 1:
                missed[name, row] = (one, text)
    assert missed == {}
    for schedule in reader.schedules:
        for column in schedule["columns"]:
            if column["total"] is not None:
                total = sum(float(t) for t in column["texts"])
                assert books.misses(total, column["total"]["text"]) <= 1, column["name"]


@EVERY
def test_intermediate_values_have_four_figures(workbook: str, typed: dict[str, str]) -> None:
    """A line that is no result, and no constant, is printed with four figures or more."""
    _, statement = _run(workbook, tuple(typed.items()))
    for item in books.items(statement).values():
        if item["kind"] != "line" or item["result"] or not item["values"] or item["problem"]:
            continue
        value = item["value"]
        if abs(value["value"]) > 1e-6:
            figures = value["text"].lstrip("-0.").replace(".", "")
            assert len(figures) >= 4, (item["name"], value)


# --- random workbooks ---------------------------------------------------------------------------

_NUMBERS = st.integers(1, 99999).map(lambda n: f"{n / 10 ** (n % 5):.{n % 5}f}")
_FORMULAS = (
    "{a} + {b}", "{a} - {b}", "{a}*{b}", "{a}/{b}", "sqrt(abs({a}))*{b}", "{a}**2 - {b}",
    "({a} + 1.5)/({b} + 2)", "max({a}, {b})/3", "abs({a} - {b})**0.5 + {a}", "2.5*{a} - {b}/7",
)  # fmt: skip


@st.composite
def _workbooks(draw: st.DrawFn) -> Workbook:
    entries = {name: draw(_NUMBERS) for name in "abc"}
    known = list(entries)
    formulas = []
    for count in range(draw(st.integers(1, 8))):
        text = draw(st.sampled_from(_FORMULAS))
        one, other = draw(st.sampled_from(known)), draw(st.sampled_from(known))
        formulas.append(f"x{count} = {text.format(a=one, b=other)}")
        known.append(f"x{count}")
    return books.lines(*formulas, entries=entries)


@settings(max_examples=150, deadline=None)
@given(_workbooks())
def test_random_workbooks_close_by_hand(workbook: Workbook) -> None:
    """Whatever the formulas and entries: what is printed can be followed with a calculator."""
    statement = workbook.statement()
    for name, line, hand in books.Reader(workbook, statement).every_line():
        assert books.misses(hand, line["value"]["text"]) <= 1, (name, line)


@settings(max_examples=50, deadline=None)
@given(st.lists(_NUMBERS, min_size=1, max_size=6), _NUMBERS)
def test_random_schedules_close_by_hand(cells: list[str], scale: str) -> None:
    """Computed columns, running sums, previous and following rows and totals can be followed."""
    found = books.book({"k": scale}, {"rows": [(f"R{n}", {"w": c}) for n, c in enumerate(cells)]})
    with found.section("Trial") as s:
        s.entry("k", "Factor")
        with s.schedule("rows", "Rows") as t:
            t.entry("w", "Width")
            t.line("u = w*k/3", "Third")
            t.line("r = running(u)", "Sum so far")
            t.line("d = u - previous(u, 0)/2 + following(u, 1)", "Difference")
            t.total("u")
            t.governing("d")
        s.line("m = sum(u*w)/max(w)", "Mean")
    statement = found.statement()
    reader = books.Reader(found, statement)
    for name, line, hand in reader.every_line():
        assert books.misses(hand, line["value"]["text"]) <= 1, (name, line)
    for name, column, hand in reader.every_column():
        for one, text in zip(hand, column["texts"], strict=True):
            assert books.misses(float(one), text) <= 1, (name, column["texts"], hand)
    total = books.columns(reader.items["rows"])["u"]["total"]["text"]
    assert (
        books.misses(sum(map(float, books.columns(reader.items["rows"])["u"]["texts"])), total) <= 1
    )


# --- figures ------------------------------------------------------------------------------------


@pytest.mark.parametrize("typed", ["2.50 m", "2.5 m", "250 cm", "1.2e1 m", "0.10 m"])
def test_entries_are_printed_as_typed(typed: str) -> None:
    """An entry keeps its figures and its unit, and is shown in the workbook's unit besides."""
    found = books.lines(entries={"L:length": typed})
    item = books.item(found, "L")
    number, _, unit = typed.partition(" ")
    assert (item["value"]["text"], item["value"]["unit"]) == (number, unit)
    assert (item["shown"] is None) == (unit == "m")


def test_feet_and_inches_are_printed_in_feet() -> None:
    """Feet and inches stand in a formula as a decimal number of feet."""
    found = books.lines("A = L*L", entries={"L:length": "5'-6 1/2\""}, system="US")
    item = books.item(found, "A")
    assert item["values"]["L"] == {"text": "5.5416666667", "unit": "ft"} or float(
        item["values"]["L"]["text"]
    ) == pytest.approx(5.5 + 1 / 24)
    assert item["value"]["text"].startswith("30.71")


def test_results_have_the_step_of_their_kind() -> None:
    """A result is printed to the fixed step of its kind, an intermediate value to four figures."""
    found = books.book()
    with found.section("Trial") as s:
        s.entry("L", "Length", "12.3456 m", unit="length")
        s.line("a = L/7", "Part", unit="length")
        s.line("b = L/7", "Part", unit="length", result=True)
        s.line("c = L/7000", "Small part", unit="length")
    found_items = books.items(found.statement())
    assert found_items["b"]["value"]["text"] == "1.764"
    assert found_items["a"]["value"]["text"] == "1.764"
    assert found_items["c"]["value"]["text"] == "0.001764"


def test_operands_get_more_figures_where_rounding_spoils_the_line() -> None:
    """Where two nearly equal values are subtracted, they are printed with the figures needed."""
    found = books.lines(
        "p = a/3", "q = a/3 + b", "d = q - p", entries={"a": "1000", "b": "0.01234"}
    )
    item = books.item(found, "d")
    assert item["value"]["text"] == "0.01234"
    hand = float(item["values"]["q"]["text"]) - float(item["values"]["p"]["text"])
    assert books.misses(hand, "0.01234") <= 1


def test_a_constant_is_printed_as_its_formula_states_it() -> None:
    """'0.85' stays 0.85 and is not padded to four figures; so does a quantity in its unit."""
    found = books.lines("K = 0.85", "p = '0.77 kPa'", "n = -2")
    found_items = books.items(found.statement())
    assert [found_items[n]["value"]["text"] for n in "Kpn"] == ["0.85", "0.77", "-2"]


def test_what_is_left_of_nothing_prints_as_nothing() -> None:
    """Rounding noise of a float where terms cancel is printed as zero, without a sign."""
    found = books.lines("x = 0.1*3*a - 0.3*a", entries={"a": "-1"})
    assert books.item(found, "x")["value"]["text"] == "0.000"
