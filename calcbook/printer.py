"""The one printer of formulas: order, form and brackets as the author wrote them.

`Printer` walks a tree and decides where brackets, dots and spaces stand; a subclass (in `typeset`)
only says how a mark is written in its output.
"""

# ruff: noqa: RUF001  true minus and multiplication signs are printed

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass
from typing import TYPE_CHECKING, ClassVar, NamedTuple

from calcbook.errors import FormulaError
from calcbook.symbols import Sign, read_figure, split_quantity, symbol_parts, unit_parts
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

if TYPE_CHECKING:
    from collections.abc import Mapping


@dataclass(frozen=True)
class Printed:
    """A value as printed: a formatted number (ASCII '-') or an option, and the text of its unit."""

    text: str
    unit: str = ""


def place_of(node: Node) -> str:
    """Return the key under which ``values`` holds what a part of a formula gives as a whole."""
    start, end = node.span
    return f"{start}:{end}"


def substituted(node: Node) -> set[str]:
    """Return under what names ``values`` may hold a value for a part of a formula."""
    return {*names(node), *(place_of(part) for part in walk(node) if isinstance(part, Call))}


class Piece(NamedTuple):
    """A printed part: how tightly it holds together, and what stands at its two ends."""

    text: str
    level: int
    first: str
    last: str


CASES, OR, AND, NOT, COMPARE, SUM, MINUS, PRODUCT, QUANTITY, POWER, ATOM = range(11)
#: GC_pi q_h is read as a product of symbols; longer names are words.
LONGEST_INITIALS = 3
#: Ends between which a product needs no dot: 0.613 K_z, K_z (a + b).
_OPEN_LEFT = {"number", "letter", "other"}
_OPEN_RIGHT = {"letter", "other"}
_RELATIONS = {"<": "<", "<=": "≤", ">": ">", ">=": "≥", "==": "=", "!=": "≠"}
#: Functions of a whole column, and those that are when they have one argument.
_WHOLE = {"sum", "running", "previous", "following"}
_WHOLE_ALONE = {"min", "max"}
_FUNCTION_NAMES = {"asin": "arcsin", "acos": "arccos", "atan": "arctan"}


