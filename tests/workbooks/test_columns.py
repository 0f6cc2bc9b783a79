"""The column accumulation against published take-downs and against one worked by hand."""

from __future__ import annotations

import random
from typing import TYPE_CHECKING

import pytest
from hand_columns import Floor, accumulate
from sheets import CODES, rows_of
from stacks import BOOK, TYPED, base, combination, kilonewtons, level, stack

from calcbook import cases, codes
from calcbook.errors import InputError

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

NSCP, ASCE = CODES

# Worked Examples to Eurocode 2, column C2: kN below the roof and floors 8 to 1.
K1_G = [612.4, 1224.8, 1837.2, 2449.6, 3070.4, 3691.2, 4312.0, 4932.8, 5553.6]
K1_Q = [42.0, 321.7, 601.4, 881.1, 1160.8, 1440.5, 1720.2, 1999.7, 2279.5]


@pytest.fixture(scope="module")
def eight_storeys(fill: Fill) -> Sheet:
    """Return column C2: 6.1 x 9.1 m with a reaction factor of 1.26, round above, square below."""
    round_, square = "169823 mm2", "250000 mm2"
    levels = [
        level(str(n) if n < 9 else "roof", "55.51 m2", "8.5 kPa", "as typed", h_s="4.2 m",
              L_a="0.6 kPa" if n == 9 else "4.0 kPa", A_ct=round_ if n > 5 else square)
        for n in range(9, 0, -1)
    ]  # fmt: skip
    for n, one in enumerate(levels):
        one["elevation"] = f"{4.2 * (9 - n):g} m"
    sets = {**TYPED, "c_x": "1.00", "c_y": "1.26", "gamma_c": "25 kN/m3"}
    return fill(BOOK, sets, stack(*levels))


def test_permanent_load_of_a_published_column(eight_storeys: Sheet) -> None:
    """Gk below each level as printed, to the rounding of its addends (0.07 kN a level)."""
    found = kilonewtons(eight_storeys, "column", "P_D")
    for count, (ours, printed) in enumerate(zip(found, K1_G, strict=True), 1):
        assert ours == pytest.approx(printed, abs=0.08 * count)


def test_variable_load_of_a_published_column(eight_storeys: Sheet) -> None:
    """Qk below each level as printed, unreduced, to the rounding of its addends."""
    found = kilonewtons(eight_storeys, "column", "P_L0")
    for count, (ours, printed) in enumerate(zip(found, K1_Q, strict=True), 1):
        assert ours == pytest.approx(printed, abs=0.1 * count)


def test_continuity_raises_loads_but_not_the_reduced_area(eight_storeys: Sheet) -> None:
    """The load is 1.26 times area by pressure, the area in the reduction stays 55.51 m2 a floor."""
    assert eight_storeys.value("A_T") == pytest.approx(55.51)
    assert eight_storeys.column("reduction", "A_f")[-1] == pytest.approx(9 * 55.51)
    assert kilonewtons(eight_storeys, "dead", "G_f")[0] == pytest.approx(1.26 * 55.51 * 8.5)


def four_loads(fill: Fill, code: str, loads: dict[str, float], *, assembly: bool = False) -> Sheet:
    """Return a stack whose base loads are given in kN: a roof, and a floor of 1 m2 or so."""
    roof = loads["Lr"] / (1.0 if code == NSCP else 0.96) or 1e-9
    live = codes.get(code).uses()["assembly fixed seats"].load
    area = loads["L"] / float(live.split()[0]) if assembly and loads["L"] else 1.0
    floor = level("Floor", f"{area!r} m2", f"{loads['D'] / area!r} kPa", "as typed")
    floor |= {"use": "assembly fixed seats"} if assembly and loads["L"] else {
        "L_a": f"{loads['L']!r} kPa"
    }  # fmt: skip
    top = level("Roof", f"{roof!r} m2", "0 kPa", "roof")
    lateral = {n: f"{loads.get(n, 0.0)!r} kN" for n in ("W_c", "W_t", "E_c", "E_t")}
    sets = {**TYPED, "lateral": "typed"}
    if code == ASCE:
        sets["p_S"] = f"{loads.get('S', 0.0) / roof!r} kPa"
    return fill(BOOK, sets, stack(top, floor, lateral=[{}, lateral]), code=code)


