from __future__ import annotations

import math
import subprocess
import sys
import time

import pytest
from formula_trees import SCOPE, bracketed, computed, linear_trees, trees, values
from hypothesis import assume, given, settings

from calcbook.algebra import derivative, evaluate, same, solve_for, text_of, to_sympy
from calcbook.compile import python_source
from calcbook.errors import FormulaError
from calcbook.formula import Node, parse


def value(text: str, **found: float) -> float:
    """Return the value of a formula on floats."""
    return float(computed(python_source(parse(text), scope={}, array=False), found))


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("0.613*K*V**2", 0.613 * 0.85 * 70**2),
        ("where(V > 50 and roof == 'gable', min(K, 1), max(K, 2))", 0.85),
        ("where(roof != 'gable' or not V >= 50, 1, 2)", 2.0),
        ("abs(-V) + floor(K) + ceil(K)", 71.0),
        ("interpolate(T, V, K)", 70.85),
        ("sin('30 deg') + cos('60 deg') + tan('45 deg')", 2.0),
        ("(asin(0.5) + acos(0.5) + atan(1))/'1 rad'", math.pi * 0.75),
        ("ln(exp(2)) + log10(1000) + sqrt(16)", 9.0),
        ("'1 ft'/'12 in' + '5 %'", 1.05),
        ("2**-0.5*2**0.5", 1.0),
    ],
)
def test_sympy_evaluates_every_form(text: str, expected: float) -> None:
    """The second way to a value knows every form and function for single values."""
    found = {"K": 0.85, "V": 70.0, "roof": "gable", "T": lambda x, y: x + y}
    assert evaluate(parse(text), found) == pytest.approx(expected, rel=1e-12)


def test_conditions_are_evaluated_to_truth() -> None:
    """A condition gives True or False, a chain holds where all of it holds."""
    assert evaluate(parse("1 < a <= 2"), {"a": 2.0}) is True
    assert evaluate(parse("not 1 < a <= 2 or roof == 'flat'"), {"a": 2.0, "roof": "gable"}) is False


@pytest.mark.parametrize(
    "text",
    [
        "1/(a - 1)",
        "ln(a - 1)",
        "(a - 2)**0.5",
        "acos(a + 1)",
        "min(1, (a - 2)**0.5)",
        "where(sqrt(a - 2) > 1, 1, 2)",
    ],
)
def test_without_a_real_value_the_oracle_says_so(text: str) -> None:
    """Division by zero, and functions outside their range, have no value."""
    with pytest.raises(FormulaError, match="no real value"):
        evaluate(parse(text), {"a": 1.0})


@pytest.mark.parametrize("text", ["sum(w)", "max(w)", "running(w)", "previous(w, 0)"])
def test_columns_are_not_for_algebra(text: str) -> None:
    """Functions that gather a column are refused by name."""
    with pytest.raises(FormulaError, match="column"):
        to_sympy(parse(text))
    with pytest.raises(FormulaError, match="table"):
        to_sympy(parse("interpolate(K, z)"))


# --- derivatives ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("0.613*K*V**2", "V"),
        ("K*(0.25 + '4.57 m'/sqrt(V*K))", "V"),
        ("max(V, K**2) + min(V*K, 3) + abs(K - V)", "V"),
        ("where(V < 2, V**3, 12*V)", "V"),
        ("exp(-V)*ln(V) + log10(V)", "V"),
        ("sin(V) + cos(V)*tan(V) + atan(V)", "V"),
        ("V**0.38 - V**-1", "V"),
        ("asin(V/10) + acos(V/10)", "V"),
        ("K**2", "V"),
    ],
)
def test_derivatives_agree_with_differences(text: str, name: str) -> None:
    """A derivative, read as a formula, is what central differences give."""
    slope = derivative(parse(text), name)
    parse(slope)
    for point in ({"V": 1.3, "K": 0.85}, {"V": 4.1, "K": 2.3}):
        step = 1e-6
        up, down = ({**point, name: point[name] + s} for s in (step, -step))
        expected = (value(text, **up) - value(text, **down)) / (2 * step)
        assert value(slope, **point) == pytest.approx(expected, rel=1e-7, abs=1e-7)


