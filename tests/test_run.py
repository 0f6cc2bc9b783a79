from __future__ import annotations

import json
from typing import TYPE_CHECKING

import books
import pytest

from calcbook.errors import CalcbookError, CarryError, InputError, JobError
from calcbook.job import Job, find_notebook
from calcbook.record import RowRecord
from calcbook.run import Filling, Runner, item_digest

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

OPEN = 'from calcbook import open_workbook\nbook = open_workbook("{0}", "{0}")\n'


def notebook(folder: Path, name: str, *cells: str) -> Path:
    """Write a notebook that opens a workbook, then has these code cells ('#' starts prose)."""
    found = [
        {"cell_type": "markdown", "source": c[2:]}
        if c.startswith("# ")
        else {"cell_type": "code", "source": c}
        for c in (OPEN.format(name), *cells)
    ]
    path = folder / f"{name}.ipynb"
    path.write_text(json.dumps({"cells": found, "nbformat": 4}), encoding="utf-8")
    return path


def section(title: str, *declarations: str) -> str:
    """Return a cell that declares one section."""
    lines = "".join(f"    s.{d}\n" for d in declarations)
    return f'with book.section("{title}") as s:\n{lines}'


def job(folder: Path, workbooks: Sequence[str]) -> Job:
    """Write job.toml and load the job."""
    listed = ", ".join(f'"{w}"' for w in workbooks)
    (folder / "job.toml").write_text(f"format = 1\nworkbooks = [{listed}]\n", encoding="utf-8")
    return Job.load(folder)


def test_a_notebook_is_run_from_its_first_cell(tmp_path: Path) -> None:
    """Prose and sections come in the notebook's order, with the notebook and the versions."""
    path = notebook(
        tmp_path, "trial", "# Before", section("A", 'entry("a", "a", "2")'),
        "# Between", section("B", 'line("x = 2*a", "x")'),
    )  # fmt: skip
    _, statement = Runner().run(Filling(path, sets={"a": "5"}))
    kinds = [p.get("title", p.get("markdown")) for p in statement["parts"]]
    assert kinds == ["Before", "A", "Between", "B"]
    assert books.items(statement)["x"]["value"]["si"] == 10.0
    assert statement["notebook"]["name"] == "trial.ipynb"
    assert "numpy" in statement["software"]


def _pair(folder: Path, carry: str, *source: str) -> Job:
    notebook(folder, "source", section("S", *(source or ('line("p = \'2 kPa\'", "p")',))))
    notebook(folder, "user", section("U", carry, 'line("y = 2*p", "y")'))
    return job(folder, ["source", "user"])


CARRY = 'carry("p", "source.p", "Pressure", unit="pressure", fallback="1 kPa")'


def test_values_are_carried_in_order(tmp_path: Path) -> None:
    """The workbook a value comes from is run first; each runs once."""
    told: list[str] = []
    runner = Runner(_pair(tmp_path, CARRY), told.append)
    found = books.items(runner.statement("user"))
    assert found["y"]["value"]["si"] == 4000.0
    assert found["p"]["from"] == {"workbook": "source", "name": "p", "number": "1.1"}
    runner.statement("source")
    assert told == ["user", "source"]


def test_outside_a_job_the_fallback_serves(tmp_path: Path) -> None:
    """The same notebook runs alone, with its fallback."""
    _pair(tmp_path, CARRY)
    _, statement = Runner().run(Filling(tmp_path / "user.ipynb"))
    assert books.items(statement)["y"]["value"]["si"] == 2000.0
    assert books.items(statement)["p"]["fallback"]


@pytest.mark.parametrize(
    ("carry", "source", "reason"),
    [
        (CARRY.replace("source.p", "source.pp"), (), "did you mean 'p'?"),
        (CARRY, ('line("p = \'2 kN\'", "p")',), "here pressure is expected"),
        (CARRY, ('line("p = 1/0*\'2 kPa\'", "p")',), "a division by zero"),
        (CARRY, ('line("p = nothing", "p")',), "source.p"),
        (CARRY, ("nothing()",), "source cannot be run"),
    ],
)
def test_what_cannot_be_carried_is_said_at_the_item(
    tmp_path: Path, carry: str, source: tuple[str, ...], reason: str
) -> None:
    """A missing name, another dimension, a source with a problem: said, and nothing else stops."""
    found = books.items(Runner(_pair(tmp_path, carry, *source)).statement("user"))
    assert reason in found["p"]["problem"]
    assert found["y"]["problem"] == "not available because of p"


