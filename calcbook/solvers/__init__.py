"""What a workbook may ask of the statics: solvers by name, what they take and what they give.

A solver takes columns and values in coherent SI under *roles* ('supports', 'loads'), and gives a
solution that answers to *outcomes* ('reaction', 'largest moment'). ``solve`` and ``outcome`` are
what a compiled workbook calls.
"""

from __future__ import annotations

import importlib
from collections import OrderedDict
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any, Protocol, runtime_checkable

import numpy as np

from calcbook.errors import DeclarationError, StaticsError, near_match

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

__all__ = ["Drawn", "Outcome", "Role", "Solution", "Solver", "find", "names", "outcome", "solve"]

#: Where each solver is described; imported when a workbook first asks for it.
_MODULES = {
    "beam": "calcbook.solvers.beam",
    "combinations": "calcbook.solvers.combinations",
    "truss": "calcbook.solvers.truss",
}
_KEPT = 64


@dataclass(frozen=True)
class Role:
    """One thing a solver takes.

    Attributes
    ----------
    meaning
        What it is, in the words printed.
    kind
        A kind of quantity ('length'), 'text', or 'any': one kind of quantity for all such roles.
    rows
        The set of rows it runs over, as the solver calls it; '' for a single value.
    by_case
        It is given once for each load case: a mapping from case to name.
    optional
        A solver does without it.
    may_idle
        What fills it may be under a condition that does not hold: the solver is given None.
    main
        It is printed with its meaning. Of a solver that has such roles, the others are printed as
        symbols alone.
    """

    meaning: str
    kind: str
    rows: str = ""
    by_case: bool = False
    optional: bool = False
    may_idle: bool = False
    main: bool = False

    def told(self) -> dict[str, str | bool]:
        """Return what is said of it where it is filled: ``meaning``, and whether it is ``main``."""
        return {"meaning": self.meaning, "main": self.main}


@dataclass(frozen=True)
class Outcome:
    """One thing a solution gives.

    Attributes
    ----------
    meaning
        What it is, in the words printed.
    kind
        A kind of quantity, 'text', or 'any': the kind of the roles that are 'any'.
    rows
        The set of rows it runs over, '' for a single value.
    by_case
        It is asked for a load case.
    """

    meaning: str
    kind: str
    rows: str = ""
    by_case: bool = False


@runtime_checkable
class Solution(Protocol):
    """What a solver found for one set of values."""

    def give(self, outcome: str, case: str) -> object:
        """Return an outcome: a float, or an array or list over the rows it runs over."""
        ...

    def says(self) -> tuple[str, ...]:
        """Return what a reviewer should know: residual, determinacy, members without force."""
        ...


@runtime_checkable
class Drawn(Protocol):
    """A solution that can be drawn."""

    def curves(self) -> list[dict[str, Any]]:
        """Return curves: each with ``name``, and lists ``x``, ``largest``, ``smallest`` in SI."""
        ...


@dataclass(frozen=True)
class Solver:
    """A solver of the package, as workbooks see it.

    Attributes
    ----------
    method
        The method and its source, as printed.
    roles, outcomes
        What it takes and gives, by name.
    run
        Takes values by role (floats, arrays over rows, lists of texts; mappings by case) and
        returns the solution. Raises StaticsError for what cannot be solved.
    independent
        Sets of rows of which each is solved on its own: a row without a value in some column has
        no outcomes, and the others have theirs.
    """

    name: str
    method: str
    roles: Mapping[str, Role]
    outcomes: Mapping[str, Outcome]
    run: Callable[[Mapping[str, Any]], Solution]
    independent: frozenset[str] = frozenset()
    _kept: OrderedDict[object, Solution | StaticsError] = field(
        default_factory=OrderedDict, compare=False
    )

    def solution(self, given: Mapping[str, Any]) -> Solution:
        """Solve, or return what was found for the same values before.

        Raises StaticsError for what cannot be solved, and for whatever else goes wrong inside.
        """
        key = tuple((role, _key(value)) for role, value in given.items())
        if key not in self._kept:
            try:
                self._kept[key] = self._run(given)
            except StaticsError as error:
                self._kept[key] = error
            except Exception as error:
                what = f"the solver {self.name} stopped: {type(error).__name__}: {error}"
                raise StaticsError(what, hint="the rest of the workbook stands") from error
            while len(self._kept) > _KEPT:
                self._kept.popitem(last=False)
        found = self._kept[key]
        if isinstance(found, StaticsError):
            raise found
        return found

    def _run(self, given: Mapping[str, Any]) -> Solution:
        """Solve for the rows that have all their values, where rows are independent."""
        bad: dict[str, np.ndarray] = {}
        for role, value in given.items():
            label = self.roles[role].rows
            if label not in self.independent or self.roles[role].kind == "text":
                continue
            for column in value.values() if isinstance(value, dict) else (value,):
                if column is not None:
                    bad[label] = bad.get(label, np.zeros(len(column), bool)) | np.isnan(column)
        good = {label: ~rows for label, rows in bad.items() if rows.any()}
        if not good:
            return self.run(given)
        if not all(rows.any() for rows in good.values()):
            raise StaticsError("no row has all its values")
        picked = {r: _rows_of(v, good.get(self.roles[r].rows)) for r, v in given.items()}
        return _SomeRows(self, self.run(picked), good)


