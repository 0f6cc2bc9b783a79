"""Forces of the wind workbook against a second way: vector sums over faces, and hand sums."""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

import pytest
from hand_wind import Building, Wind
from sheets import levels_at

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]
    SheetOf = Callable[[Building], Sheet]

WIND = "wind-pressure"
CASES = "wind_cases"
STOREYS = {1: "F_{d}1", 2: "F_{d}2"}


def angle(degrees: float) -> float:
    """Return degrees in radians."""
    return math.radians(degrees)


FLAT = Building()
GABLE = Building(roof="gable", ridge="Y", theta=angle(20))
BUILDINGS = {
    "flat": FLAT,
    "flat, partially enclosed, US": replace(FLAT, internal=0.55, units="US", exposure="B"),
    "flat, tall, ASCE": replace(
        FLAT, levels=(24.0, 18.0, 12.0, 6.0, 0.0), length=(12.0, 20.0), code="ASCE 7-16", ground=900
    ),
    "flat, tall, ASCE, US": replace(
        FLAT,
        levels=(30.0, 20.0, 10.0, 0.0),
        length=(15.0, 9.0),
        code="ASCE 7-16",
        units="US",
        exposure="D",
        ground=300.0,
    ),
    "flat, basement": replace(FLAT, levels=(9.0, 5.5, 2.0, 0.0, -3.0)),
    "flat, between h/L": replace(FLAT, levels=(9.0, 4.0, 0.0), length=(12.0, 40.0)),
    "gable 20 deg": GABLE,
    "gable 12 deg": replace(GABLE, theta=angle(12)),
    "gable 10 deg, ridge along X": replace(GABLE, theta=angle(10), ridge="X"),
    "gable 8 deg": replace(GABLE, theta=angle(8), levels=(12.0, 8.0, 4.0, 0.0)),
    "gable 27 deg, US": replace(GABLE, theta=angle(27), ridge="X", units="US"),
    "gable 45 deg, ASCE": replace(GABLE, theta=angle(45), code="ASCE 7-16", exposure="D"),
    "gable 60 deg, partially enclosed": replace(GABLE, theta=angle(60), internal=0.55),
}
EVERY = pytest.mark.parametrize("building", BUILDINGS.values(), ids=BUILDINGS)


@pytest.fixture(scope="module")
def sheet_of(fill: Fill) -> Callable[[Building], Sheet]:
    """Return the wind workbook filled in for a building, once for each."""
    known: dict[Building, Sheet] = {}

    def sheet(building: Building) -> Sheet:
        if building not in known:
            levels = levels_at(*(f"{z!r} m" for z in building.levels))
            sets, system = building.sets(), {"code": building.code, "units": building.units}
            known[building] = fill(WIND, sets, levels, **system)
        return known[building]

    return sheet


def near(value: float | list[float]) -> object:
    """Compare within 1e-9, and within 0.001 N where the sum is nothing."""
    return pytest.approx(value, rel=1e-9, abs=1e-3)


@EVERY
def test_named_cases(building: Building, sheet_of: SheetOf) -> None:
    """Base shear, overturning and roof force of all eight cases are the vector sums over faces."""
    sheet = sheet_of(building)
    shear, moment, vertical = (sheet.by_key(CASES, name) for name in ("V_b", "M_b", "N_b"))
    for direction in "XY":
        for alternative in (1, 2):
            wind = Wind(building, direction, alternative)
            for sign, internal in (("+", 1), ("-", -1)):
                case = f"W{direction}{alternative}{sign}"
                assert shear[case] == near(wind.base_shear(internal)), case
                assert moment[case] == near(wind.overturning()), case
                assert vertical[case] == near(wind.vertical(internal)), case


@EVERY
def test_storey_forces(building: Building, sheet_of: SheetOf) -> None:
    """The force at each level is that of the wall around it; the highest takes the roof too."""
    sheet = sheet_of(building)
    for direction in "XY":
        for alternative in (1, 2):
            found = sheet.column("storey", STOREYS[alternative].format(d=direction))
            wind = Wind(building, direction, alternative)
            above = [z for z in building.levels if z >= 0.0]
            assert found[: len(above)] == near(wind.storeys()[: len(above)])
            assert sum(found) == near(wind.base_shear())


