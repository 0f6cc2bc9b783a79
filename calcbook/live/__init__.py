"""What is seen in JupyterLab: sections as pages of calculation whose entries can be typed in."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.job import Job
from calcbook.live import notebook
from calcbook.live.session import Session

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.workbook import Workbook

__all__ = ["Session", "open_live"]

_SESSIONS: dict[str, Session] = {}


def open_live(name: str, title: str, signs: Mapping[str, str] | None = None) -> Workbook:
    """Open a workbook for a person in a notebook; its sections are shown as they are declared.

    Opening it again, as running all cells does, starts a fresh session. Outside a job the record
    in memory goes on, so that what was typed is not lost.

    Raises
    ------
    JobError
        The job is broken, or another notebook of it claims the record.
    RecordError
        The record cannot be read.
    """
    former = _SESSIONS.get(name)
    job = Job.find()
    kept = former.record if former is not None and job is None and former.job is None else None
    session = Session(name, title, signs, job=job, record=kept)
    if former is not None:
        former.retire()
    if not _SESSIONS:
        notebook.watch(_cell_started)
    _SESSIONS[name] = session
    return session.book


def _cell_started() -> None:
    for session in _SESSIONS.values():
        session.begin_cell()
