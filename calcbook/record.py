"""Records: the entries and rows of a workbook on disk, one file per workbook and mark.

A record knows text and TOML; what a value means is the workbook's business. It is read strictly,
written whole under a lock, and never written over a change somebody else made meanwhile.
"""

from __future__ import annotations

import copy
import hashlib
import json
import re
from contextlib import contextmanager
from typing import TYPE_CHECKING, TypeVar

from calcbook.diskfile import LOCK_SECONDS, in_plain_words, locked, read_bytes, write_whole
from calcbook.errors import RecordChangedError, RecordError
from calcbook.recordform import (
    FORMAT,
    CarriedRecord,
    Confirmation,
    EntryRecord,
    Form,
    RowRecord,
    check_item,
    edited,
    migrated,
    new_text,
    read_form,
)
from calcbook.tomltext import TomlText

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping, Sequence
    from pathlib import Path

__all__ = [
    "CarriedRecord",
    "Confirmation",
    "EntryRecord",
    "Record",
    "RowRecord",
    "check_mark",
    "record_path",
    "row_digest",
    "update",
]

Item = TypeVar("Item")

_WORKBOOK = re.compile(r"[A-Za-z0-9][A-Za-z0-9_-]{0,59}")
_MARK = re.compile(r"[A-Za-z0-9_-]+(\.[A-Za-z0-9_-]+)*")
_MARK_LENGTH = 60
_TAKEN = "job"  # job.toml is the job's own file


def record_path(folder: Path, workbook: str, mark: str | None = None) -> Path:
    """Return the path of a record: ``wind-pressure.toml``, ``floor-beam.B1.toml``.

    Raises
    ------
    RecordError
        The workbook's name or the mark cannot be part of a file name.
    """
    if not _WORKBOOK.fullmatch(workbook) or workbook.lower() == _TAKEN:
        raise RecordError(
            f"'{workbook}' cannot name a workbook",
            hint=f"use letters, digits, '-' and '_', and not '{_TAKEN}'",
        )
    if mark is None:
        return folder / f"{workbook}.toml"
    return folder / f"{workbook}.{check_mark(mark)}.toml"


def check_mark(mark: str) -> str:
    """Return a mark that may be part of a file name.

    Raises
    ------
    RecordError
        It holds anything but ASCII letters, digits, '-', '_' and single dots in between.
    """
    if not _MARK.fullmatch(mark) or len(mark) > _MARK_LENGTH:
        raise RecordError(
            f"'{mark}' cannot be a mark",
            hint=f"use up to {_MARK_LENGTH} letters, digits, '-', '_' and dots inside, as in C-3",
        )
    return mark


def row_digest(row: RowRecord) -> str:
    """Return the digest of a row's key and cells as typed, whatever order the cells stand in."""
    return _digest([row.key, row.cells])[:16]


def update(
    path: Path,
    workbook: str,
    mark: str | None,
    change: Callable[[Record], None],
    *,
    wait: float = LOCK_SECONDS,
) -> Record:
    """Load a record, change it and save it under one lock, so that nobody's change is lost.

    Raises
    ------
    RecordError
        The record cannot be read or written, or its lock was not free within `wait` seconds.
    """
    with locked(path, RecordError, wait):
        record = Record.load(path, workbook, mark)
        change(record)
        record.save_locked()
    return record


