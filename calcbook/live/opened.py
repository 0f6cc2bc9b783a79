"""A workbook opened in a kernel: its record, what it computes, and the views that show it."""

from __future__ import annotations

import base64
import logging
from pathlib import Path
from typing import TYPE_CHECKING, Any, Protocol, cast

from calcbook.errors import CalcbookError, InputError
from calcbook.job import BASIS, JOB_NUMBER, Job
from calcbook.live import notebook, output
from calcbook.live.history import History
from calcbook.live.pace import Paced, loop
from calcbook.live.signing import PREPARED_BY, Signer
from calcbook.live.writing import Kept
from calcbook.record import Record
from calcbook.run import Filling, Runner, open_book

if TYPE_CHECKING:
    import asyncio
    from collections.abc import Mapping

    from calcbook.live.merging import Items
    from calcbook.live.session import Session
    from calcbook.live.view import SectionView
    from calcbook.section import Section

    Plain = Mapping[str, Any]

REOPENED = "The workbook was opened again; run this cell again."
PAINT_SECONDS = 0.05
TELL_SECONDS = 0.06
WRITE_SECONDS = 0.15
LOOK_SECONDS = 1.0
_log = logging.getLogger(__name__)


class Watcher(Protocol):
    """What is shown beside the sections: the bar."""

    def show(self, statement: Plain) -> None:
        """Bring it up to date with a statement."""


