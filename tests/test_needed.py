"""Value needed: closed forms, brackets, none and several, and every answer recomputed."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np
import pytest
from books import book, lines
from hypothesis import given, settings
from hypothesis import strategies as st
from studied import recomputed

from calcbook import studies
from calcbook.errors import InputError, QuantityError
from calcbook.studies.search import search
from calcbook.units import read_quantity, unit

if TYPE_CHECKING:
    from calcbook.studies import Needed
    from calcbook.workbook import Workbook

MET = 1e-9


def asked(workbook: Workbook, result: str, name: str, target: str = "") -> Needed:
    """Return what is needed in a workbook that was just declared."""
    workbook.evaluate()
    return studies.needed(workbook, result, name, target)


def curve(formula: str, value: str = "2", low: str = "0", high: str = "10") -> Workbook:
    """Return a workbook with y as a formula of one entry x with a range."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("x", "Place", value, low=low, high=high)
        s.line(f"y = {formula}", "Height")
    return workbook


def typed(found: Needed) -> list[float]:
    """Return the answers in ascending order, as their texts are read."""
    return sorted(read_quantity(answer.text).si for answer in found.answers)


# --- closed forms ---------------------------------------------------------------------------------


def test_speed_needed_for_a_pressure() -> None:
    """The law q = 0.613 V^2 is solved for V as a formula; the text meets the target within 1e-9."""
    workbook = book()
    with workbook.section("Site") as s:
        s.entry("V", "Basic wind speed", "40 m/s", unit="speed", low="10 m/s", high="120 m/s")
        s.line("q = '0.613 kg/m3'*V**2", "Velocity pressure", unit="pressure")
        s.line("p = 0.8*q", "Pressure", unit="pressure")
    found = asked(workbook, "p", "V", "1.5 kPa")
    (answer,) = found.answers
    assert (found.verdict, answer.way) == ("one", "closed form")
    assert answer.formula.startswith("V = ")
    assert answer.given == "p is the target: 1.5 kPa"
    assert answer.si == pytest.approx(math.sqrt(1500 / 0.8 / 0.613), rel=1e-12)
    assert recomputed(workbook, "V", answer.text, "p") == pytest.approx(1500, rel=MET)
    assert (answer.rounded, answer.rounded_result) == ("55.31 m/s", "1.5002 kPa")
    assert found.searched == "10 m/s to 120 m/s"


def test_text_is_in_the_unit_as_typed_and_as_short_as_it_may_be() -> None:
    """A speed typed in km/h is answered in km/h; a round value without more figures."""
    pressure = lines("q = '0.613 kg/m3'*V**2", entries={"V:speed": "144 km/h"})
    assert asked(pressure, "q", "V", "1.5325 kPa").answers[0].text == "180 km/h"
    long = asked(pressure, "q", "V", "1.5 kPa").answers[0].text
    assert long.endswith(" km/h")
    assert 8 <= len(long.removesuffix(" km/h")) <= 15
    assert (
        asked(lines("y = 3*x", entries={"x:length": "2 m"}), "y", "x", "12 m").answers[0].text
        == "4 m"
    )


def test_parabola_has_two_answers() -> None:
    """The parabola x (10 - x) is 21 at 3 and 7: both are given, the nearer first."""
    found = asked(curve("x*(10 - x)"), "y", "x", "21")
    assert found.verdict == "several"
    assert [answer.text for answer in found.answers] == ["3", "7"]
    assert {answer.way for answer in found.answers} == {"closed form"}


def test_parabola_touched_and_missed() -> None:
    """25 is reached once, at 5; 30 never, and 25 at 5 comes nearest."""
    (answer,) = asked(curve("x*(10 - x)"), "y", "x", "25").answers
    assert answer.si == pytest.approx(5, abs=1e-4)
    found = asked(curve("x*(10 - x)"), "y", "x", "30")
    assert (found.verdict, found.answers) == ("none", ())
    assert found.nearest is not None
    assert (found.nearest.entry, found.nearest.result) == ("5", "25.00")


def test_formula_of_another_branch_is_found() -> None:
    """Branches are those that hold at the answer, not those in force now."""
    found = asked(curve("where(x <= 4, 2*x, x**2 - 8)"), "y", "x", "56")
    (answer,) = found.answers
    assert (answer.text, answer.way) == ("8", "closed form")


def test_check_satisfied_exactly() -> None:
    """A check is brought to its limit; the suggestion is on the side that satisfies it."""
    workbook = book()
    with workbook.section("Beam") as s:
        s.entry("L", "Span", "6 m", unit="length", low="1 m", high="20 m")
        s.line("M = '5 kN/m'*L**2/8", "Moment", unit="moment")
        s.check("M <= '45 kN*m'", "Strength")
    found = asked(workbook, "1.3", "L")
    (answer,) = found.answers
    assert found.target == "satisfied exactly"
    assert answer.si == pytest.approx(math.sqrt(72), rel=1e-12)
    assert (answer.way, answer.given) == ("closed form", "demand is the limit")
    assert (answer.rounded, answer.rounded_satisfied) == ("8.485 m", True)
    half = asked(workbook, "1.3", "L", "0.5").answers[0]
    assert half.si == pytest.approx(6.0, rel=1e-9)
    assert half.given == "demand is 0.5 times the limit"


