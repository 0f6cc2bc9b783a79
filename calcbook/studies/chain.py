"""The chain of lines from an entry to a result as one formula, where algebra can be trusted.

Lines outside schedules are put into one another; those that do not depend on the entry stay as
symbols. A choice between formulas (cases, where, min, max, abs) is decided by the values in
force, and only where the sides of every comparison that moves with the entry are clearly apart:
as they are continuous, the same branch then holds in a neighbourhood, and the formula is the
result there. Everything else is refused here and left to numbers.
"""

from __future__ import annotations

import math
import re
from typing import TYPE_CHECKING, NamedTuple

from calcbook import algebra
from calcbook.errors import FormulaError
from calcbook.formula import parse
from calcbook.items import Check, Line
from calcbook.studies.choosing import LINE, RATIO
from calcbook.tree import (
    Binary,
    Call,
    Compare,
    Logic,
    Name,
    Negative,
    Node,
    Not,
    Number,
    Quoted,
    names,
    walk,
)
from calcbook.verdict import UPWARD

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.bind import Bound
    from calcbook.program import Results, Value
    from calcbook.studies.choosing import Chosen
    from calcbook.workbook import Workbook

#: How far apart, as a part of the larger, the sides of a comparison must be to decide it.
APART = 1e-6
MOST_PARTS = 250
_FAILS = (ArithmeticError, ValueError, TypeError)
#: What sympy raises for what it cannot do.
_REFUSALS = (FormulaError, ArithmeticError, NotImplementedError, TypeError, ValueError)
_SELECTS = {"min": min, "max": max}


class Solved(NamedTuple):
    """An entry as a formula, the name that stands for the target in it, and its value in SI."""

    formula: str
    stands_for: str
    value: float


class NoChainError(FormulaError):
    """A chain that is not for algebra; the reason stands in ``what``."""


