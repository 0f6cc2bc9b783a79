"""Marks added, copied, opened and removed in a session, and that taken back."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

import pytest
from live_samples import WIND, make_job, opened
from records import files, in_memory, on_disk
from widgets_in import field, text

from calcbook.errors import InputError, JobError, RecordError
from calcbook.job import Job

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.live import Session

SPEED = "Basic wind speed"


def q(session: Session) -> float:
    """Return the velocity pressure in SI."""
    return next(r["value"]["si"] for r in session.statement["results"] if r["name"] == "q")


@pytest.fixture
def marked(wind: Session) -> Session:
    """Return the wind workbook with the marks A at 40 m/s and B at 50 m/s, B open."""
    wind.add_mark("A")
    wind.enter("V", "40 m/s")
    wind.add_mark("B", like="A")
    wind.enter("V", "50 m/s")
    return wind


def test_the_first_mark_begins_with_the_template(wind: Session) -> None:
    """Where nothing was typed yet, a mark is an empty record, open in every section."""
    wind.add_mark(" A ")
    assert (wind.mark, wind.marks) == ("A", ("A",))
    assert wind.job.marks("wind") == ("A",)
    assert in_memory(wind) == on_disk(wind) == {}
    assert wind.statement["mark"] == "A"


def test_a_mark_is_opened_without_running_a_cell(marked: Session) -> None:
    """Every section shows the other filling; what is typed goes into its record."""
    marked.open_mark("A")
    assert q(marked) == pytest.approx(0.613 * 40**2)
    assert field(marked, "Site", SPEED).value == "40"
    assert "( 40 m/s ) 2" in text(marked, "Pressure")
    field(marked, "Site", SPEED).value = "41"
    speeds = {m: marked.job.record("wind", m).entries["V"].value for m in marked.marks}
    assert speeds == {"A": "41 m/s", "B": "50 m/s"}


def test_a_copy_has_its_values_unconfirmed(marked: Session) -> None:
    """Values, rows and sources come along, confirmations do not; the other mark keeps its own."""
    marked.confirm_row("floors", "Roof", yes=True)
    marked.set_source("V", "map")
    marked.add_mark("C", like="B")
    entry, row = marked.record.entries["V"], marked.record.schedules["floors"][0]
    assert (entry.value, entry.source, entry.confirmed) == ("50 m/s", "map", None)
    assert row.confirmed is None
    assert marked.job.record("wind", "B").entries["V"].confirmed.by == "RA"


def test_adding_a_mark_is_undone_and_redone(marked: Session) -> None:
    """Undo takes the changes of the mark back and then its record; redo brings both again."""
    names = files(marked.job.folder)
    while marked.undo_words != "mark B added":
        marked.undo()
    marked.undo()
    assert (marked.mark, marked.marks) == ("A", ("A",))
    assert "wind.B.toml" not in files(marked.job.folder)
    while marked.redo_words:
        marked.redo()
    assert (marked.mark, files(marked.job.folder)) == ("B", names)
    assert q(marked) == pytest.approx(0.613 * 50**2)


def test_a_removed_mark_comes_back_with_its_comments(marked: Session) -> None:
    """The record goes and its neighbour is opened; undo writes the very file again."""
    path = marked.job.record_path("wind", "B")
    path.write_text(path.read_text() + "# by hand\n")
    before = path.read_bytes()
    marked.remove_mark("B")
    assert (marked.mark, path.exists(), marked.undo_words) == ("A", False, "mark B removed")
    marked.undo()
    assert (marked.mark, path.read_bytes()) == ("B", before)
    marked.redo()
    marked.remove_mark("A")
    assert (marked.mark, marked.marks) == (None, ())
    assert marked.statement["mark"] is None


def test_undo_goes_back_to_the_mark_it_is_about(marked: Session) -> None:
    """A change made in one mark is undone there, and that mark is shown."""
    marked.open_mark("A")
    marked.undo()
    assert marked.mark == "B"
    assert marked.record.entries["V"].value == "40 m/s"


def test_what_was_typed_before_there_were_marks_gets_the_first_name(wind: Session) -> None:
    """The record without a mark becomes that of the first one, with who confirmed; undo returns."""
    wind.enter("V", "60 m/s")
    path = wind.job.record_path("wind")
    path.write_text(f"# started by hand\n{path.read_text()}")
    before = path.read_bytes()
    wind.look()
    wind.add_mark("A")
    assert not path.exists()
    found = wind.job.record("wind", "A")
    assert (found.entries["V"].value, found.entries["V"].confirmed.by) == ("60 m/s", "RA")
    assert "# started by hand" in wind.job.record_path("wind", "A").read_text()
    assert wind.undo_words == "mark A given to what was typed"
    wind.undo()
    assert (wind.mark, wind.marks, path.read_bytes()) == (None, (), before)


@pytest.mark.parametrize("name", ["A/B", "", "..", "x" * 80, "é"])
def test_a_name_that_cannot_be_a_mark_is_refused(marked: Session, name: str) -> None:
    """It would be part of a file's name; nothing is made."""
    names = files(marked.job.folder)
    with pytest.raises(RecordError, match="cannot be a mark"):
        marked.add_mark(name)
    assert files(marked.job.folder) == names


