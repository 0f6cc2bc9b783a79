"""The dead load take-off against sums by hand and published weights, through the notebook."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sheets import CODES, Sheet, rows_of
from take_off import (
    BOOK,
    BUILDING,
    PITCHED,
    building,
    by_hand,
    kind,
    layer,
    material,
    member,
    si,
    slab,
    wall,
    with_row,
)

from calcbook.job import Job, template_folder
from calcbook.run import Runner

if TYPE_CHECKING:
    from collections.abc import Callable

    Fill = Callable[..., Sheet]
    Published = Callable[[str], list[dict[str, str]]]

SECOND_WAY = "Weight by level and by quantities agree within 0.1 %"
NSCP, ASCE = CODES


@pytest.fixture(scope="module")
def small(fill: Fill) -> Sheet:
    """Return the building of the tests, its roof at 60 degrees."""
    return fill(BOOK, PITCHED, building())


# --- sums by hand ----------------------------------------------------------------------------


def test_load_of_each_build_up(small: Sheet) -> None:
    """Floor 1.2 + 0.2 x 24 + 0.9 = 6.9; roof 0.4/cos 60 + 0.25 = 1.05; wall 0.15 x 24 + 0.5."""
    assert small.by_key("build_ups", "D_b") == pytest.approx({"F": 6900, "R": 1050, "E": 4100})
    assert small.by_key("build_ups", "D_b_self") == pytest.approx({"F": 4800, "R": 800, "E": 3600})
    assert small.by_key("build_ups", "D_b_sup") == pytest.approx({"F": 1200, "R": 250, "E": 500})


def test_least_load_counts_certain_layers_and_no_partitions(small: Sheet) -> None:
    """Slab 4.8, roofing 0.8, wall 3.6 kPa; partitions marked certain do not count."""
    assert small.by_key("build_ups", "D_b_min") == pytest.approx({"F": 4800, "R": 800, "E": 3600})
    assert small.by_key("floors", "D_min")["Upper"] == pytest.approx(4800)


def test_layers_on_a_slope_come_to_plan_and_level_ones_stay(fill: Fill) -> None:
    """0.4 kPa on 60 degrees weighs 0.8 kPa of plan; a ceiling hung level keeps its 0.25."""
    assert fill(BOOK, PITCHED, building()).by_key("layers_on_plan", "g_p") == pytest.approx(
        {"F1": 1200, "F2": 4800, "F3": 900, "R1": 800, "R2": 250, "E1": 3600, "E2": 500}
    )
    flat = {"roof": "flat", "theta": "0 deg", "r_r": "0 m"}
    assert fill(BOOK, flat, building()).by_key("layers_on_plan", "g_p")["R1"] == pytest.approx(400)


def test_walls_are_line_loads_less_their_openings(small: Sheet) -> None:
    """40 x 2.5 - 20 = 80 m2 of 4.1 kPa over 40 m: 8.2 kN/m, certain 7.2; two of 40 m2: 328 kN."""
    assert small.by_key("walls", "w_wall")["W3"] == pytest.approx(8200)
    assert small.by_key("walls", "w_min")["W3"] == pytest.approx(7200)
    assert small.by_key("walls", "W_wall")["W2"] == pytest.approx(328e3)


def test_members_weigh_section_by_density_or_what_is_stated(small: Sheet) -> None:
    """4 x 5 m x 0.12 m2 x 24; 3 x 10 m x 0.5 kN/m; 2 x 10 m x 0.001 m2 x 77."""
    found = small.by_key("members", "W_m")
    assert found["B3"] == pytest.approx(57.6e3)
    assert found["T4"] == pytest.approx(15e3)
    assert found["S4"] == pytest.approx(1.54e3)


def test_half_storeys_go_up_and_down(small: Sheet) -> None:
    """Lower: 690 + half its own storey + half of the storey below; the roof's parapet is its own.

    Standing on Upper 80 x 4.1 + 32.4, Lower 2 x 40 x 4.1, Ground 120 x 4.1 + 38.88 kN.
    """
    upper, lower, ground = 328 + 32.4, 328.0, 492 + 38.88
    expected = {
        "Roof": 105 + 15 + 1.54 + 41 + upper / 2,
        "Upper": 690 + 57.6 + upper / 2 + lower / 2,
        "Lower": 690 + lower / 2 + ground / 2,
        "Ground": 690 + ground / 2,
    }
    in_kn = {key: value / 1e3 for key, value in small.by_key("level_weights", "W_level").items()}
    assert in_kn == pytest.approx(expected)
    assert small.value("W_total") == pytest.approx(1e3 * sum(expected.values()))


def test_weight_that_reaches_the_columns(small: Sheet) -> None:
    """Floors, walls and beams of the three levels the frame carries, and all columns."""
    levels = 105 + 2 * 690 + 15 + 1.54 + 57.6 + 41 + 328 + 328
    assert small.value("W_bases") == pytest.approx(1e3 * (levels + 32.4 + 38.88))


def test_weight_an_earthquake_moves(small: Sheet) -> None:
    """Everything above the base and 0.6 kPa x 100 m2 of equipment; partitions are in D already."""
    weights = small.by_key("level_weights", "W_level")
    above = sum(weights.values()) - weights["Ground"]
    assert small.value("W_seismic") == pytest.approx(above + 60e3)


def test_partitions_are_live_load_under_asce(fill: Fill) -> None:
    """D drops by 0.9 kPa; an earthquake moves the partitions all the same."""
    sheet = fill(BOOK, PITCHED, building(), code=ASCE)
    assert sheet.by_key("floors", "D")["Upper"] == pytest.approx(6000)
    weights = sheet.by_key("level_weights", "W_level")
    above = sum(weights.values()) - weights["Ground"]
    assert sheet.value("W_seismic") == pytest.approx(above + 60e3 + 2 * 90e3)
    assert sheet.checks()[SECOND_WAY]


@pytest.mark.parametrize(("code", "least"), [(NSCP, 500.0), (ASCE, si("10 psf"))])
def test_light_partitions_count_with_the_codes_figure(code: str, least: float, fill: Fill) -> None:
    """Partitions of 0.1 kPa: an earthquake moves 0.5 kPa, or 10 psf; a floor without has none."""
    sheet = fill(BOOK, PITCHED, with_row("layers", "F3", g_a="0.1 kPa"), code=code)
    added = sheet.by_key("seismic_weights", "g_pE")
    assert added["Upper"] == pytest.approx(least - (100.0 if code == NSCP else 0.0))
    assert added["Roof"] == 0.0


@pytest.mark.parametrize("code", CODES)
@pytest.mark.parametrize("units", ["SI", "US"])
def test_take_off_by_hand(code: str, units: str, fill: Fill) -> None:
    """Loads, levels, total and least weight as added up in plain loops from what was entered."""
    sheet = fill(BOOK, PITCHED, building(), code=code, units=units)
    compare(sheet, 1 / math.cos(math.radians(60)), 1.0 if code == NSCP else 0.0)


def test_demo_job_by_hand() -> None:
    """The clinic: the same loops, the slope from rise and half-width; every check satisfied."""
    runner = Runner(Job.load(template_folder() / "demo"))
    statement = runner.statement(BOOK)
    sheet = Sheet(statement, runner.books[BOOK, None][0])
    rise = 7.8 * math.tan(math.radians(15))
    compare(sheet, math.hypot(7.8, rise) / 7.8, 1.0)
    assert all(sheet.checks().values())
    assert statement["counts"]["problems"] == statement["counts"]["unconfirmed"] == 0


def compare(sheet: Sheet, slope: float, share: float) -> None:
    """Compare a filled-in take-off with one by hand."""
    hand = by_hand(sheet.statement, slope, share)
    assert sheet.by_key("build_ups", "D_b") == pytest.approx(dict(hand["load"]))
    assert sheet.by_key("build_ups", "D_b_min") == pytest.approx(dict(hand["least"]))
    assert sheet.by_key("level_weights", "W_level") == pytest.approx(hand["weights"])
    assert sheet.value("W_total") == pytest.approx(sum(hand["weights"].values()))
    assert sheet.value("W_least") == pytest.approx(hand["certain"])


# --- the second way --------------------------------------------------------------------------


def test_quantities_close_on_the_levels(small: Sheet) -> None:
    """Concrete 3 x 100 x 0.2 + 290 x 0.15 + members, roofing on 200 m2 of slope: one total."""
    volumes = small.by_key("material_quantities", "V")
    faces = 10 + 80 + 2 * 40 + 120
    assert volumes["concrete"] == pytest.approx(60 + faces * 0.15 + 2.4 + 1.35 + 1.62)
    assert small.by_key("build_up_areas", "A_s")["R"] == pytest.approx(200)
    assert small.value("W_q") == pytest.approx(small.value("W_total"))
    assert small.checks()[SECOND_WAY]


@pytest.mark.parametrize(
    "rows",
    [
        with_row("walls", "W3", wall_level="Attic"),
        with_row("members", "B3", member_level="uper"),
    ],
)
def test_second_way_misses_what_stands_nowhere(rows: Any, fill: Fill) -> None:
    """A wall or beam on a level that is not there is named, and the two totals do not agree."""
    sheet = fill(BOOK, PITCHED, rows)
    assert sheet.checks()[SECOND_WAY] is False
    assert sheet.statement["counts"]["problems"]


def test_second_way_misses_a_rise_that_is_not_the_slope(fill: Fill) -> None:
    """The slope of the load and the rise of the quantities are two ways to one roof."""
    sheet = fill(BOOK, {**PITCHED, "r_r": "2 m"}, building())
    assert sheet.checks()[SECOND_WAY] is False


# --- published -------------------------------------------------------------------------------


def one_layer(fill: Fill, gamma: str, thickness: str, **options: Any) -> float:
    """Return the load of a build-up of one layer of one material."""
    rows = building(
        materials=[material("concrete", gamma), material("steel", "492 pcf")],
        build_up_types=[kind("F"), kind("R"), kind("E")],
        layers=[slab("F1", "F", thickness), slab("R1", "R", "1 in"), slab("E1", "E", "1 in")],
    )
    return fill(BOOK, None, rows, **options).by_key("build_ups", "D_b")["F"]


@pytest.mark.parametrize(("inches", "published"), [(6, 75), (8, 100), (10, 123), (12, 145)])
def test_published_concrete_walls(inches: int, published: float, fill: Fill) -> None:
    """HUD Residential Structural Design Guide Table 3.2: between 145 and 150 pcf."""
    low, high = (one_layer(fill, pcf, f"{inches} in", units="US") for pcf in ("145 pcf", "150 pcf"))
    assert low * 0.999 <= si(f"{published} psf") <= high * 1.001


def test_published_footings(published: Published, fill: Fill) -> None:
    """HUD Residential Structural Design Guide Table 3.2: 73, 97 and 193 plf at 145 pcf."""
    for row in published("footings"):
        area = f"{int(row['width_in']) * int(row['depth_in'])} in2"
        rows = building(
            materials=[material("concrete", "145 pcf"), material("steel", "492 pcf")],
            members=[member("footing", "Ground", "1", "1 ft", A_m=area)],
        )
        found = fill(BOOK, PITCHED, rows, units="US").by_key("members", "w_m")["footing"]
        assert found / si("1 plf") == pytest.approx(float(row["plf"]), abs=0.5), row


@pytest.mark.parametrize(
    ("gamma", "thickness", "listed", "within"),
    [
        ("8.0 kN/m3", "9 mm", "0.072 kPa", 1e-9),  # NSCP 2015 Table 204-2, gypsum board
        ("23.6 kN/m3", "100 mm", "2.36 kPa", 1e-9),  # NSCP 2015 Table 204-1, concrete
        ("50 pcf", "0.125 in", "0.55 psf", 0.06),  # ASCE 7-05 Table C3-1, gypsum board
        ("18.2 kN/m3", "13 mm", "0.24 kPa", 0.02),  # ASCE 7-05 Table C3-1, plaster on concrete
        ("36 pcf", "0.75 in", "2.25 psf", 1e-9),  # HUD Table 3.3, plywood
    ],
)
def test_published_layers(
    gamma: str, thickness: str, listed: str, within: float, fill: Fill
) -> None:
    """Thickness times unit weight meets the weight per area that is listed for the layer."""
    assert one_layer(fill, gamma, thickness) == pytest.approx(si(listed), rel=within)


def test_published_roof_adds_up(fill: Fill, published: Published) -> None:
    """ASCE 7-05 Table C3-1: tiles 0.91, mortar 0.48, deck 0.24 (5 psf) and plaster 0.38 kPa."""
    listed = {(r["material"], r["system"]): r["weight"] for r in published("dead_loads")}
    names = ["clay tile, Spanish", "mortar under clay tile", "plaster on wood lath"]
    weights = [*(listed[name, "SI"] for name in names), listed["wood deck, 2 in", "US"]]
    layers = [layer(f"R{n}", "R", g_a=weight) for n, weight in enumerate(weights)]
    rows = building(layers=[*(r for r in BUILDING["layers"] if r["layer_of"] != "R"), *layers])
    flat = {"roof": "flat", "theta": "0 deg", "r_r": "0 m"}
    found = fill(BOOK, flat, rows).by_key("build_ups", "D_b")["R"]
    assert found == pytest.approx(910 + 480 + 380 + si("5 psf"))


@pytest.mark.parametrize(
    ("name", "low", "high"),
    [
        ("reinforced concrete", 2080, 2550),  # handbook 2080 to 2400; EN 1991-1-1 25 kN/m3
        ("structural steel", 7800, 8005),  # EN 12524 7800; EN 1991-1-1 77 to 78.5 kN/m3
        ("gypsum wallboard", 640, 900),  # handbook 640; EN 12524 plasterboard 900
        ("cement plaster", 1850, 2345),  # handbook 1860; EN 1991-1-1 mortar to 23 kN/m3
    ],
)
def test_unit_weights_lie_in_published_ranges(
    name: str, low: float, high: float, fill: Fill
) -> None:
    """The template's unit weights lie between published densities, kg/m3."""
    gamma = fill(BOOK).by_key("materials", "gamma")[name]
    assert low <= gamma / 9.80665 <= high


