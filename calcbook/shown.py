"""The figures a reader sees: how many, and that a hand calculation with them closes.

Entries are shown as typed, intermediate values with at least four significant figures, results
to the fixed step of their kind. A reader who takes the values printed in a line and works it by
hand must get the printed result within one in its last figure; where rounding would spoil that,
the operand that spoils it most is printed with one figure more, until the line closes.
"""

from __future__ import annotations

import math
from collections import deque
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook import units
from calcbook.items import Carry, Entry, Line
from calcbook.tree import Negative, Number, Quoted

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from types import CodeType

    from calcbook.bind import Bound
    from calcbook.inputs import Readings
    from calcbook.program import Program, Results, Step, Value

NOISE = 1e-6  # of the last place of a result: what is left where terms cancel
MOST = 12  # significant figures; beyond them a float has nothing to add


def typed_number(quantity: units.Quantity) -> str:
    """Return the number of a quantity as typed ('2.50' of '2.50 m'); feet and inches in feet."""
    number, unit = quantity.parts
    return number if unit or not quantity.unit.text else exact_text(quantity.value)


def exact_text(value: float) -> str:
    """Return the shortest decimal text of a value, with no more figures than it carries."""
    for decimals in range(10):
        if abs(round(value, decimals) - value) <= 1e-12 * abs(value):
            return units.format_number(value, decimals)
    return units.format_number(value, units.significant_decimals(value, MOST))


@dataclass(frozen=True)
class Printed:
    """A printed number: the text and what it is worth in SI."""

    text: str
    si: float


def twelve(value: float | None) -> float | None:
    """Return a float with twelve significant digits, or None where it is not finite."""
    if value is None or not math.isfinite(value):
        return None
    return float(f"{value:.12g}")


def finite(value: float | None) -> float | None:
    """Return a float, or None where it is not finite."""
    return value if value is not None and math.isfinite(value) else None


def plain_value(printed: Printed | None, si: float | None, unit: units.Unit) -> dict[str, Any]:
    """Return one value as plain data: SI, value in its unit, the unit and the printed text."""
    if printed is None or si is None:
        return {"si": None, "value": None, "unit": unit.text, "text": ""}
    return {
        "si": finite(si),
        "value": finite(si / unit.factor),
        "unit": unit.text,
        "text": printed.text,
    }


def stated(bound: Bound, place: int) -> units.Quantity | None:
    """Return the quantity of a line's branch that is nothing but a number or a quantity."""
    if not isinstance(bound.item, Line) or bound.item.gives is not None:
        return None
    node = bound.branches[place][1]
    sign = ""
    if isinstance(node, Negative):
        node, sign = node.operand, "-"
    return _quantity(sign + node.text) if isinstance(node, (Number, Quoted)) else None


@lru_cache(maxsize=1024)
def _quantity(text: str) -> units.Quantity:
    return units.read_quantity(text)


