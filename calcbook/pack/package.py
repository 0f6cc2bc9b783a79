"""The pack of a job, or of one notebook: run everything, take what is carried, print."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.errors import CarryError
from calcbook.figures import draw
from calcbook.job import BASIS, Job
from calcbook.pack.compile import make_pack
from calcbook.pack.cover import Cover
from calcbook.record import CarriedRecord, update
from calcbook.run import Filling, Runner, all_items, carries, find_item, item_digest

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from pathlib import Path

    from calcbook.record import Record
    from calcbook.workbook import Workbook

Statement = dict[str, Any]


def pack_job(
    job: Job, progress: Callable[[str], None] | None = None
) -> tuple[bytes, list[Statement]]:
    """Return the calculation package of a job and the statements it was made from.

    Every workbook is run from its first cell, in the order of the carries, and what it carries is
    taken as it is now and noted in its record.

    Raises
    ------
    CalcbookError
        A workbook stops, the carries go in a circle, or the pages cannot be printed.
    """
    runner = Runner(job, progress)
    wanted = job.fillings()
    for workbook, mark in wanted:
        runner.statement(workbook, mark)
    _take(runner)
    fresh = Runner(job)
    fresh.books = {
        key: found for key, found in runner.books.items() if not found[1]["counts"]["stale"]
    }
    statements = [fresh.statement(workbook, mark) for workbook, mark in wanted]
    if progress is not None:
        progress("pages")
    return make_pack(cover_of(fresh, job), statements, draw), statements


def pack_notebook(path: Path) -> bytes:
    """Return the calculation package of one notebook, inside its job or alone.

    Raises CalcbookError when the notebook stops or its pages cannot be printed.
    """
    job = Job.find(path.resolve().parent)
    if job is not None and path.stem not in job.workbooks:
        job = None
    runner = Runner(job)
    _, statement = runner.run(Filling(path))
    title = f"Calculation: {statement['title']}"
    return make_pack(cover_of(runner, job), [statement], draw, title=title)


def cover_of(runner: Runner, job: Job | None) -> Cover:
    """Return what the cover says, from the entries of the design basis."""
    basis: Mapping[str, Any] = {"parts": []}
    if job is not None and BASIS in job.workbooks:
        basis = runner.statement(BASIS)
    elif (BASIS, None) in runner.books:
        basis = runner.books[BASIS, None][1]
    words = {str(i["name"]): str(i["text"]) for i in all_items(basis) if i["kind"] == "text"}
    return Cover(
        job=words.get("job_name") or "job without a name",
        number=words.get("job_number", ""),
        place=words.get("place", ""),
        revision=words.get("revision", ""),
        issue_date=words.get("issue_date", ""),
        prepared=words.get("prepared_by", ""),
        checked=words.get("checked_by", ""),
    )


def _take(runner: Runner) -> None:
    """Note in each record what the workbook carries now, where that is not noted already."""
    for (workbook, mark), (book, _) in list(runner.books.items()):
        now = _carried_now(runner, book)
        if runner.job is None or not now:
            continue
        record = runner.job.record(workbook, mark)
        known = {o: c.fingerprint for o, c in record.carried.items()}
        if known == {o: c.fingerprint for o, c in now.items()}:
            continue

        def note(found: Record, now: dict[str, CarriedRecord] = now) -> None:
            gone = dict.fromkeys(set(found.carried) - set(now))
            found.change(carried=gone | now)

        update(record.path, workbook, mark, note)


def _carried_now(runner: Runner, book: Workbook) -> dict[str, CarriedRecord]:
    now = {}
    for origin in dict.fromkeys(carries(book).values()):
        workbook, _, name = origin.partition(".")
        if runner.job is None or workbook not in runner.job.workbooks:
            continue
        item = find_item(runner.statement(workbook), name)
        if item is None:
            raise CarryError(f"{workbook} has no result '{name}'", where=book.name)
        now[origin] = _taken(origin, item)
    return now


def _taken(origin: str, item: Mapping[str, Any]) -> CarriedRecord:
    value = item.get("value") or {}
    text = f"{value.get('text', '')} {value.get('unit', '')}".strip()
    rows = f"{len(item['rows'])} rows" if "rows" in item else ""
    return CarriedRecord(
        value=text or str(item.get("option") or item.get("text") or rows),
        si=value.get("si"), option=str(item.get("option") or ""), origin=origin,
        sign=str(item.get("sign") or ""), fingerprint=item_digest(item),
    )  # fmt: skip