# --- what always holds -----------------------------------------------------------------------

_KPA = st.integers(0, 400).map(lambda n: f"{n / 100:.2f} kPa")
_LAYERS = st.lists(
    st.tuples(
        st.sampled_from("FRE"), _KPA, st.sampled_from(["0 mm", "35 mm", "180 mm"]),
        st.sampled_from(["self", "superimposed", "partitions"]),
        st.sampled_from(["yes", "no"]), st.sampled_from(["slope", "level"]),
    ), min_size=1, max_size=8,
)  # fmt: skip


@settings(max_examples=40, deadline=None)
@given(_LAYERS, st.sampled_from(CODES))
def test_whatever_the_layers(
    fill: Fill, drawn: list[tuple[str, str, str, str, str, str]], code: str
) -> None:
    """The least load is never more than the load, by hand it is the same, both ways agree."""
    base = [slab("F0", "F", "100 mm"), slab("R0", "R", "10 mm"), slab("E0", "E", "100 mm")]
    layers = [
        layer(f"L{n}", of, g_a=g, t_l=t, made_of="steel", part=part, certain=certain, lies=lies)
        for n, (of, g, t, part, certain, lies) in enumerate(drawn)
    ]
    sheet = fill(BOOK, PITCHED, building(layers=[*base, *layers]), code=code)
    compare(sheet, 2.0, 1.0 if code == NSCP else 0.0)
    load, least = sheet.column("floors", "D"), sheet.column("floors", "D_min")
    assert all(low <= high + 1e-9 for low, high in zip(least, load, strict=True))
    assert all(sheet.checks().values())
    assert 0 < sheet.value("W_least") <= sheet.value("W_total") + 1e-6


