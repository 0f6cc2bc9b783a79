"""Load combinations against published totals and against the code's words worked by hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from effects import BOOK, effect, forces, totals
from hypothesis import given, settings
from hypothesis import strategies as st
from sheets import CODES, rows_of

from calcbook import cases

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

NSCP, ASCE = CODES
VALUES = st.integers(-400, 400).map(float)
LOADS = st.fixed_dictionaries(
    dict.fromkeys(("L", "L1", "Lr", "E", "W1", "W2", "W3", "W4"), VALUES)
    | {"D": VALUES, "least": st.integers(0, 10)}
)


def words(sheet: Sheet, schedule: str, column: str) -> list[str]:
    """Return a column of words."""
    found = next(c for c in sheet.item(schedule)["columns"] if c["name"] == column)
    return list(found["texts"])


def test_governing_combinations_read_in_print(
    fill: Fill, published: Callable[[str], list[dict[str, str]]]
) -> None:
    """Largest and smallest of every published set of loads: ASCE 7-10 2.5, C1, and NSCP 203.3.1."""
    listed = [r for r in published("governing_combinations") if r["code"] in CODES]
    assert len(listed) >= 5
    for n, row in enumerate(listed):
        live = "L1" if float(row["f_1"]) == 1.0 else "L"
        loads = {c: float(row[c]) for c in ("D", "Lr", "S")} | {live: float(row["L"])}
        wind = {"W1": float(row["W_toward"]), "W2": -float(row["W_away"])}
        rows = [
            effect(f"{n}{side}", row["code"], E=float(row[f"E_{side}"]), **wind, **loads)
            for side in ("toward", "away")
        ]
        sheet = fill(BOOK, None, forces(*rows), code=row["code"])
        largest, smallest = (sheet.column("strength_of_P", c) for c in ("P_u", "P_um"))
        found = (max(largest) / 1e3, min(smallest) / 1e3)
        expected = (float(row["largest"]), float(row["smallest"]))
        assert found == pytest.approx(expected, abs=5e-4), row


def test_every_combination_of_a_worked_example(fill: Fill) -> None:
    """NSCP 203.3.1: 980, 3070, 1970, 1940, 1690, 430, 480 kN, each by number of combination.

    Loads from a question page, totals derived; E is +200 in one row and -150 in the other.
    """
    loads = {"D": 700.0, "Lr": 300.0, "L": 1300.0, "W1": 300.0, "W2": -200.0}
    rows = [effect("up", E=200.0, **loads), effect("down", E=-150.0, **loads)]
    sheet = fill(BOOK, {"row_P": "up"}, forces(*rows))
    table = {n: sheet.by_key("strength_p_P", f"U_P{n}p") for n in "12345"}
    found = [table[n]["up"] / 1e3 for n in "12345"]
    assert found == pytest.approx([980, 3070, 1970, 1940, 1690])
    least = {n: sheet.by_key("strength_m_P", f"U_P{n}m")["down"] / 1e3 for n in "67"}
    assert least == pytest.approx({"6": 430, "7": 480})
    assert sheet.column("strength_of_P", "P_u")[0] == pytest.approx(3070e3)
    assert sheet.column("strength_of_P", "P_um") == pytest.approx([430e3, 430e3])
    assert words(sheet, "strength_of_P", "c_P") == ["2a", "2a"]
    assert words(sheet, "strength_of_P", "beside_P") == ["W2", "W2"]
    row = sheet.by_key("strength_row_P", "U_pp")
    assert [row[k] / 1e3 for k in ("1", "2a", "3a", "4a", "5")] == pytest.approx(
        [980, 3070, 1970, 1940, 1690]
    )


@settings(max_examples=25, deadline=None)
@given(loads=LOADS, code=st.sampled_from(CODES), relieving=st.booleans())
def test_extremes_are_those_of_the_words(
    fill: Fill, loads: dict[str, float], code: str, relieving: bool
) -> None:
    """Any effects: the largest and smallest are those of the printed words, worked one by one."""
    loads = loads | {"Dmin": loads["D"] * loads.pop("least") / 10, "S": 17.0}
    given = {n: v for n, v in loads.items() if n != "S" or code == ASCE}
    sets = {"relief": "left out" if relieving else "kept", "row_P": "one"}
    sheet = fill(BOOK, sets, forces(effect("one", code, **given)), code=code)
    for kind, name in (("strength", "u"), ("service", "s")):
        every = list(totals(code, kind, given, relieving=relieving))
        largest = sheet.column(f"{kind}_of_P", f"P_{name}")[0] / 1e3
        smallest = sheet.column(f"{kind}_of_P", f"P_{name}m")[0] / 1e3
        assert largest == pytest.approx(max(v for _, v in every), abs=1e-6)
        assert smallest == pytest.approx(min(v for _, v in every), abs=1e-6)
        named = words(sheet, f"{kind}_of_P", f"c_P{'' if kind == 'strength' else 's'}")[0]
        assert largest == pytest.approx(max(v for n, v in every if n == named), abs=1e-6)
    assert all(sheet.checks().values())


@pytest.mark.parametrize("code", CODES)
def test_rain_soil_fluids_and_temperature_have_columns(fill: Fill, code: str) -> None:
    """With the other loads, the extremes are again those of the printed words."""
    loads = {"D": 90.0, "Dmin": 70.0, "L": 40.0, "L1": 25.0, "Lr": 6.0, "E": 30.0, "W1": -55.0,
             "W2": 45.0, "W3": 5.0, "W4": -8.0, "R": 12.0, "H": 31.0, "F": -22.0}  # fmt: skip
    loads |= {"T": 9.0} if code == NSCP else {"S": 14.0}
    sets = {"others": "some", "row_P": "one"}
    moment = effect("B1 left", code, "kN*m", "M", **loads)
    rows = forces(effect("one", code, **loads)) | rows_of("moments", moment)
    sheet = fill(BOOK, sets, rows, code=code)
    for kind, name in (("strength", "u"), ("service", "s")):
        every = [v for _, v in totals(code, kind, loads)]
        found = [sheet.column(f"{kind}_of_P", f"P_{name}{m}")[0] / 1e3 for m in ("", "m")]
        assert found == pytest.approx([max(every), min(every)])
        v = "U" if kind == "strength" else "Q"
        for quantity in ("P", "M"):
            worked = sheet.column(f"{kind}_row_{quantity}", f"{v}_{quantity.lower()}p")
            assert max(worked) / 1e3 == pytest.approx(max(every))
    assert all(sheet.checks().values())


def test_wind_cases_do_not_mirror_and_are_named(fill: Fill) -> None:
    """Each wind case counts with its own sign only, and is named as the engineer named it."""
    winds = rows_of("winds", *({"key": k, "wind_from": ""} for k in ("WX1+", "WX1-", "W0")))
    row = effect("seat", D=20.0, W1=-40.0, W2=5.0, W3=-10.0)
    sheet = fill(BOOK, {"row_P": "seat"}, forces(row) | winds)
    assert sheet.column("strength_of_P", "P_um") == pytest.approx([(18 - 40) * 1e3])
    assert words(sheet, "strength_of_P", "beside_P") == ["WX1+"]
    assert sheet.column("strength_of_P", "P_u") == pytest.approx([(24 + 5) * 1e3])
    assert words(sheet, "strength_of_P", "with_P") == ["WX1-"]


def test_uplift_is_told_where_it_is_looked_for(fill: Fill) -> None:
    """A negative smallest lifts a reaction; a shear has another sense only."""
    seat, shear = effect("seat", D=20.0, W1=-40.0), effect("shear", D=20.0, W1=-40.0)
    held = effect("base", D=200.0, W1=-40.0)
    rows = forces(seat, shear | {"lifts": "other sense"}, held)
    sheet = fill(BOOK, {"row_P": "seat"}, rows)
    assert words(sheet, "strength_of_P", "uplift") == ["lifts", "", "held down"]
    assert sheet.value("n_up") == 1
    cautions = [i for i in sheet.items() if i["kind"] == "remark" and "Rows marked" in i["text"]]
    assert [i["applies"] for i in cautions] == [True]


def test_live_load_is_left_out_where_it_relieves_and_said_so(fill: Fill) -> None:
    """A hogging moment that live load relieves is largest without it; kept, it is smaller."""
    row = effect("one", D=50.0, L=-30.0, E=20.0)
    left_out = fill(BOOK, {"row_P": "one"}, forces(row))
    assert left_out.column("strength_of_P", "P_u") == pytest.approx([80e3])
    assert words(left_out, "strength_of_P", "with_P") == ["+E, no L"]
    kept = fill(BOOK, {"row_P": "one", "relief": "kept"}, forces(row))
    assert kept.column("strength_of_P", "P_u") == pytest.approx([70e3])
    assert words(kept, "strength_of_P", "c_P") == ["1"]


def test_us_units_give_the_same_newtons(fill: Fill) -> None:
    """Effects typed in kip are the same effects, whatever unit they are shown in."""
    row = effect("one", unit="kip", D=100.0, L=60.0, W1=-150.0, E=30.0)
    si = fill(BOOK, {"row_P": "one"}, forces(row))
    us = fill(BOOK, {"row_P": "one"}, forces(row), units="US")
    for column in ("P_u", "P_um"):
        found = us.column("strength_of_P", column)
        assert found == pytest.approx(si.column("strength_of_P", column), rel=1e-12)


def test_many_cases_give_what_each_gives_alone(fill: Fill) -> None:
    """Relief varied over cases gives each case its own largest, the columns idle in both."""
    row = forces(effect("one", D=50.0, L=-30.0, E=20.0))
    book = fill(BOOK, {"row_P": "one"}, row).book
    told = cases.read(book, {"relief": ["left out", "kept"]})
    found = cases.compute(book.many(), told.values, told.rows)
    assert list(found["P_u"][0]) == pytest.approx([80e3, 70e3])  # type: ignore[index]