def test_check_of_rows_and_limits_that_move() -> None:
    """The worst row decides; a check may have the entry in its limit, or on both sides."""
    workbook = book()
    with workbook.section("Rows") as s:
        s.entry("f", "Strength", "1 kPa", unit="pressure", low="0 kPa", high="50 kPa")
        s.entry("b", "Width", "2", low="0.1", high="10")
        with s.schedule(
            "rows",
            "Rows",
            heading="Row",
            rows=[{"key": "a", "p": "2 kPa"}, {"key": "c", "p": "3 kPa"}],
        ) as t:
            t.entry("p", "Pressure", unit="pressure")
        s.check("p <= f", "Each row")
        s.check("'7 kPa' <= f", "Limit that moves")
        s.check("b*'3 kPa' >= b**2*'1 kPa'", "Both sides move")
        s.check("f > '2 kPa'", "Strictly")
    assert asked(workbook, "1.4", "f").answers[0].text == "3 kPa"
    limit = asked(workbook, "1.5", "f").answers[0]
    assert (limit.text, limit.way, limit.given) == ("7 kPa", "closed form", "limit is the demand")
    both = asked(workbook, "1.6", "b").answers
    assert [(one.text, one.way) for one in both] == [("3", "closed form")]
    strict = asked(workbook, "1.7", "f")
    assert strict.answers[0].text == "2 kPa"
    assert "the check is not satisfied at its limit, only beyond it" in strict.notes


# --- brackets -------------------------------------------------------------------------------------


def test_cubic_has_three_bracketed_answers() -> None:
    """What algebra leaves alone is searched; the roots are those of numpy."""
    found = asked(curve("x**3 - 13*x**2 + 47*x"), "y", "x", "38")
    expected = sorted(np.roots([1, -13, 47, -38]).real)
    assert found.verdict == "several"
    assert typed(found) == pytest.approx(expected, rel=1e-9)
    assert {answer.way for answer in found.answers} == {"bracketed"}
    assert all(" to " in answer.interval and answer.tolerance for answer in found.answers)


def test_total_of_a_schedule() -> None:
    """A result gathered from rows is searched."""
    workbook = book()
    with workbook.section("Loads") as s:
        s.entry("q", "Pressure", "2 kPa", unit="pressure", low="0 kPa", high="10 kPa")
        with s.schedule(
            "floors",
            "Floors",
            heading="Floor",
            rows=[{"key": "L2", "A": "100 m2"}, {"key": "L1", "A": "150 m2"}],
        ) as t:
            t.entry("A", "Area", unit="area")
            t.line("W = q*A", "Weight", unit="force")
            t.total("W")
            t.governing("W", "largest")
    total = asked(workbook, "W total", "q", "625 kN").answers[0]
    assert (total.text, total.way) == ("2.5 kPa", "bracketed")
    assert asked(workbook, "W largest", "q", "600 kN").answers[0].text == "4 kPa"
    assert [one.name for one in studies.entries(workbook, "W total")] == ["q"]


def test_jump_over_the_target_is_no_answer() -> None:
    """A target between two steps is passed over: it is said where, and from what to what."""
    found = asked(curve("where(x >= 5, 3, 1)"), "y", "x", "2")
    assert found.verdict == "none"
    assert "at 5 the result jumps over the target, from 1.000 to 3.000" in found.notes[0]
    assert found.nearest is not None


def test_pole_is_no_answer() -> None:
    """1/(x - 5) passes from minus to plus infinity without being zero."""
    found = asked(curve("1/(x - 5)", value="2.1"), "y", "x", "0")
    assert found.verdict == "none"
    assert found.notes[0] == "at 5 the result grows without bound and changes its sign"


@pytest.mark.parametrize(
    ("formula", "target", "ends"),
    [("max(x, 3)", "3", "0 to 3"), ("floor(x)", "3", "3 to 4"), ("min(x, 7)", "7", "7 to 10")],
)
def test_stretch_of_values(formula: str, target: str, ends: str) -> None:
    """Where every value of a range gives the target, the range is said."""
    (answer,) = asked(curve(formula), "y", "x", target).answers
    assert answer.stretch == f"every value from {ends} gives it"


def test_more_answers_than_can_be_followed() -> None:
    """Of very many answers the nearest are given, and it is said that there are more."""
    workbook = lines("y = sin(1000*x)", entries={"x:angle": "30 deg"})
    found = asked(workbook, "y", "x", "0.5")
    assert (found.verdict, len(found.answers)) == ("several", 12)
    assert "there are more; the nearest 12 are given" in found.notes
    for answer in found.answers:
        assert recomputed(workbook, "x", answer.text, "y") == pytest.approx(0.5, rel=MET)


