"""The commands about whole jobs: start, demo, pack and open."""

from __future__ import annotations

import datetime as dt
import importlib.util
import os
import subprocess
import sys
from typing import TYPE_CHECKING, Self

import pytest
from command_line import command, printed
from notebooks import BASIS, LOADS, WIND, make_job, make_notebook

from calcbook.cli import main
from calcbook.errors import JobError
from calcbook.job import Job
from calcbook.run import Runner

if TYPE_CHECKING:
    from pathlib import Path

TODAY = dt.datetime.now().astimezone().date().isoformat()


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the folder of a job with three small workbooks, in which the commands are given."""
    job = make_job(tmp_path / "job", {"design-basis": BASIS, "wind": WIND, "loads": LOADS})
    monkeypatch.chdir(job)
    return job


def test_start_makes_a_job_of_the_templates(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A new job has every template, what others rest on first, and today's date of issue."""
    folder = tmp_path / "new" / "clinic"
    text = printed(capsys, "start", str(folder))
    job = Job.load(folder)
    assert job.workbooks[:3] == ("design-basis", "dead-load-take-off", "wind-pressure")
    assert job.record("design-basis").entries["issue_date"].value == TODAY
    assert "calcbook set design-basis" in text
    told = printed(capsys, "status", str(folder), status=2)  # it has no column yet
    assert "unconfirmed: revision, issue_date, code_set" in told


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, subprocess.CompletedProcess[str]]:
    """Return the demo job's folder and what the command that made it printed."""
    folder = tmp_path_factory.mktemp("demo") / "clinic"
    return folder, command("demo", str(folder))


@pytest.mark.parametrize("word", ["start", "demo"])
def test_job_that_cannot_be_made_leaves_what_was_there(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch,
    word: str,
) -> None:  # fmt: skip
    """When a new job fails on the way its folders go again, and an empty one of before stays."""

    def stop(*_: object, **__: object) -> None:
        raise JobError("enough")

    (tmp_path / "empty").mkdir()
    monkeypatch.setattr(Runner, "run", stop)
    for place in ("empty", "new/job"):
        assert main([word, str(tmp_path / place)]) == 2
        assert "enough" in capsys.readouterr().err
        assert list(tmp_path.rglob("*")) == [tmp_path / "empty"]


def test_demo_makes_job_and_pack(demo: tuple[Path, subprocess.CompletedProcess[str]]) -> None:
    """The demo says its steps with seconds, the pack's pages, and the two entries left open."""
    folder, done = demo
    assert (done.returncode, done.stderr) == (0, "")
    job = Job.load(folder)
    pdf = (folder / f"{job.number}-B.pdf").read_bytes()
    assert pdf.startswith(b"%PDF")
    pages = pdf.count(b"/Type /Page\n") + pdf.count(b"/Type/Page/")
    assert f"{job.number}-B.pdf: {pages} pages" in done.stdout
    assert all(f"  {name} " in done.stdout for name in job.workbooks)
    unconfirmed = [line for line in done.stdout.splitlines() if "unconfirmed: " in line]
    assert sum(len(line.split("unconfirmed: ")[1].split(", ")) for line in unconfirmed) == 2


