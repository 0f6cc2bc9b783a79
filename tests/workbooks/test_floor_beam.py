"""The floor beam against formulas of beams, panels and the lever rule, and its properties."""

from __future__ import annotations

import csv
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from beams import BOOK, beam, kilonewtons, line, of_case, panel, point, stretch, support
from hypothesis import given, settings
from hypothesis import strategies as st
from sheets import CODES, rows_of

from calcbook import cases
from calcbook.statics import panels

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

REFERENCES = Path(__file__).parents[1] / "references"
with (REFERENCES / "beams.csv").open(encoding="utf-8", newline="") as file:
    PUBLISHED = list(csv.DictReader(file))
SIMPLE = [support("A", "0 m"), support("B", "6 m", "roller")]


@pytest.mark.parametrize("case", PUBLISHED, ids=lambda case: case["beam"])
def test_beams_of_handbooks(fill: Fill, case: dict[str, str]) -> None:
    """Reactions and the largest and smallest moment are those of the formula beside them."""
    held = [one.split() for one in case["supports"].split(";")]
    supports = [support(f"S{n}", f"{x} m", " ".join(k)) for n, (x, *k) in enumerate(held)]
    loads = {
        "lines": [line("w", f"{held[0][0]} m", f"{held[-1][0]} m", f"{case['w1']} kN/m",
                       w_end=f"{case['w2']} kN/m")],
        "points": [point("P", f"{case['a']} m", f"{case['P']} kN")],
    }  # fmt: skip
    sheet = fill(BOOK, {}, beam(supports, **loads))
    wanted = [float(r) for r in case["reactions"].split(";")]
    assert kilonewtons(sheet, "R_D") == pytest.approx(wanted, rel=1e-8, abs=1e-9)
    assert of_case(sheet, "D", "M_c") == pytest.approx(float(case["M_most"]), rel=1e-8, abs=1e-9)
    assert of_case(sheet, "D", "M_cn") == pytest.approx(float(case["M_least"]), rel=1e-8, abs=1e-9)
    assert all(sheet.checks().values())


def test_a_textbook_beam_with_overhangs(fill: Fill) -> None:
    """12 lb/in over 10 in at either end of 24 in and three loads: 196.7 and 393.3 lb.

    Engineering Statics, open text, ch. 7; printed to 0.1 lb.
    """
    supports = [support("A", "0 in"), support("B", "18 in", "roller"),
                support("end", "24 in", "free end")]  # fmt: skip
    loads = {
        "lines": [line("1", "0 in", "10 in", "144 plf"), line("2", "14 in", "24 in", "144 plf")],
        "points": [point("1", "6 in", "100 lbf"), point("2", "12 in", "150 lbf"),
                   point("3", "18 in", "100 lbf")],
    }  # fmt: skip
    sheet = fill(BOOK, {}, beam(supports, **loads), units="US")
    pounds = [force / 4.4482216152605 for force in sheet.column("reactions", "R_D")]
    assert pounds[0] + pounds[1] == pytest.approx(590.0)
    assert pounds == pytest.approx([196.7, 393.3, 0.0], abs=0.05)


# Two-way slabs: beam loads of a 4 x 6 m panel under 5.5 kPa, read in a public text: short beam
# 22 kN in all, 11 kN/m at its peak, 14.67 kN m; long beam 44 kN; equivalent uniform loads for the
# moment w L/3 and (w L/2)(1 - 1/(3 b2)).
@pytest.mark.parametrize(("along", "across", "total", "peak", "moment"), [
    (4, 6, 22.0, 11.0, 14.6666667), (6, 4, 44.0, 11.0, 9.37037037 * 36 / 8),
])  # fmt: skip
def test_two_way_panels(
    fill: Fill, *, along: float, across: float, total: float, peak: float, moment: float
) -> None:
    """A panel gives its short edges a triangle and its long ones a trapezoid, as published."""
    ends = [support("A", "0 m"), support("B", f"{along} m", "roller")]
    rows = beam(ends, strips=[panel("1", "0 m", f"{along} m", f"{across} m")])
    sheet = fill(BOOK, {}, rows)
    assert kilonewtons(sheet, "w_L0", "live_loads") == pytest.approx([peak])
    assert kilonewtons(sheet, "R_L0") == pytest.approx([total / 2, total / 2], rel=1e-9)
    assert of_case(sheet, "L", "M_c") == pytest.approx(moment, rel=1e-8)


