"""What a reader of a statement must know: what failed, what is missing, what nobody confirmed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.run import all_items
from calcbook.standing import is_unconfirmed, unconfirmed_rows
from calcbook.wording import counted

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

ISSUE = ("job_number", "prepared_by", "issue_date")
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
    """Return the carried values whose source has moved, old and new; of rows only that they did.

    A schedule that has the rows of another one has no source of its own, and is not named.
    """
    found = []
    for item in all_items(statement):
        origin: Mapping[str, object] | None = item.get("from")
        if not item.get("stale") or origin is None:
            continue
        taken: Mapping[str, object] = item.get("taken") or {}
        now = value_text(item)
        moved = f"{taken['text']} -> {now}" if taken else f"{now}, changed since taken"
        found.append(f"{item['name']} from {origin['workbook']}.{origin['name']}: {moved}")
    return found


def nothing_entered(statement: Mapping[str, object]) -> list[str]:
    """Return which of the words a package cannot be issued without are empty."""
    return [
        str(item["name"]) for item in all_items(statement)
        if item["kind"] == "text" and item["applies"] and item["name"] in ISSUE and not item["text"]
    ]  # fmt: skip


def value_text(item: Mapping[str, object]) -> str:
    """Return the value of an item with its unit, its option, its words or its rows."""
    value = item.get("value")
    if isinstance(value, dict):
        return f"{value['text']} {value['unit']}".rstrip()
    if "rows" in item:
        rows: list[str] = item["rows"]  # type: ignore[assignment]
        return counted(len(rows), "row")
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
