"""The ``set`` command: entries and rows into a record, after the workbook has accepted them."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import datetime as dt
from contextlib import suppress
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from calcbook.commands import review
from calcbook.commands.common import Progress, Target, assignments, find_target, read_rows
from calcbook.commands.owner import owner_hint
from calcbook.errors import (
    InputError,
    JobError,
    RecordChangedError,
    UsageError,
)
from calcbook.items import Choice, Entry, Schedule, Text
from calcbook.job import BASIS, JOB_NUMBER
from calcbook.record import Confirmation, EntryRecord, Record, RowRecord, row_digest
from calcbook.run import Filling, Runner, carries
from calcbook.wording import counted
from calcbook.workbook import own_columns

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.job import Job
    from calcbook.workbook import Workbook

TRIES = 5  # a record that others keep changing is read again this often
LONGEST_INITIALS = 12


@dataclass(frozen=True)
class Wish:
    """What the command line asks for: entries and files of rows by name, and who confirms.

    ``source`` is where all of it comes from; None leaves the sources on record.
    """

    job: Job
    target: Target
    sets: Mapping[str, str]
    files: Sequence[str]
    source: str | None
    initials: str | None


@dataclass
class Change:
    """What is to be written into a record."""

    entries: dict[str, EntryRecord] = field(default_factory=dict)
    rows: dict[str, list[RowRecord]] = field(default_factory=dict)


def set_values(arguments: Namespace) -> int:
    """Write entries and rows into the record of a job's workbook, state their source, confirm them.

    Nothing is written unless the workbook accepts all of it.
    """
    sets = assignments(arguments.values)
    if not sets and not arguments.rows and arguments.confirm is None:
        raise UsageError(
            "there is nothing to set",
            hint="write NAME=VALUE, --rows SCHEDULE=FILE.csv or --confirm INITIALS",
        )
    if not sets and not arguments.rows and arguments.source is not None:
        raise UsageError(
            "--source says where what is set comes from, and nothing is set",
            hint="write NAME=VALUE or --rows SCHEDULE=FILE.csv beside it",
        )
    initials = None if arguments.confirm is None else _initials(arguments.confirm)
    target = find_target(arguments.workbook)
    job, source = _job_of(target, arguments.workbook), arguments.source
    wish = Wish(job, target, sets, arguments.rows, source and source.strip(), initials)
    with Progress() as progress:
        for _ in range(TRIES - 1):
            with suppress(RecordChangedError):
                _attempt(wish, progress)
                return 0
        _attempt(wish, progress)
    return 0


def _initials(text: str) -> str:
    initials = text.strip()
    if not initials or len(initials) > LONGEST_INITIALS or not initials[0].isalpha():
        raise UsageError(
            f"'{text}' cannot be initials",
            hint=f"up to {LONGEST_INITIALS} characters, a letter first: --confirm RA",
        )
    return initials


def _job_of(target: Target, argument: str) -> Job:
    if target.job is None:
        raise JobError(
            f"'{argument}' is not in a job, and values are set in a job",
            hint="start one with: calcbook start FOLDER; then work inside that folder "
            "(one run with other values: calcbook run WORKBOOK --set NAME=VALUE)",
        )
    job, stem = target.job, target.notebook.stem
    if target.notebook.resolve() != job.notebook(stem).resolve():
        raise JobError(
            f"'{argument}' is not a notebook of this job",
            where=str(job.folder),
            hint=job.unlisted(stem) or f"it has: {', '.join(job.workbooks)}",
        )
    return job


def _attempt(wish: Wish, progress: Progress) -> None:
    """Build the record in memory, run the workbook with it, and write it when it is accepted.

    Raises RecordChangedError when somebody else wrote the record meanwhile.
    """
    job, notebook, mark = wish.job, wish.target.notebook, wish.target.mark
    record = job.record(notebook.stem, mark)
    before = {name: entry.value for name, entry in record.entries.items()}
    filling = Filling(notebook, mark, sets=wish.sets, record=record)
    runner = Runner(job, progress)
    book, statement = runner.run(filling)
    _refuse_carried(runner, book, [*wish.sets, *assignments(wish.files)])
    rows = read_rows(wish.files, book, beside=True)
    change = _everything(book)
    if wish.sets or rows:
        change = Change(
            {n: _entry(record, n, book.accept(n, text)) for n, text in wish.sets.items()},
            {n: _rows(record, n, found) for n, found in rows.items()},
        )
        _state_source(change, wish.source)
    if wish.initials is not None:
        _confirm(change, _stamp(wish, book, wish.initials))
    record.change(change.entries, change.rows)
    typed = {name: change.entries[name].value for name in wish.sets}
    filling = Filling(notebook, mark, sets=typed, rows=rows, record=record)
    Runner(job, progress).run(filling, strict=True)
    record.save()
    _tell(record, change, before, wish)
    if not wish.sets and not rows:
        for trouble in review.troubles(statement):
            print(f"not confirmed: {trouble}")


def _refuse_carried(runner: Runner, book: Workbook, names: Sequence[str]) -> None:
    origins = carries(book)
    for name in names:
        if any(name == item.name and own_columns(book, name) for item in _schedules(book)):
            continue  # its rows come from there, and some columns are entered here
        hint = owner_hint(runner, origins.get(name, ""))
        if hint:
            raise InputError(f"{name} is carried from {origins[name]}", where=book.name, hint=hint)


def _schedules(book: Workbook) -> list[Schedule]:
    return [item for item in book.items() if isinstance(item, Schedule)]


def _entry(record: Record, name: str, text: str) -> EntryRecord:
    """Return an entry as it will stand; a value that is the same keeps its confirmation."""
    former = record.entries.get(name)
    if former is None:
        return EntryRecord(text)
    same = former.value == text
    return EntryRecord(text, former.source, former.confirmed if same else None)


def _rows(record: Record, name: str, rows: Sequence[RowRecord]) -> list[RowRecord]:
    former = {row.key: row for row in record.schedules.get(name, ())}
    found = []
    for row in rows:
        old = former.get(row.key)
        same = old is not None and row_digest(old) == row_digest(row)
        found.append(RowRecord(
            row.key, row.cells, row.source or (old.source if old else ""),
            old.confirmed if same and old else None,
        ))  # fmt: skip
    return found


def _state_source(change: Change, source: str | None) -> None:
    if source is None:
        return
    for entry in change.entries.values():
        entry.source = source
    for row in (row for rows in change.rows.values() for row in rows):
        row.source = source


def _everything(book: Workbook) -> Change:
    """Return all that applies and has a value, the template's values included."""
    change = Change()
    found = book.readings
    for bound in book.bound:
        name, applies = bound.name, book.results.applies.get(bound.number, True)
        if bound.problem or not applies or bound.schedule is not None or name in found.problems:
            continue
        if isinstance(bound.item, (Entry, Choice, Text)):
            given = found.given[name]
            if given.text:
                change.entries[name] = EntryRecord(given.text, given.source)
        elif isinstance(bound.item, Schedule) and _has_rows_of_its_own(bound, book):
            change.rows[name] = [
                RowRecord(row.key, dict(row.cells), row.source) for row in found.given_rows[name]
            ]
    return change


