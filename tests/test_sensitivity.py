"""Sensitivity: derivatives against closed forms and mpmath, kinks, jumps, and ±10 % recomputed."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from books import TEMPLATES, book, lines
from hypothesis import given, settings
from hypothesis import strategies as st
from studied import effect, slope, study

from calcbook import studies
from calcbook.formula import parse
from calcbook.run import Filling, Runner
from calcbook.studies import differences

EXACT = 1e-12
NUMERIC = 1e-8


# --- closed forms ---------------------------------------------------------------------------------


def test_derivative_of_a_velocity_pressure() -> None:
    """The law q = 0.613 V^2 has the derivative 2 q/V, and 2 % more for each percent."""
    workbook = lines("q = '0.613 kg/m3'*V**2", entries={"V:speed": "40 m/s"})
    found = study(workbook, "q")
    answer = effect(found, "V")
    assert answer.way == "closed form"
    assert slope(found, "V") == pytest.approx(2 * 0.613 * 40, rel=EXACT)
    assert answer.slopes[0].text == "0.04904 kPa per m/s"
    assert answer.relative == "2.000"
    value = workbook.program.run(
        workbook.program.code(parse(answer.formula)), workbook.results.values
    )
    assert value == pytest.approx(2 * 0.613 * 40, rel=EXACT)


def test_units_as_typed_give_the_unit_of_the_derivative() -> None:
    """A speed typed in km/h has its derivative per km/h; the value in SI stays."""
    found = study(lines("q = '0.613 kg/m3'*V**2", entries={"V:speed": "144 km/h"}), "q")
    assert slope(found, "V") == pytest.approx(2 * 0.613 * 40, rel=EXACT)
    assert effect(found, "V").slopes[0].text == "0.01362 kPa per km/h"


def test_chain_of_lines_is_one_formula() -> None:
    """Lines are put into one another; what does not depend on the entry stays a symbol."""
    workbook = lines(
        "K = (z/'10 m')**(2/alpha)",
        "q = '0.613 kg/m3'*K*V**2",
        "p = q*C",
        "F = p*A",
        entries={
            "z:length": "20 m",
            "alpha": "7",
            "V:speed": "40 m/s",
            "C": "0.8",
            "A:area": "12 m2",
        },
    )
    found = study(workbook, "F")
    force = workbook.results.values["F"]
    assert isinstance(force, float)
    powers = {"z": 2 / 7, "V": 2.0, "C": 1.0, "A": 1.0, "alpha": -2 / 7 * math.log(2.0)}
    for name, power in powers.items():
        assert effect(found, name).way == "closed form"
        start = workbook.readings.values[name]
        assert slope(found, name) * start / force == pytest.approx(power, rel=EXACT)
    assert "K" in effect(found, "V").formula
    assert "z" not in effect(found, "V").formula


def test_formula_as_printed_keeps_its_units() -> None:
    """A formula that speaks km/h and Pa has the derivative of its quantities."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("V", "Speed", "252 km/h", unit="speed")
        s.line("q = 0.0473*V**2", "Pressure", unit="pressure", takes={"V": "km/h"}, gives="Pa")
        s.line("p = q/2", "Half of it", unit="pressure")
    found = study(workbook, "p")
    assert effect(found, "V").way == "closed form"
    assert slope(found, "V") == pytest.approx(0.0473 * 252 * 3.6, rel=EXACT)


