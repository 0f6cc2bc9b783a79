"""Cells of a notebook: run again, renamed, deleted; and how a kernel shows what goes wrong."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from live_samples import make_job, notebook
from widgets_in import text

from calcbook.live import Session
from calcbook.live import notebook as kernel

if TYPE_CHECKING:
    from pathlib import Path


class Kernel:
    """A stand-in for the kernel that says which cell runs."""

    def __init__(self, monkeypatch: pytest.MonkeyPatch) -> None:
        self.cell, self.deleted = "a", ()
        monkeypatch.setattr(kernel, "running", lambda: (self.cell, self.deleted))
        monkeypatch.setattr(kernel, "publish", lambda *_: None)
        self.session = Session("cells", "Cells")

    def run(self, cell: str, title: str, formula: str, *, deleted: tuple[str, ...] = ()) -> None:
        """Run a cell that declares one section with one line."""
        self.cell, self.deleted = cell, deleted
        self.session.begin_cell()
        with self.session.book.section(title) as s:
            s.line(formula, "A line")
        self.session.view(title)


@pytest.fixture
def cells(monkeypatch: pytest.MonkeyPatch) -> Kernel:
    """Return a kernel in which two cells were run."""
    found = Kernel(monkeypatch)
    found.run("b", "First", "a = 1 + 2")
    found.run("c", "Second", "b = a*2")
    return found


def test_running_a_cell_again_replaces_its_view(cells: Kernel) -> None:
    """The section keeps its place, has one view, and the sections after it follow."""
    cells.run("b", "First", "a = 5 + 5")
    assert [s.title for s in cells.session.book.sections] == ["First", "Second"]
    assert "= 10" in text(cells.session, "First")
    assert "= 20" in text(cells.session, "Second")
    assert set(cells.session.views) == {"First", "Second"}


def test_a_renamed_section_takes_the_place_of_the_old_one(cells: Kernel) -> None:
    """A title edited in its cell leaves nothing of the old section behind."""
    cells.run("b", "Beginning", "a = 1 + 3")
    assert [s.title for s in cells.session.book.sections] == ["Beginning", "Second"]
    assert set(cells.session.views) == {"Beginning", "Second"}
    assert "= 8" in text(cells.session, "Second")


def test_a_section_of_a_deleted_cell_is_marked(cells: Kernel) -> None:
    """Until all cells are run again its section says that its cell is gone."""
    cells.run("c", "Second", "b = a*3", deleted=("b",))
    assert "deleted" in text(cells.session, "First")
    assert "deleted" not in text(cells.session, "Second")


def test_a_real_kernel_shows_the_bundle_and_errors_in_words(tmp_path: Path) -> None:
    """Executed without a front end: Markdown in the cell, and a message without our frames."""
    import nbformat  # noqa: PLC0415  slow to import
    from nbclient import NotebookClient  # noqa: PLC0415

    source = """from calcbook import open_workbook
book = open_workbook("wind", "Wind")
with book.section("Site") as s:
    V = s.entry("V", "Basic wind speed", "70 m/s", unit="speed")
with book.section("Wrong") as t:
    t.line("q = 2*V", "Twice", when="V > '1 m/s'" if V > 3 else "")"""
    job = make_job(tmp_path / "job")
    book = nbformat.reads(notebook(source), as_version=4)
    NotebookClient(
        book, timeout=60, kernel_name="python3", allow_errors=True,
        resources={"metadata": {"path": str(job.folder)}},
    ).execute()  # fmt: skip
    shown: Any = book.cells[1].outputs[0]
    assert shown.output_type == "display_data"
    assert set(shown.data) == {"text/markdown", "text/plain"}
    assert "70 m/s" in shown.data["text/markdown"]
    failed = book.cells[2].outputs[0]
    told = "\n".join(failed.traceback)
    assert failed.ename == "ReadingError"
    assert 'if V > 3 else ""' in told
    assert "notebook code reads the value of V" in told
    assert "items.py" not in told
