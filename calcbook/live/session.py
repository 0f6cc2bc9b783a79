"""One opened workbook in a kernel: its record, its views, what a change sets off, what is asked."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

from calcbook.errors import CalcbookError, InputError, JobError, near_match
from calcbook.live import asks
from calcbook.live.marking import MARK
from calcbook.live.rowchanges import RowChanging
from calcbook.live.signing import Signer

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.job import Job

__all__ = ["MARK", "NO_JOB", "Session", "Signer", "refusal"]

NO_JOB = "Not in a job: what you type is used, and nothing is written."


class Session(RowChanging):
    """A workbook opened for a person: entries are typed in views and written to the record.

    A change is in memory, computed and shown at once. Its record is written at once as well, or in
    a kernel right after it; many changes in a short time are written together. What cannot be
    written stays in force, and ``unwritten`` says so.

    Parameters
    ----------
    name, title, signs
        As given to ``open_workbook``.
    job
        The job of the notebook, or None: then a record in memory serves.
    former
        The session this one takes over from, with what it holds in memory: what was typed outside
        a job or could not be written, what can be undone, the mark that was open.

    Attributes
    ----------
    asked_for
        The mark the environment named when it was opened, or None.
    """

    def __init__(
        self, name: str, title: str, signs: Mapping[str, str] | None = None, *,
        job: Job | None = None, former: Session | None = None,
    ) -> None:  # fmt: skip
        marks = job.marks(name) if job is not None else ()
        if former is not None and not _same_job(former.job, job):
            former = None
        self.asked_for = os.environ.get(MARK)
        goes_on = former is not None and former.asked_for == self.asked_for
        mark = _opened_mark(name, marks, former.mark if former is not None and goes_on else None)
        self._hushed = False
        super().__init__(name, title, signs, job=job, mark=mark, former=former)
        if former is not None:
            self._note_incoming(self.kept, self.kept.look())
            self._read_inputs()

    @property
    def asks(self) -> list[asks.Ask]:
        """The questions that are open: each has an id, a text, and options (id, words)."""
        if not self.kept.damaged:
            self._hushed = False
        return list(asks.open_questions(self.kept, hushed=self._hushed))

    def answer(self, ask: str, option: str) -> None:
        """Answer a question.

        Raises
        ------
        InputError
            There is no such question, or it has no such answer.
        RecordError
            A damaged file cannot be renamed.
        """
        question = next((a for a in self.asks if a["id"] == ask), None)
        if question is None or option not in dict(question["options"]):
            raise InputError("this question is no longer open")
        if ask == asks.DAMAGED:
            self._answer_damaged(anew=option == asks.ANEW)
            return
        place = asks.place_of(ask)
        theirs = self.kept.held.pop(place)
        if option == asks.THEIRS:
            self._change(f"{place[1]} as it was elsewhere", {place: theirs})
        else:
            self._follow()

    def _answer_damaged(self, *, anew: bool) -> None:
        self._hushed = not anew
        if anew:
            self.kept.set_aside()
            self.write_again()
        else:
            self.refresh(evaluate=False)


def _same_job(one: Job | None, other: Job | None) -> bool:
    return (one and one.folder.resolve()) == (other and other.folder.resolve())


def _opened_mark(name: str, marks: tuple[str, ...], former: str | None) -> str | None:
    """Return the mark to open: the one that was open, else the environment's, else the first.

    Raises JobError when the environment names one that has no record.
    """
    if not marks:
        return None
    named = os.environ.get(MARK)
    if named and named not in marks:
        hint = near_match(named, marks) or f"it has {', '.join(marks)}"
        raise JobError(f"{name} has no mark '{named}', which {MARK} asks for", hint=hint)
    return (former if former in marks else named) or marks[0]


def refusal(error: CalcbookError, in_force: str = "") -> str:
    """Return why something was not taken, what would be right, and what stays in force."""
    parts = [f"{error.what}.", f"{error.hint[:1].upper()}{error.hint[1:]}." if error.hint else ""]
    parts.append(f"{in_force} stays in force." if in_force else "")
    return " ".join(part for part in parts if part)
