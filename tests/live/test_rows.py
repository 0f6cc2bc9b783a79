"""Typing into a schedule: cells, keys, rows added and removed, marks."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import WIND, opened
from widgets_in import button, field, marks, text

from calcbook.errors import InputError
from calcbook.record import RowRecord

if TYPE_CHECKING:
    from calcbook.live import Session

Q = 0.613 * 70**2


def rows(session: Session) -> list[tuple[str, dict[str, str]]]:
    """Return the floors as they stand on disk."""
    return [(r.key, dict(r.cells)) for r in session.job.record("wind").schedules["floors"]]


def force(session: Session) -> list[float]:
    """Return the computed column in SI."""
    items = session.section("Floors")["items"]
    return next(c["si"] for c in items[0]["columns"] if c["name"] == "F")


def test_a_cell_is_taken_and_the_columns_follow(wind: Session) -> None:
    """A bare number takes the unit of the heading; the force and its total follow."""
    field(wind, "Floors", "Elevation").value = "8"
    assert rows(wind)[0] == ("Roof", {"z": "8 m", "use": "roof"})
    assert force(wind)[0] == pytest.approx(Q * 8 * 2)
    assert "69.69" in text(wind, "Floors")


def test_a_cell_typed_in_another_unit_stays_as_typed(wind: Session) -> None:
    """A second change of a cell shows what was typed; the column is in the unit of its heading."""
    cell = field(wind, "Floors", "Elevation", 1)
    cell.value = "3.5"
    cell.value = "12 ft"
    assert cell.value == "12 ft"
    assert rows(wind)[1] == ("Level 2", {"z": "12 ft", "use": "ward"})
    assert force(wind)[1] == pytest.approx(Q * 12 * 0.3048 * 2)


def test_a_refused_cell_is_named(wind: Session) -> None:
    """The row and column are named, nothing is written and the force stands."""
    before = force(wind)
    field(wind, "Floors", "Elevation", 1).value = "3,6 m"
    told = text(wind, "Floors")
    assert "Level 2, z: " in told
    assert "comma" in told
    assert force(wind) == before
    assert "floors" not in wind.job.record("wind").schedules


def test_levels_out_of_order_are_told_under_the_table(wind: Session) -> None:
    """A level above the one over it makes the column unavailable, with the reason."""
    field(wind, "Floors", "Elevation", 1).value = "9 m"
    assert "out of order" in text(wind, "Floors")


def test_rows_are_added_and_removed(wind: Session) -> None:
    """A row is put below another, named and filled in; another is taken out."""
    button(wind, "Floors", "add a row below Roof").click()
    assert [key for key, _ in rows(wind)] == ["Roof", "new", "Level 2"]
    field(wind, "Floors", "key of the row", 1).value = "Level 3"
    field(wind, "Floors", "Elevation", 1).value = "5.4"
    field(wind, "Floors", "Use", 1).value = "ward"
    assert rows(wind)[1] == ("Level 3", {"z": "5.4 m", "use": "ward"})
    assert force(wind)[1] == pytest.approx(Q * 5.4 * 2)
    button(wind, "Floors", "remove row Level 2").click()
    assert [key for key, _ in rows(wind)] == ["Roof", "Level 3"]
    button(wind, "Floors", "add a row on top").click()
    assert [key for key, _ in rows(wind)] == ["new", "Roof", "Level 3"]


def test_a_key_used_twice_is_refused(wind: Session) -> None:
    """Two rows of one name would be mixed up in every other workbook."""
    field(wind, "Floors", "key of the row", 1).value = "Roof"
    assert "there is a row 'Roof' already" in text(wind, "Floors")
    assert "floors" not in wind.job.record("wind").schedules


def test_a_row_is_confirmed_when_all_of_it_was_typed(wind: Session) -> None:
    """One cell typed of two does not confirm the row; both do, and a change keeps it so."""
    field(wind, "Floors", "Elevation").value = "8 m"
    assert [m.value for m in marks(wind, "Floors")] == [False, False]
    field(wind, "Floors", "Use").value = "plant"
    assert [m.value for m in marks(wind, "Floors")] == [True, False]
    field(wind, "Floors", "Elevation").value = "8.5 m"
    assert [m.value for m in marks(wind, "Floors")] == [True, False]


def test_a_refused_name_does_not_move_what_was_typed(wind: Session) -> None:
    """A row whose new key was refused is confirmed when the rest of it is typed."""
    field(wind, "Floors", "Elevation").value = "8 m"
    with pytest.raises(InputError, match="already"):
        wind.rename_row("floors", "Roof", "Level 2")
    field(wind, "Floors", "Use").value = "plant"
    assert marks(wind, "Floors")[0].value


def test_what_was_typed_goes_with_a_renamed_row(wind: Session) -> None:
    """A row renamed between two cells is confirmed by the second; its former key is forgotten."""
    field(wind, "Floors", "Elevation").value = "8 m"
    wind.rename_row("floors", "Roof", "Top")
    field(wind, "Floors", "Use").value = "plant"
    assert [m.value for m in marks(wind, "Floors")] == [True, False]


def test_no_mark_stands_beside_a_refused_cell(wind: Session) -> None:
    """A row with a text that was not taken has no mark until it is put right."""
    cell = field(wind, "Floors", "Elevation")
    cell.value = "8,5"
    assert len(marks(wind, "Floors")) == 1
    cell.value = "8.5"
    assert len(marks(wind, "Floors")) == 2


def test_a_changed_row_does_not_keep_its_source(wind: Session) -> None:
    """The source was that of the former cells; a cell typed as it was keeps it."""
    record = wind.job.record("wind")
    cells = {"z": "7.2 m", "use": "roof"}
    record.change(schedules={"floors": [RowRecord("Roof", cells, "drawing A-201")]})
    record.save()
    session = opened(WIND, wind.job)
    session.enter_cell("floors", "Roof", "z", "7.2 m")
    assert session.job.record("wind").schedules["floors"][0].source == "drawing A-201"
    session.enter_cell("floors", "Roof", "z", "7.4 m")
    assert session.job.record("wind").schedules["floors"][0].source == ""


def test_a_row_is_confirmed_by_ticking(wind: Session) -> None:
    """A tick confirms the row as it stands, for this job, and can be taken back."""
    marks(wind, "Floors")[1].value = True
    again = opened(WIND, wind.job)
    assert [m.value for m in marks(again, "Floors")] == [False, True]
    marks(again, "Floors")[1].value = False
    assert [m.value for m in marks(again, "Floors")] == [False, False]
