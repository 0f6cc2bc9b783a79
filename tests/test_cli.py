"""The command line: every command, its exit status, and what it leaves on disk."""

from __future__ import annotations

import os
import subprocess
import sys
from typing import TYPE_CHECKING

import pytest
from command_line import command, printed, results
from notebooks import BASIS, LOADS, WIND, contents, make_job, make_notebook

from calcbook.cli import COMMANDS, main
from calcbook.commands import common
from calcbook.run import Runner

if TYPE_CHECKING:
    from pathlib import Path


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the folder of a job with three small workbooks, in which the commands are given."""
    job = make_job(tmp_path / "job", {"design-basis": BASIS, "wind": WIND, "loads": LOADS})
    monkeypatch.chdir(job)
    return job


# --- help and status ----------------------------------------------------------------------------


def test_help_names_every_command(capsys: pytest.CaptureFixture[str]) -> None:
    """Help lists the commands; each has help of its own with the exit statuses."""
    text = printed(capsys, "--help")
    assert text == printed(capsys)
    for name, described in COMMANDS.items():
        assert f"  {name} " in text
        assert described.summary in text
        own = printed(capsys, name, "--help")
        assert f"usage: calcbook {name}" in own
        assert "exit status:" in own
        assert ("MARK is one of several" in own) == ("WORKBOOK[:MARK]" in own)


def test_help_and_slips_wait_for_no_library() -> None:
    """Neither help nor a usage error imports the libraries that are slow to start."""
    code = (
        "import sys\nfrom calcbook.cli import main\n"
        "statuses = main(['--help']), main(['run', '--help']), main(['rnu']), main(['run'])\n"
        "slow = {'numpy', 'pint', 'sympy', 'matplotlib', 'typst'} & set(sys.modules)\n"
        "sys.exit(0 if statuses == (0, 0, 2, 2) and not slow else f'{statuses} {slow}')"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr


def test_exit_status_of_the_process(folder: Path) -> None:
    """A process ends with 0, with 1 when a check is not satisfied, with 2 when refused."""
    assert command("--version").stdout.startswith("calcbook 0")
    assert command("run", "wind", cwd=folder).returncode == 0
    assert command("run", "wind", "--set", "V=60 m/s", cwd=folder).returncode == 1
    refused = command("run", "wind", "--set", "V=60", cwd=folder)
    assert (refused.returncode, refused.stdout) == (2, "")
    assert refused.stderr.startswith("calcbook: wind: V: a speed needs its unit\n")


def test_terminal_without_our_signs(folder: Path) -> None:
    """A terminal that knows ASCII only gets '?' for a sign it does not have, and all the rest."""
    done = command("run", "wind", cwd=folder, env={**os.environ, "PYTHONIOENCODING": "ascii"})
    assert (done.returncode, done.stderr) == (0, "")
    assert "kg/m? ? V?" in done.stdout


def test_reader_that_leaves(folder: Path) -> None:
    """A reader that closes the pipe ends the command without a word."""
    words = [sys.executable, "-m", "calcbook.cli", "run", "wind"]
    with subprocess.Popen(words, cwd=folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE) as run:
        assert run.stdout is not None
        assert run.stderr is not None
        run.stdout.close()
        assert (run.wait(), run.stderr.read()) == (141, b"")


@pytest.mark.parametrize(
    ("error", "expected"),
    [
        (KeyboardInterrupt(), (130, "")),
        (RuntimeError("no\nidea"), (2, "calcbook: stopped unexpectedly: RuntimeError: no idea")),
    ],
)
def test_command_that_stops(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch,
    error: BaseException, expected: tuple[int, str],
) -> None:  # fmt: skip
    """An interruption is quiet; an error nobody foresaw is one line and what to do, no trace."""

    def stop(*_: object, **__: object) -> None:
        raise error

    before = contents(folder)
    monkeypatch.setattr(Runner, "run", stop)
    status = main(["run", "wind"])
    first, _, rest = capsys.readouterr().err.partition("\n")
    assert (status, first) == expected
    assert rest.startswith("look at the job's folder before going on" if first else "")
    assert "Traceback" not in rest
    assert contents(folder) == before


def test_progress_of_what_takes_longer(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """A command that takes longer than its patience says on standard error what it does."""
    slow = make_notebook(tmp_path / "wind.ipynb", ["import time\ntime.sleep(0.3)", *WIND])
    monkeypatch.setattr(common, "PATIENCE", 0.05)
    assert main(["run", str(slow)]) == 0
    assert capsys.readouterr().err == "wind ...\n"
    monkeypatch.setattr(common, "PATIENCE", 60.0)
    assert main(["run", str(slow)]) == 0
    assert capsys.readouterr().err == ""


# --- run ----------------------------------------------------------------------------------------


def test_run_prints_lines_with_their_values(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The text shows entries, formulas with values, the case that holds, tables and verdicts."""
    before = contents(folder)
    text = printed(capsys, "run", "wind")
    for part in (
        "1.1    Basic wind speed: V = 40 m/s  [unconfirmed]",
        "2.1    Velocity pressure\n       q = 0.613 kg/m³ · V² = 0.613 kg/m³ · (40 m/s)² = ",
        "       because wall is solid\n",
        "       p <= '1 kPa': 0.7846 kPa <= 1.0000 kPa, ratio 0.78, satisfied\n",
        "       Level   z       w\n               m    kN/m\n       Roof *  8   7.846\n",
        "       total      11.770\n       w = q*z\n",
    ):
        assert part in text
    assert contents(folder) == before


