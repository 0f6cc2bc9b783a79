"""Where a carried value is changed: the entry it is, or the entries it is computed from."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.items import Carry, Choice, Entry, Line, Schedule, Text
from calcbook.run import carries

if TYPE_CHECKING:
    from collections.abc import Iterable

    from calcbook.bind import Bound
    from calcbook.run import Runner
    from calcbook.workbook import Workbook


def owner_hint(runner: Runner, origin: str) -> str:
    """Return where to change what is carried from ``workbook.name``.

    '' for no origin, or one in a workbook the job does not have: there a value may be typed.
    """
    workbook, _, name = origin.partition(".")
    if runner.job is None or workbook not in runner.job.workbooks:
        return ""
    runner.statement(workbook)
    book, _ = runner.books[workbook, None]
    further = carries(book).get(name, "")
    if further:
        return owner_hint(runner, further) or f"change it there: {_command(book, name)}"
    bound = book.scope.get(name)
    if bound is None or not isinstance(bound.item, Line):
        return f"change it there: {_command(book, name)}"
    sources = list(dict.fromkeys(_sources(book, bound)))
    if not sources:
        return "it is computed there, and from no entry"
    sources.sort(key=lambda source: _is_schedule(book, source))
    *more, last = [f"the rows of {s}" if _is_schedule(book, s) else s for s in sources]
    told = f"{', '.join(more)} and {last}" if more else last
    return f"it is computed there from {told}: {_command(book, sources[0])}"


def _sources(book: Workbook, line: Bound) -> Iterable[str]:
    """Yield the entries and the schedules with rows that a line is computed from, nearest first."""
    waiting, seen = list(line.needs), set(line.needs)
    for name in waiting:
        bound = book.scope.get(name)
        if bound is None:
            continue
        if isinstance(bound.item, (Entry, Choice, Text, Carry)):
            yield bound.schedule.name if bound.schedule is not None else name
        new = [need for need in bound.needs if need not in seen]
        seen.update(new)
        waiting += new


def _command(book: Workbook, name: str) -> str:
    if _is_schedule(book, name):
        return f"calcbook set {book.name} --rows {name}=FILE.csv"
    return f"calcbook set {book.name} {name}=VALUE"


def _is_schedule(book: Workbook, name: str) -> bool:
    return any(isinstance(item, Schedule) and item.name == name for item in book.items())
