"""One case evaluated line by line, where something has no value: each item says what and why."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

from calcbook import solvers
from calcbook.compile import OutsideTableError
from calcbook.errors import StaticsError
from calcbook.formula import parse
from calcbook.items import Check, Line, Solver
from calcbook.keyed import MissingRowError, texts
from calcbook.program import decide
from calcbook.tree import (
    KEYED,
    Call,
    Found,
    Logic,
    Name,
    Not,
    Quoted,
    Solve,
    accumulated,
    gathered,
    names,
    walk,
)

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.program import Program, Results, Step, Value
    from calcbook.tree import Node

_SHOWN = 8  # keys named where the one looked for is not there


class LineByLine:
    """Evaluates the steps of a program in order; what cannot be computed stops nothing else.

    Parameters
    ----------
    program, rows, keys
        See ``Program.evaluate``.
    found
        The results so far: the values of the inputs, and their rows without one.
    bad
        Why an input or a schedule has no value.
    """

    def __init__(
        self,
        program: Program,
        found: Results,
        bad: dict[str, str],
        rows: Mapping[str, int],
        keys: Mapping[str, Sequence[str]],
    ) -> None:
        self.program, self.rows, self.keys = program, rows, keys
        self.found = found
        self.bad = bad

    def results(self) -> Results:
        """Evaluate everything and return the results."""
        for step in self.program.steps():
            self._visit(step)
        return self.found

    def _visit(self, step: Step) -> None:
        bound = step.bound
        applies, reason = self._applies(bound)
        if bound.guards:
            self.found.applies[bound.number] = applies
        computed = isinstance(bound.item, (Line, Solver))
        if computed:
            self.found.values[bound.name] = None
        if not applies:
            return
        reason = reason or self._missing(bound)
        if not reason and computed:
            reason = self._line(step)
        elif not reason and isinstance(bound.item, Check):
            reason = self._check(step)
        if reason:
            self.found.problems[bound.number] = reason
            if computed:
                self.bad[bound.name] = reason
            elif isinstance(bound.item, Check):
                self.found.checks[bound.number] = (None, None, None)

    # --- conditions -------------------------------------------------------------------------

    def _applies(self, bound: Bound) -> tuple[bool, str]:
        """Return whether the conditions of an item hold, or why that cannot be said."""
        for text in bound.guards:
            node = parse(text)
            held = self._holds(node)
            if held is None:
                cause = self._first_bad(names(node))
                return (True, f"not available because of {cause}") if cause else (False, "")
            if not held:
                return False, ""
        return True, ""

    def _holds(self, node: Node) -> bool | None:
        """Return whether a condition of single values holds, None where a value it needs lacks."""
        if isinstance(node, Not):
            inner = self._holds(node.operand)
            return None if inner is None else not inner
        if isinstance(node, Logic):
            parts = [self._holds(part) for part in node.parts]
            decisive = node.op == "or"
            if decisive in parts:
                return decisive
            return None if None in parts else not decisive
        if self._first_bad(names(node)):
            return None
        try:
            return bool(self.program.run(self.program.code(node), self.found.values))
        except (ArithmeticError, ValueError, TypeError):
            return None

    def _first_bad(self, used: Sequence[str]) -> str:
        return next((name for name in used if name in self.bad), "")

    # --- what is missing --------------------------------------------------------------------

    def _missing(self, bound: Bound) -> str:
        """Return why an item has no value before it is tried: a name or a row it needs has none."""
        home = bound.schedule
        if home is not None and home.name in self.bad:
            return f"not available because of {home.name}"
        for node in self._wanted(bound):
            cause = self._first_bad([n for n in names(node) if n not in self._idle(node)])
            if cause:
                return f"not available because of {cause}"
            keyed = _keyed_names(node)
            apart = self._row_by_row(node)
            for name in names(node) if home is None else gathered(node):
                if name in keyed or name in apart:
                    continue  # only the row that is asked for counts
                for reason in self.found.row_problems.get(name, ()):
                    if reason and not self._follows(bound, node, name):
                        return f"not available because of {name} ({reason})"
        return ""

    def _idle(self, node: Node) -> frozenset[str]:
        """Return the names that a solver does without, because their condition does not hold."""
        conditions = node.conditions if isinstance(node, Solve) else ()
        return frozenset(name for name, test in conditions if self._holds(test) is False)

    def _row_by_row(self, node: Node) -> frozenset[str]:
        """Return the columns of which a solver takes each row on its own, or does without."""
        if not isinstance(node, Solve):
            return frozenset()
        solver = solvers.find(node.solver)
        return self._idle(node) | {
            name.name
            for role, _, name in node.takes
            if solver.roles[role].rows in solver.independent
        }

    def _behind(self, node: Node) -> list[str]:
        """Return the columns whose rows stand behind those of a solver's outcome."""
        if not isinstance(node, Found):
            return []
        step = next(s for s in self.program.steps() if s.bound.name == node.solution.name)
        work = step.bound.branches[0][1]
        if not isinstance(work, Solve):
            return []
        apart = self._row_by_row(work) - self._idle(work)
        return [n.name for _, _, n in work.takes if n.name in apart and self._over(n) == node.rows]

    def _over(self, name: Name) -> str | None:
        return self.program.scope[name.name].rows

    def _follows(self, bound: Bound, node: Node, name: str) -> bool:
        """Whether a column takes another row by row, so that only some of its rows are missing."""
        own = bound.schedule is not None and self.program.scope[name].rows == bound.schedule.rows
        return own and (name not in gathered(node) or name in accumulated(node))

    def _wanted(self, bound: Bound) -> list[Node]:
        """Return the formulas and conditions that decide a value; no case that does not hold."""
        wanted: list[Node] = []
        for test, node in bound.branches:
            if test is None:
                return [*wanted, node]
            single = all(self.program.scope[n].rows is None for n in names(test))
            held = self._holds(test) if single else None
            if held is None:
                wanted += [test, node]
            elif held:
                return [*wanted, node]
        return wanted

    # --- values -----------------------------------------------------------------------------

    def _line(self, step: Step) -> str:
        """Evaluate one line into the results; returns why it has no value, or ''."""
        bound = step.bound
        try:
            value = self._value(step)
        except (ArithmeticError, ValueError, TypeError) as error:
            if isinstance(error, MissingRowError):
                return f"has no value: {self._missing_row(self._wanted(bound), 0) or error}"
            idle = [n for n in bound.needs if self.found.values.get(n, 0) is None]
            return _failure(error, idle)
        if value is None:
            return "has no value: none of its cases holds"
        return self._keep(bound, value)

    def _keep(self, bound: Bound, value: Value) -> str:
        """Put the value of a line into the results; returns why it is none, or ''."""
        if bound.is_words or isinstance(bound.item, Solver):
            self.found.values[bound.name] = value
            if bound.is_words and bound.schedule is not None:
                self._mark_rows(bound, np.zeros(self.rows[bound.schedule.rows]))
            return ""
        if bound.schedule is None:
            if not isinstance(value, float) or not math.isfinite(value):
                return self._missing_row(self._wanted(bound), 0) or "has no finite value"
            self.found.values[bound.name] = value
            return ""
        column = np.asarray(value, dtype=float) + np.zeros(self.rows[bound.schedule.rows])
        self.found.values[bound.name] = column
        self._mark_rows(bound, column)
        return ""

    def _value(self, step: Step) -> Value:
        if step.whole is not None:
            return self.program.run(step.whole, self.found.values)
        for count, (test, code) in enumerate(step.branches):
            if test is None or self.program.run(test, self.found.values):
                if step.bound.branches[0][0] is not None:
                    self.found.branch[step.bound.number] = count
                value = self.program.run(code, self.found.values)
                return float(value) if isinstance(value, (int, np.floating)) else value
        self.found.branch[step.bound.number] = -1
        return None

    def _mark_rows(self, bound: Bound, column: np.ndarray) -> None:
        """Take out the rows that have no value, each with its reason."""
        reasons = [""] * len(column)
        home = bound.schedule
        keys = self.keys.get(home.rows, ()) if home is not None else ()
        wanted = self._wanted(bound)
        own = [
            n
            for node in wanted
            for n in names(node)
            if home is None or self.program.scope[n].rows == home.rows
        ]
        own += [name for node in wanted for name in self._behind(node)]
        runs = frozenset[str]().union(*map(accumulated, wanted))
        for name in dict.fromkeys(own):
            bad = [bool(reason) for reason in self.found.row_problems.get(name, ())]
            for row in range(min(len(bad), len(reasons))):
                lacks = any(bad[: row + 1]) if name in runs else bad[row]
                if lacks and not reasons[row]:
                    reasons[row] = f"not available because of {name}"
        for row in map(int, np.flatnonzero(~np.isfinite(column))):
            missing = reasons[row] or self._missing_row(self._holding(bound, row) or wanted, row)
            reasons[row] = missing or "has no finite value"
        if any(reasons):
            column[[bool(r) for r in reasons]] = math.nan
            named = [keys[n] if n < len(keys) else str(n + 1) for n in range(len(reasons))]
            self.found.row_problems[bound.name] = [
                f"row {key}: {r}" if r else "" for key, r in zip(named, reasons, strict=True)
            ]

    def _holding(self, bound: Bound, row: int) -> list[Node]:
        """Return the formula of the case that holds in a row of a column, if that can be said."""
        tests = (test for test, _ in self.program.step(bound).branches)
        for test, (_, node) in zip(tests, bound.branches, strict=True):
            try:
                held = True if test is None else self.program.run(test, self.found.values)
            except (ArithmeticError, ValueError, TypeError):
                return []
            every = np.atleast_1d(np.asarray(held, dtype=bool))
            if every[row if len(every) > 1 else 0]:
                return [node]
        return []

    def _missing_row(self, wanted: Sequence[Node], row: int) -> str:
        """Return which key, or which value at it, a row asks for in vain."""
        for call in (part for node in wanted for part in walk(node)):
            if not isinstance(call, Call) or call.function not in KEYED:
                continue
            column, keys, key = call.args
            one = self._text(key, row)
            home = ", ".join(names(keys))
            known = texts(self.found.values.get(home))
            if one not in known and call.function == "lookup":
                some = ", ".join(known[:_SHOWN]) + (", ..." if len(known) > _SHOWN else "")
                empty = f"nothing is entered to look up in {home}, which has {some}"
                return f"there is no row '{one}' in {home}" if one else empty
            for name in names(column):
                reasons = self.found.row_problems.get(name, ())
                if any(r and known[n] == one for n, r in enumerate(reasons)):
                    return f"not available because of {name} of {one}"
        return ""

    def _text(self, key: Node, row: int) -> str:
        if isinstance(key, Quoted):
            return key.text
        value = self.found.values.get(", ".join(names(key)))
        return str(value[row]) if isinstance(value, np.ndarray) else str(value)

    def _check(self, step: Step) -> str:
        codes = step.sides or (step.branches[0][1],)
        try:
            sides = tuple(self.program.run(code, self.found.values) for code in codes)
        except (ArithmeticError, ValueError, TypeError) as error:
            idle = [n for n in step.bound.needs if self.found.values.get(n, 0) is None]
            return _failure(error, idle).replace("has no value", "cannot be decided")
        decide(step.bound, sides if step.sides else sides[0], self.found)
        return self.found.problems.get(step.bound.number, "")


def _keyed_names(node: Node) -> set[str]:
    """Return the names that stand in a function that finds rows by their key."""
    calls = (p for p in walk(node) if isinstance(p, Call) and p.function in KEYED)
    return {name for call in calls for name in names(call)}


def _failure(error: Exception, idle: Sequence[str]) -> str:
    """Return why a formula gave nothing; ``idle`` are the names in it that do not apply."""
    if isinstance(error, StaticsError):
        return f"has no value: {error.what}" + (f"; {error.hint}" if error.hint else "")
    if isinstance(error, TypeError):
        verb = "do" if len(idle) > 1 else "does"
        return f"not available because {' and '.join(idle) or 'a value'} {verb} not apply"
    if isinstance(error, (OutsideTableError, MissingRowError)):
        return f"has no value: {error}"
    reasons: dict[type[Exception], str] = {
        ZeroDivisionError: "a division by zero",
        OverflowError: "the number is too large",
    }
    return f"has no value: {reasons.get(type(error), 'a function outside its range')}"
