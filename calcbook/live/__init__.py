"""What is seen in JupyterLab: sections as pages of calculation whose entries can be typed in."""

from __future__ import annotations

import atexit
from typing import TYPE_CHECKING, Any

from calcbook.job import Job
from calcbook.live import notebook
from calcbook.live.session import Session

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.workbook import Workbook

__all__ = ["Session", "open_live"]

_SESSIONS: dict[str, Session] = {}
_BARS: dict[str, Any] = {}


def open_live(name: str, title: str, signs: Mapping[str, str] | None = None) -> Workbook:
    """Open a workbook for a person in a notebook; its sections are shown as they are declared.

    Opening it again, as running all cells does, starts a fresh session. What was typed outside a
    job or could not be written, and what can be undone, goes on in it.

    Raises
    ------
    JobError
        The job is broken, or another notebook of it claims the record.
    RecordError
        The record cannot be read.
    """
    former = _SESSIONS.get(name)
    if former is not None:
        former.settle()
    session = Session(name, title, signs, job=Job.find(), former=former)
    if former is not None:
        session.retired = former.retired | former.views
        former.retire()
    if not _SESSIONS:
        notebook.watch(_cell_started)
        atexit.register(_settle)
    _SESSIONS[name] = session
    if notebook.has_widgets():
        _show_bar(session)
    return session.book


def _show_bar(session: Session) -> None:
    from calcbook.live.bar import Bar, shown  # noqa: PLC0415  widgets only where shown

    name = session.book.name
    if name in _BARS:
        _BARS.pop(name).close()
    bar = Bar(session)
    session.bar = bar
    _BARS[name] = shown(bar)
    notebook.publish_widget(_BARS[name].model_id)


def _cell_started() -> None:
    for session in _SESSIONS.values():
        session.begin_cell()


def _settle() -> None:
    """Write what is still to be written when the kernel is shut down."""
    for session in _SESSIONS.values():
        session.settle()
