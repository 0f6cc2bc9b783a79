"""What the functions of a formula take and give, and the words for what does not agree."""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import TYPE_CHECKING, NoReturn, cast

from calcbook.errors import DimensionError, FormulaError
from calcbook.tree import Call, Name, Node, Number, Quoted
from calcbook.units import DIMENSIONLESS, KINDS, Dimension, dimension_name, unit

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from calcbook.table import Table

ANGLE = unit("rad").dimension
_SETTLED = 1e-9


@dataclass(frozen=True)
class Type:
    """What is known of a value before it has one.

    Attributes
    ----------
    form
        'number', 'text' (an option of a choice), 'truth', 'table' or 'solution' (of a solver).
    dimension
        Of a number, else None.
    rows
        The set of rows a column belongs to; None for a single value.
    options
        The texts a choice may take; empty where any text may stand.
    table
        The table, where the form is 'table'.
    """

    form: str
    dimension: Dimension | None
    rows: str | None
    options: tuple[str, ...] = ()
    table: Table | None = None


def kind_of(found: Type) -> str:
    """Return the words for a type: 'pressure', 'choice', 'condition', 'table'."""
    if found.form == "number":
        return dimension_name(found.dimension or DIMENSIONLESS)
    return {
        "text": "choice",
        "truth": "condition",
        "table": "table",
        "solution": "solution of a solver",
    }[found.form]


def a_kind(found: Type) -> str:
    """Return the words for a type with their article: 'an angle'."""
    words = kind_of(found)
    return f"an {words}" if words[0] in "aeiou" else f"a {words}"


def example_unit(dimension: Dimension | None) -> str:
    """Return a usual unit of a dimension, or nothing."""
    return next((kind.si.text for kind in KINDS.values() if kind.dimension == dimension), "")


def raised(dimension: Dimension, exponent: float) -> Dimension:
    """Raise a dimension to a power."""
    return settled(Dimension({base: cast("float", power) * exponent
                              for base, power in dimension.items()}))  # fmt: skip


def settled(dimension: Dimension) -> Dimension:
    """Return a dimension with its broken powers settled: three times 0.1 is 0.3."""
    powers = {base: cast("float", power) for base, power in dimension.items()}
    if all(power == int(power) for power in powers.values()):
        return Dimension({base: int(power) for base, power in powers.items() if power})
    near = {base: _nearest(power) for base, power in powers.items()}
    return Dimension({base: power for base, power in near.items() if power})


def _nearest(power: float) -> float:
    fraction = float(Fraction(power).limit_denominator(1000))
    return fraction if abs(fraction - power) < _SETTLED else round(power, 12)


class Rules(ABC):
    """The scope of a formula, what its functions ask of their values, and how it is refused."""

    def __init__(self, scope: Mapping[str, Type], text: str) -> None:
        self.scope = scope
        self.text = text

    def refuse(self, what: str, hint: str, at: Node, *, units: bool = False) -> NoReturn:
        """Raise with the caret under a part of the formula."""
        error = DimensionError if units else FormulaError
        raise error(what, hint=hint, text=self.text, span=at.span)

    @abstractmethod
    def type(self, node: Node) -> Type:
        """Return the type of a part of the formula."""

    def number(self, node: Node, use: str) -> Type:
        """Return the type of an operand that has to be a number."""
        found = self.type(node)
        if found.form == "number":
            return found
        hint = {
            "text": f"compare it with one of its options: {self.example(node, found)}",
            "truth": "use where(condition, a, b)",
            "table": "read it with interpolate(table, x)",
            "solution": "declare a line that reads it: s.solved(...)",
        }[found.form]
        return self.refuse(f"{use} needs a number, and this is {a_kind(found)}", hint, node)

    def example(self, node: Node, found: Type) -> str:
        """Return how a choice is compared."""
        name = node.name if isinstance(node, Name) else "choice"
        return f"{name} == '{found.options[0] if found.options else 'text'}'"

    def rows(self, parts: Sequence[tuple[Node, Type]]) -> str | None:
        """Return the one set of rows of all parts; different ones do not mix."""
        rows: str | None = None
        for node, found in parts:
            if found.rows is None or found.rows == rows:
                continue
            if rows is not None:
                hint = "use sum(), max() or min() of one of them, or let both schedules share rows"
                what = f"columns of '{rows}' and of '{found.rows}' have different rows"
                self.refuse(what, hint, node)
            rows = found.rows
        return rows

    def equal(self, parts: Sequence[tuple[Node, Type]], what: str) -> None:
        """Refuse parts of different dimensions, with the caret under the odd one."""
        first = parts[0][1]
        for node, found in parts[1:]:
            if found.dimension == first.dimension:
                continue
            for plain, other in ((node, first), (parts[0][0], found)):
                if isinstance(plain, Number) and (example := example_unit(other.dimension)):
                    hint = f"give the number its unit: write '{plain.text} {example}'"
                    if other.dimension == ANGLE:
                        hint += f", or divide the angle by its unit: x/'1 {example}'"
                    self.refuse(what, hint, plain, units=True)
            self.refuse(what, "both sides need the same kind of quantity", node, units=True)

    def where(self, node: Call) -> Type:
        """Return the type of ``where(condition, a, b)``."""
        condition = self.type(node.args[0])
        if condition.form != "truth":
            hint = "write where(condition, a, b), as in where(p > '0 Pa', a, b)"
            what = f"where() starts with a condition, and this is {a_kind(condition)}"
            self.refuse(what, hint, node.args[0])
        parts = [(arg, self.number(arg, "where()")) for arg in node.args[1:]]
        self.alike(node, parts)
        rows = self.rows([(node.args[0], condition), *parts])
        return Type("number", parts[0][1].dimension, rows)

    def alike(self, node: Call, parts: Sequence[tuple[Node, Type]]) -> None:
        """Refuse values of a function that are not of one kind."""
        first = parts[0][1]
        other = next((f for _, f in parts if f.dimension != first.dimension), first)
        what = f"{node.function}() needs one kind of quantity, not {kind_of(first)}"
        self.equal(parts, f"{what} and {kind_of(other)}")

    def keyed(self, node: Call) -> Type:
        """Return the type of ``lookup(column, keys, key)`` and ``sum_for(column, keys, key)``."""
        source, keys, key = node.args
        column, names = self.number(source, f"{node.function}()"), self.type(keys)
        example = f"{node.function}(gamma, material, 'steel')"
        if column.rows is None:
            self.refuse(f"{node.function}() reads a column of a schedule", example, source)
        if names.form != "text" or names.rows != column.rows:
            what = f"{node.function}() needs the keys of the rows of that column"
            self.refuse(what, f"name a column of words of the same schedule: {example}", keys)
        wanted = None if isinstance(key, Quoted) else self.type(key)
        if wanted is not None and wanted.form != "text":
            what = f"{node.function}() finds a row by words, and this is {a_kind(wanted)}"
            self.refuse(what, example, key)
        return Type("number", column.dimension, wanted.rows if wanted is not None else None)

    def interpolate(self, node: Call) -> Type:
        """Return the type of ``interpolate(table, x[, y])``."""
        source, *points = node.args
        table = self.type(source).table
        if table is None:
            self.refuse("interpolate() starts with a table", "interpolate(table, x)", source)
        if len(points) != len(table.axes):
            hint = "interpolate(table, x) for one way in, interpolate(table, x, y) for two"
            self.refuse(f"the table has {len(table.axes)} ways in, not {len(points)}", hint, node)
        parts = [(point, self.number(point, "interpolate()")) for point in points]
        for axis, (point, found) in zip(table.axes, parts, strict=True):
            if found.dimension != axis.unit.dimension:
                wanted = dimension_name(axis.unit.dimension)
                what = f"the table is read with a {wanted} ({axis.name}), not {a_kind(found)}"
                self.refuse(what, f"give it a {wanted}", point, units=True)
        return Type("number", table.unit.dimension, self.rows(parts))