def _has_rows_of_its_own(bound: Bound, book: Workbook) -> bool:
    """Whether a schedule's rows are entered here, and every cell that applies was accepted."""
    schedule: Schedule = bound.item  # type: ignore[assignment]
    found, applies = book.readings, book.results.applies
    bad = any(
        c.name in found.row_problems or c.name in found.problems
        for c in bound.columns
        if applies.get(c.number, True)
    )
    brought = schedule.name in found.carried and not own_columns(book, schedule.name)
    elsewhere = brought or schedule.name in found.shaped or schedule.name in found.problems
    entered = schedule.name in found.given_rows and not elsewhere
    return entered and not schedule.fixed and not bad


def _stamp(wish: Wish, book: Workbook, initials: str) -> tuple[str, str, str]:
    """Return the job number, the initials and today's date."""
    number = wish.job.number
    if book.name == BASIS:
        number = wish.sets.get(JOB_NUMBER, number)
    if not number.strip():
        raise JobError(
            "this job has no job number yet, and a value is confirmed for a job",
            hint=f"give it one first: calcbook set {BASIS} {JOB_NUMBER}=MC-0417",
        )
    return number, initials, dt.datetime.now().astimezone().date().isoformat()


def _confirm(change: Change, stamp: tuple[str, str, str]) -> None:
    for entry in change.entries.values():
        entry.confirmed = Confirmation(entry.value, *stamp)
    for rows in change.rows.values():
        for row in rows:
            row.confirmed = Confirmation(row_digest(row), *stamp)


def _tell(record: Record, change: Change, before: Mapping[str, str], wish: Wish) -> None:
    for name in wish.sets:
        value, old = change.entries[name].value, before.get(name)
        print(f"{name} = {value}" + (f"  (was {old})" if old not in (None, value) else ""))
    if wish.sets or wish.files:
        for name, rows in change.rows.items():
            print(f"{name}: {counted(len(rows), 'row')}")
    else:
        _list(change)
    if wish.initials is not None:
        count = sum(map(len, change.rows.values()))
        every = (counted(len(change.entries), "entry"), counted(count, "row"))
        told = [text for text in every if not text.startswith("0 ")]
        print(f"{' and '.join(told) or 'nothing'} confirmed by {wish.initials}")
    print(f"written to {record.path.name}")


def _list(change: Change) -> None:
    """Print each entry and each row with its source, one to a line."""
    for name, entry in change.entries.items():
        print(f"{name} = {entry.value}{_in_brackets(entry.source)}")
    for name, rows in change.rows.items():
        for row in rows:
            cells = ", ".join(f"{column} = {text}" for column, text in row.cells.items())
            print(f"{name}, {row.key}: {cells}{_in_brackets(row.source)}")


def _in_brackets(source: str) -> str:
    return f"  ({source})" if source else ""
