"""The ``describe`` command: what a workbook takes and what it gives."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import json
from typing import TYPE_CHECKING

from calcbook.commands.common import Progress, find_target
from calcbook.inputs import range_text
from calcbook.items import Carry, Choice, Entry, Line, Schedule, Text
from calcbook.run import Filling, Runner
from calcbook.units import pretty_unit

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.items import Item
    from calcbook.workbook import Workbook

Plain = dict[str, object]
_GROUPS = ("entries", "choices", "texts", "carried", "schedules", "results")


def describe(arguments: Namespace) -> int:
    """Print the entries, choices, schedules and results of a workbook."""
    target = find_target(arguments.workbook)
    with Progress() as progress:
        book, _ = Runner(target.job, progress).run(Filling(target.notebook, target.mark))
    found = description(book)
    print(json.dumps(found, indent=2) if arguments.json else as_text(found))
    return 0


def description(book: Workbook) -> Plain:
    """Return what an evaluated workbook takes and gives, by group, as plain data."""
    groups: dict[str, list[Plain]] = {group: [] for group in _GROUPS}
    for bound in book.bound:
        group = _group(bound)
        if group and bound.schedule is None and not bound.problem:
            groups[group].append(_plain(bound, book))
    return {"workbook": book.name, "title": book.title, "code_set": book.code.name,
            "units": book.system, **groups}  # fmt: skip


def _group(bound: Bound) -> str:
    item = bound.item
    if isinstance(item, Line):
        return "results" if item.result else ""
    groups: dict[type[Item], str] = {
        Entry: "entries", Choice: "choices", Text: "texts", Carry: "carried",
        Schedule: "schedules",
    }  # fmt: skip
    return groups.get(type(item), "")


def _plain(bound: Bound, book: Workbook) -> Plain:
    item = bound.item
    found: Plain = {"name": item.name, "meaning": item.meaning}
    if isinstance(item, Schedule):
        return found | {
            "key": item.key_heading, "rows": book.readings.keys.get(bound.rows, []),
            "entered": not (item.fixed or item.same_rows or item.name in book.readings.carried),
            "columns": [_plain(c, book) | {"computed": isinstance(c.item, Line)}
                        for c in bound.columns if not c.problem],
        }  # fmt: skip
    if isinstance(item, (Choice, Carry)) and item.labels:
        found |= {"options": dict(item.labels)}
    elif isinstance(item, (Entry, Line)) or (isinstance(item, Carry) and not item.text):
        found |= {"unit": _unit(item, book), "range": range_text(item)}
    if isinstance(item, Line):
        return found | {"sign": book.signs.get(item.sign, "")}
    if isinstance(item, Carry):
        found |= {"from": item.origin}
    given = book.readings.given.get(item.name)
    return found | ({"value": given.text} if given is not None else {})


def _unit(item: Entry | Carry | Line, book: Workbook) -> str:
    if item.kind is None:
        return ""
    return (item.kind.si if book.system == "SI" else item.kind.us).text


def as_text(found: Mapping[str, object]) -> str:
    """Return a description as text for the reader."""
    lines = [f"{found['title']} ({found['workbook']}, {found['code_set']})"]
    for group in _GROUPS:
        items: Sequence[Mapping[str, object]] = found[group]  # type: ignore[assignment]
        if items:
            lines += ["", group]
            for item in items:
                lines += _item_lines(item, "  ")
    return "\n".join(lines)


def _item_lines(item: Mapping[str, object], margin: str) -> list[str]:
    facts = [
        f"in {pretty_unit(str(item['unit']))}" if item.get("unit") else "",
        f"range {item['range']}" if item.get("range") else "",
        f"from {item['from']}" if item.get("from") else "",
        f"positive {item['sign']}" if item.get("sign") else "",
        f"now {item['value']}" if item.get("value") else "",
        "computed" if item.get("computed") else "",
        f"rows {', '.join(map(str, item['rows']))}" if item.get("rows") else "",  # type: ignore[call-overload]
    ]
    facts = [fact for fact in facts if fact]
    lines = [
        f"{margin}{item['name']:<14} {item['meaning']}{'; ' if facts else ''}{'; '.join(facts)}"
    ]
    options: Mapping[str, str] = item.get("options") or {}  # type: ignore[assignment]
    for option, label in options.items():
        lines.append(f"{margin}    {option}" + (f"  {label}" if label != option else ""))
    for column in item.get("columns", ()):  # type: ignore[attr-defined]
        lines += _item_lines(column, f"{margin}  ")
    return lines