def test_a_derivative_keeps_numbers_as_typed() -> None:
    """Decimals and quantities come back as they were typed."""
    assert derivative(parse("0.50*'4.57 m'*V"), "V") == "'4.57 m'*0.50"
    assert derivative(parse("0.613*K*V**2"), "V") == "2*0.613*K*V"


@pytest.mark.parametrize("text", ["floor(x)", "ceil(x)", "sum(x)", "interpolate(T, x)"])
def test_what_has_no_derivative_is_refused(text: str) -> None:
    """Steps, columns and tables have no derivative as a formula."""
    with pytest.raises(FormulaError, match="no derivative"):
        derivative(parse(text), "x")


# --- rearranging ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("line", "text", "name", "expected"),
    [
        ("q", "0.613*K_z*V**2", "K_z", ["q/(0.613*V**2)"]),
        ("M", "w*L**2/8", "w", ["8*M/L**2"]),
        ("q", "a - b/x", "x", ["-b/(-a + q)"]),
        ("y", "2*x + 3*x", "x", ["y/5"]),
        ("y", "x/(1 + x)", "x", ["y/(1 - y)"]),
        ("y", "exp(-g*z)", "z", ["-ln(y)/g"]),
        ("y", "2**x", "x", ["ln(y)/ln(2)"]),
        ("y", "abs(x - 2)", "x", ["y + 2", "2 - y"]),
        ("t", "atan(h/b)", "h", ["b*tan(t)"]),
        ("y", "x**3", "x", ["y**(1/3)"]),
        ("y", "'2 m'*x", "x", ["y/'2 m'"]),
    ],
)
def test_a_line_is_rearranged(line: str, text: str, name: str, expected: list[str]) -> None:
    """A name that stands once, or in a polynomial, is isolated; numbers stay as typed."""
    assert solve_for(line, parse(text), name) == expected


@pytest.mark.parametrize(
    ("line", "text", "name", "count"),
    [
        ("q", "0.613*K_z*V**2", "V", 2),
        ("L", "L_o*(0.25 + '4.57 m'/sqrt(K*A))", "A", 1),
        ("T", "0.0488*h**0.75", "h", 1),
        ("y", "a*x**2 + b*x", "x", 2),
        ("y", "(x + a)**2 + c", "x", 2),
        ("y", "sin(x)", "x", 1),
        ("y", "log10(x)", "x", 1),
        ("y", "1/x**2", "x", 2),
    ],
)
def test_a_rearranged_line_gives_its_value_back(
    line: str, text: str, name: str, count: int
) -> None:
    """Putting an answer into the line gives the left side again."""
    answers = solve_for(line, parse(text), name)
    assert len(answers) == count
    others = {other: 0.3 + 0.1 * k for k, other in enumerate(("K_z", "L_o", "K", "a", "b", "c"))}
    forward = value(text, **{**others, name: 0.7})
    backs = [value(answer, **{**others, line: forward}) for answer in answers]
    assert all(
        value(text, **{**others, name: back}) == pytest.approx(forward, rel=1e-9) for back in backs
    )
    assert any(back == pytest.approx(0.7, rel=1e-9) for back in backs)


@pytest.mark.parametrize(
    ("line", "text", "name"),
    [
        ("y", "sin(x) + x", "x"),
        ("y", "max(x, 2)", "x"),
        ("y", "floor(x)", "x"),
        ("y", "sum(x)", "x"),
        ("y", "where(a < b, x, y)", "x"),
        ("y", "a + b", "x"),
        ("y", "x + y", "x"),
        ("x", "2*a", "x"),
        ("y", "x**5 + x", "x"),
        ("y", "x - x + a", "x"),
    ],
)
def test_what_cannot_be_rearranged_is_left_alone(line: str, text: str, name: str) -> None:
    """No answer is given where none can be found or tried."""
    assert solve_for(line, parse(text), name) == []


