"""Our trees as sympy expressions, and back as text: the bridge that `algebra` and the tests use.

Nothing here is compiled source: ``evaluate`` is a second, independent way to a formula's value.
sympy is imported when first needed.
"""

# ruff: noqa: ANN401, N802, N815  sympy has no types, and its hooks have names in mixed case

from __future__ import annotations

import functools
from typing import TYPE_CHECKING, Any

from calcbook.errors import CalcbookError, FormulaError
from calcbook.tree import (
    FUNCTIONS,
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

_DIGITS = 40


def to_sympy(
    node: Node,
    values: Mapping[str, Any] | None = None,
    *,
    symbolic: bool = False,
) -> Any:
    """Return a formula as a sympy expression.

    Parameters
    ----------
    values
        Numbers in coherent SI, option texts, or for a table a function of one or two numbers;
        names without a value become real symbols.
    symbolic
        Keep quantities and decimals as symbols named by their text, for a way back.

    Raises
    ------
    FormulaError
        For functions of columns, for tables without a value, and where no real value is left.
    """
    try:
        return _Builder(values or {}, symbolic=symbolic).build(node)
    except CalcbookError:
        raise
    except (TypeError, ValueError) as error:  # sympy compares only what is real
        raise FormulaError(f"the formula has no real value: {error}") from None


def evaluate(node: Node, values: Mapping[str, Any]) -> float | bool:
    """Evaluate a formula on single values by sympy, with 40 digits inside.

    Parameters
    ----------
    values
        As in `to_sympy`, one for every name.

    Raises
    ------
    FormulaError
        Where there is no real, finite value.
    """
    import sympy  # noqa: PLC0415  heavy

    found = to_sympy(node, values)
    if isinstance(found, (bool, sympy.logic.boolalg.BooleanAtom)):
        return bool(found)
    if not found.is_number or not found.is_real or not found.is_finite:
        raise FormulaError(f"the formula has no real value: {found}")
    return float(found)


class _Builder:
    """Builds the expression, one method per kind of node."""

    def __init__(self, values: Mapping[str, Any], *, symbolic: bool) -> None:
        import sympy  # noqa: PLC0415  heavy

        self.sympy = sympy
        self.values = values
        self.symbolic = symbolic

    def build(self, node: Node) -> Any:  # noqa: C901, PLR0911  one case per kind of node
        match node:
            case Number(text=text):
                return self.number(text)
            case Quoted(text=text):
                return self.quantity(text)
            case Name(name=name):
                return self.name(name)
            case Negative(operand=operand):
                return -self.build(operand)
            case Binary():
                return self.binary(node)
            case Call():
                return self.call(node)
            case Compare():
                return self.compare(node)
            case Logic(op=op, parts=parts):
                join = self.sympy.And if op == "and" else self.sympy.Or
                return join(*(self.build(part) for part in parts))
            case Not(operand=operand):
                return self.sympy.Not(self.build(operand))
            case Solve() | Found():
                raise FormulaError("a solver has no formula")

    def number(self, text: str) -> Any:
        exact = self.sympy.Rational(text)
        if self.symbolic and not exact.is_Integer:
            return self.sympy.Symbol(text, positive=True)
        return self.sympy.Float(text, _DIGITS) if self.values else exact

    def quantity(self, text: str) -> Any:
        si = read_quantity(text).si
        if self.symbolic:
            return self.sympy.Symbol(f"'{text}'", real=True, positive=si > 0 or None)
        # 15 figures: 457 cm and 4.57 m are the same quantity, whatever their last bits are.
        figures = f"{si:.15g}"
        return self.sympy.Float(figures, _DIGITS) if self.values else self.sympy.Rational(figures)

    def name(self, name: str) -> Any:
        if name not in self.values:
            return self.sympy.Symbol(name, real=True)
        value = self.values[name]
        return value if isinstance(value, str) else self.sympy.Float(float(value), _DIGITS)

    def binary(self, node: Binary) -> Any:
        left = self.build(node.left)
        if node.op == "**":
            # An exponent stays a number, so that roots are roots.
            return left ** _Builder(self.values, symbolic=False).build(node.right)
        right = self.build(node.right)
        if node.op == "+":
            return left + right
        if node.op == "-":
            return left - right
        return left * right if node.op == "*" else left / right

    def call(self, node: Call) -> Any:
        if node.function == "interpolate":
            return self.interpolate(node)
        args = [self.build(arg) for arg in node.args]
        if node.function == "where":
            condition, yes, no = args
            return self.sympy.Piecewise((yes, condition), (no, True))
        if node.function == "log10":
            return self.sympy.log(args[0], 10)
        several = node.function not in {"min", "max"} or len(args) > 1
        function = _known(self.sympy).get(node.function)
        if function is None or not several:
            raise FormulaError(f"{node.function}() gathers a column and is not for algebra")
        return function(*args)

    def interpolate(self, node: Call) -> Any:
        table, *points = node.args
        read = self.values.get(table.name) if isinstance(table, Name) else None
        if read is None:
            raise FormulaError("a table is not for algebra")
        found = read(*(float(self.build(point)) for point in points))
        return self.sympy.Float(float(found), _DIGITS)

    def compare(self, node: Compare) -> Any:
        left = node.first
        pairs = []
        for op, right in node.rest:
            pairs.append(self.pair(op, left, right))
            left = right
        return pairs[0] if len(pairs) == 1 else self.sympy.And(*pairs)

    def pair(self, op: str, left: Node, right: Node) -> Any:
        texts = [self.values.get(p.name) for p in (left, right) if isinstance(p, Name)]
        if any(isinstance(text, str) for text in texts):
            one, other = (p.text if isinstance(p, Quoted) else self.build(p) for p in (left, right))
            return self.sympy.sympify((one == other) == (op == "=="))
        relations: dict[str, Callable[[Any, Any], Any]] = {
            "<": self.sympy.Lt, "<=": self.sympy.Le, ">": self.sympy.Gt,
            ">=": self.sympy.Ge, "==": self.sympy.Eq, "!=": self.sympy.Ne,
        }  # fmt: skip
        return relations[op](self.build(left), self.build(right))


def _known(sympy: Any) -> dict[str, Any]:
    return {
        "abs": sympy.Abs, "acos": sympy.acos, "asin": sympy.asin, "atan": sympy.atan,
        "ceil": sympy.ceiling, "cos": sympy.cos, "exp": sympy.exp, "floor": sympy.floor,
        "ln": sympy.log, "max": sympy.Max, "min": sympy.Min, "sin": sympy.sin,
        "sqrt": sympy.sqrt, "tan": sympy.tan,
    }  # fmt: skip


def text_of(expression: Any) -> str:
    """Return a sympy expression as a formula in our language.

    Raises
    ------
    FormulaError
        For what our language has no words for.
    """
    return str(_language()().doprint(expression))


_NAMES = {"Abs": "abs", "ceiling": "ceil", "log": "ln", "Max": "max", "Min": "min"}


class _Words:
    """How sympy's expressions are written in the formula language; its printer's hooks."""

    def _print_Function(self: Any, expr: Any) -> str:
        name = _NAMES.get(expr.func.__name__, expr.func.__name__)
        if name not in FUNCTIONS:
            raise FormulaError(f"'{name}' is not part of a formula")
        return f"{name}({self.stringify(expr.args, ', ')})"

    _print_Max = _print_Min = _print_log = _print_Abs = _print_Function

    def _print_Piecewise(self: Any, expr: Any) -> str:
        *cases, (last, always) = expr.args
        if always != True:  # noqa: E712  sympy's own truth
            raise FormulaError("a case is not covered")
        text = self._print(last)
        for value, condition in reversed(cases):
            text = f"where({self._print(condition)}, {self._print(value)}, {text})"
        return str(text)

    def _print_Relational(self: Any, expr: Any) -> str:
        return f"({self._print(expr.lhs)} {expr.rel_op} {self._print(expr.rhs)})"

    def _print_And(self: Any, expr: Any) -> str:
        return f"({self.stringify(expr.args, ' and ')})"

    def _print_Or(self: Any, expr: Any) -> str:
        return f"({self.stringify(expr.args, ' or ')})"

    def _print_Not(self: Any, expr: Any) -> str:
        return f"(not {self._print(expr.args[0])})"

    def _print_Exp1(self: Any, _: Any) -> str:
        return "exp(1)"

    def _refuse(self: Any, expr: Any) -> str:
        raise FormulaError(f"'{expr}' is not part of a formula")

    _print_Infinity = _print_NegativeInfinity = _print_ComplexInfinity = _refuse
    _print_NaN = _print_ImaginaryUnit = _print_Pi = emptyPrinter = _refuse


@functools.cache
def _language() -> type[Any]:
    """Make the printer that writes our language, on sympy's own."""
    from sympy.printing.str import StrPrinter  # noqa: PLC0415  heavy

    return type("Language", (_Words, StrPrinter), {})