def test_combinations_of_a_philippine_column(fill: Fill) -> None:
    """D 700, Lr 300, L 1300, W +300/-200, E +200/-150, f_1 0.5, in thousands of kN."""
    loads = {"D": 0.7, "Lr": 0.3, "L": 1.3, "W_c": 0.3, "W_t": -0.2, "E_c": 0.2, "E_t": -0.15}
    sheet = four_loads(fill, NSCP, loads)
    assert base(sheet, "N_D", "N_L", "N_Lr") == pytest.approx([0.7, 1.3, 0.3])
    expected = {
        "1": 0.98, "2a": 3.07, "3a": 1.97, "4a W+": 1.94, "5 E+": 1.69, "6 W-": 0.43, "7 E-": 0.48,
    }  # fmt: skip
    for key, value in expected.items():
        assert combination(sheet, key) == pytest.approx(value, abs=1e-9), key
    assert base(sheet, "N_u", "N_up") == pytest.approx([3.07, 0.43])
    assert [e["row"] for e in sheet.item("strength")["envelope"]] == ["2a", "6 W-"]


def test_governing_combinations_read_in_print(
    fill: Fill, published: Callable[[str], list[dict[str, str]]]
) -> None:
    """The largest and the smallest of every published set of loads, in tenths of its unit."""
    rows = [r for r in published("governing_combinations") if r["code"] in CODES]
    assert len(rows) >= 4
    for row in rows:
        loads = {n: float(row[n]) / 10 for n in ("D", "L", "Lr", "S")}
        for case in "WE":
            loads[f"{case}_c"] = float(row[f"{case}_toward"]) / 10
            loads[f"{case}_t"] = -abs(float(row[f"{case}_away"])) / 10
        if row["f_1"] == "0.5" and max(loads.values()) > 4:
            loads = {n: v / 1000 for n, v in loads.items()}
        scale = float(row["D"] or 0) / loads["D"] if loads["D"] else 10.0
        sheet = four_loads(fill, row["code"], loads, assembly=float(row["f_1"]) == 1.0)
        found = [scale * force for force in base(sheet, "N_u", "N_up")]
        assert found == pytest.approx([float(row["largest"]), float(row["smallest"])], abs=5e-4)


def test_every_combination_of_the_code_is_there(fill: Fill) -> None:
    """Each combination has a row; one with wind or earthquake has a row for either sense."""
    for code in CODES:
        cases = {"D", "L", "Lr", "W", "E"} | ({"S"} if code == ASCE else set())
        sheet = fill(BOOK, code=code)
        for kind in ("strength", "service"):
            listed = codes.get(code).combinations(kind, cases)
            twice = [c for c in listed if {"W", "E"} & set(c.factors)]
            assert len(sheet.item(kind)["rows"]) == len(listed) + len(twice)


@pytest.mark.parametrize(("code", "system"), [(NSCP, "SI"), (ASCE, "SI"), (ASCE, "US")])
def test_reduction_by_the_number_of_floors(code: str, system: str, fill: Fill) -> None:
    """414 ft2 a floor: 0.6186, 0.5106, 0.4628, 0.4343 for one to four floors."""
    levels = [level(str(n), "414 ft2", "3 kPa", "office") for n in range(4)]
    sheet = fill(BOOK, TYPED, stack(*levels), code=code, units=system)
    expected = [0.61860, 0.51064, 0.46281, 0.43430]
    assert sheet.column("reduction", "R_f") == pytest.approx(expected, abs=2e-4)


