"""The commands that write and show records: set, status and describe."""

from __future__ import annotations

import datetime as dt
import json
import subprocess
import sys
from typing import TYPE_CHECKING

import pytest
from command_line import printed, refused, results, says
from notebooks import BASIS, LOADS, WIND, contents, make_job

from calcbook.cli import main
from calcbook.job import Job

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.record import Record

TODAY = dt.datetime.now().astimezone().date().isoformat()


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the folder of a job with three small workbooks, in which the commands are given."""
    job = make_job(tmp_path / "job", {"design-basis": BASIS, "wind": WIND, "loads": LOADS})
    monkeypatch.chdir(job)
    return job


def record(folder: Path, workbook: str, mark: str | None = None) -> Record:
    """Read a record of a job."""
    return Job.load(folder).record(workbook, mark)


# --- set ----------------------------------------------------------------------------------------


def test_set_stores_what_is_typed(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Quantities keep their unit, text is stored as typed, and the next run uses them."""
    text = printed(capsys, "set", "wind", "V=180 km/h", "seen_by='R = A' \"x\"")
    assert "V = 180 km/h\n" in text
    assert "written to wind.toml" in text
    entries = record(folder, "wind").entries
    assert (entries["V"].value, entries["seen_by"].value) == ("180 km/h", "'R = A' \"x\"")
    assert (entries["V"].confirmed, set(entries)) == (None, {"V", "seen_by"})
    assert results(capsys, "wind", status=1)["values"]["q"]["si"] == 1532.5
    assert "V = 50 m/s  (was 180 km/h)" in printed(capsys, "set", "wind", "V=50 m/s")