class Shown:
    """Decides the decimals of every printed value of an evaluated workbook.

    Parameters
    ----------
    program, readings, results
        The evaluated workbook.
    scope
        Every bound item by name.
    system
        'SI' or 'US': the units values are shown in.
    """

    def __init__(
        self,
        program: Program,
        readings: Readings,
        results: Results,
        scope: Mapping[str, Bound],
        system: str,
    ) -> None:
        self.program, self.readings, self.results = program, readings, results
        self.scope, self.system = scope, system
        self._decimals: dict[tuple[str, str], int] = {}
        self._singles: dict[tuple[str, str, int], Printed] = {}
        self._arrays: dict[tuple[str, str, int], np.ndarray] = {}
        self._columns: dict[tuple[str, str, int], list[Printed | None]] = {}
        self._close_all()

    # --- one value --------------------------------------------------------------------------

    def unit(self, name: str) -> units.Unit:
        """Return the unit a name is shown in: an entry's as typed, else that of its kind."""
        quantity = self.readings.quantities.get(name)
        return quantity.unit if quantity is not None else self.display(name)

    def display(self, name: str) -> units.Unit:
        """Return the unit of a name's kind in the job's unit system."""
        kind = getattr(self.scope[name].item, "kind", None) or units.KINDS["number"]
        return kind.us if self.system == "US" else kind.si

    def value(self, name: str, unit: units.Unit | None = None) -> Printed | None:
        """Return a scalar as printed, or None where it has no value."""
        si = self.results.values.get(name)
        if not isinstance(si, float):
            return None
        unit = unit or self.unit(name)
        quantity = self.readings.quantities.get(name) or self._constant(name)
        if quantity is not None and quantity.unit.text == unit.text:
            return Printed(typed_number(quantity), quantity.si)
        key = (name, unit.text, self.decimals(name, unit))
        if key not in self._singles:
            self._singles[key] = _printed(si, unit, key[2])
        return self._singles[key]

    def _constant(self, name: str) -> units.Quantity | None:
        """Return what a line states that is nothing but a number or a quantity."""
        bound = self.scope[name]
        if not isinstance(bound.item, Line) or bound.schedule is not None:
            return None
        place = self.results.branch.get(bound.number, 0)
        return stated(bound, max(place, 0))

    def as_stated(self, bound: Bound, place: int) -> Printed | None:
        """Return a column's value as its formula states it, where that is a mere quantity."""
        quantity = stated(bound, place)
        if quantity is None or quantity.unit.text != self.display(bound.name).text:
            return None
        return Printed(typed_number(quantity), quantity.si)

    def column(self, name: str, unit: units.Unit | None = None) -> list[Printed | None]:
        """Return a column of numbers as printed, row by row."""
        unit = unit or self.display(name)
        found = self.results.values.get(name)
        if not isinstance(found, np.ndarray) or found.dtype == object:
            home = self.scope[name].schedule
            return [None] * (self.readings.rows.get(home.rows, 0) if home is not None else 0)
        decimals = self.decimals(name, unit)
        key = (name, unit.text, decimals)
        if key not in self._columns:
            cells = self.readings.cells.get(name, [None] * len(found))
            pairs = zip(found.tolist(), cells, strict=True)
            self._columns[key] = [self._cell(si, cell, unit, decimals) for si, cell in pairs]
        return self._columns[key]

    def _cell(
        self, si: float, cell: units.Quantity | None, unit: units.Unit, decimals: int
    ) -> Printed | None:
        if not math.isfinite(si):
            return None
        if cell is not None and cell.unit.text == unit.text:
            return Printed(typed_number(cell), cell.si)
        return _printed(float(si), unit, decimals)

    def decimals(self, name: str, unit: units.Unit) -> int:
        """Return the decimals a name is printed with in a unit."""
        key = (name, unit.text)
        if key not in self._decimals:
            self._decimals[key] = self._first_decimals(name, unit)
        return self._decimals[key]

    def _first_decimals(self, name: str, unit: units.Unit) -> int:
        item = self.scope[name].item
        found = self.results.values[name]
        every: list[float] = (
            found.tolist() if isinstance(found, np.ndarray) else [float(found or 0.0)]
        )
        size = [abs(v) / unit.factor for v in every if v and math.isfinite(v)]
        kind = getattr(item, "kind", None)
        step = 3
        if kind is not None and kind.name == "count":
            return 0
        if kind is not None and unit.text == self.display(name).text:
            step = kind.decimals_us if self.system == "US" else kind.decimals_si
        if not size or max(size) < NOISE * 10.0**-step:
            return step
        if isinstance(item, Line) and item.result:
            return max(step, units.significant_decimals(max(size), 2))
        if isinstance(item, (Entry, Carry)):
            exact = [len(exact_text(v).partition(".")[2]) for v in size]
            if max(exact) <= units.significant_decimals(min(size), 6):
                return max(exact)
        smallest = min(v for v in size if v >= max(size) * 1e-3)
        return units.significant_decimals(smallest, 4)

    # --- hand closure -----------------------------------------------------------------------

    def _close_all(self) -> None:
        """Close every line, the last first; again where what it uses got more figures since."""
        waiting = deque(reversed(self.program.steps()))
        touched: dict[str, list[Step]] = {}
        while waiting:
            step = waiting.popleft()
            operands, grown = self._close(step)
            for name in (step.bound.name, *operands):
                touched.setdefault(name, []).append(step)
            for again in [s for name in grown for s in touched.get(name, ())]:
                if again is not step and again not in waiting:
                    waiting.append(again)

    def _close(self, step: Step) -> tuple[list[str], set[str]]:
        """Close one line; returns its operands, and those that got more figures."""
        bound = step.bound
        if not isinstance(bound.item, Line) or bound.is_words or not self._has_value(bound):
            return [], set()
        if step.whole is not None:
            used, code = bound.needs, step.whole
        else:
            place = self.results.branch.get(bound.number, 0)
            used, code = step.used[place], step.branches[place][1]
        numbers = [n for n in used if self._is_number(n)]
        idle = [n for n in numbers if self.results.values.get(n) is None]
        operands = [n for n in numbers if n not in idle]
        if not operands:
            return [], set()
        return operands, self._close_line(bound, operands, _Hand(self, bound, code, idle))

    def _has_value(self, bound: Bound) -> bool:
        return (
            self.results.applies.get(bound.number, True)
            and bound.number not in self.results.problems
            and self.results.values.get(bound.name) is not None
        )

    def _is_number(self, name: str) -> bool:
        kind = self.scope[name].type if name in self.scope else None
        return kind is not None and kind.form == "number"

    def operand_unit(self, bound: Bound, name: str) -> units.Unit:
        """Return the unit an operand is substituted in: as the formula takes it, or its own."""
        if isinstance(bound.item, Line) and name in bound.item.takes:
            return bound.item.takes[name]
        return self.display(name) if self.scope[name].schedule is not None else self.unit(name)

    def rounded(self, bound: Bound, name: str) -> float | np.ndarray:
        """Return an operand, or a line itself, as printed, in SI; nan where it has no value."""
        unit = self.operand_unit(bound, name)
        if self.scope[name].schedule is None:
            one = self.value(name, unit)
            return math.nan if one is None else one.si
        printed = self.column(name, unit)
        key = (name, unit.text, self._decimals.get((name, unit.text), 0))
        if key not in self._arrays:
            self._arrays[key] = np.array([math.nan if p is None else p.si for p in printed])
        return self._arrays[key]

    def _close_line(self, bound: Bound, operands: list[str], hand: _Hand) -> set[str]:
        """Print operands with more figures, the one that spoils most first, until it closes."""
        grown: set[str] = set()
        for _ in range(MOST * len(operands)):
            rounded = {n: self.rounded(bound, n) for n in operands}
            if hand.gap(rounded) <= 1:
                break
            spoils = {n: hand.gap({n: rounded[n]}) for n in operands if self._may_grow(bound, n)}
            if not spoils:
                break
            keys = {n: (n, self.operand_unit(bound, n).text) for n in spoils}
            worst = max(spoils, key=lambda n: (spoils[n], -self._decimals[keys[n]]))
            self._decimals[keys[worst]] += 1
            grown.add(worst)
        return grown

    def _may_grow(self, bound: Bound, name: str) -> bool:
        unit = self.operand_unit(bound, name)
        key = (name, unit.text)
        if key not in self._decimals:
            return False  # an entry as typed is exact already
        exact = np.asarray(self.results.values[name], dtype=float)
        if np.array_equal(exact, np.asarray(self.rounded(bound, name)), equal_nan=True):
            return False
        size = np.abs(np.atleast_1d(exact))
        largest = float(np.nanmax(size, initial=0.0)) / unit.factor
        return self._decimals[key] < units.significant_decimals(largest or 1.0, MOST)


