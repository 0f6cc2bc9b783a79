"""Schedules whose rows are typed: a table with fields in its entered columns."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING, Any

import ipywidgets as widgets

from calcbook.errors import CalcbookError
from calcbook.items import Text
from calcbook.live import blocks as parts
from calcbook.live import page
from calcbook.live.fields import (
    Control,
    box,
    display_unit,
    html,
    is_words,
    labels_of,
    say,
    show_widget,
)
from calcbook.live.session import refusal
from calcbook.workbook import entered_columns

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook import units
    from calcbook.items import Item
    from calcbook.live.blocks import Block
    from calcbook.live.view import SectionView

    Plain = Mapping[str, Any]


def editable(item: Plain) -> bool:
    """Whether the rows of a schedule are typed in this workbook."""
    if item["kind"] != "schedule" or not item["applies"] or item["fixed"]:
        return False
    return item["from"] is None or item["fallback"]


class ScheduleField:
    """The rows of one schedule; made anew when a row or a column comes or goes."""

    def __init__(self, view: SectionView, item: Plain) -> None:
        self.view, self.session, self.name = view, view.session, item["name"]
        self.items = entered_columns(self.session.book.schedule_item(self.name))
        columns = parts.shown_columns(item)
        self.number, self.words, self.notes = html("cb-no"), html(), html("cb-margin")
        self.message, self.below = html(), html()
        self.heads = [html("cb-cell") for _ in range(len(columns) + 2)]
        self.rows = [_Row(self, str(key), columns) for key in item["rows"]]
        self.totals = [html("cb-cell") for _ in range(len(columns) + 2)]
        cells = [*self.heads, *(w for row in self.rows for w in row.cells), *self.totals]
        self.table = box(cells, "cb-table")
        self.table.layout.grid_template_columns = f"repeat({len(columns) + 2}, max-content)"
        if self.session.job is not None:
            self.heads[-1].value = '<div class="cb-head">confirmed</div>'
        first = self.button("row on top", "add a row on top", partial(self.add, None))
        content = box([self.words, self.table, first, self.message, self.below])
        content.layout.flex_flow = "column"
        content.layout.align_items = "flex-start"
        self.widget = box([self.number, content, self.notes], "cb-row", "cb-wide", "cb-schedule")

    def button(self, text: str, tip: str, act: Callable[[], None]) -> widgets.Button:
        """Return a small button; what it does not take is told under the table."""
        button = widgets.Button(description=text, tooltip=tip)
        button.add_class("cb-small")
        button.on_click(lambda _: self.view.guarded(partial(self._do, act)))
        return button

    def _do(self, act: Callable[[], None]) -> None:
        try:
            act()
        except CalcbookError as error:
            self.told(refusal(error))

    def add(self, below: str | None) -> None:
        """Put a new row below one, or first."""
        self.session.add_row(self.name, below)

    def show(self, block: Block, _statement: Plain) -> None:
        """Bring the table up to date with the statement."""
        item = block.item
        say(self.number, block.number)
        say(self.words, page.words(block.words))
        say(self.notes, page.notes(block.remarks))
        grid = parts.schedule_grid(item)
        for piece, head, numeric in zip(self.heads, grid.heads, grid.numeric, strict=False):
            kind = "cb-head cb-number" if numeric else "cb-head"
            say(piece, f'<div class="{kind}">{page.words(head)}</div>')
        for place, row in enumerate(self.rows):
            row.show(item, place, grid)
        for piece, total in zip(self.totals, grid.totals, strict=False):
            text = f'<div class="cb-total cb-number">{page.words(total)}</div>'
            say(piece, text if total else "")
        says = [f'<div class="cb-says">{page.words(line)}</div>' for line in block.says]
        say(self.below, "".join([*says, *map(page.trouble, block.troubles)]))
        if not any(control.refused for row in self.rows for control in row.controls):
            self.told("")

    def told(self, reason: str, where: str = "") -> None:
        """Show why something typed was not taken, or nothing."""
        text = f"{where}: {reason}" if where and reason else reason
        say(self.message, page.refused(text) if text else "")


class _Row:
    """One row: its key, a field or a value per column, its mark and its buttons."""

    def __init__(self, schedule: ScheduleField, key: str, columns: list[Plain]) -> None:
        self.schedule, self.session, self.key = schedule, schedule.session, key
        self.controls: list[Control] = []
        name = self._control(Text(meaning="key of the row"), self._rename, "key")
        self.pieces: list[Control | widgets.HTML] = [name]
        for column in columns:
            item = schedule.items.get(column["name"])
            if item is None:
                self.pieces.append(html("cb-cell"))
            else:
                take = partial(self._take, column["name"])
                self.pieces.append(self._control(item, take, column["name"]))
        self.mark = widgets.Checkbox(indent=False, tooltip=f"confirm row {key}")
        self.mark.observe(self._marked, "value")
        add = schedule.button("+", f"add a row below {key}", partial(schedule.add, key))
        drop = schedule.button("×", f"remove row {key}",  # noqa: RUF001
                                lambda: self.session.remove_row(schedule.name, key))  # fmt: skip
        tools = box([self.mark, add, drop], "cb-cell", "cb-tools")
        self.cells = [*(p.widget if isinstance(p, Control) else p for p in self.pieces), tools]
        self._quiet = False

    def _control(
        self, item: Item, take: Callable[[str, units.Unit | None], None], column: str
    ) -> Control:
        told = partial(self._told, column)
        control = Control(item, self.schedule.view, take, told)
        control.widget.add_class("cb-cell")
        if not labels_of(item) and column != "key":
            control.widget.add_class("cb-long" if is_words(item) else "cb-amount")
        self.controls.append(control)
        return control

    def _told(self, column: str, reason: str) -> None:
        if reason:
            self.schedule.told(reason, f"{self.key}, {column}")
        if self._refused():
            show_widget(self.mark, on=False)

    def _refused(self) -> bool:
        return any(control.refused for control in self.controls)

    def _rename(self, typed: str, _bare: units.Unit | None) -> None:
        if typed.strip() != self.key:
            self.session.rename_row(self.schedule.name, self.key, typed)

    def _take(self, column: str, typed: str, bare: units.Unit | None) -> None:
        self.session.enter_cell(self.schedule.name, self.key, column, typed, bare=bare)

    def _marked(self, change: Mapping[str, Any]) -> None:
        if self._quiet:
            return

        def act() -> None:
            try:
                self.session.confirm_row(self.schedule.name, self.key, yes=bool(change["new"]))
            except CalcbookError as error:
                self._set_mark(on=not change["new"])
                self.schedule.told(refusal(error))

        self.schedule.view.guarded(act)

    def _set_mark(self, *, on: bool) -> None:
        self._quiet = True
        self.mark.value = on
        self._quiet = False

    def show(self, item: Plain, place: int, grid: parts.Grid) -> None:
        """Bring the row up to date."""
        governs = place == grid.governing
        for piece, content, column in zip(
            self.pieces, grid.rows[place], (None, *parts.shown_columns(item)), strict=True
        ):
            if not isinstance(piece, Control):
                kind = f"cb-number{' cb-governs' if governs else ''}"
                say(piece, f'<div class="{kind}">{page.words(content)}</div>')
            elif column is None:
                piece.show(self.key)
            else:
                self._show_cell(piece, column, place)
        confirmed = place < len(item["confirmed"]) and bool(item["confirmed"][place])
        self._set_mark(on=confirmed)
        self.mark.tooltip = f"row {self.key}: {'confirmed' if confirmed else 'not confirmed'}"
        faulty = any(
            column["problem"] and column["problem"][place] and column["name"] in self.schedule.items
            for column in parts.shown_columns(item)
        )
        marked = self.session.job is not None and not faulty and not self._refused()
        show_widget(self.mark, on=marked)

    def _show_cell(self, control: Control, column: Plain, place: int) -> None:
        text = column["typed"][place] if column["typed"] else ""
        if labels_of(control.item) or is_words(control.item):
            control.show(text)
        else:
            control.show(text, display_unit(control.item, self.session.book.system))