def test_a_panel_is_carried_whole_by_its_four_edges(fill: Fill) -> None:
    """Two short and two long edges of 4 x 6 m carry 24 m2; above the ratio the long ones do."""

    def area(along: str, across: str, **sets: str) -> float:
        ends = [support("A", "0 m"), support("B", along, "roller")]
        return fill(BOOK, sets, beam(ends, strips=[panel("1", "0 m", along, across)])).value("A_b")

    assert 2 * area("4 m", "6 m") + 2 * area("6 m", "4 m") == pytest.approx(24.0)
    assert [area("4 m", "6 m", r_2="1.4"), area("6 m", "4 m", r_2="1.4")] == [0.0, 12.0]


@pytest.mark.parametrize(("along", "across"), [(5.0, 6.2), (6.2, 5.0), (4.0, 4.0), (3.0, 7.0)])
def test_panels_are_those_of_the_statics_package(fill: Fill, along: float, across: float) -> None:
    """Total and peak on an edge are those the package gives to it, one way and two ways."""
    ends = [support("A", "0 m"), support("B", f"{along} m", "roller")]
    strips = [panel("1", "0 m", f"{along} m", f"{across} m")]
    sheet = fill(BOOK, {}, beam(ends, strips=strips))
    spread = panels.slab_panel(5.5e3, along, across)
    edge = spread.short if along < across else spread.long
    assert sheet.value("A_b") * 5.5e3 == pytest.approx(edge.total)
    peak = edge.peak / 1e3 if edge.total else 0.0
    assert kilonewtons(sheet, "w_L0", "live_loads") == pytest.approx([peak])


def test_lever_rule(fill: Fill) -> None:
    """10 kN at 1.5 m of 6 m: 7.5 and 2.5 kN."""
    sheet = fill(BOOK, {}, beam(SIMPLE, points=[point("P", "1.5 m", "10 kN")]))
    assert kilonewtons(sheet, "R_D") == pytest.approx([7.5, 2.5])


@pytest.mark.parametrize(("across", "factor"), [
    ("15 m", 0.5731), ("8.33333333 m", 0.6672), ("5 m", 0.7609), ("1.6 m", 1.0),
])  # fmt: skip
def test_live_load_is_reduced_by_the_area_of_the_span(
    fill: Fill, across: str, factor: float
) -> None:
    """0.25 + 4.57/sqrt(2 A), A of all strips in the span: 0.5731 at 100 m2, none below 20 m2.

    NSCP 2015 205.6; the formula is that of IBC 1607 and read in a public text.
    """
    strips = [panel("1", "0 m", "6 m", across, "one-way", L_a="2 kPa"),
              panel("2", "0 m", "6 m", "1.66666667 m", "one-way", L_a="2 kPa")]  # fmt: skip
    sheet = fill(BOOK, {}, beam(SIMPLE, strips=strips))
    assert sheet.column("live", "R_f") == pytest.approx([factor] * 2, abs=5e-5)
    reduced, whole = (sum(kilonewtons(sheet, name)) for name in ("R_L", "R_L0"))
    assert reduced == pytest.approx(factor * whole, rel=1e-4)


LOADS = {"dead, certain": 10, "live": 4, "roof live": 3, "wind a": 5, "wind b": -7,
         "earthquake": 6}  # fmt: skip
EIGHTH = 36 / 8 * 1e3


def hand(factors: dict[str, float], wind: str, sign: int) -> float:
    """Return the largest moment of a simple span of 6 m under these factors, in N m."""
    given = dict(zip(("D", "L", "Lr", "Wa", "Wb", "E"), LOADS.values(), strict=True))
    given |= {"D_min": given["D"], "W": given.get(wind, 0), "E": sign * given["E"]}
    return max(0.0, sum(f * given[case] for case, f in factors.items()) * EIGHTH)