@EVERY
def test_least_design_wind(building: Building, sheet_of: SheetOf) -> None:
    """0.77 kPa on projected walls, 0.38 kPa on the projected roof, at their centroids (27.1.5)."""
    sheet = sheet_of(building)
    shear, moment = sheet.by_key(CASES, "V_b"), sheet.by_key(CASES, "M_b")
    for direction in "XY":
        expected = Wind(building, direction, 1).least()
        assert shear[f"W{direction}0"] == near(expected[0])
        assert moment[f"W{direction}0"] == near(expected[1])
        assert sheet.by_key(CASES, "N_b")[f"W{direction}0"] == 0.0


@EVERY
def test_roof_strips(building: Building, sheet_of: SheetOf) -> None:
    """The strips cover the roof; their forces are those of the zones or slopes one by one."""
    sheet = sheet_of(building)
    for direction, place in (("X", 0), ("Y", 1)):
        depth, breadth = building.length[place], building.length[1 - place]
        name = f"roof_{direction}"
        widths = sheet.column(name, f"w_{direction}")
        assert sum(widths) == pytest.approx(depth)
        for alternative in (1, 2):
            pressures = sheet.column(name, f"p_{direction}{alternative}")
            forces = [p * w * breadth for p, w in zip(pressures, widths, strict=True)]
            slopes = Wind(building, direction, alternative).slopes
            expected = [f.pressure * f.area * float(f.normal[2]) for f in slopes]
            if len(slopes) == 2:
                forces = [forces[0] + forces[1], forces[2] + forces[3]]
            assert forces == near(expected)
            internal = sheet.value("p_i")
            assert sheet.column(name, f"p_{direction}{alternative}p") == near(
                [p - internal for p in pressures]
            )
            assert sheet.column(name, f"p_{direction}{alternative}n") == near(
                [p + internal for p in pressures]
            )


@EVERY
def test_checks_of_the_workbook_are_satisfied(building: Building, sheet_of: SheetOf) -> None:
    """On a consistent building every check of the workbook itself is satisfied."""
    found = sheet_of(building).checks()
    assert len(found) >= 4
    assert all(found.values()), found


@EVERY
def test_internal_pressure(building: Building, sheet_of: SheetOf) -> None:
    """It cancels in base shear and overturning; uplift differs by 2 p_i times the plan area."""
    sheet = sheet_of(building)
    plan = building.length[0] * building.length[1]
    for case in ("WX1", "WX2", "WY1", "WY2"):
        for name in ("V_b", "M_b"):
            found = sheet.by_key(CASES, name)
            assert found[f"{case}+"] == found[f"{case}-"]
        vertical = sheet.by_key(CASES, "N_b")
        difference = vertical[f"{case}-"] - vertical[f"{case}+"]
        assert difference == pytest.approx(2 * sheet.value("p_i") * plan, rel=1e-9)


@EVERY
def test_heights_of_wall(building: Building, sheet_of: SheetOf) -> None:
    """The heights of wall that the levels take add up to the height above ground."""
    heights = sheet_of(building).column("storey", "h_t")
    assert sum(heights) == pytest.approx(building.eaves - max(building.levels[-1], 0.0))
    assert min(heights) >= 0.0


def test_shear_is_no_less_than_without_the_roof(sheet_of: SheetOf) -> None:
    """Suction on a windward slope does not relieve the frame (Fig. 27.3-1, note on shear).

    At 12 degrees the first alternative pulls the roof against the wind.
    """
    building = BUILDINGS["gable 12 deg"]
    wind = Wind(building, "X", 1)
    assert wind.force(wind.slopes)[0] < 0.0
    sheet = sheet_of(building)
    walls = sum(sheet.column("storey", "F_wX"))
    assert sheet.by_key(CASES, "V_b")["WX1+"] >= walls * (1 - 1e-9)


