"""Schedules and tables as data for page.typ."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from calcbook import formula, typeset, units
from calcbook.pack import nodes
from calcbook.pack.nodes import Node, joined, phrase, strong, symbol, words
from calcbook.tree import Quoted, names, walk
from calcbook.wording import amount, cases_told, solved_words

if TYPE_CHECKING:
    from collections.abc import Collection, Sequence

    from calcbook.pack.anchors import Item

NUMBER = re.compile(r"([+-]?\d+(?:\.(\d*))?(?:[eE][+-]?\d+)?)(?:\s+(\D.*))?")
OWN_NUMBER = re.compile(r"(?<=_)\d+$")
WORDY = ("text", "choice")
NAMED_ROWS = 6
PROBES = 3
LONGEST_CONDITION = 90  # of a case by the clause; a longer one is read there
Cell = dict[str, Any]
Column = dict[str, Any]


def table(item: Item) -> dict[str, Any]:
    """Return a schedule's columns, the key column first, ready to be laid out."""
    shown = [column for column in item["columns"] if column.get("applies", True)]
    columns = [_key_column(item), *(_column(item, column) for column in shown)]
    row = item.get("governing")
    if row and row["row"] in item["rows"]:
        place = item["rows"].index(row["row"])
        for column in columns:
            column["cells"][place]["bold"] = True
    totals = any(column.get("total") for column in item["columns"])
    return {"columns": columns, "rows": len(item["rows"]), "totals": totals}


def lookup_table(item: Item) -> dict[str, Any]:
    """Return a one- or two-way table as columns, the first axis down the page."""
    down, *across = item["axes"]
    first = _numbers(down["name"], down["unit"], down["texts"])
    if not across:
        columns = [first, _numbers(item["name"], item["unit"], item["texts"])]
    else:
        unit = units.pretty_unit(item["unit"])
        columns = [first]
        for place, point in enumerate(across[0]["texts"]):
            column = _numbers("", "", [row[place] for row in item["texts"]])
            at = typeset.number(point, across[0]["unit"], "plain")
            column["head"] = [[symbol(across[0]["name"]), f" = {at}"], [unit]]
            columns.append(column)
    return {"columns": columns, "rows": len(down["points"]), "totals": False}


def legend(item: Item) -> list[list[Node]]:
    """Return what each column is, in their order; a formula stands on a line of its own.

    A column worked in full under the schedule has its formula there. Of numbered columns alike
    (P_1, P_2, P_3) the first is told, and that the others are likewise.
    """
    worked = {
        (line.get("name"), line.get("formula"))
        for line in (item.get("governing") or {}).get("lines", ())
    }
    lines: list[list[Node]] = []
    told: list[list[Node]] = []
    for column, alike in _alike(item["columns"], {name for name, _ in worked}):
        others = _likewise(alike)
        clause = f" ({words(column['clause'])})" if column.get("clause") else ""
        meaning = phrase(column.get("meaning", ""))
        formulas = {case["formula"] for case in column.get("cases") or ()} or {column["formula"]}
        if not column.get("applies", True):
            told.append([symbol(column["name"]), " ", *meaning, ": not applied"])
        elif column.get("solved"):
            said = [" ", *meaning, f", {solved_words(column)}{clause}"]
            told.append([symbol(column["name"]), *said, *others])
        elif column["role"] == "computed" and _listed(column, item["rows"]):
            told.append([symbol(column["name"]), " ", *meaning, f", by row{clause}"])
        elif column["role"] == "computed" and {(column["name"], f) for f in formulas} - worked:
            lines += [joined(told, "; "), *_definitions(column, [*meaning, clause])]
            lines[-1] = [*lines[-1], *others]
            told = []
        elif column["role"] not in WORDY and "labels" not in column:  # words are headed by words
            role = {"entered": ", entered", "carried": ", brought forward"}.get(column["role"], "")
            role = "" if item.get("fixed") else role
            told.append([symbol(column["name"]), " ", *meaning, f"{role}{clause}"])
    return [line for line in (*lines, joined(told, "; ")) if line]


def _alike(columns: Sequence[Column], worked: Collection[str]) -> list[tuple[Column, list[Column]]]:
    """Return the columns, each with those after it that are alike but for their number.

    A column that is worked in full elsewhere stands for itself.
    """
    groups: list[tuple[Column, list[Column]]] = []
    for column in columns:
        pattern = None if column["name"] in worked else _pattern(column)
        if pattern is not None and groups and pattern == _pattern(groups[-1][0]):
            groups[-1][1].append(column)
        else:
            groups.append((column, []))
    return groups