class _Hand:
    """A reader working a line by hand, and the printed result they should get."""

    def __init__(self, shown: Shown, bound: Bound, code: CodeType, idle: Sequence[str]) -> None:
        self.program, self.code = shown.program, code
        self.exact = shown.results.values
        if idle:  # in cases that do not hold
            self.exact = {**self.exact, **dict.fromkeys(idle, math.nan)}
        unit = shown.display(bound.name)
        single = bound.schedule is None
        printed = [shown.value(bound.name, unit)] if single else shown.column(bound.name, unit)
        ones = [math.nan if p is None else _last_figure(p.text) * unit.factor for p in printed]
        #: What one in the last figure is worth in SI, and how many of these are printed.
        self.ones = np.array(ones)
        self.counts = np.round([math.nan if p is None else p.si for p in printed] / self.ones)

    def gap(self, values: Mapping[str, Value]) -> float:
        """Return by how many last figures the hand result misses, with some values as printed."""
        try:
            hand = self.program.run(self.code, {**self.exact, **values})
            gaps = np.abs(np.round(np.asarray(hand, dtype=float) / self.ones) - self.counts)
        except (ArithmeticError, ValueError, TypeError):
            return math.inf
        return float(gaps[np.isfinite(self.counts)].max(initial=0.0))


def _last_figure(text: str) -> float:
    """Return what one in the last figure of a printed number is worth."""
    mantissa, _, power = text.partition("e")
    return float(10.0 ** (int(power or 0) - len(mantissa.partition(".")[2])))


def _printed(si: float, unit: units.Unit, decimals: int) -> Printed:
    text = units.format_number(si / unit.factor, decimals)
    return Printed(text, float(text) * unit.factor)
