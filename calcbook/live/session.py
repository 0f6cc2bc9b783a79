"""One opened workbook in a kernel: its record, its views, and what a change sets off."""

from __future__ import annotations

import base64
import copy
import datetime as dt
import os
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from calcbook.errors import (
    CalcbookError,
    InputError,
    JobError,
    RecordChangedError,
    RecordError,
    near_match,
)
from calcbook.job import BASIS, JOB_NUMBER, Job
from calcbook.live import notebook, output
from calcbook.record import Confirmation, EntryRecord, Record, RowRecord, row_digest
from calcbook.run import Filling, Runner, open_book
from calcbook.workbook import entered_columns

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook import units
    from calcbook.live.view import SectionView
    from calcbook.section import Section

    Plain = Mapping[str, Any]

NO_JOB = "Not in a job: what you type is used, and nothing is written."
REOPENED = "The workbook was opened again; run this cell again."
MERGED = "The record was changed elsewhere meanwhile; it has been read again."
UNSIGNED = "type the job number and 'prepared by' in the design basis"
SHOWN_NOW = "what the record says now is shown; type again to change it"
WAIT_SECONDS = 2.0
MARK = "CALCBOOK_MARK"
PREPARED_BY = "prepared_by"


@dataclass(frozen=True)
class Signer:
    """Who confirms by typing: the job's number and the initials of the design basis."""

    job: str
    by: str

    def confirm(self, value: str) -> Confirmation | None:
        """Return a confirmation of today, or None where number or initials are missing."""
        if not (self.job and self.by):
            return None
        today = dt.datetime.now().astimezone().date()
        return Confirmation(value, self.job, self.by, today.isoformat())

    def sign(self, value: str) -> Confirmation:
        """Return a confirmation of today; InputError where number or initials are missing."""
        found = self.confirm(value)
        if found is None:
            raise InputError("who confirms is not known yet", hint=UNSIGNED)
        return found


