"""Effects typed wrongly: the row is named, and the others have their combinations."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from effects import BOOK, effect, forces
from sheets import rows_of

from calcbook.errors import InputError
from calcbook.run import find_item

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]


def column(sheet: Sheet, schedule: str, name: str) -> dict[str, Any]:
    """Return a column, whatever is wrong with it."""
    item = find_item(sheet.statement, schedule)
    assert item is not None
    return next(dict(c) for c in item["columns"] if c["name"] == name)


def thirty(**bad: str) -> list[dict[str, str]]:
    """Return thirty effects, the twelfth with cells typed wrongly."""
    rows = [effect(f"B{n}", D=10.0 * n, L=5.0 * n, W1=-3.0, E=2.0) for n in range(1, 31)]
    rows[11] |= {f"P_{name}": text for name, text in bad.items()}
    return rows


@pytest.mark.parametrize(("name", "text", "said"), [
    ("D", "1,2 kN", "row B12"),
    ("W2", "12 kN*m", "row B12"),
    ("E", "", "has no value"),
])  # fmt: skip
def test_a_bad_row_of_thirty_is_named_and_the_rest_is_combined(
    fill: Fill, name: str, text: str, said: str
) -> None:
    """The row says why it has no values, in numbers and in words; twenty-nine have theirs."""
    good = fill(BOOK, {"row_P": "B1"}, forces(*thirty()))
    sheet = fill(BOOK, {"row_P": "B1"}, forces(*thirty(**{name: text})))
    assert said in column(sheet, "forces", f"P_{name}")["problem"][11]
    for wanted in ("P_u", "c_P", "with_P", "P_um", "uplift"):
        found = column(sheet, "strength_of_P", wanted)
        problems = found["problem"]
        assert problems[11] == f"row B12: not available because of P_{name}"
        assert not any(p for n, p in enumerate(problems) if n != 11)
        assert found["texts"][11] == ""
    whole = good.column("strength_of_P", "P_u")
    assert column(sheet, "strength_of_P", "P_u")["si"] == pytest.approx(
        [None if n == 11 else v for n, v in enumerate(whole)]
    )
    solver = find_item(sheet.statement, "strength_P")
    assert solver is not None
    assert "1 row left out for want of a value" in solver["says"]
    check = next(i for i in sheet.items() if "strength, forces" in i["meaning"])
    assert check["satisfied"] is None
    assert "B12" in check["problem"]


def test_a_load_that_acts_is_asked_for_in_every_row(fill: Fill) -> None:
    """Where fluids act, a row without them has no value: none is taken as 0 in silence."""
    rows = [effect("tank", D=90.0, R=0.0, H=0.0, F=12.0, T=0.0), effect("bare", D=10.0)]
    sheet = fill(BOOK, {"others": "some", "row_P": "tank"}, forces(*rows))
    found = column(sheet, "strength_of_P", "P_u")
    assert found["si"][0] == pytest.approx(1.4 * 102e3)
    assert found["problem"] == ["", "row bare: not available because of P_R"]


def test_what_does_not_act_is_said(fill: Fill) -> None:
    """Loads taken as 0 are named by the solver and in a remark, the wind left over is not."""
    sheet = fill(BOOK, {"row_P": "one"}, forces(effect("one", D=10.0)))
    assert "taken as 0, not acting: R, H, F, T" in sheet.item("strength_P")["says"]
    remarks = [i["text"] for i in sheet.items() if i["kind"] == "remark" and i["applies"]]
    assert any("taken as 0" in text for text in remarks)


def test_a_column_that_does_not_apply_is_not_combined(fill: Fill) -> None:
    """Rain and a fifth wind typed before they were taken out count nowhere."""
    row = effect("one", D=10.0, R=500.0) | {"P_W5": "900 kN"}
    sheet = fill(BOOK, {"row_P": "one"}, forces(row))
    assert sheet.column("strength_of_P", "P_u") == pytest.approx([14e3])


def test_more_wind_cases_than_columns_are_refused(fill: Fill) -> None:
    """Nine named wind cases have eight columns: the check fails and nothing is combined."""
    winds = rows_of("winds", *({"key": f"W{n}", "wind_from": ""} for n in range(9)))
    row = effect("one", D=10.0) | {f"P_W{n}": "1 kN" for n in range(5, 9)}
    sheet = fill(BOOK, {"row_P": "one"}, forces(row) | winds)
    assert sheet.checks()["There is a column for each named wind case"] is False
    solver = find_item(sheet.statement, "strength_P")
    assert solver is not None
    assert "9 wind cases are named, and 8 columns of wind are given" in solver["problem"]


LEAST = (
    "Least dead load is no more than dead load, in its sense, where what may be absent adds: forces"
)


@pytest.mark.parametrize(("dead", "least", "loose", "kept", "cautions"), [
    (10.0, 12.0, "adds", False, 0), (10.0, 8.0, "adds", True, 0), (-10.0, -8.0, "adds", True, 0),
    (-10.0, -12.0, "adds", False, 0), (5.0, -20.0, "adds", True, 1),
    (10.0, 12.0, "relieves", True, 1), (5.0, -20.0, "relieves", True, 2),
])  # fmt: skip
def test_least_dead_load_beside_dead_load(
    fill: Fill, *, dead: float, least: float, loose: str, kept: bool, cautions: int
) -> None:
    """More in the same sense fails; the reaction of an overhang passes with a caution."""
    row = effect("one", D=dead, Dmin=least) | {"loose_P": loose}
    sheet = fill(BOOK, {"row_P": "one"}, forces(row))
    assert sheet.checks()[LEAST] is kept
    told = [i for i in sheet.items() if i["kind"] == "remark" and i["applies"]
            and ("overhang" in i["text"])]  # fmt: skip
    assert len(told) == cautions


def test_a_row_to_work_that_is_not_there_is_named(fill: Fill) -> None:
    """A misspelt row says which row there is none of; the combinations stand."""
    sheet = fill(BOOK, {"row_P": "C-9"}, forces(effect("one", D=10.0)))
    found = find_item(sheet.statement, "p_D")
    assert found is not None
    assert "no row 'C-9'" in found["problem"]
    assert sheet.column("strength_of_P", "P_u") == pytest.approx([14e3])


def test_the_command_line_refuses_a_bad_cell(run: Callable[..., Sheet]) -> None:
    """Rows typed for a run are refused with the row named."""
    with pytest.raises(InputError, match=r"row B12"):
        run(BOOK, {"row_P": "B1"}, forces(*thirty(D="1,2 kN")))
