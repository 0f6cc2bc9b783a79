"""Results gathered over all marks of a workbook: one row a mark, one column a result."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

Plain = dict[str, Any]
NUMBERS = {"entry", "line", "carried"}
_FIRST = "; make one with: calcbook set {}:C-1 NAME=VALUE"


def gathered(workbook: str, statements: Mapping[str, Mapping[str, Any]]) -> Plain:
    """Return a schedule over the marks of a workbook, from the statement of each.

    Parameters
    ----------
    workbook
        The workbook the marks are fillings of.
    statements
        By mark, in the order the rows are to have.

    Returns
    -------
    A schedule item whose columns are the named entries, choices, words and lines of the workbook,
    and under 'column.largest' and the like the row that governs a column of a schedule of it; a
    mark in which one has no value has the reason in the column's ``problem``.
    """
    by_mark = {mark: dict(_named(statement)) for mark, statement in statements.items()}
    found = dict.fromkeys(name for items in by_mark.values() for name in items)
    return {
        "kind": "schedule",
        "name": "*",
        "number": "",
        "meaning": f"marks of {workbook.replace('-', ' ')}",
        "applies": True,
        "problem": None if by_mark else f"{workbook} has no marks yet{_FIRST.format(workbook)}",
        "rows": list(by_mark),
        "columns": [_column(name, by_mark) for name in found],
    }


def _named(statement: Mapping[str, Any]) -> Iterator[tuple[str, Plain]]:
    for part in statement["parts"]:
        for item in part.get("items", ()):
            if item["name"] and item["kind"] in {*NUMBERS, "choice", "text"}:
                yield item["name"], item
            for extreme in item.get("envelope", ()):
                yield f"{extreme['column']}.{extreme['which']}", {**item, "text": extreme["row"]}


def _column(name: str, by_mark: Mapping[str, Mapping[str, Plain]]) -> Plain:
    cells = [_cell(items.get(name)) for items in by_mark.values()]
    units = [unit for _, _, unit, _ in cells if unit is not None]
    problems = [reason for *_, reason in cells]
    return {
        "name": name,
        "unit": units[0] if units else "",
        "si": [si for si, *_ in cells],
        "texts": [text for _, text, *_ in cells],
        "problem": problems if any(problems) else None,
        "applies": True,
    }


def _cell(item: Plain | None) -> tuple[float | None, str, str | None, str]:
    """Return SI value, text, unit and problem of one mark's item."""
    if item is None:
        return None, "", None, "is not in this mark"
    if not item["applies"]:
        return None, "", None, f"does not apply: {item['why']}"
    if item["problem"]:
        return None, "", None, str(item["problem"])
    value = item.get("value")
    if value is None:
        return None, str(item.get("option") or item.get("text") or ""), None, ""
    return value["si"], str(value["text"]), str(value["unit"]), ""
