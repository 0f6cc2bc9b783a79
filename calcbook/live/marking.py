"""The marks of a workbook: opened, added, copied and removed, and that taken back."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from calcbook.diskfile import in_plain_words, locked, read_bytes, write_whole
from calcbook.errors import InputError, JobError, RecordError, near_match
from calcbook.job import BASIS
from calcbook.live.history import MarkStep, Stored
from calcbook.live.opened import Opened
from calcbook.live.wording import APPLY
from calcbook.live.writing import WAIT_SECONDS
from calcbook.record import Record, check_mark
from calcbook.recordform import new_text
from calcbook.run import Filling

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.job import Job
    from calcbook.live.writing import Kept

MARK = "CALCBOOK_MARK"
_WORKBOOK_LINE = re.compile(r"^workbook\s*=.*$", re.MULTILINE)
Mark = str | None


class Marking(Opened):
    """A workbook of which one filling after the other is looked at, without running a cell."""

    @property
    def takes_marks(self) -> bool:
        """Whether marks can be added: the workbook is meant for them, or has some."""
        return self.job is not None and (self.book.has_marks or bool(self.marks))

    def open_mark(self, mark: Mark) -> None:
        """Show another filling in every section; no cell is run again.

        '' and None stand for the filling without a mark. Raises JobError where there is no such
        mark.
        """
        mark = mark or None
        if mark not in self.marks and not (mark is None and self._has_unmarked()):
            hint = near_match(mark or "", self.marks) or f"it has {', '.join(self.marks)}"
            raise JobError(f"{self.book.name} has no mark '{mark or ''}'", hint=hint)
        self._open(mark)

    def add_mark(self, name: str, like: Mark = None) -> None:
        """Make a mark and open it.

        It begins with the template's values, or ``like`` another mark: then nothing of it is
        confirmed. The first mark takes over what was typed before there were marks.

        Raises
        ------
        RecordError
            The name cannot be a mark, or its record cannot be written; nothing is changed then.
        InputError, JobError
            There is such a mark, or no marks can be had here.
        """
        job = self._job()
        name = check_mark(name.strip())
        same = next((m for m in self.marks if m.casefold() == name.casefold()), None)
        if same is not None:
            raise InputError(f"there is a mark '{same}' already", hint="give it another name")
        self.settle()
        before: dict[Mark, Stored | None] = {name: None}
        after: dict[Mark, Stored | None] = {}
        words = f"mark {name} added"
        if like is not None:
            after[name] = _copied(job, self._settled(like).record, name)
        elif not self.marks and (typed := _stored(self._settled(None).record)):
            before[None], after[None] = typed, None
            after[name] = _named(self.book.name, typed, name)
            words = f"mark {name} given to what was typed"
        else:
            after[name] = _fresh(job, self.book.name, name)
        self._do(MarkStep(words, before, after, self.mark, name))

    def remove_mark(self, mark: str) -> None:
        """Remove a mark with its record, and open the next one; ``undo`` brings it back.

        Raises
        ------
        JobError
            There is no such mark.
        RecordError
            Something of it is not on disk, or the file cannot be removed.
        """
        if mark not in self.marks:
            hint = near_match(mark, self.marks) or f"it has {', '.join(self.marks) or 'none'}"
            raise JobError(f"{self.book.name} has no mark '{mark}'", hint=hint)
        self.settle()
        stored = _stored(self._settled(mark).record)
        place = self.marks.index(mark)
        others = [m for m in self.marks if m != mark]
        after = self.mark
        if self.mark == mark:
            after = others[min(place, len(others) - 1)] if others else None
        step = MarkStep(f"mark {mark} removed", {mark: stored}, {mark: None}, self.mark, after)
        self._do(step)

    # --- how it is done ---------------------------------------------------------------------

    def _job(self) -> Job:
        if self.job is None:
            raise JobError("marks are fillings in a job, and this is none",
                           hint="start one with: calcbook start FOLDER")  # fmt: skip
        if self.book.name == BASIS:
            raise JobError(f"there is one {BASIS} in a job, without marks")
        return self.job

    def _has_unmarked(self) -> bool:
        """Whether the filling without a mark has a record, or is the only one."""
        return not self.marks or (
            self.job is not None and self.job.record_path(self.book.name).exists()
        )

    def _settled(self, mark: Mark) -> Kept:
        """Return an open record whose file says what it says."""
        kept = self._keep(mark)
        kept.look()
        if kept.trouble or kept.held:
            why = kept.unwritten() or f"{kept.path.name}: a question about it is open."
            raise RecordError(why.rstrip("."), hint="put that right first")
        return kept

    def _do(self, step: MarkStep) -> None:
        self._take_mark_step(step)
        self.history.add(step)

    def _take_mark_step(self, step: MarkStep) -> None:
        """Make and remove the files of a step, and open the mark it opens."""
        job = self._job()
        self.settle()
        for mark, stored in step.before.items():
            self._refuse_moved(job, mark, stored)
        made: list[Path] = []
        try:
            for mark in sorted(step.after, key=lambda m: step.after[m] is None):
                path, stored = job.record_path(self.book.name, mark), step.after[mark]
                with locked(path, RecordError, WAIT_SECONDS), in_plain_words(path, RecordError):
                    if stored is None:
                        path.unlink()
                    else:
                        write_whole(path, stored.data)
                        made.append(path)
        except RecordError:
            for path in made:
                path.unlink(missing_ok=True)
            raise
        for mark in step.after:
            self._kept.pop(mark, None)
        self.marks = job.marks(self.book.name)
        self._stamps = self._outside()
        self._open(step.open_after)

    def _refuse_moved(self, job: Job, mark: Mark, stored: Stored | None) -> None:
        """Raise InputError where a record is not as it was when the step was made."""
        path = job.record_path(self.book.name, mark)
        if stored is None:
            same = not path.exists()
        else:
            same = path.exists() and self._settled(mark).record.content() == stored.form
        if not same:
            raise InputError(f"{path.name} was changed elsewhere since",
                             hint="add or remove the mark by hand")  # fmt: skip

    def _open(self, mark: Mark) -> None:
        self.settle()
        kept = self._keep(mark)  # a record that cannot be read leaves the open one open
        self.mark, self.kept = mark, kept
        self.filling = Filling(self.filling.notebook, mark, record=self.record)
        self.book.mark = mark
        self._typed, self.notice = {}, ""
        self._note_incoming(self.kept, self.kept.look())
        code, system = self.runner.settings(self.book.name, self.filling)
        if (code.name, system) != (self.book.code.name, self.book.system):
            self.notice = APPLY
        self._compute()


def _stored(record: Record) -> Stored | None:
    """Return the file of a record as it stands; None where there is none."""
    with in_plain_words(record.path, RecordError):
        data = read_bytes(record.path)
    return None if data is None else Stored(data, record.content())


def _fresh(job: Job, workbook: str, mark: str) -> Stored:
    record = Record(job.record_path(workbook, mark), workbook, mark)
    return Stored(new_text(workbook, mark).encode(), record.content())


def _copied(job: Job, record: Record, mark: str) -> Stored:
    """Return a copy of a record under another mark, with nothing of it confirmed."""
    copy = Record(job.record_path(record.workbook, mark), record.workbook, mark)
    form = record.content()
    for entry in form.entries.values():
        entry.confirmed = None
    for row in (row for rows in form.schedules.values() for row in rows):
        row.confirmed = None
    copy.change(form.entries, form.schedules, form.carried)
    return Stored(copy.text().encode(), copy.content())


def _named(workbook: str, stored: Stored, mark: str) -> Stored:
    """Return the record without a mark as that of a mark, comments and confirmations kept."""
    text = stored.data.decode()
    line = new_text(workbook, mark).splitlines()[2]
    text = _WORKBOOK_LINE.sub(lambda found: f"{found[0]}\n{line}", text, count=1)
    form = stored.form
    return Stored(text.encode(), type(form)(workbook, mark, form.entries, form.schedules,
                                            form.carried))  # fmt: skip
