"""Finding the fields and the text of a view, as a person sees them."""

from __future__ import annotations

import html
import re
from typing import TYPE_CHECKING

import ipywidgets as widgets

if TYPE_CHECKING:
    from collections.abc import Iterator

    from calcbook.live import Session


def every(widget: widgets.Widget) -> Iterator[widgets.Widget]:
    """Yield a widget and all that is in it, except what is out of sight."""
    if getattr(getattr(widget, "layout", None), "display", None) == "none":
        return
    yield widget
    for child in getattr(widget, "children", ()):
        yield from every(child)


def field(session: Session, title: str, meaning: str, place: int = 0) -> widgets.Widget:
    """Return the field in a section whose tooltip says what it is."""
    kinds = (widgets.Text, widgets.Dropdown)
    found = [w for w in every(session.views[title].box)
             if isinstance(w, kinds) and w.tooltip == meaning]  # fmt: skip
    return found[place]


def marks(session: Session, title: str) -> list[widgets.Checkbox]:
    """Return the confirm marks of a section, in order."""
    return [w for w in every(session.views[title].box) if isinstance(w, widgets.Checkbox)]


def button(session: Session, title: str, tip: str) -> widgets.Button:
    """Return a button by its tooltip, or else by its words."""
    found = [w for w in every(session.views[title].box) if isinstance(w, widgets.Button)]
    return next(w for w in found if tip in (w.tooltip, w.description))


def text(session: Session, title: str) -> str:
    """Return all text of a section's view, without markup and style sheet."""
    pieces = [w.value for w in every(session.views[title].box) if isinstance(w, widgets.HTML)]
    bare = re.sub(r"<style>.*?</style>", "", " ".join(pieces), flags=re.DOTALL)
    return " ".join(html.unescape(re.sub(r"<[^>]+>", " ", bare)).split())
