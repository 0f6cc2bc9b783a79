"""A checked tree as Python source: floats in coherent SI, numpy where there are rows or cases.

Two forms of one formula. For one case a name is a float and a column an array over the rows; for
many cases a name is an array (cases,) and a column (rows, cases). The source is what one would
write by hand: fewest brackets, constants as floats, `where` and conditions in Python's own words
for single values.
"""

from __future__ import annotations

import math
from functools import partial
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from calcbook.keyed import lookup, lookup_rows, sum_for, sum_for_rows
from calcbook.solvers import acting, outcome, solve
from calcbook.tree import (
    KEYED,
    Binary,
    Call,
    Compare,
    Found,
    Logic,
    Name,
    Negative,
    Node,
    Not,
    Number,
    Quoted,
    Solve,
)
from calcbook.units import read_quantity

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from numpy.typing import NDArray

    from calcbook.dimensions import Type
    from calcbook.table import Table
    from calcbook.units import Unit

    Array = NDArray[np.float64]

_OR, _AND, _NOT, _COMPARE, _SUM, _PRODUCT, _MINUS, _POWER, _ATOM = range(9)
_LEVEL = {"+": _SUM, "-": _SUM, "*": _PRODUCT, "/": _PRODUCT, "**": _POWER}
#: By what part of itself a threshold gives way, and to which side: x >= 10 holds a little below.
SLACK = 1e-9
_TOWARD = {">=": 1.0, "<": 1.0, "<=": -1.0, ">": -1.0}
_GATHERS = {"sum", "min", "max"}
_WIDE_CASES = 64


def python_source(
    node: Node,
    *,
    scope: Mapping[str, Type],
    array: bool,
    takes: Mapping[str, Unit] | None = None,
) -> str:
    """Return a formula as the source of a Python expression.

    Parameters
    ----------
    node
        A tree that `check` (or `check_printed`) has accepted.
    scope
        The type of every name in it.
    array
        True for many cases at once.
    takes
        For a formula as printed: the unit each name is taken in.

    Returns
    -------
    str
        Names are written ``v_name``, functions ``f_name`` (see `namespace`), quantities as floats
        in coherent SI, options as text. The unit a formula as printed gives is not applied.
    """
    return _Writer(scope, takes or {}, array=array).write(node).text


class _Source(NamedTuple):
    text: str
    level: int
    column: bool


