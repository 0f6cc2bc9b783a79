"""A result recomputed with other values: one case as the workbook does it, or many at once."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from calcbook.items import Check
from calcbook.studies.choosing import LINE, TOTAL, relation_of
from calcbook.verdict import UPWARD, margin, ratio

if TYPE_CHECKING:
    from collections.abc import Mapping

    from numpy.typing import NDArray

    from calcbook.program import Results, Value
    from calcbook.studies.choosing import Chosen
    from calcbook.workbook import Workbook

    Array = NDArray[np.float64] | np.float64

_FAILS = (ArithmeticError, ValueError, TypeError)


class Found(NamedTuple):
    """A recomputed result: its value or why it has none, a check's verdict, and every value."""

    value: float | None
    reason: str
    satisfied: bool | None
    results: Results


class Probe:
    """Recomputes one result of an evaluated workbook.

    Parameters
    ----------
    book
        The workbook; its inputs, readings and results are left as they are.
    chosen
        The result.
    gap
        For a check, give what is left between demand and limit (limit less demand for '<=') as a
        part of the larger, instead of their ratio: it goes through zero where the ratio goes
        through 1, and has a value where the ratio has none.
    """

    def __init__(self, book: Workbook, chosen: Chosen, *, gap: bool = False) -> None:
        self.book, self.chosen, self.gap = book, chosen, gap
        self._wide = book.many()
        self._fixed = {n: self._spread(n) for n in book.program.inputs}

    def _spread(self, name: str) -> object:
        """Return an input that is the same in every case; one without a value is nan."""
        value: object = self.book.readings.values.get(name)
        kind = self.book.program.scope[name]
        if isinstance(value, np.ndarray):
            return value[:, np.newaxis]
        if value is not None or kind.form == "table":
            return np.float64(value) if isinstance(value, float) else value
        blank: object = "" if kind.form == "text" else np.float64(np.nan)
        if kind.rows is None:
            return blank
        count = self.book.readings.rows.get(kind.rows, 0)
        return np.full((count, 1), blank, dtype=object if kind.form == "text" else float)

    # --- one case ---------------------------------------------------------------------------

    def once(self, changes: Mapping[str, Value]) -> Found:
        """Recompute one case just as the workbook itself does, with reasons."""
        readings = self.book.readings
        problems = {n: p for n, p in readings.problems.items() if n not in changes}
        results = self.book.program.evaluate(
            {**readings.values, **changes}, readings.rows, problems,
            readings.row_problems, readings.keys,
        )  # fmt: skip
        value, satisfied = self._read(results)
        if value is None or not math.isfinite(value):
            return Found(None, self._reason(results), satisfied, results)
        return Found(value, "", satisfied, results)

    def _read(self, results: Results) -> tuple[float | None, bool | None]:
        bound = self.chosen.bound
        if not results.applies.get(bound.number, True):
            return None, None
        if isinstance(bound.item, Check):
            demand, limit, held = results.checks.get(bound.number, (None, None, None))
            relation = relation_of(bound)
            if not self.gap:
                return ratio(demand, limit, relation), held
            if not isinstance(demand, float) or not isinstance(limit, float):
                return None, held
            return float(_gaps(np.float64(demand), np.float64(limit), relation)), held
        value = results.values.get(bound.name)
        if isinstance(value, np.ndarray):
            return float(_gathered(value[:, np.newaxis], self.chosen.result.which)[0]), None
        return value if isinstance(value, float) else None, None

    def _reason(self, results: Results) -> str:
        bound = self.chosen.bound
        if not results.applies.get(bound.number, True):
            return "it is not applied then"
        reason = results.problems.get(bound.number, "")
        rows = results.row_problems.get(bound.name, ())
        reason = reason or next((r for r in rows if r), "")
        return reason or ("the ratio says nothing then" if self._of_check else "it has no value")

    @property
    def _of_check(self) -> bool:
        return isinstance(self.chosen.bound.item, Check)

    # --- many cases -------------------------------------------------------------------------

    def many(self, changes: Mapping[str, np.ndarray], count: int) -> np.ndarray:
        """Recompute many cases at once.

        Parameters
        ----------
        changes
            Inputs by name: numbers as arrays (cases,), columns as arrays (rows, cases), in SI.

        Returns
        -------
        array (cases,)
            In SI; nan where a case gives no value.
        """
        try:
            with np.errstate(all="ignore"):
                return np.array(np.broadcast_to(self._wide_value(changes), count), dtype=float)
        except _FAILS:
            return np.array([self._one_of(changes, case) for case in range(count)])

    def _wide_value(self, changes: Mapping[str, np.ndarray]) -> np.ndarray:
        values: dict[str, Value] = {**self._fixed, **changes}  # type: ignore[dict-item]
        found = self._wide.compute(values, self.book.readings.rows)[1]
        bound = self.chosen.bound
        if not self._of_check:
            place = next(n for n, b in enumerate(self._wide.lines) if b.number == bound.number)
            value = np.asarray(found[place], dtype=float)
            if self.chosen.result.which == LINE:
                return value
            return _gathered(value, self.chosen.result.which)
        values.update(zip((b.name for b in self._wide.lines), found, strict=True))
        return self._wide_check(values)

    def _wide_check(self, values: Mapping[str, Value]) -> np.ndarray:
        step = self._wide.step(self.chosen.bound)
        sides = [np.asarray(self._wide.run(code, values), float) for code in step.sides or ()]
        relation = relation_of(self.chosen.bound)
        margins = margin(sides[0], sides[1], relation)
        demand, limit = np.broadcast_arrays(*sides)
        if demand.ndim > 1:
            worst = np.argmin(margins, axis=0)[np.newaxis]
            demand, limit = (np.take_along_axis(s, worst, axis=0)[0] for s in (demand, limit))
        value = (_gaps if self.gap else _ratios)(demand, limit, relation)
        applies = np.asarray(True)
        for _, code in step.guards:
            applies = applies & np.asarray(self._wide.run(code, values), bool)
        return np.where(applies, value, np.nan)

    def _one_of(self, changes: Mapping[str, np.ndarray], case: int) -> float:
        value = self.once({n: _of_case(v, case) for n, v in changes.items()}).value
        return math.nan if value is None else value