def _pattern(column: Column) -> tuple[object, ...] | None:
    """Return what is told of a numbered column with its number left open; None for another."""
    found = OWN_NUMBER.search(column["name"])
    computed = column["role"] == "computed" or bool(column.get("solved"))
    if not found or not computed or not column.get("applies", True):
        return None
    number = found[0]
    own = re.compile(
        rf"(?<=[_A-Za-z]){number}(?![0-9A-Za-z+-])|(?<=== ){number}\b|(?<='){number}(?=')"
    )
    cases = [
        (own.sub("#", case["when"]), own.sub("#", case["formula"]), case.get("holds"))
        for case in column.get("cases") or ()
    ]
    told = (column["name"], column["formula"], solved_words(column), column.get("clause", ""))
    meaning = re.sub(rf"\b{number}\b", "#", own.sub("#", column.get("meaning", "")))
    return meaning, *(own.sub("#", text) for text in told), *cases


def _likewise(alike: Sequence[Column]) -> list[Node]:
    """Return ', and P_2 to P_6 likewise', or nothing."""
    if not alike:
        return []
    last = [" to ", symbol(alike[-1]["name"])] if len(alike) > 1 else []
    return [", and ", symbol(alike[0]["name"]), *last, " likewise"]


def _listed(column: Column, rows: Sequence[str]) -> bool:
    """Whether a column lists a number for each row of a fixed table: its cells say it all."""
    cases = column.get("cases") or ()
    for case in cases:
        test = formula.parse(case["when"]) if case["when"] else None
        keys = [p.text for p in walk(test) if isinstance(p, Quoted)] if test is not None else []
        if not keys or not set(keys) <= set(rows) or names(formula.parse(case["formula"])):
            return False
    return bool(cases)


def _definitions(column: Column, meaning: list[Node]) -> list[list[Node]]:
    """Return a computed column's formula and meaning, or its meaning and the formula by case."""
    if not column.get("cases"):
        return [[_definition(column["name"], column["formula"]), ", ", *meaning]]
    holding = [case for case in column["cases"] if case.get("holds")] or column["cases"]
    lines: list[list[Node]] = [[symbol(column["name"]), " ", *meaning, ", by case:"]]
    for text, conditions in cases_told({**column, "cases": holding}):
        when = [[_condition(test)] if test else ["otherwise"] for test in conditions]
        plain = " or ".join(
            typeset.expression(formula.parse(test), "plain") for test in conditions if test
        )
        if len(plain) > LONGEST_CONDITION and column.get("clause"):
            when = []  # the clause says it
        where = " where " if when and any(conditions) else " "
        lines.append([_definition(column["name"], text), where, *joined(when, " or ")])
    return lines


def _condition(text: str) -> Node:
    tree = formula.parse(text)
    return nodes.math(typeset.expression(tree, "typst"), typeset.expression(tree, "plain"))


def _definition(name: str, text: str) -> Node:
    tree = typeset.expression(formula.parse(text), "typst")
    code = f"display({typeset.symbol(name, 'typst')} = {tree})"
    return nodes.math(code, typeset.spoken(name, text, {}, None))


def remarks(item: Item) -> list[list[Node]]:
    """Return what is said under a schedule: governing row and problems, in words."""
    said: list[list[Node]] = []
    governs = [
        [strong(words(part["row"])), f", {part['which']} ", symbol(part["column"]),
         f" = {amount(part['value'])}"]
        for part in item.get("envelope", ())
    ]  # fmt: skip
    if governs:
        said.append(["Governing row: ", *joined(governs, "; "), "."])
    said += [[strong("Not accepted: "), words(text)] for text in item.get("errors", ())]
    for column in item["columns"]:
        rows: dict[str, list[str]] = {}
        for key, problem in zip(item["rows"], column.get("problem") or (), strict=False):
            if problem:
                rows.setdefault(problem, []).append(key)
        for problem, keys in rows.items():
            told = f" in {named(keys, len(item['rows']))}: "
            said.append([strong("Problem: "), symbol(column["name"]), told, *phrase(problem)])
    return said