class _Writer:
    """Writes source with the fewest brackets that keep the tree."""

    def __init__(
        self, scope: Mapping[str, Type], takes: Mapping[str, Unit], *, array: bool
    ) -> None:
        self.scope = scope
        self.takes = takes
        self.array = array

    def write(self, node: Node) -> _Source:  # noqa: C901, PLR0911  one case per kind of node
        match node:
            case Number(value=value):
                return _Source(repr(value), _ATOM, column=False)
            case Quoted(text=text):
                si = read_quantity(text).si
                return _Source(repr(si), _ATOM if si >= 0 else _MINUS, column=False)
            case Name(name=name):
                return self.name(name)
            case Negative(operand=operand):
                inner = self.write(operand)
                return _Source(f"-{_inside(inner, _MINUS)}", _MINUS, inner.column)
            case Binary():
                return self.binary(node)
            case Call():
                return self.call(node)
            case Compare():
                return self.compare(node)
            case Logic(op=op, parts=parts):
                return self.logic(op, [self.write(part) for part in parts])
            case Not(operand=operand):
                inner = self.write(operand)
                if self.array or inner.column:
                    return _Source(f"f_not({inner.text})", _ATOM, inner.column)
                return _Source(f"not {_inside(inner, _NOT)}", _NOT, column=False)
            case Solve(solver=solver):
                return _Source(f"f_solve({solver!r}, {self.given(node)})", _ATOM, column=False)
            case Found(solution=solution, outcome=wanted, case=case, rows=rows):
                length = "None" if rows is None else f"len(z_{rows})" if self.array else "0"
                text = f"f_outcome({self.name(solution.name).text}, {wanted!r}, {case!r}, {length})"
                return _Source(text, _ATOM, column=rows is not None)

    def given(self, node: Solve) -> str:
        """Return what a solver takes as the source of a dictionary, those of a role by case."""
        roles: dict[str, list[str]] = {}
        conditions = dict(node.conditions)
        for role, case, name in node.takes:
            value = self.name(name.name).text
            if name.name in conditions:
                value = f"f_acting({self.write(conditions[name.name]).text}, {value})"
            roles.setdefault(role, []).append(f"{case!r}: {value}" if case else value)
        by_case = {role for role, case, _ in node.takes if case}
        parts = (
            f"{role!r}: {{{', '.join(found)}}}" if role in by_case else f"{role!r}: {found[0]}"
            for role, found in roles.items()
        )
        return f"{{{', '.join(parts)}}}"

    def name(self, name: str) -> _Source:
        column = name in self.scope and self.scope[name].rows is not None
        factor = self.takes[name].factor if name in self.takes else 1.0
        if factor == 1.0:
            return _Source(f"v_{name}", _ATOM, column)
        return _Source(f"v_{name}/{factor!r}", _PRODUCT, column)

    def binary(self, node: Binary) -> _Source:
        left, right = self.write(node.left), self.write(node.right)
        column = left.column or right.column
        if node.op == "**":
            return self.power(node, left, right, column=column)
        level = _LEVEL[node.op]
        # The right side keeps its brackets at the same level, so that rounding follows the tree.
        return _Source(f"{_inside(left, level)}{node.op}{_inside(right, level + 1)}", level, column)

    def power(self, node: Binary, left: _Source, right: _Source, *, column: bool) -> _Source:
        exponent = node.right.operand if isinstance(node.right, Negative) else node.right
        if isinstance(exponent, Number) and exponent.value.is_integer():
            if right.text == "2.0" and isinstance(node.left, Name) and left.level == _ATOM:
                return _Source(f"{left.text}*{left.text}", _PRODUCT, column)
            text = f"{_inside(left, _ATOM)}**{_inside(right, _MINUS)}"
            return _Source(text, _POWER, column)
        # Python makes a complex number of a negative base and a fraction; this refuses.
        return _Source(
            f"{self.function('power', column)}({left.text}, {right.text})", _ATOM, column
        )

    def function(self, name: str, column: bool) -> str:
        return f"f_{name}_rows" if column and not self.array else f"f_{name}"

    def call(self, node: Call) -> _Source:
        if node.function == "where":
            return self.where([self.write(arg) for arg in node.args])
        if node.function in KEYED:
            return self.keyed(node)
        parts = [self.write(arg) for arg in node.args]
        column = any(part.column for part in parts)
        gathers = node.function in _GATHERS and len(parts) == 1
        name = (
            f"f_{node.function}_over_rows"
            if gathers
            else self.function(node.function, column=column)
        )
        text = f"{name}({', '.join(part.text for part in parts)})"
        return _Source(text, _ATOM, column and not gathers)

    def keyed(self, node: Call) -> _Source:
        column, keys, key = node.args
        wanted = (
            _Source(repr(key.text), _ATOM, column=False)
            if isinstance(key, Quoted)
            else self.write(key)
        )
        name = f"f_{node.function}_rows" if wanted.column else f"f_{node.function}"
        text = f"{name}({self.write(column).text}, {self.write(keys).text}, {wanted.text})"
        return _Source(text, _ATOM, wanted.column)

    def where(self, parts: list[_Source]) -> _Source:
        column = any(part.column for part in parts)
        condition, yes, no = (part.text for part in parts)
        if self.array or column:
            return _Source(f"f_where({condition}, {yes}, {no})", _ATOM, column)
        return _Source(f"({yes} if {condition} else {no})", _ATOM, column=False)

    def logic(self, op: str, parts: list[_Source]) -> _Source:
        column = any(part.column for part in parts)
        if self.array or column:
            return _Source(f"f_{op}({', '.join(part.text for part in parts)})", _ATOM, column)
        level = _AND if op == "and" else _OR
        text = f" {op} ".join(_inside(part, level + 1) for part in parts)
        return _Source(text, level, column=False)

    def compare(self, node: Compare) -> _Source:
        ends = [node.first, *(part for _, part in node.rest)]
        signs = [op for op, _ in node.rest]
        pairs: list[_Source] = []
        for op, left, right in zip(signs, ends, ends[1:], strict=False):
            one = self.threshold(left, right, op, 1.0)
            other = self.threshold(right, left, op, -1.0)
            text = f"{_inside(one, _SUM)} {op} {_inside(other, _SUM)}"
            pairs.append(_Source(text, _COMPARE, one.column or other.column))
        return pairs[0] if len(pairs) == 1 else self.logic("and", pairs)

    def threshold(self, node: Node, other: Node, op: str, side: float) -> _Source:
        """Write one side; a stated threshold gives way by the last bits of a float.

        10 deg brought forward, or computed from a rise, is at '10 deg' and neither side of it.
        """
        source = self.side(node, other)
        quantity = node.operand if isinstance(node, Negative) else node
        if op not in _TOWARD or not isinstance(quantity, (Number, Quoted)):
            return source
        try:
            value = float(source.text)
        except ValueError:
            return source  # the option of a choice
        value += side * _TOWARD[op] * SLACK * abs(value)
        return _Source(repr(value), _ATOM if value >= 0 else _MINUS, column=False)

    def side(self, node: Node, other: Node) -> _Source:
        if isinstance(node, Quoted) and isinstance(other, Name):
            kind = self.scope.get(other.name)
            if kind is not None and kind.form == "text":
                return _Source(repr(node.text), _ATOM, column=False)
        return self.write(node)


