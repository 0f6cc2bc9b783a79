"""Formula text read into a tree: a small whitelist of Python's expressions, nothing evaluated.

Text is read by `ast`, then copied node by node into our own frozen classes. Whatever is not on the
list is refused with the place in the text and what to write instead. Units and values are not
known here: `dimensions` checks a tree, `compile` turns it into Python source.
"""

from __future__ import annotations

import ast
import math
import re
from functools import lru_cache
from typing import NoReturn

from calcbook.errors import FormulaError, near_match
from calcbook.spelling import (
    EQUALS,
    MAX_DEPTH,
    check_brackets,
    check_characters,
    check_name,
    check_numbers,
    refuse_syntax,
    too_deep,
    without_quotes,
)
from calcbook.tree import (
    FUNCTIONS,
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
    children,
    names,
    walk,
)

__all__ = [
    "FUNCTIONS",
    "Binary",
    "Call",
    "Compare",
    "Logic",
    "Name",
    "Negative",
    "Node",
    "Not",
    "Number",
    "Quoted",
    "children",
    "names",
    "parse",
    "split_definition",
    "walk",
]

MAX_EXPONENT = 100.0
_NOTHING = ("this is not part of a formula", "use + - * / ** and the functions of the list")

_BINARY: dict[type[ast.operator], str] = {
    ast.Add: "+",
    ast.Sub: "-",
    ast.Mult: "*",
    ast.Div: "/",
    ast.Pow: "**",
}
_COMPARE: dict[type[ast.cmpop], str] = {
    ast.Lt: "<",
    ast.LtE: "<=",
    ast.Gt: ">",
    ast.GtE: ">=",
    ast.Eq: "==",
    ast.NotEq: "!=",
}
_NO_OPERATOR: dict[type[ast.AST], tuple[str, str]] = {
    ast.BitXor: ("'^' is not a power here", "powers are written **, for example V**2"),
    ast.FloorDiv: ("'//' is not part of a formula", "write floor(a/b)"),
    ast.Mod: ("'%' is not part of a formula", "a percentage is a quantity: write '5 %'"),
    ast.MatMult: ("'@' is not part of a formula", "write * to multiply"),
    ast.BitAnd: ("'&' is not part of a formula", "conditions are joined with: and"),
    ast.BitOr: ("'|' is not part of a formula", "conditions are joined with: or"),
    ast.LShift: ("'<<' is not part of a formula", "comparisons are < <= > >= == !="),
    ast.RShift: ("'>>' is not part of a formula", "comparisons are < <= > >= == !="),
    ast.Invert: ("'~' is not part of a formula", "write: not condition"),
    ast.UAdd: ("a leading '+' says nothing", "leave it out"),
    ast.In: ("'in' is not part of a formula", "write: a == 'x' or a == 'y'"),
    ast.NotIn: ("'not in' is not part of a formula", "write: a != 'x' and a != 'y'"),
    ast.Is: ("'is' is not part of a formula", "equality is written =="),
    ast.IsNot: ("'is not' is not part of a formula", "inequality is written !="),
}
_NO_FORM: dict[type[ast.AST], tuple[str, str]] = {
    ast.Attribute: ("a dot after a name is not part of a formula", "names are plain: K_z, p_net"),
    ast.Subscript: ("square brackets are not part of a formula", "name the value on its own line"),
    ast.Lambda: ("lambda is not part of a formula", "write the expression itself"),
    ast.IfExp: ("'a if b else c' is not part of a formula", "write where(condition, a, b)"),
    ast.NamedExpr: ("':=' is not part of a formula", "give each value a line of its own"),
    ast.JoinedStr: ("a text with f before it is not part of a formula", "write '4.6 m'"),
    ast.Tuple: (
        "a comma stands outside a function",
        "decimals are written with a point: 1.5; several values belong in min(), max()",
    ),
    ast.Starred: ("'*' before a value is not part of a formula", "write the values one by one"),
    **dict.fromkeys(
        (ast.List, ast.ListComp, ast.Set, ast.SetComp, ast.Dict, ast.DictComp, ast.GeneratorExp),
        ("lists are not part of a formula", "use the columns of a schedule: sum(w)"),
    ),
}
_NUMBER = re.compile(r"(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")