def confirmations(item: Item) -> list[list[Node]]:
    """Return which rows are confirmed by whom, and which are not, with their sources."""
    groups: dict[str, list[str]] = {}
    rows = item["rows"]
    by_row = [] if item.get("fixed") or item.get("from") else item.get("confirmed") or []
    for key, by in zip(rows, by_row, strict=False):
        groups.setdefault(by, []).append(key)
    notes: list[list[Node]] = []
    for by, keys in groups.items():
        which = named(keys, len(rows))
        if by:
            notes.append(
                [f"confirmed {words(by)}" + ("" if which == "every row" else f": {which}")]
            )
        else:
            notes.insert(0, [strong("not confirmed"), f": {which}"])
    sources = dict.fromkeys(source for source in item.get("sources") or () if source)
    notes += [[words(source)] for source in list(sources)[:PROBES]]
    return notes


def named(keys: Sequence[str], total: int) -> str:
    """Return the rows by name, or their number where there are many."""
    if len(keys) == total and total > 1:
        return "every row"
    shown = ", ".join(words(key) for key in keys[:NAMED_ROWS])
    more = len(keys) - NAMED_ROWS
    return f"{shown} and {more} more" if more > 0 else shown


def _numbers(name: str, unit: str, texts: Sequence[str]) -> Column:
    head: list[list[Node]] = [[symbol(name)], [units.pretty_unit(unit)]] if name else []
    return _laid_out(head, [_cell(text, "") for text in texts], None, number=True)


def _key_column(item: Item) -> Column:
    cells: list[Cell] = [{"c": [words(key)]} for key in item["rows"]]
    total: Cell | None = {"c": ["Total"]}
    return _laid_out([[words(item.get("key") or "")]], cells, total, number=False)


def _column(item: Item, column: Column) -> Column:
    unit = column.get("unit") or ""
    entered = column["role"] in ("entered", *WORDY) and not item.get("fixed")
    problems = column.get("problem") or [None] * len(item["rows"])
    wordy = column["role"] in WORDY or "labels" in column
    cells = [
        _cell(text or ("" if p is None else "n/a"), unit, wordy=wordy)
        for text, p in _pairs(column, problems)
    ]
    for cell, text, typed in zip(cells, column["texts"], column.get("typed") or (), strict=False):
        cell["typed"] = entered and _as_typed(text, typed, unit)
    total = column.get("total")
    number = not wordy and all(c["digits"] is not None or c["void"] for c in cells)
    if number:
        head: list[list[Node]] = [[symbol(column["name"])], [units.pretty_unit(unit)]]
    else:
        head = [phrase(column.get("meaning") or column["name"])]
    sum_cell = _cell(total.get("text") or "n/a", unit) if total else None
    return _laid_out(head, cells, sum_cell, number=number)


def _as_typed(text: str, typed: str, unit: str) -> bool:
    """Whether a cell shows what was typed, and not the same quantity in another unit."""
    return text == typed.strip().removesuffix(unit).strip()


def _pairs(column: Column, problems: Sequence[str | None]) -> list[tuple[str | None, str | None]]:
    return list(zip(column["texts"], problems, strict=True))


def _cell(text: str, unit: str, *, wordy: bool = False) -> Cell:
    """Return a cell; digits = how many follow the decimal point, None when it is no number."""
    found = None if wordy else NUMBER.fullmatch(text.strip())
    if not found:
        return {"c": [words(text)], "digits": None, "void": text in ("", "n/a")}
    own = found[3] if found[3] and units.pretty_unit(found[3]) != units.pretty_unit(unit) else ""
    shown = typeset.number(found[1], own, "plain")
    digits = None if own else (-1 if found[2] is None else len(found[2]))
    return {"c": [shown], "digits": digits, "void": bool(own)}


def _laid_out(
    head: list[list[Node]], cells: list[Cell], total: Cell | None, *, number: bool
) -> Column:
    """Return a column with its cells padded so that the decimal points stand under each other."""
    everything = [*cells, total] if total else cells
    most = max((c.get("digits") or 0 for c in everything), default=0)
    for cell in everything:
        digits = cell.pop("digits", None)
        cell.pop("void", None)
        padded = number and digits is not None and most > 0
        cell["pad"] = most - max(digits, 0) if padded and digits is not None else 0
        cell["dot"] = bool(padded and digits == -1)
    longest = sorted(everything, key=lambda c: len(str(c["c"])) + c["pad"], reverse=True)
    return {
        "head": [line for line in head if any(line)],
        "number": number,
        "cells": cells,
        "total": total or {"c": [], "pad": 0, "dot": False},
        "probes": longest[:PROBES],
    }