@pytest.mark.parametrize("code", CODES)
def test_every_combination_is_that_of_the_code(run: Callable[..., Sheet], code: str) -> None:
    """Moments of a simple beam combine as its loads do, by the factors of the code set."""
    lines = [line(case, "0 m", "6 m", f"{w} kN/m", case=case) for case, w in LOADS.items()]
    sheet = run(BOOK, {}, beam(SIMPLE, lines=lines), code=code)
    found = sheet.by_key("forces", "M_max")
    for c in sheet.book.code.combinations("strength", ("D", "L", "Lr", "W", "E")):
        factors = {k: 1.0 if f == "f_1" else float(f) for k, f in c.factors.items()}
        for wind in (" Wa", " Wb") if "W" in factors else ("",):
            for sense in (" E+", " E-") if "E" in factors else ("",):
                wanted = hand(factors, wind.strip(), -1 if sense == " E-" else 1)
                assert found[f"{c.name}{wind}{sense}"] == pytest.approx(wanted), c.text


def two_spans(fill: Fill, **sets: str) -> Sheet:
    """Return two spans of 6 m with 20 kN/m of dead and 10 kN/m of live load."""
    ends = [support("A", "0 m"), support("B", "6 m", "roller"), support("C", "12 m", "roller")]
    lines = [line("D", "0 m", "12 m", "20 kN/m"), line("L", "0 m", "12 m", "10 kN/m", case="live")]
    return fill(BOOK, sets, beam(ends, lines=lines))


def test_live_load_governs_on_one_span_or_both(fill: Fill) -> None:
    """Two spans: 1.6 L on one span makes the span moment, on both that over the support.

    R_A with one span loaded 7/16 w L, with both 3/8 w L; -w L2/8 and -w L2/16 at the support
    (coefficients of continuous beams, common practice).
    """
    sheet = two_spans(fill)
    w, v = 1.2 * 20, 1.6 * 10
    end = 3 / 8 * w * 6 + 7 / 16 * v * 6
    assert sheet.value("M_u") / 1e3 == pytest.approx(end**2 / (2 * (w + v)))
    assert sheet.value("M_un") / 1e3 == pytest.approx(-(w + v) * 36 / 8)
    arrangements = {
        c["name"]: dict(zip(sheet.item("arrangements")["rows"], c["texts"], strict=True))
        for c in sheet.item("arrangements")["columns"]
    }
    assert arrangements["on_max"]["2a"] in ("A-B", "B-C")
    assert arrangements["on_min"]["2a"] == "all"
    assert kilonewtons(sheet, "R_L") == pytest.approx([7 / 16 * 60, 75.0, 7 / 16 * 60])
    assert kilonewtons(sheet, "R_Lmin", "case_reactions") == pytest.approx([-3.75, 0.0, -3.75])


def test_all_spans_at_once_never_governs_more(fill: Fill) -> None:
    """Without patterns the envelope lies within that with them."""
    free, fixed = two_spans(fill), two_spans(fill, pattern="all spans")
    assert fixed.value("M_u") < free.value("M_u")
    assert fixed.value("M_un") == pytest.approx(free.value("M_un"))
    assert kilonewtons(fixed, "R_L")[0] == pytest.approx(3 / 8 * 60)


def test_roof_live_load_relieves_nothing(fill: Fill) -> None:
    """Roof live load on an overhang is left out where it would lessen the moment of the span.

    1.2 D + 1.6 L in the span at its middle, 1.6 Lr on the overhang; with these loads on all spans
    0.5 Lr takes half its moment over the support off the middle.
    """
    ends = [support("A", "0 m"), support("B", "6 m", "roller"), support("C", "8 m", "free end")]
    lines = [line("D", "0 m", "6 m", "20 kN/m"), line("L", "0 m", "6 m", "10 kN/m", case="live"),
             line("Lr", "6 m", "8 m", "3 kN/m", case="roof live")]  # fmt: skip
    sheet = fill(BOOK, {}, beam(ends, lines=lines))
    assert sheet.value("M_u") / 1e3 == pytest.approx((1.2 * 20 + 1.6 * 10) * 36 / 8)
    assert sheet.value("M_un") / 1e3 == pytest.approx(-1.6 * 3 * 2**2 / 2)
    assert kilonewtons(sheet, "R_Lr") == pytest.approx([0.0, 7.0, 0.0])
    at_once = fill(BOOK, {"pattern": "all spans"}, beam(ends, lines=lines)).value("M_u") / 1e3
    assert at_once < (1.2 * 20 + 1.6 * 10) * 36 / 8 - 1.0