def _inside(part: _Source, level: int) -> str:
    return part.text if part.level >= level else f"({part.text})"


def namespace(array: bool) -> dict[str, object]:
    """Return the functions that the source of `python_source` calls.

    Parameters
    ----------
    array
        False: single values are floats, and what cannot be computed raises ``ValueError``,
        ``ZeroDivisionError`` or ``OverflowError``; columns are arrays over axis 0.
        True: everything is an array, and what cannot be computed becomes nan or inf.
    """
    by_key = {
        "f_lookup": lookup, "f_lookup_rows": lookup_rows,
        "f_sum_for": sum_for, "f_sum_for_rows": sum_for_rows,
        "f_solve": partial(solve, array=array), "f_outcome": outcome, "f_acting": acting,
    }  # fmt: skip
    wide = {f"f_{name}": function for name, function in _WIDE.items()}
    shared = {f"f_{name}": function for name, function in _SHARED.items()}
    if array:
        gather = {f"f_{name}_over_rows": _over_rows(ufunc) for name, ufunc in _UFUNCS.items()}
        return {**wide, **shared, **gather, **by_key}
    rows = {f"{name}_rows": function for name, function in {**wide, **shared}.items()}
    single = {f"f_{name}": function for name, function in _SINGLE.items()}
    gathered = {f"f_{name}_over_rows": _over_rows_once(u) for name, u in _UFUNCS.items()}
    return {**rows, **shared, **single, **gathered, **by_key}


def _least(first: float, *others: float) -> float:
    """Return the smallest; not a number wins, so that a missing value is never hidden."""
    for other in others:
        first = first if first < other or first != first else other  # noqa: PLR0124
    return first


def _greatest(first: float, *others: float) -> float:
    for other in others:
        first = first if first > other or first != first else other  # noqa: PLR0124
    return first


def _wide_least(first: Array, *others: Array) -> Array:
    for other in others:
        first = np.minimum(first, other)
    return first


def _wide_greatest(first: Array, *others: Array) -> Array:
    for other in others:
        first = np.maximum(first, other)
    return first


