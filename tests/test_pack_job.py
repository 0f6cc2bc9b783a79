"""The pack of a job: what is taken, when it is noted, and what a failure leaves behind."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from notebooks import BASIS, LOADS, make_job

from calcbook.errors import JobError, PackError
from calcbook.job import Job
from calcbook.pack import package
from calcbook.record import EntryRecord

if TYPE_CHECKING:
    from pathlib import Path

ORIGIN = "design-basis.h"


@pytest.fixture
def job(tmp_path: Path) -> Job:
    """Return a job whose loads carry a height of 9 m, packed once, and 12 m since."""
    found = Job.load(make_job(tmp_path / "job", {"design-basis": BASIS, "loads": LOADS}))
    package.pack_job(found)
    basis = found.record("design-basis")
    basis.change({"h": EntryRecord("12 m")})
    basis.save()
    return found


def taken(job: Job) -> str:
    """Return the height noted as taken."""
    return job.record("loads").carried[ORIGIN].value


def test_what_moved_on_is_taken_and_said(job: Job) -> None:
    """The pages have the new height, nothing in them is stale, and the record notes it."""
    kept: list[bytes] = []

    def save(pdf: bytes) -> None:
        assert taken(job) == "9 m"
        kept.append(pdf)

    packed = package.pack_job(job, save=save)
    assert packed.moved == ("loads H: 9 m -> 12 m",)
    assert kept == [packed.pdf]
    assert [s["counts"]["stale"] for s in packed.statements] == [0, 0]
    assert taken(job) == "12 m"
    assert package.pack_job(job).moved == ()


def test_less_than_is_shown_is_said_in_words(job: Job) -> None:
    """Two heights that print alike are not told as one number becoming the same number."""
    package.pack_job(job)
    basis = job.record("design-basis")
    basis.change({"h": EntryRecord("1200 cm")})
    basis.save()
    record = job.record("loads")
    found = record.carried[ORIGIN]
    assert package.pack_job(job).moved == ("loads H: 12 m -> 1200 cm",)
    found.fingerprint = "0" * 16
    found.value = "1200 cm"
    record = job.record("loads")
    record.change(carried={ORIGIN: found})
    record.save()
    assert package.pack_job(job).moved == ("loads H: 1200 cm, moved by less than is shown",)


def test_pages_that_cannot_be_made_change_no_record(job: Job) -> None:
    """A sign no font has stops the pack, and what was taken stays as it was."""
    basis = job.record("design-basis")
    basis.change({"job_number": EntryRecord("診")})
    basis.save()
    with pytest.raises(PackError, match="sign"):
        package.pack_job(job, save=lambda _pdf: pytest.fail("nothing to save"))
    assert taken(job) == "9 m"


def test_a_file_that_cannot_be_written_changes_no_record(job: Job) -> None:
    """Saving comes before noting: a full disk leaves the job as it was."""

    def full(_pdf: bytes) -> None:
        raise JobError("no space left")

    with pytest.raises(JobError, match="no space left"):
        package.pack_job(job, save=full)
    assert taken(job) == "9 m"
