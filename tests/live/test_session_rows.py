"""Rows moved, sourced and stepped, and blocks pasted from a spreadsheet."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import WIND, make_job, opened
from records import cells, in_memory, keys, on_disk

from calcbook.errors import InputError

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.live import Session


def test_a_block_is_pasted_and_the_table_grows(wind: Session) -> None:
    """Keys, bare numbers in the heading's unit, other units and words; two rows come on."""
    wind.paste("floors", "Roof", "", [
        ["Roof", "10.8", "roof"], ["Level 3", "7.2", "ward"],
        ["Level 2", "12 ft", "ward"], ["Level 1", "0", ""], ["", "", ""],
    ])  # fmt: skip
    assert cells(wind) == [
        ("Roof", {"z": "10.8 m", "use": "roof"}), ("Level 3", {"z": "7.2 m", "use": "ward"}),
        ("Level 2", {"z": "12 ft", "use": "ward"}), ("Level 1", {"z": "0 m", "use": ""}),
    ]  # fmt: skip
    assert on_disk(wind) == in_memory(wind)
    assert wind.undo_words == "12 cells pasted"
    wind.undo()
    assert keys(wind) == ["Roof", "Level 2"]
    assert on_disk(wind) == {}


def test_a_block_in_the_middle_of_a_row(wind: Session) -> None:
    """Pasted on an elevation it leaves the keys, and new rows get keys of their own."""
    wind.paste("floors", "Level 2", "z", [["4.2"], ["1.1"]])
    assert cells(wind) == [
        ("Roof", {"z": "7.2 m", "use": "roof"}), ("Level 2", {"z": "4.2 m", "use": "ward"}),
        ("new", {"z": "1.1 m"}),
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("at", "block", "told"),
    [
        (("Roof", "z"), [["8.1", "roof"], ["3,6", "ward"], ["1.2", "ward"]],
         ["row Level 2, z: '3,6'", "comma"]),
        (("Roof", ""), [["A", "8 m", ""], ["B", "5 kN", ""]], ["row B, z: '5 kN'", "force"]),
        (("Roof", "z"), [["8", "roof"], ["", "ward"]], ["row Level 2, z: ''", "empty"]),
        (("Roof", "z"), [["900"]], ["row Roof, z: '900'", "outside the range"]),
        (("Roof", "z"), [["=B3*2"]], ["row Roof, z: '=B3*2'"]),
        (("Roof", "use"), [["roof", "3"]], ["2 columns", "only 1"]),
        (("Roof", ""), [["Level 2", "8"]], ["two rows would be called 'Level 2'"]),
        (("Roof", ""), [["A"], [" "], ["C"]], ["the key is empty"]),
        (("Attic", "z"), [["8"]], ["no row 'Attic'"]),
        (("Roof", "F"), [["8"]], ["'F' is not typed here"]),
        (("Roof", "z"), [["", ""]], ["nothing to paste"]),
    ],
)  # fmt: skip
def test_a_bad_cell_is_named_and_nothing_is_pasted(
    wind: Session, at: tuple[str, str], block: list[list[str]], told: list[str]
) -> None:
    """Wherever the bad cell stands, row, column, text and reason are told, and all is as it was."""
    wind.enter("V", "72 m/s")
    before, rows = in_memory(wind), cells(wind)
    with pytest.raises(InputError) as caught:
        wind.paste("floors", *at, block)
    assert all(part in f"{caught.value}" for part in told)
    assert (in_memory(wind), cells(wind), wind.undo_words) == (before, rows, "V = 72 m/s")


def test_pasting_confirms_as_typing_does(wind: Session) -> None:
    """A row pasted whole is confirmed; one of which only a part was is not."""
    wind.paste("floors", "Roof", "z", [["8", "roof"], ["4"]])
    rows = wind.record.schedules["floors"]
    assert [row.confirmed and row.confirmed.by for row in rows] == ["RA", None]


