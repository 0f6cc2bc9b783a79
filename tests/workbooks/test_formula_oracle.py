"""Every formula the package ships, compiled and by sympy, on the same random numbers.

`calcbook.algebra` builds sympy expressions from the trees and evaluates them with 40 digits; it
shares no line with the compiler. What gathers a column (sum, running, previous, following, min
and max of one column) or finds rows by their key is spelled out row by row here, and tables are
read by numpy.interp.
"""

from __future__ import annotations

import math
import random
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np
import pytest
from by_rows import Oracle, read_table
from sheets import CODES

from calcbook import codes
from calcbook.compile import namespace, python_source
from calcbook.dimensions import Type
from calcbook.errors import FormulaError
from calcbook.formula import parse
from calcbook.items import Check, Line, Schedule, Solved
from calcbook.job import templates
from calcbook.tree import KEYED, Call, Compare, Name, Quoted, names, walk
from calcbook.units import DIMENSIONLESS, kind, unit

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping

    from calcbook.table import Table
    from calcbook.tree import Node
    from calcbook.units import Unit

ROWS = 3
DRAWS = 2
SYSTEMS = ("SI", "US")
SINGLE, MANY = namespace(array=False), namespace(array=True)
ANGLE = kind("angle").dimension


@dataclass(frozen=True)
class Shipped:
    """One formula or condition with the types of its names."""

    where: str
    text: str
    types: Mapping[str, Type]
    takes: Mapping[str, Unit] = field(default_factory=dict)
    gives: float = 1.0

    @property
    def node(self) -> Node:
        """The tree."""
        return parse(self.text)

    def source(self, *, array: bool) -> str:
        """Return the compiled source."""
        return python_source(self.node, scope=self.types, array=array, takes=self.takes)


# --- what is shipped ------------------------------------------------------------------------


def of_clauses() -> Iterator[Shipped]:
    """Yield every formula and condition of every code set, in its SI and its US form."""
    for name in codes.names():
        for subject, clause in codes.get(name).clauses.items():
            for system in SYSTEMS if clause.name else ():
                stated = clause.stated(system)
                pairs = stated.cases or (("", stated.formula),)
                takes = {symbol: unit(text) for symbol, text in stated.takes.items()}
                gives = unit(stated.gives).factor
                table = codes.get(name).tables.get(subject)
                where = f"{name} {subject} {system}"
                for condition, formula in pairs:
                    types = plain_types(
                        f"{condition} or {formula}" if condition else formula, table
                    )
                    yield Shipped(where, formula, types, takes, gives)
                    if condition:
                        yield Shipped(where, condition, types)


def plain_types(text: str, table: Table | None) -> dict[str, Type]:
    """Return the types of a clause's names, as far as compiling asks for them."""
    node = parse(text)
    types = {n: Type("number", DIMENSIONLESS, None) for n in names(node)}
    types |= {n: Type("text", None, None) for n in compared(node)}
    for part in walk(node):
        if isinstance(part, Call) and part.function == "interpolate":
            assert isinstance(part.args[0], Name)
            types[part.args[0].name] = Type("table", None, None, table=table)
    return types


def of_workbook(book: Any) -> Iterator[Shipped]:
    """Yield every formula, case, condition and check that a workbook declares."""
    types = {name: bound.type for name, bound in book.scope.items() if bound.type is not None}
    schedules = [i for i in book.items() if isinstance(i, Schedule)]
    for schedule in schedules:
        if schedule.key:
            types[schedule.key] = Type("text", None, types[schedule.columns[0].name].rows)
    columns = [column for schedule in schedules for column in schedule.columns]
    for item in [*book.items(), *columns]:
        where = f"{book.name} {book.code.name} {book.system} {item.name or item.meaning}"
        if item.codes and book.code.name not in item.codes:
            continue
        if item.when:
            yield Shipped(where, item.when, types)
        if isinstance(item, Check):
            yield Shipped(where, item.formula, types)
        if isinstance(item, Line) and not isinstance(item, Solved):
            gives = item.gives.factor if item.gives is not None else 1.0
            for condition, formula in item.branches:
                yield Shipped(where, formula, types, item.takes, gives)
                if condition:
                    yield Shipped(where, condition, types)


# --- random numbers -------------------------------------------------------------------------


def compared(node: Node) -> dict[str, list[str]]:
    """Return the texts each name is compared with: the options of choices."""
    found: dict[str, list[str]] = {}
    for part in walk(node):
        if isinstance(part, Compare) and isinstance(part.first, Name):
            for _, other in part.rest:
                if isinstance(other, Quoted) and not other.text[:1].isdigit():
                    found.setdefault(part.first.name, []).append(other.text)
    return found