class Opened:
    """A workbook opened for a person, without what changes it.

    Parameters
    ----------
    name, title, signs
        As given to ``open_workbook``.
    job
        The job of the notebook, or None: then a record in memory serves.
    mark
        The filling to open, of a workbook with marks.
    former
        The session this one takes over from, with what it holds in memory.
    """

    def __init__(
        self, name: str, title: str, signs: Mapping[str, str] | None, *,
        job: Job | None, mark: str | None, former: Opened | None,
    ) -> None:  # fmt: skip
        self.job = job
        self.mark = mark
        self.marks = job.marks(name) if job is not None else ()
        self._name = name
        self._kept: dict[str | None, Kept] = {}
        self.history = History()
        if former is not None:
            self._kept, self.history = former._kept, former.history  # noqa: SLF001  of its class
        self.kept = self._keep(mark)
        self.filling = Filling(notebook.path(name), self.mark, record=self.record)
        self.runner = Runner(job)
        self.book = open_book(self.runner, self.filling, name, title, signs)
        self.book.on_show = self.show
        self.book.cell = notebook.running()[0]
        self.views: dict[str, SectionView] = {}
        self.retired: dict[str, SectionView] = {}  # of the session before; their cells are to run
        self.bar: Watcher | None = None
        self.statement: Plain = {}
        self.notice = ""
        self._typed: dict[tuple[str, str], set[str]] = {}  # columns typed, by schedule and row
        self._cells: set[str] = set()
        self._stamps = self._outside()
        self._basis: tuple[object, dict[str, str]] = (None, {})
        self._painting = Paced(self._paint, PAINT_SECONDS)
        self._telling = Paced(self._tell, PAINT_SECONDS, first=TELL_SECONDS)
        self._writing = Paced(self._write, WRITE_SECONDS, first=0.0)
        self._looking: asyncio.TimerHandle | None = None

    def _keep(self, mark: str | None) -> Kept:
        """Return the record of a mark: the one that is open already, else read."""
        if mark not in self._kept:
            filed = self.job is not None
            record = (
                self.job.record(self._name, mark)
                if self.job is not None
                else Record(Path(f"{self._name}.toml"), self._name)
            )
            self._kept[mark] = Kept(record, filed=filed)
        return self._kept[mark]

    @property
    def record(self) -> Record:
        """The record of the mark that is open, in memory."""
        return self.kept.record

    # --- showing ----------------------------------------------------------------------------

    def show(self, section: Section) -> None:
        """Show a section that was declared: a view where widgets are, and its stable output.

        The output carries the fingerprint of what it shows in its metadata.
        """
        self._evaluate()
        plain = self.section(section.title)
        first = self.mark is not None and section is self.book.sections[0]
        lead = f"Mark {self.mark}\n\n" if first else ""
        bundle: dict[str, Any] = {
            "text/markdown": lead + output.markdown(self.statement, plain),
            "text/plain": lead + output.plain(self.statement, plain),
        }
        picture = output.picture(self.statement, plain)
        if picture is not None:
            bundle["image/png"] = base64.b64encode(picture).decode("ascii")
        if notebook.has_widgets():
            model = self.view(section.title).box.model_id
            bundle[notebook.WIDGET] = notebook.widget_view(model)
        notebook.publish(bundle, notebook.stamp(self.statement, section.title))

    def view(self, title: str) -> SectionView:
        """Make the view of a section, in place of the one it had, which is closed."""
        from calcbook.live.view import SectionView  # noqa: PLC0415  widgets only where shown

        if not self.statement or self.section(title, {}) == {}:
            self._evaluate()
        for views in (self.views, self.retired):
            if title in views:
                views.pop(title).close()
        view = SectionView(cast("Session", self), title)
        self.views[title] = view
        view.show(self.statement, self.section(title))
        self.refresh(evaluate=False)
        self._look_later()
        return view

    def section(self, title: str, missing: Plain | None = None) -> Plain:
        """Return a section of the last statement."""
        found: Plain | None = next(
            (p for p in self.statement["parts"] if p.get("title") == title), missing
        )
        if found is None:
            raise InputError(f"there is no section '{title}'", where=self.book.name)
        return found

    def refresh(self, *, evaluate: bool = True) -> None:
        """Compute everything at once, and bring the bar and every section shown up to date.

        In a kernel what is shown follows at most every ``PAINT_SECONDS``, the last state always.
        """
        if evaluate:
            self._evaluate()
        self._painting()

    def _paint(self) -> None:
        if not self.statement:
            return
        known = {p["title"] for p in self.statement["parts"] if p["kind"] == "section"}
        self.views = {t: v for t, v in self.views.items() if t in known}
        for title, view in self.views.items():
            view.show(self.statement, self.section(title))
        self._telling()

    def _tell(self) -> None:
        """Bring the bar up to date; in a kernel a little later, so that the lines come first."""
        if self.bar is not None and self.statement:
            self.bar.show(self.statement)

    def retire(self) -> None:
        """Write what is not on disk yet, say in every view that it is out of use, and stop."""
        self.settle()
        self._painting.drop()
        self._telling.drop()
        if self._looking is not None:
            self._looking.cancel()
            self._looking = None
        for view in self.views.values():
            view.retire(REOPENED)
        self.views, self.bar = {}, None

    def begin_cell(self) -> None:
        """Note the cell that starts to run, and those deleted before it."""
        cell, deleted = notebook.running()
        self.book.cell = cell
        self._cells = (self._cells | {cell}) - set(deleted) - {""}
        if deleted:
            self.book.mark_left_over(self._cells)

    # --- computing --------------------------------------------------------------------------

    def _evaluate(self) -> None:
        try:
            self._look_around()
        except CalcbookError as error:
            self.notice = f"The job cannot be read: {error}"
        self.statement = self.book.statement()

    def _look_around(self) -> bool:
        """Take in what changed in the job apart from this record; returns whether any did."""
        stamps = self._outside()
        if self.job is None or stamps == self._stamps:
            return False
        self.job = Job.load(self.job.folder)
        self.marks = self.job.marks(self._name)
        self.runner = Runner(self.job)
        self._stamps = stamps
        self._read_inputs()
        return True

    def _read_inputs(self) -> None:
        self.book.inputs = self.runner.inputs(self.book.name, self.filling)

    def _compute(self) -> None:
        """Compute what the record in memory says; a workbook that cannot be is told about."""
        try:
            self._read_inputs()
            self._evaluate()
        except CalcbookError as error:
            self.notice = f"What is shown is not up to date, it cannot be computed: {error}"
        self.refresh(evaluate=False)

    def _outside(self) -> dict[str, tuple[int, int]]:
        """Return what tells whether another workbook of the job was changed.

        Of this one's records it is only told which there are.
        """
        if self.job is None:
            return {}
        files = [f for kind in ("*.toml", "*.ipynb") for f in self.job.folder.glob(kind)]
        found = {}
        for file in sorted(files):
            if file.name in {self.filling.notebook.name, f"{self._name}.toml"}:
                continue
            own = file.name.startswith(f"{self._name}.")
            try:
                state = file.stat()
            except FileNotFoundError:
                continue  # taken away since it was listed
            found[file.name] = (0, 0) if own else (state.st_mtime_ns, state.st_size)
        return found

    def signer(self, entering: tuple[str, str] = ("", "")) -> Signer:
        """Return who confirms; ``entering`` is what is being typed into the design basis now."""
        if self.job is None:
            return Signer("", "")
        if self._name == BASIS:
            found = {n: e.value for n, e in self.record.entries.items()} | dict([entering])
        else:
            found = self._basis_entries()
        return Signer(found.get(JOB_NUMBER, ""), found.get(PREPARED_BY, ""))

    def _basis_entries(self) -> dict[str, str]:
        """Return the entries of the design basis; its file is read when it has changed."""
        assert self.job is not None  # noqa: S101  asked before
        path = self.job.record_path(BASIS)
        stamp = path.stat().st_mtime_ns if path.exists() else 0
        if self._basis[0] != stamp:
            entries = self.job.record(BASIS).entries
            self._basis = (stamp, {name: entry.value for name, entry in entries.items()})
        return self._basis[1]

    @property
    def unsigned(self) -> str:
        """That typing confirms nothing yet, and what is missing, or ''."""
        return "" if self.job is None else self.signer().missing()

    # --- the disk ---------------------------------------------------------------------------

    @property
    def unwritten(self) -> str:
        """What is not on disk and why, in words, or ''."""
        return " ".join(told for kept in self._kept.values() if (told := kept.unwritten()))

    def settle(self) -> None:
        """Write what is waiting to be written; what cannot be stays in ``unwritten``."""
        self._writing.drop()
        for kept in self._kept.values():
            if kept.filed and kept.missing():
                self._note_incoming(kept, kept.write())

    def write_again(self) -> None:
        """Try again to write what is not on disk."""
        for kept in self._kept.values():
            if kept.trouble or kept.missing():
                self._note_incoming(kept, kept.write())
        self._compute()

    def look(self) -> None:
        """Take in what others changed on disk: this record, its marks, the rest of the job."""
        told = self.unwritten
        incoming = self.kept.look()
        self._note_incoming(self.kept, incoming)
        try:
            around = self._look_around()
        except CalcbookError as error:
            self.notice = f"The job cannot be read: {error}"
            around = True
        if not self.kept.trouble and self.kept.missing():
            self._writing()  # the file can be read again, or does not say yet what I changed
        if incoming or around:
            self._compute()
        elif told != self.unwritten or self.kept.held:
            self.refresh(evaluate=False)

    def _write(self) -> None:
        told, held = self.unwritten, dict(self.kept.held)
        incoming = self.kept.write()
        self._note_incoming(self.kept, incoming)
        for kept in self._kept.values():
            if kept is not self.kept and kept.trouble:
                self._note_incoming(kept, kept.write())
        if incoming:
            self._compute()
        elif (told, held) != (self.unwritten, self.kept.held):
            self.refresh(evaluate=False)

    def _note_incoming(self, kept: Kept, incoming: Items) -> None:
        """Say what others changed; that a pack was made concerns nobody."""
        names = [name for kind, name in incoming if kind != "carried"]
        if names:
            self.notice = (f"{kept.path.name} was changed elsewhere meanwhile and has been read "
                           f"again: {', '.join(names)}.")  # fmt: skip

    def _look_later(self) -> None:
        """Look about once a second, as long as the kernel runs and this session is in use."""
        running = loop()
        if running is not None and self._looking is None and self.job is not None:
            self._looking = running.call_later(LOOK_SECONDS, self._look_now)

    def _look_now(self) -> None:
        self._looking = None
        try:
            self.look()
        except Exception:  # noqa: BLE001  the next look may find all well
            _log.error("looking at the job of %s", self._name, exc_info=True)
        if self.views or self.bar is not None:
            self._look_later()
