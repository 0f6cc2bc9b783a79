"""Small notebooks for tests, made where a test works."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from pathlib import Path

WIND = (
    """from calcbook import open_workbook
book = open_workbook("wind", "Wind on a wall", signs={"pressure": "toward the surface"})""",
    """with book.section("Site") as s:
    s.entry("V", "Basic wind speed", "40 m/s", unit="speed", low="10 m/s", high="120 m/s",
            source="map")
    s.entry("C", "Pressure coefficient", "0.8")
    s.choice("wall", "Wall", {"solid": "without openings", "louvre": "half open"}, "solid",
             refused={"none": "a building without walls is not covered"})
    s.text("seen_by", "Seen by")""",
    """with book.section("Pressure") as s:
    s.line("q = '0.613 kg/m3'*V**2", "Velocity pressure", unit="pressure", result=True,
           sign="pressure")
    s.line("p", "Pressure on the wall", unit="pressure", result=True,
           cases=[("wall == 'solid'", "q*C"), ("wall == 'louvre'", "q*C/2")])
    s.line("r = 1/C", "Only for solid walls", result=True, when="wall == 'solid'")
    s.check("p <= '1 kPa'", "Cladding as supplied")""",
    """with book.section("Levels") as s:
    with s.schedule("levels", "Levels", heading="Level",
                    rows=[{"key": "Roof", "z": "8 m"}, {"key": "L1", "z": "4 m"}]) as t:
        t.entry("z", "Elevation", unit="length", low="0 m", high="400 m")
        t.line("w = q*z", "Load", unit="line load")
        t.total("w")
        t.descending("z")
    s.line("W = sum(w)", "Load on all levels", unit="line load")""",
)
"""A workbook with every kind of input, results, a check and a schedule; all of it is satisfied."""

BASIS = (
    """from calcbook import open_workbook
book = open_workbook("design-basis", "Design basis")""",
    """with book.section("Job") as s:
    s.text("job_number", "Job number")
    s.choice("units", "Units", ["SI", "US"], "SI")
    s.entry("h", "Height", "9 m", unit="length")
    s.entry("K_e", "Ground elevation factor", "1", codes=("ASCE 7-16",))""",
)
"""A design basis with the job's own data; one entry belongs to another code set."""
LOADS = (
    """from calcbook import open_workbook
book = open_workbook("loads", "Loads")""",
    """with book.section("Loads") as s:
    s.carry("H", "design-basis.h", "Height", unit="length", fallback="5 m")
    s.entry("w", "Load", "3 kN/m", unit="line load")
    s.line("F = w*H", "Force", unit="force", result=True)
    s.check("F <= '100 kN'", "Capacity")""",
)
"""A workbook that carries a height from the design basis."""


def make_notebook(path: Path, cells: Sequence[str]) -> Path:
    """Write a notebook of code cells; a cell that begins with '# ' in its first line is prose."""
    document = {
        "nbformat": 4, "nbformat_minor": 5,
        "metadata": {"kernelspec": {"name": "python3", "display_name": "Python 3",
                                    "language": "python"}},
        "cells": [_cell(number, text) for number, text in enumerate(cells)],
    }  # fmt: skip
    path.write_text(json.dumps(document), encoding="utf-8")
    return path


def _cell(number: int, text: str) -> Mapping[str, object]:
    common = {"id": f"cell-{number}", "metadata": {}, "source": text.splitlines(keepends=True)}
    if text.startswith("# "):
        return {"cell_type": "markdown", **common}
    return {"cell_type": "code", "execution_count": None, "outputs": [], **common}


def make_job(folder: Path, workbooks: Mapping[str, Sequence[str]]) -> Path:
    """Make a job of these workbooks, in this order."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, cells in workbooks.items():
        make_notebook(folder / f"{name}.ipynb", cells)
    names = ", ".join(f'"{name}"' for name in workbooks)
    (folder / "job.toml").write_text(f"format = 1\nworkbooks = [{names}]\n", encoding="utf-8")
    return folder


def contents(folder: Path) -> dict[str, bytes]:
    """Return the bytes of every file below a folder, locks excepted: they hold nothing."""
    return {
        str(path.relative_to(folder)): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file() and path.suffix != ".lock"
    }
