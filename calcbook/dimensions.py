"""Dimensions of a formula, checked once when it is declared.

``check`` walks a tree with the type of every name and returns the type of the whole; the first
thing that does not agree is raised with a caret under it.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from calcbook.errors import DimensionError, FormulaError, QuantityError, near_match
from calcbook.signatures import RULES, Rules, Type, a_kind, example_unit, kind_of, raised, settled
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
    names,
    walk,
)
from calcbook.units import DIMENSIONLESS, Unit, read_quantity

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

__all__ = ["Type", "check", "check_printed"]

_PLAIN = Type("number", DIMENSIONLESS, None)


def check(node: Node, scope: Mapping[str, Type], text: str) -> Type:
    """Check the dimensions of a formula.

    Parameters
    ----------
    node
        The tree that `parse` made of ``text``.
    scope
        The type of every name that may be used.
    text
        The formula as typed, for the message.

    Returns
    -------
    Type
        'number' with its dimension, 'truth' for a condition, 'text' for a bare choice.

    Raises
    ------
    DimensionError
        Where units do not agree, with both kinds of quantity.
    FormulaError
        For an unknown name or option (with a near match), and columns that cannot be mixed.
    """
    return _Checker(scope, text).type(node)


def check_printed(
    node: Node, scope: Mapping[str, Type], text: str, takes: Mapping[str, Unit], gives: Unit
) -> Type:
    """Check a formula kept as printed: its names are plain numbers in the units stated.

    Parameters
    ----------
    takes
        The unit each name is taken in; a name that is a plain number needs none.
    gives
        The unit of the result.

    Raises
    ------
    DimensionError
        A name whose quantity cannot be had in its unit, or that has a unit and none is stated.
    FormulaError
        As `check`; also a unit stated for a name the formula does not use.
    """
    used = names(node)
    for name in takes:
        if name not in used:
            hint = near_match(name, used) or "take it out of the list of units"
            raise FormulaError(
                f"'{name}' has a unit but is not in the formula", hint=hint, text=text
            )
    checker = _Checker(scope, text)
    plain = dict(scope)
    for part in walk(node):
        if isinstance(part, Name):
            plain[part.name] = _taken(part, checker, takes)
    found = check(node, plain, text)
    if found.form == "number" and found.dimension != DIMENSIONLESS:
        raise DimensionError(
            f"a formula as printed gives a plain number, this one {a_kind(found)}",
            hint="leave the quotes and units out of it, or state no units and write it with them",
            text=text,
            span=node.span,
        )
    return replace(found, dimension=gives.dimension) if found.form == "number" else found


def _taken(part: Name, checker: _Checker, takes: Mapping[str, Unit]) -> Type:
    """Return the type of a name in a formula as printed."""
    known = checker.type_of_name(part)
    if known.form != "number":
        return known
    stated = takes[part.name].dimension if part.name in takes else DIMENSIONLESS
    if known.dimension == stated:
        return replace(known, dimension=DIMENSIONLESS)
    if part.name in takes:
        what = f"'{part.name}' is {a_kind(known)} and cannot be in {takes[part.name].text}"
        hint = f"state a unit of {kind_of(known)}"
    else:
        what = f"'{part.name}' is {a_kind(known)} and its unit in this formula is not stated"
        hint = f"state it: takes={{'{part.name}': '{example_unit(known.dimension) or 'unit'}'}}"
    raise DimensionError(what, hint=hint, text=checker.text, span=part.span)


def _constant(node: Node) -> float | None:
    """Return the value of a constant exponent: a number, a negative one or a quotient of them."""
    match node:
        case Number(value=value):
            return value
        case Negative(operand=operand):
            inner = _constant(operand)
            return None if inner is None else -inner
        case Binary(op="/", left=left, right=right):
            above, below = _constant(left), _constant(right)
            return above / below if above is not None and below else None
    return None


class _Checker(Rules):
    """The rules of the signs, one method per kind of node."""

    def type(self, node: Node) -> Type:  # noqa: C901, PLR0911  one case per kind of node
        match node:
            case Number():
                return _PLAIN
            case Quoted():
                return self.quantity(node)
            case Name():
                return self.type_of_name(node)
            case Negative(operand=operand):
                return self.number(operand, "a leading minus")
            case Binary():
                return self.binary(node)
            case Call():
                return self.call(node)
            case Compare():
                return self.compare(node)
            case Not(operand=operand):
                return self.truth([operand], "not")
            case Logic(op=op, parts=parts):
                return self.truth(parts, op)
            case Solve() | Found():
                raise FormulaError("a solver is declared, it stands in no formula", text=self.text)

    def quantity(self, node: Quoted) -> Type:
        try:
            found = read_quantity(node.text).unit
        except QuantityError as error:
            start, end = error.span or (0, len(node.text))
            raise FormulaError(
                error.what,
                hint=error.hint,
                text=self.text,
                span=(node.span[0] + 1 + start, node.span[0] + 1 + end),
            ) from None
        if not found.text:
            self.refuse("a plain number is not quoted", f"write {node.text}", node)
        return Type("number", found.dimension, None)

    def type_of_name(self, node: Name) -> Type:
        if node.name not in self.scope:
            hint = near_match(node.name, self.scope) or "declare it above this line"
            self.refuse(f"there is no value '{node.name}'", hint, node)
        return self.scope[node.name]

    def binary(self, node: Binary) -> Type:
        left, right = (
            self.number(node.left, f"'{node.op}'"),
            self.number(node.right, f"'{node.op}'"),
        )
        rows = self.rows([(node.left, left), (node.right, right)])
        assert left.dimension is not None  # noqa: S101  a number has one
        assert right.dimension is not None  # noqa: S101
        if node.op == "*":
            return Type("number", settled(left.dimension * right.dimension), rows)
        if node.op == "/":
            return Type("number", settled(left.dimension / right.dimension), rows)
        if node.op == "**":
            return self.power(node, left, right, rows)
        if node.op == "+":
            what = f"cannot add {kind_of(left)} and {kind_of(right)}"
        else:
            what = f"cannot subtract {kind_of(right)} from {kind_of(left)}"
        self.equal([(node.left, left), (node.right, right)], what)
        return Type("number", left.dimension, rows)

    def power(self, node: Binary, left: Type, right: Type, rows: str | None) -> Type:
        if right.dimension != DIMENSIONLESS:
            hint = "an exponent is a plain number; divide it by its unit: x/'1 m'"
            self.refuse(f"an exponent cannot be {a_kind(right)}", hint, node.right, units=True)
        if left.dimension == DIMENSIONLESS:
            return Type("number", DIMENSIONLESS, rows)
        exponent = _constant(node.right)
        if exponent is None:
            hint = "its unit would not be known: write the exponent in figures"
            what = f"{a_kind(left)} needs an exponent in figures"
            self.refuse(what, hint, node.right, units=True)
        assert left.dimension is not None  # noqa: S101
        return Type("number", raised(left.dimension, exponent), rows)

    def truth(self, parts: Sequence[Node], word: str) -> Type:
        found = [(part, self.type(part)) for part in parts]
        for part, kind in found:
            if kind.form != "truth":
                what = f"'{word}' joins conditions, and this is {a_kind(kind)}"
                self.refuse(what, "write a comparison, as in p > '0 Pa'", part)
        return Type("truth", None, self.rows(found))

    def compare(self, node: Compare) -> Type:
        left = node.first
        sides: list[tuple[Node, Type]] = []
        for op, right in node.rest:
            pair = [(left, self.side(left, right)), (right, self.side(right, left))]
            if any(found.form == "text" for _, found in pair):
                self.options(op, pair)
            else:
                (_, one), (_, other) = pair
                what = f"cannot compare {kind_of(one)} with {kind_of(other)}"
                for part, found in pair:
                    if found.form != "number":
                        self.refuse(what, "conditions are joined with: and, or, not", part)
                self.equal(pair, what)
            sides += pair
            left = right
        return Type("truth", None, self.rows(sides))

    def side(self, node: Node, other: Node) -> Type:
        """Return the type of a side; a quoted text beside a choice is an option."""
        if isinstance(node, Quoted) and not isinstance(other, Quoted):
            across = self.type(other)
            if across.form == "text":
                return Type("text", None, None, (node.text,))
        return self.type(node)

    def options(self, op: str, pair: Sequence[tuple[Node, Type]]) -> None:
        (left, one), (right, other) = pair
        odd = next(((n, f) for n, f in pair if f.form != "text"), None)
        if odd is not None:
            choice = one if one.form == "text" else other
            hint = f"write the option in quotes: {' or '.join(map(repr, choice.options)) or 'text'}"
            self.refuse(f"cannot compare a choice with {a_kind(odd[1])}", hint, odd[0])
        if op not in {"==", "!="}:
            self.refuse(f"a choice has no order, '{op}' does not compare it", "use == or !=", right)
        for node, options in ((left, other.options), (right, one.options)):
            if isinstance(node, Quoted) and options and node.text not in options:
                known = ", ".join(f"'{option}'" for option in options)
                hint = near_match(node.text, options) or f"the options are {known}"
                self.refuse(f"there is no option '{node.text}'", hint, node)

    def call(self, node: Call) -> Type:
        if node.function == "interpolate":
            return self.interpolate(node)
        if node.function == "where":
            return self.where(node)
        if node.function in KEYED:
            return self.keyed(node)
        parts = [(arg, self.number(arg, f"{node.function}()")) for arg in node.args]
        return RULES[node.function](self, node, parts)
