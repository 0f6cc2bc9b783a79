"""The errors calcbook raises, all written for the engineer at the desk.

CalcbookError
    QuantityError (ValueError)      a typed number or unit that cannot be read
    FormulaError (ValueError)       a formula that cannot be read
        DimensionError              a formula whose units do not agree
    DeclarationError (ValueError)   a workbook that declares something it may not
        ReadingError (TypeError)    notebook code that reads a value
    InputError (ValueError)         an entry, choice or row that is refused
    CodeSetError (LookupError)      a code set, clause or table that is not there
    RecordError (ValueError)        a record that cannot be read or written
        RecordChangedError          a record that was changed by someone else
    JobError (ValueError)           a job folder that is missing, taken or wrong
        CarryError                  a value that cannot be carried between workbooks
    StaticsError (ValueError)       a beam or truss that cannot stand, or a load it cannot carry
    PackError (RuntimeError)        a pack that cannot be made
    UsageError (ValueError)         a command that cannot be understood
"""

from __future__ import annotations

import difflib
import traceback
from pathlib import Path
from typing import TYPE_CHECKING, Self

if TYPE_CHECKING:
    from collections.abc import Iterable


class CalcbookError(Exception):
    """What is wrong, where, and what would be right.

    Parameters
    ----------
    what
        One sentence without a full stop: what is wrong.
    hint
        What would be right, or what to type instead.
    where
        The place: workbook, section, line, file.
    text, span
        The text as typed and the (start, end) of the offending part in it.
    """

    def __init__(
        self,
        what: str,
        *,
        hint: str = "",
        where: str = "",
        text: str = "",
        span: tuple[int, int] | None = None,
    ) -> None:
        super().__init__(what)
        self.what = what
        self.hint = hint
        self.where = where
        self.text = text
        self.span = span

    def at(self, where: str) -> Self:
        """Put an outer place in front of the place already known; returns the error itself."""
        self.where = f"{where}, {self.where}" if self.where else where
        return self

    def marked(self) -> str:
        """Return the text as typed with a caret under the offending part, or nothing."""
        if not self.text:
            return ""
        if self.span is None:
            return f"    {self.text}"
        start, end = self.span
        line_start = self.text.rfind("\n", 0, start) + 1
        line = self.text[line_start:].split("\n", 1)[0]
        start, end = start - line_start, min(end - line_start, len(line))
        return f"    {line}\n    {' ' * start}{'^' * max(1, end - start)}"

    def __str__(self) -> str:
        """Return place, what is wrong, the text with its caret, and what would be right."""
        first = f"{self.where}: {self.what}" if self.where else self.what
        return "\n".join(part for part in (first, self.marked(), self.hint) if part)

    def _render_traceback_(self) -> list[str]:
        """Return what a notebook shows: the line of the cell and the message, not our frames."""
        ours = str(Path(__file__).parent)
        frames = traceback.extract_tb(self.__traceback__)
        theirs = [f for f in frames if not f.filename.startswith(ours)]
        place = [f"line {theirs[-1].lineno}: {theirs[-1].line}"] if theirs else []
        return [*place, f"{type(self).__name__}: {self}"]

    def __reduce__(self) -> tuple[object, ...]:
        """Keep every part when an error crosses a process."""
        return _rebuild, (type(self), self.what, self.hint, self.where, self.text, self.span)


def _rebuild(  # noqa: PLR0917  called by pickle, which knows no keywords
    kind: type[CalcbookError],
    what: str,
    hint: str,
    where: str,
    text: str,
    span: tuple[int, int] | None,
) -> CalcbookError:
    return kind(what, hint=hint, where=where, text=text, span=span)


class QuantityError(CalcbookError, ValueError):
    """A typed number or unit that cannot be read."""


class FormulaError(CalcbookError, ValueError):
    """A formula that cannot be read."""


class DimensionError(FormulaError):
    """A formula whose units do not agree."""


class DeclarationError(CalcbookError, ValueError):
    """A workbook that declares something it may not."""


class ReadingError(DeclarationError, TypeError):
    """Notebook code that reads a value instead of declaring what to do with it."""


class InputError(CalcbookError, ValueError):
    """An entry, choice or row that is refused."""


class CodeSetError(CalcbookError, LookupError):
    """A code set, clause or table that is not there."""


class RecordError(CalcbookError, ValueError):
    """A record that cannot be read or written."""


class RecordChangedError(RecordError):
    """A record that was changed on disk since it was read."""


class JobError(CalcbookError, ValueError):
    """A job folder that is missing, taken or wrong."""


class CarryError(JobError):
    """A value that cannot be carried from one workbook to another."""


class StaticsError(CalcbookError, ValueError):
    """A beam or truss that cannot stand, or a load it cannot carry.

    Attributes
    ----------
    named
        The labels of what is wrong: joints, members, supports, spans.
    """

    def __init__(self, what: str, *, hint: str = "", named: Iterable[str] = ()) -> None:
        super().__init__(what, hint=hint)
        self.named = tuple(named)


class PackError(CalcbookError, RuntimeError):
    """A calculation package that cannot be made."""


class UsageError(CalcbookError, ValueError):
    """A command that cannot be understood."""


def near_match(name: str, known: Iterable[str]) -> str:
    """Return ``did you mean 'x'?`` for the nearest of the known names, or nothing.

    A name that differs in capitals only is nearer than any other.
    """
    known = list(known)
    alike = [candidate for candidate in known if candidate.casefold() == name.casefold()]
    found = alike or difflib.get_close_matches(name, known, n=1, cutoff=0.6)
    return f"did you mean '{found[0]}'?" if found else ""