class _SomeRows:
    """A solution over the rows that have values; the others have nan and no words."""

    def __init__(self, solver: Solver, found: Solution, good: Mapping[str, np.ndarray]) -> None:
        self.solver, self.found, self.good = solver, found, good

    def give(self, outcome: str, case: str) -> object:
        """Return an outcome with the rows left out in their places."""
        given, told = self.found.give(outcome, case), self.solver.outcomes[outcome]
        if told.rows not in self.good:
            return given
        rows = self.good[told.rows]
        words = told.kind == "text"
        every = np.full(len(rows), "" if words else np.nan, object if words else float)
        every[rows] = given
        return list(every) if words else every

    def says(self) -> tuple[str, ...]:
        """Return what the solution says, and how many rows were left out."""
        left_out = sum(int((~rows).sum()) for rows in self.good.values())
        noun = "row" if left_out == 1 else "rows"
        return (*self.found.says(), f"{left_out} {noun} left out for want of a value")


def _rows_of(value: object, good: np.ndarray | None) -> object:
    """Return a column, texts or a mapping of columns with the good rows only."""
    if good is None or value is None:
        return value
    if isinstance(value, dict):
        return {case: _rows_of(column, good) for case, column in value.items()}
    if isinstance(value, list):
        return [text for text, held in zip(value, good, strict=True) if held]
    return np.asarray(value)[good]


def names() -> tuple[str, ...]:
    """Return the names of all solvers."""
    return tuple(sorted(_MODULES))


def find(name: str) -> Solver:
    """Return the solver of a name; DeclarationError with a near match when there is none."""
    if name not in _MODULES:
        hint = near_match(name, _MODULES) or f"there are {', '.join(names())}"
        raise DeclarationError(f"there is no solver '{name}'", hint=hint)
    solver: Solver = importlib.import_module(_MODULES[name]).SOLVER
    return solver


def solve(name: str, given: Mapping[str, Any], *, array: bool) -> object:
    """Run a solver on the values of a workbook, once, or for each of many cases.

    Parameters
    ----------
    given
        By role: a float, a column (rows,), texts; with ``array`` a float for all cases or one for
        each (cases,), a column (rows, cases or 1); mappings of these by load case.

    Returns
    -------
    A solution; with ``array`` a list of them by case, None where that case cannot be solved.

    Raises
    ------
    StaticsError
        Without ``array``, for what cannot be solved.
    """
    solver = find(name)
    roles = solver.roles
    if not array:
        return solver.solution({r: _plain(v, roles[r]) for r, v in given.items()})
    count = max((_cases(v, roles[r]) for r, v in given.items()), default=1)
    return [_one_of_many(solver, given, case) for case in range(count)]


def _one_of_many(solver: Solver, given: Mapping[str, Any], case: int) -> Solution | None:
    roles = solver.roles
    try:
        return solver.solution(
            {r: _plain(_at(v, case, roles[r]), roles[r]) for r, v in given.items()}
        )
    except StaticsError:
        return None


@dataclass(frozen=True)
class _Sometimes:
    """A value of many cases that applies in some of them."""

    value: object
    held: np.ndarray


def acting(held: object, value: object) -> object:
    """Return a value under a condition: None where it does not hold.

    With many cases the condition may hold in some only, shape (cases,).
    """
    every = np.asarray(held, dtype=bool)
    if every.all():
        return value
    return _Sometimes(value, every) if every.any() else None


def outcome(solution: object, name: str, case: str, rows: int | None) -> Any:  # noqa: ANN401
    """Return an outcome of what ``solve`` returned; ``rows`` is None for a single value.

    With many cases ``rows`` is the length of a column.

    For many cases a value becomes an array (cases,), a column (rows, cases), with nan where a
    case could not be solved.
    """
    if not isinstance(solution, list):
        found = solution.give(name, case)  # type: ignore[attr-defined]
        return float(found) if rows is None and not isinstance(found, str) else np.asarray(found)
    blank: Any = np.nan if rows is None else np.full(rows, np.nan)
    every = [blank if one is None else np.asarray(one.give(name, case)) for one in solution]
    return np.stack(np.broadcast_arrays(*every), axis=-1)


def _key(value: object) -> object:
    if isinstance(value, dict):
        return tuple((case, _key(one)) for case, one in value.items())
    if isinstance(value, np.ndarray):
        return value.shape, value.tobytes()
    return tuple(value) if isinstance(value, list) else value


def _plain(value: object, told: Role) -> object:
    """Return a value as a solver takes it: a float, an array of floats or a list of texts."""
    if isinstance(value, dict):
        return {case: _plain(one, told) for case, one in value.items()}
    if value is None and told.may_idle:
        return None
    if told.kind == "text":
        single = isinstance(value, str) or np.ndim(value) == 0  # type: ignore[arg-type]
        return str(value) if single else [str(v) for v in np.ravel(np.asarray(value, object))]
    if value is None:
        raise StaticsError("a value that the solver takes does not apply")
    found = np.asarray(value, dtype=float)
    return float(found) if found.ndim == 0 else found


def _cases(value: object, told: Role) -> int:
    if isinstance(value, dict):
        return max((_cases(v, told) for v in value.values()), default=1)
    if isinstance(value, _Sometimes):
        return max(_cases(value.value, told), len(value.held))
    found = np.asarray(value)
    return found.shape[-1] if found.ndim == (2 if told.rows else 1) else 1


def _at(value: object, case: int, told: Role) -> object:
    if isinstance(value, dict):
        return {name: _at(v, case, told) for name, v in value.items()}
    if isinstance(value, _Sometimes):
        return _at(value.value, case, told) if value.held[case] else None
    found = np.asarray(value)
    if found.ndim < (2 if told.rows else 1):
        return value
    return found[..., min(case, found.shape[-1] - 1)]
