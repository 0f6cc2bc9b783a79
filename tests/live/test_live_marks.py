"""A workbook with marks opened live: which mark, where it is said, and where typing goes."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import WIND, make_job, opened
from widgets_in import field, text

from calcbook.errors import JobError
from calcbook.job import Job
from calcbook.live.bar import Bar

if TYPE_CHECKING:
    from pathlib import Path


@pytest.fixture
def marked(tmp_path: Path) -> Job:
    """Return a job whose wind workbook has the marks W-2 and W-10."""
    job = make_job(tmp_path / "job")
    for mark, speed in (("W-10", "50 m/s"), ("W-2", "40 m/s")):
        (job.folder / f"wind.{mark}.toml").write_text(
            f'format = 1\nworkbook = "wind"\nmark = "{mark}"\n\n[entries]\n'
            f'V = {{ value = "{speed}" }}\n'
        )
    return Job.load(job.folder)


def test_the_first_mark_is_opened_and_said(marked: Job) -> None:
    """W-2 comes before W-10; the bar says which is open and which there are."""
    session = opened(WIND, marked)
    assert session.book.mark == "W-2"
    assert field(session, "Site", "Basic wind speed").value == "40"
    bar = Bar(session)
    bar.show(session.statement)
    assert bar.state["mark"] == {"current": "W-2", "all": ["W-2", "W-10"]}


def test_the_environment_names_another(marked: Job, monkeypatch: pytest.MonkeyPatch) -> None:
    """With W-10 named, its record is opened, and what is typed is written there."""
    monkeypatch.setenv("CALCBOOK_MARK", "W-10")
    session = opened(WIND, marked)
    field(session, "Site", "Basic wind speed").value = "55"
    assert marked.record("wind", "W-10").entries["V"].value == "55 m/s"
    assert marked.record("wind", "W-2").entries["V"].value == "40 m/s"
    assert not marked.record_path("wind").exists()


def test_a_mark_without_a_record_is_refused(marked: Job, monkeypatch: pytest.MonkeyPatch) -> None:
    """A mark that has no record is refused with the nearest one, not opened empty."""
    monkeypatch.setenv("CALCBOOK_MARK", "W-20")
    with pytest.raises(JobError, match="no mark 'W-20'") as caught:
        opened(WIND, marked)
    assert "W-2" in caught.value.hint


def test_a_workbook_without_marks_does_not_ask(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The environment's mark is for workbooks with marks; others open as always."""
    monkeypatch.setenv("CALCBOOK_MARK", "W-10")
    session = opened(WIND, make_job(tmp_path / "plain"))
    assert session.book.mark is None
    assert "Mark" not in text(session, "Site")
