"""The entries a result depends on, found by going back through the lines."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from calcbook import typeset, units
from calcbook.errors import InputError
from calcbook.items import Carry, Choice, Entry, Text
from calcbook.reading import dimension_of, range_text, refuse_outside
from calcbook.shown import Shown, exact_text

if TYPE_CHECKING:
    from calcbook.bind import Bound
    from calcbook.workbook import Workbook

ENTRY, CARRIED, COLUMN = "entry", "carried", "column"
_LONGEST = 9  # characters of a number that is shown in full


@dataclass(frozen=True)
class Entered:
    """An entry, a carried number, or a column of numbers entered or carried, as a whole.

    Attributes
    ----------
    name, meaning, number
        Its symbol, what it is, and the number of its item.
    kind
        'entry', 'carried' or 'column'.
    text, unit
        Its value as shown with its unit (a column: how many rows), and the unit.
    range
        The permitted range in words, or ''.
    home
        Where a carried number comes from: 'design-basis.h'.
    """

    name: str
    meaning: str
    number: str
    kind: str
    text: str
    unit: str
    range: str
    home: str


class Varied:
    """One of these while it is varied, along one number: a value in SI, or a column's factor."""

    def __init__(self, bound: Bound, book: Workbook, shown: Shown) -> None:
        item = bound.item
        if not isinstance(item, (Entry, Carry)):
            raise InputError(f"{bound.name} is no number")
        self.item = item
        self.keys: tuple[str, ...] = ()
        self.base = book.readings.values[bound.name]
        home = bound.schedule
        self.column = home is not None
        self.unit = shown.display(bound.name) if self.column else shown.unit(bound.name)
        if home is not None:
            self.keys = tuple(book.readings.keys[home.rows])
        self.entered = self._entered(bound)

    def _entered(self, bound: Bound) -> Entered:
        carried = isinstance(self.item, Carry)
        kind = COLUMN if self.column else CARRIED if carried else ENTRY
        rows = f"{len(self.keys)} row{'s' * (len(self.keys) != 1)}"
        text = rows if self.column else self.written(self.start)
        home = self.item.origin if isinstance(self.item, Carry) else ""
        return Entered(
            bound.name, self.item.meaning, bound.number, kind, text, self.unit.text,
            range_text(self.item), home,
        )  # fmt: skip

    @property
    def name(self) -> str:
        """The symbol."""
        return self.item.name

    @property
    def start(self) -> float:
        """The value in force: SI, or the factor 1 of a column."""
        return 1.0 if not isinstance(self.base, float) else self.base

    @property
    def idle(self) -> bool:
        """Whether a part more or less of it is nothing: it is zero."""
        return not np.any(np.nan_to_num(np.asarray(self.base, dtype=float)))

    @property
    def limits(self) -> tuple[float, float]:
        """The range it may be varied in, from -inf to inf where it has none."""
        dimension = dimension_of(self.item)
        low, high = (
            units.read_quantity(text, dimension).si if text else side
            for text, side in ((self.item.low, -math.inf), (self.item.high, math.inf))
        )
        if not self.column:
            return low, high
        cells = np.asarray(self.base, dtype=float)
        cells = cells[np.isfinite(cells) & (cells != 0.0)]
        if not cells.size:
            return -math.inf, math.inf
        ends = np.sort(np.array([low / cells, high / cells]), axis=0)
        return float(ends[0].max()), float(ends[1].min())

    @property
    def about_a_datum(self) -> bool:
        """Whether its range runs on both sides of zero, as that of a level does."""
        dimension = dimension_of(self.item)
        sides = [units.read_quantity(t, dimension).si for t in (self.item.low, self.item.high) if t]
        return len(sides) == 2 and sides[0] < 0.0 < sides[1]  # noqa: PLR2004  low and high

    @property
    def size(self) -> float:
        """A size to take steps from: its own, or one of its unit where it is zero."""
        return abs(self.start) or self.unit.factor

    def at(self, place: float) -> float | np.ndarray:
        """Return the value, or the column, at a place along it."""
        return place if not self.column else np.asarray(self.base, dtype=float) * place

    def across(self, places: np.ndarray) -> np.ndarray:
        """Return many values (cases,), or columns (rows, cases)."""
        if not self.column:
            return places
        return np.asarray(np.asarray(self.base, dtype=float)[:, np.newaxis] * places)

    def written(self, si: float) -> str:
        """Return a value of it as shown, with its unit; a column's part in words."""
        if self.column:
            return f"every row \N{MULTIPLICATION SIGN} {exact_text(si)}"
        return self._number(si)

    def _number(self, si: float) -> str:
        value = si / self.unit.factor
        text = exact_text(value)
        if len(text.lstrip("-")) > _LONGEST:
            text = units.format_number(value, units.significant_decimals(value, 5))
            text = text.rstrip("0").rstrip(".") if "." in text and "e" not in text else text
        return typeset.number(text, self.unit.text, "plain")

    def refusal(self, place: float) -> str:
        """Return why it may not be at a place, or ''."""
        value = self.at(place)
        if not isinstance(value, np.ndarray):
            return self._refused(value)
        for key, cell in zip(self.keys, value, strict=True):
            reason = self._refused(float(cell)) if math.isfinite(cell) else ""
            if reason:
                return f"row {key}: {reason}"
        return ""

    def _refused(self, si: float) -> str:
        try:
            refuse_outside(self.item, self._number(si), si)
        except InputError as error:
            return error.what
        return ""


def leading_to(book: Workbook, bound: Bound) -> list[Bound]:
    """Return the items a result comes from, through lines and their conditions, in order."""
    wanted, found = set(bound.needs), []
    for part in reversed(book.bound):
        if part.name in wanted and part.computable:
            wanted.update(part.needs)
            found.append(part)
    return found[::-1]


def varied(book: Workbook, bound: Bound, shown: Shown) -> list[Varied]:
    """Return the numbers a result comes from that apply and have a value."""
    return [
        Varied(part, book, shown)
        for part in leading_to(book, bound)
        if isinstance(part.item, (Entry, Carry))
        and part.type is not None
        and part.type.form == "number"
        and book.results.applies.get(part.number, True)
        and book.readings.values.get(part.name) is not None
    ]


def held(book: Workbook, bound: Bound) -> list[Bound]:
    """Return the choices and words a result comes from, which are not varied."""
    return [
        part
        for part in leading_to(book, bound)
        if isinstance(part.item, (Choice, Text, Carry))
        and part.type is not None
        and part.type.form == "text"
        and book.results.applies.get(part.number, True)
    ]
