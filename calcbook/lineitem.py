"""A line as plain data: its formula, what a reader substitutes, and its value."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook import solving
from calcbook.bind import symbols
from calcbook.formula import parse
from calcbook.items import Solved, Solver
from calcbook.keyed import texts
from calcbook.printer import place_of
from calcbook.shown import plain_value
from calcbook.tree import KEYED, Call, Name, Quoted, names, walk

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.bind import Bound
    from calcbook.items import Line
    from calcbook.program import Results
    from calcbook.reasons import Reasons
    from calcbook.shown import Printed, Shown
    from calcbook.units import Unit

Plain = dict[str, Any]


class LineWriter:
    """Writes lines, those of one value and those of one row of a schedule."""

    def __init__(
        self, results: Results, shown: Shown, reasons: Reasons, signs: Mapping[str, str]
    ) -> None:
        self.results, self.shown, self.reasons, self.signs = results, shown, reasons, signs

    def single(self, bound: Bound, item: Line, *, usable: bool) -> Plain:
        """Return what a line outside a schedule adds to its item."""
        place = self.results.branch.get(bound.number, 0)
        formula = item.branches[max(place, 0)][1]
        si = self.results.values.get(bound.name)
        printed = self.shown.value(bound.name) if usable else None
        unit = self.shown.display(bound.name)
        out = self.stated(item, place if usable else -1) | {
            "formula": formula,
            "values": self.substitution(bound, formula) if usable else {},
            "value": plain_value(printed, si if isinstance(si, float) else None, unit),
        }
        if item.cases and usable and place >= 0:
            out["why"] = self.reasons.why(item.cases[place][0]) if item.cases[place][0] else ""
        return out

    def in_row(self, bound: Bound, item: Line, row: int, place: int) -> Plain:
        """Return a column's line worked in one row, as an item of its own."""
        formula = item.branches[place][1]
        unit = self.shown.display(bound.name)
        found = self.results.values[bound.name]
        si = float(found[row]) if isinstance(found, np.ndarray) else None
        printed = self.shown.as_stated(bound, place) or self.shown.column(bound.name, unit)[row]
        return {
            "kind": "line",
            "number": bound.number,
            "name": bound.name,
            "meaning": item.meaning,
            "clause": item.clause,
            "note": item.note,
            "problem": None,
            "memory": item.memory,
            "applies": True,
            "why": "",
            "used_by": [],
            "values": self.substitution(bound, formula, row),
            "value": plain_value(printed, si, unit),
            **self.stated(item, place),
            "formula": formula,
        }

    def stated(self, item: Line, place: int) -> Plain:
        """Return what a line states; ``place`` is the case that holds, -1 where none does."""
        return {
            "formula": item.formula,
            "cases": [
                {"when": when, "formula": formula, "holds": count == place}
                for count, (when, formula) in enumerate(item.cases)
            ],
            "takes": {n: u.text for n, u in item.takes.items()},
            "gives": item.gives.text if item.gives is not None else "",
            "solved": self._solved(item),
            "result": item.result,
            "sign": self.signs.get(item.sign, "") if item.sign else "",
        }

    def _solved(self, item: Line) -> Plain | None:
        """Return which outcome of which solver a line is, or None for a formula."""
        home = self.shown.scope.get(item.of) if isinstance(item, Solved) else None
        if not isinstance(item, Solved) or home is None or not isinstance(home.item, Solver):
            return None
        return {"of": item.of, "number": home.number, "words": solving.words(item, home.item)}

    def substitution(self, bound: Bound, formula: str, row: int | None = None) -> Plain:
        """Return what a reader substitutes for each name of a formula; columns stay symbols."""
        own = bound.type.rows if bound.type is not None else None
        values: Plain = {}
        if not formula:
            return values
        for name in symbols(formula):
            home = self.shown.scope.get(name)
            if home is None or home.type is None or home.type.form == "table":
                continue
            if home.type.rows is not None and (home.type.rows != own or row is None):
                continue
            if home.type.form == "text":
                word = self._word(name, row)
                if word:
                    values[name] = {"text": word, "unit": ""}
                continue
            unit = self.shown.operand_unit(bound, name)
            one = self._operand(name, unit, row)
            if one is not None:
                values[name] = {"text": one.text, "unit": unit.text}
        return values | self._looked_up(bound, formula, row)

    def _looked_up(self, bound: Bound, formula: str, row: int | None) -> Plain:
        """Return what a formula looks up in other schedules, under the place of each call.

        A row's own key, by which rows of another schedule are found, stands under its name.
        """
        out: Plain = {}
        for call in walk(parse(formula)):
            if not isinstance(call, Call) or call.function not in KEYED:
                continue
            column, keys, key = call.args
            wanted = key.text if isinstance(key, Quoted) else self._word(names(key)[0], row)
            if isinstance(key, Name) and wanted:
                out[key.name] = {"text": wanted, "unit": ""}
            if call.function != "lookup":
                continue
            if not (isinstance(column, Name) and isinstance(keys, Name)):
                continue
            known = texts(self.results.values.get(keys.name))
            if wanted in known:
                unit = self.shown.operand_unit(bound, column.name)
                one = self.shown.column(column.name, unit)[known.index(wanted)]
                if one is not None:
                    out[place_of(call)] = {"text": one.text, "unit": unit.text}
        return out

    def _operand(self, name: str, unit: Unit, row: int | None) -> Printed | None:
        home = self.shown.scope[name]
        if home.schedule is None:
            return self.shown.value(name, unit)
        return None if row is None else self.shown.column(name, unit)[row]

    def _word(self, name: str, row: int | None) -> str:
        value = self.results.values.get(name)
        if isinstance(value, np.ndarray):
            return str(value[row]) if row is not None else ""
        return value if isinstance(value, str) else ""