def test_circles_are_named(tmp_path: Path) -> None:
    """Two workbooks that carry from each other are an error that names the circle."""
    for one, other in (("a", "b"), ("b", "a")):
        notebook(tmp_path, one, section("S", f'carry("x", "{other}.x{other}", "x", fallback="1")',
                                        f'line("x{one} = x", "x")'))  # fmt: skip
    with pytest.raises(CarryError, match="in a circle: a -> b -> a"):
        Runner(job(tmp_path, ["a", "b"])).statement("a")


def test_a_source_that_moved_is_stale(tmp_path: Path) -> None:
    """A record that took another value makes the item stale, with the value taken."""
    built = _pair(tmp_path, CARRY)
    runner = Runner(built)
    item = books.items(runner.statement("source"))["p"]
    text = (
        'format = 1\nworkbook = "user"\n\n[carried]\n'
        '"source.p" = { value = "2 kPa", fingerprint = "%s" }\n'
    )
    for digest, stale in ((item_digest(item), False), ("0" * 16, True)):
        (tmp_path / "user.toml").write_text(text % digest, encoding="utf-8")
        found = books.items(Runner(Job.load(tmp_path)).statement("user"))
        assert found["p"]["stale"] is stale
        assert found["p"]["taken"] == ({"text": "2 kPa"} if stale else None)


def test_strict_refuses_what_is_marked_otherwise(tmp_path: Path) -> None:
    """A refused entry is an error item; run strictly, it is an error."""
    path = notebook(tmp_path, "trial", section("A", 'entry("L", "L", "2 m", unit="length")'))
    _, statement = Runner().run(Filling(path, sets={"L": "1,5 m"}))
    assert books.items(statement)["L"]["problem"] is not None
    with pytest.raises(CalcbookError, match=r"1\.5"):
        Runner().run(Filling(path, sets={"L": "1,5 m"}), strict=True)
    with pytest.raises(InputError, match=r"did you mean 'L'|entries are L"):
        Runner().run(Filling(path, sets={"LL": "2 m"}), strict=True)


@pytest.mark.parametrize(
    ("cell", "message"),
    [
        ("x = 1/0", "ZeroDivisionError"),
        ("raise SystemExit", "SystemExit"),
        ("x = (", "SyntaxError"),
        ("%matplotlib inline", "notebook commands"),
        ("answer = 1\nundefined", "undefined"),
        ('with book.section("A") as s:\n    if s.entry("a", "a", "2") > 1:\n        pass',
         "reads the value of a"),
        ("from calcbook import open_workbook\nopen_workbook('trial', 'again')", "one workbook"),
    ],
)  # fmt: skip
def test_a_cell_that_stops_is_named_with_its_line(tmp_path: Path, cell: str, message: str) -> None:
    """The error names notebook and cell, and shows the line where that is known."""
    path = notebook(tmp_path, "trial", "# Prose", cell)
    with pytest.raises(CalcbookError, match=message) as caught:
        Runner().run(Filling(path))
    assert "trial.ipynb" in caught.value.where
    if message not in {"SyntaxError", "one workbook"}:
        assert "cell 3" in caught.value.where


def test_notebooks_that_are_none(tmp_path: Path) -> None:
    """A file that is no notebook, a notebook that opens nothing, an unknown name."""
    broken = tmp_path / "broken.ipynb"
    broken.write_text("{", encoding="utf-8")
    with pytest.raises(JobError, match="no notebook that can be read"):
        Runner().run(Filling(broken))
    broken.write_text('{"cells": []}', encoding="utf-8")
    with pytest.raises(JobError, match="opens no workbook"):
        Runner().run(Filling(broken))
    with pytest.raises(JobError, match="did you mean 'wind-pressure'"):
        find_notebook("wind-presure", None)
    with pytest.raises(JobError, match="there is no notebook"):
        find_notebook("nothing.ipynb", None)
    assert find_notebook("wind-pressure", None).is_file()