def test_roof_live_load_governs_on_alternate_spans(fill: Fill) -> None:
    """Two roof spans: 7/16 w L at an end with one loaded, not 3/8 (common practice)."""
    ends = [support("A", "0 m"), support("B", "6 m", "roller"), support("C", "12 m", "roller")]
    lines = [line("Lr", "0 m", "12 m", "4 kN/m", case="roof live")]
    sheet = fill(BOOK, {}, beam(ends, lines=lines))
    assert kilonewtons(sheet, "R_Lr") == pytest.approx([7 / 16 * 24, 10 / 8 * 24, 7 / 16 * 24])


WITHIN = "Each strip or panel lies within the span it is listed in: one is listed for each span"
THREE = [support("A", "0 m"), support("B", "6 m", "roller"), support("C", "12 m", "roller")]


@pytest.mark.parametrize(("bay", "x_1", "x_2", "kept"), [
    ("A", "0 m", "6 m", True), ("B", "6 m", "12 m", True), ("A", "0 m", "12 m", False),
    ("A", "6 m", "12 m", False), ("B", "0 m", "6 m", False), ("C", "6 m", "12 m", False),
])  # fmt: skip
def test_a_strip_outside_its_span_is_told(
    fill: Fill, bay: str, x_1: str, x_2: str, *, kept: bool
) -> None:
    """A strip over two spans, or named for another, would reduce live load by a wrong area."""
    strips = [panel("1", x_1, x_2, "4 m", "one-way", bay=bay)]
    assert fill(BOOK, {}, beam(THREE, strips=strips)).checks()[WITHIN] is kept


def test_strips_of_two_spans_are_not_reduced_together(fill: Fill) -> None:
    """Two spans of 6 x 6 m: each is reduced by its own 36 m2, 0.25 + 4.57/sqrt(72)."""
    strips = [panel(bay, x_1, x_2, "6 m", "one-way", bay=bay, L_a="2 kPa")
              for bay, x_1, x_2 in (("A", "0 m", "6 m"), ("B", "6 m", "12 m"))]  # fmt: skip
    sheet = fill(BOOK, {}, beam(THREE, strips=strips))
    assert sheet.column("live", "R_f") == pytest.approx([0.25 + 4.57 / 72**0.5] * 2)


def test_the_place_of_a_borne_beam_keeps_its_wind_and_its_sense(fill: Fill) -> None:
    """A reaction that lifts under E+ and under wind a does so on the beam that bears it."""
    forces = {"D": 60, "Dmin": 40, "L0": 20, "Lu": 15, "Lr": 0, "Wa": -4, "Wb": 3, "E": -12}
    reaction = {"key": "B2 4", "B_fL": "0.5", **{f"B_{n}": f"{f} kN" for n, f in forces.items()}}
    borne = {"key": "1", "bearing_of": "B2 4", "n_b": "1", "x_b": "3 m", "live_as": "unreduced"}
    own = [point("E", "3 m", "12 kN", "earthquake"), point("W", "3 m", "5 kN", "wind a")]
    rows = beam(SIMPLE, beams=[borne], points=own) | rows_of("bearings", reaction)
    sheet = fill(BOOK, {}, rows)
    assert kilonewtons(sheet, "R_E") == pytest.approx([0.0, 0.0])
    assert kilonewtons(sheet, "R_Wa") == pytest.approx([0.5, 0.5])
    assert kilonewtons(sheet, "R_Wb") == pytest.approx([1.5, 1.5])
    assert kilonewtons(sheet, "R_Wc") == pytest.approx([1.5, 1.5])
    assert all(sheet.checks().values())