def test_reductions_read_in_print(
    fill: Fill, published: Callable[[str], list[dict[str, str]]]
) -> None:
    """Published factors of columns: the whole area on the second of two floors."""
    count = 0
    for row in published("floor_reductions"):
        if row["K_LL"] != "4" or row["n_f"] != "2" or row["code"] not in CODES:
            continue
        rule = {"rule": "rate per area"} if row["subject"].startswith("printed") else {}
        if rule and row["code"] != NSCP:
            continue
        floor = level("1", row["A_T"], "4.0 kPa", "office")
        tiny = {**level("2", "0.000001 m2", "4.0 kPa", "office")}
        sheet = fill(BOOK, {**TYPED, **rule}, stack(tiny, floor), code=row["code"],
                     units=row["system"])  # fmt: skip
        assert sheet.column("reduction", "R_f")[1] == pytest.approx(float(row["R_f"]), abs=6e-5)
        count += 1
    assert count >= 8


def test_the_printed_rate_gives_little(fill: Fill) -> None:
    """0.08 percent for each square metre over 15: 6.8 percent at 100 m2, stated with a remark."""
    rows = stack(level("1", "100 m2", "4.0 kPa", "office"))
    sheet = fill(BOOK, {**TYPED, "rule": "rate per area"}, rows)
    assert sheet.column("reduction", "R_f") == pytest.approx([1 - 0.068])
    remarks = [i["text"] for i in sheet.items() if i["kind"] == "remark" and i["applies"]]
    assert any("6.8 percent at 100 m²" in text for text in remarks)


USES = {
    "office": (2.4, 2.4, "yes"), "hospital ward": (1.9, 1.92, "yes"),
    "library stack": (7.2, 7.18, "heavy"), "storage light": (6.0, 6.0, "heavy"),
    "garage private": (1.9, 1.92, "garage"),
    "assembly fixed seats": (2.9, 2.87, "assembly"), "roof": (1.0, 0.96, "roof"),
}  # fmt: skip


def random_stack(code: str, draw: random.Random) -> tuple[list[dict[str, str]], list[Floor]]:
    """Return the same random stack as rows of the workbook and as floors for the hand."""
    rows, floors = [], []
    for n in range(draw.randint(3, 12)):
        use = "roof" if n == 0 else draw.choice([*USES, "as typed"][:6])
        area, dead, least = (round(draw.uniform(*r), 3) for r in ((2, 80), (3, 9), (1, 3)))
        added = round(draw.choice([0.0, 0.0, draw.uniform(0, 4)]), 2) if use != "roof" else 0.0
        side = draw.randint(200, 900)
        load = USES[use][0 if code == NSCP else 1] if use in USES else 0.0
        grade = draw.random() < 0.15
        rows.append(level(
            f"L{n}", f"{area} m2", f"{dead} kPa", use, D_min=f"{least} kPa", L_a=f"{added} kPa",
            A_ct=f"{side**2} mm2", carried_by="ground" if grade else "frame",
        ))  # fmt: skip
        pool = USES[use][2] if use in USES else "yes"
        own = 23.6 * (side / 1000) ** 2 * 3.0
        floors.append(Floor(area, dead, least, load + added, pool, own, grade, use))
    return rows, floors


def roof_live_load(code: str, floors: list[Floor]) -> float:
    """Return the live load of a flat roof, kPa, by the area carried."""
    area = sum(f.area for f in floors if f.pool == "roof" and not f.on_grade)
    if code == NSCP:
        return 1.0 if area <= 20 else 0.75 if area <= 60 else 0.6
    r_1 = 1.0 if area <= 18.58 else 0.6 if area >= 55.74 else max(0.6, 1.2 - 0.011 * area)
    return max(0.58, min(0.96, 0.96 * r_1))


