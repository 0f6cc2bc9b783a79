"""Sensitivity: how a result answers to each entry it comes from.

The derivative is formed as a formula where the chain of lines allows it (`calcbook.studies.chain`)
and from differences of the recomputed workbook where it does not (`calcbook.studies.differences`).
The result at 10 % less and 10 % more of each entry is recomputed in full, never read off a slope.
Each entry is varied alone; columns of schedules are varied as a whole.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from calcbook import typeset, units
from calcbook.shown import Shown
from calcbook.studies import differences, entered
from calcbook.studies.chain import Chain, NoChainError
from calcbook.studies.choosing import Result, choose
from calcbook.studies.probe import Probe
from calcbook.verdict import ratio_text

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from calcbook.studies.choosing import Chosen
    from calcbook.studies.differences import Local
    from calcbook.studies.entered import Entered, Varied
    from calcbook.workbook import Workbook

CLOSED, NUMERIC = "closed form", "numeric"
PERCENT = 10
NO_CHANGE = 1e-12
NOTHING = 1e-12
SAME = "no change"
ZERO = "it is zero, so 10 % of it is nothing"
DATUM = "its range runs on both sides of zero: what 10 % of it is depends on the datum"
ALONE = "Each entry is varied alone; all others keep their values."


@dataclass(frozen=True)
class Slope:
    """A derivative: on which side ('' for both, 'below', 'above'), in SI, and as printed."""

    side: str
    si: float
    text: str


@dataclass(frozen=True)
class Changed:
    """The result recomputed with a part less or more of an entry.

    Attributes
    ----------
    percent
        -10 or 10.
    entry
        The entry then, as text.
    si, text
        The result in SI and as printed; None and '' where there is none.
    change
        Its change as printed, with its sign: in percent of the result, or in its unit where the
        result is zero.
    satisfied
        For a check, whether it is satisfied then.
    problem
        Why there is no result: out of range, refused, not computable.
    """

    percent: int
    entry: str
    si: float | None
    text: str
    change: str
    satisfied: bool | None
    problem: str


@dataclass(frozen=True)
class Effect:
    """How a result answers to one entry.

    Attributes
    ----------
    entry
        The entry.
    way
        'closed form' or 'numeric'.
    formula
        The derivative in the formula language, for a closed form, else ''.
    slopes
        One derivative, or one on either side of a kink, or none; `notes` then say why.
    relative
        By how many percent the result changes for each percent of the entry, as printed; ''
        where that says nothing.
    low, high
        10 % less and 10 % more.
    notes
        What else is to be said.
    """

    entry: Entered
    way: str
    formula: str
    slopes: tuple[Slope, ...]
    relative: str
    low: Changed
    high: Changed
    notes: tuple[str, ...]


@dataclass(frozen=True)
class Held:
    """A choice, or words, the result comes from: it is not varied."""

    name: str
    meaning: str
    text: str


@dataclass(frozen=True)
class Sensitivity:
    """How a result answers to its entries, the one with the largest effect first."""

    result: Result
    effects: tuple[Effect, ...]
    held: tuple[Held, ...]
    notes: tuple[str, ...]


def sensitivity(book: Workbook, identity: str) -> Sensitivity:
    """Return how a result answers to each entry and carried number it comes from.

    Parameters
    ----------
    book
        An evaluated workbook, which is not changed.
    identity
        The ``id`` of one of `calcbook.studies.results`.

    Raises
    ------
    InputError
        There is no such result, or it has no value.
    """
    chosen = choose(book, identity)
    shown = Shown(book.program, book.readings, book.results, book.scope, book.system)
    found = entered.varied(book, chosen.bound, shown)
    probe = Probe(book, chosen)
    study = _Study(book, chosen, probe)
    about = study.about(found)
    effects = [study.effect(one, local) for one, local in zip(found, about, strict=True)]
    effects.sort(key=lambda effect: -_size(effect, chosen.result.si))
    words = [Held(b.name, b.item.meaning, _words(book, b.name))
             for b in entered.held(book, chosen.bound)]  # fmt: skip
    notes = (ALONE,) if effects else ("No number that is entered or carried leads to it.",)
    return Sensitivity(chosen.result, tuple(effects), tuple(words), notes)


def _words(book: Workbook, name: str) -> str:
    """Return an option or words, or how many rows have some."""
    value = book.readings.values.get(name)
    if isinstance(value, np.ndarray):
        kinds = list(dict.fromkeys(map(str, value)))
        return kinds[0] if len(kinds) == 1 else f"{len(value)} rows"
    return str(value or "")


def _size(effect: Effect, base: float) -> float:
    changes = [abs(c.si - base) for c in (effect.low, effect.high) if c.si is not None]
    return max(changes, default=0.0)


class _Study:
    """One result of one workbook, while its entries are varied."""

    def __init__(self, book: Workbook, chosen: Chosen, probe: Probe) -> None:
        self.book, self.chosen, self.probe = book, chosen, probe
        self.result = chosen.result

    # --- differences ------------------------------------------------------------------------

    def about(self, found: Sequence[Varied]) -> list[Local]:
        """Return each entry's slopes from differences; all of them are computed in one go."""
        plans = [_Plan(one) for one in found]
        count = 1 + sum(len(plan.places) for plan in plans)
        changes, start = {}, 1
        for plan in plans:
            every = np.full(count, plan.one.start)
            every[start : start + len(plan.places)] = plan.places
            changes[plan.one.name] = plan.one.across(every)
            start += len(plan.places)
        values = self.probe.many(changes, count)
        out, start = [], 1
        for plan in plans:
            out.append(plan.read(float(values[0]), values[start : start + len(plan.places)]))
            start += len(plan.places)
        return out

    # --- one entry --------------------------------------------------------------------------

    def effect(self, one: Varied, local: Local) -> Effect:
        """Return how the result answers to one entry."""
        closed, notes = self._closed(one), list[str]()
        if closed is None:
            notes += _told(local, self.result, one)
        way, formula = (NUMERIC, "") if closed is None else (CLOSED, closed[0])
        found = _slopes(local) if closed is None else [("", closed[1])]
        slopes = [self._slope(side, si, one) for side, si in found]
        low, high = (self._changed(one, percent) for percent in (-PERCENT, PERCENT))
        if one.about_a_datum and not one.idle:
            notes.append(DATUM)
        if len(slopes) == 1 and not slopes[0].si and _unmoved(low, high, self.result.si):
            notes.append("no effect with the values in force")
        relative = self._relative(slopes, one)
        return Effect(one.entered, way, formula, tuple(slopes), relative, low, high, tuple(notes))

    def _closed(self, one: Varied) -> tuple[str, float] | None:
        if one.column:
            return None
        try:
            return Chain(self.book, self.chosen, one.name).derivative()
        except NoChainError:
            return None

    def _slope(self, side: str, si: float, one: Varied) -> Slope:
        """Return a slope with its text: '0.0714 kPa per m/s', '1.2 kN per 1 % of every row'."""
        if abs(si) * one.size <= NOTHING * abs(self.result.si):
            si = 0.0  # what rounding leaves of terms that cancel
        result = units.unit(self.result.unit)
        step = 0.01 if one.column else one.unit.factor
        value = si * step / result.factor
        text = units.format_number(value, units.significant_decimals(value, 4))
        per = units.pretty_unit(one.unit.text) or "1"
        per = "1 % of every row" if one.column else per
        printed = typeset.number(text, self.result.unit, "plain")
        return Slope(side, si, f"{printed} per {per}")

    def _relative(self, slopes: Sequence[Slope], one: Varied) -> str:
        if len(slopes) != 1 or slopes[0].side or not self.result.si or one.idle:
            return ""
        part = units.format_number(slopes[0].si * one.start / self.result.si, 3)
        return typeset.number(part, "", "plain")

    def _changed(self, one: Varied, percent: int) -> Changed:
        place = one.start * (1.0 + percent / 100.0)
        text = one.written(place)
        if one.idle:
            return _without(percent, text, ZERO)
        refused = one.refusal(place)
        if refused:
            return _without(percent, text, refused)
        found = self.probe.once({one.name: one.at(place)})
        if found.value is None:
            return _without(percent, text, found.reason)
        relation = self.result.relation
        printed = self.result.written(found.value)
        if relation:
            printed = ratio_text(found.value, relation, found.satisfied)
        return Changed(
            percent, text, found.value, printed, self._change(found.value), found.satisfied, ""
        )

    def _change(self, si: float) -> str:
        change, base = si - self.result.si, self.result.si
        if abs(change) <= NO_CHANGE * abs(base):
            return SAME
        sign = "+" if change > 0 else ""
        if abs(base) > NOTHING * abs(change):
            part = 100.0 * change / abs(base)
            decimals = max(1, units.significant_decimals(part, 2))
            text = units.format_number(part, min(decimals, 3))
            return f"{sign}{typeset.number(text, '%', 'plain')}"
        return f"{sign}{self.result.written(change)}"


