from __future__ import annotations

import math
import re

import numpy as np
import pytest
from formula_trees import NAMES, SCOPE, computed, trees, values
from hypothesis import assume, given, settings

from calcbook.algebra import evaluate
from calcbook.compile import python_source
from calcbook.dimensions import Type
from calcbook.errors import FormulaError
from calcbook.formula import Node, parse
from calcbook.table import Axis, Table
from calcbook.units import DIMENSIONLESS, unit

PLAIN = Type("number", DIMENSIONLESS, None)
COLUMN = Type("number", DIMENSIONLESS, "floors")
TABLE = Table(
    "K", (Axis("z", unit("m"), (0.0, 10.0, 20.0)),), (1.0, 2.0, 4.0), unit(""), "refuse", ""
)
TWO_WAY = Table(
    "C",
    (Axis("x", unit(""), (0.0, 1.0)), Axis("y", unit("deg"), (0.0, 90.0))),
    ((0.0, 1.0), (2.0, 3.0)),
    unit("kPa"),
    "hold",
    "",
)
FIELD = {
    **dict.fromkeys(("a", "b", "c", "V"), PLAIN),
    **dict.fromkeys(("w", "z"), COLUMN),
    "roof": Type("text", None, None, ("gable", "flat")),
    "use": Type("text", None, "floors", ("office", "roof")),
    "K": Type("table", None, None, table=TABLE),
    "C": Type("table", None, None, table=TWO_WAY),
}


def source(text: str, *, array: bool = False, takes: dict[str, str] | None = None) -> str:
    """Return the source of a formula."""
    units = {name: unit(text) for name, text in (takes or {}).items()}
    return python_source(parse(text), scope=FIELD, array=array, takes=units)


def value(text: str, *, array: bool = False, **found: object) -> object:
    """Return the value of a formula."""
    known = {"K": TABLE, "C": TWO_WAY, **found}
    return computed(source(text, array=array), known, array=array)


def test_source_is_what_one_would_write() -> None:
    """The source has the fewest brackets, constants as floats, quantities in SI."""
    assert source("a*b/c") == "v_a*v_b/v_c"
    assert source("a*(b/c) - (a - (b - c))") == "v_a*(v_b/v_c)-(v_a-(v_b-v_c))"
    assert source("0.613*(a)*V**2") == "0.613*v_a*(v_V*v_V)"
    assert source("(-a)**3 - -b**-1") == "(-v_a)**3.0--v_b**-1.0"
    assert source("a + '4.5 kPa'") == "v_a+4500.0"
    assert source("a**2 * '-3 m'") == "v_a*v_a*-3.0"
    assert source("where(a < b <= c, a, b) + 1") == "(v_a if v_a < v_b and v_b <= v_c else v_b)+1.0"
    assert source("not (a > b or roof == 'flat') and c == 2") == (
        "not (v_a > v_b or v_roof == 'flat') and v_c == 2.0"
    )
    assert source("sqrt(a)", array=True) == source("sqrt(a)") == "f_sqrt(v_a)"


def test_units_of_a_formula_as_printed_are_divided_out() -> None:
    """A name in a formula as printed is divided by the factor of its unit."""
    assert source("a/b + a**2", takes={"a": "ft"}) == "v_a/0.3048/v_b+(v_a/0.3048)**2.0"
    assert source("b/a", takes={"a": "ft", "b": "m"}) == "v_b/(v_a/0.3048)"


@settings(max_examples=300, deadline=None)
@given(trees, values)
def test_three_ways_give_one_value(tree: Node, found: dict[str, float]) -> None:
    """Floats, arrays and sympy give the same value wherever single values have one."""
    single = python_source(tree, scope=SCOPE, array=False)
    many = python_source(tree, scope=SCOPE, array=True)
    arrays = {name: np.array([number, 1.0]) for name, number in found.items()}
    try:
        wide = computed(many, arrays, array=True)
        wide_value = float(np.broadcast_to(wide, (2,))[0])
    except ZeroDivisionError:  # between constants alone
        wide_value = math.nan
    try:
        once = computed(single, found)
    except (ArithmeticError, ValueError):
        # Arrays go through infinity where single values stop: 1/(1/0) is 0 there.
        return
    assert wide_value == pytest.approx(once, rel=1e-12)
    try:
        oracle = evaluate(tree, found)
        nearby = evaluate(tree, {name: v * (1 + 1e-13) + 1e-14 for name, v in found.items()})
    except FormulaError:
        assume(condition=False)
    assume(abs(nearby - oracle) <= 1e-10 * abs(oracle))
    assert once == pytest.approx(oracle, rel=1e-9, abs=1e-300)