@pytest.mark.parametrize("pattern", ["by span", "all spans"])
def test_live_load_never_lifts_what_carries_the_beam(fill: Fill, pattern: str) -> None:
    """Live load on an overhang alone lifts the far support; what is handed on is 0 there."""
    ends = [support("A", "0 m"), support("B", "6 m", "roller"), support("C", "8 m", "free end")]
    lines = [line("L", "6 m", "8 m", "12 kN/m", case="live")]
    sheet = fill(BOOK, {"pattern": pattern}, beam(ends, lines=lines))
    assert kilonewtons(sheet, "R_La", "case_reactions")[:2] == pytest.approx([-4.0, 28.0])
    for name in ("R_L", "R_L0"):
        assert kilonewtons(sheet, name)[:2] == pytest.approx([0.0, 28.0], abs=1e-9)


def test_a_factored_moment_by_hand(fill: Fill) -> None:
    """1.2 D + 1.6 L of a simple span is that of a section; a fixed pattern is held to less.

    Two spans: D largest at 3/8 l, where M_hand is (1.2 D + 1.6 L) 9/128 l2 with L on both.
    """
    lines = [line("D", "0 m", "6 m", "20 kN/m"), line("L", "0 m", "6 m", "10 kN/m", case="live")]
    sheet = fill(BOOK, {}, beam(SIMPLE, lines=lines))
    assert sheet.value("M_hand") == pytest.approx((1.2 * 20 + 1.6 * 10) * EIGHTH)
    assert sheet.value("M_u") == pytest.approx(sheet.value("M_hand"))
    sheet = two_spans(fill)
    assert sheet.value("M_hand") / 1e3 == pytest.approx(40 * 36 * 9 / 128)
    assert all(sheet.checks().values())


def test_the_envelope_holds_every_combination(fill: Fill) -> None:
    """What is drawn is nowhere within what a combination reaches."""
    sheet = two_spans(fill)
    curves = {c["name"]: c for c in sheet.item("solved")["curves"]}
    for name, column in (("moment", "M"), ("shear", "V")):
        assert max(curves[name]["largest"]) >= max(sheet.column("forces", f"{column}_max")) * 0.99
        assert min(curves[name]["smallest"]) == pytest.approx(
            min(sheet.column("forces", f"{column}_min"))
        )
        assert all(a >= b for a, b in zip(curves[name]["largest"], curves[name]["smallest"],
                                          strict=True))  # fmt: skip


@settings(max_examples=15, deadline=None)
@given(scale=st.floats(0.1, 10.0), shift=st.floats(-50.0, 50.0), cut=st.floats(1.0, 11.0))
def test_scaling_shifting_and_refining_a_beam(
    fill: Fill, scale: float, shift: float, cut: float
) -> None:
    """Loads scale moments; moving the origin or cutting a stretch in two changes nothing."""

    def beam_at(x_0: float, load: float, *, refined: bool) -> Sheet:
        at = [f"{x_0 + x!r} m" for x in (0.0, 4.0, 12.0)]
        ends = [support("A", at[0]), support("B", at[1], "roller"), support("C", at[2], "fixed")]
        middle = f"{x_0 + cut!r} m"
        parts = [stretch("1", at[0], middle), stretch("2", middle, at[2])] if refined else []
        lines = [line("D", at[0], at[2], f"{10 * load!r} kN/m")]
        return fill(BOOK, {}, beam(ends, stretches=parts, lines=lines))

    plain, other = beam_at(0.0, 1.0, refined=False), beam_at(shift, scale, refined=True)
    for name in ("M_u", "M_un", "V_u"):
        assert other.value(name) == pytest.approx(scale * plain.value(name), rel=1e-6, abs=1e-3)


