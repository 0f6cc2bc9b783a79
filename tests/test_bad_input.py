"""Bad input on the command line: one clear message, exit status 2, nothing on disk changed."""

from __future__ import annotations

import errno
import os
from pathlib import Path
from typing import NoReturn

import pytest
from command_line import refused, says
from notebooks import WIND, contents, make_job, make_notebook

from calcbook.cli import main

RECORD = 'format = 1\nworkbook = "wind"\n'


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Return the folder of a job with one small workbook, in which the commands are given."""
    job = make_job(tmp_path / "job", {"wind": WIND})
    monkeypatch.chdir(job)
    return job


# --- records ------------------------------------------------------------------------------------

RECORDS: dict[str, tuple[str | bytes, tuple[str, ...]]] = {
    "broken TOML": ('format = 1\nworkbook = "wind\n', ("wind.toml, line 2, column 17", "TOML")),
    "unknown entry": (
        RECORD + '[entries]\nVV = { value = "50 m/s" }\n',
        ("wind: there is no entry 'VV'", "did you mean 'V'?"),
    ),
    "wrong type": (
        RECORD + "[entries]\nV = { value = 50 }\n",
        ("wind.toml, line 4", "must be text in quotes", 'write value = "50"'),
    ),
    "row key twice": (
        RECORD + '[schedules]\nlevels = [\n  { key = "A", cells = { z = "4 m" } },\n'
        '  { key = "A", cells = { z = "3 m" } },\n]\n',
        ("wind.toml, line 6", "levels has two rows 'A'", "a key of its own"),
    ),
    "unknown column": (
        RECORD + '[schedules]\nlevels = [\n  { key = "A", cells = { zz = "4 m" } },\n]\n',
        ("row A", "no column 'zz'", "did you mean 'z'?"),
    ),
    "newer format": (
        'format = 99\nworkbook = "wind"\n',
        ("wind.toml, line 1", "format 99", "newer calcbook"),
    ),
    "of another workbook": (
        'format = 1\nworkbook = "snow"\n',
        ("wind.toml, line 2", "a record of 'snow', not of 'wind'"),
    ),
    "not UTF-8": (b"\xff\xfe\x00", ("wind.toml", "not UTF-8", "save it as UTF-8")),
}


@pytest.mark.parametrize("case", RECORDS)
@pytest.mark.parametrize("words", [("run", "wind"), ("set", "wind", "C=0.7"), ("status", ".")])
def test_record_that_cannot_be_read(
    folder: Path, capsys: pytest.CaptureFixture[str], case: str, words: tuple[str, ...]
) -> None:
    """A damaged record is reported with its place by every command, and left alone."""
    content, parts = RECORDS[case]
    data = content if isinstance(content, bytes) else content.encode()
    (folder / "wind.toml").write_bytes(data)
    says(refused(capsys, folder, *words), *parts)


UNFIT = {
    "wrong unit": ('[entries]\nV = { value = "3 kN" }\n', ("1.1 V", "'kN' is a unit of force")),
    "out of range": ('[entries]\nV = { value = "3 m/s" }\n', ("1.1 V", "10 m/s to 120 m/s")),
    "no value": ('[entries]\nC = { value = "" }\n', ("1.2 C", "has no value yet")),
    "no rows": ("[schedules]\nlevels = []\n", ("3.1 levels", "the schedule has no rows")),
    "levels out of order": (
        ('[schedules]\nlevels = [\n  { key = "A", cells = { z = "4 m" } },\n'
        '  { key = "B", cells = { z = "5 m" } },\n]\n'),
        ("3.1 levels, column z: out of order: A (4 m) is not above B (5 m)", "highest first"),
    ),
    "a cell missing": (
        '[schedules]\nlevels = [\n  { key = "A", cells = {  } },\n]\n',
        ("3.1 levels, column z: row A", "has no value"),
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", UNFIT)
@pytest.mark.parametrize("words", [("run", "wind"), ("status", ".")])
def test_record_with_a_value_the_workbook_refuses(
    folder: Path, capsys: pytest.CaptureFixture[str], case: str, words: tuple[str, ...]
) -> None:
    """The item says what is wrong with it; what it stands in the way of is not listed as well."""
    content, parts = UNFIT[case]
    (folder / "wind.toml").write_text(RECORD + content)
    message = refused(capsys, folder, *words)
    says(message, *parts)
    assert "not available" not in message


# --- what is typed ------------------------------------------------------------------------------

TYPED = {
    "VV=50 m/s": ("wind: there is no entry 'VV'", "did you mean 'V'?"),
    "V=1,5 m/s": ("V: there is a comma in the number", "write 1.5 m/s"),
    "V=1 234 m/s": ("V: there is a space inside the number", "write 1234 m/s"),
    "V=1.5,5 m/s": ("V: there is a comma in the number", "one number with one point"),
    "v=50 m/s": ("wind: there is no entry 'v'", "did you mean 'V'?"),
    "speed=50 m/s": ("there is no entry 'speed'", "entries are V, C, wall, seen_by"),
    "V=fast": ("V: this does not start with a number", "for example 70 m/s"),
    "V=150 kph": ("V: there is no unit 'kph'", "did you mean 'km/h'?"),
    "V=40": ("V: a speed needs its unit", "40 m/s or 40 mph"),
    "V=4 kPa": ("'kPa' is a unit of pressure, and a unit of speed is wanted",),
    "V=nan": ("'nan' is not a value",),
    "V=inf m/s": ("'inf' is not a value",),
    "V=20 degC": ("a temperature with an offset",),
    "V=0 m/s": ("V: 0 m/s is outside the range 10 m/s to 120 m/s",),
    "V=-40 m/s": ("V: -40 m/s is outside the range",),
    "V=4e4 km/h": ("V: 4e4 km/h is outside the range",),
    "wall=soild": ("'soild' is no option of wall", "did you mean 'solid'?"),
    "wall=Solid": ("'Solid' is no option of wall", "did you mean 'solid'?"),
    "wall=none": ("'none' is refused: a building without walls is not covered",),
    "p=3 kPa": ("p is computed by this workbook and cannot be set",),
    "levels=3": ("levels is a schedule and has rows", "--rows levels=FILE.csv"),
    "z=3 m": ("z is a column of levels", "--rows levels=FILE.csv"),
    "C=": ("C",),
    "V": ("'V' is not NAME=VALUE", "V='70 m/s'"),
}


@pytest.mark.parametrize("typed", TYPED)
@pytest.mark.parametrize("words", [("set", "wind"), ("run", "wind", "--set")])
def test_typed_value_that_is_refused(
    folder: Path, capsys: pytest.CaptureFixture[str], words: tuple[str, ...], typed: str
) -> None:
    """A refused entry is named with its workbook and what to type instead, set or only tried."""
    says(refused(capsys, folder, *words, typed), *TYPED[typed])


def test_one_refused_value_keeps_the_others_out(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Of several values set at once none is written when one is refused."""
    says(refused(capsys, folder, "set", "wind", "C=0.7", "V=3 mm"), "'mm' is a unit of length")
    says(refused(capsys, folder, "set", "wind", "C=0.7", "C=0.8"), "C is given twice")