def test_the_design_basis_decides_code_set_and_units(tmp_path: Path) -> None:
    """Every workbook of a job is opened with the code set and units of its design basis."""
    for name in ("design-basis", "wind-pressure"):
        source = books.TEMPLATES / f"{name}.ipynb"
        (tmp_path / source.name).write_bytes(source.read_bytes())
    (tmp_path / "design-basis.toml").write_text(
        'format = 1\nworkbook = "design-basis"\n\n[entries]\n'
        'code_set = { value = "ASCE 7-16" }\nunits = { value = "US" }\n'
        'roof = { value = "gable" }\npitch = { value = "20 deg" }\n',
        encoding="utf-8",
    )
    runner = Runner(job(tmp_path, ["design-basis", "wind-pressure"]))
    wind = runner.statement("wind-pressure")
    found = books.items(wind)
    assert (wind["code_set"]["name"], wind["units"]) == ("ASCE 7-16", "US")
    assert (found["code_set"]["option"], found["roof"]["option"]) == ("ASCE 7-16", "gable")
    assert (
        found["levels"]["rows"] == books.items(runner.statement("design-basis"))["levels"]["rows"]
    )
    assert wind["counts"]["problems"] == 0
    with pytest.raises(CalcbookError, match=r"units|unit system"):
        Runner().run(Filling(tmp_path / "wind-pressure.ipynb", sets={"units": "metric"}))


BEAM = (
    section("Ends", 'entry("w", "Load", "1 kN", unit="force")')
    + '    with s.schedule("carried", "Reactions", key="end", origin="beam.named.reactions", '
    'optional=True) as t:\n        t.carry("B", "R", "Reaction", unit="force")\n'
    '    with s.schedule("borne", "Beams", key="beam", optional=True) as t:\n'
    '        t.text("of", "Mark and end")\n        t.line("P = lookup(B, end, of)", "Load")\n'
    '    with s.schedule("reactions", "Reactions", rows=[{"key": "A"}, {"key": "C"}]) as t:\n'
    '        t.line("R = (w + sum(P))/2", "Reaction", unit="force", result=True)\n'
)


def beams(folder: Path, **borne: str) -> Job:
    """Write beams by mark, each bearing the ends it names, and return their job."""
    notebook(folder, "beam", BEAM)
    for mark, end in borne.items():
        row = f'borne = [ {{ key = "1", cells = {{ of = "{end}" }} }} ]' if end else ""
        text = f'format = 1\nworkbook = "beam"\nmark = "{mark}"\n\n[schedules]\n{row}\n'
        (folder / f"beam.{mark}.toml").write_text(text, encoding="utf-8")
    return job(folder, ["beam"])


def test_a_mark_takes_a_result_of_another_mark(tmp_path: Path) -> None:
    """Only the marks that a row names are run; what they bring is found by mark and row."""
    told: list[str] = []
    runner = Runner(beams(tmp_path, B1="B2 A", B2="", B3=""), told.append)
    found = books.items(runner.statement("beam", "B1"))
    assert found["reactions"]["columns"][0]["si"] == [750.0, 750.0]
    assert found["carried"]["rows"] == ["B2 A", "B2 C"]
    assert told == ["beam B1", "beam B2"]
    assert books.items(runner.statement("beam", "B3"))["carried"]["rows"] == []


def test_marks_that_bear_on_each_other_are_a_circle(tmp_path: Path) -> None:
    """The circle is named mark by mark."""
    runner = Runner(beams(tmp_path, B1="B2 A", B2="B1 A"))
    with pytest.raises(CarryError, match="in a circle: beam B1 -> beam B2 -> beam B1"):
        runner.statement("beam", "B1")


def test_an_optional_schedule_may_have_no_rows(tmp_path: Path) -> None:
    """Sums over it are nothing, a key asked for in it is missing, and nothing is wrong."""
    notebook(tmp_path, "beam", BEAM)
    _, statement = Runner().run(Filling(tmp_path / "beam.ipynb"))
    found = books.items(statement)
    assert found["borne"]["rows"] == []
    assert found["borne"]["problem"] is None
    assert found["reactions"]["columns"][0]["si"] == [500.0, 500.0]
    rows = {"borne": [RowRecord("1", {"of": "B9 A"})]}
    _, statement = Runner().run(Filling(tmp_path / "beam.ipynb", rows=rows))
    problem = books.items(statement)["borne"]["columns"][1]["problem"]
    assert problem == ["row 1: there is no row 'B9 A' in end"]