@pytest.mark.usefixtures("folder")
def test_run_says_what_does_not_apply(capsys: pytest.CaptureFixture[str]) -> None:
    """An idle line is named with what decides it, and a check that fails with its ratio."""
    assert "Only for solid walls (does not apply: wall is louvre)" in printed(
        capsys, "run", "wind", "--set", "wall=louvre"
    )
    text = printed(capsys, "run", "wind", "--set", "V=60 m/s", status=1)
    assert "ratio 1.77, NOT SATISFIED" in text


def test_run_as_json_has_the_documented_form(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """JSON holds values, schedules, checks and entries with 12 significant digits."""
    before = contents(folder)
    found = results(capsys, "wind")
    assert (found["workbook"], found["mark"], found["problems"]) == ("wind", None, [])
    assert len(str(found["fingerprint"])) == 64
    assert found["values"]["q"] == {
        "value": 0.9808, "unit": "kPa", "si": 980.8, "sign": "toward the surface",
    }  # fmt: skip
    assert found["schedules"]["levels"]["key"] == ["Roof", "L1"]
    assert found["schedules"]["levels"]["columns"]["w"] == {
        "unit": "kN/m", "values": [7.8464, 3.9232], "si": [7846.4, 3923.2],
    }  # fmt: skip
    assert found["checks"] == [{"text": "p <= '1 kPa'", "ratio": 0.78464, "satisfied": True}]
    assert found["entries"]["V"] == {"value": 40.0, "unit": "m/s", "si": 40.0, "confirmed": False}
    assert found["entries"]["wall"] == {"value": "solid", "confirmed": False}
    assert contents(folder) == before


@pytest.mark.usefixtures("folder")
def test_one_speed_in_three_units(capsys: pytest.CaptureFixture[str]) -> None:
    """The same speed typed in m/s, km/h and ft/s gives equal values in SI."""
    typed = ("V=36.576 m/s", "V=131.6736 km/h", "V=120 ft/s")
    found = [results(capsys, "wind", "--set", text)["values"] for text in typed]
    assert found[0] == found[1] == found[2]


def test_run_with_rows_of_a_file(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Rows from a spreadsheet's file, with a mark, CRLF and ';', serve for one run only."""
    (folder / "r.csv").write_bytes("\ufeffLevel;z (m)\r\nRoof;9,5\r\n".replace(",", ".").encode())
    before = contents(folder)
    found = results(capsys, "wind", "--rows", "levels=r.csv")
    assert found["schedules"]["levels"]["key"] == ["Roof"]
    assert found["values"]["W"]["si"] == pytest.approx(980.8 * 9.5)
    assert contents(folder) == before


def test_run_outside_a_job(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A notebook runs alone: what it carries has its fallback, which nobody confirmed."""
    notebook = make_notebook(tmp_path / "loads.ipynb", LOADS)
    found = results(capsys, str(notebook))
    assert found["values"]["F"]["si"] == 15_000.0
    assert found["entries"]["H"]["confirmed"] is False


def test_run_says_when_a_template_is_computed(
    folder: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:  # fmt: skip
    """Outside a job, and for a workbook the job does not have, standard error says whose values."""
    assert main(["run", "wind"]) == 0
    assert capsys.readouterr().err == ""
    monkeypatch.chdir(make_job(tmp_path / "other", {"wind": WIND}))
    assert main(["run", "wind-pressure"]) == 0
    assert capsys.readouterr().err == (
        "this job has no wind-pressure: the template's values are computed\n"
    )
    monkeypatch.chdir(tmp_path)
    assert main(["run", "wind-pressure", "--json"]) == 0
    printed = capsys.readouterr()
    assert printed.err == "no job here: the template's values are computed\n"
    assert '"workbook": "wind-pressure"' in printed.out
    assert (
        main(["run", str(make_notebook(folder / "w2.ipynb", [WIND[0].replace("wind", "w2")]))]) == 0
    )
    assert capsys.readouterr().err == (
        "w2 will not be in the package: add 'w2' to the list of workbooks in job.toml\n"
    )


def test_run_finds_the_job_of_the_environment(
    folder: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str],
    monkeypatch: pytest.MonkeyPatch,
) -> None:  # fmt: skip
    """A workbook's name means the copy in the job that CALCBOOK_JOB names."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("CALCBOOK_JOB", str(folder))
    found = results(capsys, "loads")
    assert found["values"]["F"]["si"] == 27_000.0
    assert found["entries"]["H"] == {
        "value": 9.0, "unit": "m", "si": 9.0, "from": "design-basis.h",
    }  # fmt: skip


def test_printed_problems_are_listed_once(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What cannot be computed is printed in its place and listed at the end, by its cause."""
    (folder / "wind.toml").write_text(
        'format = 1\nworkbook = "wind"\n[entries]\nC = { value = "0" }\n'
    )
    assert main(["run", "wind"]) == 2
    text = capsys.readouterr()
    assert "r = 1/C\n       has no value: a division by zero" in text.out
    assert text.err == (
        "calcbook: wind: 1 thing could not be accepted or computed\n"
        "2.3 r: has no value: a division by zero\n"
    )
    found = results(capsys, "wind", status=2)
    assert found["problems"] == ["2.3 r: has no value: a division by zero"]
    assert found["values"]["r"]["si"] is None
