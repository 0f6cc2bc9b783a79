"""The one runner: a notebook and its record in, a statement out, no screen.

Notebook code is run as plain Python in this process, in a namespace of its own, always from the
first cell to the last; once for all marks of a workbook, because what it declares depends on
nothing that is typed. A workbook that carries values from another has that one run first.
"""

from __future__ import annotations

import hashlib
from contextvars import ContextVar
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from calcbook import codes
from calcbook.cells import read_cells, run_cell
from calcbook.errors import CalcbookError, CarryError, InputError, JobError, near_match
from calcbook.fingerprint import item_digest
from calcbook.inputs import Carried, Given, GivenRow, Inputs
from calcbook.items import Carry, Schedule
from calcbook.job import BASIS, JOB_NUMBER, Job
from calcbook.marks import gathered, gathered_rows
from calcbook.versions import software
from calcbook.workbook import Workbook, first_problem

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence
    from pathlib import Path

    from calcbook.codes import CodeSet
    from calcbook.record import CarriedRecord, EntryRecord, Record, RowRecord

ALL_MARKS, NAMED_MARKS = "*", "named"
Plain = dict[str, Any]
Part = tuple[str, str | list[str]]


@dataclass
class Filling:
    """One filling of one workbook: its notebook, and what is typed instead of the record."""

    notebook: Path
    mark: str | None = None
    sets: Mapping[str, str] = field(default_factory=dict)
    rows: Mapping[str, Sequence[RowRecord]] = field(default_factory=dict)
    record: Record | None = None


