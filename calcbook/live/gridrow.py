"""Schedules whose rows are typed: a table with fields in its entered columns."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.items import Carry, Text
from calcbook.live import blocks as parts
from calcbook.live import fieldtext, page, wording
from calcbook.live.entryrow import source_field, stale_pieces
from calcbook.workbook import entered_columns

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.items import Item
    from calcbook.live.blocks import Block
    from calcbook.live.patches import Row
    from calcbook.live.view import SectionView

    Plain = Mapping[str, Any]

TYPED = ("entered", "text", "choice")
KEY = Text(meaning="key of the row")


def editable(item: Plain) -> bool:
    """Whether anything of a schedule is typed in this workbook."""
    if item.get("kind") != "schedule" or not item["applies"] or item["fixed"]:
        return False
    return not brought(item) or any(c["role"] in TYPED for c in item["columns"])


def brought(item: Plain) -> bool:
    """Whether the rows come from another workbook; then only columns of this one are typed."""
    return item["from"] is not None and not item["fallback"]


def grid_row(view: SectionView, block: Block) -> Row:
    """Return a schedule: what frames its table, and its cells by row and column."""
    return _Grid(view, block).row()


class _Grid:
    """One schedule on its way to the page."""

    def __init__(self, view: SectionView, block: Block) -> None:
        self.view, self.block, self.item = view, block, block.item
        self.name, self.system = block.item["name"], view.session.book.system
        self.columns = parts.shown_columns(self.item)
        self.brought = brought(self.item)
        self.entered = {
            name: item
            for name, item in entered_columns(view.session.book.schedule_item(self.name)).items()
            if not (self.brought and isinstance(item, Carry))
        }
        self.grid = parts.schedule_grid(self.item)
        self.numeric = dict(zip((c["name"] for c in self.columns), self.grid.numeric[1:],
                                strict=True))  # fmt: skip

    def row(self) -> Row:
        pieces = page.pieces(self.block, body=False)
        says = [f'<div class="cb-says">{page.words(line)}</div>' for line in self.block.says]
        stale = stale_pieces(self.view, self.item)
        totals = [page.words(total) for total in self.grid.totals]
        return pieces | {
            "kind": "grid", "cls": f"{pieces['cls']} cb-filled", "name": self.name,
            "keys": [str(key) for key in self.item["rows"]],
            "margin": page.notes(self._remarks()),
            "fixed": self.brought,
            "columns": [self._column(None, None if self.brought else KEY),
                        *(self._column(c, self.entered.get(c["name"])) for c in self.columns)],
            "heads": [{"html": page.words(head), "num": number}
                      for head, number in zip(self.grid.heads, self.grid.numeric, strict=True)],
            "totals": totals if any(totals) else [],
            "below": "".join([*says, *map(page.trouble, self.block.troubles),
                              stale.get("under", "")]),
            "buttons": stale.get("buttons", []), "message": self._message(),
            "confirming": self.view.session.job is not None,
            "cells": {str(key): self._cells(place, str(key))
                      for place, key in enumerate(self.item["rows"])},
        }  # fmt: skip

    def _remarks(self) -> tuple[parts.Words, ...]:
        """Return the margin notes; the sources stand in their rows."""
        sources = set(self.item["sources"]) - {""}
        return tuple(note for note in self.block.remarks if note not in {(s,) for s in sources})

    def _message(self) -> str:
        """Return what was not taken in this table, each with its row and column."""
        found = [self.view.told[self.name]] if self.name in self.view.told else []
        found += [r.html for key, r in self.view.refused.items()
                  if len(key) > 1 and key[0] == self.name]  # fmt: skip
        return "".join(found)

    def _column(self, column: Plain | None, item: Item | None) -> Row:
        name = column["name"] if column else ""
        if item is None:
            number = column is not None and self.numeric[name]
            return {"name": name, "type": "shown", "num": number}
        options = fieldtext.options(item)
        quantity = fieldtext.is_quantity(item)
        return {
            "name": name, "type": "choice" if options else "text", "label": item.meaning or name,
            "options": options, "num": quantity, "step": quantity,
            "long": bool(column) and fieldtext.is_words(item),
        }  # fmt: skip

    def _cells(self, place: int, key: str) -> dict[str, Row]:
        contents = dict(zip((c["name"] for c in self.columns), self.grid.rows[place][1:],
                            strict=True))  # fmt: skip
        cells = {"": {"html": page.lines(key)} if self.brought else self._field(key, "", KEY, key)}
        for column in self.columns:
            name = column["name"]
            if name in self.entered:
                text = column["typed"][place] if column["typed"] else ""
                cells[name] = self._field(key, name, self.entered[name], text)
                cells[name]["beside"] = self._beside(column, place, text)
            else:
                cells[name] = {"html": page.words(contents[name])}
        cells["*"] = self._standing(place, key)
        return cells

    def _field(self, key: str, column: str, item: Item, text: str) -> Row:
        shown = fieldtext.shown_text(item, text, self.system)
        refusal = self.view.refused.get((self.name, key, column))
        return {"text": refusal.text if refusal else shown, "force": shown,
                "wrong": refusal is not None, "beside": ""}  # fmt: skip

    def _beside(self, column: Plain, place: int, text: str) -> str:
        """Return a cell's value in the unit of its heading, where it was typed in another one."""
        item = self.entered[column["name"]]
        whole = fieldtext.is_quantity(item) and text and column["texts"][place]
        if not whole or fieldtext.bare_unit(item, text, self.system) is not None:
            return ""
        return f"= {page.lines(column['texts'][place])}"

    def _standing(self, place: int, key: str) -> Row:
        given, sources = self.item["confirmed"], self.item["sources"]
        confirmed = given[place] if place < len(given) else ""
        source = sources[place] if place < len(sources) else ""
        faulty = any(
            c["problem"] and c["problem"][place] for c in self.columns if c["name"] in self.entered
        )
        refused = any(k[:2] == (self.name, key) for k in self.view.refused)
        mark = None
        if self.view.session.job is not None and not faulty and not refused:
            words = f"confirmed {wording.initials(confirmed)}" if confirmed else "not confirmed"
            mark = {"on": bool(confirmed), "text": words, "label": f"confirm row {key}"}
        return {
            "governs": place == self.grid.governing, "confirm": mark,
            "source": source_field(source, source or "source not given", f"row {key}"),
        }  # fmt: skip
