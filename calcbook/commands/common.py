"""What several commands need: which workbook is meant, what is typed for it, how long it takes."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import sys
import threading
import time
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Self, TextIO

from calcbook.csvrows import as_rows, read_table
from calcbook.errors import InputError, UsageError
from calcbook.items import Carry, Choice, Entry
from calcbook.job import Job, find_notebook
from calcbook.record import check_mark
from calcbook.units import DIMENSIONLESS
from calcbook.workbook import entered_columns, own_columns

if TYPE_CHECKING:
    from collections.abc import Sequence

    from calcbook.items import Item, Shaped
    from calcbook.record import RowRecord
    from calcbook.workbook import Workbook

PATIENCE = 1.0  # seconds before a command says what it is doing


@dataclass(frozen=True)
class Target:
    """The workbook a command is about: its notebook, the mark, and the job around it."""

    notebook: Path
    mark: str | None
    job: Job | None


def find_target(argument: str) -> Target:
    """Return what ``WORKBOOK[:MARK]`` means here.

    Raises
    ------
    JobError
        No such workbook, with the nearest name; or a broken job.
    RecordError
        The mark cannot be one.
    """
    name, colon, mark = argument.rpartition(":")
    if not colon or "/" in mark or "\\" in mark:
        name, mark = argument, ""
    job = Job.find(Path(name).parent if name.endswith(".ipynb") else None)
    notebook = find_notebook(name, job)
    return Target(notebook, check_mark(mark) if colon and mark else None, job)


def assignments(texts: Sequence[str]) -> dict[str, str]:
    """Return ``NAME=VALUE`` texts as values by name; the value is kept as typed.

    Raises UsageError for a text without a name or '=', or a name given twice.
    """
    found: dict[str, str] = {}
    for text in texts:
        name, equals, value = text.partition("=")
        name = name.strip()
        if not equals or not name:
            raise UsageError(f"'{text}' is not NAME=VALUE",
                             hint="write the name, '=' and the value: V='70 m/s'")  # fmt: skip
        if name in found:
            raise UsageError(f"{name} is given twice", hint="give it once")
        found[name] = value
    return found


def read_rows(
    texts: Sequence[str], book: Workbook, *, beside: bool = False
) -> dict[str, list[RowRecord]]:
    """Read the rows of ``SCHEDULE=FILE.csv`` texts.

    Of rows that are brought forward a file may give only what is entered here; with ``beside`` it
    gives nothing else.

    Raises
    ------
    UsageError, InputError
        No such schedule, one whose rows are not entered, or a file that cannot be read strictly.
    """
    found: dict[str, list[RowRecord]] = {}
    for name, file in assignments(texts).items():
        schedule = book.schedule_item(name)
        if schedule.same_rows:
            raise InputError(
                f"{name} has the rows of {schedule.same_rows}", where=book.name,
                hint=f"give them there: --rows {schedule.same_rows}=FILE.csv",
            )  # fmt: skip
        if schedule.fixed:
            raise InputError(f"the rows of {name} belong to the method and are not entered",
                             where=book.name)  # fmt: skip
        if schedule.shaped is not None and name in book.readings.shaped:
            other = schedule.shaped.choice
            raise InputError(
                f"the rows of {name} come from the shape while {other} is "
                f"'{schedule.shaped.option}'", where=book.name,
                hint=f"choose otherwise beside them: {other}={_others(book, schedule.shaped)}",
            )  # fmt: skip
        own = own_columns(book, name)
        entered = {
            column: item
            for column, item in (own if beside else entered_columns(schedule)).items()
            if not item.codes or book.code.name in item.codes
        }
        found[name] = as_rows(
            read_table(Path(file)),
            {column: needs_unit(item) for column, item in entered.items()},
            f"{book.name}, schedule {name}",
            # where it applies after all, each row says that it has no value
            [
                c
                for c, item in entered.items()
                if c not in own or (item.when and not getattr(item, "value", ""))
            ],
        )
    return found


def _others(book: Workbook, shaped: Shaped) -> str:
    """Return the options of a choice at which rows are typed."""
    item = book.input_item(shaped.choice)
    options = item.options if isinstance(item, (Choice, Carry)) else ()
    return " or ".join(f"'{option}'" for option in options if option != shaped.option)


def needs_unit(item: Item) -> bool:
    """Whether what is typed for an entry, or in a column, must have a unit."""
    if not isinstance(item, (Entry, Carry)) or isinstance(item, Choice) or item.kind is None:
        return False
    words = isinstance(item, Carry) and bool(item.text or item.labels)
    return not words and item.kind.dimension != DIMENSIONLESS


class Progress:
    """Says on standard error what is being done, once a command takes longer than a second."""

    def __init__(self) -> None:
        self._text = ""
        self._timer = threading.Timer(PATIENCE, self._late)
        self._timer.daemon = True
        self._is_late = False

    def __enter__(self) -> Self:
        """Begin to count the first second."""
        self._timer.start()
        return self

    def __exit__(self, *_: object) -> None:
        """Say nothing from here on."""
        self._timer.cancel()

    def __call__(self, text: str) -> None:
        """Note what is being done now, and say it when it is late."""
        self._text = text
        if self._is_late:
            print(f"{text} ...", file=sys.stderr, flush=True)

    def _late(self) -> None:
        self._is_late = True
        if self._text:
            self(self._text)


class Steps:
    """Prints steps as they are done, each with the seconds it took."""

    def __init__(self, stream: TextIO) -> None:
        self._stream = stream
        self._text = ""
        self._since = time.monotonic()

    def __call__(self, text: str) -> None:
        """Begin a step; the one before it is done."""
        self.done()
        self._text = text

    def done(self) -> None:
        """Print the step that is under way as done."""
        now = time.monotonic()
        if self._text:
            seconds = now - self._since
            print(f"  {self._text:<44} {seconds:6.2f} s", file=self._stream, flush=True)
        self._text, self._since = "", now