_Parts = list[tuple[Node, Type]]


def _same(_: Rules, __: Call, parts: _Parts) -> Type:
    return parts[0][1]


def _plain(checker: Rules, node: Call, parts: _Parts) -> Type:
    part, found = parts[0]
    if found.dimension != DIMENSIONLESS:
        example = example_unit(found.dimension)
        hint = f"divide it by its unit: {node.function}(x/'1 {example or 'unit'}')"
        what = f"{node.function}() takes a plain number, not {a_kind(found)}"
        checker.refuse(what, hint, part, units=True)
    return found


def _angle(checker: Rules, node: Call, parts: _Parts) -> Type:
    part, found = parts[0]
    if found.dimension != ANGLE:
        literal = f"write '{part.text} deg'" if isinstance(part, Number) else ""
        what = f"{node.function}() takes an angle, not {a_kind(found)}"
        checker.refuse(what, literal or "give it a unit of angle: x*'1 rad'", part, units=True)
    return Type("number", DIMENSIONLESS, found.rows)


def _inverse(checker: Rules, node: Call, parts: _Parts) -> Type:
    return Type("number", ANGLE, _plain(checker, node, parts).rows)


def _root(_: Rules, __: Call, parts: _Parts) -> Type:
    found = parts[0][1]
    return Type("number", raised(found.dimension or DIMENSIONLESS, 0.5), found.rows)


def _column(checker: Rules, node: Call, parts: _Parts) -> Type:
    if parts[0][1].rows is None:
        hint = "give it a column of a schedule"
        checker.refuse(f"{node.function}() gathers the rows of a column", hint, parts[0][0])
    return parts[0][1]


def _total(checker: Rules, node: Call, parts: _Parts) -> Type:
    return replace(_column(checker, node, parts), rows=None)


def _extreme(checker: Rules, node: Call, parts: _Parts) -> Type:
    if len(parts) == 1:
        return _total(checker, node, parts)
    checker.alike(node, parts)
    return Type("number", parts[0][1].dimension, checker.rows(parts))


def _neighbour(checker: Rules, node: Call, parts: _Parts) -> Type:
    column = _column(checker, node, parts)
    if parts[1][1].rows is not None:
        hint = f"write one value for the row at the end: {node.function}(column, '0 m')"
        checker.refuse(f"{node.function}() ends in a single value", hint, parts[1][0])
    checker.alike(node, parts)
    return column


RULES: dict[str, Callable[[Rules, Call, _Parts], Type]] = {
    **dict.fromkeys(("exp", "ln", "log10", "floor", "ceil"), _plain),
    **dict.fromkeys(("sin", "cos", "tan"), _angle),
    **dict.fromkeys(("asin", "acos", "atan"), _inverse),
    **dict.fromkeys(("min", "max"), _extreme),
    **dict.fromkeys(("previous", "following"), _neighbour),
    "abs": _same,
    "running": _column,
    "sqrt": _root,
    "sum": _total,
}