def test_us_units_give_the_same_newtons(fill: Fill, run: Callable[..., Sheet]) -> None:
    """The same beam typed in feet and pounds has the same moment."""
    metric = fill(BOOK, {}, beam(SIMPLE, lines=[line("w", "0 m", "6 m", "12 kN/m")]))
    feet = [support("A", "0 ft"), support("B", f"{6 / 0.3048!r} ft", "roller")]
    w = f"{12e3 / 14.593902937206365!r} plf"
    other = run(BOOK, {}, beam(feet, lines=[line("w", "0 ft", f"{6 / 0.3048!r} ft", w)]),
                units="US")  # fmt: skip
    assert other.value("M_u") == pytest.approx(metric.value("M_u"))


def test_many_cases_are_each_solved(run: Callable[..., Sheet]) -> None:
    """Entries that vary from case to case give what each gives alone, deflection among it."""
    book = run(BOOK).book
    many = cases.evaluate(book, {"k_I": ["0.5", "1"], "pattern": ["by span", "all spans"]})
    alone = run(BOOK, {"k_I": "1", "pattern": "all spans"})
    assert many["M_u"][1] == pytest.approx(alone.value("M_u"))
    assert many["M_u"][0] > many["M_u"][1]


def test_a_beam_on_a_girder(fill: Fill) -> None:
    """What another beam brings acts at its place: unreduced, or as it was reduced there."""
    forces = {"D": 60, "Dmin": 40, "L0": 20, "Lu": 15, "Lr": 0, "Wa": 3, "Wb": -4, "E": 0}
    reaction = {"key": "B2 4", "B_fL": "0.5", **{f"B_{n}": f"{f} kN" for n, f in forces.items()}}
    for live_as, live in (("unreduced", 40.0), ("reduced", 30.0)):
        borne = {"key": "1", "bearing_of": "B2 4", "n_b": "2", "x_b": "1.5 m", "live_as": live_as}
        sheet = fill(BOOK, {}, beam(SIMPLE, beams=[borne]) | rows_of("bearings", reaction))
        assert kilonewtons(sheet, "R_D") == pytest.approx([90.0, 30.0])
        assert kilonewtons(sheet, "R_L") == pytest.approx([live * 0.75, live * 0.25])
        assert kilonewtons(sheet, "R_Wt") == pytest.approx([-6.0, -2.0])
        assert sheet.column("reactions", "f_L") == pytest.approx([0.5, 0.5])


def test_overhangs_deflect_by_twice_their_length(fill: Fill) -> None:
    """A cantilever sags w L4/(8 EI), and its limit is that of twice its length."""
    ends = [support("A", "0 m", "fixed"), support("tip", "3 m", "free end")]
    rows = beam(ends, stretches=[stretch("1", "0 m", "3 m", "1e9 mm4")],
                lines=[line("L", "0 m", "3 m", "5 kN/m", case="live")])  # fmt: skip
    sheet = fill(BOOK, {"E_b": "200 GPa", "k_I": "1"}, rows)
    sag = 5e3 * 3**4 / (8 * 200e9 * 1e9 * 1e-12)
    assert sheet.column("deflections", "d_L")[0] == pytest.approx(sag)
    assert sheet.column("deflections", "d_La")[0] == pytest.approx(2 * 3 / 360)


def test_springs_and_hinges(fill: Fill) -> None:
    """A hinge leaves no moment; two springs alike share a load in the middle."""
    springs = {"k_v": "1000 kN/m"}
    ends = [support("A", "0 m", "spring", **springs), support("B", "6 m", "spring", **springs)]
    sheet = fill(BOOK, {}, beam(ends, points=[point("P", "3 m", "10 kN")]))
    assert kilonewtons(sheet, "R_D") == pytest.approx([5.0, 5.0])
    ends = [support("A", "0 m", "fixed"), support("B", "6 m", "roller")]
    rows = beam(ends, lines=[line("w", "0 m", "6 m", "8 kN/m")]) | rows_of(
        "hinges", {"key": "h", "x_h": "2 m"}
    )
    sheet = fill(BOOK, {}, rows)
    assert kilonewtons(sheet, "R_D") == pytest.approx([32.0, 16.0])
    assert kilonewtons(sheet, "m_D", "case_reactions")[0] == pytest.approx(
        -(8 * 4 / 2 * 2 + 8 * 2 * 1)
    )