def _of_case(values: np.ndarray, case: int) -> Value:
    return values[:, case] if values.ndim > 1 else float(values[case])


def _gathered(rows: np.ndarray, which: str) -> np.ndarray:
    """Return a column's total or governing value in each case; rows without a value are left out.

    A total has no value when a row has none, as in the statement.
    """
    if which == TOTAL:
        return np.asarray(rows.sum(axis=0))
    if which == "largest":
        return np.asarray(np.fmax.reduce(rows, axis=0))
    if which == "smallest":
        return np.asarray(np.fmin.reduce(rows, axis=0))
    size = np.where(np.isfinite(rows), np.abs(rows), -1.0)
    return np.asarray(np.take_along_axis(rows, np.argmax(size, axis=0)[np.newaxis], axis=0)[0])


def _ratios(demand: Array, limit: Array, relation: str) -> np.ndarray:
    """Return the ratios of many cases, as `calcbook.verdict.ratio` gives that of one."""
    toward_zero = ((demand < 0) | (limit < 0)) == (relation in UPWARD)
    over, under = np.where(toward_zero, limit, demand), np.where(toward_zero, demand, limit)
    alike = ((demand > 0) & (limit > 0)) | ((demand < 0) & (limit < 0))
    return np.where(alike & (under != 0), over / np.where(under == 0, 1.0, under), np.nan)


def _gaps(demand: Array, limit: Array, relation: str) -> np.ndarray:
    """Return what is left between demand and limit, as a part of the larger; 0 where both are."""
    left = limit - demand if relation in UPWARD else demand - limit
    larger = np.maximum(np.abs(demand), np.abs(limit))
    return np.asarray(left / np.where(larger == 0, 1.0, larger))
