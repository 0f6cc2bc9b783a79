"""The statement: the complete plain-data description of an evaluated workbook.

Screen, notebook output, pack, carries, JSON and tests all read it; nothing else formats a number.
Its layout is described by ``schema()`` and versioned by ``SCHEMA``.
"""

from __future__ import annotations

import json
from functools import cache
from importlib import resources
from typing import TYPE_CHECKING, Any

from calcbook import figures, solvers, solving, units
from calcbook.errors import CalcbookError
from calcbook.fingerprint import fingerprint
from calcbook.items import (
    Broken,
    Carry,
    Check,
    Choice,
    Entry,
    Figure,
    Item,
    Line,
    Remark,
    Schedule,
    Solved,
    Solver,
    TableItem,
    Text,
)
from calcbook.lineitem import LineWriter
from calcbook.reading import range_text
from calcbook.reasons import Reasons
from calcbook.scheduleitem import ScheduleWriter
from calcbook.shown import Printed, Shown, exact_text, plain_value, twelve
from calcbook.standing import is_input, is_unconfirmed, unconfirmed_rows
from calcbook.tree import Compare, Quoted, walk
from calcbook.verdict import ratio, ratio_text, side_texts

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from calcbook.bind import Bound
    from calcbook.inputs import Readings
    from calcbook.program import Results
    from calcbook.section import Section
    from calcbook.table import Table
    from calcbook.workbook import Workbook

__all__ = ["SCHEMA", "Writer", "fingerprint", "plain_value", "schema", "twelve", "twelve_digits"]

SCHEMA = 1
Plain = dict[str, Any]
KINDS: dict[type[Item], str] = {
    Entry: "entry",
    Text: "text",
    Choice: "choice",
    Carry: "carried",
    Line: "line",
    Solved: "line",
    Solver: "solver",
    TableItem: "table",
    Schedule: "schedule",
    Check: "check",
    Remark: "remark",
    Broken: "error",
    Figure: "figure",
}
RESULT = ("name", "meaning", "value", "sign", "number", "problem")


@cache
def schema() -> dict[str, Any]:
    """Return the JSON Schema (draft 2020-12) that every statement follows."""
    text = resources.files("calcbook").joinpath("statement.schema.json").read_text("utf-8")
    return dict(json.loads(text))


