"""Bad input of the roof truss: one clear message each, and nothing made up."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from sheets import rows_of
from trusses import BOOK, ENDS, TABLES, king_post, point, truss

from calcbook.cases import evaluate
from calcbook.errors import InputError
from calcbook.run import find_item

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

PLACES = {"A": (0.0, 0.0), "B": (4.0, 0.0), "C": (8.0, 0.0), "D": (4.0, 3.0)}
HELD = [("A", "pinned", "0 deg"), ("C", "roller", "0 deg")]
SETS = {**TABLES, "looked": "AB", "case_l": "L"}


def problem(sheet: Sheet, name: str = "solved") -> str:
    """Return why an item has no value."""
    found = find_item(sheet.statement, name)
    assert found is not None
    return str(found["problem"])


@pytest.mark.parametrize(("rows", "said"), [
    (truss(PLACES, ENDS["T4"][:4], HELD, point("D", 1.0)), "'B'"),
    (truss(PLACES | {"E": (4.0, 0.0)}, (*ENDS["T4"], "AE", "EC"), HELD),
     "Joints 'B' and 'E' are at the same place"),
    (truss(PLACES, (*ENDS["T4"], "BB"), HELD), "'BB' has no length: both its ends are joint 'B'"),
    (truss(PLACES, ENDS["T4"], HELD, point("Z", 1.0)), "joint 'Z', which is not there"),
    (truss(PLACES, ENDS["T4"], [*HELD, ("Z", "roller", "0 deg")]), "'Z'"),
    (truss(PLACES, ENDS["T4"], HELD[:1]), "support"),
])  # fmt: skip
def test_trusses_that_cannot_be_solved(fill: Fill, rows: Any, said: str) -> None:
    """The solver says what is wrong by its name; results say why they have none."""
    sheet = fill(BOOK, SETS, rows)
    assert said in problem(sheet)
    assert "not available because of" in problem(sheet, "N_t")
    assert sheet.value("l_r") > 0.0  # what does not depend on it stands


def test_a_member_at_a_missing_joint_is_named(fill: Fill) -> None:
    """The row of the member says which joint is not there; other members have their length."""
    sheet = fill(BOOK, SETS, truss(PLACES, (*ENDS["T4"], "DX"), HELD))
    columns = find_item(sheet.statement, "members")["columns"]  # type: ignore[index]
    run = next(c for c in columns if c["name"] == "d_x")
    assert run["problem"][5] == "row DX: there is no row 'X' in joint"
    assert run["si"][:5] == pytest.approx([4.0, 4.0, 4.0, 4.0, 0.0])
    assert problem(sheet).startswith("not available because of")


@pytest.mark.parametrize(("sets", "rows", "said"), [
    ({"l_t": "0 m"}, {}, "a truss needs a span"),
    ({"h_t": "-2 m"}, {}, "a truss needs a height"),
    ({"s_t": "-4 m"}, {}, "a width is not negative"),
    ({"n_p": "0"}, {}, "n_p"),
    (TABLES, king_post(area="-5 mm2"), "an area is above 0"),
    (TABLES, king_post(modulus="-200 GPa"), "a modulus is above 0"),
    (TABLES, king_post(modulus="200 kN"), "E_s"),
])  # fmt: skip
def test_values_out_of_range(
    run: Callable[..., Sheet], sets: dict[str, str], rows: Any, said: str
) -> None:
    """A span of 0, negative areas and moduli and wrong units are refused where they stand."""
    with pytest.raises(InputError, match=said):
        run(BOOK, sets, rows)


@pytest.mark.parametrize(("sets", "said"), [
    ({"n_p": "2.5"}, "the truss has 2.5 panels"),
    ({"web": "Warren"}, "The web 'Warren' does not fit this form"),
    ({"d_t": "3 m"}, "The depth at the heel is 3"),
])  # fmt: skip
def test_shapes_that_cannot_be(fill: Fill, sets: dict[str, str], said: str) -> None:
    """A shape that makes no truss says so at its rows, once, and nothing is drawn up."""
    sheet = fill(BOOK, sets)
    assert said in problem(sheet, "joints")
    assert "not available because of" in problem(sheet, "N_t")


def test_a_member_looked_at_that_is_not_there(fill: Fill) -> None:
    """Only the second way is missing; the forces stand."""
    sheet = fill(BOOK, {"looked": "L1-L9"})
    assert "There is no member 'L1-L9'" in problem(sheet, "way")
    assert sheet.value("N_t") > 0.0
    said = find_item(sheet.statement, "solved")["says"]  # type: ignore[index]
    assert any("no second way for L1-L9" in text for text in said)


def test_a_wind_case_that_is_not_listed(fill: Fill) -> None:
    """A load at a joint for a wind case beyond the last fails a check by name."""
    stray = {**point("L1", 1.0, case="wind"), "n_c": "9"}
    checks = fill(BOOK, {}, rows_of("points", stray)).checks()
    assert checks["Each wind load at a joint is of a wind case that is listed"] is False
    assert [v for k, v in checks.items() if k.startswith("Each wind")] == [False]


def test_span_by_case_is_refused(fill: Fill) -> None:
    """Rows that a shape gives are the same for every case: the span cannot vary in a case file."""
    sheet = fill(BOOK, {})
    with pytest.raises(InputError, match="the rows of joints depend on l_t"):
        evaluate(sheet.book, {"l_t": ["10 m", "12 m"]})
    found = evaluate(sheet.book, {"s_t": ["4 m", "5 m"]})
    assert found["A_T"] == pytest.approx([48.0, 60.0])
