"""A schedule as plain data: columns, totals, the governing row worked in full, the envelope."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook import shaping, units
from calcbook.items import Carry, Choice, Entry, Item, Line, Schedule, Solved, Text
from calcbook.keyed import texts
from calcbook.shown import Printed, Shown, finite, plain_value

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.lineitem import LineWriter
    from calcbook.workbook import Workbook

Plain = dict[str, Any]
ROLES: dict[type[Item], str] = {
    Entry: "entered",
    Text: "text",
    Choice: "choice",
    Carry: "carried",
    Line: "computed",
    Solved: "computed",
}


class ScheduleWriter:
    """Writes the schedules of an evaluated workbook."""

    def __init__(
        self,
        book: Workbook,
        shown: Shown,
        lines: LineWriter,
        used_by: Mapping[str, list[str]],
    ) -> None:
        self.program, self.readings, self.results = book.program, book.readings, book.results
        self.shown, self.lines, self.used_by = shown, lines, used_by

    def write(self, bound: Bound, item: Schedule, *, applies: bool) -> Plain:
        """Return what a schedule adds to its item."""
        keys = self.readings.keys.get(bound.rows, [])
        rows = self.readings.given_rows.get(bound.rows, [])
        carried = self.readings.carried.get(bound.rows)
        workbook, dot, name = item.origin.partition(".")
        works = applies and bound.rows not in self.readings.problems
        ranked = self._ranked(item, keys) if works else []
        lost = {c.number for c in bound.columns if c.type is None or c.problem}
        return {
            "key": item.key_heading,
            "rows": list(keys),
            "confirmed": [r.confirmed for r in rows],
            "sources": [r.source for r in rows],
            "fixed": item.fixed or bool(item.same_rows) or item.name in self.readings.shaped,
            "shaped": self._shaped(item),
            "fallback": item.name in self.readings.fallbacks,
            "stale": bool(item.origin) and carried is not None and carried.taken is not None,
            "from": {"workbook": workbook, "name": name} if dot else None,
            "columns": [self._column(c, item, keys) for c in bound.columns if c.number not in lost],
            "errors": [
                *(_why_not_there(c) for c in bound.columns if c.number in lost),
                *bound.faults,
            ],
            "governing": self._governing(bound, ranked, keys),
            "envelope": [self._extreme(*rank, keys) for rank in ranked],
        }

    def _shaped(self, item: Schedule) -> str:
        """Return what the rows come from where a shape gives them, '' where they are typed."""
        here = item.shaped is not None and item.name in self.readings.shaped
        return shaping.words(item.shaped) if here and item.shaped is not None else ""

    # --- columns ----------------------------------------------------------------------------

    def _column(self, bound: Bound, schedule: Schedule, keys: Sequence[str]) -> Plain:
        item = bound.item
        plain: Plain = {
            "name": bound.name,
            "number": bound.number,
            "meaning": item.meaning,
            "unit": "",
            "role": self._role(bound, schedule),
            "clause": item.clause,
            "note": item.note,
            "memory": item.memory,
            "applies": self.results.applies.get(bound.number, True),
            "result": False,
            "sign": "",
            "formula": "",
            "cases": [],
            "takes": {},
            "gives": "",
            "solved": None,
            "problem": self._problems(bound, len(keys)),
            "total": None,
            "used_by": self.used_by.get(bound.name, []),
            "typed": self._typed(bound, len(keys)),
        }
        if isinstance(item, Line):
            plain |= self.lines.stated(item, -1)
            for case, holds in zip(plain["cases"], self._holding(bound, len(keys)), strict=False):
                case["holds"] = holds
        if bound.type is not None and bound.type.form == "text":
            words = self._words(bound, len(keys))
            labels = dict(item.labels) if isinstance(item, (Choice, Carry)) else {}
            return plain | {"texts": words, "si": [None] * len(keys), "labels": labels}
        return plain | self._numbers(bound, schedule, len(keys))

    def _role(self, bound: Bound, schedule: Schedule) -> str:
        """Return what a column is; one that a shape gives is nothing typed."""
        role = "text" if bound.is_words else ROLES[type(bound.item)]
        by_shape = schedule.name in self.readings.shaped and schedule.shaped is not None
        if role == "entered" and by_shape and bound.name in schedule.shaped.gives:  # type: ignore[union-attr]
            return "carried"
        return role

    def _words(self, bound: Bound, count: int) -> list[str]:
        found = self.results.values.get(bound.name) if bound.is_words else None
        if found is not None:
            return texts(found)
        return self.readings.words.get(bound.name, [""] * count)

    def _holding(self, bound: Bound, count: int) -> list[bool]:
        """Return which cases of a column's line hold in some row; none where it has no values."""
        open_rows = np.ones(count, dtype=bool)
        held: list[bool] = []
        if not isinstance(self.results.values.get(bound.name), np.ndarray):
            return held
        for test, _ in self.program.step(bound).branches:
            here = open_rows.copy()
            if test is not None:
                here &= np.asarray(self.program.run(test, self.results.values), dtype=bool)
            held.append(bool(here.any()))
            open_rows &= ~here
        return held

    def _problems(self, bound: Bound, count: int) -> list[str] | None:
        """Return why each row has no value, '' where it has, or None where all have theirs."""
        if not self.results.applies.get(bound.number, True):
            return None
        whole = self.results.problems.get(bound.number) or self.readings.problems.get(bound.name)
        if whole:
            return [whole] * count
        rows = self.results.row_problems.get(bound.name)
        return list(rows) if rows else None

    def _typed(self, bound: Bound, count: int) -> list[str]:
        if bound.schedule is None or not isinstance(bound.item, (Entry, Text, Choice, Carry)):
            return []
        if bound.schedule.name in self.readings.shaped:
            return [""] * count
        rows = self.readings.given_rows.get(bound.schedule.rows, [])
        default = "" if isinstance(bound.item, Carry) else bound.item.value
        return [r.cells.get(bound.name, default) for r in rows] or [""] * count

    def _numbers(self, bound: Bound, schedule: Schedule, count: int) -> Plain:
        unit = self.shown.display(bound.name)
        printed = self.shown.column(bound.name, unit)
        found = self.results.values.get(bound.name)
        si = [finite(float(v)) for v in found] if isinstance(found, np.ndarray) else [None] * count
        total = None
        if bound.name in schedule.totals and isinstance(found, np.ndarray):
            total = self._total(bound, float(found.sum()), printed, unit)
        return {
            "unit": unit.text,
            "texts": [p.text if p else "" for p in printed] or [""] * count,
            "si": si,
            "total": total,
        }

    def _total(
        self, bound: Bound, value: float, printed: Sequence[Printed | None], unit: units.Unit
    ) -> Plain:
        """Return a column's total, with no more figures than the printed rows add up to."""
        if not math.isfinite(value):
            return plain_value(None, None, unit)
        decimals = self.shown.decimals(bound.name, unit)
        by_hand = sum(p.si for p in printed if p is not None) / unit.factor
        while decimals and (
            abs(round(by_hand, decimals) - round(value / unit.factor, decimals))
            > 1.000001 * 10.0**-decimals
        ):
            decimals -= 1
        text = units.format_number(value / unit.factor, decimals)
        return plain_value(Printed(text, value), value, unit)

    # --- the rows that govern ---------------------------------------------------------------

    def _ranked(self, item: Schedule, keys: Sequence[str]) -> list[tuple[str, str, int]]:
        """Return (column, which, row) of every column whose governing row is asked for."""
        out = []
        for column, which in item.governing:
            found = self.results.values.get(column)
            if not keys or not isinstance(found, np.ndarray) or not np.isfinite(found).any():
                continue
            order = {"largest": found, "smallest": -found}.get(which, np.abs(found))
            out.append((column, which, int(np.nanargmax(order))))
        return out

    def _governing(
        self, bound: Bound, ranked: Sequence[tuple[str, str, int]], keys: Sequence[str]
    ) -> Plain | None:
        """Return the governing rows, each with what leads to its value worked in full."""
        if not ranked:
            return None
        wanted: dict[tuple[int, str], None] = {}
        for column, _, row in ranked:
            wanted |= dict.fromkeys((row, name) for name in self._leading_to(column, bound))
        lines = [
            self.lines.in_row(c, c.item, row, self._case(c, row)) | {"row": keys[row]}
            for row in dict.fromkeys(row for _, _, row in ranked)
            for c in bound.columns
            if isinstance(c.item, Line) and (row, c.name) in wanted
        ]
        column, which, row = ranked[0]
        return {"row": keys[row], "why": f"{which} {column}", "column": column, "lines": lines}

    def _leading_to(self, column: str, bound: Bound) -> set[str]:
        """Return the columns of this schedule that a column comes from, and itself."""
        wanted = {column}
        for part in reversed(bound.columns):
            if part.name in wanted:
                wanted.update(part.needs)
        known = {c.name for c in bound.columns if self.results.values.get(c.name) is not None}
        return wanted & known

    def _extreme(self, column: str, which: str, row: int, keys: Sequence[str]) -> Plain:
        """Return which row governs a column, with its value."""
        unit = self.shown.display(column)
        printed = self.shown.column(column, unit)[row]
        found = self.results.values[column]
        si = float(found[row]) if isinstance(found, np.ndarray) else None
        return {
            "column": column,
            "meaning": self.shown.scope[column].item.meaning,
            "which": which,
            "row": keys[row],
            "value": plain_value(printed, si, unit),
        }

    def _case(self, bound: Bound, row: int) -> int:
        """Return which case of a column's line holds in one row."""
        for count, (test, _) in enumerate(self.program.step(bound).branches):
            if test is None:
                return count
            held = np.atleast_1d(np.asarray(self.program.run(test, self.results.values)))
            if held[row if len(held) > 1 else 0]:
                return count
        return 0


def _why_not_there(column: Bound) -> str:
    """Return why a column could not be accepted, or its condition cannot be decided."""
    return column.problem or f"{column.name} is {column.lacks}"