def _wide_power(base: Array | float, exponent: Array | float) -> Array:
    # The operator on an array has a fast way for squares and roots which np.power has not.
    return np.asarray(base, dtype=float) ** exponent


class OutsideTableError(ValueError):
    """A point beyond the edge of a table that is not to be extended."""


def _interpolate(table: Table, *point: float) -> float:
    value = table.at(*point)
    if value != value:  # noqa: PLR0124
        raise OutsideTableError(f"the table '{table.name}' does not reach that far")
    return float(value)


def _wide_interpolate(table: Table, *point: Array) -> Array | float:
    return table.at(*point)


def _all_of(first: Array, *others: Array) -> Array:
    for other in others:
        first = np.logical_and(first, other)
    return first


def _any_of(first: Array, *others: Array) -> Array:
    for other in others:
        first = np.logical_or(first, other)
    return first


def _shifted(column: Array, end: Array | float, *, down: bool) -> Array:
    """Return a column moved by one row, with ``end`` in the row that becomes free."""
    shape = np.broadcast_shapes(column.shape[1:], np.shape(end))
    moved = np.empty(column.shape[:1] + shape)
    if len(column):
        moved[1:] = column[:-1]
        if not down:
            moved[:-1] = column[1:]
        moved[0 if down else -1] = end
    return moved


def _previous(column: Array, first: Array | float) -> Array:
    return _shifted(column, first, down=True)


def _following(column: Array, last: Array | float) -> Array:
    return _shifted(column, last, down=False)


def _running(column: Array) -> Array:
    if column.ndim == 1 or column.shape[1] < _WIDE_CASES or not len(column):
        return np.cumsum(column, axis=0)
    # Whole rows added one after the other: the same sums, read in the order they lie in memory.
    total = np.empty(column.shape)
    total[0] = column[0]
    for row in range(1, len(column)):
        np.add(total[row - 1], column[row], out=total[row])
    return total


def _over_rows(ufunc: np.ufunc) -> Callable[[Array], Array]:
    def gathered(column: Array) -> Array:
        return ufunc.reduce(column, axis=0)  # type: ignore[no-any-return]

    return gathered


def _over_rows_once(ufunc: np.ufunc) -> Callable[[Array], float]:
    """Gather one column; added in the order of its rows, as a running sum and many cases are."""
    if ufunc is np.add:
        return lambda column: float(np.cumsum(column)[-1]) if len(column) else 0.0
    return lambda column: float(ufunc.reduce(column))


_UFUNCS: dict[str, np.ufunc] = {"sum": np.add, "min": np.minimum, "max": np.maximum}
_SHARED: dict[str, object] = {
    "and": _all_of,
    "or": _any_of,
    "not": np.logical_not,
    "where": np.where,
    "previous": _previous,
    "following": _following,
    "running": _running,
}
_SINGLE: dict[str, object] = {
    "abs": abs,
    "acos": math.acos,
    "asin": math.asin,
    "atan": math.atan,
    "ceil": lambda x: float(math.ceil(x)),
    "cos": math.cos,
    "exp": math.exp,
    "floor": lambda x: float(math.floor(x)),
    "interpolate": _interpolate,
    "ln": math.log,
    "log10": math.log10,
    "max": _greatest,
    "min": _least,
    "power": math.pow,
    "sin": math.sin,
    "sqrt": math.sqrt,
    "tan": math.tan,
}
_WIDE: dict[str, object] = {
    "abs": np.abs,
    "acos": np.arccos,
    "asin": np.arcsin,
    "atan": np.arctan,
    "ceil": np.ceil,
    "cos": np.cos,
    "exp": np.exp,
    "floor": np.floor,
    "interpolate": _wide_interpolate,
    "ln": np.log,
    "log10": np.log10,
    "max": _wide_greatest,
    "min": _wide_least,
    "power": _wide_power,
    "sin": np.sin,
    "sqrt": np.sqrt,
    "tan": np.tan,
}