class Runner:
    """Runs workbooks, keeping each statement so that a job's notebook runs once.

    Parameters
    ----------
    job
        The job the workbooks belong to; None runs templates alone.
    progress
        Called with one line of text when a workbook starts.
    forget_taken
        Take every carried value as it is now, whatever was taken before: nothing is stale.
    """

    def __init__(
        self,
        job: Job | None = None,
        progress: Callable[[str], None] | None = None,
        *,
        forget_taken: bool = False,
    ) -> None:
        self.job = job
        self.forget_taken = forget_taken
        self.progress = progress or (lambda _text: None)
        self.books: dict[tuple[str, str | None], tuple[Workbook, Plain]] = {}
        self._running: list[str] = []
        self._number: str | None = None
        self._declared: dict[tuple[Path, str, str], tuple[Workbook, list[Part]]] = {}

    # --- one workbook -----------------------------------------------------------------------

    def statement(self, workbook: str, mark: str | None = None) -> Plain:
        """Return the statement of a workbook of the job, running it when it has not been run.

        Raises
        ------
        JobError
            The job has no such workbook, or a cell of it stopped.
        CarryError
            The workbooks carry values in a circle; the error names it.
        """
        if (workbook, mark) not in self.books:
            if self.job is None:
                raise JobError("values are carried between the workbooks of a job only")
            self.run(Filling(self.job.notebook(workbook), mark))
        return self.books[workbook, mark][1]

    def run(self, filling: Filling, *, strict: bool = False) -> tuple[Workbook, Plain]:
        """Run a notebook from its first cell and return the workbook and its statement.

        ``strict`` raises for the first thing typed (``sets``, ``rows``) that is refused, instead
        of marking it in the statement.
        """
        name = f"{filling.notebook.stem} {filling.mark or ''}".strip()
        if name in self._running:
            circle = " -> ".join([*self._running[self._running.index(name) :], name])
            raise CarryError(
                f"workbooks carry values in a circle: {circle}",
                hint="one of them must own the value",
            )
        self.progress(name)
        self._running.append(name)
        opening = Opening(self, filling)
        token = _CURRENT.set(opening)
        try:
            return self._run(opening, strict=strict)
        finally:
            _CURRENT.reset(token)
            self._running.pop()

    def _run(self, opening: Opening, *, strict: bool) -> tuple[Workbook, Plain]:
        filling = opening.filling
        book, parts = self._declare(opening)
        book.refuse_unknown()
        statement = book.statement()
        if strict:
            _refuse_problem(book, [*filling.sets, *filling.rows])
        statement["parts"] = _interleave(parts, statement["parts"])
        statement["notebook"] = {
            "name": filling.notebook.name,
            "sha256": hashlib.sha256(filling.notebook.read_bytes()).hexdigest(),
        }
        statement["software"] = dict(software())
        self.books[book.name, book.mark] = (book, statement)
        return book, statement

    def _declare(self, opening: Opening) -> tuple[Workbook, list[Part]]:
        """Return the workbook of a filling with what its notebook declares, prose in between."""
        filling = opening.filling
        name = filling.notebook.stem
        known = None
        if filling.mark is not None:
            code, system = self.settings(name, filling)
            key = (filling.notebook, code.name, system)
            known = self._declared.get(key)
        if known is not None:
            book = known[0].filled(filling.mark, self.inputs(known[0].name, filling))
            return book, known[1]
        parts = _run_cells(filling.notebook, opening)
        if opening.book is None:
            raise JobError(
                "the notebook opens no workbook",
                where=filling.notebook.name,
                hint="its first code cell calls open_workbook(name, title)",
            )
        if filling.mark is not None:
            self._declared[key] = (opening.book, parts)
        return opening.book, parts

    # --- inputs -----------------------------------------------------------------------------

    def inputs(self, workbook: str, filling: Filling) -> Inputs:
        """Return what is typed for a filling: its record, and over it what is set instead."""
        record = self.record(workbook, filling)
        number = self._job_number(workbook, record)
        typed = inputs_of(record, number) if record is not None else Inputs()
        for name, text in filling.sets.items():
            typed.entries[name] = Given(text, "set for this run")
        for name, rows in filling.rows.items():
            typed.rows[name] = [GivenRow(r.key, r.cells, r.source) for r in rows]
        taken = record.carried if record is not None and not self.forget_taken else {}
        typed.carried = lambda origin: self.carried(origin, taken, typed)
        return typed

    def _job_number(self, workbook: str, record: Record | None) -> str:
        """Return the number values are confirmed for; the design basis knows its own first."""
        if self.job is None:
            return ""
        if workbook == BASIS and record is not None:
            entry = record.entries.get(JOB_NUMBER)
            return entry.value if entry else ""
        if self._number is None:
            self._number = self.job.number
        return self._number

    def record(self, workbook: str, filling: Filling) -> Record | None:
        """Return the record of a filling: the one given, or the job's; None outside a job."""
        if filling.record is not None:
            return filling.record
        return self.job.record(workbook, filling.mark) if self.job is not None else None

    def carried(
        self,
        origin: str,
        taken: Mapping[str, CarriedRecord],
        asker: Inputs | None = None,
    ) -> Carried | None:
        """Return a result of another workbook as it is now; None outside a job.

        A workbook the job does not have also gives None: the fallback then serves, unconfirmed.
        ``asker`` is what is typed in the filling that asks.
        """
        workbook, _, name = origin.partition(".")
        if self.job is None or workbook not in self.job.workbooks:
            return None
        try:
            if name.partition(".")[0] in (ALL_MARKS, NAMED_MARKS):
                return self._over_marks(origin, taken, asker)
            statement = self.statement(workbook)
        except CarryError:
            raise
        except CalcbookError as error:
            return Carried(origin, None, problem=f"{workbook} cannot be run: {error}")
        item = find_item(statement, name)
        if item is None:
            known = [str(i["name"]) for i in all_items(statement) if i["name"]]
            hint = near_match(name, known)
            return Carried(
                origin,
                None,
                problem=f"{workbook} has no result '{name}'" + (f"; {hint}" if hint else ""),
            )
        return _carried(origin, item, str(statement["fingerprint"]), taken)

    def _over_marks(
        self, origin: str, taken: Mapping[str, CarriedRecord], asker: Inputs | None
    ) -> Carried:
        """Return one schedule over the marks of a workbook, or the rows of one of its schedules.

        Where marks are to be named, only those that a row of the asker names are run: a beam needs
        the beams that bear on it, and those do not need it.
        """
        workbook, _, name = origin.partition(".")
        which, dot, schedule = name.partition(".")
        marks = self.job.marks(workbook) if self.job is not None else ()
        if which == NAMED_MARKS:
            marks = tuple(mark for mark in marks if _names_rows_of(mark, asker))
        statements = {mark: self.statement(workbook, mark) for mark in marks}
        item = (
            gathered_rows(workbook, schedule, statements) if dot else gathered(workbook, statements)
        )
        return _carried(origin, item, item_digest(item), taken)

    def settings(self, workbook: str, filling: Filling) -> tuple[CodeSet, str]:
        """Return the code set and the unit system a workbook is opened with."""
        own = self.record(workbook, filling)
        basis = None
        if self.job is not None and workbook != BASIS and BASIS in self.job.workbooks:
            basis = self.job.record(BASIS)
        found = {}
        for name, usual in (("code_set", codes.names()[0]), ("units", "SI")):
            records = [r.entries[name].value for r in (basis, own) if r and name in r.entries]
            found[name] = filling.sets.get(name) or next(iter(records), usual)
        if found["units"] not in ("SI", "US"):
            raise InputError(
                f"there is no unit system '{found['units']}'",
                where=workbook,
                hint="choose SI or US",
            )
        return codes.get(found["code_set"]), found["units"]


@dataclass
class Opening:
    """A run in progress: what ``open_workbook`` finds when a notebook is run without a screen."""

    runner: Runner
    filling: Filling
    book: Workbook | None = None

    def open(self, name: str, title: str, signs: Mapping[str, str] | None) -> Workbook:
        """Open the workbook of the notebook being run."""
        if self.book is not None:
            raise JobError(
                f"a notebook opens one workbook; this one opened {self.book.name}",
                where=self.filling.notebook.name,
            )
        self.book = open_book(self.runner, self.filling, name, title, signs)
        return self.book