def drawn(shipped: Shipped, draw: random.Random, *, signed: bool) -> dict[str, Any]:
    """Return a value for every name: a float, an option, a table, or a list of rows of them."""
    node = shipped.node
    out = drawn_keys(shipped, draw)
    for name in names(node):
        found = shipped.types[name]
        if name in out:
            continue
        if found.form == "table":
            out[name] = found.table
            continue
        values = [one(name, found, node, draw, signed=signed) for _ in range(ROWS)]
        out[name] = values if found.rows is not None else values[0]
    return out


def drawn_keys(shipped: Shipped, draw: random.Random) -> dict[str, Any]:
    """Return the keys of rows and those asked for: each row's own where one row is looked up."""
    out: dict[str, Any] = {}
    calls = [p for p in walk(shipped.node) if isinstance(p, Call) and p.function in KEYED]
    for call in calls:
        _, keys, key = call.args
        assert isinstance(keys, Name)
        pool = [key.text if isinstance(key, Quoted) else "a", "b", "c"][:ROWS]
        alone = call.function == "lookup"
        out[keys.name] = draw.sample(pool, ROWS) if alone else draw.choices(pool, k=ROWS)
        if isinstance(key, Name):
            rows = shipped.types[key.name].rows is not None
            out[key.name] = draw.choices(pool, k=ROWS) if rows else draw.choice(pool)
    return out


def one(name: str, found: Type, node: Node, draw: random.Random, *, signed: bool) -> float | str:
    """Return one random value: of either sign if ``signed``, over three powers of ten."""
    if found.form == "text":
        quoted = [p.text for p in walk(node) if isinstance(p, Quoted)]
        return draw.choice(list(found.options) or compared(node).get(name) or quoted)
    if found.dimension == ANGLE or name == "theta":
        return draw.uniform(0.02, 1.3)
    size = 10 ** draw.uniform(-1.0, 2.0)
    return -size if signed and draw.random() < 0.4 else size


def by_sympy(shipped: Shipped, values: Mapping[str, Any]) -> list[float | bool]:
    """Return the value of a formula in every row."""
    given: dict[str, Any] = {}
    for name, value in values.items():
        found = shipped.types[name]
        factor = shipped.takes[name].factor if name in shipped.takes else 1.0
        if found.form == "table":
            given[name] = read_table(value)
        elif found.form == "text":
            given[name] = value
        else:
            given[name] = [v / factor for v in value] if isinstance(value, list) else value / factor
    oracle, node = Oracle(given), shipped.node
    return [oracle.at(node, row) * shipped.gives for row in range(ROWS)]


# --- compiled -------------------------------------------------------------------------------


def compiled(shipped: Shipped, values: Mapping[str, Any], *, array: bool) -> list[float | bool]:
    """Return the value of a formula in every row by its compiled source; nan where it has none."""
    given: dict[str, Any] = {}
    for name, value in values.items():
        found = shipped.types[name]
        cells: Any = value
        if found.form != "table" and (array or isinstance(value, list)):
            cells = np.array(value, dtype=object if found.form == "text" else float)
        if array and found.form == "text":
            cells = cells[..., None]  # words are alike in every case
        elif array and found.form == "number":
            cells = np.stack([cells, cells], axis=-1)
        given[f"v_{name}"] = cells
    space = dict(MANY if array else SINGLE)
    with np.errstate(all="ignore"):
        try:
            result = np.asarray(eval(shipped.source(array=array), space, given))  # noqa: S307
        except ValueError:
            result = np.asarray(math.nan)
    if array and result.ndim:
        result = result[..., -1]
    scaled = result * shipped.gives if shipped.gives != 1.0 else result
    return list(np.broadcast_to(scaled, (ROWS,)).tolist())


def real(shipped: Shipped, values: Mapping[str, Any]) -> bool:
    """Tell whether a formula has a value for these numbers: no root of a negative one."""
    try:
        by_sympy(shipped, values)
    except FormulaError:  # also in the branch of a case that does not hold
        return False
    return not any(math.isnan(v) for v in compiled(shipped, values, array=False))


def compare(shipped: Shipped) -> None:
    """Compare the two ways on random numbers, of either sign where the formula takes them."""
    draw = random.Random(shipped.text)  # noqa: S311  the same numbers every time are wanted
    for count in range(DRAWS):
        values = drawn(shipped, draw, signed=count == 0)
        if not real(shipped, values):
            values = drawn(shipped, draw, signed=False)
        found = compiled(shipped, values, array=False)
        expected = by_sympy(shipped, values)
        near = pytest.approx(expected, rel=1e-9, abs=1e-9)
        assert found == near, (shipped.where, shipped.text, values)
        wide = compiled(shipped, values, array=True)
        assert wide == near, (shipped.where, shipped.text, values)


def compare_all(formulas: Iterator[Shipped]) -> tuple[int, int]:
    """Compare every formula; one that compiles to the same source as before is counted only."""
    seen: set[tuple[str, str, str]] = set()
    count = 0
    for shipped in formulas:
        tables = [t.table for n in names(shipped.node) if (t := shipped.types[n]).table]
        key = (shipped.text, shipped.source(array=False), f"{shipped.gives} {tables}")
        if key not in seen:
            seen.add(key)
            compare(shipped)
        count += 1
    return count, len(seen)


