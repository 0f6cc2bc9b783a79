"""The bar of a workbook: marks, what calls for action, undo, the PDF, and what is asked."""

from __future__ import annotations

import asyncio
import logging
from pathlib import Path
from typing import TYPE_CHECKING, Any

from calcbook.errors import CalcbookError
from calcbook.live import overview, printing, study
from calcbook.live.session import NO_JOB, refusal

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.live.session import Session

    Plain = Mapping[str, Any]

_log = logging.getLogger(__name__)


class Bar:
    """What stands at the top of a workbook, as plain data, and what its buttons do.

    Parameters
    ----------
    session
        The opened workbook.

    Attributes
    ----------
    state
        What is shown; a dictionary of texts and lists that ``bar.js`` draws.
    """

    def __init__(self, session: Session) -> None:
        self.session = session
        self.told = ""
        self.printing = printing.Printing()
        self.study: dict[str, Any] = {"open": False}
        self.state: dict[str, Any] = {}
        self.changed: Callable[[dict[str, Any]], None] = lambda _state: None
        self.send_file: Callable[[str, bytes], None] = lambda _name, _pdf: None
        self._work: asyncio.Task[None] | None = None

    def show(self, statement: Plain) -> None:
        """Bring the bar up to date with a statement; before there is one it shows the title."""
        session = self.session
        if not statement:
            self.state = {"title": session.book.title}
            return
        self.state = {
            "title": statement["title"],
            "mark": self._marks(),
            "counts": [*overview.counts(statement), overview.refused(session.views)],
            "undo": session.undo_words,
            "redo": session.redo_words,
            "notices": [t for t in (self._standing(), session.notice) if t],
            "unwritten": session.unwritten,
            "asks": session.asks,
            "told": self.told,
            "printing": self._printing(),
            "study": self._study(),
        }
        self.changed(self.state)

    def _marks(self) -> dict[str, Any] | None:
        session = self.session
        if not session.takes_marks:
            return None
        return {"current": session.mark or "", "all": list(session.marks)}

    def _standing(self) -> str:
        return NO_JOB if self.session.job is None else self.session.unsigned

    def _printing(self) -> dict[str, Any]:
        why_not = NO_JOB if self.session.job is None else ""
        work = self.printing
        return {"doing": work.doing, "told": work.told, "failed": work.failed, "why_not": why_not}

    def _study(self) -> dict[str, Any]:
        """Return the study panel; what was found goes when the values it was found for change."""
        kept = self.study
        if not kept["open"]:
            return {"open": False}
        if kept.get("fingerprint") != self.session.statement["fingerprint"]:
            kept.pop("sensitivity", None)
            kept.pop("needed", None)
        return kept | study.choices(self.session.book, str(kept.get("result", "")))

    def act(self, message: Plain) -> None:
        """Do what a button asks for; what is refused is said in the bar, and nothing is lost."""
        self.told = ""
        try:
            self._do(message)
        except CalcbookError as error:
            self.told = f"Not done: {refusal(error)}"
        except Exception as error:  # noqa: BLE001  shown in the bar, never lost
            _log.exception("bar of %s", self.session.book.name)
            self.told = f"Not done: {type(error).__name__}: {error}"
        self.show(self.session.statement)

    def _do(self, message: Plain) -> None:
        act = _ACTS.get(str(message.get("do")))
        if act is None:
            self.told = f"Not done: the bar does not know {message.get('do')}"
        else:
            act(self, message)

    def use(self, entry: str, text: str) -> None:
        """Put a value that was found into force, to be confirmed."""
        self.session.step(entry, text)

    def open_study(self, *, on: bool, result: str = "") -> None:
        """Open or close the panel of studies, for a result."""
        self.study = {"open": on, "result": result}

    def find_sensitivity(self, result: str) -> None:
        """Find what a result depends on."""
        self._keep(result, sensitivity=study.sensitivity(self.session.book, result))

    def find_needed(self, result: str, entry: str, target: str) -> None:
        """Find the value of an entry that gives a result its target."""
        found = study.needed(self.session.book, result, entry, target)
        self._keep(result, needed=found, entry=entry, target=target)

    def _keep(self, result: str, **found: object) -> None:
        fingerprint = self.session.statement["fingerprint"]
        self.study |= {"open": True, "result": result, "fingerprint": fingerprint, **found}

    # --- the PDF ----------------------------------------------------------------------------

    def print(self, *, whole: bool) -> None:
        """Start to make a PDF; one at a time."""
        job = self.session.job
        if job is None or self.printing.doing:
            return
        self.session.settle()
        named = self.session.book.name
        mark = self.session.mark
        only = "" if whole else f"{named}:{mark}" if mark else named
        steps = len(job.fillings()) + 1 if whole else 2
        try:
            loop = asyncio.get_running_loop()
        except RuntimeError:
            asyncio.run(self._made(only, steps))
        else:
            self._work = loop.create_task(self._made(only, steps))

    async def _made(self, only: str, steps: int) -> None:
        job = self.session.job
        assert job is not None  # noqa: S101  asked before
        try:
            file = await printing.make(job, only, steps, self._told_of)
        except OSError as error:
            self._told_of(printing.Printing(told=str(error), failed=True))
            return
        if file is not None:
            self.send_file(*file)
        self.session.look()

    def _told_of(self, state: printing.Printing) -> None:
        self.printing = state
        self.show(self.session.statement)


_ACTS: Mapping[str, Callable[[Bar, Plain], None]] = {
    "undo": lambda bar, _: bar.session.undo(),
    "redo": lambda bar, _: bar.session.redo(),
    "open_mark": lambda bar, m: bar.session.open_mark(m["mark"]),
    "add_mark": lambda bar, m: bar.session.add_mark(m["mark"], m["like"] or None),
    "remove_mark": lambda bar, m: bar.session.remove_mark(m["mark"]),
    "take_all": lambda bar, _: bar.session.take_all(),
    "write_again": lambda bar, _: bar.session.write_again(),
    "answer": lambda bar, m: bar.session.answer(m["ask"], m["option"]),
    "study": lambda bar, m: bar.open_study(on=m["open"]),
    "choose": lambda bar, m: bar.open_study(on=True, result=m["result"]),
    "sensitivity": lambda bar, m: bar.find_sensitivity(m["result"]),
    "needed": lambda bar, m: bar.find_needed(m["result"], m["entry"], m["target"]),
    "use": lambda bar, m: bar.use(m["entry"], m["text"]),
    "print": lambda bar, m: bar.print(whole=m["whole"]),
}


def shown(bar: Bar) -> Any:  # noqa: ANN401  ipywidgets has no types
    """Return the widget of a bar."""
    import anywidget  # noqa: PLC0415  only where there is a browser
    import traitlets  # noqa: PLC0415

    class BarWidget(anywidget.AnyWidget):
        """The bar in the browser."""

        _esm = Path(__file__).with_name("bar.js")
        _css = Path(__file__).with_name("bar.css")
        state = traitlets.Dict().tag(sync=True)

    bar.show(bar.session.statement)
    widget = BarWidget(state=bar.state)

    def changed(state: dict[str, Any]) -> None:
        widget.state = state

    def send_file(name: str, pdf: bytes) -> None:
        widget.send({"type": "file", "name": name}, [pdf])

    bar.changed, bar.send_file = changed, send_file
    widget.on_msg(lambda _widget, content, _buffers: bar.act(content))
    return widget