@settings(max_examples=100, deadline=None)
@given(trees, values)
def test_source_reads_back_as_the_same_formula(tree: Node, found: dict[str, float]) -> None:
    """The source without conditional parts, read as a formula, has the same value exactly."""
    text = python_source(tree, scope=SCOPE, array=False)
    assume(" if " not in text and "f_power" not in text)
    again = parse(re.sub(r"\b[vf]_(?=\w)", "", text))
    assert python_source(again, scope=SCOPE, array=False) == text
    assert set(re.findall(r"v_(\w+)", text)) <= set(NAMES)
    assert found.keys() == set(NAMES)


@pytest.mark.parametrize(
    ("text", "error"),
    [
        ("1/a", ZeroDivisionError),
        ("a**-1", ZeroDivisionError),
        ("sqrt(a - 1)", ValueError),
        ("ln(a)", ValueError),
        ("(a - 8)**(1/3)", ValueError),
        ("(a - 8)**b", ValueError),
        ("acos(b + 2)", ValueError),
        ("exp(2000*b)", OverflowError),
        ("(1e200*b)**2", OverflowError),
        ("interpolate(K, '21 m' + a)", ValueError),
    ],
)
def test_what_has_no_value_is_raised_or_not_finite(text: str, error: type[Exception]) -> None:
    """One case raises where there is no value; many cases give nan or infinity in its place."""
    with pytest.raises(error):
        value(text, a=0.0, b=0.5)
    assert "f_power(" in source("(a - 8)**(1/3)")
    cases = value(text, array=True, a=np.array([0.0, 9.0]), b=np.array([0.5, 0.5]))
    assert not math.isfinite(np.asarray(cases)[0])


def test_where_leaves_the_other_branch_alone() -> None:
    """The branch that does not hold is not computed for a single value."""
    assert value("where(a == 0, b, b/a)", a=0.0, b=2.0) == 2.0
    found = value(
        "where(a == 0, b, b/a)", array=True, a=np.array([0.0, 4.0]), b=np.array([2.0, 2.0])
    )
    assert np.array_equal(found, [2.0, 0.5])


def test_a_missing_value_is_never_hidden() -> None:
    """The least and greatest of a value that is not a number are not numbers, in any order."""
    for text in ("min(a, b)", "min(b, a)", "max(a, b, c)", "max(c, b, a)", "min(b, a, c)"):
        assert math.isnan(value(text, a=math.nan, b=1.0, c=2.0))
        arrays = {"a": np.array([math.nan]), "b": np.array([1.0]), "c": np.array([2.0])}
        assert np.isnan(value(text, array=True, **arrays)).all()
    assert value("min(b, a, c)", a=3.0, b=1.0, c=2.0) == 1.0
    assert value("max(b, a, c)", a=3.0, b=1.0, c=2.0) == 3.0