def test_twice_the_unit_weights_twice_the_weight(fill: Fill) -> None:
    """Without stated weights everything is proportional to the unit weights."""
    layers = [slab("F1", "F", "200 mm"), slab("R1", "R", "2 mm", "steel"), slab("E1", "E", "90 mm")]
    totals = []
    for factor in (1, 2):
        materials = [
            material(n, f"{factor * g} kN/m3") for n, g in (("concrete", 24), ("steel", 40))
        ]
        members = [member("B", "Upper", "4", "5 m", A_m="120000 mm2")]
        rows = building(layers=layers, materials=materials, members=members)
        sheet = fill(BOOK, PITCHED, rows)
        totals.append(sheet.value("W_total"))
    assert totals[1] == pytest.approx(2 * totals[0])


@pytest.mark.parametrize("code", CODES)
def test_both_unit_systems_give_the_same_weights(code: str, fill: Fill) -> None:
    """Every computed value is the same in SI, whatever it is shown in."""
    one = fill(BOOK, PITCHED, building(), code=code).numbers()
    other = fill(BOOK, PITCHED, building(), code=code, units="US").numbers()
    assert one == pytest.approx(other, rel=1e-12)
    assert len(one) > 100


def test_order_of_rows_does_not_matter(fill: Fill) -> None:
    """Layers, walls and members listed from the other end give the same weights."""
    turned = {n: BUILDING[n][::-1] for n in ("layers", "walls", "members", "materials")}
    one, other = fill(BOOK, PITCHED, building()), fill(BOOK, PITCHED, building(**turned))
    assert other.column("level_weights", "W_level") == pytest.approx(
        one.column("level_weights", "W_level")
    )


