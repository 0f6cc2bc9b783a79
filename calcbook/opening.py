"""Opening a workbook from a notebook, whether a person or the runner runs it."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.workbook import Workbook


def open_workbook(
    name: str, title: str, *, signs: Mapping[str, str] | None = None, marks: bool = False
) -> Workbook:
    """Open the workbook a notebook declares; called in its first code cell.

    Parameters
    ----------
    name
        The identity of the workbook: its record is named after it, and other workbooks carry
        its results by it. A template's name is that of its file.
    title
        The heading on paper.
    signs
        The sign conventions: what is positive, by quantity.
    marks
        The workbook is meant for several fillings, one for each mark of the drawings.

    Raises
    ------
    JobError
        Another notebook of the job claims the same record.
    RecordError
        The record cannot be read.
    """
    from calcbook import run  # noqa: PLC0415  importing calcbook stays light

    opening = run.opening()
    if opening is not None:
        book = opening.open(name, title, signs)
    else:
        from calcbook.live import open_live  # noqa: PLC0415  widgets are needed in Jupyter only

        book = open_live(name, title, signs)
    book.has_marks = marks
    return book
