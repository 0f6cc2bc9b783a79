"""The outputs saved in a job's notebooks: dead views taken out, and what has moved on said.

Before JupyterLab starts no kernel of the job lives, so a view saved in a notebook shows nothing.
An output carries the fingerprint of what it shows; where the record gives another one by now, the
notebook's first section says so until it is run again.
"""

from __future__ import annotations

import json
import re
from typing import TYPE_CHECKING, Any

from calcbook.diskfile import in_plain_words, read_bytes, write_whole
from calcbook.errors import JobError
from calcbook.fingerprint import fingerprint

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping
    from pathlib import Path

    from calcbook.job import Job
    from calcbook.run import Runner
    from calcbook.workbook import Workbook

VIEW = "application/vnd.jupyter.widget-view+json"
TEXTS = ("text/markdown", "text/plain")
_SHOWN_DIGITS = 12
_SAID = re.compile(
    r"\A(\*\*)?These outputs show fingerprint [0-9a-f]+; the record has moved on since: "
    r"run all cells\.(\*\*)?\n\n"
)
Cell = dict[str, Any]


class SavedOutputs:
    """The saved outputs of one notebook.

    Parameters
    ----------
    path
        The notebook.

    Raises
    ------
    JobError
        It cannot be read as a notebook.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        with in_plain_words(path, JobError):
            data = read_bytes(path)
        try:
            self._content: dict[str, Any] = json.loads(data or b"")
            self._cells: list[Cell] = [c for c in self._content["cells"] if c.get("outputs")]
        except (ValueError, KeyError, TypeError, AttributeError) as error:
            raise JobError("this is no notebook", where=path.name) from error
        self._before = json.dumps(self._content)

    def marks(self) -> set[str | None]:
        """Return the fillings whose values are shown."""
        return {stamp["mark"] for _, stamp in self._stamped()}

    def moved_on(self, books: Mapping[str | None, Workbook]) -> str:
        """Return the fingerprint of the first output that its filling no longer gives, or ''.

        ``books`` are the evaluated workbooks of all marks there are.
        """
        for _, stamp in self._stamped():
            book = books.get(stamp["mark"])
            if book is None or stamp["fingerprint"] not in _fingerprints(book, stamp["section"]):
                return str(stamp["fingerprint"])
        return ""

    def drop_views(self) -> None:
        """Take out the views of kernels that are gone."""
        for cell in self._cells:
            kept = []
            for output in cell["outputs"]:
                data = output.get("data", {})
                alone = list(data) == [VIEW]
                data.pop(VIEW, None)
                if not alone:
                    kept.append(output)
            cell["outputs"] = kept

    def say_moved(self, shown: str) -> None:
        """Let the first section say that what is shown has moved on, or say it no longer ('')."""
        for first, (output, _) in enumerate(self._stamped()):
            data = output["data"]
            for kind in (kind for kind in TEXTS if kind in data):
                whole = data[kind] if isinstance(data[kind], str) else "".join(data[kind])
                text = _SAID.sub("", whole)
                if shown and not first:
                    strong = "**" if kind == "text/markdown" else ""
                    text = f"{strong}{moved_words(shown)}{strong}\n\n{text}"
                if text != whole:
                    lines = text.splitlines(keepends=True)
                    data[kind] = text if isinstance(data[kind], str) else lines

    def save(self) -> None:
        """Write the notebook, if anything of it was changed; nothing else in it is touched.

        Raises JobError where it cannot be written.
        """
        if json.dumps(self._content) == self._before:
            return
        text = json.dumps(self._content, indent=1, ensure_ascii=False) + "\n"
        with in_plain_words(self.path, JobError):
            write_whole(self.path, text.encode())

    def _stamped(self) -> Iterator[tuple[Cell, dict[str, Any]]]:
        """Yield every output that carries a fingerprint, with what it carries."""
        for cell in self._cells:
            for output in cell["outputs"]:
                stamp = output.get("metadata", {}).get("calcbook")
                if isinstance(stamp, dict) and {"fingerprint", "mark", "section"} <= set(stamp):
                    yield output, stamp


def moved_on(outputs: SavedOutputs, job: Job, runner: Runner, workbook: str) -> str:
    """Return the fingerprint saved outputs show that the job no longer gives, or ''.

    Raises CalcbookError where the workbook cannot be run.
    """
    books = {}
    for mark in outputs.marks():
        if (workbook, mark) in job.fillings():
            runner.statement(workbook, mark)
            books[mark] = runner.books[workbook, mark][0]
    return outputs.moved_on(books)


def moved_words(shown: str) -> str:
    """Return what is said of outputs that show something else than the record gives."""
    return (f"These outputs show fingerprint {shown[:_SHOWN_DIGITS]}; "
            "the record has moved on since: run all cells.")  # fmt: skip


def _fingerprints(book: Workbook, section: str) -> Iterator[str]:
    """Yield what an output of a section may carry: a fresh run knows no section after it yet."""
    yield fingerprint(book)
    part = book.up_to(section)
    part.evaluate()
    yield fingerprint(part)