@lru_cache(maxsize=4096)
def parse(text: str) -> Node:
    """Read the text of a formula or condition into a tree.

    Parameters
    ----------
    text
        ASCII text of at most 2000 characters.

    Raises
    ------
    FormulaError
        For anything outside the language, with the place in the text and what to write instead.
    """
    check_characters(text)
    flat = re.sub(r"[\t\r\n]", " ", text)
    check_brackets(text, flat)
    check_numbers(text, flat)
    lead = len(flat) - len(flat.lstrip())
    try:
        tree = ast.parse(flat.lstrip(), mode="eval")
    except SyntaxError as error:
        refuse_syntax(text, flat, lead + max(0, (error.offset or 1) - 1))
    except (RecursionError, MemoryError, ValueError):
        raise too_deep(text, None) from None
    return _Reader(text, flat, lead).node(tree.body, 1)


def split_definition(text: str) -> tuple[str, str]:
    """Split ``p = q*G`` at its '=' into the name and the text of the expression.

    Raises
    ------
    FormulaError
        No '=', more than one, or a left side that cannot be a name.
    """
    check_characters(text)
    signs = list(EQUALS.finditer(without_quotes(text)))
    if not signs:
        raise FormulaError(
            "this line has no '='", hint="write: name = expression, as in p = q*G", text=text
        )
    if len(signs) > 1:
        raise FormulaError(
            "this line has a second '='",
            hint="one line gives one name; to compare, write ==",
            text=text,
            span=signs[1].span(),
        )
    left, right = text[: signs[0].start()], text[signs[0].end() :]
    name = left.strip()
    start = len(left) - len(left.lstrip())
    check_name(name, text, (start, start + max(1, len(name))))
    if not right.strip():
        raise FormulaError(
            "nothing stands after the '='",
            hint=f"write: {name} = expression",
            text=text,
            span=signs[0].span(),
        )
    return name, right.strip()


