"""Algebra on formulas by sympy, from our own trees and never from raw text; nothing is displayed.

Numbers and quoted quantities go into sympy as symbols named by their text where a formula is to
come back (`derivative`, `solve_for`), so that ``0.613`` and ``'4.57 m'`` return as typed.
sympy is imported when first needed.
"""

from __future__ import annotations

import math
import random
from typing import TYPE_CHECKING, Any

from calcbook.compile import namespace, python_source
from calcbook.dimensions import Type
from calcbook.errors import FormulaError, QuantityError
from calcbook.formula import Call, Compare, Logic, Node, Not, Quoted, names, parse, walk
from calcbook.oracle import evaluate, text_of, to_sympy
from calcbook.units import DIMENSIONLESS, read_quantity

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Sequence

    Numbers = dict[str, float]

__all__ = ["derivative", "evaluate", "same", "solve_for", "text_of", "to_sympy"]

#: Bounds that keep algebra from running long; beyond them nothing is decided or solved.
MAX_OPERATIONS = 200
MAX_SYMBOLS = 12
MAX_TERMS = 20_000
MAX_TRIGONOMETRY = 30
MAX_MULTIPLE = 12
_SAMPLES = 40
_ENOUGH = 8
_TOLERANCE = 1e-9
_COLUMNS = {"sum", "running", "previous", "following", "interpolate"}
_STEPS = _COLUMNS | {"floor", "ceil"}


def derivative(node: Node, name: str) -> str:
    """Return the derivative of a formula with respect to a name, as a formula.

    min, max and abs become ``where``; at their corners one of the two sides holds.

    Raises
    ------
    FormulaError
        A function without a derivative here: of columns, of a table, floor or ceil.
    """
    import sympy  # noqa: PLC0415  heavy

    steps = sorted({part.function for part in walk(node) if isinstance(part, Call)} & _STEPS)
    if steps:
        raise FormulaError(f"{steps[0]}() has no derivative as a formula")
    corners = [sympy.Abs, sympy.Min, sympy.Max]
    smooth = to_sympy(node, symbolic=True).rewrite(corners, sympy.Piecewise)
    slope = sympy.diff(smooth, sympy.Symbol(name, real=True))
    return text_of(sympy.piecewise_fold(slope))


def solve_for(name_lhs: str, node: Node, name: str) -> list[str]:
    """Rearrange ``name_lhs = node`` for another name.

    Returns
    -------
    list of str
        Formulas for ``name`` in terms of ``name_lhs`` and the rest, each tried on numbers; empty
        where none is found. Of the many angles with one sine, the principal one.

    Notes
    -----
    A name that occurs once is isolated step by step; one that occurs more often is solved for
    where it stands in a polynomial of degree 1 or 2. Everything else is left alone.
    """
    import sympy  # noqa: PLC0415  heavy

    if name == name_lhs or name not in names(node) or name_lhs in names(node):
        return []
    symbol, value = sympy.Symbol(name, real=True), sympy.Symbol(name_lhs, real=True)
    try:
        expression = to_sympy(node, symbolic=True)
        found = _isolate(expression, value, symbol) or _polynomial(expression - value, symbol)
        texts = list(dict.fromkeys(text_of(answer) for answer in found))
    except (ValueError, TypeError, NotImplementedError):
        return []
    return [text for text in texts if _returns(text, name_lhs, node, name)]


def _isolate(expression: Any, value: Any, symbol: Any) -> list[Any]:  # noqa: ANN401  sympy
    """Undo the operations around a symbol one by one, from the outside."""
    import sympy  # noqa: PLC0415  heavy

    answers = [value]
    while expression != symbol:
        inner = [part for part in expression.args if part.has(symbol)]
        if len(inner) != 1:
            return []
        if expression.is_Add or expression.is_Mul:
            rest = expression.func(*(part for part in expression.args if part is not inner[0]))
            undo = sympy.Add(value, -rest) if expression.is_Add else value / rest
            answers = [undo.subs(value, a) if a != value else undo for a in answers]
        elif expression.is_Pow and expression.base.has(symbol):
            answers = [root for a in answers for root in _roots(a, expression.exp)]
        elif expression.is_Pow:
            answers = [sympy.log(a) / sympy.log(expression.base) for a in answers]
        else:
            inverse = _inverse(expression)
            if inverse is None:
                return []
            answers = [root for a in answers for root in inverse(a)]
        expression = inner[0]
    return answers


def _roots(value: Any, exponent: Any) -> list[Any]:  # noqa: ANN401  sympy
    root = value ** (1 / exponent)
    return [root, -root] if exponent.is_Integer and exponent % 2 == 0 else [root]


def _inverse(expression: Any) -> Callable[[Any], list[Any]] | None:  # noqa: ANN401  sympy
    """Return what undoes a function of one value; abs has two answers."""
    import sympy  # noqa: PLC0415  heavy

    known = {
        sympy.exp: sympy.log,
        sympy.log: sympy.exp,
        sympy.sin: sympy.asin,
        sympy.cos: sympy.acos,
        sympy.tan: sympy.atan,
        sympy.asin: sympy.sin,
        sympy.acos: sympy.cos,
        sympy.atan: sympy.tan,
    }
    if expression.func is sympy.Abs:
        return lambda value: [value, -value]
    undo = known.get(expression.func)
    return None if undo is None else lambda value: [undo(value)]


