"""Digests: of what a result stands on (inputs, formulas, code set, engine), of what is carried."""

from __future__ import annotations

import dataclasses
import hashlib
import json
from typing import TYPE_CHECKING, Any

from calcbook.items import Check, Line, Schedule, Solved, Solver, TableItem
from calcbook.shown import twelve

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.workbook import Workbook


def fingerprint(book: Workbook) -> str:
    """Return the digest of an evaluated workbook.

    It changes with entries and rows as typed, values brought forward, formulas and conditions,
    code set, unit system and engine; not with results, sources, confirmations, prose or where in
    the notebook a section stands.
    """
    readings = book.readings
    basis = {
        "engine": book.engine,
        "code_set": book.code.name,
        "units": book.system,
        "workbook": book.name,
        "mark": book.mark,
        "entries": {name: given.text for name, given in readings.given.items()},
        "rows": {
            name: [[r.key, sorted(r.cells.items())] for r in rows]
            for name, rows in readings.given_rows.items()
        },
        "carried": {name: _carried(c.item) for name, c in readings.carried.items()},
        "formulas": [_formulas(b) for b in book.bound],
    }
    text = json.dumps(basis, sort_keys=True, ensure_ascii=True)
    return hashlib.sha256(text.encode()).hexdigest()


def _carried(item: Mapping[str, Any] | None) -> object:
    if item is None:
        return None
    value = item.get("value")
    if isinstance(value, dict):
        return [twelve(value.get("si")), value.get("unit")]
    columns = [
        [c.get("name"), [twelve(si) for si in c.get("si") or ()], c.get("texts")]
        for c in item.get("columns", ())
    ]
    return [item.get("option"), item.get("text"), item.get("rows"), columns]


def _formulas(bound: Bound) -> list[object]:
    """Return what an item's value depends on, apart from inputs."""
    item = bound.item
    basis: list[object] = [type(item).__name__, item.name, item.when, bound.section.when]
    if isinstance(item, Solved):
        basis += [item.of, item.outcome, item.case]
    elif isinstance(item, Solver):
        basis += [item.by, {role: item.takes[role] for role in sorted(item.takes)}]
    elif isinstance(item, Line):
        takes = sorted((n, u.text) for n, u in item.takes.items())
        gives = item.gives.text if item.gives is not None else ""
        basis += [item.formula, [list(c) for c in item.cases], takes, gives]
    elif isinstance(item, Check):
        basis.append(item.formula)
    elif isinstance(item, Schedule):
        basis += [item.key, item.same_rows]
        if item.shaped is not None:
            basis.append(dataclasses.asdict(item.shaped))
    elif isinstance(item, TableItem) and item.table is not None:
        axes = [[a.name, a.unit.text, list(a.points)] for a in item.table.axes]
        basis += [axes, item.table.values, item.table.unit.text, item.table.outside]
    return basis


def item_digest(item: Mapping[str, Any]) -> str:
    """Return a digest of what is carried: value, unit and sign sense, or rows and columns."""
    value: Mapping[str, Any] = item.get("value") or {}
    columns: Sequence[Mapping[str, Any]] = item.get("columns") or ()
    basis = [
        twelve(value.get("si")),
        value.get("unit"),
        item.get("option"),
        item.get("text"),
        item.get("sign"),
        item.get("rows"),
        [
            [
                c["name"],
                c["unit"],
                [twelve(si) for si in c["si"]],
                c["texts"] if c["si"] == [None] * len(c["texts"]) else 0,
            ]
            for c in columns
        ],
    ]
    return hashlib.sha256(json.dumps(basis, sort_keys=True).encode()).hexdigest()[:16]