class Chain:
    """The way from one entry to one result, with the branches that hold in some results.

    Parameters
    ----------
    book
        An evaluated workbook.
    chosen
        The result.
    name
        The entry.
    results
        The results that decide the branches; those of the workbook where not given.
    """

    def __init__(
        self, book: Workbook, chosen: Chosen, name: str, results: Results | None = None
    ) -> None:
        self.book, self.chosen, self.name = book, chosen, name
        self.results = results or book.results
        self.moves = {name}
        for bound in book.bound:
            if bound.name and self.moves.intersection(bound.needs):
                self.moves.add(bound.name)
        self._lines: dict[str, Node] = {}
        #: What stays as it is and is not for algebra, by the name that stands for it.
        self._fixed: dict[str, str] = {}
        self._texts: dict[str, str] = {}
        self._values: dict[str, Value] = {}

    def node(self) -> Node:
        """Return the result as a formula of the entry and of names that do not depend on it.

        Raises NoChainError where that is not for algebra.
        """
        which, bound = self.chosen.result.which, self.chosen.bound
        if which == LINE:
            found = self._line(bound)
        elif which == RATIO:
            over, under = self.ratio()
            found = Binary("/", over, under)
        else:
            raise NoChainError("it is gathered from the rows of a schedule")
        if sum(1 for _ in walk(found)) > MOST_PARTS:
            raise NoChainError("its formula would be too long")
        return found

    def ratio(self) -> tuple[Node, Node]:
        """Return what a check's ratio divides by what, as `calcbook.verdict.ratio` does."""
        bound = self.chosen.bound
        node = bound.branches[0][1]
        if not isinstance(bound.item, Check) or not isinstance(node, Compare):
            raise NoChainError("it is no comparison")
        self._hold(bound)
        (relation, right), left = node.rest[0], node.first
        self._texts[bound.number] = bound.item.formula
        sides = [self._value(side) for side in (left, right)]
        toward_zero = (sides[0] < 0 or sides[1] < 0) == (relation in UPWARD)
        demand, limit = self._settled(left, bound), self._settled(right, bound)
        return (limit, demand) if toward_zero else (demand, limit)

    # --- lines ------------------------------------------------------------------------------

    def _line(self, bound: Bound) -> Node:
        """Return a line as the formula of its branch in force."""
        if bound.name not in self._lines:
            if not isinstance(bound.item, Line):
                raise NoChainError(f"{bound.name} is no line")
            if bound.schedule is not None:
                raise NoChainError(f"{bound.name} is a column")
            self._hold(bound)
            self._lines[bound.name] = self._printed(bound.item, self._branch(bound, bound.item))
        return self._lines[bound.name]

    def _hold(self, bound: Bound) -> None:
        """See that the conditions of an item are not about to change."""
        for guard in bound.guards:
            if not self._decided(parse(guard)):
                raise NoChainError(f"{bound.name or bound.number} is not applied")

    def _branch(self, bound: Bound, item: Line) -> Node:
        for place, (test, node) in enumerate(bound.branches):
            if test is None or self._decided(test):
                self._texts[bound.number] = item.branches[place][1]
                return self._settled(node, bound)
        raise NoChainError(f"none of the cases of {bound.name} holds")

    def _printed(self, item: Line, node: Node) -> Node:
        """Give what a formula as printed gives its unit."""
        if item.gives is None or not item.gives.text:
            return node
        return Binary("*", node, Quoted(f"1 {item.gives.text}"))

    # --- formulas ---------------------------------------------------------------------------

    def _settled(self, node: Node, home: Bound | None = None) -> Node:
        """Return a formula with its branch in force only, and the lines that move put in."""
        match node:
            case Number() | Quoted():
                return node
            case Name():
                return self._named(node, home)
            case Negative(operand=operand):
                return Negative(self._settled(operand, home))
            case Binary(op=op, left=left, right=right):
                return Binary(op, self._settled(left, home), self._settled(right, home))
            case Call():
                return self._call(node, home)
            case _:
                raise NoChainError("a condition has no value to differentiate")

    def _named(self, node: Name, home: Bound | None) -> Node:
        """Return a name, or the line of that name; in a formula as printed, in its unit."""
        if self._rows(node.name):
            raise NoChainError(f"{node.name} is a column")
        found: Node = node
        if node.name in self.moves and node.name != self.name:
            found = self._line(self.book.scope[node.name])
        item = home.item if home is not None else None
        if isinstance(item, Line) and node.name in item.takes and item.takes[node.name].text:
            return Binary("/", found, Quoted(f"1 {item.takes[node.name].text}"))
        return found

    def _rows(self, name: str) -> bool:
        return self.book.program.scope[name].rows is not None

    def _call(self, node: Call, home: Bound | None) -> Node:
        if node.function == "where":
            condition, yes, no = node.args
            return self._settled(yes if self._decided(condition, home) else no, home)
        if node.function in _SELECTS and len(node.args) > 1:
            return self._extreme(node, home)
        if node.function == "abs":
            inner = self._settled(node.args[0], home)
            value = self._value(inner)
            if not self._clear_of_zero(inner, value):
                return self._standing(node, home)  # at its corner
            return inner if value > 0 else Negative(inner)
        if node.function in {"interpolate", "floor", "ceil"} or any(map(self._rows, names(node))):
            return self._standing(node, home)
        return Call(node.function, tuple(self._settled(part, home) for part in node.args))

    def _standing(self, node: Call, home: Bound | None) -> Node:
        """Return a name for a part that is not for algebra but does not move either."""
        moves = self.moves.intersection(names(node))
        takes = getattr(home.item, "takes", {}) if home is not None else {}
        if moves or home is None or takes:
            what = f"moves with {', '.join(sorted(moves))}" if moves else "is not for algebra"
            raise NoChainError(f"{node.function}() {what}")
        start, end = node.span
        text = self._texts[home.number][start:end]
        for name, known in self._fixed.items():
            if known == text:
                return Name(name)
        value = self._value(node)
        name = self._free("standing")
        self._fixed[name], self._values[name] = text, value
        return Name(name)

    def _clear_of_zero(self, node: Node, value: float) -> bool:
        """Whether a value is no zero, nor what is left of two that cancel but for rounding."""
        if isinstance(node, Binary) and node.op == "-":
            return _apart(self._value(node.left), self._value(node.right))
        return value != 0.0

    def _extreme(self, node: Call, home: Bound | None) -> Node:
        """Return the part of min or max that governs, where no other is as large."""
        parts = [self._settled(part, home) for part in node.args]
        values = [self._value(part) for part in parts]
        place = values.index(_SELECTS[node.function](values))
        for other, value in enumerate(values):
            moves = self._moves(parts[place]) or self._moves(parts[other])
            if other != place and moves and not _apart(values[place], value):
                raise NoChainError(f"two values of {node.function}() are alike")
        return parts[place]

    def _decided(self, node: Node, home: Bound | None = None) -> bool:
        """Return whether a condition holds, here and in a neighbourhood."""
        if not self._moves(node):
            return bool(self._run(node))
        if isinstance(node, Not):
            return not self._decided(node.operand, home)
        if isinstance(node, Logic):
            # A part that decides alone and stays decides in the neighbourhood too.
            held = (self._decided(part, home) for part in node.parts)
            return all(held) if node.op == "and" else any(held)
        if isinstance(node, Compare):
            ends = [node.first, *(part for _, part in node.rest)]
            settled = [self._settled(end, home) for end in ends]
            values = [self._value(end) for end in settled]
            if not all(map(_apart, values, values[1:])):
                raise NoChainError("a condition is at its threshold")
            node = Compare(settled[0], tuple(
                (op, end) for (op, _), end in zip(node.rest, settled[1:], strict=True)
            ))  # fmt: skip
        return bool(self._run(node))

    def _moves(self, node: Node) -> bool:
        return bool(self.moves.intersection(names(node)))

    def _value(self, node: Node) -> float:
        found = self._run(node)
        if not isinstance(found, (int, float)) or not math.isfinite(found):
            raise NoChainError("a part of it has no value")
        return float(found)

    def _run(self, node: Node, more: Mapping[str, Value] | None = None) -> Value:
        program = self.book.program
        try:
            values = {**self.results.values, **self._values, **(more or {})}
            return program.run(program.code(node), values)
        except _FAILS as error:
            raise NoChainError(f"a part of it has no value: {error}") from None

    # --- algebra ----------------------------------------------------------------------------

    def derivative(self) -> tuple[str, float]:
        """Return the derivative to the entry as a formula, and its value in SI.

        Raises
        ------
        NoChainError
            The chain is not for algebra here, or the derivative has no finite value.
        """
        try:
            text = algebra.derivative(self.node(), self.name)
            return self._in_words(text), self._value(parse(text))
        except NoChainError:
            raise
        except _REFUSALS as error:
            raise NoChainError(f"algebra gives no derivative: {error}") from None

    def solved(self, target: float) -> list[Solved]:
        """Return formulas for the entry at which the result is the target.

        The target is that of the result in SI; for a check, its ratio. Empty where algebra finds
        none.
        """
        try:
            return [
                Solved(f"{self.name} = {self._in_words(text)}", lhs, value)
                for lhs, node, wanted in self._equations(target)
                for text in algebra.solve_for(lhs, node, self.name)
                if math.isfinite(value := self._at(text, lhs, wanted))
            ]
        except _REFUSALS:
            return []

    def _equations(self, target: float) -> list[tuple[str, Node, float]]:
        """Return left side, formula and value of the equation to solve."""
        if self.chosen.result.which != RATIO:
            return [(self.chosen.result.name, self.node(), target)]
        over, under = self.ratio()
        if not self._moves(under):
            return [(self._free("demand"), over, target * self._value(under))]
        if not self._moves(over):
            return [(self._free("limit"), under, self._value(over) / target)]
        return [(self._free("ratio"), Binary("/", over, under), target)]

    def _in_words(self, text: str) -> str:
        """Return a formula with what stands in it put back in the place of its name."""
        for name, part in self._fixed.items():
            text = re.sub(rf"\b{name}\b", part, text)
        return text

    def _free(self, name: str) -> str:
        """Return a name that nothing in the workbook has."""
        taken = {*self.book.program.scope, *self._fixed}
        tries = (f"{name}_{count}" for count in range(len(taken) + 1))
        return name if name not in taken else next(n for n in tries if n not in taken)

    def _at(self, text: str, lhs: str, wanted: float) -> float:
        try:
            found = self._run(parse(text), {lhs: wanted})
        except FormulaError:
            return math.nan
        return float(found) if isinstance(found, (int, float)) else math.nan


def _apart(one: float, other: float) -> bool:
    return abs(one - other) > APART * max(abs(one), abs(other))