@pytest.mark.parametrize("code", CODES)
@pytest.mark.parametrize("parking", ["not reduced", "as the code permits"])
def test_random_stacks_by_hand(code: str, parking: str, fill: Fill) -> None:
    """Every load case below every level agrees with plain numbers, added again at each level."""
    draw = random.Random(f"{code} {parking}")  # noqa: S311  the same stacks every time
    for _ in range(12):
        rows, floors = random_stack(code, draw)
        if all(f.on_grade for f in floors):
            continue
        sheet = fill(BOOK, {**TYPED, "parking": parking}, stack(*rows), code=code)
        permits = parking == "as the code permits"
        roof = roof_live_load(code, floors)
        expected = accumulate(code, floors, roof=roof, parking=permits)
        for name in ("D", "D_min", "L0", "L", "L1", "Lr"):
            column = {"D_min": "P_Dmin"}.get(name, f"P_{name}")
            found = kilonewtons(sheet, "column", column)
            assert found == pytest.approx([getattr(f, name) for f in expected], abs=1e-6), name
        for name in ("P_D", "P_Dmin", "P_L0", "P_Lr"):
            steps = kilonewtons(sheet, "column", name)
            assert steps == sorted(steps)


def test_reduced_load_is_not_a_sum_of_reduced_loads(fill: Fill) -> None:
    """Two floors of 30 m2: 0.4 to 0.67 of the whole, not each floor reduced by itself and added."""
    rows = stack(*(level(str(n), "30 m2", "4 kPa", "office") for n in range(2)))
    found = kilonewtons(fill(BOOK, TYPED, rows), "column", "P_L")
    alone = 0.25 + 4.57 / 120**0.5
    assert found[0] == pytest.approx(72 * alone)
    assert found[1] == pytest.approx(144 * (0.25 + 4.57 / 240**0.5))
    assert found[1] < 2 * 72 * alone


def test_dead_load_scales(fill: Fill) -> None:
    """Twice every area, section, line load and lateral load: twice every load."""

    def rows(k: int) -> dict[str, list[object]]:
        cells = level("1", f"{11 * k} m2", "5 kPa", "assembly fixed seats", A_ct=f"{k * 90000} mm2")
        found = stack(cells, lateral=[{"W_c": f"{7 * k} kN", "E_t": f"{-5 * k} kN"}])
        line = {"key": "a", "what": "typed", "line_of": "", "line_level": "1", "l_k": "4 m"}
        return {**found, **rows_of("lines", {**line, "w_t": f"{3 * k} kN/m"})}

    one, two = (fill(BOOK, {**TYPED, "lateral": "typed"}, rows(k)) for k in (1, 2))
    names = ("N_D", "N_Dmin", "N_L", "N_Wc", "N_Et", "N_u", "N_up", "N_s", "N_sp", "W_base")
    assert base(two, *names) == pytest.approx([2 * v for v in base(one, *names)])


@pytest.mark.parametrize("code", CODES)
def test_unit_systems_agree(code: str, fill: Fill) -> None:
    """The same stack in SI and in US customary units: equal to half a percent."""
    si, us = (fill(BOOK, code=code, units=system) for system in ("SI", "US"))
    names = ("N_D", "N_Dmin", "N_L0", "N_L", "N_Lr", "N_u", "N_up")
    assert base(us, *names) == pytest.approx(base(si, *names), rel=5e-3)
    assert us.item("N_u")["value"]["unit"] == "kip"


GRID = {
    **rows_of("grid_x", *({"key": str(n + 1), "x": f"{6 * n} m"} for n in range(4))),
    **rows_of("grid_y", *({"key": "ABC"[n], "y": f"{5 * n} m"} for n in range(3))),
}


