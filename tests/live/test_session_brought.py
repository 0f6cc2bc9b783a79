"""Rows brought forward with columns of their own: what is typed here, and nothing else, is kept."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import notebook

from calcbook.cli import main
from calcbook.job import Job
from calcbook.live import Session
from calcbook.run import find_item

if TYPE_CHECKING:
    from pathlib import Path

BASIS = """
from calcbook import open_workbook
book = open_workbook("design-basis", "Design basis")
with book.section("Job") as s:
    s.text("job_number", "Job number", "")
    s.text("prepared_by", "Prepared by (initials)", "")
with book.section("Levels") as s:
    with s.schedule("levels", "Levels", heading="Level", rows=[
        {"key": "Roof", "z": "7.2 m"}, {"key": "Ground", "z": "0 m"},
    ]) as t:
        t.entry("z", "Elevation", unit="length")
"""
LOADS = """
from calcbook import open_workbook
book = open_workbook("loads", "Loads")
with book.section("Floors") as s:
    with s.schedule("floors", "Floors", heading="Level", origin="design-basis.levels", rows=[
        {"key": "Roof", "z": "3.6 m", "g": "3 kPa"}, {"key": "Ground", "z": "0 m", "g": "5 kPa"},
    ]) as t:
        t.carry("z", "z", "Elevation", unit="length")
        t.entry("g", "Weight", unit="pressure")
        t.line("m = g*z", "Weight by height", unit="line load")
"""


@pytest.fixture
def loads(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Session:
    """Return the loads of a job whose levels are three, other than the template's two."""
    folder = tmp_path / "job"
    folder.mkdir()
    (folder / "design-basis.ipynb").write_text(notebook(BASIS), encoding="utf-8")
    (folder / "loads.ipynb").write_text(notebook(LOADS), encoding="utf-8")
    (folder / "job.toml").write_text('format = 1\nworkbooks = ["design-basis", "loads"]\n')
    monkeypatch.chdir(folder)
    assert main(["set", "design-basis", "job_number=MC-0417", "prepared_by=RA"]) == 0
    levels(folder, "Level,z (m)\nRoof,9\nLevel 2,4.5\nGround,0\n")
    session = Session("loads", "Loads", job=Job.load(folder))
    space = {"book": session.book}
    for text in LOADS.strip().split("\nwith book.")[1:]:
        exec(f"with book.{text}", space)  # noqa: S102  the sample above
    session.view("Floors")
    return session


def levels(folder: Path, text: str) -> None:
    """Give the design basis other levels."""
    (folder / "levels.csv").write_text(text)
    assert main(["set", "design-basis", "--rows", f"levels={folder / 'levels.csv'}"]) == 0


def column(session: Session, name: str) -> list[float | None]:
    """Return a column of the floors in SI, as it is shown."""
    floors = find_item(session.statement, "floors")
    assert floors is not None
    return next(c["si"] for c in floors["columns"] if c["name"] == name)


def test_a_cell_typed_beside_carried_ones_leaves_them_alone(loads: Session) -> None:
    """Elevations stay those of the design basis; only the weight typed is in the record."""
    loads.enter_cell("floors", "Level 2", "g", "4 kPa")
    assert column(loads, "z") == [9.0, 4.5, 0.0]
    assert column(loads, "g") == [3000.0, 4000.0, 5000.0]
    rows = loads.job.record("loads").schedules["floors"]
    assert [(r.key, r.cells) for r in rows] == [
        ("Roof", {"g": "3 kPa"}), ("Level 2", {"g": "4 kPa"}), ("Ground", {"g": "5 kPa"}),
    ]  # fmt: skip


def test_a_tick_confirms_what_is_entered_here(loads: Session) -> None:
    """Confirming a row writes its own cells, and no elevation of the template."""
    loads.confirm_row("floors", "Roof", yes=True)
    assert column(loads, "z") == [9.0, 4.5, 0.0]
    assert loads.job.record("loads").schedules["floors"][0].confirmed.by == "RA"


def test_a_renamed_level_is_healed_by_typing_its_cell(loads: Session) -> None:
    """A row the source no longer has goes, one it has now is entered, with the next change."""
    loads.enter_cell("floors", "Level 2", "g", "4 kPa")
    levels(loads.job.folder, "Level,z (m)\nRoof,9\nStorey 2,4.5\nGround,0\n")
    loads.look()
    problem = find_item(loads.statement, "floors")["problem"]
    assert "row 'Storey 2' of design-basis.levels is missing here: enter its cells" in problem
    loads.enter_cell("floors", "Storey 2", "g", "6 kPa")
    assert find_item(loads.statement, "floors")["problem"] is None
    assert column(loads, "g") == [3000.0, 6000.0, 5000.0]
    loads.undo()
    assert "Storey 2" in find_item(loads.statement, "floors")["problem"]


def test_the_command_line_sets_what_is_entered_here(
    loads: Session, capsys: pytest.CaptureFixture[str]
) -> None:
    """A file with the own columns alone is taken; one with a carried column says where it is."""
    file = loads.job.folder / "floors.csv"
    file.write_text("Level,g (kPa)\nRoof,1\nLevel 2,2\nGround,3\n")
    assert main(["set", "loads", "--rows", f"floors={file}", "--confirm", "RA"]) == 0
    loads.look()
    assert column(loads, "g") == [1000.0, 2000.0, 3000.0]
    assert column(loads, "z") == [9.0, 4.5, 0.0]
    file.write_text("Level,z (m),g (kPa)\nRoof,1,1\nLevel 2,2,2\nGround,3,3\n")
    capsys.readouterr()
    assert main(["set", "loads", "--rows", f"floors={file}"]) == 2
    assert "z" in capsys.readouterr().err
