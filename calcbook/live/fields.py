"""Entries and choices as rows of the page with a field to type in."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import ipywidgets as widgets

from calcbook import typeset, units
from calcbook.errors import CalcbookError
from calcbook.items import Carry, Choice, Text
from calcbook.live import page
from calcbook.live.session import refusal
from calcbook.live.wording import APPLY
from calcbook.wording import not_applied, option_label

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.items import Item
    from calcbook.live.blocks import Block
    from calcbook.live.view import SectionView

    Plain = Mapping[str, Any]

SETTINGS = ("code_set", "units")


def html(*classes: str) -> widgets.HTML:
    """Return an empty piece of the page."""
    piece = widgets.HTML()
    for name in classes:
        piece.add_class(name)
    return piece


def box(children: list[widgets.Widget], *classes: str) -> widgets.Box:
    """Return widgets in a box that the style sheet lays out."""
    made = widgets.Box(children)
    for name in classes:
        made.add_class(name)
    return made


def say(piece: widgets.HTML, text: str) -> None:
    """Put HTML into a piece of the page if it is not there already."""
    if piece.value != text:
        piece.value = text


def toggle(widget: widgets.DOMWidget, name: str, *, on: bool) -> None:
    """Give a widget a class or take it away."""
    if on:
        widget.add_class(name)
    else:
        widget.remove_class(name)


def show_widget(widget: widgets.DOMWidget, *, on: bool) -> None:
    """Show a widget or take it out of sight."""
    display = None if on else "none"
    if widget.layout.display != display:
        widget.layout.display = display


def display_unit(item: Item, system: str) -> units.Unit:
    """Return the unit printed beside the field of a quantity."""
    kind = getattr(item, "kind", None) or units.KINDS["number"]
    return kind.us if system == "US" else kind.si


def as_field(text: str, unit: units.Unit) -> tuple[str, units.Unit | None]:
    """Return what a field shows for a quantity as typed, and the unit of a bare number in it.

    A quantity typed in the unit beside the field shows its number alone. One typed in another
    unit stays whole, and then a bare number is not clear: there is no unit to take it in.
    """
    try:
        quantity = units.read_quantity(text)
    except CalcbookError:
        return text, unit
    if quantity.unit.text != unit.text:
        return text, None
    number, written = quantity.parts
    return (number if written else text), unit


def control_for(item: Item, labels: Mapping[str, str]) -> widgets.Text | widgets.Dropdown:
    """Return the field of an entry: a drop-down for options, else a text field."""
    if labels:
        options = [(option_label(option, label), option) for option, label in labels.items()]
        refused = getattr(item, "refused", {})
        options += [(f"{option} (not covered)", option) for option in refused]
        return widgets.Dropdown(options=options, value=None, tooltip=item.meaning)
    return widgets.Text(continuous_update=False, tooltip=item.meaning)


def labels_of(item: Item) -> Mapping[str, str]:
    """Return the options of an entry in words, or nothing for one that is typed."""
    return item.labels if isinstance(item, (Choice, Carry)) else {}


def is_words(item: Item) -> bool:
    """Whether an entry is words: no unit, no range."""
    return isinstance(item, Text) or (isinstance(item, Carry) and item.text)


class Control:
    """A field that takes what is typed, and keeps a refused text until it is put right."""

    def __init__(
        self, item: Item, view: SectionView, take: Callable[[str, units.Unit | None], None],
        told: Callable[[str], None],
    ) -> None:  # fmt: skip
        self.item, self.view = item, view
        self.labels = labels_of(item)
        self.widget = control_for(item, self.labels)
        self.refused = False
        self._take, self._told = take, told
        self._quiet = False
        self._bare: units.Unit | None = None
        self._shown = ""
        self.widget.observe(self._changed, "value")

    def show(self, text: str, unit: units.Unit | None = None) -> None:
        """Show the text in force; ``unit`` is printed beside a quantity."""
        plain = bool(self.labels) or is_words(self.item) or unit is None
        shown, self._bare = (text, None) if plain else as_field(text, unit)  # type: ignore[arg-type]
        self._shown = text
        if self.refused:
            return
        self._quiet = True
        try:
            known = not self.labels or shown in [value for _, value in self.widget.options]
            value = shown if known else None
            if self.widget.value != value:
                self.widget.value = value
        finally:
            self._quiet = False

    def _changed(self, change: Mapping[str, Any]) -> None:
        if self._quiet or change["new"] is None:
            return
        typed = str(change["new"])

        def act() -> None:
            self.refused = False
            try:
                self._take(typed, self._bare)
            except CalcbookError as error:
                self.refused = True
                self._told(refusal(error, self._in_force()))
            else:
                self._told("")
            toggle(self.widget, "cb-wrong", on=self.refused)

        self.view.guarded(act)

    def _in_force(self) -> str:
        return option_label(self._shown, self.labels[self._shown]) if (
            self._shown in self.labels
        ) else self._shown  # fmt: skip


class EntryField:
    """The row of one entry: number and meaning, its field, and what is to be known of it."""

    def __init__(self, view: SectionView, item: Item) -> None:
        self.view, self.session, self.item = view, view.session, item
        self.number, self.words, self.notes = html("cb-no"), html("cb-words"), html("cb-note")
        self.before, self.beside, self.message = html(), html(), html()
        self.control = Control(item, view, self._take, self._told)
        self.mark = widgets.Checkbox(indent=False, tooltip=f"confirm: {item.meaning}")
        self.mark.observe(self._marked, "value")
        self.back = widgets.Button(description="take the carried value")
        self.back.add_class("cb-small")
        self.back.on_click(lambda _: view.guarded(self._back))
        self.line = box([self.before, self.control.widget, self.beside, self.back], "cb-field")
        toggle(self.line, "cb-long", on=is_words(item))
        body = box([self.line, self.message], "cb-body")
        body.layout.flex_flow = "column"
        margin = box([self.notes, self.mark], "cb-margin", "cb-note")
        margin.layout.flex_flow = "column"
        self.widget = box([self.number, self.words, body, margin], "cb-row", "cb-entry")
        show_widget(self.before, on=not (is_words(item) or self.control.labels))
        show_widget(self.beside, on=not (is_words(item) or self.control.labels))
        self._quiet = False

    def show(self, block: Block, _statement: Plain) -> None:
        """Bring the row up to date with the statement."""
        item = block.item
        say(self.number, block.number)
        say(self.words, page.words(block.words))
        toggle(self.widget, "cb-idle", on=not item["applies"])
        show_widget(self.line, on=item["applies"])
        given = item["applies"] and bool(block.standing) and self.session.job is not None
        show_widget(self.mark, on=given and not self.control.refused)
        show_widget(self.back, on=self._typed_over(item))
        say(self.notes, page.notes(block.notes if self.session.job else block.remarks))
        if not item["applies"]:
            say(self.message, f'<div class="cb-says">{page.lines(not_applied(item))}</div>')
            return
        self._show_value(item)
        self._show_mark(block)
        if not self.control.refused:
            say(self.message, self._state(item))

    def _typed_over(self, item: Plain) -> bool:
        return item["kind"] == "carried" and item["name"] in self.session.record.entries

    def _show_value(self, item: Plain) -> None:
        given = self.session.book.readings.given.get(item["name"])
        text = given.text if given is not None else ""
        if is_words(self.item) or self.control.labels:
            self.control.show(text)
            return
        unit = display_unit(self.item, self.session.book.system)
        self.control.show(text, unit)
        say(self.before, page.math(f"{typeset.symbol(item['name'], 'mathml')}<mo>=</mo>"))
        shown = item["shown"] or (item["value"] if as_field(text, unit)[0] == text else None)
        beside = units.pretty_unit(unit.text)
        if shown and shown["text"] and shown["unit"] and as_field(text, unit)[0] == text:
            beside = f"= {typeset.number(shown['text'], shown['unit'], 'plain')}"
        say(self.beside, page.lines(beside))

    def _show_mark(self, block: Block) -> None:
        self._quiet = True
        try:
            self.mark.value = not block.unconfirmed
            self.mark.description = block.standing
        finally:
            self._quiet = False
        toggle(self.mark, "cb-waiting", on=block.unconfirmed)

    def _take(self, typed: str, bare: units.Unit | None) -> None:
        self.session.enter(self.item.name, typed, bare=bare)

    def _marked(self, change: Mapping[str, Any]) -> None:
        if self._quiet:
            return

        def act() -> None:
            try:
                self.session.confirm(self.item.name, yes=bool(change["new"]))
            except CalcbookError as error:
                self._quiet = True
                self.mark.value = not change["new"]
                self._quiet = False
                self._told(refusal(error))

        self.view.guarded(act)

    def _back(self) -> None:
        self.control.refused = False
        self.session.bring_forward(self.item.name)

    def _told(self, reason: str) -> None:
        """Show why something was not taken; what is in force was shown when it was computed.

        The mark would speak of the value in force, and not of the one seen in the field.
        """
        if reason:
            say(self.message, page.refused(reason))
        if self.control.refused:
            show_widget(self.mark, on=False)

    def _state(self, item: Plain) -> str:
        """Return what the item in force has to say under its field."""
        pieces = [page.trouble(item["problem"])] if item["problem"] else []
        if self._to_apply(item):
            pieces.append(f"<div><strong>{APPLY}</strong></div>")
        return "".join(pieces)

    def _to_apply(self, item: Plain) -> bool:
        """Whether the code set or the units chosen are not those the workbook was opened with."""
        book = self.session.book
        opened = {"code_set": book.code.name, "units": book.system}
        name = self.item.name
        return name in SETTINGS and item.get("option") not in ("", None, opened[name])