@pytest.mark.parametrize(("over_x", "over_y"), [(0.0, 0.0), (1.0, 0.5), (0.3, 1.7)])
def test_tributary_areas_by_voronoi_cells(over_x: float, over_y: float, fill: Fill) -> None:
    """Every column's area is its Voronoi cell cut at the slab edge; together they are the slab."""
    shapely = pytest.importorskip("shapely")
    points = shapely.MultiPoint([(6.0 * i, 5.0 * j) for i in range(4) for j in range(3)])
    slab = shapely.box(-over_x, -over_y, 18 + over_x, 10 + over_y)
    cells = shapely.voronoi_polygons(points, extend_to=slab.buffer(50)).geoms
    areas = {}
    for cell in cells:
        inside = next(p for p in points.geoms if cell.contains(p))
        areas[inside.x, inside.y] = cell.intersection(slab).area
    total = 0.0
    for i in range(4):
        for j in range(3):
            sets = {
                "at_x": str(i + 1),
                "at_y": "ABC"[j],
                "o_x": f"{over_x} m",
                "o_y": f"{over_y} m",
            }
            found = fill(BOOK, sets, GRID).value("A_T")
            assert found == pytest.approx(areas[6.0 * i, 5.0 * j], abs=1e-9)
            total += found
    assert total == pytest.approx(slab.area)


def test_own_weight_clear_and_floor_to_floor(fill: Fill) -> None:
    """3.6 m storeys of 350 x 350: floor to floor 3.6 m, clear 3.1 m under 500 mm of floor."""
    whole = kilonewtons(fill(BOOK, {"length_by": "floor to floor"}), "dead", "G_c")
    clear = kilonewtons(fill(BOOK, {"length_by": "clear", "t_f": "500 mm"}), "dead", "G_c")
    assert whole == pytest.approx([23.6 * 0.35**2 * 3.6] * 2 + [0.0])
    assert clear == pytest.approx([23.6 * 0.35**2 * 3.1] * 2 + [0.0])


def test_round_column(fill: Fill) -> None:
    """A column of 465 mm diameter and 4.2 m length at 25 kN/m3 weighs 17.83 kN."""
    rows = stack(level("1", "1 m2", "1 kPa", "office", h_s="4.2 m", b_c="465 mm"))
    sets = {**TYPED, "section": "round", "gamma_c": "25 kN/m3"}
    assert kilonewtons(fill(BOOK, sets, rows), "dead", "G_c") == pytest.approx([17.83], abs=0.005)


def test_walls_and_beams_land_at_their_level(fill: Fill) -> None:
    """Line loads of the take-off by key, others as typed; those on grade do not count."""
    line = {"line_of": "", "w_t": "0 kN/m"}
    rows = rows_of(
        "lines",
        {**line, "key": "a", "what": "wall", "line_of": "E-2", "line_level": "Level 2",
         "l_k": "5 m"},
        {**line, "key": "b", "what": "beam", "line_of": "B-R", "line_level": "Roof", "l_k": "4 m"},
        {**line, "key": "c", "what": "typed", "line_level": "Roof", "l_k": "2 m", "w_t": "3 kN/m"},
        {**line, "key": "d", "what": "wall", "line_of": "E-1", "line_level": "Ground",
         "l_k": "5 m"},
    )  # fmt: skip
    sheet = fill(BOOK, {}, rows)
    assert kilonewtons(sheet, "dead", "G_l") == pytest.approx([4 * 2.1 + 6.0, 5 * 7.6, 0.0])
    assert all(sheet.checks().values())


def test_many_columns_as_cases(fill: Fill) -> None:
    """A place for each case: the areas of four columns at once, by half-spans and overhangs."""
    book = fill(BOOK).book
    columns = {"at_x": ["1", "2", "1", "3"], "at_y": ["A", "A", "B", "B"]}
    found = cases.evaluate(book, columns)["A_T"]
    assert found == pytest.approx([3.3 * 3.3, 6 * 3.3, 3.3 * 6, 6 * 6])
    with pytest.raises(InputError, match="case 2"):
        cases.evaluate(book, {"at_x": ["1", "9"]})