def test_a_confirmed_row_pasted_under_another_key_stays_confirmed(wind: Session) -> None:
    """Its key and one cell are typed over: who typed stands for the row."""
    wind.confirm_row("floors", "Roof", yes=True)
    wind.paste("floors", "Roof", "", [["Top", "8"]])
    row = wind.record.schedules["floors"][0]
    assert (row.key, row.confirmed.by) == ("Top", "RA")


def test_rows_are_moved_within_the_table(wind: Session) -> None:
    """A row goes up or down as far as there is room, and keeps its cells and confirmation."""
    wind.confirm_row("floors", "Roof", yes=True)
    wind.move_row("floors", "Roof", 1)
    assert keys(wind) == ["Level 2", "Roof"]
    assert wind.record.schedules["floors"][1].confirmed.by == "RA"
    assert wind.undo_words == "row Roof moved down"
    wind.move_row("floors", "Roof", 5)
    assert wind.undo_words == "row Roof moved down"
    wind.move_row("floors", "Roof", -5)
    assert keys(wind) == ["Roof", "Level 2"]


def test_sources_can_be_given(wind: Session) -> None:
    """A source is written with the value it belongs to; a confirmation is not touched."""
    wind.enter("V", "72 m/s")
    wind.set_source("V", "  wind map,  sheet 2 ")
    wind.set_source("exposure", "site visit")
    wind.set_row_source("floors", "Roof", "A-201")
    entries, rows = wind.record.entries, wind.record.schedules["floors"]
    assert (entries["V"].source, entries["V"].confirmed.by) == ("wind map, sheet 2", "RA")
    assert (entries["exposure"].value, entries["exposure"].confirmed) == ("C", None)
    assert [row.source for row in rows] == ["A-201", ""]
    assert on_disk(wind) == in_memory(wind)
    with pytest.raises(InputError, match="no value of its own"):
        wind.set_source("h", "drawing")


def test_stepping_does_not_confirm(wind: Session) -> None:
    """Arrow keys change a value and a cell, and take back that they were confirmed."""
    wind.enter("V", "72 m/s")
    wind.step("V", "73 m/s")
    assert wind.record.entries["V"].confirmed is None
    wind.confirm_row("floors", "Roof", yes=True)
    wind.step_cell("floors", "Roof", "z", "7.3 m")
    row = wind.record.schedules["floors"][0]
    assert (row.cells["z"], row.confirmed) == ("7.3 m", None)
    with pytest.raises(InputError, match="outside the range"):
        wind.step("V", "200 m/s")


def test_a_block_may_not_be_longer_than_rows_brought_forward(tmp_path: Path) -> None:
    """Rows that come from another workbook are not added to by pasting."""
    job = make_job(tmp_path / "job")
    source = WIND.replace('"Floors", heading="Level", rows=[', '"Floors", heading="Level", '
                          'source="x", origin="design-basis.levels", rows=[')  # fmt: skip
    basis = job.folder / "design-basis.ipynb"
    import json  # noqa: PLC0415

    book = json.loads(basis.read_text())
    book["cells"][-1]["source"] += """
    with s.schedule("levels", "Levels", rows=[{"key": "Roof"}, {"key": "Level 2"}]) as t:
        t.entry("n", "Count", "1")
"""
    basis.write_text(json.dumps(book))
    session = opened(source, job)
    session.paste("floors", "Roof", "z", [["8"], ["4"]])
    assert [row["z"] for _, row in cells(session)] == ["8 m", "4 m"]
    with pytest.raises(InputError, match="1 rows too long"):
        session.paste("floors", "Level 2", "z", [["4"], ["2"]])
    with pytest.raises(InputError, match="not typed here"):
        session.paste("floors", "Level 2", "", [["Level 1"]])


def test_a_line_of_headings_in_a_block_is_left_out(wind: Session) -> None:
    """A block copied with its first line pastes what stands below it."""
    wind.paste("floors", "Roof", "", [["Level", "z (m)"], ["Roof", "8.0"], ["Level 2", "4.0"]])
    assert [row.key for row in wind.record.schedules["floors"]] == ["Roof", "Level 2"]
    assert wind.record.schedules["floors"][0].cells["z"] == "8.0 m"
