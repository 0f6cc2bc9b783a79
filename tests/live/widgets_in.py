"""Finding the fields and the text of a view, as a person sees them, and using them as a browser."""

from __future__ import annotations

import html
import re
from typing import TYPE_CHECKING, Any

from calcbook.live.bar import Bar

if TYPE_CHECKING:
    from collections.abc import Iterator

    from calcbook.live import Session
    from calcbook.live.view import SectionView

HTML = ("words", "body", "margin", "under", "before", "beside", "refused", "message", "below",
        "html", "no")  # fmt: skip


class Shown:
    """A control that is drawn, and what it sends."""

    def __init__(self, view: SectionView, spot: tuple[str, ...], message: dict[str, Any]) -> None:
        self.view, self.spot, self.message = view, spot, message

    def spec(self) -> Any:
        """Return what the page says of the control now."""
        found: Any = self.view.rows
        for part in self.spot:
            found = found[part]
        return found

    def send(self, **more: object) -> None:
        """Send the control's message, as the browser does."""
        self.view.act({**self.message, **more})


class Field(Shown):
    """A text field or drop-down; setting its value is typing it and pressing Enter."""

    @property
    def value(self) -> str:
        """The text in the field."""
        return str(self.spec()["text"])

    @value.setter
    def value(self, text: str) -> None:
        self.send(text=text)


class Mark(Shown):
    """A confirm mark."""

    @property
    def value(self) -> bool:
        """Whether it is ticked."""
        return bool(self.spec()["on"])

    @value.setter
    def value(self, yes: bool) -> None:
        self.send(yes=yes)

    @property
    def description(self) -> str:
        """The words beside it."""
        return str(self.spec()["text"])


class Button(Shown):
    """A button."""

    def click(self) -> None:
        """Press it."""
        self.send()


def cells(view: SectionView) -> Iterator[tuple[str, dict[str, Any], str]]:
    """Yield every row of every table that is typed in: schedule, its row of the page, key."""
    for name, row in view.rows.items():
        if row["kind"] == "grid":
            yield from ((name, row, key) for key in row["keys"])


def field(session: Session, title: str, meaning: str, place: int = 0) -> Field:
    """Return the field in a section whose label says what it is."""
    view = session.views[title]
    found = [
        Field(view, (name, "field"), {"do": "enter", "name": row["name"]})
        for name, row in view.rows.items()
        if row["kind"] == "entry" and row["field"]["label"] == meaning
    ]
    for name, row, key in cells(view):
        found += [
            Field(view, (name, "cells", key, column["name"]),
                  {"do": "cell", "schedule": name, "key": key, "column": column["name"]})
            for column in row["columns"]
            if column["type"] != "shown" and column["label"] == meaning
        ]  # fmt: skip
    return found[place]


def marks(session: Session, title: str) -> list[Mark]:
    """Return the confirm marks of a section, in order."""
    view = session.views[title]
    found = [
        Mark(view, (name, "confirm"), {"do": "confirm", "name": row["name"]})
        for name, row in view.rows.items()
        if row["kind"] == "entry" and row["confirm"]
    ]
    return found + [
        Mark(view, (name, "cells", key, "*", "confirm"),
             {"do": "confirm_row", "schedule": name, "key": key})
        for name, row, key in cells(view) if row["cells"][key]["*"]["confirm"]
    ]  # fmt: skip


def button(session: Session, title: str, words: str) -> Button:
    """Return a button by its words, or a tool of a row by what it does."""
    view = session.views[title]
    for row in view.rows.values():
        for spec in row.get("buttons", ()):
            if spec["text"] == words:
                return Button(view, (), spec["do"])
    for name, row, key in cells(view):
        if row["fixed"]:
            continue
        tools = {
            "add a row on top": {"do": "add_row", "below": None},
            f"add a row below {key}": {"do": "add_row", "below": key},
            f"remove row {key}": {"do": "remove_row", "key": key},
            f"move row {key} up": {"do": "move_row", "key": key, "by": -1},
            f"move row {key} down": {"do": "move_row", "key": key, "by": 1},
        }
        if words in tools:
            return Button(view, (), {"schedule": name, **tools[words]})
    raise LookupError(f"no button '{words}' in {title}")


def text(session: Session, title: str) -> str:
    """Return all text of a section's view, without markup."""
    view = session.views[title]
    head = view.head
    pieces = [head["number"], head["title"], head["notice"], head["trouble"], *told(view.rows)]
    bare = re.sub(r"<[^>]+>", " ", " ".join(pieces))
    return " ".join(html.unescape(bare).split())


def notices(session: Session) -> str:
    """Return what the bar has to say, in one string."""
    bar = Bar(session)
    bar.show(session.statement)
    return " ".join(bar.state["notices"])


def told(part: Any) -> Iterator[str]:
    """Yield the pieces of HTML and the words of marks and sources in a part of the page."""
    if isinstance(part, list):
        for piece in part:
            yield from told(piece)
    elif isinstance(part, dict):
        for name, piece in part.items():
            if name in HTML or (name == "shown" and isinstance(piece, str)):
                yield piece
            elif name == "totals":
                yield from piece
            elif name == "confirm" and piece:
                yield piece["text"]
            else:
                yield from told(piece)
