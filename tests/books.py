"""Small workbooks for tests, and the way a reader works a printed line by hand."""

from __future__ import annotations

import math
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook import codes
from calcbook.compile import namespace, python_source
from calcbook.formula import names, parse
from calcbook.inputs import Given, GivenRow, Inputs
from calcbook.units import unit
from calcbook.workbook import Workbook

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

Plain = dict[str, Any]
TEMPLATES = Path(__file__).resolve().parents[1] / "workbooks"
SIGNS = {"pressure": "toward the surface"}


def book(
    entries: Mapping[str, str] | None = None,
    rows: Mapping[str, Sequence[tuple[str, Mapping[str, str]]]] | None = None,
    *,
    system: str = "SI",
    code: str = "NSCP 2015",
    **inputs: Any,
) -> Workbook:
    """Return an empty workbook with entries and rows typed for it."""
    given = Inputs(
        {name: Given(text) for name, text in (entries or {}).items()},
        {name: [GivenRow(k, c) for k, c in found] for name, found in (rows or {}).items()},
        **inputs,
    )
    signs = dict(SIGNS)
    return Workbook(
        "trial", "Trial", code=codes.get(code), system=system, signs=signs, inputs=given
    )


def lines(*formulas: str, entries: Mapping[str, str] | None = None, **common: Any) -> Workbook:
    """Return a workbook with one section: entries as 'name' or 'name:kind', then lines."""
    found = book(**common)
    with found.section("Trial") as s:
        for name, text in (entries or {}).items():
            plain, _, kind = name.partition(":")
            s.entry(plain, plain, text, unit=kind or "number")
        for formula in formulas:
            s.line(formula, formula.split("=", maxsplit=1)[0].strip())
    return found


def items(statement: Plain) -> dict[str, Plain]:
    """Return the items of a statement by name, or by number where they have none."""
    found = [i for p in statement["parts"] if p["kind"] == "section" for i in p["items"]]
    return {i["name"] or i["number"]: i for i in found}


def item(workbook: Workbook, name: str) -> Plain:
    """Return one item of a workbook's statement."""
    return items(workbook.statement())[name]


def columns(schedule: Plain) -> dict[str, Plain]:
    """Return the columns of a schedule by name."""
    return {c["name"]: c for c in schedule["columns"]}


def last_figure(text: str) -> float:
    """Return what one in the last figure of a printed number is worth."""
    mantissa, _, power = text.lower().partition("e")
    return 10.0 ** (int(power or 0) - len(mantissa.partition(".")[2]))


def misses(hand: float, text: str) -> float:
    """Return by how many last figures a hand result, rounded alike, misses the printed one."""
    one = last_figure(text)
    return abs(round(hand / one) - round(float(text) / one))


class Reader:
    """Someone with the printed statement and a calculator."""

    def __init__(self, workbook: Workbook, statement: Plain) -> None:
        self.scope = workbook.program.scope
        self.items = items(statement)
        read = workbook.readings.values
        self.tables = {n: read[n] for n, kind in self.scope.items() if kind.form == "table"}
        self.schedules = [i for i in self.items.values() if i["kind"] == "schedule"]
        self.printed = {
            c["name"]: self._column(c) for s in self.schedules if s["applies"] for c in s["columns"]
        }

    def _column(self, column: Plain) -> np.ndarray:
        if self.scope[column["name"]].form == "text":
            return np.array(column["texts"], dtype=object)
        factor = unit(column["unit"]).factor
        return np.array([float(t) * factor if t else math.nan for t in column["texts"]])

    def work(self, line: Plain) -> Any:
        """Work a line with its printed values; the result in the unit it is printed in."""
        node = parse(line["formula"])
        takes = {n: unit(u) for n, u in line["takes"].items()}
        source = python_source(node, scope=self.scope, array=False, takes=takes)
        values = {f"v_{n}": self._value(n, line) for n in names(node)}
        with np.errstate(all="ignore"):
            found = eval(source, namespace(array=False), values)  # noqa: S307
        gives = unit(line["gives"]).factor if line["gives"] else 1.0
        return found * gives / unit(line["value"]["unit"]).factor

    def _value(self, name: str, line: Plain) -> Any:
        if name in self.tables:
            return self.tables[name]
        if self.scope[name].rows is not None:
            return self.printed[name] if name in self.printed else self._keys(name)
        value = line["values"][name]
        if self.scope[name].form == "text":
            return value["text"]
        return float(value["text"]) * unit(value["unit"]).factor

    def _keys(self, name: str) -> np.ndarray:
        rows = self.scope[name].rows
        return np.array(next(s["rows"] for s in self.schedules if s["name"] == rows), dtype=object)

    def every_line(self) -> Iterator[tuple[str, Plain, float]]:
        """Yield (name, line, hand result) of every printed line and governing-row line."""
        for found in self.items.values():
            if found["kind"] == "line" and found["applies"] and not found["problem"]:
                yield found["number"], found, float(self.work(found))
        for schedule in self.schedules:
            governing = schedule.get("governing")
            if schedule["applies"] and governing:
                for line in governing["lines"]:
                    row = schedule["rows"].index(line["row"])
                    hand = np.broadcast_to(self.work(line), len(schedule["rows"]))
                    yield f"{line['number']} row {line['row']}", line, float(hand[row])

    def every_column(self) -> Iterator[tuple[str, Plain, np.ndarray]]:
        """Yield (name, column, hand results) of every computed column with one formula."""
        for schedule in self.schedules:
            if not schedule["applies"]:
                continue
            for column in schedule["columns"]:
                if column["formula"] and column["applies"]:
                    values = self._scalars(column)
                    if values.keys() & column["takes"].keys():
                        continue  # what is put in for it stands in the governing row only
                    line = column | {"values": values, "value": {"unit": column["unit"]}}
                    yield (
                        column["number"],
                        column,
                        np.broadcast_to(self.work(line), len(schedule["rows"])),
                    )

    def _scalars(self, column: Plain) -> Plain:
        out: Plain = {}
        for name in names(parse(column["formula"])):
            found = self.items.get(name)
            if found is None or found["kind"] in {"table", "schedule"}:
                continue
            if "option" in found:
                out[name] = {"text": found["option"], "unit": ""}
            else:
                out[name] = found["value"]
        return out