ROWS = {
    "Level,y (m)\nA,4\n": ("r.csv, line 1: unknown column 'y'", "known here: z"),
    "Level,source\nA,4\n": ("r.csv, line 1: there is no column 'z'", "the columns are"),
    "Level,z\nA,4\n": ("r.csv, line 2, column 'z': '4' has no unit", "z (m)"),
    "Level,z (m)\nA,4\nB\n": ("r.csv, line 3", "not as many cells (1) as there are headers (2)"),
    "Level;z (m)\nA;4,5\n": (
        "r.csv, line 2, column 'z': there is a comma in the number '4,5'",
        "4.5",
    ),
    "Level,z (m)\nA,4\nA,3\n": ("r.csv, line 3", "the key 'A' was used before, in line 2"),
    "": ("r.csv: the file is empty",),
    "Level,z (m)\n": ("r.csv, line 1: there are headers and no rows",),
    "Level,z (m)\nA,4\nB,9\n": ("levels: out of order: A (4 m) is not above B (9 m)",),
    "Level,z (kN)\nA,4\n": ("row A: z: 'kN' is a unit of force",),
    "Level,z (m)\nA,-4\n": ("row A: z: -4 m is outside the range 0 m to 400 m",),
}


@pytest.mark.parametrize("text", ROWS, ids=repr)
@pytest.mark.parametrize("command", ["set", "run"])
def test_rows_that_are_refused(
    folder: Path, capsys: pytest.CaptureFixture[str], command: str, text: str
) -> None:
    """Refused rows are named with file, line and column, or with the row's key."""
    (folder / "r.csv").write_text(text)
    says(refused(capsys, folder, command, "wind", "--rows", "levels=r.csv"), *ROWS[text])


