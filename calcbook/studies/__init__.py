"""Studies of an evaluated workbook: what a result depends on, and what an entry would have to be.

A study changes nothing: it recomputes the workbook with other values and reports. What it returns
is plain data with printed texts; whoever shows it formats nothing.
"""

from __future__ import annotations

from calcbook.studies.answers import Answer, Nearest, Needed
from calcbook.studies.choosing import Result, results
from calcbook.studies.entered import Entered
from calcbook.studies.needed import entries, needed
from calcbook.studies.picture import describe, draw
from calcbook.studies.sensitivity import (
    Changed,
    Effect,
    Held,
    Sensitivity,
    Slope,
    sensitivity,
)

__all__ = [
    "Answer",
    "Changed",
    "Effect",
    "Entered",
    "Held",
    "Nearest",
    "Needed",
    "Result",
    "Sensitivity",
    "Slope",
    "describe",
    "draw",
    "entries",
    "needed",
    "results",
    "sensitivity",
]