class Session:
    """A workbook opened for a person: entries are typed in views and written to the record.

    Parameters
    ----------
    name, title, signs
        As given to ``open_workbook``.
    job
        The job of the notebook, or None: then a record in memory serves.
    record
        The record in memory to go on with, outside a job.
    """

    def __init__(
        self, name: str, title: str, signs: Mapping[str, str] | None = None, *,
        job: Job | None = None, record: Record | None = None,
    ) -> None:  # fmt: skip
        self.job = job
        self.marks = job.marks(name) if job is not None else ()
        self.mark = _opened_mark(name, self.marks)
        if job is not None:
            record = job.record(name, self.mark)
        self.record = record or Record(Path(f"{name}.toml"), name)
        self.filling = Filling(notebook.path(name), self.mark, record=self.record)
        self.runner = Runner(job)
        self.book = open_book(self.runner, self.filling, name, title, signs)
        self.book.on_show = self.show
        self.book.cell = notebook.running()[0]
        self.views: dict[str, SectionView] = {}
        self.statement: Plain = {}
        self.notice = ""
        self._typed: dict[tuple[str, str], set[str]] = {}
        self._cells: set[str] = set()
        self._stamps = self._outside()

    # --- showing ----------------------------------------------------------------------------

    def show(self, section: Section) -> None:
        """Show a section that was declared: a view where widgets are, and its stable output."""
        self._evaluate()
        plain = self.section(section.title)
        first = self.mark is not None and section is self.book.sections[0]
        lead = f"Mark {self.mark}\n\n" if first else ""
        bundle: dict[str, Any] = {
            "text/markdown": lead + output.markdown(self.statement, plain),
            "text/plain": lead + output.plain(self.statement, plain),
        }
        picture = output.picture(self.statement, plain)
        if picture is not None:
            bundle["image/png"] = base64.b64encode(picture).decode("ascii")
        if notebook.has_widgets():
            model = self.view(section.title).box.model_id
            bundle[notebook.WIDGET] = {
                "version_major": 2, "version_minor": 0, "model_id": model,
            }  # fmt: skip
        notebook.publish(bundle)

    def view(self, title: str) -> SectionView:
        """Make the view of a section, in place of the one it had."""
        from calcbook.live.view import SectionView  # noqa: PLC0415  widgets only where shown

        if not self.statement or self.section(title, {}) == {}:
            self._evaluate()
        self.views = {t: v for t, v in self.views.items() if t != title}
        view = SectionView(self, title, first=not self.views)
        self.views[title] = view
        self.refresh(evaluate=False)
        return view

    def mark_words(self) -> str:
        """Return which mark is open and how another one is opened; '' without marks."""
        if self.mark is None:
            return ""
        others = [mark for mark in self.marks if mark != self.mark]
        if not others:
            return f"Mark {self.mark}, the only one."
        told = f"Mark {self.mark}, one of {len(self.marks)}: {self.marks[0]} to {self.marks[-1]}."
        return f"{told} For another one, set {MARK} to it and run all cells again."

    def section(self, title: str, missing: Plain | None = None) -> Plain:
        """Return a section of the last statement."""
        found: Plain | None = next(
            (p for p in self.statement["parts"] if p.get("title") == title), missing
        )
        if found is None:
            raise InputError(f"there is no section '{title}'", where=self.book.name)
        return found

    def refresh(self, *, evaluate: bool = True) -> None:
        """Compute everything and bring every section shown up to date."""
        if evaluate:
            self._evaluate()
        known = {s.title for s in self.book.sections}
        self.views = {t: v for t, v in self.views.items() if t in known}
        for title, view in self.views.items():
            view.show(self.statement, self.section(title))

    def retire(self) -> None:
        """Say in every view that the workbook was opened again, and take no more changes."""
        for view in self.views.values():
            view.retire(REOPENED)
        self.views = {}

    def begin_cell(self) -> None:
        """Note the cell that starts to run, and those deleted before it."""
        cell, deleted = notebook.running()
        self.book.cell = cell
        self._cells = (self._cells | {cell}) - set(deleted) - {""}
        if deleted:
            self.book.mark_left_over(self._cells)

    def _evaluate(self) -> None:
        stamps = self._outside()
        if self.job is not None and stamps != self._stamps:
            self.job = Job.load(self.job.folder)
            self.runner = Runner(self.job)
            self._stamps = stamps
            self._read_inputs()
        self.statement = self.book.statement()

    def _read_inputs(self) -> None:
        self.book.inputs = self.runner.inputs(self.book.name, self.filling)

    def _outside(self) -> dict[str, tuple[int, int]]:
        """Return what tells whether another workbook of the job was changed."""
        if self.job is None:
            return {}
        own = {self.record.path.name, f"{self.filling.notebook.stem}.ipynb"}
        files = [f for kind in ("*.toml", "*.ipynb") for f in self.job.folder.glob(kind)]
        states = {f.name: f.stat() for f in sorted(files) if f.name not in own}
        return {name: (s.st_mtime_ns, s.st_size) for name, s in states.items()}

    # --- changing ---------------------------------------------------------------------------

    def signer(self, entering: tuple[str, str] = ("", "")) -> Signer:
        """Return who confirms; ``entering`` is what is being typed into the design basis now."""
        if self.job is None:
            return Signer("", "")
        basis = self.record if self.book.name == BASIS else self.job.record(BASIS)
        found = {n: e.value for n, e in basis.entries.items() if n in (JOB_NUMBER, PREPARED_BY)}
        if self.book.name == BASIS:
            found |= dict([entering])
        return Signer(found.get(JOB_NUMBER, ""), found.get(PREPARED_BY, ""))

    def enter(self, name: str, text: str, *, bare: units.Unit | None = None) -> None:
        """Take a typed entry: read it strictly, write it confirmed, recompute.

        Raises CalcbookError when it is refused; nothing is changed then.
        """
        stored = self.book.accept(name, text, bare=bare)
        confirmed = self.signer((name, stored)).confirm(stored)
        self._put(name, EntryRecord(stored, self._source(name, stored), confirmed))

    def confirm(self, name: str, *, yes: bool) -> None:
        """Confirm the value an entry has, or take the confirmation back."""
        value = self.book.readings.given[name].text
        confirmed = self.signer().sign(value) if yes else None
        self._put(name, EntryRecord(value, self._source(name, value), confirmed))

    def bring_forward(self, name: str) -> None:
        """Drop what was typed over a carried value."""
        self._put(name, None)

    def _source(self, name: str, value: str) -> str:
        """Return the source in force, which another value does not have."""
        given = self.book.readings.given.get(name)
        return given.source if given is not None and given.text == value else ""

    def _put(self, name: str, item: EntryRecord | None) -> None:
        known = copy.deepcopy(self.record.entries.get(name))
        self._write(
            lambda: self.record.entries.get(name) == known,
            lambda: self.record.change(entries={name: item}),
            lambda: self.record.change(entries={name: known}),
        )

    def _write(
        self, same: Callable[[], bool], change: Callable[[], None], undo: Callable[[], None]
    ) -> None:
        """Change the record in memory and on disk; on failure neither is changed."""
        change()
        self.notice = ""
        if self.job is not None:
            try:
                self.record.save(wait=WAIT_SECONDS)
            except RecordChangedError:
                self._write_again(same, change, undo)
            except RecordError:
                undo()
                raise
        self._read_inputs()
        self.refresh()

    def _write_again(
        self, same: Callable[[], bool], change: Callable[[], None], undo: Callable[[], None]
    ) -> None:
        """Write over the record as it now is, unless this very item was changed elsewhere."""
        self.record.reload()
        if not same():
            self._read_inputs()
            self.refresh()
            raise RecordChangedError("this was changed elsewhere meanwhile", hint=SHOWN_NOW)
        change()
        try:
            self.record.save(wait=WAIT_SECONDS)
        except RecordError:
            undo()
            raise
        self.notice = MERGED

    # --- rows -------------------------------------------------------------------------------

    def enter_cell(
        self, schedule: str, key: str, column: str, text: str, *, bare: units.Unit | None = None
    ) -> None:
        """Take a typed cell of a schedule; raises CalcbookError when it is refused."""
        stored = self.book.accept_cell(schedule, column, text, bare=bare)

        def change(rows: list[RowRecord]) -> None:
            row = self._row(rows, key)
            if row.cells.get(column) != stored:
                row.source = ""
            row.cells[column] = stored

        self._change_rows(schedule, change, key, column)

    def rename_row(self, schedule: str, key: str, new: str) -> None:
        """Give a row another key."""
        new = new.strip()
        if not new:
            raise InputError("a row needs a key", hint="type the name it has on the drawings")

        def change(rows: list[RowRecord]) -> None:
            if any(row.key == new for row in rows):
                hint = "give each row its own key"
                raise InputError(f"there is a row '{new}' already", hint=hint)
            self._row(rows, key).key = new

        self._change_rows(schedule, change, new, former=key)

    def add_row(self, schedule: str, below: str | None) -> None:
        """Put a new row below one, or first."""

        def change(rows: list[RowRecord]) -> None:
            keys = [row.key for row in rows]
            new = next(n for n in _new_keys() if n not in keys)
            rows.insert(keys.index(below) + 1 if below in keys else 0, RowRecord(new, {}))

        self._change_rows(schedule, change)

    def remove_row(self, schedule: str, key: str) -> None:
        """Take a row out."""
        self._change_rows(schedule, lambda rows: rows.remove(self._row(rows, key)))
        self._typed.pop((schedule, key), None)

    def confirm_row(self, schedule: str, key: str, *, yes: bool) -> None:
        """Confirm a row as it is, or take the confirmation back."""
        signer = self.signer()

        def change(rows: list[RowRecord]) -> None:
            row = self._row(rows, key)
            row.confirmed = signer.sign(row_digest(row)) if yes else None

        self._change_rows(schedule, change)

    def _row(self, rows: list[RowRecord], key: str) -> RowRecord:
        for row in rows:
            if row.key == key:
                return row
        raise InputError(f"there is no row '{key}' any more", hint="run this cell again")

    def _rows(self, schedule: str) -> list[RowRecord]:
        """Return a copy of the rows in force: the record's, else the template's."""
        if schedule in self.record.schedules:
            return copy.deepcopy(self.record.schedules[schedule])
        given = self.book.readings.given_rows.get(schedule, [])
        return [RowRecord(r.key, dict(r.cells), r.source) for r in given]

    def _change_rows(
        self, schedule: str, change: Callable[[list[RowRecord]], None],
        key: str = "", column: str = "", former: str = "",
    ) -> None:  # fmt: skip
        """Write rows changed; row ``key``, called ``former`` before, is confirmed if it stood.

        So is a row all of whose cells were typed here.
        """
        known = copy.deepcopy(self.record.schedules.get(schedule))
        typed = self._typed.get((schedule, former or key), set()) | {column}
        whole = set(entered_columns(self.book.schedule_item(schedule))) <= typed

        def apply() -> None:
            rows = self._rows(schedule)
            signer = self.signer()
            stood = {r.key for r in rows if signer.job and self.record.is_confirmed(r, signer.job)}
            change(rows)
            if key and ((former or key) in stood or whole):
                row = self._row(rows, key)
                row.confirmed = signer.confirm(row_digest(row))
            self.record.change(schedules={schedule: rows})

        self._write(
            lambda: self.record.schedules.get(schedule) == known,
            apply,
            lambda: self.record.change(schedules={schedule: known}),
        )
        if key:
            self._typed.pop((schedule, former), None)
            self._typed[schedule, key] = typed


def _opened_mark(name: str, marks: tuple[str, ...]) -> str | None:
    """Return the mark to open: the one the environment names, else the first; None without marks.

    Raises JobError when the environment names one that has no record.
    """
    if not marks:
        return None
    named = os.environ.get(MARK)
    if named and named not in marks:
        hint = near_match(named, marks) or f"it has {', '.join(marks)}"
        raise JobError(f"{name} has no mark '{named}', which {MARK} asks for", hint=hint)
    return named or marks[0]


def _new_keys() -> Any:  # noqa: ANN401
    yield "new"
    number = 2
    while True:
        yield f"new {number}"
        number += 1


def refusal(error: CalcbookError, in_force: str = "") -> str:
    """Return why something was not taken, what would be right, and what stays in force."""
    parts = [f"{error.what}.", f"{error.hint[:1].upper()}{error.hint[1:]}." if error.hint else ""]
    parts.append(f"{in_force} stays in force." if in_force else "")
    return " ".join(part for part in parts if part)
