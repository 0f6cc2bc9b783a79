"""What comes into a workbook from outside, read strictly: entries, rows and carried values."""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from calcbook import units
from calcbook.carried import Carried, carried_column, carried_value, refuse_cell
from calcbook.errors import CalcbookError, InputError, StaticsError
from calcbook.items import Carry, Choice, Entry, Schedule, TableItem, Text
from calcbook.reading import range_text, read_value
from calcbook.solvers import shapes

__all__ = [
    "Carried",
    "Given",
    "GivenRow",
    "Inputs",
    "Reader",
    "Readings",
    "range_text",
    "read_value",
]

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.items import Item, Shaped
    from calcbook.program import Value


@dataclass(frozen=True)
class Given:
    """An entry as typed, with its source and who confirmed it ('' while nobody has)."""

    text: str
    source: str = ""
    confirmed: str = ""


@dataclass(frozen=True)
class GivenRow:
    """A row of a schedule as typed."""

    key: str
    cells: Mapping[str, str]
    source: str = ""
    confirmed: str = ""


def _nothing(_: str) -> Carried | None:
    return None


@dataclass
class Inputs:
    """Everything typed for one filling of a workbook, and where carried values come from."""

    entries: dict[str, Given] = field(default_factory=dict)
    rows: dict[str, list[GivenRow]] = field(default_factory=dict)
    carried: Callable[[str], Carried | None] = _nothing


@dataclass
class Readings:
    """Inputs as numbers: SI values by name, and why a name has none."""

    values: dict[str, Value] = field(default_factory=dict)
    problems: dict[str, str] = field(default_factory=dict)
    row_problems: dict[str, list[str]] = field(default_factory=dict)
    keys: dict[str, list[str]] = field(default_factory=dict)
    given: dict[str, Given] = field(default_factory=dict)
    given_rows: dict[str, list[GivenRow]] = field(default_factory=dict)
    carried: dict[str, Carried] = field(default_factory=dict)
    quantities: dict[str, units.Quantity] = field(default_factory=dict)
    cells: dict[str, list[units.Quantity | None]] = field(default_factory=dict)
    words: dict[str, list[str]] = field(default_factory=dict)
    fallbacks: set[str] = field(default_factory=set)
    shaped: dict[str, shapes.ShapedRows] = field(default_factory=dict)

    @property
    def rows(self) -> dict[str, int]:
        """The number of rows of each set of rows."""
        return {name: len(keys) for name, keys in self.keys.items()}