CASES = {
    "V (m/s)\n50\n500\n": ("c.csv, case 2, V: 500 m/s is outside the range",),
    "VV (m/s)\n50\n": ("c.csv, line 1: unknown column 'VV'", "did you mean 'V'?"),
    "V\n50\n": ("c.csv, line 2, column 'V': '50' has no unit",),
    "V (m/s);C\n50;0,5\n": ("c.csv, line 2, column 'C': there is a comma in the number",),
    "V (m/s),C\n50\n": ("c.csv, line 2", "not as many cells (1)"),
    "V (m/s),C\n50,\n": ("c.csv, line 2, column 'C': the cell is empty",),
    "V (kN)\n50\n": ("c.csv, case 1, V: 'kN' is a unit of force",),
    "wall\nsolid\nnone\n": ("c.csv, case 2, wall: 'none' is refused",),
    "C\n0.5\n0\n": ("c.csv, case 2: r has no value: a division by zero",),
    "p (kPa)\n3\n": ("c.csv, line 1: unknown column 'p'",),
}


@pytest.mark.parametrize("text", CASES, ids=repr)
def test_cases_that_are_refused(
    folder: Path, capsys: pytest.CaptureFixture[str], text: str
) -> None:
    """One bad case is named and no results are printed."""
    (folder / "c.csv").write_text(text)
    before = contents(folder)
    assert main(["run", "wind", "--cases", "c.csv"]) == 2
    printed = capsys.readouterr()
    says(printed.err, *CASES[text])
    assert (printed.out, contents(folder)) == ("", before)


# --- carried, fixed and shared ------------------------------------------------------------------

BASIS = (
    'from calcbook import open_workbook\nbook = open_workbook("basis", "Basis")',
    (
        'with book.section("Levels") as s:\n'
        '    s.entry("h", "Height", "9 m", unit="length", low="1 m")\n'
        '    s.line("h_2 = 2*h", "Twice the height")\n'
        '    with s.schedule("levels", "Levels", rows=[{"key": "Roof", "z": "8 m"}]) as t:\n'
        '        t.entry("z", "Elevation", unit="length")\n'
        '    s.line("top = max(z) + h_2", "Highest point")\n'
        '    s.line("three = \'3 m\'", "Always the same")'
    ),
)
LOADS = (
    'from calcbook import open_workbook\nbook = open_workbook("loads", "Loads")',
    (
        'with book.section("Loads") as s:\n'
        '    s.carry("H", "basis.h", "Height", unit="length", fallback="5 m")\n'
        '    s.carry("top", "basis.top", "Top", unit="length", fallback="5 m")\n'
        '    s.carry("three", "basis.three", "Three", unit="length", fallback="5 m")\n'
        '    with s.schedule("storeys", "Storeys", origin="basis.levels",\n'
        '                    rows=[{"key": "Roof"}]) as t:\n'
        '        t.carry("z", "z", "Elevation", unit="length")\n'
        '    with s.schedule("zones", "Zones", fixed=True, rows=[{"key": "1", "c": "0.5"}]) as t:\n'
        '        t.entry("c", "Coefficient")\n'
        '    with s.schedule("forces", "Forces", same_rows="zones") as t:\n'
        '        t.line("d = 2*c", "Twice")'
    ),
)
ELSEWHERE = {
    "H=6 m": ("loads: H is carried from basis.h", "calcbook set basis h=VALUE"),
    "top=6 m": (
        "loads: top is carried from basis.top",
        "it is computed there from h and the rows of levels: calcbook set basis h=VALUE",
    ),
    "three=6 m": ("it is computed there, and from no entry",),
    "heights=6 m": ("there is no entry 'heights'", "entries are none"),
    "storeys=r.csv": (
        "loads: storeys is carried from basis.levels",
        "change it there: calcbook set basis --rows levels=FILE.csv",
    ),
    "walls=r.csv": ("there is no schedule 'walls'", "schedules are none"),
    "zones=r.csv": ("the rows of zones belong to the method",),
    "forces=r.csv": ("forces has the rows of zones", "--rows zones=FILE.csv"),
    "zone=r.csv": ("there is no schedule 'zone'", "did you mean 'zones'?"),
}


@pytest.mark.parametrize("typed", ELSEWHERE)
def test_value_that_is_owned_elsewhere(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, typed: str
) -> None:
    """A carried value is set where it is owned; rows of the method are not set at all."""
    job = make_job(tmp_path / "job", {"basis": BASIS, "loads": LOADS})
    (job / "r.csv").write_text("Row,c\n1,0.7\n")
    monkeypatch.chdir(job)
    words = ["--rows", typed] if typed.endswith(".csv") else [typed]
    says(refused(capsys, job, "set", "loads", *words), *ELSEWHERE[typed])