class _Plan:
    """The places about an entry at which the result is computed for its slopes."""

    def __init__(self, one: Varied) -> None:
        self.one = one
        low, high = one.limits
        below = differences.steps(one.size, one.start - low)
        above = differences.steps(one.size, high - one.start)
        self.step = below if below.size else above
        if below.size and above.size:
            self.step = min(below, above, key=lambda steps: float(steps[0]))
        self.sides = (below.size > 0, above.size > 0)
        ways = [way for way, there in zip((-1.0, 1.0), self.sides, strict=True) if there]
        parts = [one.start + way * self.step for way in ways]
        self.places = np.concatenate(parts) if parts else np.empty(0)

    def read(self, at: float, values: np.ndarray) -> Local:
        """Return the slopes from the values at the places."""
        below, above = np.empty(0), np.empty(0)
        if self.sides[0]:
            below = values[: self.step.size]
        if self.sides[1]:
            above = values[-self.step.size :]
        return differences.local(at, self.one.size, self.step, below, above)


def _slopes(local: Local) -> Iterator[tuple[str, float]]:
    """Yield the sides that have a slope ('' for both), each with it."""
    if local.slope is not None:
        yield "", local.slope
        return
    for name, side in (("below", local.below), ("above", local.above)):
        if side is not None and side.slope is not None and side.start is None:
            yield name, side.slope


def _told(local: Local, result: Result, one: Varied) -> Iterator[str]:
    """Yield what is to be said of a place without one derivative."""
    if local.slope is not None:
        return
    if local.kink:
        yield "there is a kink at this value: the derivatives below and above it differ"
    for word, side in (("below", local.below), ("above", local.above)):
        if side is None:
            yield f"it is at the end of its range: there is nothing {word} it"
        elif side.start is not None:
            jump = f"the result jumps: just {word} {one.written(one.start)} it is "
            yield f"{jump}{result.written(side.start)}"
        elif side.slope is None:
            yield f"no finite derivative {word} this value"


def _without(percent: int, entry: str, problem: str) -> Changed:
    return Changed(percent, entry, None, "", "", None, problem)


def _unmoved(low: Changed, high: Changed, base: float) -> bool:
    found = [c.si for c in (low, high) if c.si is not None]
    return all(abs(si - base) <= NO_CHANGE * abs(base) for si in found)