def test_branch_in_force_serves_where_it_is_clear() -> None:
    """min, max, abs, where and cases are decided by the values, away from where they change."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("h", "Height", "12 m", unit="length")
        s.choice("roof", "Roof", ["flat", "gable"], "gable")
        s.line(
            "a",
            "By case",
            unit="length",
            cases=[("roof == 'flat'", "h"), ("h > '10 m'", "3*h"), ("h <= '10 m'", "5*h")],
        )
        s.line("b = max(a, '4.5 m') + abs('1 m' - a) + where(h < '20 m', 2*h, h)", "Sum")
        s.line("c = min(h, '30 m')*b", "Product")
    found = study(workbook, "c")
    assert effect(found, "h").way == "closed form"
    # b = 3h + 3h - 1 + 2h, c = h (8h - 1)
    assert slope(found, "h") == pytest.approx(16 * 12 - 1, rel=EXACT)
    assert [(one.name, one.text) for one in found.held] == [("roof", "gable")]


def test_what_stands_still_is_left_in_the_formula() -> None:
    """A gathered column that does not move with the entry does not spoil the closed form."""
    workbook = book()
    with workbook.section("Trial") as s:
        with s.schedule(
            "grid",
            "Grid",
            heading="Line",
            rows=[{"key": "1", "x": "0 m"}, {"key": "2", "x": "6 m"}],
        ) as t:
            t.entry("x", "Place", unit="length")
        s.entry("o", "Overhang", "0.3 m", unit="length")
        s.line("A = (max(x) - min(x) + 2*o)**2", "Area")
    found = study(workbook, "A")
    assert effect(found, "o").way == "closed form"
    assert "max(x)" in effect(found, "o").formula
    assert slope(found, "o") == pytest.approx(4 * 6.6, rel=EXACT)
    assert effect(found, "x").way == "numeric"


# --- numeric --------------------------------------------------------------------------------------


def test_hill_in_the_wind_workbook() -> None:
    """A hill moves q_h by algebra; at the crest x_h has a kink, which stands still for the rest."""
    path = TEMPLATES / "wind-pressure.ipynb"
    wind, _ = Runner().run(Filling(path, sets={"hill": "ridge", "exposure": "C"}))
    found = studies.sensitivity(wind, "q_h")
    ways = {one.entry.name: one.way for one in found.effects}
    assert ways == dict.fromkeys(("V", "h", "H", "L_h"), "closed form") | {"x_h": "numeric"}
    below, above = (one.si for one in effect(found, "x_h").slopes)
    assert below == pytest.approx(-above, rel=1e-9)
    # q_h ~ (1 + K_1 K_2 K_3)^2 with K_1 = r_1 H/L_h (ASCE 7-16 Fig. 26.8-1)
    values = wind.results.values
    product = math.prod(float(values[name]) for name in ("K_1", "K_2", "K_3h"))  # type: ignore[arg-type]
    expected = 2 * product / (1 + product) * found.result.si / 20
    assert slope(found, "H") == pytest.approx(expected, rel=EXACT)


def test_kink_has_a_derivative_on_either_side() -> None:
    """Where two values of max() meet, both derivatives are given, and it is said."""
    found = study(lines("m = max(2*x, y)", entries={"x": "3", "y": "6"}), "m")
    for name, (below, above) in {"x": (0.0, 2.0), "y": (0.0, 1.0)}.items():
        answer = effect(found, name)
        assert answer.way == "numeric"
        assert [one.side for one in answer.slopes] == ["below", "above"]
        assert [one.si for one in answer.slopes] == pytest.approx([below, above], abs=1e-9)
        assert "there is a kink at this value" in answer.notes[0]
        assert answer.relative == ""


def test_kink_nearby_is_none_here() -> None:
    """A corner one part in ten thousand away leaves one derivative, by algebra or by numbers."""
    near = {"x": "3.0003", "y": "6"}
    assert slope(study(lines("m = max(2*x, y)", entries=near), "m"), "x") == 2.0
    step = differences.steps(3.0003, math.inf)
    below, above = (np.maximum(2 * (3.0003 + way * step), 6.0) for way in (-1, 1))
    found = differences.local(6.0006, 3.0003, step, below, above)
    assert found.slope == pytest.approx(2.0, rel=1e-9)


@pytest.mark.parametrize(
    ("height", "jumps"), [("10 m", "just below 10 m it is 1.00"), ("9.99999 m", "")]
)
def test_jump_is_said(height: str, jumps: str) -> None:
    """At a threshold the value beyond it is told; next to it there is a derivative of nothing."""
    found = study(lines("k = where(h >= '10 m', 2, 1)", entries={"h:length": height}), "k")
    answer = effect(found, "h")
    assert [one.si for one in answer.slopes] == [0.0]
    assert any(jumps in note for note in answer.notes)
    assert (answer.slopes[0].side == "above") == bool(jumps)


def test_slope_of_a_table() -> None:
    """Between the points of a table its slope holds; at a point there are two.

    Leeward wall, ASCE 7-16 Fig. 27.3-1: -0.5 at L/B of 1, -0.3 at 2, -0.2 at 4.
    """
    for ratio, expected in {"1.4": [0.2], "2": [0.2, 0.05]}.items():
        workbook = book()
        with workbook.section("Trial") as s:
            s.entry("r", "Ratio", ratio)
            s.table("C_t", "leeward wall pressure coefficient")
            s.line("C = interpolate(C_t, r)", "From the table")
        answer = effect(study(workbook, "C"), "r")
        assert answer.way == "numeric"
        assert [one.si for one in answer.slopes] == pytest.approx(expected, rel=1e-9)


def test_slope_that_is_infinite_is_not_given() -> None:
    """sqrt(x - 1) has no finite derivative at 1, and no value below it."""
    answer = effect(study(lines("y = sqrt(x - 1)", entries={"x": "1"}), "y"), "x")
    assert answer.slopes == ()
    assert answer.notes == (
        "no finite derivative below this value",
        "no finite derivative above this value",
    )
    assert answer.low.text == ""
    assert answer.low.problem.startswith("has no value")


def test_end_of_a_range_has_one_side() -> None:
    """At the low end of its range an entry is varied upward only, where numbers have to serve."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("n", "Factor", "1", low="1", high="1.5")
        with s.schedule(
            "rows", "Rows", heading="Row", rows=[{"key": "a", "w": "2"}, {"key": "b", "w": "5"}]
        ) as t:
            t.entry("w", "Weight")
            t.line("W = n**2*w", "Weighted")
            t.total("W")
    answer = effect(study(workbook, "W total"), "n")
    assert [(one.side, one.si) for one in answer.slopes] == [("above", pytest.approx(14.0))]
    assert answer.notes == ("it is at the end of its range: there is nothing below it",)
    assert answer.low.problem == "0.9 is outside the range 1 to 1.5"
    assert answer.high.si == pytest.approx(7 * 1.21)


