"""What the fields of a section ask for: each message of the browser, done in the session."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.errors import CalcbookError, RecordChangedError
from calcbook.live import fieldtext, page
from calcbook.live.session import refusal
from calcbook.workbook import entered_columns

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.live.view import SectionView

    Message = Mapping[str, Any]
    Focus = list[str] | None


def _enter(view: SectionView, message: Message) -> Focus:
    session, name, typed = view.session, message["name"], message["text"]
    item, text = session.book.input_item(name), view.text_of(name)
    bare = fieldtext.bare_unit(item, text, session.book.system)
    take = session.step if message["do"] == "step" else session.enter
    _take(
        view, (name,), typed, fieldtext.in_force(item, text), lambda: take(name, typed, bare=bare)
    )
    return None


def _cell(view: SectionView, message: Message) -> Focus:
    session, typed = view.session, message["text"]
    schedule, key, column = message["schedule"], message["key"], message["column"]
    if not column:
        return _rename(view, schedule, key, typed)
    item = entered_columns(session.book.schedule_item(schedule))[column]
    text = _cell_text(view, schedule, key, column)
    bare = fieldtext.bare_unit(item, text, session.book.system)
    take = session.step_cell if message["do"] == "step_cell" else session.enter_cell
    _take(
        view, (schedule, key, column), typed, fieldtext.in_force(item, text),
        lambda: take(schedule, key, column, typed, bare=bare),
    )  # fmt: skip
    return None


def _cell_text(view: SectionView, schedule: str, key: str, column: str) -> str:
    """Return the text in force of a cell, '' where there is none."""
    section = view.session.section(view.title)
    item = next(i for i in section["items"] if i.get("name") == schedule)
    place = item["rows"].index(key) if key in item["rows"] else None
    typed = next((c["typed"] for c in item["columns"] if c["name"] == column), None)
    return typed[place] if typed and place is not None else ""


def _rename(view: SectionView, schedule: str, key: str, typed: str) -> Focus:
    new = typed.strip()
    if new == key:
        view.refused.pop((schedule, key, ""), None)
        return None

    def rename() -> None:
        view.session.rename_row(schedule, key, typed)
        kept = {k: r for k, r in view.refused.items() if k[:2] == (schedule, key)}
        for former, refused in kept.items():
            del view.refused[former]
            view.refused[schedule, new, former[2]] = refused

    _take(view, (schedule, key, ""), typed, key, rename)
    return None


def _take(
    view: SectionView, key: tuple[str, ...], typed: str, in_force: str, take: Callable[[], None]
) -> None:
    """Have a text taken; a refused one stays in its field, with the reason, until put right."""
    view.refused.pop(key, None)
    try:
        take()
    except RecordChangedError as error:  # the field shows what the record says now
        view.told[key[0]] = page.refused(refusal(error))
    except CalcbookError as error:
        where = ", ".join(part for part in (*key[1:2], key[2] or "key") if part) if key[1:] else ""
        reason = refusal(error, in_force)
        html = page.refused(f"{where}: {reason}" if where else reason)
        view.refuse(key, typed, html)


def _drop(view: SectionView, message: Message) -> Focus:
    """Let a refused text go; the one in force stands in the field again."""
    key = (message["name"],) if "name" in message else (
        message["schedule"], message["key"], message["column"]
    )  # fmt: skip
    view.refused.pop(key, None)
    return None


def _tried(view: SectionView, name: str, act: Callable[[], None]) -> None:
    """Do what is asked of an item; why it is not done is told at it."""
    try:
        act()
    except CalcbookError as error:
        view.told[name] = page.refused(refusal(error))


def _confirm(view: SectionView, message: Message) -> Focus:
    name = message["name"]
    _tried(view, name, lambda: view.session.confirm(name, yes=bool(message["yes"])))
    return None


def _source(view: SectionView, message: Message) -> Focus:
    name = message["name"]
    _tried(view, name, lambda: view.session.set_source(name, message["text"]))
    return None


def _back(view: SectionView, message: Message) -> Focus:
    name = message["name"]
    view.refused.pop((name,), None)
    _tried(view, name, lambda: view.session.bring_forward(name))
    return None


def _take_carry(view: SectionView, message: Message) -> Focus:
    _tried(view, message["name"], lambda: view.session.take(message["name"]))
    return None


def _confirm_row(view: SectionView, message: Message) -> Focus:
    name, key = message["schedule"], message["key"]
    _tried(view, name, lambda: view.session.confirm_row(name, key, yes=bool(message["yes"])))
    return None


def _row_source(view: SectionView, message: Message) -> Focus:
    name = message["schedule"]
    _tried(view, name, lambda: view.session.set_row_source(name, message["key"], message["text"]))
    return None


def _add_row(view: SectionView, message: Message) -> Focus:
    name = message["schedule"]
    before = _keys(view, name)
    _tried(view, name, lambda: view.session.add_row(name, message["below"]))
    new = next((key for key in _keys(view, name) if key not in before), None)
    return [name, new, ""] if new is not None else None


def _keys(view: SectionView, schedule: str) -> list[str]:
    """Return the keys of a schedule's rows as they stand in the record or the template."""
    typed = view.session.record.schedules.get(schedule)
    if typed is not None:
        return [row.key for row in typed]
    rows = view.session.book.readings.given_rows.get(schedule, [])
    return [row.key for row in rows]


def _remove_row(view: SectionView, message: Message) -> Focus:
    name, key = message["schedule"], message["key"]
    for refused in [k for k in view.refused if k[:2] == (name, key)]:
        del view.refused[refused]
    _tried(view, name, lambda: view.session.remove_row(name, key))
    return None


def _move_row(view: SectionView, message: Message) -> Focus:
    name = message["schedule"]
    _tried(view, name, lambda: view.session.move_row(name, message["key"], int(message["by"])))
    return None


def _paste(view: SectionView, message: Message) -> Focus:
    name, block = message["schedule"], [list(map(str, row)) for row in message["block"]]
    _tried(view, name, lambda: view.session.paste(name, message["key"], message["column"], block))
    return None


def _undo(view: SectionView, message: Message) -> Focus:
    try:
        (view.session.undo if message["do"] == "undo" else view.session.redo)()
    except CalcbookError as error:
        view.say(page.refused(refusal(error)))
    return None


ACTS: dict[str, Callable[[SectionView, Message], Focus]] = {
    "enter": _enter, "step": _enter, "drop": _drop, "confirm": _confirm, "source": _source,
    "back": _back, "take": _take_carry, "cell": _cell, "step_cell": _cell,
    "confirm_row": _confirm_row, "row_source": _row_source, "add_row": _add_row,
    "remove_row": _remove_row, "move_row": _move_row, "paste": _paste,
    "undo": _undo, "redo": _undo,
}  # fmt: skip
