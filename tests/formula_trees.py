"""Random formulas for the tests of reading, computing, printing and algebra."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from hypothesis import strategies as st

from calcbook.compile import namespace
from calcbook.dimensions import Type
from calcbook.formula import (
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
)
from calcbook.units import DIMENSIONLESS

if TYPE_CHECKING:
    from collections.abc import Mapping

NAMES = ("a", "b2", "K_zt", "rho", "GC_pi", "p_wall_lee", "width")
SCOPE = {name: Type("number", DIMENSIONLESS, None) for name in NAMES}

_numbers = st.sampled_from(["2", "0.613", "1.20", "3.", ".5", "1.5e2", "7e-3"]).map(
    lambda text: Number(text, float(text))
)
_names = st.sampled_from(NAMES).map(Name)
_leaves = st.one_of(_names, _names, _numbers)
_relations = st.sampled_from(["<", "<=", ">", ">=", "==", "!="])
_exponents: st.SearchStrategy[Node] = st.one_of(
    st.sampled_from(["2", "3", "1", "0.5", "0.38"]).map(lambda text: Number(text, float(text))),
    st.just(Binary("/", Number("2", 2.0), Number("9.5", 9.5))),
)


@st.composite
def conditions(draw: st.DrawFn, leaves: st.SearchStrategy[Node] = _leaves) -> Node:
    """Comparisons, chained or joined; of plain leaves, so that rounding decides none."""
    rest = draw(st.lists(st.tuples(_relations, leaves), min_size=1, max_size=2))
    simple: Node = Compare(draw(leaves), tuple(rest))
    form = draw(st.sampled_from(["simple", "not", "and", "or"]))
    if form == "simple":
        return simple
    if form == "not":
        return Not(simple)
    other = Compare(draw(leaves), ((draw(_relations), draw(leaves)),))
    return Logic(form, (simple, draw(st.sampled_from([other, Not(other)]))))


def _grow(inner: st.SearchStrategy[Node]) -> st.SearchStrategy[Node]:
    return st.one_of(
        st.builds(Binary, st.sampled_from("+-*/*/"), inner, inner),
        st.builds(lambda base, power: Binary("**", base, power), inner, _exponents),
        st.builds(
            lambda base, power: Binary("**", base, Negative(power)), inner, _exponents
        ),
        st.builds(Negative, inner),
        st.builds(lambda x: Call("sqrt", (Call("abs", (x,)),)), inner),
        st.builds(lambda x: Call("abs", (x,)), inner),
        st.builds(lambda x: Call("atan", (x,)), inner).map(
            lambda node: Binary("/", node, Quoted("1 rad"))
        ),
        st.builds(lambda f, x: Call(f, tuple(x)), st.sampled_from(["min", "max"]),
                  st.lists(inner, min_size=2, max_size=3)),
        st.builds(lambda c, x, y: Call("where", (c, x, y)), conditions(), inner, inner),
    )  # fmt: skip


trees = st.recursive(_leaves, _grow, max_leaves=12)
#: Without bars, units and cases, whose one-line print is not read back.
linear_trees = st.recursive(
    _leaves,
    lambda inner: st.one_of(
        st.builds(Binary, st.sampled_from("+-*/*/"), inner, inner),
        st.builds(lambda base, power: Binary("**", base, power), inner, _exponents),
        st.builds(lambda base, power: Binary("**", base, Negative(power)), inner, _exponents),
        st.builds(Negative, inner),
        st.builds(lambda x: Call("exp", (x,)), inner),
    ),
    max_leaves=10,
)
values = st.fixed_dictionaries(
    {name: st.sampled_from([-3.0, -0.7, 0.0, 0.85, 1.25, 2.0, 70.0]) for name in NAMES}
)


def bracketed(node: Node) -> str:  # noqa: PLR0911  one case per kind of node
    """Return the text of a tree in the formula language, with brackets everywhere."""
    match node:
        case Number(text=text):
            return text
        case Quoted(text=text):
            return f"'{text}'"
        case Name(name=name):
            return name
        case Negative(operand=operand):
            return f"(-{bracketed(operand)})"
        case Binary(op=op, left=left, right=right):
            return f"({bracketed(left)} {op} {bracketed(right)})"
        case Call(function=function, args=args):
            return f"{function}({', '.join(bracketed(arg) for arg in args)})"
        case Compare(first=first, rest=rest):
            chain = "".join(f" {op} {bracketed(part)}" for op, part in rest)
            return f"({bracketed(first)}{chain})"
        case Logic(op=op, parts=parts):
            return "(" + f" {op} ".join(bracketed(part) for part in parts) + ")"
        case Not(operand=operand):
            return f"(not {bracketed(operand)})"


def computed(source: str, found: Mapping[str, object], *, array: bool = False) -> Any:
    """Return what compiled source gives for the values of its names."""
    values_ = {f"v_{name}": value for name, value in found.items()}
    with np.errstate(all="ignore"):
        return eval(source, namespace(array=array), values_)  # noqa: S307  made from a tree
