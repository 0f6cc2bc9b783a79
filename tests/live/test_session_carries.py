"""Carried values that moved since they were taken, shown and taken on request."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import WIND, opened
from records import in_memory, on_disk
from widgets_in import button, text

from calcbook.errors import InputError, JobError
from calcbook.pack.package import pack_job
from calcbook.record import EntryRecord
from calcbook.run import Runner

if TYPE_CHECKING:
    from calcbook.job import Job
    from calcbook.live import Session


def moved(job: Job, height: str) -> None:
    """Write another height into the design basis."""
    basis = job.record("design-basis")
    basis.change({"h": EntryRecord(height)})
    basis.save()


@pytest.fixture
def stale(job: Job) -> Session:
    """Return the wind workbook; its height was taken at 15.6 m and is now 18 m."""
    opened(WIND, job).take("h")
    moved(job, "18 m")
    return opened(WIND, job)


def test_old_and_new_are_told(stale: Session) -> None:
    """The name, both values and the place; results use the value as it is now."""
    assert stale.stale() == [("h", "15.600 m", "18.000 m", "1.1", "Site")]
    told = text(stale, "Site")
    assert "when taken 15.600 m" in told
    assert "now 18 m" in told
    assert stale.book.readings.values["h"] == 18.0


def test_a_moved_value_is_taken_on_request(stale: Session, job: Job) -> None:
    """Taking notes it in the record: nothing is stale any more, and undo makes it stale again."""
    button(stale, "Site", "take").click()
    assert stale.stale() == []
    assert on_disk(stale)["carried", "design-basis.h_m"].value == "18.000 m"
    assert Runner(job).statement("wind")["counts"]["stale"] == 0
    assert stale.undo_words == "h taken"
    stale.undo()
    assert [found[:2] for found in stale.stale()] == [("h", "15.600 m")]


def test_all_are_taken_at_once(stale: Session) -> None:
    """One step takes whatever moved; with nothing stale there is no step."""
    stale.take_all()
    assert stale.stale() == []
    stale.undo()
    stale.redo()
    words = stale.undo_words
    stale.take_all()
    assert stale.undo_words == words


def test_what_the_session_takes_is_what_the_pack_takes(job: Job) -> None:
    """Both note the same of the same value."""
    session = opened(WIND, job)
    session.take("h")
    taken = dict(in_memory(session))
    session.undo()
    pack_job(job)
    session.look()
    assert in_memory(session) == taken
    assert session.notice == ""


def test_what_is_not_carried_cannot_be_taken(wind: Session) -> None:
    """An entry, an unknown name, and a workbook outside a job have nothing to take."""
    for name in ("V", "nothing"):
        with pytest.raises(InputError, match="not carried"):
            wind.take(name)
    with pytest.raises(InputError, match="not carried"):
        opened(WIND, None).take("h")


def test_a_source_that_moves_while_open_is_seen(wind: Session, job: Job) -> None:
    """A look brings the new height into the results and says that it moved."""
    wind.take("h")
    moved(job, "20 m")
    wind.look()
    assert wind.stale() == [("h", "15.600 m", "20.000 m", "1.1", "Site")]
    assert "20 m" in text(wind, "Site")


def test_a_source_without_the_result_is_refused(wind: Session, job: Job) -> None:
    """What is not there cannot be taken; the reason is that of the item."""
    path = job.notebook("design-basis")
    path.write_text(path.read_text().replace("h_m = h", "h_n = h"))
    wind.look()
    with pytest.raises(JobError, match="no result 'h_m'"):
        wind.take("h")