class Writer:
    """Writes the statement of one evaluated workbook."""

    def __init__(self, book: Workbook) -> None:
        self.book = book
        self.readings: Readings = book.readings
        self.results: Results = book.results
        self.shown = Shown(book.program, book.readings, book.results, book.scope, book.system)
        self.reasons = Reasons(book.program, book.results, self.shown)
        self.used_by = book.used_by
        self.lines = LineWriter(book.results, self.shown, self.reasons, book.signs)
        self.schedules = ScheduleWriter(book, self.shown, self.lines, self.used_by)

    def write(self) -> Plain:
        """Return the statement without the notebook's prose, which the runner adds."""
        book = self.book
        sections = [self._section(count, s) for count, s in enumerate(book.sections, 1)]
        statement: Plain = {
            "schema": SCHEMA,
            "engine": book.engine,
            "workbook": book.name,
            "mark": book.mark,
            "title": book.title,
            "code_set": {"name": book.code.name, "title": book.code.title},
            "units": book.system,
            "signs": [{"quantity": q, "positive": p} for q, p in book.signs.items()],
            "fingerprint": fingerprint(book),
            "parts": sections,
            "results": self._results(sections),
        }
        for item in (i for s in sections for i in s["items"] if i["kind"] == "figure"):
            try:
                item["alt"] = figures.describe(statement, item)
            except CalcbookError as error:
                item["problem"] = str(error)
        return statement | {"counts": counts(sections)}

    def _section(self, count: int, section: Section) -> Plain:
        items = [self._item(b) for b in self.book.bound if b.section is section and not b.schedule]
        applies = not section.when or any(i["applies"] for i in items)
        applies = applies or self.reasons.holds(section.when)
        return {
            "kind": "section",
            "number": str(count),
            "title": section.title,
            "applies": applies,
            "why": "" if applies else self.reasons.why(section.when),
            "left_over": section.left_over,
            "items": items,
        }

    # --- items ------------------------------------------------------------------------------

    def _item(self, bound: Bound) -> Plain:
        item = bound.item
        applies = self.results.applies.get(bound.number, True)
        plain: Plain = {
            "kind": KINDS[type(item)],
            "number": bound.number,
            "name": bound.name or None,
            "meaning": item.meaning,
            "clause": item.clause,
            "note": item.note,
            "problem": self._problem(bound),
            "memory": item.memory,
            "applies": applies,
            "why": "" if applies else self.reasons.why_not(bound.guards),
            "used_by": self.used_by.get(bound.name, []),
        }
        refused = bound.problem or (bound.lacks if not isinstance(item, (Line, Check)) else "")
        if refused:
            error = {"kind": "error", "text": refused, "source": _source(item), "problem": None}
            return plain | error
        return plain | self._details(bound, usable=applies and not plain["problem"])

    def _problem(self, bound: Bound) -> str | None:
        if not self.results.applies.get(bound.number, True):
            return None
        return self.results.problems.get(bound.number) or self.readings.problems.get(bound.name)

    def _details(self, bound: Bound, *, usable: bool) -> Plain:  # noqa: PLR0911  one case per kind
        match bound.item:
            case Entry() as item:
                given = self._given(bound.name)
                return (
                    self._quantity(bound) | given | {"range": range_text(item), "fallback": False}
                )
            case Text():
                return {"text": self._words(bound)} | self._given(bound.name)
            case Choice() as item:
                return self._option(bound, item) | self._given(bound.name)
            case Carry() as item:
                return self._carried(bound, item)
            case Line() as item:
                return self.lines.single(bound, item, usable=usable)
            case Schedule() as item:
                applies = self.results.applies.get(bound.number, True)
                return self.schedules.write(bound, item, applies=applies)
            case Check() as item:
                return self._check(bound, item)
            case Solver() as item:
                return self._solver(bound, item, usable=usable)
            case item:
                return _stated(item)

    def _given(self, name: str) -> Plain:
        given = self.readings.given.get(name)
        if given is None:
            return {"source": "", "confirmed": ""}
        return {"source": given.source, "confirmed": given.confirmed}

    def _words(self, bound: Bound) -> str:
        return str(self.results.values.get(bound.name) or "")

    def _option(self, bound: Bound, item: Choice | Carry) -> Plain:
        return {
            "option": self._words(bound),
            "options": list(item.options),
            "labels": dict(item.labels),
        }

    def _quantity(self, bound: Bound) -> Plain:
        name = bound.name
        si = self.results.values.get(name)
        number = si if isinstance(si, float) else None
        unit, display = self.shown.unit(name), self.shown.display(name)
        shown = None
        if number is not None and unit.text != display.text:
            shown = plain_value(self.shown.value(name, display), number, display)
        value = plain_value(self.shown.value(name), number, unit)
        given = self.readings.given.get(name)
        if number is None and given is not None:
            value["text"] = given.text
            value["unit"] = ""
        return {"value": value, "shown": shown}

    def _carried(self, bound: Bound, item: Carry) -> Plain:
        carried = self.readings.carried.get(bound.name)
        workbook, _dot, name = item.origin.partition(".")
        source = carried.item if carried is not None and carried.item is not None else {}
        plain: Plain = {
            "from": {"workbook": workbook, "name": name, "number": source.get("number", "")},
            "fallback": carried is None,
            "stale": carried is not None and carried.taken is not None,
            "taken": dict(carried.taken) if carried is not None and carried.taken else None,
            "confirmed": carried.confirmed if carried is not None else "",
            "source": "",
            "sign": item.sign,
            "range": range_text(item),
        }
        if carried is None:
            plain |= self._given(bound.name)
        if item.text:
            return plain | {"text": self._words(bound)}
        return plain | (self._option(bound, item) if item.labels else self._quantity(bound))

    def _check(self, bound: Bound, item: Check) -> Plain:
        demand, limit, held = self.results.checks.get(bound.number, (None, None, None))
        node = bound.branches[0][1] if bound.branches else None
        relation = node.rest[0][0] if isinstance(node, Compare) else ""
        used = ratio(demand, limit, relation)
        left, right = self._sides(bound, demand, limit)
        return {
            "text": item.formula,
            "relation": relation,
            "demand": left,
            "limit": right,
            "ratio": used,
            "ratio_text": "" if used is None else ratio_text(used, relation, held),
            "satisfied": held,
        }

    def _solver(self, bound: Bound, item: Solver, *, usable: bool) -> Plain:
        found = self.results.values.get(bound.name) if usable else None
        solver = solvers.find(item.by)
        takes = [
            {"role": role, **solver.roles[role].told(), "case": case, "name": name}
            for role, case, name in solving.filled(item)
            if self._acts(name)
        ]
        says: list[str] = list(found.says()) if isinstance(found, solvers.Solution) else []
        told = {"by": item.by, "method": solver.method, "takes": takes, "says": says}
        return told | {"curves": found.curves() if isinstance(found, solvers.Drawn) else []}

    def _acts(self, name: str) -> bool:
        """Whether what a solver takes applies; the key of a schedule always does."""
        bound = self.shown.scope.get(name)
        return bound is None or self.results.applies.get(bound.number, True)

    def _sides(self, bound: Bound, demand: object, limit: object) -> tuple[Plain, Plain]:
        blank: Plain = {"si": None, "value": None, "unit": "", "text": ""}
        if not isinstance(demand, float) or not isinstance(limit, float):
            words = [str(v) if isinstance(v, str) else "" for v in (demand, limit)]
            return blank | {"text": words[0]}, blank | {"text": words[1]}
        unit = self._check_unit(bound)
        texts = side_texts(demand / unit.factor, limit / unit.factor)
        one, other = (Printed(t, float(t) * unit.factor) for t in texts)
        return plain_value(one, demand, unit), plain_value(other, limit, unit)

    def _check_unit(self, bound: Bound) -> units.Unit:
        """Return the unit of a check: that of a name, a quantity or a kind of its dimension."""
        dimension = bound.type.dimension if bound.type is not None else None
        for name in bound.needs:
            home = self.shown.scope.get(name)
            if home is not None and home.type is not None and home.type.dimension == dimension:
                return self.shown.display(name)
        kinds = [k for k in units.KINDS.values() if k.dimension == dimension]
        if kinds:
            return kinds[0].us if self.book.system == "US" else kinds[0].si
        quoted = [n.text for n in walk(bound.branches[0][1]) if isinstance(n, Quoted)]
        found = [q.unit for q in map(units.read_quantity, quoted) if q.unit.dimension == dimension]
        return found[0] if found else units.unit("")

    # --- results ----------------------------------------------------------------------------

    def _results(self, sections: Sequence[Plain]) -> list[Plain]:
        """Return the lines that are results, and the governing rows of columns that are."""
        out: list[Plain] = []
        for item in (i for s in sections for i in s["items"] if i["applies"]):
            if item["kind"] == "line" and item["result"]:
                out.append({k: item[k] for k in RESULT} | {"row": ""})
            elif item["kind"] == "schedule":
                out += _governing_results(item)
        return out