def test_source_that_cannot_be_computed(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """A carried value whose source is out of range says so with the workbook it comes from."""
    job = make_job(tmp_path / "job", {"basis": BASIS, "loads": LOADS})
    (job / "basis.toml").write_text(
        'format = 1\nworkbook = "basis"\n[entries]\nh = { value = "3 mm" }\n'
    )
    monkeypatch.chdir(job)
    message = refused(capsys, job, "run", "loads")
    says(message, "1.1 H", "basis.h", "3 mm is outside the range 1 m or more")


# --- folders and disks --------------------------------------------------------------------------

USAGE = {
    "status nowhere": ("'nowhere' is not a job", "calcbook start FOLDER"),
    "pack nowhere": ("'nowhere' is not a job",),
    "open nowhere": ("'nowhere' is not a job",),
    "run wnd-pressure": ("there is no workbook 'wnd-pressure'", "did you mean 'wind-pressure'?"),
    "run gone.ipynb": ("there is no notebook 'gone.ipynb'",),
    "run snow": (
        "there is no workbook 'snow'",
        "there are: wind, ",
    ),
    "run wind --rows levels=.": ("'.' is a folder", "name a CSV file"),
    "run wind:B.1.": ("'B.1.' cannot be a mark",),
    "run wind:B1": ("wind has no mark 'B1' in this job",),
    "set design-basis place=Osmere": ("has no workbook 'design-basis'", "it has: wind"),
    "set wind": ("there is nothing to set", "NAME=VALUE"),
    "set wind --confirm 1": ("'1' cannot be initials",),
    "set wind C=0.7 --confirm RA": ("no job number yet", "job_number="),
    "run wind --rows levels=gone.csv": ("gone.csv", "there is no such file"),
    "run wind --rows levels": ("'levels' is not NAME=VALUE",),
    "rnu wind": ("no command 'rnu'", "did you mean 'run'?"),
    "run wind --casse c.csv": ("takes no option '--casse'", "did you mean '--cases'?"),
    "run": ("required: WORKBOOK", "calcbook run --help"),
    "run wind more": ("takes no further word 'more'",),
    "--versoin": ("there is no option '--versoin'", "did you mean '--version'?"),
}


@pytest.mark.parametrize("line", USAGE)
def test_command_that_cannot_be_understood(
    folder: Path, capsys: pytest.CaptureFixture[str], line: str
) -> None:
    """A slip in a command is answered with what was probably meant."""
    says(refused(capsys, folder, *line.split()), *USAGE[line])


@pytest.mark.parametrize("command", ["start", "demo"])
def test_existing_folder(folder: Path, capsys: pytest.CaptureFixture[str], command: str) -> None:
    """A folder with something in it is never made a job."""
    says(refused(capsys, folder, command, "."), "exists already and is not empty", "new folder")


def test_set_outside_a_job(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Values are set in a job; outside of one the command says how to start it."""
    make_notebook(tmp_path / "wind.ipynb", WIND)
    monkeypatch.chdir(tmp_path)
    message = refused(capsys, tmp_path, "set", "wind.ipynb", "C=0.7")
    says(message, "not in a job", "calcbook start FOLDER", "calcbook run WORKBOOK --set")


def test_notebook_named_otherwise_than_its_workbook(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """In a job a notebook is named after its workbook, so that its record is its own."""
    (folder / "wind.ipynb").rename(folder / "sturm.ipynb")
    (folder / "job.toml").write_text('format = 1\nworkbooks = ["sturm"]\n')
    says(refused(capsys, folder, "run", "sturm"), "opens the workbook 'wind'", "wind.ipynb")


def full_disk(*_: object) -> NoReturn:
    """Stand in for a write on a disk without space."""
    raise OSError(errno.ENOSPC, "No space left on device")


def test_full_disk(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Setting on a full disk leaves the old record whole, and no half file beside it."""
    assert main(["set", "wind", "C=0.7"]) == 0
    monkeypatch.setattr(os, "write", full_disk)
    says(refused(capsys, folder, "set", "wind", "C=0.6"), "wind.toml: the disk is full", "free")


def test_starting_on_a_full_disk(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """A job that cannot be written leaves no folder behind."""
    monkeypatch.setattr(os, "write", full_disk)
    for command in ("start", "demo"):
        message = refused(capsys, tmp_path, command, str(tmp_path / "job"))
        says(message, "the disk is full")
        assert not (tmp_path / "job").exists()


def test_folder_that_cannot_be_written(
    folder: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Without permission the message names the folder and what to do."""
    usual = os.open

    def denied(path: str | Path, flags: int, *rest: int) -> int:
        if flags & os.O_CREAT and Path(path).is_relative_to(folder.resolve()):
            raise PermissionError(errno.EACCES, "Permission denied")
        return usual(path, flags, *rest)

    monkeypatch.setattr(os, "open", denied)
    says(refused(capsys, folder, "set", "wind", "C=0.6"), "no permission", str(folder.resolve()))