def test_names_of_the_workbook_are_kept_apart() -> None:
    """What stands for the target has a name of its own where the workbook has it already."""
    workbook = lines("y = demand*3", entries={"demand": "2"})
    with workbook.section("Check") as s:
        s.check("y <= 12", "Strength")
    (answer,) = asked(workbook, "2.1", "demand").answers
    assert (answer.text, answer.formula) == ("4", "demand = demand_0/3")
    assert answer.given == "demand_0 is the limit"


def test_entry_without_effect() -> None:
    """Every value serves where the result is the target already, none where it is not."""
    workbook = lines("y = 0*x + 4", entries={"x": "2"})
    assert asked(workbook, "y", "x", "4").verdict == "every"
    none = asked(workbook, "y", "x", "5")
    assert none.verdict == "none"
    assert none.notes[0] == "the result does not change with x"


def test_range_is_kept() -> None:
    """A value outside the permitted range is no answer; the end of the range comes nearest."""
    found = asked(curve("2*x"), "y", "x", "30")
    assert found.verdict == "none"
    assert found.nearest is not None
    assert (found.nearest.entry, found.nearest.result) == ("10", "20.000")


def test_open_range_is_stated() -> None:
    """Where an entry has no limits the range searched is ten times its size, and said so."""
    found = asked(lines("y = 3*x", entries={"x": "2"}), "y", "x", "-30")
    assert found.answers[0].text == "-10"
    assert found.searched == "\N{MINUS SIGN}18 to 22 (the entry has no such limit itself)"


def test_part_of_the_range_without_values() -> None:
    """A root at the edge of where there is a value is found, and the lack of values told."""
    found = asked(curve("sqrt(x - 4)", value="6"), "y", "x", "0.001")
    assert found.answers[0].si == pytest.approx(4.000001, rel=1e-9)
    assert "in a part of the range the result has no value" in found.notes


@settings(max_examples=40, deadline=None)
@given(
    roots=st.lists(st.floats(0.2, 9.8).map(lambda v: round(v, 2)), min_size=1, max_size=4),
    steep=st.sampled_from([1e-6, 1.0, 1e6]),
)
def test_every_root_of_a_polynomial(roots: list[float], steep: float) -> None:
    """All simple roots that lie apart are found, whatever the size of the values."""
    apart = sorted(set(roots))
    if any(after - before < 0.2 for before, after in pairwise(apart)):
        return

    def function(x: np.ndarray) -> np.ndarray:
        return steep * np.prod([x - root for root in apart], axis=0)

    found = search(function, 0.0, 10.0, 3.0, steep)
    assert [root.at for root in found.roots] == pytest.approx(apart, rel=1e-9)
    assert found.jumps == []


@settings(max_examples=40, deadline=None)
@given(
    a=st.floats(0.1, 5).map(lambda v: round(v, 3)),
    b=st.floats(0.1, 5).map(lambda v: round(v, 3)),
    at=st.floats(0.01, 9.9),
)
def test_answer_meets_the_target(a: float, b: float, at: float) -> None:
    """A rising function has one answer, and its text meets the target within 1e-9."""
    workbook = curve(f"{a}*x + {b}*x**3 + exp(x/4)")
    target = f"{a * at + b * at**3 + math.exp(at / 4):.12g}"
    (answer,) = asked(workbook, "y", "x", target).answers
    assert recomputed(workbook, "x", answer.text, "y") == pytest.approx(float(target), rel=MET)
    assert answer.si == pytest.approx(at, rel=1e-6)


# --- refused --------------------------------------------------------------------------------------


def test_target_is_read_strictly() -> None:
    """A target of another dimension, without its unit or with a comma is refused."""
    workbook = lines("q = '0.613 kg/m3'*V**2", entries={"V:speed": "40 m/s"})
    for text, words in {"3 kN": "unit of force", "3": "needs its unit", "1,5 kPa": "comma"}.items():
        with pytest.raises(QuantityError, match=words):
            asked(workbook, "q", "V", text)
    bare = studies.needed(workbook, "q", "V", "1.5", bare=unit("kPa"))
    assert bare.target == "1.5 kPa"


def test_unknown_entry_and_result() -> None:
    """An entry the result does not come from is refused with those it does."""
    workbook = lines("a = 2*x", "b = 2*width", entries={"x": "1", "width": "2"})
    with pytest.raises(InputError, match="b does not come from an entry 'x'") as caught:
        asked(workbook, "b", "x", "3")
    assert caught.value.hint == "it comes from width"
    with pytest.raises(InputError, match="'widht'") as caught:
        asked(workbook, "b", "widht", "3")
    assert caught.value.hint == "did you mean 'width'?"
    with pytest.raises(InputError, match="no result 'c'"):
        asked(workbook, "c", "x", "3")


@pytest.mark.parametrize("text", ["0", "-0.5"])
def test_ratio_of_nothing_is_refused(text: str) -> None:
    """The ratio of a check is above zero."""
    workbook = lines("M = 5*x", entries={"x": "2"})
    with workbook.section("Check") as s:
        s.check("M <= 20", "Strength")
    with pytest.raises(InputError, match="above zero"):
        asked(workbook, "2.1", "x", text)
