"""Bad input of the floor beam: one clear message each, and nothing made up."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from beams import BOOK, beam, line, panel, point, stretch, support
from sheets import rows_of

from calcbook.errors import InputError
from calcbook.run import find_item

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

SIMPLE = [support("A", "0 m"), support("B", "6 m", "roller")]


def problem(sheet: Sheet, name: str = "solved") -> str:
    """Return why an item has no value."""
    found = find_item(sheet.statement, name)
    assert found is not None
    return str(found["problem"])


@pytest.mark.parametrize(("rows", "said"), [
    (beam([support("A", "0 m"), support("tip", "6 m", "free end")]),
     "mechanism: the beam turns about support A"),
    (beam(SIMPLE) | rows_of("hinges", {"key": "h", "x_h": "3 m"}), "mechanism"),
    (beam(SIMPLE) | rows_of("hinges", {"key": "h", "x_h": "6 m"}), "hinge h is at the end"),
    (beam([*SIMPLE, support("C", "9 m", "roller")]) | rows_of("hinges", {"key": "h", "x_h": "6 m"}),
     "hinge h is at support B"),
    (beam([support("A", "0 m"), support("B", "3 m", "free end"), support("C", "6 m")]),
     "the free end B lies between supports"),
    (beam(SIMPLE, stretches=[stretch("1", "0 m", "3 m", "1 mm4"),
                             stretch("2", "3 m", "6 m", "1e13 mm4")]), "1e+13 times the least"),
    (beam(SIMPLE, stretches=[stretch("1", "0 m", "4 m"), stretch("2", "5 m", "6 m")]), "gap"),
    (beam(SIMPLE, points=[point("heavy", "7 m", "10 kN")]), "heavy"),
    (beam(SIMPLE, lines=[line("long", "2 m", "6.5 m", "1 kN/m")]), "long"),
    (beam([support("A", "0 m", "spring"), support("B", "6 m")]), "without a stiffness"),
])  # fmt: skip
def test_beams_that_cannot_be_solved(fill: Fill, rows: Any, said: str) -> None:
    """The solver says what is wrong by its name; results say why they have none."""
    sheet = fill(BOOK, {}, rows)
    assert said in problem(sheet)
    assert "not available because of" in problem(sheet, "M_u")
    assert sheet.value("l_b") > 0.0  # what does not depend on it stands


def test_a_span_of_no_length(run: Callable[..., Sheet]) -> None:
    """Two supports in one place are refused with both names."""
    rows = beam([support("A", "0 m"), support("B", "6 m"), support("C", "6 m")])
    with pytest.raises(InputError, match=r"out of order: B \(6 m\) is not below C \(6 m\)"):
        run(BOOK, {}, rows)


def test_one_end_only(fill: Fill) -> None:
    """A single support is no beam."""
    rows = beam([support("A", "0 m")], stretches=[stretch("1", "0 m", "6 m")])
    assert "the beam has one end only" in problem(fill(BOOK, {}, rows))


@pytest.mark.parametrize(("rows", "said"), [
    (beam(SIMPLE, stretches=[stretch("1", "0 m", "6 m", area="-10 mm2")]),
     "an area is not negative"),
    (beam(SIMPLE, strips=[panel("1", "0 m", "6 m", "-2 m")]), "a width is not negative"),
    (beam(SIMPLE, points=[point("P", "3 m", "10 kN/m")]), "P_p"),
    (beam(SIMPLE, lines=[line("w", "0 m", "6 m", "10 kN/m", case="snow")]), "snow"),
])  # fmt: skip
def test_cells_out_of_range(run: Callable[..., Sheet], rows: Any, said: str) -> None:
    """Negative areas, wrong units and load cases of another code are refused where they stand."""
    with pytest.raises(InputError, match=said):
        run(BOOK, {}, rows)


def test_a_load_case_without_loads_is_nothing(fill: Fill) -> None:
    """A beam without any load has zeros everywhere, and its checks are satisfied."""
    sheet = fill(BOOK, {}, beam(SIMPLE))
    assert sheet.value("M_u") == 0.0
    assert sheet.column("reactions", "R_L") == [0.0, 0.0]
    assert all(sheet.checks().values())


def test_a_bad_row_among_others_is_named(fill: Fill) -> None:
    """A strip on a level that is not there is named; the other strips have their loads."""
    strips = [panel(str(n), "0 m", "6 m", "1 m") for n in range(1, 31)]
    strips[6]["on"] = "Level 9"
    sheet = fill(BOOK, {}, beam(SIMPLE, strips=strips))
    column = next(c for c in find_item(sheet.statement, "dead")["columns"] if c["name"] == "D_o")  # type: ignore[index]
    assert [bool(p) for p in column["problem"]].count(True) == 1
    assert column["problem"][6] == "row 7: there is no row 'Level 9' in level"
    assert column["si"][5] == pytest.approx(5600.0)
    assert "row 7" in problem(sheet)


def test_a_bearing_that_is_not_there(fill: Fill) -> None:
    """A beam that bears here and is not found is named."""
    borne = {"key": "1", "bearing_of": "B9 A", "n_b": "1", "x_b": "3 m", "live_as": "unreduced"}
    sheet = fill(BOOK, {}, beam(SIMPLE, beams=[borne]))
    assert "there is no row 'B9 A' in bearing" in problem(sheet)


def test_a_strip_in_a_span_that_is_not_there(fill: Fill) -> None:
    """A strip is listed in the span after a support; another word is named."""
    strips = [panel("1", "0 m", "6 m", "4 m", bay="A-B")]
    sheet = fill(BOOK, {}, beam(SIMPLE, strips=strips))
    column = next(c for c in find_item(sheet.statement, "areas")["columns"] if c["name"] == "y_1")  # type: ignore[index]
    assert "there is no row 'A-B' in support" in column["problem"][0]
    within = next(i for i in sheet.items() if "lies within the span" in i["meaning"])
    assert within["satisfied"] is None