def _polynomial(equation: Any, symbol: Any) -> list[Any]:  # noqa: ANN401  sympy
    """Solve an equation of degree 1 or 2 in the symbol."""
    import sympy  # noqa: PLC0415  heavy

    if not _short(equation):
        return []
    above, _ = sympy.fraction(sympy.together(equation))
    if not _short(above):
        return []
    above = sympy.expand(above)
    if not above.is_polynomial(symbol):
        return []
    factors = sympy.Poly(above, symbol).all_coeffs()
    if len(factors) == 2:  # noqa: PLR2004  a straight line
        return [-factors[1] / factors[0]]
    if len(factors) == 3:  # noqa: PLR2004  a parabola
        a, b, c = factors
        root = sympy.sqrt(b**2 - 4 * a * c)
        return [(-b + root) / (2 * a), (-b - root) / (2 * a)]
    return []


def _returns(text: str, name_lhs: str, node: Node, name: str) -> bool:
    """Whether an answer gives the left side back, at every sample where both have a value."""
    try:
        answer = parse(text)
    except FormulaError:
        return False
    others = [other for other in names(node) if other != name]
    good = 0
    for sample in _samples([*others, name]):
        forward = _value(node, sample)
        if forward is None:
            continue
        back = _value(answer, {**sample, name_lhs: forward})
        again = None if back is None else _value(node, {**sample, name: back})
        if again is not None:
            if not _close(again, forward):
                return False
            good += 1
    return good > 0


def same(a: Node, b: Node) -> bool | None:
    """Decide whether two formulas are equal wherever both have a value.

    Returns
    -------
    bool or None
        True where algebra shows it, False where a trial with numbers refutes it, None where
        neither does, as with columns, tables, choices and long formulas. Effort is bounded.
    """
    if a == b:
        return True
    if not (_scalar(a) and _scalar(b)):
        return None
    used = list(dict.fromkeys((*names(a), *names(b))))
    agreed = 0
    for sample in _samples(used):
        one, other = _value(a, sample), _value(b, sample)
        if one is None or other is None:
            continue
        if not _close(one, other) and _refuted(a, b, sample):
            return False
        agreed += 1
    return True if agreed >= _ENOUGH and _proven(a, b) else None


def _refuted(a: Node, b: Node, sample: Numbers) -> bool:
    """Whether two formulas differ with 40 digits too, where rounding cannot be the reason."""
    try:
        return not _close(evaluate(a, sample), evaluate(b, sample), 1e-20)
    except FormulaError:
        return False


def _scalar(node: Node) -> bool:
    """Whether a formula is a number that can be tried on plain numbers: no columns, no tables."""
    if isinstance(node, (Compare, Logic, Not)):
        return False
    for part in walk(node):
        if isinstance(part, Call) and part.function in _COLUMNS:
            return False
        if isinstance(part, Quoted):
            try:
                read_quantity(part.text)
            except QuantityError:
                return False
    return True


def _proven(a: Node, b: Node) -> bool:
    import sympy  # noqa: PLC0415  heavy

    try:
        difference = to_sympy(a) - to_sympy(b)
    except FormulaError:
        return False
    if difference == 0:
        return True
    if difference.has(sympy.Piecewise) or not _short(difference):
        return False
    above, _ = sympy.fraction(sympy.together(difference))
    return _vanishes(difference) or _vanishes(above) or _vanishes_by_angles(above)


def _vanishes(expression: Any) -> bool:  # noqa: ANN401  sympy
    return _short(expression) and bool(expression.expand() == 0)


def _vanishes_by_angles(expression: Any) -> bool:  # noqa: ANN401  sympy
    import sympy  # noqa: PLC0415  heavy

    whole = [abs(number) for number in expression.atoms(sympy.Integer)]
    long = expression.count_ops() > MAX_TRIGONOMETRY or max(whole, default=0) > MAX_MULTIPLE
    if long or not expression.has(sympy.sin, sympy.cos, sympy.tan):
        return False
    return bool(sympy.trigsimp(sympy.expand_trig(expression)) == 0)


def _short(expression: Any) -> bool:  # noqa: ANN401  sympy
    """Whether an expression may be multiplied out without running long."""
    if expression.count_ops() > MAX_OPERATIONS or len(expression.free_symbols) > MAX_SYMBOLS:
        return False
    return _terms(expression) <= MAX_TERMS


def _terms(expression: Any) -> float:  # noqa: ANN401  sympy
    """Return a bound on the terms of an expression multiplied out."""
    parts = [_terms(part) for part in expression.args]
    if expression.is_Add:
        return math.fsum(parts)
    if expression.is_Mul:
        return math.prod(parts)
    if expression.is_Pow and expression.exp.is_Integer:
        power = min(abs(int(expression.exp)), 50)  # 2**50 is long enough
        return min(parts[0], MAX_TERMS + 1.0) ** power
    return max(parts, default=1.0)


def _samples(used: Sequence[str]) -> Iterator[Numbers]:
    """Yield numbers for names: of both signs, over three powers of ten, always the same."""
    draw = random.Random(7)  # noqa: S311  the same numbers every time is what is wanted
    for count in range(_SAMPLES):
        signs = (1.0,) if count % 2 else (1.0, -1.0)
        yield {name: draw.choice(signs) * 10 ** draw.uniform(-1.5, 1.5) for name in used}


_SPACE = namespace(array=False)


def _value(node: Node, sample: Numbers) -> float | None:
    scope = {name: Type("number", DIMENSIONLESS, None) for name in sample}
    source = python_source(node, scope=scope, array=False)
    values = {f"v_{name}": value for name, value in sample.items()}
    try:
        found = eval(source, dict(_SPACE), values)  # noqa: S307  source made from a checked tree
    except (ArithmeticError, ValueError):
        return None
    return float(found) if math.isfinite(found) else None


def _close(one: float, other: float, floor: float = 0.0) -> bool:
    return abs(one - other) <= max(_TOLERANCE * max(abs(one), abs(other)), floor)
