"""What a record says, in memory and on disk, for the tests of a session."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.live.merging import items
from calcbook.record import Record

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.live import Session
    from calcbook.live.merging import Items


def in_memory(session: Session) -> Items:
    """Return every item of the record that is open."""
    return items(session.record.content())


def on_disk(session: Session) -> Items:
    """Return every item of its file, read anew."""
    record = session.record
    return items(Record.load(record.path, record.workbook, record.mark).content())


def keys(session: Session) -> list[str]:
    """Return the keys of the floors in force."""
    return [row.key for row in session.book.readings.given_rows["floors"]]


def cells(session: Session) -> list[tuple[str, dict[str, str]]]:
    """Return the floors in force, key and cells as typed."""
    return [(row.key, dict(row.cells)) for row in session.book.readings.given_rows["floors"]]


def files(folder: Path) -> list[str]:
    """Return the names of a folder's records and what was left beside them, locks left out."""
    return sorted(p.name for p in folder.iterdir() if p.suffix not in {".lock", ".ipynb"})