# --- equal or not ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("one", "other", "verdict"),
    [
        ("(a + b)**2", "a**2 + 2*a*b + b**2", True),
        ("w*L**2/8", "0.125*L*w*L", True),
        ("a/b/c", "a/(b*c)", True),
        ("x**0.5", "sqrt(x)", True),
        ("sqrt(x**2)", "abs(x)", True),
        ("sqrt(x**2)", "x", False),
        ("'4.57 m'*a", "a*'457 cm'", True),
        ("sin(x)**2 + cos(x)**2", "1", True),
        ("a + b - a - b", "0", True),
        ("(a + b)**8 - a**8", "b*(2*a + b)*(a**2 + (a + b)**2)*(a**4 + (a + b)**4)", True),
        ("a + b", "a - b", False),
        ("1e-12*a", "0", False),
        ("1.2*D + 1.6*L", "1.6*D + 1.2*L", False),
        ("where(x > 1000, 1, 2)", "2", None),
        ("sum(w)", "sum(v)", None),
        ("sum(w)", "sum(w)", True),
        ("where(roof == 'gable', a, b)", "where(roof != 'gable', b, a)", None),
        ("a > b", "b < a", None),
        ("1/0", "a", None),
        ("min(a, (-2)**0.5)", "a", None),
    ],
)
def test_equality_is_yes_no_or_not_decided(one: str, other: str, verdict: bool | None) -> None:
    """Algebra proves, numbers refute, and what neither does is not decided."""
    assert same(parse(one), parse(other)) is verdict
    assert same(parse(other), parse(one)) is verdict


def test_equality_never_runs_long() -> None:
    """Formulas that would grow without end when multiplied out are given up at once."""
    sums = "+".join(f"a{k}" for k in range(11))
    long = "d*((c + b + a)**12 + d)**11 + (c + b + a)**12*((c + b + a)**12 + d)**11"
    fractions = [f"1/(a{k}*x + {k})" for k in range(1, 40)]
    hard = [
        ("((a + b + c)**12 + d)**12", long),
        (f"({sums})**40*x", f"x*({sums})**39*({sums} + 0*x)"),
        ("sin(10000000*x)*cos(x) + cos(10000000*x)*sin(x)", "sin(10000001*x)"),
        ("+".join(fractions), "+".join([*reversed(fractions), "0*x"])),
    ]
    start = time.perf_counter()
    for one, other in hard:
        assert same(parse(one), parse(other)) is not False
    assert time.perf_counter() - start < 10


@settings(max_examples=60, deadline=None)
@given(linear_trees, linear_trees)
def test_a_sum_is_the_same_the_other_way_round(one: Node, other: Node) -> None:
    """Two formulas added in either order are never told apart."""
    forward = parse(f"{bracketed(one)} + {bracketed(other)}")
    back = parse(f"{bracketed(other)} + {bracketed(one)}")
    assert same(forward, back) is not False


@settings(max_examples=60, deadline=None)
@given(trees, values)
def test_sympy_and_back_keeps_the_value(tree: Node, found: dict[str, float]) -> None:
    """A formula that goes into sympy as symbols and comes back has the same value."""
    try:
        again = text_of(to_sympy(tree, symbolic=True))
        expected = computed(python_source(tree, scope=SCOPE, array=False), found)
        value_again = computed(python_source(parse(again), scope=SCOPE, array=False), found)
    except (ArithmeticError, ValueError):  # no value, or a form our language has no words for
        assume(condition=False)
        raise
    assume(abs(expected) > 1e-6)
    assert value_again == pytest.approx(expected, rel=1e-6)


def test_sympy_is_imported_only_when_needed() -> None:
    """Importing the algebra does not import sympy."""
    code = "import calcbook.algebra, calcbook.typeset, sys; print('sympy' in sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "False"
