"""The job folder: found, read, started, and who speaks for which record."""

from __future__ import annotations

import errno
import json
import os
import shutil
from pathlib import Path

import pytest

from calcbook.errors import JobError, RecordError
from calcbook.job import Job, find_notebook, template_folder, templates
from calcbook.record import EntryRecord, Record


def notebook(path: Path, *sources: str, kind: str = "code") -> Path:
    """Write a notebook with these cells."""
    cells = [{"cell_type": kind, "source": source.splitlines(True)} for source in sources]
    path.write_text(json.dumps({"cells": cells, "nbformat": 4, "nbformat_minor": 5}))
    return path


def opening(name: str) -> str:
    """Return the source of a cell that opens a workbook."""
    return f'import calcbook\nbook = calcbook.open_workbook(\n    "{name}", title="x")'


@pytest.fixture
def kit(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> dict[str, Path]:
    """Return three templates of our own, with no job in the environment."""
    monkeypatch.delenv("CALCBOOK_JOB", raising=False)
    folder = tmp_path / "kit"
    folder.mkdir()
    names = ("design-basis", "wind-pressure", "floor-beam")
    return {name: notebook(folder / f"{name}.ipynb", opening(name)) for name in names}


@pytest.fixture
def job(tmp_path: Path, kit: dict[str, Path]) -> Job:
    """Return a job with the three workbooks."""
    return Job.start(tmp_path / "jobs" / "clinic", list(kit), kit)


def tree(folder: Path) -> list[str]:
    """Return every path below a folder."""
    return sorted(str(path.relative_to(folder)) for path in folder.rglob("*"))


def test_started_job_has_the_notebooks_and_their_order(job: Job, kit: dict[str, Path]) -> None:
    """A new job holds copies of the templates and job.toml in the order asked for."""
    assert tree(job.folder) == [
        "design-basis.ipynb",
        "floor-beam.ipynb",
        "job.toml",
        "wind-pressure.ipynb",
    ]
    assert job.workbooks == ("design-basis", "wind-pressure", "floor-beam")
    assert job.notebook("floor-beam").read_bytes() == kit["floor-beam"].read_bytes()
    assert Job.load(job.folder) == job


def test_job_starts_in_an_empty_folder(tmp_path: Path, kit: dict[str, Path]) -> None:
    """An existing folder with nothing in it becomes the job."""
    (tmp_path / "empty").mkdir()
    assert Job.start(tmp_path / "empty", ["floor-beam"], kit).workbooks == ("floor-beam",)


def test_existing_job_is_not_touched(job: Job, kit: dict[str, Path]) -> None:
    """Starting a job where something is already is refused, and nothing there changes."""
    (job.folder / "job.toml").write_text("mine")
    with pytest.raises(JobError, match="exists already and is not empty"):
        Job.start(job.folder, ["floor-beam"], kit)
    with pytest.raises(JobError, match="exists already"):
        Job.start(job.folder / "job.toml", ["floor-beam"], kit)
    assert (job.folder / "job.toml").read_text() == "mine"
    assert len(tree(job.folder)) == 4


@pytest.mark.parametrize(
    ("workbooks", "message"),
    [
        (["floor-baem"], "there is no workbook 'floor-baem'\ndid you mean 'floor-beam'"),
        (["x"], "there are: design-basis, wind-pressure, floor-beam"),
        (["floor-beam", "floor-beam"], "'floor-beam' is named twice"),
    ],
)
def test_unknown_workbook_starts_nothing(
    tmp_path: Path, kit: dict[str, Path], workbooks: list[str], message: str
) -> None:
    """An unknown or repeated workbook is refused before a folder is made."""
    with pytest.raises(JobError) as caught:
        Job.start(tmp_path / "new" / "job", workbooks, kit)
    assert message in str(caught.value)
    assert not (tmp_path / "new").exists()


@pytest.mark.parametrize("empty", [True, False])
@pytest.mark.parametrize("where", ["copyfile", "replace"])
def test_full_disk_leaves_no_half_job(
    tmp_path: Path, kit: dict[str, Path], monkeypatch: pytest.MonkeyPatch, where: str, empty: bool
) -> None:
    """When the disk fills up on the way, everything made so far is taken out again."""
    folder = tmp_path / "new" / "job"
    if empty:
        folder.mkdir(parents=True)
    before = tree(tmp_path)
    copy = shutil.copyfile
    copied: list[object] = []

    def full(source: Path, target: Path) -> None:
        if where == "replace" or not copied:
            copied.append(copy(source, target))
            return
        raise OSError(errno.ENOSPC, "No space left on device")

    def full_replace(*_: object) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(shutil, "copyfile", full)
    if where == "replace":
        monkeypatch.setattr(os, "replace", full_replace)
    with pytest.raises(JobError, match="disk is full"):
        Job.start(folder, list(kit), kit)
    assert copied
    assert tree(tmp_path) == before


def test_job_is_found_upward(job: Job, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The nearest job.toml upward is the job; without one there is none."""
    inner = job.folder / "drawings" / "old"
    inner.mkdir(parents=True)
    assert Job.find(inner) == job
    assert Job.find(tmp_path / "kit") is None
    monkeypatch.chdir(inner)
    assert Job.find() == job


def test_environment_names_the_job(
    job: Job, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """CALCBOOK_JOB goes before the folder; naming no job it is an error."""
    monkeypatch.setenv("CALCBOOK_JOB", str(job.folder))
    assert Job.find(tmp_path) == job
    monkeypatch.setenv("CALCBOOK_JOB", str(tmp_path))
    with pytest.raises(JobError, match=r"CALCBOOK_JOB: '.*' is not a job: no job\.toml"):
        Job.find(job.folder)


@pytest.mark.parametrize(
    ("text", "place", "message"),
    [
        ("format = 1\nworkbooks = [\n", "line 2, column 14", "broken TOML"),
        ("workbooks = []\n", "", "'format' is missing"),
        ("format = 1\n", "", "'workbooks' is missing"),
        ("format = 2\nnew = 1\n", "line 1, column 1", "open it with the newer calcbook"),
        ("format = 0\n", "line 1, column 1", "has format 0"),
        ("format = 1\nworkbook = []\n", "line 2, column 1", "did you mean 'workbooks'?"),
        ("format = 1\nworkbooks = 'x'\n", "line 2, column 1", "must be a list, not text"),
        ("format = 1\nworkbooks = [\n  1,\n]\n", "line 3, column 3", "text in quotes"),
        ("format = 1\nworkbooks = ['a', 'a']\n", "line 2, column 19", "'a' is listed twice"),
        (
            "format = 1\nworkbooks = ['design-basis', 'roof-truss']\n",
            "line 2, column 30",
            "the notebook roof-truss.ipynb is not in the folder",
        ),
    ],
)
def test_damaged_job_is_refused(job: Job, text: str, place: str, message: str) -> None:
    """What is wrong in job.toml is said with line and column."""
    (job.folder / "job.toml").write_text(text)
    with pytest.raises(JobError) as caught:
        Job.load(job.folder)
    assert caught.value.where == (f"job.toml, {place}" if place else "job.toml")
    assert message in str(caught.value)


def test_unknown_workbook_of_a_job_is_refused(job: Job) -> None:
    """A workbook the job does not have is refused with the nearest one it has."""
    with pytest.raises(JobError, match=r"no workbook 'wind-presure'\ndid you mean 'wind-pressure'"):
        job.notebook("wind-presure")


def test_notebook_the_job_does_not_list_is_refused(job: Job) -> None:
    """A notebook of the folder is not passed over for a template: it is to be listed first."""
    for name in ("sign-board", "wind-pressure"):
        notebook(job.folder / f"{name}.ipynb", opening(name))
    (job.folder / "job.toml").write_text('format = 1\nworkbooks = ["design-basis"]\n')
    shorter = Job.load(job.folder)
    for name in ("sign-board", "wind-pressure"):
        message = f"does not list {name}.ipynb\nadd '{name}' to the list of workbooks in job.toml"
        with pytest.raises(JobError, match=message):
            find_notebook(name, shorter)


def test_workbook_named_with_its_folder_is_refused(
    job: Job, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A job's folder in the name, or in its place, is answered with where to go."""
    monkeypatch.chdir(job.folder.parent)
    for name in ("clinic/wind-pressure", "clinic"):
        with pytest.raises(JobError, match=f"no workbook '{name}'\n.* first: cd clinic$"):
            find_notebook(name, None)


def test_records_lie_beside_the_notebooks(job: Job) -> None:
    """A workbook and mark have their record in the job's folder; marks come as B2 before B10."""
    for mark in ("B10", "B2", "C-3.1", "A"):
        record = job.record("floor-beam", mark)
        record.change(entries={"L": EntryRecord("6 m")})
        record.save()
    job.record("wind-pressure").save()
    (job.folder / "floor-beam.toml.format-0").write_text("")
    assert (job.folder / "floor-beam.C-3.1.toml").is_file()
    assert job.marks("floor-beam") == ("A", "B2", "B10", "C-3.1")
    assert job.marks("wind-pressure") == ()
    assert job.record("floor-beam", "B2").entries == {"L": EntryRecord("6 m")}


def test_fillings_are_every_mark_of_every_workbook(job: Job) -> None:
    """A workbook without marks has one filling; with marks one each, and its own where recorded."""
    for mark in ("B10", "B2"):
        record = job.record("floor-beam", mark)
        record.change(entries={"L": EntryRecord("6 m")})
        record.save()
    beams = [f for f in job.fillings() if f[0] == "floor-beam"]
    assert beams == [("floor-beam", "B2"), ("floor-beam", "B10")]
    assert [f for f in job.fillings() if f[0] == "wind-pressure"] == [("wind-pressure", None)]
    record = job.record("floor-beam")
    record.change(entries={"L": EntryRecord("7 m")})
    record.save()
    assert ("floor-beam", None) in job.fillings()


def test_file_that_only_looks_like_a_record_is_named(job: Job) -> None:
    """A copy made by a file manager is refused, not passed over."""
    (job.folder / "floor-beam.B1 - Copy.toml").write_text("")
    with pytest.raises(RecordError, match="'B1 - Copy' cannot be a mark"):
        job.marks("floor-beam")


def test_job_number_is_an_entry_of_the_design_basis(job: Job) -> None:
    """The job number is read from the design basis, and is empty until it is filled in."""
    assert job.number == ""
    record = Record.load(job.folder / "design-basis.toml", "design-basis")
    record.change(entries={"job_number": EntryRecord("MC-0417")})
    record.save()
    assert job.number == "MC-0417"


def test_second_notebook_of_one_workbook_is_refused(job: Job) -> None:
    """A copy that opens the same workbook may not use its record; both are named."""
    copy = Path(shutil.copy(job.notebook("wind-pressure"), job.folder / "wind copy.ipynb"))
    for claimant in (copy, job.notebook("wind-pressure")):
        with pytest.raises(JobError) as caught:
            job.claim("wind-pressure", claimant)
        assert "wind copy.ipynb" in caught.value.what
        assert "wind-pressure.ipynb" in caught.value.what
    inner = job.folder / "old"
    inner.mkdir()
    with pytest.raises(JobError, match="two notebooks claim"):
        job.claim("floor-beam", notebook(inner / "floor-beam.ipynb", opening("floor-beam")))


def test_notebooks_that_only_mention_a_workbook_claim_nothing(job: Job) -> None:
    """Prose, other workbooks and files that are no notebooks leave the record alone."""
    notebook(job.folder / "notes.ipynb", opening("wind-pressure"), kind="markdown")
    notebook(job.folder / "two.ipynb", opening("wind-pressure-2"), "x = 'wind-pressure'")
    (job.folder / "broken.ipynb").write_text('Workbook("wind-pressure"')
    (job.folder / "list.ipynb").write_text('["wind-pressure"]')
    job.claim("wind-pressure", job.notebook("wind-pressure"))
    job.claim("site-notes", notebook(job.folder / "site.ipynb", opening("site-notes")))


def test_two_notebooks_outside_the_list_may_not_share_a_record(job: Job) -> None:
    """Notebooks that job.toml does not list are held to the same rule."""
    first = notebook(job.folder / "a.ipynb", opening("own"))
    notebook(job.folder / "b.ipynb", opening("own"))
    with pytest.raises(JobError, match=r"'own': a\.ipynb and b\.ipynb"):
        job.claim("own", first)


def test_installation_without_templates_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    """Without a folder of templates the message says what to do."""
    monkeypatch.setattr(Path, "is_dir", lambda _: False)
    with pytest.raises(JobError, match="install calcbook again"):
        templates()


def test_templates_are_the_notebooks_of_the_package() -> None:
    """Templates are found by the names of their files, in the folder of templates."""
    found = templates()
    assert list(found) == sorted(path.stem for path in template_folder().glob("*.ipynb"))
    assert all(path.parent == template_folder() for path in found.values())
