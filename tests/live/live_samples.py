"""A small workbook declared by hand, as a notebook's cells would declare it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.job import Job
from calcbook.live import Session

if TYPE_CHECKING:
    from pathlib import Path

BASIS = """
from calcbook import open_workbook
book = open_workbook("design-basis", "Design basis")
with book.section("Job") as s:
    s.text("job_number", "Job number", "")
    s.text("prepared_by", "Prepared by (initials)", "")
    s.choice("code_set", "Code set", ["NSCP 2015", "ASCE 7-16"], "NSCP 2015")
    s.choice("units", "Units", {"SI": "SI units", "US": "US customary units"}, "SI")
with book.section("Height") as s:
    s.entry("h", "Height of the building", "15.6 m", unit="length", low="1 m", high="150 m")
    s.line("h_m = h", "Mean height of the roof", unit="length", result=True)
"""
WIND = """
from calcbook import open_workbook
book = open_workbook("wind", "Wind", signs={"pressure": "toward the surface"})
with book.section("Site") as s:
    s.carry("h", "design-basis.h_m", "Mean height", unit="length", fallback="7.2 m")
    s.entry("V", "Basic wind speed", "70 m/s", unit="speed", low="10 m/s", high="120 m/s",
            source="map")
    s.choice("exposure", "Exposure", {"B": "town", "C": "open country"}, "C",
             refused={"E": "not built on"})
with book.section("Pressure") as s:
    s.line("q = '0.613 kg/m3'*V**2", "Velocity pressure", unit="pressure", result=True,
           sign="pressure")
    s.check("q <= '4 kPa'", "Cladding as supplied")
with book.section("Floors") as s:
    with s.schedule("floors", "Floors", heading="Level", rows=[
        {"key": "Roof", "z": "7.2 m", "use": "roof"},
        {"key": "Level 2", "z": "3.6 m", "use": "ward"},
    ]) as t:
        t.entry("z", "Elevation", unit="length", low="-10 m", high="400 m")
        t.text("use", "Use")
        t.line("F = q*z*'2 m'", "Force", unit="force")
        t.total("F")
        t.descending("z")
with book.section("Open country", when="exposure == 'C'") as s:
    s.remark("No shielding is counted on.", "assumption")
"""


def notebook(source: str) -> str:
    """Return a notebook of one code cell per section, as JSON."""
    import json  # noqa: PLC0415

    opening, *sections = source.strip().split("\nwith book.")
    cells = [opening, *(f"with book.{text}" for text in sections)]
    return json.dumps({
        "cells": [{"cell_type": "code", "id": f"c{n}", "metadata": {}, "outputs": [],
                   "execution_count": None, "source": text} for n, text in enumerate(cells)],
        "metadata": {"kernelspec": {"name": "python3", "display_name": "Python 3",
                                    "language": "python"}},
        "nbformat": 4, "nbformat_minor": 5,
    })  # fmt: skip


def make_job(folder: Path, *, signed: bool = True) -> Job:
    """Make a job with a design basis and a wind workbook; signed: number and initials stand."""
    folder.mkdir(parents=True, exist_ok=True)
    (folder / "design-basis.ipynb").write_text(notebook(BASIS), encoding="utf-8")
    (folder / "wind.ipynb").write_text(notebook(WIND), encoding="utf-8")
    (folder / "job.toml").write_text('format = 1\nworkbooks = ["design-basis", "wind"]\n')
    if signed:
        (folder / "design-basis.toml").write_text(
            'format = 1\nworkbook = "design-basis"\n\n[entries]\n'
            'job_number = { value = "MC-0417" }\nprepared_by = { value = "RA" }\n'
        )
    return Job.load(folder)


def opened(source: str, job: Job | None) -> Session:
    """Open a workbook live and declare its sections, a view for each."""
    opening, *sections = source.strip().split("\nwith book.")
    name, title = ("wind", "Wind") if '"wind"' in opening else ("design-basis", "Design basis")
    session = Session(name, title, {"pressure": "toward the surface"}, job=job)
    space = {"book": session.book}
    for text in sections:
        exec(f"with book.{text}", space)  # noqa: S102  the sample above
    for section in list(session.book.sections):
        session.view(section.title)
    return session
