"""Value needed: what an entry would have to be for a result to reach a target.

The permitted range of the entry is searched for every value that reaches the target
(`calcbook.studies.search`). Where the chain of lines can be solved for the entry, with the
branches that hold at that value, the value is that of the formula. Each answer is typed into the
workbook and recomputed before it is given; nothing is kept.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from calcbook import typeset, units
from calcbook.errors import CalcbookError, InputError, near_match
from calcbook.reading import read_value
from calcbook.shown import Shown
from calcbook.studies import entered
from calcbook.studies.answers import (
    BRACKETED,
    CLOSED,
    EVERY,
    NONE,
    ONE,
    SEVERAL,
    Answer,
    Nearest,
    Needed,
)
from calcbook.studies.chain import Chain, Solved
from calcbook.studies.choosing import RATIO, choose
from calcbook.studies.probe import Probe
from calcbook.studies.search import REACHED, Root, Search, search
from calcbook.verdict import STRICT, ratio, ratio_text

if TYPE_CHECKING:
    from collections.abc import Sequence

    from calcbook.studies.choosing import Chosen, Result
    from calcbook.studies.entered import Entered, Varied
    from calcbook.studies.probe import Found
    from calcbook.workbook import Workbook

FARTHEST = 10.0  # times its size, where a side of the range is open
MOST_ANSWERS = 12
_FIGURES = (4, 6, 8, 10, 12, 14, 16, 17)
_ALIKE = 1e-9
_UNBOUND = 1e6
_SMALLEST, _LARGEST = 1e-6, 1e9  # between them a number is typed without a power of ten
_ZERO = 1e3  # units of a result by which a target of zero is judged, where nothing else is known


def entries(book: Workbook, identity: str) -> tuple[Entered, ...]:
    """Return the single entries and carried numbers a result comes from; raises as `needed`."""
    chosen = choose(book, identity)
    return tuple(one.entered for one in _singles(book, chosen))


def needed(
    book: Workbook, identity: str, name: str, target: str = "", *, bare: units.Unit | None = None
) -> Needed:
    """Return what an entry would have to be for a result to reach a target.

    Parameters
    ----------
    book
        An evaluated workbook, which is not changed.
    identity
        The ``id`` of one of `calcbook.studies.results`.
    name
        One of `entries`.
    target
        A quantity of the result's dimension, as typed. For a check its ratio; '' is satisfied
        exactly.
    bare
        The unit printed beside the field, in which a bare number is taken.

    Raises
    ------
    QuantityError
        The target is no quantity of the right kind.
    InputError
        There is no such result or entry, or it has no value.
    """
    chosen = choose(book, identity)
    found = {one.name: one for one in _singles(book, chosen)}
    if name not in found:
        hint = near_match(name, found) or f"it comes from {', '.join(found) or 'no entry'}"
        raise InputError(f"{identity} does not come from an entry '{name}'", where=book.name,
                         hint=hint)  # fmt: skip
    wanted = _target(chosen.result, target, bare)
    return _Quest(book, chosen, found[name], wanted).needed()


def _singles(book: Workbook, chosen: Chosen) -> list[Varied]:
    shown = Shown(book.program, book.readings, book.results, book.scope, book.system)
    return [one for one in entered.varied(book, chosen.bound, shown) if not one.column]


def _target(result: Result, text: str, bare: units.Unit | None) -> units.Quantity | None:
    """Read a target strictly; None is a check satisfied exactly."""
    if result.which == RATIO and not text.strip():
        return None
    dimension = units.unit(result.unit).dimension
    try:
        found = units.read_quantity(text, dimension, bare=bare)
    except CalcbookError as error:
        raise error.at(f"target of {result.id}") from None
    if result.which == RATIO and found.si <= 0.0:
        raise InputError("the ratio of a check is above zero", where=f"target of {result.id}",
                         hint="leave it empty for a check that is satisfied exactly")  # fmt: skip
    return found


class _Quest:
    """One entry, one result, one target."""

    def __init__(
        self, book: Workbook, chosen: Chosen, one: Varied, target: units.Quantity | None
    ) -> None:
        self.book, self.chosen, self.one, self.target = book, chosen, one, target
        self.result = chosen.result
        self.exactly = target is None
        self.probe = Probe(book, chosen, gap=self.exactly)
        self.wanted = 0.0 if target is None else target.si
        self.low, self.high, self.open = self._range()
        self.scale = self._scale()

    def _range(self) -> tuple[float, float, bool]:
        """Return the range to search, and whether a side of it is not limited by the entry."""
        low, high = self.one.limits
        reach = FARTHEST * max([self.one.size, *(abs(v) for v in (low, high) if math.isfinite(v))])
        below = low if math.isfinite(low) else self.one.start - reach
        above = high if math.isfinite(high) else self.one.start + reach
        return below, above, not (math.isfinite(low) and math.isfinite(high))

    def _scale(self) -> float:
        """Return the size by which a difference from the target is judged."""
        if self.exactly:
            return 1.0
        unit, base = units.unit(self.result.unit).factor, abs(self.result.si)
        return abs(self.wanted) or (base if base > REACHED * unit else _ZERO * unit)

    def needed(self) -> Needed:
        """Return the answers, or what comes nearest."""
        found = search(self._misses, self.low, self.high, self.one.start, self.scale)
        answers = [self._stretch(*ends) for ends in found.stretches]
        answers += [self._root(root) for root in self._with_closed(found)]
        good = [answer for answer in answers if answer is not None]
        good.sort(key=lambda answer: abs(answer.si - self.one.start))
        lost = len(answers) - len(good)
        good = good[:MOST_ANSWERS]
        verdict = EVERY if found.flat and good else _VERDICTS.get(len(good), SEVERAL)
        nearest = None if good else self._nearest(found)
        return Needed(
            self.result, self.one.entered, self._target_text(), verdict, tuple(good), nearest,
            self._searched(), tuple(self._notes(found, lost)),
        )  # fmt: skip

    def _misses(self, places: np.ndarray) -> np.ndarray:
        return self.probe.many({self.one.name: places}, len(places)) - self.wanted

    # --- closed forms -----------------------------------------------------------------------

    def _with_closed(self, found: Search) -> list[tuple[Root, Solved | None]]:
        """Return the roots with the formula that gives each, None where none does.

        The formula in force now may give a root that only touches the target; it is added.
        """
        nearest = sorted(found.roots, key=lambda root: abs(root.at - self.one.start))
        roots = [self._explained(root) for root in nearest[:MOST_ANSWERS]]
        known = [root.at for root, _ in roots]
        for solved in Chain(self.book, self.chosen, self.one.name).solved(self._ratio()):
            at = solved.value
            if not self.low <= at <= self.high or self._known(at, known, found):
                continue
            if abs(float(self._misses(np.array([at]))[0])) <= REACHED * self.scale:
                roots.append((Root(at, at, at, 0.0), solved))
        return roots

    def _known(self, at: float, roots: Sequence[float], found: Search) -> bool:
        """Whether a value is among the roots, or in a stretch of values that all serve."""
        within = any(low <= at <= high for low, high in found.stretches)
        return within or any(_alike(at, root, self.one.size) for root in roots)

    def _explained(self, root: Root) -> tuple[Root, Solved | None]:
        results = self.probe.once({self.one.name: root.at}).results
        chain = Chain(self.book, self.chosen, self.one.name, results)
        for solved in chain.solved(self._ratio()):
            if _alike(solved.value, root.at, self.one.size):
                return Root(solved.value, root.low, root.high, root.width), solved
        return root, None

    def _ratio(self) -> float:
        return 1.0 if self.exactly else self.wanted

    # --- answers ----------------------------------------------------------------------------

    def _root(self, pair: tuple[Root, Solved | None]) -> Answer | None:
        root, solved = pair
        interval = tolerance = ""
        if solved is None:
            interval = f"{self.one.written(root.low)} to {self.one.written(root.high)}"
            width = max(root.width, float(np.spacing(abs(root.at)))) / self.one.unit.factor
            power = units.format_number(width, units.significant_decimals(width, 1))
            tolerance = typeset.number(power, self.one.unit.text, "plain")
        return self._answer(root.at, solved, interval, tolerance, "")

    def _stretch(self, low: float, high: float) -> Answer | None:
        near = min(max(self.one.start, low), high)
        words = f"every value from {self.one.written(low)} to {self.one.written(high)} gives it"
        return self._answer(near, None, "", "", words)

    def _answer(
        self, si: float, solved: Solved | None, interval: str, tolerance: str, stretch: str
    ) -> Answer | None:
        """Return a value as it would be typed, recomputed; None where it does not hold."""
        for figures in _FIGURES:
            text = self._typed(si, figures)
            found = self._try(text)
            if found is not None and self._met(found):
                break
        else:
            return None
        rounded, about = self._rounded(si)
        formula = solved.formula if solved is not None else ""
        given = self._given(solved.stands_for) if solved is not None else ""
        return Answer(
            text, si, self._printed(found), rounded, self._printed(about) if about else "",
            about.satisfied if about else None, CLOSED if formula else BRACKETED, formula,
            given, interval, tolerance, stretch,
        )  # fmt: skip

    def _typed(self, si: float, figures: int, decimals: int | None = None) -> str:
        """Return a value as text to type, without zeros at its end."""
        value = si / self.one.unit.factor
        if decimals is None:
            decimals = units.significant_decimals(value, figures)
        plain = _SMALLEST <= abs(value) < _LARGEST or not value
        number = f"{value:.{decimals}f}" if plain else f"{value:.{figures - 1}e}"
        if "." in number and "e" not in number:
            number = number.rstrip("0").rstrip(".")
        return f"{number} {self.one.unit.text}".strip()

    def _try(self, text: str) -> Found | None:
        """Recompute with a text as it would be read; None where it is refused."""
        try:
            value = read_value(self.one.item, text)
        except CalcbookError:
            return None
        if not isinstance(value, units.Quantity):
            return None
        return self.probe.once({self.one.name: value.si})

    def _met(self, found: Found) -> bool:
        return found.value is not None and abs(found.value - self.wanted) <= REACHED * self.scale

    def _rounded(self, si: float) -> tuple[str, Found | None]:
        """Return the value in four figures; for a check, rounded to the side that satisfies it."""
        value = si / self.one.unit.factor
        decimals = units.significant_decimals(value, 4)
        kind = self.one.item.kind
        if kind is not None and kind.name == "count":
            decimals = 0
        step = 10.0**-decimals * self.one.unit.factor
        tries = [si, si - step / 2, si + step / 2] if self.result.which == RATIO else [si]
        made = [(text, self._try(text)) for text in (self._typed(s, 4, decimals) for s in tries)]
        good = [(text, found) for text, found in made if found is not None]
        held = [(text, found) for text, found in good if found.satisfied]
        return (held or good)[0] if good else ("", None)

    # --- words ------------------------------------------------------------------------------

    def _printed(self, found: Found) -> str:
        if found.value is None:
            return found.reason
        if self.result.which != RATIO:
            return self.result.written(found.value)
        bound = self.chosen.bound
        if self.exactly:
            return _ratio_of(found, bound.number, self.result.relation)
        return ratio_text(found.value, self.result.relation, found.satisfied)

    def _target_text(self) -> str:
        if self.target is None:
            return "satisfied exactly"
        number, unit = self.target.parts
        return typeset.number(number, unit, "plain") if unit else self.target.text

    def _given(self, name: str) -> str:
        """Return what the name that stands for the target is, in words."""
        if self.result.which != RATIO:
            return f"{name} is the target: {self._target_text()}"
        ratio = units.format_number(self._ratio(), 3).rstrip("0").rstrip(".")
        if name.startswith("ratio"):
            return f"{name} is {ratio}"
        if ratio == "1":
            return f"{name} is the {'limit' if name.startswith('demand') else 'demand'}"
        if name.startswith("demand"):
            return f"{name} is {ratio} times the limit"
        return f"{name} is the demand divided by {ratio}"

    def _searched(self) -> str:
        words = f"{self.one.written(self.low)} to {self.one.written(self.high)}"
        return f"{words} (the entry has no such limit itself)" if self.open else words

    def _nearest(self, found: Search) -> Nearest | None:
        place, _ = found.nearest
        if not math.isfinite(place):
            return None
        return Nearest(self.one.written(place), self._printed(
            self.probe.once({self.one.name: place})))  # fmt: skip

    def _jump(self, below: float, above: float, low: float, high: float) -> str:
        """Return where the result passes the target without reaching it, and how."""
        place = self.one.written(above)
        if max(abs(low), abs(high)) > _UNBOUND * self.scale:
            return f"at {place} the result grows without bound and changes its sign"
        before, after = (
            self._printed(self.probe.once({self.one.name: at})) for at in (below, above)
        )
        return f"at {place} the result jumps over the target, from {before} to {after}"

    def _notes(self, found: Search, lost: int) -> list[str]:
        notes = []
        if found.flat:
            notes.append(f"the result does not change with {self.one.name}")
        notes += [self._jump(*jump) for jump in found.jumps]
        if found.crowded:
            notes.append("it passes the target more often than is followed up")
        if found.missing:
            notes.append("in a part of the range the result has no value")
        if len(found.roots) > MOST_ANSWERS:
            notes.append(f"there are more; the nearest {MOST_ANSWERS} are given")
        if lost:
            notes.append(f"{lost} more cannot be typed so that the target is met within 1e-9")
        if self.exactly and self.result.relation in STRICT:
            notes.append("the check is not satisfied at its limit, only beyond it")
        home = self.one.entered.home
        return [*notes, f"it is brought forward from {home}, and changed there"] if home else notes


_VERDICTS = {0: NONE, 1: ONE}


def _alike(one: float, other: float, size: float) -> bool:
    return abs(one - other) <= _ALIKE * max(abs(one), abs(other), 1e-3 * size)


def _ratio_of(found: Found, number: str, relation: str) -> str:
    demand, limit, held = found.results.checks[number]
    used = ratio(demand, limit, relation)
    return "no ratio" if used is None else ratio_text(used, relation, held)