def open_book(
    runner: Runner, filling: Filling, name: str, title: str, signs: Mapping[str, str] | None
) -> Workbook:
    """Open a workbook for a filling, whether a person or the runner runs its notebook.

    Raises
    ------
    JobError
        Another notebook of the job claims the record, or the notebook has another name.
    """
    notebook, job = filling.notebook, runner.job
    if job is not None and notebook.is_file() and notebook.resolve().parent == job.folder.resolve():
        job.claim(name, notebook)
        if name != notebook.stem:
            raise JobError(
                f"this notebook opens the workbook '{name}'",
                where=notebook.name,
                hint=f"in a job it must be named {name}.ipynb",
            )
    code, system = runner.settings(name, filling)
    return Workbook(
        name,
        title,
        code=code,
        system=system,
        mark=filling.mark,
        signs=signs,
        inputs=runner.inputs(name, filling),
    )


_CURRENT: ContextVar[Opening | None] = ContextVar("opening", default=None)


def opening() -> Opening | None:
    """Return the run in progress, or None where a notebook is run by a person."""
    return _CURRENT.get()


def _carried(
    origin: str, item: Plain, fingerprint: str, taken: Mapping[str, CarriedRecord]
) -> Carried:
    """Return a result brought forward, with what was taken last where that differs."""
    former = taken.get(origin)
    moved = former is not None and former.fingerprint != item_digest(item)
    old = {"text": former.value} if former is not None and moved else None
    return Carried(origin, item, fingerprint, taken=old)


def _names_rows_of(mark: str, typed: Inputs | None) -> bool:
    """Whether a cell typed in some row names a row of a mark: 'B2 A'."""
    rows = (row for table in (typed.rows.values() if typed else ()) for row in table)
    return any(cell.startswith(f"{mark} ") for row in rows for cell in row.cells.values())


def inputs_of(record: Record, job_number: str) -> Inputs:
    """Return a record's entries and rows, with who confirmed each for this job."""

    def given(item: EntryRecord | RowRecord) -> str:
        found = item.confirmed
        if found is None or not record.is_confirmed(item, job_number):
            return ""
        return f"{found.by} {found.on}"

    entries = {n: Given(e.value, e.source, given(e)) for n, e in record.entries.items()}
    rows = {
        name: [GivenRow(r.key, r.cells, r.source, given(r)) for r in rows]
        for name, rows in record.schedules.items()
    }
    return Inputs(entries, rows)


def all_items(statement: Mapping[str, Any]) -> list[Plain]:
    """Return every item of a statement, in order."""
    return [i for p in statement["parts"] if p["kind"] == "section" for i in p["items"]]


def find_item(statement: Mapping[str, Any], name: str) -> Plain | None:
    """Return the item of a name, or None."""
    return next((i for i in all_items(statement) if i["name"] == name), None)


def _run_cells(path: Path, opening: Opening) -> list[Part]:
    """Run every code cell; returns prose and the titles each cell declared, in order."""
    space: dict[str, object] = {"__name__": "__main__"}
    parts: list[Part] = []
    for count, (kind, source) in enumerate(read_cells(path), 1):
        if kind == "markdown":
            parts.append(("prose", source))
        elif kind == "code":
            before = list(opening.book.sections) if opening.book else []
            run_cell(path, count, source, space)
            sections = opening.book.sections if opening.book else []
            parts.append(("sections", [s.title for s in sections if s not in before]))
    return parts


def _interleave(parts: Sequence[Part], sections: Sequence[Plain]) -> list[Plain]:
    """Return the statement's sections with the notebook's prose between them."""
    by_title = {s["title"]: s for s in sections}
    out: list[Plain] = []
    for kind, content in parts:
        if isinstance(content, str):
            out.append({"kind": kind, "markdown": content})
        else:
            out.extend(by_title.pop(title) for title in content if title in by_title)
    return [*out, *by_title.values()]


def _refuse_problem(book: Workbook, names: Sequence[str]) -> None:
    """Raise InputError for the first of these inputs that has no value."""
    for name in names:
        columns = []
        if any(isinstance(i, Schedule) and i.name == name for i in book.items()):
            columns = [c.name for c in book.schedule_item(name).columns if _applies(book, c.name)]
        problem = first_problem(book, [name, *columns])
        if problem:
            named = problem.startswith(f"{name}:")
            raise InputError(problem, where=book.name if named else f"{book.name}, {name}")


def _applies(book: Workbook, name: str) -> bool:
    bound = book.scope.get(name)
    return bound is None or book.results.applies.get(bound.number, True)


def carries(book: Workbook) -> dict[str, str]:
    """Return what a workbook carries: origin by the name it has here."""
    return {i.name: i.origin for i in book.items() if isinstance(i, (Carry, Schedule)) and i.origin}
