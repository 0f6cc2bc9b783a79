"""Results gathered over all marks of a workbook: one row a mark, one column a result.

A schedule of every mark may be gathered as well, its rows keyed by mark and row: 'B1 A'.
"""

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


def gathered_rows(
    workbook: str, schedule: str, statements: Mapping[str, Mapping[str, Any]]
) -> Plain:
    """Return the rows of one schedule of every mark, each keyed by mark and row: 'B1 A'.

    Parameters
    ----------
    workbook
        The workbook the marks are fillings of.
    schedule
        The name of the schedule in it.
    statements
        By mark, in the order the rows are to have.

    Returns
    -------
    A schedule item with every column of the schedule. A row has the reason in the column's
    ``problem`` where the mark has no value there; a mark without usable rows has one row, keyed by
    the mark alone, with the reason in every column.
    """
    tables = {mark: _schedule(statement, schedule) for mark, statement in statements.items()}
    parts: dict[str, Plain] = {}
    rows: list[str] = []
    for mark, (table, problem) in tables.items():
        keys = [f"{mark} {key}" for key in table["rows"]] if table and not problem else [mark]
        for column in (table or {}).get("columns", ()):
            part = parts.setdefault(column["name"], _blank(column["name"], len(rows)))
            part["unit"] = part["unit"] or column["unit"]
            _append(part, column, problem, len(rows), len(keys))
        rows += keys
        for part in parts.values():
            _append(part, {}, problem or "is not in this mark", len(rows), 0)
    return {
        "kind": "schedule",
        "name": f"*.{schedule}",
        "number": "",
        "meaning": f"{schedule} of every mark of {workbook.replace('-', ' ')}",
        "applies": True,
        "problem": None if tables else f"{workbook} has no marks yet{_FIRST.format(workbook)}",
        "rows": rows,
        "columns": [
            {**part, "problem": part["problem"] if any(part["problem"]) else None}
            for part in parts.values()
        ],
    }


def _schedule(statement: Mapping[str, Any], name: str) -> tuple[Plain | None, str]:
    """Return a schedule of a mark, and why its rows cannot be used."""
    items = (i for part in statement["parts"] for i in part.get("items", ()))
    found = next((i for i in items if i["name"] == name and i["kind"] == "schedule"), None)
    if found is None:
        return None, f"has no schedule '{name}'"
    if not found["applies"]:
        return found, f"does not apply: {found['why']}"
    return found, str(found["problem"] or "")


def _blank(name: str, rows: int) -> Plain:
    """Return a column that the marks before did not have."""
    return {
        "name": name,
        "unit": "",
        "si": [None] * rows,
        "texts": [""] * rows,
        "problem": ["is not in this mark"] * rows,
        "applies": True,
    }


def _append(part: Plain, column: Plain, problem: str, start: int, count: int) -> None:
    """Add the rows of one mark to a column, up to ``start + count`` rows, with the reasons."""
    if column and not problem:
        idle = "" if column.get("applies", True) else "does not apply"
        reasons = [idle or p for p in column["problem"] or [""] * count]
        part["si"] += column["si"]
        part["texts"] += column["texts"]
        part["problem"] += reasons
    lacking = start + count - len(part["si"])
    part["si"] += [None] * lacking
    part["texts"] += [""] * lacking
    part["problem"] += [problem or "is not in this mark"] * lacking


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