class Reader:
    """Reads the inputs of a workbook against its bound items."""

    def __init__(self, inputs: Inputs) -> None:
        self.inputs = inputs
        self.found = Readings()

    def read(self, bound: Sequence[Bound]) -> Readings:
        """Read everything; what cannot be read has its reason in the readings."""
        for b in bound:
            if not b.computable:
                continue
            if isinstance(b.item, Schedule):
                self._rows(b, b.item)
            elif isinstance(b.item, TableItem):
                self.found.values[b.name] = b.item.table  # type: ignore[assignment]  # a formula names it like a value
            elif b.schedule is not None:
                self._column(b)
            elif isinstance(b.item, Carry):
                self._carry(b.item)
            elif isinstance(b.item, (Entry, Choice, Text)):
                self._entry(b.item, b.item.value)
        for b in bound:
            if isinstance(b.item, Schedule) and b.item.distinct:
                self._refuse_alike(b, b.item.distinct)
        return self.found

    def _entry(self, item: Item, default: str) -> None:
        given = self.inputs.entries.get(item.name) or Given(default, getattr(item, "source", ""))
        self.found.given[item.name] = given
        if not given.text and not isinstance(item, Text):
            self._problem(item.name, "has no value yet")
            return
        try:
            self._keep(item.name, read_value(item, given.text))
        except CalcbookError as error:
            self._problem(item.name, str(error))

    def _problem(self, name: str, reason: str) -> None:
        self.found.problems[name] = reason
        self.found.values[name] = None

    def _keep(self, name: str, value: units.Quantity | str) -> None:
        if isinstance(value, units.Quantity):
            self.found.quantities[name] = value
            self.found.values[name] = value.si
        else:
            self.found.values[name] = value

    def _carry(self, item: Carry) -> None:
        typed = self.inputs.entries.get(item.name)
        carried = None if typed else self.inputs.carried(item.origin)
        if carried is None:
            self.found.fallbacks.add(item.name)
            self._entry(item, item.fallback)
            return
        self.found.carried[item.name] = carried
        try:
            self.found.values[item.name] = carried_value(item, carried)
        except CalcbookError as error:
            self._problem(item.name, str(error))

    # --- schedules --------------------------------------------------------------------------

    def _rows(self, bound: Bound, item: Schedule) -> None:
        if item.same_rows:
            if bound.rows in self.found.problems:
                self.found.problems[item.name] = f"not available because of {bound.rows}"
            return
        rows = self._given_rows(item)
        self.found.given_rows[item.name] = rows
        keys = [row.key for row in rows]
        self.found.keys[bound.rows] = keys
        self.found.values[item.name] = None
        if item.key:
            self.found.values[item.key] = np.array(keys, dtype=object)
        twice = [key for count, key in enumerate(keys) if key in keys[:count]]
        if twice:
            self.found.problems[item.name] = f"two rows are called '{twice[0]}'"
        elif not all(key.strip() for key in keys):
            self.found.problems[item.name] = "a row has no key"
        elif not rows and not item.optional:
            self.found.problems.setdefault(item.name, "the schedule has no rows")

    def _given_rows(self, item: Schedule) -> list[GivenRow]:
        if item.shaped is not None and self.found.values[item.shaped.choice] == item.shaped.option:
            return self._shaped_rows(item, item.shaped)
        typed = self.inputs.rows.get(item.name) if not item.fixed else None
        brought = {c.name for c in item.columns if isinstance(c, Carry)}
        replaced = typed is not None and any(brought & set(row.cells) for row in typed)
        carried = self.inputs.carried(item.origin) if item.origin and not replaced else None
        if carried is not None:
            self.found.carried[item.name] = carried
            return self._joined(item, carried, typed)
        if typed is not None:
            return typed
        if item.origin:
            self.found.fallbacks.add(item.name)
        return [GivenRow(key, cells, item.source) for key, cells in item.default]

    def _shaped_rows(self, item: Schedule, shaped: Shaped) -> list[GivenRow]:
        """Return the rows of a shape, which nobody types; their values are kept apart."""
        given = {what: self.found.values[name] for what, name in shaped.takes.items()}
        lacking = next((shaped.takes[what] for what, value in given.items() if value is None), "")
        self.found.shaped[item.name] = shapes.ShapedRows((), {})
        if lacking:
            self.found.problems[item.name] = f"not available because of {lacking}"
            return []
        try:
            rows = shapes.find(shaped.by).run(given)
        except StaticsError as error:
            self.found.problems[item.name] = str(error)
            return []
        self.found.shaped[item.name] = rows
        return [GivenRow(key, {}, confirmed="shaped") for key in rows.keys]

    def _joined(
        self, item: Schedule, carried: Carried, typed: Sequence[GivenRow] | None
    ) -> list[GivenRow]:
        """Return the rows of the source, each with what is typed here for its key."""
        source = carried.item
        if source is None or source.get("kind") != "schedule":
            self.found.problems[item.name] = carried.problem or f"{carried.origin} has no rows"
            return []
        if item.optional and not source["rows"]:
            return []
        if source.get("problem"):
            self.found.problems[item.name] = f"{carried.origin}: {source['problem']}"
            return []
        keys = [str(key) for key in source["rows"]]
        entered = any(isinstance(c, (Entry, Choice, Text)) for c in item.columns)
        if not entered:
            return [GivenRow(key, {}, confirmed="carried") for key in keys]
        if typed is None:
            # what the template's rows enter here serves, unconfirmed, until typed
            own = {c.name for c in item.columns if not isinstance(c, Carry)}
            cells = {
                key: {name: text for name, text in row.items() if name in own}
                for key, row in item.default
            }
            return [GivenRow(key, cells.get(key, {}), item.source) for key in keys]
        by_key = {row.key: row for row in typed}
        missing = [key for key in keys if key not in by_key]
        extra = [key for key in by_key if key not in keys]
        if missing or extra:
            self.found.problems[item.name] = (
                f"row '{missing[0]}' of {carried.origin} is missing here: enter its cells"
                if missing
                else f"row '{extra[0]}' is not in {carried.origin}: it goes with the next change "
                f"of {item.name}"
            )
        return [by_key.get(key, GivenRow(key, {})) for key in keys]

    def _column(self, bound: Bound) -> None:
        item, schedule = bound.item, bound.schedule
        if schedule is None or not isinstance(item, (Entry, Choice, Text, Carry)):
            return
        if schedule.name in self.found.problems or not schedule.computable:
            self._problem(bound.name, f"not available because of {schedule.name}")
            return
        rows = self.found.given_rows[schedule.rows]
        carried = self.found.carried.get(schedule.rows)
        if self._is_shaped(bound):
            self._shaped_column(bound)
            return
        if isinstance(item, Carry) and carried is not None and rows:
            self._carried_column(bound, item, carried, [row.key for row in rows])
        else:
            self._entered_column(bound, rows)
        self._refuse_disorder(bound, rows)

    def _is_shaped(self, bound: Bound) -> bool:
        """Whether a shape gives this column, in the rows it gave."""
        schedule = bound.schedule.item if bound.schedule is not None else None
        shaped = schedule.shaped if isinstance(schedule, Schedule) else None
        here = shaped is not None and bound.name in shaped.gives
        return here and schedule is not None and schedule.name in self.found.shaped

    def _shaped_column(self, bound: Bound) -> None:
        schedule: Schedule = bound.schedule.item  # type: ignore[union-attr, assignment]
        column = self.found.shaped[schedule.name].columns[schedule.shaped.gives[bound.name]]  # type: ignore[union-attr]
        if bound.type is not None and bound.type.form == "text":
            self.found.words[bound.name] = [str(text) for text in column]
            self.found.values[bound.name] = np.array(self.found.words[bound.name], dtype=object)
        else:
            self.found.values[bound.name] = np.array([float(value) for value in column])

    def _entered_column(self, bound: Bound, rows: Sequence[GivenRow]) -> None:
        cells: list[units.Quantity | str | None] = []
        reasons = [""] * len(rows)
        for place, row in enumerate(rows):
            try:
                cells.append(self._cell(bound.item, row))
            except CalcbookError as error:
                cells.append(None)
                reasons[place] = f"row {row.key}: {error}"
        self._keep_column(bound, cells, reasons)

    def _cell(self, item: Item, row: GivenRow) -> units.Quantity | str:
        default = getattr(item, "value", "") or getattr(item, "fallback", "")
        text = row.cells.get(item.name, default)
        if not text and not isinstance(item, Text):
            raise InputError("has no value", where=item.name)
        return read_value(item, text)

    def _keep_column(
        self, bound: Bound, cells: list[units.Quantity | str | None], reasons: list[str]
    ) -> None:
        name = bound.name
        if any(reasons):
            self.found.row_problems[name] = reasons
        if bound.type is not None and bound.type.form == "text":
            self.found.words[name] = [c if isinstance(c, str) else "" for c in cells]
            self.found.values[name] = np.array(self.found.words[name], dtype=object)
            return
        numbers = [c if isinstance(c, units.Quantity) else None for c in cells]
        self.found.cells[name] = numbers
        self.found.values[name] = np.array([math.nan if q is None else q.si for q in numbers])

    def _carried_column(
        self, bound: Bound, item: Carry, carried: Carried, keys: Sequence[str]
    ) -> None:
        try:
            column = carried_column(item, carried)
        except CalcbookError as error:
            self._problem(item.name, str(error))
            return
        reasons = [
            f"row {key}: {carried.origin}: {p}" if p else ""
            for key, p in zip(keys, column.get("problem") or [""] * len(keys), strict=True)
        ]
        words = bound.type is not None and bound.type.form == "text"
        for place, cell in enumerate(column["texts"] if words else column["si"]):
            try:
                refuse_cell(item, cell, column)
            except CalcbookError as error:
                reasons[place] = reasons[place] or f"row {keys[place]}: {error}"
        if any(reasons):
            self.found.row_problems[item.name] = reasons
        if words:
            self.found.words[item.name] = [str(t) for t in column["texts"]]
            self.found.values[item.name] = np.array(self.found.words[item.name], dtype=object)
            return
        numbers = [math.nan if v is None else float(v) for v in column["si"]]
        self.found.values[item.name] = np.array(numbers)

    def _refuse_alike(self, bound: Bound, columns: Sequence[str]) -> None:
        """Mark the rows that say the same in these columns as a row before them."""
        if not all(name in self.found.words for name in columns):
            return
        first: dict[tuple[str, ...], str] = {}
        keys = self.found.keys[bound.rows]
        reasons = list(self.found.row_problems.get(columns[-1], [""] * len(keys)))
        told = zip(*(self.found.words[name] for name in columns), strict=True)
        for row, (key, words) in enumerate(zip(keys, told, strict=True)):
            other = first.setdefault(words, key)
            if other != key and any(words):
                reasons[row] = f"{key} is at {'-'.join(words)}, where {other} is already"
        if any(reasons):
            self.found.row_problems[columns[-1]] = reasons

    def _refuse_disorder(self, bound: Bound, rows: Sequence[GivenRow]) -> None:
        schedule = bound.schedule.item if bound.schedule is not None else None
        values = self.found.values.get(bound.name)
        if not isinstance(schedule, Schedule) or schedule.order != bound.name:
            return
        if not isinstance(values, np.ndarray) or values.dtype == object:
            return
        side, last = ("below", "lowest") if schedule.ascending else ("above", "highest")
        steps = np.diff(values) if schedule.ascending else -np.diff(values)
        for place in map(int, np.flatnonzero(steps <= 0)):
            one, other = rows[place].key, rows[place + 1].key
            self._problem(
                bound.name,
                f"out of order: {one}{self._typed(bound, place)} is not {side} "
                f"{other}{self._typed(bound, place + 1)}; list the {last} first",
            )
            return

    def _typed(self, bound: Bound, place: int) -> str:
        """Return a cell as typed, in brackets, or nothing where it was brought forward."""
        cell = self.found.cells.get(bound.name, {place: None})[place]
        return f" ({cell.text})" if cell is not None else ""