class Record:
    """The entries, rows and carried values of one workbook and mark.

    Parameters
    ----------
    path
        The file; it need not exist yet.
    workbook, mark
        Whose record it is; the file must say the same.
    """

    def __init__(self, path: Path, workbook: str, mark: str | None = None) -> None:
        self.path = path
        self.workbook = workbook
        self.mark = mark
        self.entries: dict[str, EntryRecord] = {}
        self.schedules: dict[str, list[RowRecord]] = {}
        self.carried: dict[str, CarriedRecord] = {}
        self._disk: bytes | None = None
        self._text = new_text(workbook, mark)
        self._format: int | None = None

    @classmethod
    def load(cls, path: Path, workbook: str, mark: str | None = None) -> Record:
        """Read a record strictly; a file that does not exist gives an empty record.

        Raises
        ------
        RecordError
            With the file, line and column of what is wrong; the file is left alone.
        """
        record = cls(path, workbook, mark)
        record.reload()
        return record

    def reload(self) -> None:
        """Read the file again; changes that were not saved are dropped."""
        with in_plain_words(self.path, RecordError):
            disk = read_bytes(self.path)
        text, found = new_text(self.workbook, self.mark), None
        if disk is not None:
            toml, found = migrated(TomlText.decoded(self.path.name, disk, RecordError))
            text = toml.text
        form = self._form(text)
        self.entries, self.schedules, self.carried = form.entries, form.schedules, form.carried
        self._disk, self._text, self._format = disk, text, found

    def change(
        self,
        entries: Mapping[str, EntryRecord | None] | None = None,
        schedules: Mapping[str, Sequence[RowRecord] | None] | None = None,
        carried: Mapping[str, CarriedRecord | None] | None = None,
    ) -> None:
        """Set items in memory, all or none of them; None takes an item out.

        Raises
        ------
        RecordError
            A row key stands twice, or something could not be written as text.
        """
        entries, schedules, carried = entries or {}, schedules or {}, carried or {}
        for name, item in (*entries.items(), *carried.items()):
            if item is not None:
                check_item(name, item, self.path.name)
        for name, rows in schedules.items():
            self._check_rows(name, rows or ())
        _merge(self.entries, entries)
        _merge(self.carried, carried)
        _merge(self.schedules, {n: None if r is None else list(r) for n, r in schedules.items()})

    def save(self, *, wait: float = LOCK_SECONDS) -> None:
        """Write what was changed since loading; comments and the rest of the file stay.

        Raises
        ------
        RecordChangedError
            The file was changed by someone else since it was loaded; nothing is written.
        RecordError
            The lock was not free within `wait` seconds, the disk is full, the folder cannot be
            written; the old file stays whole.
        """
        with locked(self.path, RecordError, wait):
            self.save_locked()

    def save_locked(self) -> None:
        """Save as `save` does, for a caller that holds the file's lock already."""
        with in_plain_words(self.path, RecordError):
            if read_bytes(self.path) != self._disk:
                raise RecordChangedError(
                    "the file was changed by someone else since it was read",
                    hint="nothing was written; reload the record and make the change again",
                    where=self.path.name,
                )
            text = self._edited()
            if text == self._text:
                return
            disk = text.encode()
            with self._old_format_kept():
                write_whole(self.path, disk)
        self._disk, self._text, self._format = disk, text, FORMAT

    def content(self) -> Form:
        """Return a copy of all it says, in memory."""
        return copy.deepcopy(
            Form(self.workbook, self.mark, self.entries, self.schedules, self.carried)
        )

    def text(self) -> str:
        """Return the text of the file that would say what it says now.

        Raises RecordError where the changes cannot be put into the file as it is laid out.
        """
        return self._edited()

    @property
    def on_disk(self) -> bool:
        """Whether there was a file when it was last read or written."""
        return self._disk is not None

    def moved(self) -> bool:
        """Whether the file is no longer what was last read or written here.

        Raises
        ------
        RecordError
            The file cannot be read.
        """
        with in_plain_words(self.path, RecordError):
            return read_bytes(self.path) != self._disk

    def is_confirmed(self, item: EntryRecord | RowRecord | CarriedRecord, job_number: str) -> bool:
        """Whether this very value or row was confirmed for this job; without a number: no."""
        found = item.confirmed
        if found is None or not job_number:
            return False
        value = row_digest(item) if isinstance(item, RowRecord) else item.value
        return (found.value, found.job) == (value, job_number)

    def digest(self) -> str:
        """Return the sha256 of the inputs as typed: entries and rows, no results, no sources."""
        return _digest(
            {
                "workbook": self.workbook,
                "mark": self.mark,
                "entries": {name: entry.value for name, entry in self.entries.items()},
                "schedules": {
                    name: [[row.key, row.cells] for row in rows]
                    for name, rows in self.schedules.items()
                },
            }
        )

    def _form(self, text: str) -> Form:
        """Read the text of this record, which must say whose record it is."""
        toml = TomlText(self.path.name, text, RecordError)
        form = read_form(toml)
        if form.workbook != self.workbook:
            what = f"this is a record of '{form.workbook}', not of '{self.workbook}'"
            raise toml.refuse(what, ("workbook",), "put the right file in this place")
        if form.mark != self.mark:
            wanted = "no mark" if self.mark is None else f"the mark '{self.mark}'"
            hint = "the mark in the file and in its name must be the same"
            raise toml.refuse(f"this record must have {wanted}", ("mark",), hint)
        return form

    def _edited(self) -> str:
        """Return the file's text with the changes in it, read again to see that all are there."""
        wanted = Form(self.workbook, self.mark, self.entries, self.schedules, self.carried)
        before = self._form(self._text)
        if wanted == before:
            return self._text
        text = edited(self._text, before, wanted)
        if self._form(text) != wanted:
            raise RecordError(
                "the changes cannot be put into this file as it is laid out",
                hint="nothing was written; put each entry and each row on one line of its own",
                where=self.path.name,
            )
        return text

    @contextmanager
    def _old_format_kept(self) -> Iterator[None]:
        """Keep the file of an older format beside the new one, unless the new one fails."""
        if self._disk is None or self._format is None or self._format == FORMAT:
            yield
            return
        copy_path = self.path.with_name(f"{self.path.name}.format-{self._format}")
        number = 1
        while copy_path.exists():
            number += 1
            copy_path = self.path.with_name(f"{self.path.name}.format-{self._format}-{number}")
        write_whole(copy_path, self._disk)
        try:
            yield
        except OSError:
            copy_path.unlink()
            raise

    def _check_rows(self, name: str, rows: Sequence[RowRecord]) -> None:
        seen: set[str] = set()
        for row in rows:
            check_item(name, row, self.path.name)
            if row.key in seen:
                raise RecordError(
                    f"{name} has two rows '{row.key}'",
                    hint="give each row a key of its own",
                    where=self.path.name,
                )
            seen.add(row.key)


def _merge(items: dict[str, Item], changes: Mapping[str, Item | None]) -> None:
    for name, item in changes.items():
        if item is None:
            items.pop(name, None)
        else:
            items[name] = copy.deepcopy(item)


def _digest(content: object) -> str:
    text = json.dumps(content, sort_keys=True, ensure_ascii=True, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()
