"""What a reader of a statement must know: what failed, what is missing, what nobody confirmed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.run import all_items
from calcbook.standing import is_unconfirmed, unconfirmed_rows

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

_FOLLOWS = "not available because of "


def checks(statement: Mapping[str, object]) -> list[Mapping[str, object]]:
    """Return the checks that apply, in order."""
    return [i for i in all_items(statement) if i["kind"] == "check" and i["applies"]]


def not_satisfied(statement: Mapping[str, object]) -> bool:
    """Whether a check that applies is not satisfied."""
    return any(check["satisfied"] is False for check in checks(statement))


def unconfirmed(statement: Mapping[str, object]) -> list[str]:
    """Return the names of what nobody confirmed for this job; rows with their schedule."""
    found: list[str] = []
    for item in all_items(statement):
        if not item["applies"]:
            continue
        if is_unconfirmed(item):
            found.append(str(item["name"]))
        if keys := unconfirmed_rows(item):
            found.append(f"{item['name']} ({', '.join(keys)})")
    return found


def stale(statement: Mapping[str, object]) -> list[str]:
    """Return the carried values whose source has moved, old and new."""
    found = []
    for item in all_items(statement):
        if not item.get("stale"):
            continue
        origin: Mapping[str, object] = item["from"]
        taken: Mapping[str, object] = item.get("taken") or {}
        old = f"{taken['text']} -> " if taken else "changed, now "
        found.append(f"{item['name']} from {origin['workbook']}.{origin['name']}: "
                     f"{old}{value_text(item)}")  # fmt: skip
    return found


def value_text(item: Mapping[str, object]) -> str:
    """Return the value of an item with its unit, its option, its words or its rows."""
    value = item.get("value")
    if isinstance(value, dict):
        return f"{value['text']} {value['unit']}".rstrip()
    if "rows" in item:
        rows: list[str] = item["rows"]  # type: ignore[assignment]
        return f"{len(rows)} rows: {', '.join(rows)}"
    return str(item.get("option") or item.get("text") or "")


def troubles(statement: Mapping[str, object]) -> list[str]:
    """Return why items could not be accepted or have no value, causes without what follows.

    Where the cause is an item that does not apply, what hangs on it directly stands for it.
    """
    items = [item for item in all_items(statement) if item["applies"]]
    every = {text: text.split("\n", 1)[0] for item in items for text in _troubles(item)}
    causes = [text for text, first in every.items() if _FOLLOWS not in first]
    if not causes:
        named = {name for item in items for name in _names(item)}
        causes = [t for t, first in every.items() if first.rpartition(_FOLLOWS)[2] not in named]
    return causes or list(every)


def _names(item: Mapping[str, object]) -> list[str]:
    """Return the name of an item and, of a schedule, those of its columns."""
    columns: Iterable[Mapping[str, object]] = item.get("columns", ())  # type: ignore[assignment]
    return [str(part["name"]) for part in (item, *columns)]


def _troubles(item: Mapping[str, object]) -> Iterable[str]:
    place = f"{item['number']} {item['name'] or item['meaning']}"
    if item["kind"] == "error":
        yield str(item["text"])
    if item["problem"]:
        yield f"{place}: {item['problem']}"
    if item["kind"] != "schedule" or item["problem"]:
        return
    yield from map(str, item["errors"])  # type: ignore[call-overload]
    for column in item["columns"]:  # type: ignore[attr-defined]
        keys: dict[str, list[str]] = {}
        for key, problem in zip(item["rows"], column["problem"] or (), strict=False):  # type: ignore[call-overload]
            keys.setdefault(problem or "", []).append(key)
        for problem, rows in keys.items():
            if problem:
                whole = rows == item["rows"] or f"row {rows[0]}:" in problem
                row = "" if whole else f", row {', '.join(rows)}"
                yield f"{place}, column {column['name']}{row}: {problem}"
