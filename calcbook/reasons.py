"""Why a condition holds or not, in the facts that decide it: 'roof is flat'."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from calcbook.formula import parse
from calcbook.tree import Logic, Node, Not, names
from calcbook.typeset import number

if TYPE_CHECKING:
    from collections.abc import Sequence

    from calcbook.program import Program, Results
    from calcbook.shown import Shown


class Reasons:
    """Explains the conditions of an evaluated workbook."""

    def __init__(self, program: Program, results: Results, shown: Shown) -> None:
        self.program, self.results, self.shown = program, results, shown
        self._why: dict[str, str] = {}
        self._held: dict[str, bool] = {}

    def why(self, condition: str) -> str:
        """Return the facts that decide a condition: 'roof is flat'."""
        if condition not in self._why:
            node = parse(condition)
            decisive = self._decisive(node, self._holds(node))
            facts = dict.fromkeys(fact for n in decisive for fact in self._facts(n))
            self._why[condition] = "; ".join(facts)
        return self._why[condition]

    def why_not(self, conditions: Sequence[str]) -> str:
        """Return the facts that decide the first of several conditions that does not hold."""
        failed = next((c for c in conditions if not self.holds(c)), "")
        return self.why(failed) if failed else ""

    def holds(self, condition: str) -> bool:
        """Return whether a condition holds; one that lacks a value does not."""
        if condition not in self._held:
            self._held[condition] = self._holds(parse(condition))
        return self._held[condition]

    def _holds(self, node: Node) -> bool:
        if any(name not in self.results.values for name in names(node)):
            return False
        try:
            return bool(np.all(self.program.run(self.program.code(node), self.results.values)))
        except (ArithmeticError, TypeError, ValueError):
            return False

    def _decisive(self, node: Node, held: bool) -> list[Node]:
        """Return the comparisons that are enough to see why a condition holds or not."""
        if isinstance(node, Not):
            return self._decisive(node.operand, not held)
        if not isinstance(node, Logic):
            return [node]
        one_is_enough = held == (node.op == "or")
        parts = [p for p in node.parts if self._holds(p) == held] if one_is_enough else node.parts
        return [n for p in parts[: 1 if one_is_enough else None] for n in self._decisive(p, held)]

    def _facts(self, node: Node) -> list[str]:
        facts = []
        for name in names(node):
            value = self.results.values.get(name)
            if isinstance(value, str):
                facts.append(f"{name} is {value}")
            elif isinstance(value, float):
                printed = self.shown.value(name)
                unit = self.shown.unit(name).text
                facts.append(f"{name} is {number(printed.text if printed else '', unit, 'plain')}")
        return facts