class _Reader:
    """Copies Python's tree into ours and refuses what is not on the list."""

    def __init__(self, text: str, flat: str, lead: int) -> None:
        self.text = text
        self.flat = flat
        self.lead = lead

    def node(self, found: ast.expr, depth: int) -> Node:  # noqa: C901, PLR0911  one case per form
        span = self.span(found)
        if depth > MAX_DEPTH:
            raise too_deep(self.text, span)
        deeper = depth + 1
        match found:
            case ast.Constant():
                return self.constant(found, span)
            case ast.Name(id=name):
                check_name(name, self.text, span)
                return Name(name, span=span)
            case ast.UnaryOp(op=ast.USub(), operand=operand):
                return Negative(self.node(operand, deeper), span=span)
            case ast.UnaryOp(op=ast.Not(), operand=operand):
                return Not(self.node(operand, deeper), span=span)
            case ast.UnaryOp(op=op):
                self.refuse(*_NO_OPERATOR[type(op)], (span[0], span[0] + 1))
            case ast.BinOp():
                return self.binary(found, deeper)
            case ast.BoolOp(op=op, values=values):
                word = "and" if isinstance(op, ast.And) else "or"
                return Logic(word, tuple(self.node(part, deeper) for part in values), span=span)
            case ast.Compare():
                return self.compare(found, deeper)
            case ast.Call():
                return self.call(found, deeper)
        return self.refuse(*_NO_FORM.get(type(found), _NOTHING), span)

    def span(self, found: ast.expr) -> tuple[int, int]:
        end = found.end_col_offset or found.col_offset + 1
        return (found.col_offset + self.lead, end + self.lead)

    def refuse(self, what: str, hint: str, span: tuple[int, int]) -> NoReturn:
        raise FormulaError(what, hint=hint, text=self.text, span=span)

    def constant(self, found: ast.Constant, span: tuple[int, int]) -> Node:
        typed = self.flat[span[0] : span[1]]
        if isinstance(found.value, str):
            return self.quoted(typed, found.value, span)
        if isinstance(found.value, bytes):
            self.refuse("a text with b before it is not part of a formula", "write '4.6 m'", span)
        if not _NUMBER.fullmatch(typed):
            self.refuse(
                f"'{typed}' is not a number of a formula",
                "numbers are written like 2, 2.50 or 1.2e3",
                span,
            )
        value = float(typed)
        if not math.isfinite(value):
            self.refuse("this number is too large", "write it smaller, like 1.2e3", span)
        return Number(typed, value, span=span)

    def quoted(self, typed: str, value: str, span: tuple[int, int]) -> Quoted:
        if typed[1:-1] != value or typed[0] not in "'\"":
            hint = "a quantity is quoted once, plainly: '4.6 m'"
            self.refuse("a quoted text is written in one plain piece", hint, span)
        if not value.strip():
            self.refuse("nothing stands between the quotes", "write a quantity: '4.6 m'", span)
        return Quoted(value, span=span)

    def binary(self, found: ast.BinOp, depth: int) -> Binary:
        left, right = self.node(found.left, depth), self.node(found.right, depth)
        op = _BINARY.get(type(found.op))
        if op is None:
            between = self.flat[left.span[1] : right.span[0]]
            at = left.span[1] + len(between) - len(between.lstrip(" )"))
            self.refuse(*_NO_OPERATOR[type(found.op)], (at, at + 1))
        if op == "**":
            self.check_power(right)
        return Binary(op, left, right, span=self.span(found))

    def check_power(self, exponent: Node) -> None:
        inner = exponent.operand if isinstance(exponent, Negative) else exponent
        if isinstance(inner, Binary) and inner.op == "**":
            hint = "give the exponent a line of its own"
            self.refuse("a power stands in the exponent of a power", hint, exponent.span)
        if isinstance(inner, Number) and inner.value > MAX_EXPONENT:
            hint = f"exponents go up to {MAX_EXPONENT:g}"
            self.refuse(f"the exponent {inner.text} is too large", hint, exponent.span)

    def compare(self, found: ast.Compare, depth: int) -> Compare:
        first = self.node(found.left, depth)
        rest: list[tuple[str, Node]] = []
        for op, part in zip(found.ops, found.comparators, strict=True):
            if type(op) not in _COMPARE:
                self.refuse(*_NO_OPERATOR[type(op)], self.span(found))
            rest.append((_COMPARE[type(op)], self.node(part, depth)))
        return Compare(first, tuple(rest), span=self.span(found))

    def call(self, found: ast.Call, depth: int) -> Call:
        span = self.span(found)
        if not isinstance(found.func, ast.Name):
            if type(found.func) in _NO_FORM:
                self.refuse(*_NO_FORM[type(found.func)], self.span(found.func))
            self.refuse("a bracket follows a value", "write * to multiply", self.span(found.func))
        name = found.func.id
        if name not in FUNCTIONS:
            hint = near_match(name, FUNCTIONS) or f"the functions are {', '.join(FUNCTIONS)}"
            self.refuse(f"there is no function '{name}'", hint, self.span(found.func))
        if found.keywords:
            word = found.keywords[0]
            at = (word.col_offset + self.lead, (word.end_col_offset or 0) + self.lead)
            self.refuse("'=' inside a function", f"write the values in order: {name}(a, b)", at)
        self.check_count(name, len(found.args), span)
        return Call(name, tuple(self.node(part, depth) for part in found.args), span=span)

    def check_count(self, name: str, count: int, span: tuple[int, int]) -> None:
        least, most = FUNCTIONS[name]
        if least <= count and (most is None or count <= most):
            return
        several = "1 or more" if most is None else " or ".join(map(str, sorted({least, most})))
        several += " value" if most == 1 else " values"
        examples = {
            "where": "where(condition, a, b)",
            "interpolate": "interpolate(table, x) or interpolate(table, x, y)",
            "previous": "previous(column, first)",
            "following": "following(column, last)",
        }
        hint = f"write {examples.get(name, f'{name}(a)')}"
        self.refuse(f"{name}() takes {several}, not {count}", hint, span)