def _governing_results(schedule: Plain) -> list[Plain]:
    columns = {c["name"]: c for c in schedule["columns"]}
    return [
        {
            "name": part["column"],
            "meaning": f"{part['meaning']}, {part['which']}: {part['row']}",
            "value": part["value"],
            "sign": columns[part["column"]]["sign"],
            "number": schedule["number"],
            "problem": None,
            "row": part["row"],
        }
        for part in schedule["envelope"]
        if columns[part["column"]]["result"]
    ]


def counts(sections: Sequence[Plain]) -> dict[str, int]:
    """Return how many entries, unconfirmed entries, checks and problems of each sort there are."""
    items: list[Plain] = [i for s in sections for i in s["items"] if i["applies"]]
    schedules = [i for i in items if i["kind"] == "schedule"]
    columns = [c for i in schedules for c in i["columns"] if c["applies"]]
    rows = sum(len(i["rows"]) for i in schedules if not i["fixed"])
    waiting = sum(map(is_unconfirmed, items)) + sum(len(unconfirmed_rows(i)) for i in items)
    checks = [i for i in items if i["kind"] == "check"]
    faulty = [
        c for i in schedules if not i["problem"] for c in i["columns"] if any(c["problem"] or ())
    ]
    problems = sum(bool(i["problem"]) or i["kind"] == "error" for i in items)
    return {
        "entries": sum(map(is_input, items)) + rows,
        "unconfirmed": waiting,
        "checks": len(checks),
        "not_satisfied": sum(i["satisfied"] is False for i in checks),
        "undecided": sum(i["satisfied"] is None for i in checks),
        "problems": problems + sum(len(i["errors"]) for i in schedules) + len(faulty),
        "stale": sum(bool(i.get("stale")) for i in items),
        "memory": sum(bool(i["memory"]) for i in (*items, *columns)),
    }


def _source(item: Item) -> str:
    """Return the text as typed of an item that could not be accepted."""
    for attribute in ("formula", "source", "value"):
        text = getattr(item, attribute, "")
        if text:
            return str(text)
    return ""


def _stated(item: Item) -> Plain:
    """Return what an item without a value of its own says."""
    if isinstance(item, Remark):
        return {"text": item.text, "tone": item.tone}
    if isinstance(item, Figure):
        uses = dict(item.uses)
        return {"figure": item.figure, "uses": uses, "caption": item.caption, "alt": ""}
    return _table(item.table) if isinstance(item, TableItem) and item.table is not None else {}


def _table(table: Table) -> Plain:
    axes = [
        {
            "name": a.name,
            "unit": a.unit.text,
            "points": list(a.points),
            "texts": [exact_text(p) for p in a.points],
        }
        for a in table.axes
    ]
    return {
        "axes": axes,
        "values": _nested(table.values, float),
        "texts": _nested(table.values, exact_text),
        "unit": table.unit.text,
        "outside": table.outside,
        "source": table.source,
    }


def _nested(values: Sequence[Any], convert: Callable[[float], object]) -> list[object]:
    return [_nested(v, convert) if isinstance(v, (tuple, list)) else convert(v) for v in values]


def twelve_digits(data: Any) -> Any:  # noqa: ANN401  (plain data nests)
    """Return plain data with every float at twelve significant digits, as JSON results carry.

    A statement itself holds full doubles: a value carried from one workbook to another must not
    move across a threshold by being rounded on the way.
    """
    if isinstance(data, float):
        return twelve(data)
    if isinstance(data, dict):
        return {key: twelve_digits(value) for key, value in data.items()}
    if isinstance(data, (list, tuple)):
        return [twelve_digits(value) for value in data]
    return data
