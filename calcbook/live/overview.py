"""What the bar shows of a statement, as plain data: counts with the places they jump to."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.standing import is_unconfirmed, unconfirmed_rows
from calcbook.wording import counted, verdict

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from calcbook.live.view import SectionView

    Plain = Mapping[str, Any]

#: The counts in the order shown: what there is of it, what one of it is called, and '' for none.
GROUPS = (
    ("checks", "check not satisfied", "checks not satisfied", "checks satisfied"),
    ("problems", "item without a value", "items without a value", ""),
    ("stale", "carried value moved", "carried values moved", "nothing stale"),
    ("unconfirmed", "not confirmed", "not confirmed", "all confirmed"),
)


def counts(statement: Plain) -> list[dict[str, Any]]:
    """Return each count: its words, whether it calls for action, and its places in order."""
    found: dict[str, list[dict[str, str]]] = {group: [] for group, *_ in GROUPS}
    for section, item in _items(statement):
        for group, text in _told(item):
            place = {"text": f"{item['number']} {text}", "section": section, "row": _row(item)}
            found[group].append(place)
    told = []
    for group, one, many, none in GROUPS:
        places = found[group]
        words = f"{len(places)} {one if len(places) == 1 else many}" if places else none
        if group == "checks" and not places:
            words = _checks_words(statement)
        told.append({"id": group, "text": words, "open": bool(places), "places": places})
    return told


def refused(views: Mapping[str, SectionView]) -> dict[str, Any]:
    """Return the count of texts that were not taken and still stand in their fields."""
    places = [
        {"text": f"{', '.join(key)}: '{one.text}'", "section": title, "row": key[0]}
        for title, view in views.items()
        for key, one in view.refused.items()
    ]
    words = f"{counted(len(places), 'text')} not taken" if places else ""
    return {"id": "refused", "text": words, "open": bool(places), "places": places}


def _checks_words(statement: Plain) -> str:
    count = statement["counts"]["checks"]
    return f"{counted(count, 'check')} satisfied" if count else ""


def _items(statement: Plain) -> Iterator[tuple[str, Plain]]:
    """Yield (title of the section, item) of everything that applies."""
    for part in statement["parts"]:
        for item in part.get("items", ()):
            if item["applies"]:
                yield part["title"], item


def _row(item: Plain) -> str:
    """Return the id of an item's row on the page."""
    return str(item["name"] or item["number"])


def _told(item: Plain) -> Iterator[tuple[str, str]]:
    """Yield (group, words) of everything about an item that calls for action."""
    name = item["meaning"] or item["name"] or item["kind"]
    if item["kind"] == "check" and item["satisfied"] is not True:
        yield "checks", f"{name}: {verdict(item)}"
    if item["kind"] == "error" or (item["problem"] and item["kind"] != "check"):
        yield "problems", str(name)
    if item["kind"] == "schedule" and not item["problem"]:
        columns = [c["name"] for c in item["columns"] if any(c["problem"] or ())]
        if columns or item["errors"]:
            yield "problems", f"{name}: {', '.join(columns) or 'not accepted'}"
    if item.get("stale"):
        yield "stale", str(name)
    if is_unconfirmed(item):
        yield "unconfirmed", str(name)
    if rows := unconfirmed_rows(item):
        yield "unconfirmed", f"{name}: {', '.join(rows)}"
