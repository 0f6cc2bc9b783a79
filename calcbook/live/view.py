"""A section as it is seen in JupyterLab: its rows as plain data, and what its fields ask for."""

from __future__ import annotations

import asyncio
import logging
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.live import blocks, page, wording
from calcbook.live.acts import ACTS
from calcbook.live.entryrow import carried_row, entry_row, typed_in
from calcbook.live.gridrow import editable, grid_row
from calcbook.live.patches import Page
from calcbook.wording import not_applied

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.live.blocks import Block
    from calcbook.live.patches import Row
    from calcbook.live.session import Session
    from calcbook.live.sheet import Sheet

    Plain = Mapping[str, Any]

FIGURE_SECONDS = 0.15
_log = logging.getLogger(__name__)


@dataclass(frozen=True)
class Refusal:
    """A text that was not taken, kept in its field, and why, as HTML."""

    text: str
    html: str


class SectionView:
    """The view of one section.

    Parameters
    ----------
    session
        The opened workbook.
    title
        The section's title.

    ``refused`` holds the texts that were not taken: by (name,) for an entry, by (schedule, row,
    column) for a cell. ``told`` holds what else an item has to say, until the next message.
    """

    def __init__(self, session: Session, title: str) -> None:
        self.session, self.title = session, title
        self.page = Page()
        self.refused: dict[tuple[str, ...], Refusal] = {}
        self.told: dict[str, str] = {}
        self.retired = ""
        self._sheet: Sheet | None = None
        self._mark = session.mark
        self._made: dict[str, tuple[object, Row]] = {}
        self._state: object = None
        self._act_trouble = self._show_trouble = ""
        self._acting = False
        self._drawing: asyncio.TimerHandle | None = None

    @property
    def rows(self) -> dict[str, Row]:
        """The rows shown, by id, in order."""
        return self.page.rows

    @property
    def head(self) -> Row:
        """The head of the section: number, title, notice, trouble."""
        head: Row = self.page.data["head"]
        return head

    @property
    def box(self) -> Sheet:
        """The widget; made when it is first asked for, so that it opens with its rows."""
        if self._sheet is None:
            from calcbook.live.sheet import Sheet, share_typeface  # noqa: PLC0415  slow to import

            share_typeface()
            self._sheet = Sheet(self.page.data, self.act)
        return self._sheet

    # --- showing ----------------------------------------------------------------------------

    def show(self, statement: Plain, section: Plain) -> None:
        """Bring the view up to date with a statement; what goes wrong is said in the view.

        While a message of this view is dealt with, its answer does that: the browser gets one
        patch, after those of the sections that depend on what was typed.
        """
        if self._acting:
            return
        if self._mark != self.session.mark:
            self._mark = self.session.mark
            self.refused, self.told = {}, {}
        try:
            rows = self._rows(section) if section["applies"] else {}
            self._show_trouble = ""
            if any(row["kind"] == "figure" for row in rows.values()):
                self._draw_later(statement, section, rows)
        except Exception as error:  # noqa: BLE001  shown at the section, never lost
            rows = dict(self.rows)
            self._show_trouble = self._said(error)
        self._send(self.page.update(self._head(section), rows))

    def _rows(self, section: Plain) -> dict[str, Row]:
        """Return the rows in order; what is as it was is not made again."""
        state = (section, [self._around(item) for item in section["items"]])
        if state == self._state and self.rows:
            return self.rows
        rows: dict[str, Row] = {}
        made: dict[str, tuple[object, Row]] = {}
        parent = ""
        for block in blocks.blocks(section):
            if block.within or block.kind == "row":
                name = f"{parent}/{sum(key.startswith(f'{parent}/') for key in rows) + 1}"
            else:
                name = parent = self._id(block, rows)
            needs = (block, block.item, self._around(block.item))
            if name not in self._made or self._made[name][0] != needs:
                made[name] = (needs, self._row(block, name))
            else:
                made[name] = self._made[name]
            rows[name] = made[name][1]
        self._made, self._state = made, state
        return rows

    def _id(self, block: Block, rows: dict[str, Row]) -> str:
        """Return the id of a row: its name, else its number; both where the name is taken."""
        name = str(block.item.get("name") or block.number)
        return f"{name}/{block.number}" if name in rows else name

    def _around(self, item: Plain) -> object:
        """Return what a row depends on besides its item."""
        session, name = self.session, item.get("name", "")
        if not (name and (typed_in(item) or item.get("kind") in ("carried", "schedule"))):
            return None
        return (
            session.book.readings.given.get(name), name in session.record.entries,
            session.job is None, session.book.system, session.book.code.name, self.told.get(name),
            [(key, r) for key, r in self.refused.items() if key[0] == name],
        )  # fmt: skip

    def _row(self, block: Block, name: str) -> Row:
        if block.kind == "figure":
            body = self.page.data["rows"].get(name, {}).get("body", "")
            return {**page.pieces(block), "kind": "figure", "body": body}
        if editable(block.item):
            return grid_row(self, block)
        if typed_in(block.item):
            return entry_row(self, block)
        if block.kind == "carried":
            return carried_row(self, block)
        return {"kind": "text", **page.pieces(block)}

    def _draw_later(self, statement: Plain, section: Plain, rows: dict[str, Row]) -> None:
        """Draw the figures after the lines: they take longest, and a hand may still be typing."""
        if self._drawing is not None:
            self._drawing.cancel()
            self._drawing = None
        try:
            loop = asyncio.get_running_loop()
        except RuntimeError:
            loop = None
        if loop is None or not self.rows:
            self._draw(statement, section, rows)
        else:
            self._drawing = loop.call_later(FIGURE_SECONDS, self._drawn, statement, section)

    def _drawn(self, statement: Plain, section: Plain) -> None:
        self._drawing = None
        rows = dict(self.rows)
        try:
            self._draw(statement, section, rows)
        except Exception as error:  # noqa: BLE001  shown at the section, never lost
            self._show_trouble = self._said(error)
        self._send(self.page.update(self._head(section), rows))

    def _draw(self, statement: Plain, section: Plain, rows: dict[str, Row]) -> None:
        """Put the figures into their rows."""
        for item in section["items"]:
            name = item.get("name") or item["number"]
            if item["kind"] == "figure" and item["applies"] and name in rows:
                rows[name] = {**rows[name], "body": page.figure(statement, item)}
                self._made[name] = (self._made[name][0], rows[name])

    def _head(self, section: Plain) -> Row:
        trouble = self._act_trouble + self._show_trouble
        return {
            "number": section["number"], "title": section["title"], "trouble": trouble,
            "notice": self._notices(section), "applies": section["applies"], "retired": False,
            "silent": wording.SILENT,
        }  # fmt: skip

    def _notices(self, section: Plain) -> str:
        told = [wording.LEFT_OVER] if section.get("left_over") else []
        if not section["applies"]:
            told.append(f"This section is {not_applied(section)}.")
        return "".join(f'<div class="cb-quiet">{page.lines(text)}</div>' for text in told if text)

    def _send(self, patch: Row | None) -> None:
        if patch is not None and self._sheet is not None:
            self._sheet.send(patch)

    def text_of(self, name: str) -> str:
        """Return the text in force of an entry, '' where there is none."""
        given = self.session.book.readings.given.get(name)
        return given.text if given is not None else ""

    # --- acting -----------------------------------------------------------------------------

    def act(self, message: Row) -> None:
        """Do what a field asks for; whatever goes wrong is shown at the section.

        ``message["do"]`` names what (``acts``); ``message["n"]`` is answered when it is done.
        """
        if message.get("do") == "hello":
            self._greet(message)
            return
        self._act_trouble, self.told = "", {}
        focus = None
        self._acting = True
        try:
            if not self.retired:
                focus = ACTS[message["do"]](self, message)
        except Exception as error:  # noqa: BLE001  shown at the section, never lost
            self._act_trouble = self._said(error)
        finally:
            self._acting = False
        self._answer(message, focus)

    def refuse(self, key: tuple[str, ...], text: str, html: str) -> None:
        """Keep a text that was not taken in its field, with the reason; the bar counts it."""
        self.refused[key] = Refusal(text, html)
        self.session.refresh(evaluate=False)

    def say(self, html: str) -> None:
        """Show something at the head of the section until the next message."""
        self._act_trouble += html

    def _answer(self, message: Row, focus: list[str] | None) -> None:
        """Show what became of a message, and say that it was dealt with."""
        serial = self.page.data["serial"]
        patch = self.page.acknowledge(int(message.get("n", 0)))
        if not self.retired:
            try:
                self.show(self.session.statement, self.session.section(self.title))
            except Exception as error:  # noqa: BLE001  the section itself may be gone
                self._act_trouble += self._said(error)
        if self.page.data["serial"] == serial or focus:  # else the patch said so
            now = {"base": self.page.data["serial"], "serial": self.page.data["serial"]}
            self._send(patch | now | ({"focus": focus} if focus else {}))

    def _greet(self, message: Row) -> None:
        """Give a browser that just opened the sheet all of it, unless it has it already."""
        if message.get("serial") != self.page.data["serial"]:
            self._send({"type": "page", "page": self.page.data})

    def _said(self, error: Exception) -> str:
        _log.error("section %s", self.title, exc_info=error)
        return page.trouble(f"{type(error).__name__}: {error}") + page.where(error)

    def close(self) -> None:
        """Let the widget go: another one stands in its place."""
        if self._drawing is not None:
            self._drawing.cancel()
        if self._sheet is not None:
            self._sheet.close()
            self._sheet = None

    def retire(self, reason: str) -> None:
        """Say why this view is out of use and let nothing more be typed into it."""
        self.retired = reason
        if self._drawing is not None:
            self._drawing.cancel()
        told = f'<div class="cb-quiet">{page.lines(reason)}</div>'
        head = self.head | {"trouble": told, "notice": "", "retired": True}
        self._send(self.page.update(head, {}))
