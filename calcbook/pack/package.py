"""The pack of a job, or of one notebook: run everything, take what is carried, print."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.errors import CarryError
from calcbook.figures import draw
from calcbook.job import BASIS, Job
from calcbook.pack.compile import make_pack
from calcbook.pack.cover import Cover
from calcbook.record import update
from calcbook.run import Filling, Runner, all_items, carries
from calcbook.taking import taken_now

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping
    from pathlib import Path

    from calcbook.record import CarriedRecord, Record
    from calcbook.workbook import Workbook

Statement = dict[str, Any]
Taken = dict[str, "CarriedRecord"]
Holder = tuple[str, str | None]


@dataclass(frozen=True)
class Packed:
    """A calculation package: the PDF, its statements, and which carried values moved on.

    ``moved`` says one of them in a text: 'wind-pressure h: 15.6 m -> 16.0 m'.
    """

    pdf: bytes
    statements: tuple[Statement, ...]
    moved: tuple[str, ...]


def pack_job(
    job: Job,
    progress: Callable[[str], None] | None = None,
    save: Callable[[bytes], None] | None = None,
) -> Packed:
    """Return the calculation package of a job.

    Every workbook is run from its first cell, in the order of the carries, with what it carries
    as it is now. Only when the pages are made, and ``save`` has kept them, is that noted in the
    records as taken: a package that cannot be made leaves the job as it was.

    Raises
    ------
    CalcbookError
        A workbook stops, the carries go in a circle, the pages cannot be printed, or ``save``
        raises it.
    """
    runner = Runner(job, progress, forget_taken=True)
    statements = [runner.statement(workbook, mark) for workbook, mark in job.fillings()]
    now = {
        (workbook, mark): _carried_now(runner, book)
        for (workbook, mark), (book, _) in list(runner.books.items())
    }
    if progress is not None:
        progress("pages")
    pdf = make_pack(cover_of(runner, job), statements, draw)
    if save is not None:
        save(pdf)
    return Packed(pdf, tuple(statements), tuple(_note_taken(job, runner, now)))


def pack_notebook(path: Path) -> bytes:
    """Return the calculation package of one notebook, inside its job or alone.

    Raises CalcbookError when the notebook stops or its pages cannot be printed.
    """
    job = Job.find(path.resolve().parent)
    if job is not None and path.stem not in job.workbooks:
        job = None
    return pack_filling(job, Filling(path)).pdf


def pack_filling(
    job: Job | None, filling: Filling, progress: Callable[[str], None] | None = None
) -> Packed:
    """Return the pages of one filling of a workbook; nothing is noted as taken.

    Raises CalcbookError as ``pack_job`` does.
    """
    runner = Runner(job, progress)
    _, statement = runner.run(filling)
    cover = cover_of(runner, job)
    if progress is not None:
        progress("pages")
    pdf = make_pack(cover, [statement], draw, title=f"Calculation: {statement['title']}")
    return Packed(pdf, (statement,), ())


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


def _note_taken(job: Job, runner: Runner, now: Mapping[Holder, Taken]) -> Iterator[str]:
    """Note in each record what its workbook carries now; yields what had moved on."""
    for (workbook, mark), taken in now.items():
        record = job.record(workbook, mark)
        former = record.carried
        if {o: c.fingerprint for o, c in former.items()} == {
            o: c.fingerprint for o, c in taken.items()
        }:
            continue
        here = {origin: name for name, origin in carries(runner.books[workbook, mark][0]).items()}
        holder = f"{workbook}:{mark}" if mark else workbook
        moved = [
            f"{holder} {here[origin]}: {_change(former[origin].value, found.value)}"
            for origin, found in taken.items()
            if origin in former and former[origin].fingerprint != found.fingerprint
        ]

        def note(found: Record, taken: Taken = taken) -> None:
            gone = dict.fromkeys(set(found.carried) - set(taken))
            found.change(carried=gone | taken)

        update(record.path, workbook, mark, note)
        yield from moved


def _change(was: str, now: str) -> str:
    if was != now:
        return f"{was} -> {now}"
    # a schedule is noted by the number of its rows
    return (
        f"{now}, changed"
        if now.endswith(("row", "rows"))
        else (f"{now}, moved by less than is shown")
    )


def _carried_now(runner: Runner, book: Workbook) -> Taken:
    """Return what a workbook carries as it is now; CarryError when its source has no such item."""
    now = {}
    for origin in dict.fromkeys(carries(book).values()):
        workbook, _, name = origin.partition(".")
        if runner.job is None or workbook not in runner.job.workbooks:
            continue
        found = runner.carried(origin, {}, book.inputs)
        if found is None or found.item is None:
            raise CarryError(f"{workbook} has no result '{name}'", where=book.name)
        now[origin] = taken_now(origin, found.item)
    return now