def test_a_wall_without_openings_weighs_its_face(fill: Fill) -> None:
    """As an opening grows the weight falls by the opening times the load, to nothing at all."""
    found = []
    for opening in ("0 m2", "30 m2", "100 m2"):
        rows = building(walls=[wall("W", "Upper", "E", "40 m", "2.5 m", A_o=opening)])
        found.append(fill(BOOK, PITCHED, rows).by_key("walls", "W_wall")["W"])
    assert found == pytest.approx([410e3, 287e3, 0.0])


def test_template_is_satisfied_as_it_comes(fill: Fill) -> None:
    """The template's building has no problem and satisfies its checks under both codes."""
    for code in CODES:
        sheet = fill(BOOK, code=code)
        assert all(sheet.checks().values())
        assert sheet.statement["counts"]["problems"] == 0


def test_layers_may_come_from_a_file_of_rows(fill: Fill) -> None:
    """Thirty layers of one kPa on one build-up add up to thirty."""
    many = rows_of("layers", *(layer(f"F{n}", "F1", g_a="1 kPa") for n in range(30)),
                   layer("R", "R1", g_a="1 kPa"), layer("G", "G1", g_a="1 kPa"),
                   layer("E", "E1", g_a="1 kPa"))  # fmt: skip
    assert fill(BOOK, None, many).by_key("build_ups", "D_b")["F1"] == pytest.approx(30e3)


def test_layers_that_are_all_certain_meet_their_load(fill: Fill) -> None:
    """Where every layer is certain both loads are one, and rounding does not fail the check."""
    stated = [("F", "0 kPa")] * 4 + [("R", "0.20 kPa"), ("R", "0.10 kPa")]
    base = [slab("F0", "F", "100 mm"), slab("R0", "R", "10 mm"), slab("E0", "E", "100 mm")]
    layers = [
        layer(
            f"L{n}", of, g_a=g, t_l="0 mm", made_of="steel", part=part, certain="yes", lies="slope"
        )
        for n, (of, g) in enumerate(stated)
        for part in ["superimposed" if g == "0.20 kPa" else "self"]
    ]
    sheet = fill(BOOK, PITCHED, building(layers=[*base, *layers]))
    assert all(sheet.checks().values())