def test_a_mark_there_is_already_is_refused(marked: Session) -> None:
    """Also one that differs in capitals only, which some disks cannot tell apart."""
    for name in ("A", "a"):
        with pytest.raises(InputError, match="a mark 'A' already"):
            marked.add_mark(name)
    with pytest.raises(JobError, match="no mark 'Z'"):
        marked.open_mark("Z")
    with pytest.raises(JobError, match="no mark 'Z'"):
        marked.remove_mark("Z")


def test_no_marks_outside_a_job_or_in_the_basis(job: Job) -> None:
    """A workbook alone has no records to name; the design basis is one."""
    from live_samples import BASIS  # noqa: PLC0415

    with pytest.raises(JobError, match="this is none"):
        opened(WIND, None).add_mark("A")
    with pytest.raises(JobError, match="one design-basis"):
        opened(BASIS, job).add_mark("A")


def test_which_workbooks_offer_marks(tmp_path: Path) -> None:
    """One that says so from the start, one that has marks, and no other."""
    job = make_job(tmp_path / "job")
    session = opened(WIND, job)
    assert not session.takes_marks
    session.book.has_marks = True
    assert session.takes_marks
    session.book.has_marks = False
    session.add_mark("A")
    assert session.takes_marks
    assert not opened(WIND, None).takes_marks


def test_a_mark_that_cannot_be_written_is_not_made(
    wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """On a full disk adding a mark is refused and all stays as it was."""

    def full(*_: object) -> int:
        raise OSError(28, "No space left on device")

    wind.enter("V", "60 m/s")
    names = files(wind.job.folder)
    with monkeypatch.context() as patch:
        patch.setattr(os, "write", full)
        with pytest.raises(RecordError, match="disk is full"):
            wind.add_mark("A")
    assert (wind.mark, wind.marks, files(wind.job.folder)) == (None, (), names)
    assert wind.undo_words == "V = 60 m/s"


def test_a_mark_others_changed_since_is_not_removed_by_undo(marked: Session) -> None:
    """Undoing that a mark was added would take what another kernel typed into it."""
    marked.undo()
    marked.open_mark("A")
    record = marked.job.record("wind", "B")
    record.change({"exposure": type(record.entries["V"])("B")})
    record.save()
    with pytest.raises(InputError, match="changed elsewhere since"):
        marked.undo()
    assert marked.job.record("wind", "B").entries["exposure"].value == "B"


def test_marks_made_elsewhere_are_seen(marked: Session) -> None:
    """A mark added by another kernel is there at the next look."""
    other = opened(WIND, Job.load(marked.job.folder))
    other.add_mark("C")
    marked.look()
    assert marked.marks == ("A", "B", "C")
    marked.open_mark("C")
    assert q(marked) == pytest.approx(0.613 * 70**2)


def test_running_all_cells_keeps_the_mark_that_was_open(
    marked: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The session that takes over shows the same mark, unless the environment asks for another."""
    kind = type(marked)
    assert kind("wind", "Wind", job=marked.job, former=marked).mark == "B"
    assert kind("wind", "Wind", job=marked.job).mark == "A"
    monkeypatch.setenv("CALCBOOK_MARK", "A")
    assert kind("wind", "Wind", job=marked.job, former=marked).mark == "A"