@settings(max_examples=60, deadline=None)
@given(
    x=st.floats(0.05, 50.0),
    power=st.sampled_from(["0.5", "1.7", "2", "3", "-1"]),
    a=st.floats(-5.0, 5.0).map(lambda v: round(v, 3)),
)
def test_both_ways_agree_with_mpmath(x: float, power: str, a: float) -> None:
    """Closed form and differences give the derivative that mpmath finds with 40 digits."""
    text = f"{x:.6g}"
    x = float(text)
    workbook = lines(
        f"u = x**({power}) + ({a})*ln(1 + x)",
        "y = u*exp(-x/20) + sin(x/'1 rad'*'1 rad'*'1 rad')",
        entries={"x": text},
    )

    def function(at: float) -> float:
        u = mpmath.power(at, mpmath.mpf(power)) + mpmath.mpf(str(a)) * mpmath.log(1 + at)
        return u * mpmath.exp(-at / 20) + mpmath.sin(at)

    with mpmath.workdps(40):
        expected = float(mpmath.diff(function, mpmath.mpf(text)))
        size = max(abs(expected), abs(float(function(mpmath.mpf(text)))) / x)
        step = differences.steps(x, math.inf)
        below, above = (
            np.array([float(function(mpmath.mpf(at))) for at in x + way * step]) for way in (-1, 1)
        )
        at = float(function(mpmath.mpf(text)))
    found = study(workbook, "y")
    assert effect(found, "x").way == "closed form"
    assert slope(found, "x") == pytest.approx(expected, abs=1e-11 * size)
    numeric = differences.local(at, x, step, below, above)
    assert numeric.slope == pytest.approx(expected, abs=NUMERIC * size)


# --- ±10 % ----------------------------------------------------------------------------------------


def test_ten_percent_is_recomputed() -> None:
    """±10 % of a speed changes its pressure by -19 and +21 %, not by twenty; the largest first."""
    entries = {"C": "0.8", "V:speed": "40 m/s"}
    found = study(lines("p = '0.613 kg/m3'*V**2*C", entries=entries), "p")
    assert [one.entry.name for one in found.effects] == ["V", "C"]
    answer = effect(found, "V")
    assert (answer.low.entry, answer.low.change) == ("36 m/s", "\N{MINUS SIGN}19.0 %")
    assert (answer.high.entry, answer.high.change) == ("44 m/s", "+21.0 %")
    assert answer.high.si == pytest.approx(0.613 * 44**2 * 0.8, rel=EXACT)
    assert answer.high.text == "0.9494 kPa"


def test_nothing_is_clamped() -> None:
    """A value outside the range of its entry is refused with the range; the other stands."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("theta", "Slope", "58 deg", unit="angle", low="0 deg", high="60 deg")
        s.line("t = tan(theta)", "Rise over run")
    answer = effect(study(workbook, "t"), "theta")
    assert answer.high.problem == "63.8° is outside the range 0 deg to 60 deg"
    assert answer.high.si is None
    assert answer.low.si == pytest.approx(math.tan(math.radians(52.2)))
    assert answer.slopes[0].text.endswith("per °")


def test_zero_is_not_varied_but_has_a_derivative() -> None:
    """10 % of zero is nothing: it is said, and the derivative given."""
    found = study(lines("y = 3*x + 2", entries={"x": "0"}), "y")
    answer = effect(found, "x")
    assert slope(found, "x") == 3.0
    assert answer.low.problem == answer.high.problem == "it is zero, so 10 % of it is nothing"
    assert "Zero, so not varied: x." in studies.describe(found)


def test_level_is_said_to_hang_on_its_datum() -> None:
    """What may be above and below zero is counted from a datum; 10 % of it is told so."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("z", "Level", "6 m", unit="length", low="-60 m", high="400 m")
        s.line("d = z + '2 m'", "Depth")
    answer = effect(study(workbook, "d"), "z")
    assert "datum" in answer.notes[0]
    assert answer.high.si == pytest.approx(8.6)


def test_result_of_zero_has_its_change_in_its_unit() -> None:
    """Where the result is zero a change in percent says nothing."""
    found = study(lines("d = a - b", entries={"a:length": "2 m", "b:length": "2 m"}), "d")
    assert effect(found, "a").high.change == "+0.200 m"
    assert effect(found, "a").relative == ""
