"""A workbook's lines and checks written as the text of one Python function.

For one case the function is what one would write by hand: scalars are floats, conditions are
``if`` statements. For many cases scalars are arrays over the cases, and conditions select.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.compile import python_source
from calcbook.formula import parse
from calcbook.items import Check, Line, Solver
from calcbook.tree import Compare, Name, Quoted, names

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.dimensions import Type
    from calcbook.tree import Node
    from calcbook.units import Unit

NAN = "_nan"


class Source:
    """Writes the function of a workbook.

    Parameters
    ----------
    bound
        The items to compute, in order.
    scope
        The type of every name.
    array
        Many cases at once; checks and the conditions of other items are then left out.

    Attributes
    ----------
    split
        The lines with cases whose case that holds the function returns.
    guards
        The variable that tells whether a chain of conditions holds.
    checks
        The checks whose sides, or verdict, the function returns.
    """

    def __init__(self, bound: Sequence[Bound], scope: Mapping[str, Type], *, array: bool) -> None:
        self.scope, self.array = scope, array
        self.split: list[Bound] = []
        self.guards: dict[tuple[str, ...], str] = {}
        self.checks: list[Bound] = []
        self.body: list[str] = []
        self._total = ["total"]
        for item in bound:
            if isinstance(item.item, Solver):
                self._solver(item)
            elif isinstance(item.item, Line):
                self._line(item)
            elif not array:
                self._other(item)

    def function(self, inputs: Sequence[str], lines: Sequence[Bound], rows: Sequence[str]) -> str:
        """Return the function ``program``.

        It takes the inputs and a column of zeros for each set of rows, and returns a sum that is
        finite when every value is, the values of the lines, which case holds in those with
        cases, which conditions hold, and the sides of the checks.
        """
        arguments = ", ".join([*(f"v_{n}" for n in inputs), *(f"z_{r}" for r in rows)])
        found = [
            "".join(f"v_{b.name}, " for b in lines),
            "".join(f"{_case(b)}, " for b in self.split),
            "".join(f"{g}, " for g in self.guards.values()),
            "".join(f"{_sides(b)}, " for b in self.checks),
        ]
        returned = ", ".join(f"({part})" for part in found)
        body = ["total = 0.0", *self.body, f"return {' + '.join(self._total)}, {returned}"]
        return "\n    ".join([f"def program({arguments}):", *body]) + "\n"

    def expression(self, node: Node, takes: Mapping[str, Unit] | None = None) -> str:
        """Return one formula as Python source."""
        return python_source(node, scope=self.scope, array=self.array, takes=takes)

    def branch(self, bound: Bound, place: int) -> str:
        """Return the formula of one case of a line, in coherent SI."""
        item = bound.item
        node = bound.branches[place][1]
        if not isinstance(item, Line):
            return self.expression(node)
        value = self.expression(node, item.takes)
        if item.gives is None or item.gives.factor == 1:
            return value
        return f"({value})*{item.gives.factor!r}"

    def selected(self, bound: Bound) -> str:
        """Return a line's cases as one expression on whole columns or whole runs of cases."""
        text = ""
        for place, (test, _) in reversed(list(enumerate(bound.branches))):
            value = self.branch(bound, place)
            if test is None:
                text = value
            elif self.array:
                text = _picked(self.expression(test), value, text or NAN)
            elif self._decides_once(test):
                # a branch that does not hold may use names that have no value at all
                text = f"({value} if {self.expression(test)} else {text or NAN})"
            else:
                text = f"_where({self.expression(test)}, {value}, {text or NAN})"
        return f"({text})"

    def _decides_once(self, test: Node) -> bool:
        """Whether a condition is one truth value for the whole column."""
        return not self.array and all(self.scope[n].rows is None for n in names(test))

    # --- statements -------------------------------------------------------------------------

    def _guard(self, guards: tuple[str, ...]) -> str:
        """Return the variable that tells whether conditions hold, computing it where needed."""
        outer = ""
        for end in range(1, len(guards) + 1):
            key = guards[:end]
            if key not in self.guards:
                self.guards[key] = f"g_{len(self.guards)}"
                test = self.expression(parse(key[-1]))
                joint = "&" if self.array else "and"
                both = f"{outer} {joint} ({test})" if outer else f"({test})"
                self.body.append(f"{self.guards[key]} = {both}")
            outer = self.guards[key]
        return outer

    def _line(self, bound: Bound) -> None:
        guard = self._guard(bound.guards) if bound.guards else ""
        name = f"v_{bound.name}"
        if self.array:
            value = self.selected(bound)
            if bound.is_words:
                self.body.append(f"{name} = {value}")
                return
            text = _picked(guard, value, NAN) if guard else value
            if bound.schedule is not None:
                text = f"_column({text}, z_{bound.schedule.rows})"
            self.body.append(f"{name} = {text}")
            return
        if bound.is_words:
            lines, total = [f"{name} = {self._column(bound)}"], "0.0"
        elif bound.schedule is not None:
            lines, total = [f"{name} = {self._column(bound)}"], f"float({name}.sum())"
        else:
            lines, total = self._branching(bound), name
        if guard:
            idle = [f"{name} = None", *self._counted(bound, -1)]
            self._under(guard, [*lines, f"total += {total}"], idle)
        else:
            self.body += lines
            self._total.append(total)

    def _solver(self, bound: Bound) -> None:
        """Write a solver at work; with many cases its conditions count in what is read of it."""
        line = f"v_{bound.name} = {self.branch(bound, 0)}"
        if bound.guards and not self.array:
            self._under(self._guard(bound.guards), [line], [f"v_{bound.name} = None"])
        else:
            self.body.append(line)

    def _column(self, bound: Bound) -> str:
        if bound.is_words:
            return self.selected(bound)
        return f"{self.selected(bound)} + z_{bound.schedule.rows if bound.schedule else ''}"

    def _branching(self, bound: Bound) -> list[str]:
        name = f"v_{bound.name}"
        if len(bound.branches) == 1 and bound.branches[0][0] is None:
            return [f"{name} = {self.branch(bound, 0)}"]
        self.split.append(bound)
        lines = []
        for place, (test, _) in enumerate(bound.branches):
            word = "if" if place == 0 else "elif"
            lines.append(f"{word} {self.expression(test)}:" if test is not None else "else:")
            lines.append(f"    {name} = {self.branch(bound, place)}")
            lines += [f"    {text}" for text in self._counted(bound, place)]
        if bound.branches[-1][0] is not None:
            lines += ["else:", f"    {name} = {NAN}"]
            lines += [f"    {text}" for text in self._counted(bound, -1)]
        return lines

    def _counted(self, bound: Bound, place: int) -> list[str]:
        return [f"{_case(bound)} = {place}"] if bound in self.split else []

    def _other(self, bound: Bound) -> None:
        """Write the conditions of an item that is no line, and the sides of a check."""
        guard = self._guard(bound.guards) if bound.guards else ""
        if not isinstance(bound.item, Check):
            return
        self.checks.append(bound)
        name, found = _sides(bound), ", ".join(self.sides(bound))
        self._under(guard, [f"{name} = {found}"], [f"{name} = None"])

    def sides(self, bound: Bound) -> tuple[str, ...]:
        """Return a check as its two sides, or as one truth value where it has more parts."""
        node = bound.branches[0][1]
        if not isinstance(node, Compare):
            return (self.expression(node),)
        other = node.rest[0][1]
        return self._side(node.first, other), self._side(other, node.first)

    def _side(self, node: Node, other: Node) -> str:
        """Return one side of a comparison; a text beside a choice is an option, no quantity."""
        words = isinstance(other, Name) and self.scope[other.name].form == "text"
        return repr(node.text) if words and isinstance(node, Quoted) else self.expression(node)

    def _under(self, guard: str, lines: Sequence[str], idle: Sequence[str]) -> None:
        if not guard:
            self.body += lines
            return
        self.body += [f"if {guard}:", *(f"    {t}" for t in lines)]
        self.body += ["else:", *(f"    {t}" for t in idle)]


def _picked(test: str, value: str, other: str) -> str:
    """Return source that selects by cases, and leaves out what no case asks for."""
    return f"_pick({test}, lambda: {value}, lambda: {other})"


def _case(bound: Bound) -> str:
    return f"b_{bound.number.replace('.', '_')}"


def _sides(bound: Bound) -> str:
    return f"c_{bound.number.replace('.', '_')}"