def test_pack_of_a_job_with_a_failing_check(
    folder: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The pack is written all the same, under the folder's name or where told, with status 1."""
    printed(capsys, "set", "design-basis", "h=50 m")
    text = printed(capsys, "pack", str(folder), status=1)
    assert "loads: NOT SATISFIED: Capacity, F <= '100 kN'" in text
    output = tmp_path / "elsewhere.pdf"
    assert main(["pack", str(folder), "--output", str(output)]) == 1
    again = capsys.readouterr()
    assert f"{output}: " in again.out
    assert "  wind   " in again.err
    assert output.read_bytes() == (folder / "job.pdf").read_bytes()


def test_pack_is_named_after_number_and_revision(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The file has the job number, and the revision if there is one, in characters fit for it."""
    cell = BASIS[1].replace('Job number")', "Job number\")\n    s.text('revision', 'Revision')")
    make_notebook(folder / "design-basis.ipynb", (BASIS[0], cell))
    printed(capsys, "set", "design-basis", "job_number=../MC 1:7")
    assert printed(capsys, "pack", ".").startswith("MC-1-7.pdf: ")
    printed(capsys, "set", "design-basis", "revision=B/2")
    assert printed(capsys, "pack", ".").startswith("MC-1-7-B-2.pdf: ")


def test_pack_says_what_moved(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Carried values that are others than when last taken are printed, old and new, once."""
    told = "carried values that moved since they were last taken:\n"
    assert told not in printed(capsys, "pack", str(folder))
    printed(capsys, "set", "design-basis", "h=12 m")
    assert f"{told}  loads H: 9 m -> 12 m\n" in printed(capsys, "pack", str(folder))
    assert told not in printed(capsys, "pack", str(folder))


def test_pack_of_one_workbook_alone(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Its pages alone are written, nothing is noted as taken, and an unknown one is named."""
    before = (folder / "loads.toml").read_bytes() if (folder / "loads.toml").exists() else b""
    assert printed(capsys, "pack", ".", "--only", "loads").startswith("job-loads.pdf: ")
    after = (folder / "loads.toml").read_bytes() if (folder / "loads.toml").exists() else b""
    assert before == after
    assert main(["pack", ".", "--only", "load"]) == 2
    assert "did you mean 'loads'" in capsys.readouterr().err


class Server:
    """Stands in for a JupyterLab that is interrupted once and then closed."""

    status = 0

    def __init__(self, words: list[str], env: dict[str, str]) -> None:
        Server.words, Server.env = words, env
        self.interrupted = False

    def __enter__(self) -> Self:
        """Begin like a process."""
        return self

    def __exit__(self, *_: object) -> None:
        """End like a process."""

    def wait(self) -> int:
        """Be interrupted the first time, and end well the second."""
        if not self.interrupted:
            self.interrupted = True
            raise KeyboardInterrupt
        return self.status


def test_open_starts_jupyterlab_on_the_job(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """JupyterLab is started on the folder, knows the job, shows no news, and survives a Ctrl-C."""
    monkeypatch.setattr(subprocess, "Popen", Server)
    printed(capsys, "open", ".", "--", "--no-browser", "--port", "8890")
    assert Server.words[-3:] == ["--no-browser", "--port", "8890"]
    assert Server.words[:3] == [sys.executable, "-m", "jupyterlab"]
    assert f"--ServerApp.root_dir={folder.resolve()}" in Server.words
    assert "--LabApp.news_url=None" in Server.words
    assert Server.env["CALCBOOK_JOB"] == str(folder.resolve())


@pytest.mark.parametrize(
    ("user", "words", "hint"),
    [
        (0, (), "as root it starts only when told so: calcbook open . -- --allow-root"),
        (0, ("--", "--allow-root"), "its messages stand above"),
        (7, (), "its messages stand above"),
    ],
)
@pytest.mark.usefixtures("folder")
def test_jupyterlab_that_stops(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch,
    user: int, words: tuple[str, ...], hint: str,
) -> None:  # fmt: skip
    """When JupyterLab stops with an error its status is said, and what it wants of root."""
    monkeypatch.setattr(subprocess, "Popen", Server)
    monkeypatch.setattr(Server, "status", 1)
    monkeypatch.setattr(os, "geteuid", lambda: user, raising=False)
    assert main(["open", ".", *words]) == 2
    assert capsys.readouterr().err == f"calcbook: JupyterLab stopped with status 1\n{hint}\n"


def test_open_without_jupyterlab(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Where JupyterLab is missing the message says how to install it."""
    monkeypatch.setattr(importlib.util, "find_spec", lambda _: None)
    assert main(["open", str(folder)]) == 2
    message = capsys.readouterr().err
    assert message.startswith("calcbook: JupyterLab is not installed\n")
    assert "pip install jupyterlab" in message
