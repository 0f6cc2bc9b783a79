"""What ``open`` and ``status`` make of the outputs saved in a job's notebooks."""

from __future__ import annotations

import json
import shutil
import subprocess
from pathlib import Path
from typing import Any, Self

import nbformat
import pytest
from command_line import printed
from nbclient import NotebookClient
from notebooks import BASIS, WIND, make_job

from calcbook.job import Job
from calcbook.record import EntryRecord
from calcbook.run import Runner

VIEW = {"application/vnd.jupyter.widget-view+json": {"model_id": "gone"}}
MOVED = "the record has moved on since: run all cells."


class Server:
    """A stand-in for JupyterLab that is closed at once."""

    def __init__(self, *_: object, **__: object) -> None: ...

    def __enter__(self) -> Self:
        """Start."""
        return self

    def __exit__(self, *_: object) -> None:
        """Stop."""

    def wait(self) -> int:
        """Wait until it is closed."""
        return 0


@pytest.fixture(autouse=True)
def _no_job_around(monkeypatch: pytest.MonkeyPatch) -> None:
    """No job and no front end of the machine is taken for ours."""
    for name in ("CALCBOOK_JOB", "JPY_SESSION_NAME", "VSCODE_PID"):
        monkeypatch.delenv(name, raising=False)


def filled(folder: Path) -> Path:
    """Run the cells of the wind notebook in a kernel and save its outputs."""
    path = folder / "wind.ipynb"
    node = nbformat.read(path, as_version=4)
    NotebookClient(node, resources={"metadata": {"path": str(folder)}}).execute()
    nbformat.write(node, path)
    return path


def outputs(path: Path) -> list[dict[str, Any]]:
    """Return the saved outputs of a notebook."""
    cells = json.loads(path.read_text(encoding="utf-8"))["cells"]
    return [output for cell in cells for output in cell.get("outputs", ())]


def first(path: Path) -> tuple[str, str]:
    """Return the first output as Markdown and as plain text."""
    data = outputs(path)[0]["data"]
    return "".join(data["text/markdown"]), "".join(data["text/plain"])


@pytest.fixture(scope="module")
def once_run(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return a job whose wind notebook was run and saved."""
    folder = tmp_path_factory.mktemp("run") / "job"
    make_job(folder, {"design-basis": BASIS, "wind": WIND})
    filled(folder)
    return folder


@pytest.fixture
def run_wind(once_run: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the wind notebook of a copy of that job, with a stand-in for JupyterLab."""
    monkeypatch.setattr(subprocess, "Popen", Server)
    return Path(shutil.copytree(once_run, tmp_path / "job")) / "wind.ipynb"


def change(folder: Path, value: str) -> None:
    """Write another wind speed into the record; with '' the template's serves again."""
    record = Job.load(folder).record("wind")
    record.change({"V": EntryRecord(value) if value else None})
    record.save()


def test_outputs_carry_the_fingerprint_they_show(run_wind: Path) -> None:
    """Each section's output has it, with mark and section; the last has that of a whole run."""
    stamps = [output["metadata"]["calcbook"] for output in outputs(run_wind)]
    statement = Runner(Job.load(run_wind.parent)).statement("wind")
    titles = [part["title"] for part in statement["parts"] if part["kind"] == "section"]
    assert [stamp["section"] for stamp in stamps] == titles
    assert {stamp["mark"] for stamp in stamps} == {None}
    assert stamps[-1]["fingerprint"] == statement["fingerprint"]


def test_what_is_as_it_was_is_left_alone(
    run_wind: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Opening a job whose outputs are current says nothing and writes nothing."""
    before = run_wind.read_bytes(), run_wind.stat().st_mtime_ns
    assert MOVED not in printed(capsys, "open", str(run_wind.parent))
    assert MOVED not in printed(capsys, "status", str(run_wind.parent))
    assert (run_wind.read_bytes(), run_wind.stat().st_mtime_ns) == before


def test_outputs_that_moved_on_say_so(run_wind: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The terminal and the first line of the first section say it, once; the values stay."""
    folder = run_wind.parent
    before, shown = outputs(run_wind), outputs(run_wind)[0]["metadata"]["calcbook"]["fingerprint"]
    change(folder, "45 m/s")
    line = f"These outputs show fingerprint {shown[:12]}; {MOVED}"
    for _ in range(2):
        assert f"wind: {line}" in printed(capsys, "open", str(folder))
    told = "saved outputs of an earlier record, run all cells: wind"
    assert told in printed(capsys, "status", str(folder))
    markdown, plain = first(run_wind)
    assert markdown.startswith(f"**{line}**\n\n")
    assert plain.startswith(f"{line}\n\n")
    assert markdown.count(MOVED) == plain.count(MOVED) == 1
    assert outputs(run_wind)[1:] == before[1:]
    change(folder, "")
    printed(capsys, "open", str(folder))
    assert outputs(run_wind) == before


def test_a_run_takes_the_line_away(
    run_wind: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """After the cells were run, the outputs are current again."""
    folder = run_wind.parent
    change(folder, "45 m/s")
    printed(capsys, "open", str(folder))
    monkeypatch.undo()
    filled(folder)
    assert MOVED not in first(run_wind)[0]
    monkeypatch.setattr(subprocess, "Popen", Server)
    assert MOVED not in printed(capsys, "open", str(folder))


def test_dead_views_are_taken_out(run_wind: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A view alone goes with its output, one beside other forms alone; nothing else is touched."""
    content = json.loads(run_wind.read_text(encoding="utf-8"))
    before = run_wind.read_bytes()
    found = [cell["outputs"] for cell in content["cells"] if cell.get("outputs")]
    found[0].append({"output_type": "display_data", "data": dict(VIEW), "metadata": {}})
    found[1][0]["data"] |= VIEW
    run_wind.write_text(json.dumps(content, indent=1, ensure_ascii=False) + "\n", encoding="utf-8")
    printed(capsys, "open", str(run_wind.parent))
    assert run_wind.read_bytes() == before
    assert [p.name for p in run_wind.parent.iterdir() if p.name.endswith(".tmp")] == []


def test_a_notebook_that_cannot_be_run_is_opened_all_the_same(
    run_wind: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Its outputs cannot be compared, which is told; JupyterLab is where one puts it right."""
    content = json.loads(run_wind.read_text(encoding="utf-8"))
    content["cells"][-1]["source"] = "1/0"
    run_wind.write_text(json.dumps(content), encoding="utf-8")
    told = printed(capsys, "open", str(run_wind.parent))
    assert "wind: its saved outputs cannot be compared" in told
    assert "ZeroDivisionError" in told


def test_outputs_of_a_mark_that_is_gone_have_moved_on(
    run_wind: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Outputs without a mark, of a workbook that has marks by now, are no longer what is given."""
    record = Job.load(run_wind.parent).record("wind", "W-1")
    record.change({"V": EntryRecord("50 m/s")})
    record.save()
    assert MOVED in printed(capsys, "open", str(run_wind.parent))
