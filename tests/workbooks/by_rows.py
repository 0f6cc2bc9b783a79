"""Formulas by sympy row by row, with everything that gathers a column spelled out."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook.algebra import evaluate
from calcbook.tree import (
    KEYED,
    Binary,
    Call,
    Compare,
    Logic,
    Name,
    Negative,
    Not,
    Quoted,
    names,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.table import Table
    from calcbook.tree import Node

GATHERS = {"sum", "min", "max"}


def read_table(table: Table) -> Callable[..., float]:
    """Return a table as a function of SI values, held at its ends, by numpy.interp."""
    points = [np.array(axis.points) * axis.unit.factor for axis in table.axes]
    values = np.array(table.values) * table.unit.factor

    def read(*at: float) -> float:
        line = values
        for axis, x in zip(reversed(points[1:]), reversed(at[1:]), strict=True):
            line = np.array([np.interp(x, axis, row) for row in line])
        return float(np.interp(at[0], points[0], line))

    return read


@dataclass
class Oracle:
    """Evaluates a tree for a row, with everything that gathers a column spelled out."""

    values: Mapping[str, Any]

    def at(self, node: Node, row: int) -> float | bool:
        """Return the value of a tree in a row."""
        gathered: dict[str, float] = {}
        flat = self._flat(node, row, gathered)
        given: dict[str, Any] = {**self.values, **gathered}
        here = {n: given[n] for n in names(flat)}
        here = {n: v[row] if isinstance(v, list) else v for n, v in here.items()}
        return evaluate(flat, here or {"": 0.0})

    def rows(self, node: Node) -> range:
        """Return the rows of the columns a tree uses."""
        columns = [v for n in names(node) if isinstance(v := self.values.get(n), list)]
        return range(len(columns[0]) if columns else 1)

    def _flat(self, node: Node, row: int, gathered: dict[str, float]) -> Node:
        def flat(part: Node) -> Node:
            return self._flat(part, row, gathered)

        value = self._gathered(node, row) if isinstance(node, Call) else None
        if value is not None:
            name = f"gathered_{len(gathered)}"
            gathered[name] = float(value)
            return Name(name)
        match node:
            case Call():
                node = replace(node, args=tuple(flat(part) for part in node.args))
            case Binary():
                node = replace(node, left=flat(node.left), right=flat(node.right))
            case Negative() | Not():
                node = replace(node, operand=flat(node.operand))
            case Logic():
                node = replace(node, parts=tuple(flat(part) for part in node.parts))
            case Compare():
                rest = tuple((op, flat(part)) for op, part in node.rest)
                node = replace(node, first=flat(node.first), rest=rest)
        return node

    def _keyed(self, node: Call, row: int) -> float:
        """Return the value of the first row that has a key, or the sum of all that have it."""
        column, keys, key = node.args
        assert isinstance(keys, Name)
        wanted = key.text if isinstance(key, Quoted) else self._word(key, row)
        own = [r for r, text in enumerate(self.values[keys.name]) if text == wanted]
        if node.function == "lookup":
            return float(self.at(column, own[0]))
        return math.fsum(float(self.at(column, r)) for r in own)

    def _word(self, key: Node, row: int) -> str:
        assert isinstance(key, Name)
        value = self.values[key.name]
        return str(value[row] if isinstance(value, list) else value)

    def _gathered(self, node: Call, row: int) -> float | bool | None:
        first = node.args[0]
        if node.function in KEYED:
            return self._keyed(node, row)
        if node.function in GATHERS and len(node.args) == 1:
            every = [float(self.at(first, r)) for r in self.rows(first)]
            return math.fsum(every) if node.function == "sum" else _extreme(node.function, every)
        if node.function == "running":
            return math.fsum(float(self.at(first, r)) for r in range(row + 1))
        if node.function == "previous":
            return self.at(first, row - 1) if row else self.at(node.args[1], row)
        if node.function == "following":
            last = row == len(self.rows(first)) - 1
            return self.at(node.args[1], row) if last else self.at(first, row + 1)
        return None


def _extreme(function: str, values: list[float]) -> float:
    return min(values) if function == "min" else max(values)