def test_two_levels_by_hand(fill: Fill) -> None:
    """A box 20 by 10 by 4 m in exposure C at 50 m/s, NSCP 2015, worked by hand.

    K = 2.01 (4.5/274.32)^(2/9.5) = 0.84605 up to 4.5 m; q = 0.613 x 0.84605 x 0.85 x 2500
    = 1102.1 Pa. Along X: L/B 2, (0.68 + 0.255) q x 10 m x 4 m = 41.219 kN. Along Y: L/B 0.5,
    (0.68 + 0.425) q x 20 m x 4 m = 97.426 kN. Half of each at the roof, so the walls turn the
    box by 82.438 and 194.85 kNm. Roof along X: 0.765 q over 4 m, 0.425 q over 4 m, 0.255 q over
    12 m, at 8, 4 and -4 m from mid-length: 0.765 x 4 x 8 + 0.425 x 4 x 4 - 0.255 x 12 x 4 =
    19.04 m2, by q x 10 m 209.8 kNm; uplift 7.82 m x 10 m x q = 86.18 kN.
    """
    sets = {"L_x": "20 m", "L_y": "10 m", "h": "4 m", "h_e": "4 m", "V": "50 m/s"}
    sheet = fill(WIND, sets, levels_at("4 m", "0 m"), code="NSCP 2015")
    assert sheet.value("q_h") == pytest.approx(1102.1, abs=0.05)
    shear, moment = sheet.by_key(CASES, "V_b"), sheet.by_key(CASES, "M_b")
    assert shear["WX1+"] == pytest.approx(41219, abs=5)
    assert shear["WY1+"] == pytest.approx(97426, abs=10)
    assert sheet.column("storey", "F_X1") == pytest.approx([20609, 20609], abs=3)
    assert moment["WX1+"] == pytest.approx(82438 + 209840, abs=50)
    assert moment["WX2+"] == pytest.approx(82438, abs=10)
    assert sheet.value("N_X1") == pytest.approx(-86180, abs=10)
    assert sheet.by_key(CASES, "N_b")["WX1+"] == pytest.approx(-86180 - 39676, abs=15)
    assert shear["WX0"] == pytest.approx(30800.0)
    assert moment["WY0"] == pytest.approx(123200.0)


def test_square_plan_is_the_same_both_ways(sheet_of: SheetOf) -> None:
    """On a square plan with a flat roof the results along X and Y are equal."""
    sheet = sheet_of(replace(FLAT, length=(15.0, 15.0)))
    for name in ("V_b", "M_b", "N_b", "p_cw", "p_cl", "p_cs"):
        found = sheet.by_key(CASES, name)
        for case in ("1+", "1-", "2+", "2-", "0"):
            assert found[f"WX{case}"] == found[f"WY{case}"], (name, case)


def test_a_turned_building_has_the_results_exchanged(sheet_of: SheetOf) -> None:
    """A gable turned by 90 degrees has along Y what it had along X."""
    one = sheet_of(GABLE)
    other = sheet_of(replace(GABLE, ridge="X", length=GABLE.length[::-1]))
    for name in ("V_b", "M_b", "N_b"):
        before, after = one.by_key(CASES, name), other.by_key(CASES, name)
        for case in ("1+", "1-", "2+", "2-", "0"):
            assert after[f"WY{case}"] == near(before[f"WX{case}"])
            assert after[f"WX{case}"] == near(before[f"WY{case}"])


def test_forces_grow_with_the_square_of_the_speed(sheet_of: SheetOf) -> None:
    """Twice the speed is four times every pressure and force; the least design wind stays."""
    one, two = (sheet_of(replace(GABLE, speed=v)) for v in (30.0, 60.0))
    for name in ("V_b", "M_b", "N_b", "p_cw", "p_cl", "p_cs"):
        before, after = one.by_key(CASES, name), two.by_key(CASES, name)
        for case, value in before.items():
            assert after[case] == near(value if case.endswith("0") else 4 * value), (name, case)


def test_results_are_the_extremes_of_the_cases(sheet_of: SheetOf) -> None:
    """The results carried forward are those of the governing cases, and the cases are named."""
    for building in (FLAT, GABLE):
        sheet = sheet_of(building)
        for result, column, pick in (
            ("V_max", "V_b", max), ("M_max", "M_b", max), ("N_min", "N_b", min),
        ):  # fmt: skip
            cases = sheet.by_key(CASES, column)
            assert sheet.value(result) == pick(cases.values())
            named = next(e for e in sheet.item(CASES)["envelope"] if e["column"] == column)
            assert cases[named["row"]] == sheet.value(result)
            assert "governing" in sheet.item(CASES)


def test_wall_pressures_of_the_cases(sheet_of: SheetOf) -> None:
    """Net pressures: external less internal, with its sign, on windward, leeward and side walls."""
    sheet = sheet_of(replace(FLAT, internal=0.55))
    internal = sheet.value("p_i")
    assert internal == pytest.approx(0.55 * sheet.value("q_h"))
    for case, sign in (("WX1+", 1), ("WX1-", -1), ("WY2+", 1), ("WY2-", -1)):
        leeward = sheet.value(f"p_l{case[1]}") - sign * internal
        assert sheet.by_key(CASES, "p_cl")[case] == near(leeward)
        assert sheet.by_key(CASES, "p_cs")[case] == near(sheet.value("p_s") - sign * internal)
        highest = max(sheet.column("windward", "p_w"))
        assert sheet.by_key(CASES, "p_cw")[case] == near(highest - sign * internal)