class Printer(ABC):
    """Prints trees; with ``values`` the names are replaced by what they stand for.

    Parameters
    ----------
    values
        The printed value of each name; a name without one stays a symbol.
    takes
        Names whose unit is not shown, in formulas kept as printed.
    """

    #: Whether a fraction is stacked, so that its parts need no brackets.
    stacked: ClassVar[bool] = True

    def __init__(
        self,
        values: Mapping[str, Printed] | None = None,
        takes: frozenset[str] = frozenset(),
    ) -> None:
        self.values = values or {}
        self.takes = takes
        self.stacks = self.stacked

    # --- the marks of an output -------------------------------------------------------------

    @abstractmethod
    def sign(self, sign: Sign) -> str:
        """Write a letter, Greek letter, word or number of a symbol."""

    def digits(self, text: str) -> str:
        """Write the digits of a number."""
        return text

    @abstractmethod
    def below(self, base: str, subscript: str) -> str:
        """Write a subscript."""

    @abstractmethod
    def above(self, base: str, superscript: str) -> str:
        """Write a superscript."""

    @abstractmethod
    def words(self, text: str) -> str:
        """Write upright text."""

    def row(self, *parts: str) -> str:
        """Put parts side by side as one."""
        return "".join(parts)

    def listed(self, parts: list[str], comma: str = ", ") -> str:
        """Put parts side by side with commas."""
        return comma.join(parts)

    @abstractmethod
    def operator(self, text: str) -> str:
        """Write a sign or word between two parts, with its space."""

    @abstractmethod
    def minus(self, text: str) -> str:
        """Write a leading minus."""

    @abstractmethod
    def space(self) -> str:
        """Write the thin space of a product, or between a number and its unit."""

    @abstractmethod
    def fence(self, kind: str, inner: str) -> str:
        """Write brackets '()', bars '||', or the fences of 'floor' and 'ceil'."""

    @abstractmethod
    def fraction(self, above: str, below: str) -> str:
        """Write a fraction."""

    def stroke(self, above: str, below: str) -> str:
        """Write a fraction on one line."""
        return self.row(above, "/", below)

    @abstractmethod
    def root(self, inner: str) -> str:
        """Write a square root."""

    @abstractmethod
    def function(self, name: str) -> str:
        """Write the name of a function."""

    def applied(self, name: str, args: list[str]) -> str:
        """Write a function, its name already written, with its values in brackets."""
        return self.row(name, self.fence("()", self.listed(args) if len(args) > 1 else args[0]))

    @abstractmethod
    def cases(self, yes: str, condition: str, no: str) -> str:
        """Write one value where a condition holds, and another elsewhere."""

    def times(self) -> str:
        """Write what stands between factors that need no dot."""
        return self.space()

    # --- symbols and values -----------------------------------------------------------------

    def symbol(self, name: str) -> str:
        """Write the symbol of a name."""
        base, subscripts = symbol_parts(name)
        if not subscripts:
            return self.sign(base)
        shown = [self.sign(part) for part in subscripts]
        return self.below(self.sign(base), shown[0] if len(shown) == 1 else self.listed(shown, ","))

    def unit(self, text: str) -> str:
        """Write a unit upright with raised powers."""
        return "".join(
            self.above(self.words(base), power) if power else self.words(base)
            for base, power in unit_parts(text)
        )

    def value(self, text: str, unit: str) -> Piece:
        """Write a number with its unit; other texts upright."""
        figure = read_figure(text)
        if figure is None:
            shown = self.words(f"{text} {unit}" if unit else text)
            return Piece(shown, QUANTITY if unit or " " in text else ATOM, "word", "word")
        parts = [self.digits(figure.digits)]
        if figure.power:
            power = figure.power.replace("-", "−")
            parts += [self.operator("×"), self.above(self.digits("10"), self.digits(power))]
        if unit:
            parts += [self.unit(unit)] if unit in {"deg", "°"} else [self.space(), self.unit(unit)]
        whole = self.row(*parts) if len(parts) > 1 else parts[0]
        kind = "quantity" if len(parts) > 1 else "number"
        if figure.negative:
            return Piece(self.minus(whole), MINUS, kind, kind)
        return Piece(whole, QUANTITY if len(parts) > 1 else ATOM, kind, kind)

    # --- the tree ---------------------------------------------------------------------------

    def write(self, node: Node) -> Piece:  # noqa: C901, PLR0911  one case per kind of node
        """Print a tree."""
        match node:
            case Number(text=text):
                return self.value(text, "")
            case Quoted(text=text):
                return self.value(*(split_quantity(text) or (text, "")))
            case Name(name=name):
                return self.name(name)
            case Negative(operand=operand):
                inner = self.write(operand)
                return Piece(self.minus(self.inside(inner, PRODUCT)), MINUS, "minus", inner.last)
            case Binary():
                return self.binary(node)
            case Call():
                return self.call(node)
            case Compare():
                return self.compare(node)
            case Logic(op=op, parts=parts):
                level = AND if op == "and" else OR
                text = self.operator(op).join(self.inside(self.write(p), level + 1) for p in parts)
                return Piece(self.row(text), level, "other", "other")
            case Not(operand=operand):
                text = self.row(self.words("not "), self.inside(self.write(operand), NOT))
                return Piece(text, NOT, "other", "other")
            case Solve() | Found():
                raise FormulaError("a solver is declared, it stands in no formula")

    def inside(self, piece: Piece, level: int) -> str:
        """Return a piece, in brackets if it holds less tightly than its surroundings."""
        return piece.text if piece.level >= level else self.fence("()", piece.text)

    def name(self, name: str) -> Piece:
        """Write a symbol, or the value it stands for."""
        if name in self.values:
            value = self.values[name]
            return self.value(value.text, "" if name in self.takes else value.unit)
        base = symbol_parts(name)[0]
        initials = base.text.isupper() and len(base.text) <= LONGEST_INITIALS
        kind = "word" if base.kind == "word" and not initials else "letter"
        return Piece(self.symbol(name), ATOM, kind, kind)

    def binary(self, node: Binary) -> Piece:
        """Write two operands with their sign."""
        left = self.write(node.left)
        if node.op == "**":
            return self.power(left, node.right)
        right = self.write(node.right)
        if node.op in "+-":
            sign = "+" if node.op == "+" else "−"
            text = self.row(
                self.inside(left, SUM), self.operator(sign), self.inside(right, PRODUCT)
            )
            return Piece(text, SUM, "other", "other")
        if node.op == "*":
            return self.product(left, right)
        return self.quotient(left, right)

    def product(self, left: Piece, right: Piece) -> Piece:
        """Write a product: a space between symbols, a dot between numbers."""
        one, other = self.inside(left, MINUS), self.inside(right, QUANTITY)
        last = left.last if left.level >= MINUS else "other"
        first = right.first if right.level >= QUANTITY else "other"
        joined = not self.values and last in _OPEN_LEFT and first in _OPEN_RIGHT
        sign = self.times() if joined else self.operator("⋅")
        level = MINUS if left.level == MINUS else PRODUCT
        end = "quotient" if last == "quotient" else right.last
        return Piece(self.row(one, sign, other), level, left.first, end)

    def quotient(self, left: Piece, right: Piece) -> Piece:
        """Write a fraction, stacked or with a stroke."""
        if self.stacks:
            return Piece(self.fraction(left.text, right.text), QUANTITY, "other", "other")
        text = self.stroke(self.inside(left, MINUS), self.inside(right, POWER))
        return Piece(text, MINUS if left.level == MINUS else PRODUCT, left.first, "quotient")

    def power(self, left: Piece, exponent: Node) -> Piece:
        """Write a power, a fraction in its exponent with a stroke."""
        stacks, self.stacks = self.stacks, False
        right = self.write(exponent)
        self.stacks = stacks
        base = self.inside(left, ATOM)
        return Piece(self.above(base, right.text), POWER, left.first, "other")

    def compare(self, node: Compare) -> Piece:
        """Write a comparison or a chain of them."""
        parts = [self.inside(self.write(node.first), SUM)]
        for op, part in node.rest:
            parts += [self.operator(_RELATIONS[op]), self.inside(self.write(part), SUM)]
        return Piece(self.row(*parts), COMPARE, "other", "other")

    def call(self, node: Call) -> Piece:
        """Write a function the way it is written on paper."""
        if node.function == "interpolate":
            return self.looked_up(node)
        if node.function in KEYED:
            return self.by_key(node)
        whole = node.function in _WHOLE or (node.function in _WHOLE_ALONE and len(node.args) == 1)
        values = self.values
        if whole:
            self.values = {}  # a whole column is not the value of one of its rows
        args = [self.inside(self.write(arg), OR) for arg in node.args]
        self.values = values
        if node.function == "where":
            return Piece(self.cases(args[1], args[0], args[2]), CASES, "other", "other")
        if node.function == "sqrt":
            text = self.root(args[0])
        elif node.function in {"abs", "floor", "ceil"}:
            text = self.fence({"abs": "||"}.get(node.function, node.function), args[0])
        elif node.function == "sum":
            text = self.applied(self.operator("∑").strip(), args)
        elif node.function == "log10":
            text = self.applied(self.below(self.function("log"), self.digits("10")), args)
        else:
            name = _FUNCTION_NAMES.get(node.function, node.function)
            text = self.applied(self.function(name), args)
        return Piece(text, ATOM, "other", "other")

    def looked_up(self, node: Call) -> Piece:
        """Write a value read from a table: its name in words, and where it is read."""
        table, *places = node.args
        args = [self.inside(self.write(place), OR) for place in places]
        shown = self.row(
            self.table(table.name if isinstance(table, Name) else ""), self.words(" at ")
        )
        return Piece(self.applied(shown, args), ATOM, "other", "other")

    def table(self, name: str) -> str:
        """Write the name of a table: a symbol if it is one, else its words."""
        if symbol_parts(name)[0].kind == "word":
            return self.words(name.replace("_", " "))
        return self.symbol(name)

    def by_key(self, node: Call) -> Piece:
        """Write a value, or a sum, of the rows another schedule has for a key.

        A value looked up stands in ``values`` under the place of the call in its formula.
        """
        found = self.values.get(place_of(node))
        if found is not None:
            return self.value(found.text, found.unit)
        column, keys, key = node.args
        values, self.values = self.values, {}
        source, home = self.inside(self.write(column), PRODUCT), self.write(keys).text
        self.values = values
        wanted = self.words(key.text) if isinstance(key, Quoted) else self.write(key).text
        where = self.row(home, self.operator("="), wanted)
        if node.function == "lookup":
            return Piece(self.of_row(source, where), ATOM, "other", "other")
        inner = self.row(source, self.words(" where "), where)
        name = self.operator("∑").strip()
        return Piece(self.applied(name, [inner]), ATOM, "other", "other")

    def of_row(self, column: str, where: str) -> str:
        """Write a column with the row that is meant in brackets."""
        return self.row(column, self.fence("()", where))