W = np.array([3.0, 1.0, 2.0])
Z = np.array([9.0, 16.0, 25.0])
USE = np.array(["office", "roof", "office"], dtype=object)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("sum(w)", 6.0),
        ("min(w)", 1.0),
        ("max(w)", 3.0),
        ("running(w)", [3.0, 4.0, 6.0]),
        ("previous(w, a)", [10.0, 3.0, 1.0]),
        ("following(w, 0)", [1.0, 2.0, 0.0]),
        ("w*a + sqrt(z)", [33.0, 14.0, 25.0]),
        ("max(w, 2)", [3.0, 2.0, 2.0]),
        ("min(w, z, a)", [3.0, 1.0, 2.0]),
        ("where(w > 1, w, a)", [3.0, 10.0, 2.0]),
        ("where(use == 'roof', 0, w)", [3.0, 0.0, 2.0]),
        ("where(roof == 'flat', a, w)", [10.0, 10.0, 10.0]),
        ("where(1 < w < 3, 1, 0)", [0.0, 0.0, 1.0]),
        ("where(w > 1 and not use == 'roof' or w == 1, 1, 0)", [1.0, 1.0, 1.0]),
        ("interpolate(K, w)", [1.3, 1.1, 1.2]),
        ("w**0.5*w**0.5 + abs(-w) + floor(w/2) + ceil(w/2)", [9.0, 3.0, 6.0]),
        ("ln(exp(w)) + log10(10**w)", [6.0, 2.0, 4.0]),
        ("sum(where(w > a/5, w, 0))", 3.0),
    ],
)
def test_columns_are_computed_row_by_row(text: str, expected: object) -> None:
    """A column gives the same numbers for one case and for many."""
    once = value(text, w=W, z=Z, use=USE, roof="flat", a=10.0)
    assert np.allclose(np.broadcast_to(once, np.shape(expected)), expected, rtol=1e-12)
    assert isinstance(once, np.ndarray) == isinstance(expected, list)
    assert isinstance(expected, list) or type(once) is float
    cases = {"w": W[:, None] + np.zeros(4), "z": Z[:, None] + np.zeros(4)}
    many = value(
        text, array=True, use=USE[:, None], roof=np.array(["flat"] * 4), a=np.full(4, 10.0), **cases
    )
    rows = np.asarray(expected, dtype=float)
    assert np.allclose(np.broadcast_to(many, (*rows.shape, 4)), rows[..., None], rtol=1e-12)


def test_a_column_outside_its_table_is_not_a_number_in_its_row_only() -> None:
    """Rows outside a table that refuses have no value, the others have theirs."""
    found = value("interpolate(K, w*z)", w=W, z=Z)
    assert np.array_equal(np.isnan(found), [True, False, True])


def test_tables_are_read_in_si() -> None:
    """A two-way table is read with SI values and gives SI values."""
    assert value("interpolate(C, a, '45 deg')", a=0.5) == pytest.approx(1500.0)


def test_columns_without_rows_have_an_empty_sum() -> None:
    """An empty schedule adds up to nothing, and has no largest row."""
    empty = np.array([])
    assert value("sum(w)", w=empty) == 0.0
    assert len(value("previous(w, a)", w=empty, a=1.0)) == 0  # type: ignore[arg-type]
    with pytest.raises(ValueError, match="zero-size"):
        value("max(w)", w=empty)


def test_a_running_sum_ends_in_the_sum() -> None:
    """The last running sum and the sum are the same number, to the last bit."""
    column = np.array([0.1, 0.2, 0.3, 1e9, 0.7, 1e-7] * 30)
    assert value("running(w)", w=column)[-1] == value("sum(w)", w=column)  # type: ignore[index]


@pytest.mark.parametrize(
    ("text", "below", "at", "above"),
    [
        ("theta >= '10 deg'", False, True, True),
        ("theta > '10 deg'", False, False, True),
        ("theta <= '10 deg'", True, True, False),
        ("theta < '10 deg'", True, False, False),
        ("'10 deg' <= theta", False, True, True),
        ("'10 deg' > theta", True, False, False),
    ],
)
def test_a_stated_threshold_gives_way_by_the_last_bits(
    text: str, below: bool, at: bool, above: bool
) -> None:
    """A value that is the threshold but for rounding counts as being at it."""
    ten = math.radians(10)
    for array in (False, True):
        read = [value(text, array=array, theta=t) for t in (ten * (1 - 1e-6), ten * (1 + 1e-6))]
        assert [bool(r) for r in read] == [below, above]
        for near in (ten * (1 - 1e-13), ten, ten * (1 + 1e-13)):
            assert bool(value(text, array=array, theta=near)) is at
