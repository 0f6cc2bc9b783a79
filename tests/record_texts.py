"""The text of a record with everything in it, and putting such text on disk."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.record import Record

if TYPE_CHECKING:
    from pathlib import Path

HEAD = 'format = 1\nworkbook = "w"\n'
FILLED = """# wind on the clinic
format = 1
workbook = "w"

[entries]
# from the map
V = { value = "70 m/s", source = "map", confirmed = { value = "70 m/s", job = "MC-1", by = "RA", on = 2026-10-02 } }  # ask RA
h = { value = "18.0 m" }

[schedules]
levels = [
  # from the top
  { key = "Roof", cells = { z = "18 m" } },  # without parapet
  { key = "L2", cells = { z = "8 m" }, source = "A-2" },
  # ground below
    {key="L1", cells={z="4 m"}},  # ramp excluded
]

[carried]
q_h = { value = "2.8 kPa", si = 2800.0, origin = "wind.q_h", sign = "toward +" }  # from wind
"""  # noqa: E501 - one entry is one line


def write(folder: Path, text: str, name: str = "w.toml") -> Path:
    """Write a record file and return its path."""
    path = folder / name
    path.write_bytes(text.encode())
    return path


def load(folder: Path, text: str) -> Record:
    """Return the record of workbook 'w' that this text is."""
    return Record.load(write(folder, text), "w")