def test_set_works_from_a_folder_below_and_by_path(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """The job is found upward from the working folder, and around a notebook's path."""
    (folder / "sub").mkdir()
    monkeypatch.chdir(folder / "sub")
    printed(capsys, "set", "wind", "C=0.7")
    monkeypatch.chdir(folder.parent)
    printed(capsys, "set", "job/wind.ipynb", "V=45 m/s")
    entries = record(folder, "wind").entries
    assert {name: entry.value for name, entry in entries.items()} == {"C": "0.7", "V": "45 m/s"}


def test_a_value_is_confirmed_for_the_job(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Confirming writes value, job, initials and day; a changed value loses it, the same not."""
    printed(capsys, "set", "design-basis", "job_number=MC-1", "--confirm", "RA")
    printed(capsys, "set", "wind", "--confirm", "RA", "V=50 m/s")
    entry = record(folder, "wind").entries["V"]
    assert entry.confirmed is not None
    assert vars(entry.confirmed) == {"value": "50 m/s", "job": "MC-1", "by": "RA", "on": TODAY}
    assert results(capsys, "wind", status=1)["entries"]["V"]["confirmed"] is True
    printed(capsys, "set", "wind", "V=50 m/s", "C=0.7")
    assert record(folder, "wind").entries["V"].confirmed == entry.confirmed
    printed(capsys, "set", "wind", "V=51 m/s")
    assert record(folder, "wind").entries["V"].confirmed is None
    number = record(folder, "design-basis").entries["job_number"]
    assert number.confirmed is not None
    assert number.confirmed.job == "MC-1"


def test_confirming_a_whole_workbook(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """All that has a value is confirmed, the template's values and rows with their sources too."""
    printed(capsys, "set", "design-basis", "job_number=MC-1")
    assert printed(capsys, "set", "wind", "--confirm", "RA") == (
        "V = 40 m/s  (map)\nC = 0.8\nwall = solid\n"
        "levels, Roof: z = 8 m\nlevels, L1: z = 4 m\n"
        "3 entries and 2 rows confirmed by RA\nwritten to wind.toml\n"
    )
    found = record(folder, "wind")
    assert {name: e.value for name, e in found.entries.items()} == {
        "V": "40 m/s", "C": "0.8", "wall": "solid",
    }  # fmt: skip
    assert found.entries["V"].source == "map"
    assert [row.key for row in found.schedules["levels"]] == ["Roof", "L1"]
    items = [*found.entries.values(), *found.schedules["levels"]]
    assert all(found.is_confirmed(item, "MC-1") for item in items)
    assert "wind: checks: 1 satisfied\nloads: " in printed(capsys, "status", ".")


def test_what_cannot_be_confirmed_is_named(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A value the workbook refuses is not confirmed with the rest, and the reader is told."""
    printed(capsys, "set", "design-basis", "job_number=MC-1")
    (folder / "wind.toml").write_text(
        'format = 1\nworkbook = "wind"\n[entries]\nV = { value = "9 m/s" }\n'
    )
    text = printed(capsys, "set", "wind", "--confirm", "RA")
    assert "not confirmed: 1.1 V: V: 9 m/s is outside the range" in text
    entries = record(folder, "wind").entries
    assert (entries["V"].confirmed, entries["C"].confirmed is None) == (None, False)


def test_source_of_what_is_set(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """--source is recorded with each value and row set in the call, and with nothing else."""
    (folder / "r.csv").write_text("Level,z (m),source\nRoof,9,A-2\nL1,4,\n")
    printed(capsys, "set", "wind", "C=0.7", "--source", "before")
    words = ("V=50 m/s", "--rows", "levels=r.csv", "--source", " wind map, sheet 3 ")
    printed(capsys, "set", "wind", *words)
    found = record(folder, "wind")
    sources = {name: entry.source for name, entry in found.entries.items()}
    assert sources == {"C": "before", "V": "wind map, sheet 3"}
    assert [row.source for row in found.schedules["levels"]] == ["wind map, sheet 3"] * 2
    printed(capsys, "set", "wind", "V=51 m/s")
    assert record(folder, "wind").entries["V"].source == "wind map, sheet 3"


def test_a_source_changes_no_confirmation(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The same value set again with a source stays confirmed: the value is what was confirmed."""
    printed(capsys, "set", "design-basis", "job_number=MC-1")
    printed(capsys, "set", "wind", "V=50 m/s", "--confirm", "RA")
    printed(capsys, "set", "wind", "V=50 m/s", "--source", "wind map")
    entry = record(folder, "wind").entries["V"]
    assert (entry.source, entry.confirmed is not None) == ("wind map", True)


def test_a_source_without_a_value_is_refused(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A source belongs to what is set in the same call; confirming alone takes none."""
    message = refused(capsys, folder, "set", "wind", "--source", "map", "--confirm", "RA")
    says(message, "nothing is set", "write NAME=VALUE or --rows")


def test_rows_keep_their_confirmation(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Rows of a file replace those on record; one that is the same stays confirmed."""
    (folder / "r.csv").write_text("Level,z (m)\nRoof,9\n")
    assert printed(capsys, "set", "wind", "--rows", "levels=r.csv").startswith("levels: 1 row\n")
    printed(capsys, "set", "design-basis", "job_number=MC-1")
    (folder / "r.csv").write_text("Level,z (m),source\nRoof,9,A-2\nL1,4,A-2\n")
    printed(capsys, "set", "wind", "--rows", "levels=r.csv", "--confirm", "RA")
    (folder / "r.csv").write_text("Level,z (m)\nRoof,9.4\nL1,4\n")
    printed(capsys, "set", "wind", "--rows", "levels=r.csv")
    roof, first = record(folder, "wind").schedules["levels"]
    assert (roof.cells, roof.source, roof.confirmed) == ({"z": "9.4 m"}, "A-2", None)
    assert first.confirmed is not None
    assert "levels (Roof)" in printed(capsys, "status", ".")


@pytest.mark.usefixtures("folder")
def test_marks_have_records_of_their_own(capsys: pytest.CaptureFixture[str]) -> None:
    """Each mark is set, run and listed apart from the others."""
    printed(capsys, "set", "loads:B2", "w=4 kN/m")
    printed(capsys, "set", "loads:B10", "w=20 kN/m")
    assert results(capsys, "loads:B2")["values"]["F"]["si"] == 36_000.0
    assert results(capsys, "loads:B10", status=1)["mark"] == "B10"
    text = printed(capsys, "status", ".", status=1)
    assert text.index("loads:B2: checks: 1 satisfied") < text.index("loads:B10: checks: 1 NOT")
    assert "\nloads: " not in text


def test_two_processes_set_at_once(folder: Path) -> None:
    """Two commands that set different entries at the same moment lose neither."""
    words = [
        [sys.executable, "-m", "calcbook.cli", "set", "wind", t] for t in ("C=0.7", "V=50 m/s")
    ]
    running = [subprocess.Popen(w, cwd=folder, stdout=subprocess.DEVNULL) for w in words]
    assert [process.wait() for process in running] == [0, 0]
    assert set(record(folder, "wind").entries) == {"C", "V"}


# --- status and describe ------------------------------------------------------------------------


def test_status_tells_how_each_workbook_stands(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Checks by verdict, unconfirmed, stale and not-used values; 1 when a check fails."""
    (folder / "design-basis.toml").write_text(
        'format = 1\nworkbook = "design-basis"\n[entries]\nK_e = { value = "0.9" }\n'
        'h = { value = "50 m" }\n'
    )
    (folder / "loads.toml").write_text(
        'format = 1\nworkbook = "loads"\n[carried]\n"design-basis.h" = '
        '{ value = "9 m", si = 9.0, origin = "design-basis.h", fingerprint = "former" }\n'
    )
    before = contents(folder)
    text = printed(capsys, "status", ".", status=1)
    for part in (
        (
            "design-basis: no checks\n  unconfirmed: units, h\n"
            "  nothing entered: job_number\n  not used with NSCP 2015: K_e\n"
        ),
        "wind: checks: 1 satisfied\n  unconfirmed: V, C, wall, levels (Roof, L1)\n",
        (
            "loads: checks: 1 NOT SATISFIED\n"
            "  NOT SATISFIED: 1.4 Capacity, F <= '100 kN', ratio 1.50\n"
            "  unconfirmed: w\n  stale: H from design-basis.h: 9 m -> 50 m\n"
        ),
    ):
        assert part in text
    assert contents(folder) == before


FLOORS = (
    BASIS[0],
    """with book.section("Levels") as s:
    s.choice("units", "Units", ["SI", "US"], "SI")
    with s.schedule("levels", "Levels", rows=[{"key": "Roof", "z": "8 m"}]) as t:
        t.entry("z", "Elevation", unit="length")""",
)
STOREYS = (
    LOADS[0],
    """with book.section("Storeys") as s:
    with s.schedule("storeys", "Storeys", origin="design-basis.levels",
                    rows=[{"key": "Roof"}]) as t:
        t.carry("z", "z", "Elevation", unit="length")
    with s.schedule("more", "More", same_rows="storeys") as t:
        t.line("d = 2*z", "Twice")""",
)


@pytest.mark.parametrize("change", ["--rows levels=r.csv", "units=US"])
def test_status_of_rows_that_moved(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, change: str
) -> None:
    """Carried rows that changed since the pack are stale; what has the same rows is not named."""
    job = make_job(tmp_path / "job", {"design-basis": FLOORS, "loads": STOREYS})
    monkeypatch.chdir(job)
    printed(capsys, "pack", ".")
    assert "stale" not in printed(capsys, "status", ".")
    (job / "r.csv").write_text("Level,z (m)\nRoof,9\n")
    printed(capsys, "set", "design-basis", *change.split())
    text = printed(capsys, "status", ".")
    stale = [line for line in text.splitlines() if "stale" in line]
    assert stale == ["  stale: storeys from design-basis.levels: 1 row, changed since taken"]


def test_status_of_a_broken_workbook_shows_the_others(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A workbook that cannot be run is named, and the rest of the job is shown all the same."""
    (folder / "wind.toml").write_text("format = \n")
    assert main(["status", "."]) == 2
    text = capsys.readouterr()
    assert "loads: checks: 1 satisfied" in text.out
    assert "calcbook: wind cannot be run: " in text.err


@pytest.mark.usefixtures("folder")
def test_describe_lists_what_a_workbook_takes(capsys: pytest.CaptureFixture[str]) -> None:
    """Entries with unit and range, options with words, columns, results with their sense."""
    text = printed(capsys, "describe", "wind")
    for part in (
        "V              Basic wind speed; in m/s; range 10 m/s to 120 m/s; now 40 m/s",
        "      louvre  half open",
        "levels         Levels; rows Roof, L1",
        "w              Load; in kN/m; computed",
        "q              Velocity pressure; in kPa; positive toward the surface",
    ):
        assert part in text
    assert "H              Height; in m; from design-basis.h" in printed(
        capsys, "describe", "loads"
    )


@pytest.mark.usefixtures("folder")
def test_describe_as_json(capsys: pytest.CaptureFixture[str]) -> None:
    """The same as plain data, in the units of the job."""
    printed(capsys, "set", "design-basis", "units=US")
    found = json.loads(printed(capsys, "describe", "wind", "--json"))
    assert (found["workbook"], found["units"]) == ("wind", "US")
    assert found["entries"][0] == {
        "name": "V", "meaning": "Basic wind speed", "unit": "mph",
        "range": "10 m/s to 120 m/s", "value": "40 m/s",
    }  # fmt: skip
    assert found["choices"][0]["options"] == {"solid": "without openings", "louvre": "half open"}
    assert [column["name"] for column in found["schedules"][0]["columns"]] == ["z", "w"]
    assert found["schedules"][0]["entered"] is True
    assert [result["name"] for result in found["results"]] == ["q", "p", "r"]