# --- tests ----------------------------------------------------------------------------------


def test_clauses_of_the_code_sets(capsys: pytest.CaptureFixture[str]) -> None:
    """All clauses in SI and US form, all cases and conditions: sympy and compiled agree to 1e-9."""
    count, different = compare_all(of_clauses())
    with capsys.disabled():
        print(f"\nformulas of the code sets: {count}, {different} different")  # noqa: T201
    assert count >= 200
    assert different >= 60


def test_formulas_of_the_workbooks(fill: Callable[..., Any], capsys: Any) -> None:
    """All lines, columns, cases, conditions and checks, under both codes and both systems."""
    books = [
        fill(workbook, code=code, units=system).book
        for workbook in templates()
        for code in CODES
        for system in SYSTEMS
    ]
    count, different = compare_all(shipped for book in books for shipped in of_workbook(book))
    with capsys.disabled():
        print(f"\nformulas of the workbooks: {count}, {different} different")  # noqa: T201
    assert count >= 1000
    assert different >= 250


TURNED = {"roof": "gable", "ridge": "Y", "theta": "25 deg"}


@pytest.mark.parametrize(
    ("workbook", "code", "units", "sets"),
    [
        ("wind-pressure", "NSCP 2015", "SI", {"hill": "ridge", "h": "9 m"}),
        ("wind-pressure", "ASCE 7-16", "US", {**TURNED, "z_e": "500 m"}),
        ("dead-load-take-off", "NSCP 2015", "SI", {}),
        ("dead-load-take-off", "ASCE 7-16", "US", {**TURNED, "r_r": "4.337 m"}),
        ("column-accumulation", "NSCP 2015", "SI", {"lateral": "typed"}),
        ("column-accumulation", "ASCE 7-16", "US", {"length_by": "clear", "p_S": "1 kPa"}),
    ],
)
def test_every_value_of_a_statement(
    workbook: str, code: str, units: str, sets: dict[str, str], fill: Callable[..., Any]
) -> None:
    """Each line and column follows by sympy from the other values of its statement, to 1e-9."""
    sheet = fill(workbook, sets, code=code, units=units)
    values = stated_values(sheet)
    count = 0
    for item in sheet.items():
        if item["kind"] == "line" and item["applies"]:
            expected = from_statement(item, values, 1)
            near = pytest.approx(expected, rel=1e-9, abs=1e-3)
            assert [item["value"]["si"]] == near, item["name"]
            count += 1
        for column in item.get("columns", ()):
            if column["role"] == "computed" and column["applies"] and not column["cases"]:
                rows = len(column["si"])
                expected = from_statement(column, values, rows)
                assert column["si"] == pytest.approx(expected, rel=1e-9, abs=1e-3), column["name"]
                count += rows
    assert count >= 100


def stated_values(sheet: Any) -> dict[str, Any]:
    """Return every value of a statement by name: floats, options, tables, lists over rows."""
    out: dict[str, Any] = {}
    for schedule in (i for i in sheet.book.items() if isinstance(i, Schedule)):
        out[schedule.key] = sheet.item(schedule.name)["rows"]
    for item in sheet.items():
        if "option" in item:
            out[item["name"]] = item["option"]
        elif item["kind"] == "text":
            out[item["name"]] = item["text"]
        elif item["kind"] == "table":
            bound = sheet.book.scope[item["name"]]
            out[item["name"]] = read_table(bound.item.table)
        elif item.get("value"):
            out[item["name"]] = item["value"]["si"]
        for column in item.get("columns", ()):
            out[column["name"]] = column["texts"] if "labels" in column else column["si"]
    return out


def from_statement(
    item: Mapping[str, Any], values: Mapping[str, Any], rows: int
) -> list[float | bool]:
    """Return what a formula of a statement gives in every row, by sympy."""
    given = dict(values)
    for name, text in item["takes"].items():
        factor, value = unit(text).factor, values[name]
        given[name] = [v / factor for v in value] if isinstance(value, list) else value / factor
    oracle, node = Oracle(given), parse(item["formula"])
    return [oracle.at(node, row) * unit(item["gives"]).factor for row in range(rows)]


def test_a_wrong_formula_would_be_found() -> None:
    """The comparison is not idle: a compiled source of another formula is refused."""
    types = {"a": Type("number", DIMENSIONLESS, None), "b": Type("number", DIMENSIONLESS, None)}
    right = Shipped("here", "a*b + a", types)

    class Wrong(Shipped):
        def source(self, *, array: bool) -> str:
            return python_source(parse("a*b - a"), scope=types, array=array)

    compare(right)
    with pytest.raises(AssertionError):
        compare(Wrong("here", "a*b + a", types))
