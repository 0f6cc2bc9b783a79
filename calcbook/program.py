"""From bound items to one compiled function, for one case or for many at once.

``Program`` compiles the lines of a workbook as one Python function on floats in coherent SI
(columns are numpy arrays, axis 0 = rows). Where that function meets something it cannot
compute, the lines are evaluated one by one instead, so that each says what is wrong with it and
the others still stand.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from functools import cached_property
from operator import itemgetter
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook.compile import namespace
from calcbook.formula import parse
from calcbook.items import Check, Line, Solver
from calcbook.source import Source
from calcbook.tree import Compare, Node, names
from calcbook.verdict import worst

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence
    from types import CodeType

    from calcbook.bind import Bound
    from calcbook.dimensions import Type

Value = float | str | np.ndarray | None
#: A sum that is finite when every value is; line values; cases; conditions; sides of checks.
Computed = tuple[Any, tuple[Value, ...], tuple[int, ...], tuple[bool, ...], tuple[object, ...]]
UNDECIDED = "cannot be decided: a side of it has no value"


@dataclass
class Results:
    """Values by name, and what is known of each item by its number.

    Attributes
    ----------
    values
        Scalars as floats or option texts, columns as arrays of shape (rows,), in coherent SI;
        the solutions of solvers.
    applies
        False for an item whose conditions do not hold.
    branch
        The index of the case that holds, for a line with cases.
    problems
        Why an item has no value; ``row_problems`` per row of a column.
    checks
        (demand, limit, satisfied) of each check.

    An item that is in neither ``applies`` nor ``problems`` applies and has its value.
    """

    values: dict[str, Value] = field(default_factory=dict)
    applies: dict[str, bool] = field(default_factory=dict)
    branch: dict[str, int] = field(default_factory=dict)
    problems: dict[str, str] = field(default_factory=dict)
    row_problems: dict[str, list[str]] = field(default_factory=dict)
    checks: dict[str, tuple[Value, Value, bool | None]] = field(default_factory=dict)


@dataclass(eq=False)
class Step:
    """One item compiled on its own.

    ``whole`` is a column with its cases, ``sides`` are a check's, ``used`` the names of each case.
    """

    bound: Bound
    guards: tuple[tuple[str, CodeType], ...]
    branches: tuple[tuple[CodeType | None, CodeType], ...]
    whole: CodeType | None = None
    sides: tuple[CodeType, CodeType] | None = None
    used: tuple[tuple[str, ...], ...] = ()


class Program:
    """The compiled lines of a workbook.

    Parameters
    ----------
    bound
        Every item in order, bound.
    scope
        The type of every name.
    array
        Evaluate many cases at once: scalars have shape (cases,), columns (rows, cases).
    """

    def __init__(self, bound: Sequence[Bound], scope: Mapping[str, Type], *, array: bool) -> None:
        self.bound = [b for b in bound if b.computable]
        self.scope = scope
        self.array = array
        self.lines = [b for b in self.bound if isinstance(b.item, Line)]
        self.computed = [b for b in self.bound if isinstance(b.item, (Line, Solver))]
        computed = {b.name for b in self.computed}
        self.inputs = [n for n, kind in scope.items() if n not in computed and kind.form != "truth"]
        self.rows = list(dict.fromkeys(b.rows for b in self.bound if b.rows))
        self.space = namespace(array=array) | {
            "_where": np.where, "_pick": _pick, "_column": _column, "_nan": math.nan
        }  # fmt: skip
        self._source = Source(self.bound, scope, array=array)
        self._function = self._compile()
        self._given = _picker(self.inputs)
        self._names = [b.name for b in self.computed]
        self._split = [b.number for b in self._source.split]
        self._columns = [b.name for b in self.lines if b.schedule is not None and not b.is_words]
        self._guarded = self._guard_places()
        self._nodes: dict[Node, CodeType] = {}

    def _compile(self) -> Callable[..., Computed]:
        text = self._source.function(self.inputs, self.computed, self.rows)
        exec(compile(text, "<workbook>", "exec"), self.space)  # noqa: S102  source made from checked trees
        return self.space["program"]  # type: ignore[return-value]

    def _guard_places(self) -> list[tuple[str, int]]:
        """Return the number of each conditional item and the place of its verdict."""
        place = {guards: count for count, guards in enumerate(self._source.guards)}
        return [(b.number, place[b.guards]) for b in self.bound if b.guards in place]

    # --- evaluation -------------------------------------------------------------------------

    def compute(self, values: Mapping[str, Value], rows: Mapping[str, int]) -> Computed:
        """Run the compiled function: (total, line values, cases, conditions, sides of checks).

        ``values`` holds every input in SI; ``rows`` the number of rows of each set of rows.
        Raises whatever arithmetic raises; a total that is not finite says some line is not.
        """
        given = self._given(values)
        if not self.rows:
            return self._function(*given)
        shape = (1,) if self.array else ()
        zeros = [np.zeros((rows[r], *shape)) for r in self.rows]
        with np.errstate(all="ignore"):
            return self._function(*given, *zeros)

    def evaluate(
        self,
        values: Mapping[str, Value],
        rows: Mapping[str, int],
        problems: Mapping[str, str],
        row_problems: Mapping[str, list[str]],
        keys: Mapping[str, Sequence[str]] | None = None,
    ) -> Results:
        """Evaluate one case.

        ``problems`` says which inputs or schedules have no value and why, ``row_problems`` the
        same by row of a column; ``keys`` names the rows in messages. Raises nothing: what has no
        value says so in ``Results.problems``.
        """
        if not problems and not row_problems:
            results = self._at_once(values, rows)
            if results is not None:
                return results
        from calcbook.linewise import LineByLine  # noqa: PLC0415  needed where something is wrong

        found = Results(dict(values), row_problems=dict(row_problems))
        return LineByLine(self, found, dict(problems), rows, keys or {}).results()

    def _at_once(self, values: Mapping[str, Value], rows: Mapping[str, int]) -> Results | None:
        """Return the results of the compiled function, or None where a value is missing."""
        try:
            total, found, cases, holds, sides = self.compute(values, rows)
            if not math.isfinite(total):
                return None
        except (ArithmeticError, ValueError, TypeError):
            return None
        results = Results(dict(values))
        results.values.update(zip(self._names, found, strict=True))
        for name in self._columns:
            column = results.values[name]
            if isinstance(column, np.ndarray) and column.dtype == object:
                results.values[name] = column.astype(float)
        if cases:
            results.branch.update(zip(self._split, cases, strict=True))
        for number, place in self._guarded:
            results.applies[number] = bool(holds[place])
        if sides:
            for bound, pair in zip(self._source.checks, sides, strict=True):
                if pair is not None:
                    decide(bound, pair, results)
        return results

    # --- line by line -----------------------------------------------------------------------

    @cached_property
    def _steps(self) -> list[Step]:
        return [self._step(b) for b in self.bound]

    def steps(self) -> list[Step]:
        """Return every item compiled on its own, in order."""
        return self._steps

    @cached_property
    def _step_of(self) -> dict[str, Step]:
        return {s.bound.number: s for s in self._steps}

    def step(self, bound: Bound) -> Step:
        """Return the compiled form of one item."""
        return self._step_of[bound.number]

    def _step(self, bound: Bound) -> Step:
        source = self._source
        guards = tuple((g, self.code(parse(g))) for g in bound.guards)
        branches = tuple(
            (self.code(test) if test is not None else None, _compiled(source.branch(bound, place)))
            for place, (test, _) in enumerate(bound.branches)
        )
        if isinstance(bound.item, (Line, Solver)):
            whole = _compiled(source.selected(bound)) if bound.schedule is not None else None
            used = tuple(names(node) for _, node in bound.branches)
            return Step(bound, guards, branches, whole, used=used)
        if isinstance(bound.item, Check) and isinstance(bound.branches[0][1], Compare):
            left, right = source.sides(bound)
            return Step(bound, guards, branches, sides=(_compiled(left), _compiled(right)))
        return Step(bound, guards, branches)

    def code(self, node: Node) -> CodeType:
        """Return a condition or formula in coherent SI, compiled once."""
        if node not in self._nodes:
            self._nodes[node] = _compiled(self._source.expression(node))
        return self._nodes[node]

    def run(self, code: CodeType, values: Mapping[str, Value]) -> Value:
        """Evaluate one compiled formula with the values given."""
        with np.errstate(all="ignore"):
            return eval(code, self.space, _Names(values))  # type: ignore[no-any-return]  # noqa: S307  compiled from a checked tree


def _pick(test: Any, value: Callable[[], Any], other: Callable[[], Any]) -> Any:  # noqa: ANN401
    """Return one of two values, by case where the test differs from case to case.

    Where it does not, only the value that is asked for is computed.
    """
    if np.size(test) != 1:
        return np.where(test, value(), other())
    picked = value() if np.all(test) else other()
    if np.ndim(picked) >= np.ndim(test):
        return picked
    return np.broadcast_to(picked, np.shape(test))


def _column(value: Any, zeros: np.ndarray) -> np.ndarray:  # noqa: ANN401
    """Return what a formula gave as a column over the rows (rows, 1 or cases)."""
    if np.ndim(value) == zeros.ndim and len(value) == len(zeros) and value.dtype == float:
        return value  # type: ignore[no-any-return]
    return value + zeros  # type: ignore[no-any-return]


def _picker(names: Sequence[str]) -> Callable[[Mapping[str, Value]], tuple[Value, ...]]:
    """Return a function that takes the values of these names, in order; the fastest there is."""
    if len(names) > 1:
        return itemgetter(*names)
    return lambda values: tuple(values[name] for name in names)


def _compiled(source: str) -> CodeType:
    return compile(source, "<line>", "eval")


class _Names(dict[str, object]):
    """The names of compiled source (v_h) looked up among values by name (h), without a copy."""

    def __init__(self, values: Mapping[str, Value]) -> None:
        super().__init__()
        self._values = values

    def __missing__(self, key: str) -> Value:
        if key.startswith("v_"):
            return self._values[key[2:]]
        raise KeyError(key)


def decide(bound: Bound, sides: object, results: Results) -> None:
    """Put a check's verdict into the results, from its sides or its truth value."""
    node = bound.branches[0][1]
    try:
        if isinstance(node, Compare) and isinstance(sides, tuple):
            results.checks[bound.number] = worst(sides[0], sides[1], node.rest[0][0])
        else:
            results.checks[bound.number] = (None, None, bool(np.all(np.asarray(sides))))
    except (ArithmeticError, ValueError, TypeError):
        results.problems[bound.number] = UNDECIDED
        results.checks[bound.number] = (None, None, None)
