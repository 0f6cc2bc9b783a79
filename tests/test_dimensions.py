from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from formula_trees import computed
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from calcbook.compile import python_source
from calcbook.dimensions import Type, check, check_printed
from calcbook.errors import DimensionError, FormulaError
from calcbook.formula import parse
from calcbook.table import Axis, Table
from calcbook.units import DIMENSIONLESS, dimension_name, unit

if TYPE_CHECKING:
    from calcbook.units import Dimension


def number(text: str, rows: str | None = None) -> Type:
    """Return the type of a number in a unit."""
    return Type("number", unit(text).dimension, rows)


TABLE = Table("K_z", (Axis("z", unit("m"), (0.0, 10.0)),), (0.5, 1.0), unit(""), "hold", "")
SCOPE = {
    "q": number("Pa"),
    "h": number("m"),
    "n": number(""),
    "t": number("rad"),
    "w": number("kN/m", "floors"),
    "z": number("m", "floors"),
    "use": Type("text", None, "floors", ("office", "roof")),
    "x": number("m", "walls"),
    "roof": Type("text", None, None, ("gable", "flat")),
    "title": Type("text", None, None),
    "K": Type("table", None, None, table=TABLE),
}


def found(text: str) -> Type:
    """Return the type of a formula in the scope of these tests."""
    return check(parse(text), SCOPE, text)


#: text, the part under the caret, words of the message, words of the hint
REFUSED = [
    ("q + h", "h", "cannot add pressure and length", "same kind"),
    ("q - h", "h", "cannot subtract length from pressure", ""),
    ("q + h*n", "h*n", "cannot add pressure and length", ""),
    ("q + 0", "0", "plain number", "'0 kPa'"),
    ("0 + h", "0", "cannot add", "'0 m'"),
    ("h > 0", "0", "cannot compare length with plain number", "write '0 m'"),
    ("0.50 < h", "0.50", "cannot compare", "write '0.50 m'"),
    ("q == h", "h", "cannot compare pressure with length", ""),
    ("h < '5 m' < q", "q", "cannot compare length with pressure", ""),
    ("min(q, h)", "h", "min() needs one kind of quantity", "same kind"),
    ("max(h, '1 m', 0)", "0", "max() needs one kind", "'0 m'"),
    ("where(h > '0 m', q, h)", "h", "where() needs one kind", ""),
    ("where(q, h, h)", "q", "starts with a condition", "where(condition, a, b)"),
    ("n**h", "h", "exponent cannot be a length", "divide"),
    ("h**n", "n", "a length needs an exponent in figures", ""),
    ("sin(n)", "n", "takes an angle, not a plain number", "'1 rad'"),
    ("sin(30)", "30", "takes an angle", "'30 deg'"),
    ("1 - t/70", "1", "cannot subtract angle from plain number", "x/'1 deg'"),
    ("exp(h)", "h", "exp() takes a plain number, not a length", "exp(x/'1 m')"),
    ("floor(h)", "h", "floor() takes a plain number", "floor(x/'1 m')"),
    ("acos(t)", "t", "acos() takes a plain number, not an angle", ""),
    ("roof + 1", "roof", "needs a number, and this is a choice", "roof == 'gable'"),
    ("-roof", "roof", "needs a number", ""),
    ("roof == 'gabel'", "'gabel'", "no option 'gabel'", "did you mean 'gable'?"),
    ("'hip' != roof", "'hip'", "no option 'hip'", "'gable', 'flat'"),
    ("use == 'attic'", "'attic'", "no option 'attic'", "'office', 'roof'"),
    ("roof == q", "q", "cannot compare a choice with a pressure", "'gable' or 'flat'"),
    ("roof < 'gable'", "'gable'", "no order", "== or !="),
    ("(q > '0 Pa') + 1", "q > '0 Pa'", "this is a condition", "where(condition, a, b)"),
    ("(q > '0 Pa') > (q < '1 Pa')", "q > '0 Pa'", "cannot compare condition", "and, or, not"),
    ("not h", "h", "'not' joins conditions", "comparison"),
    ("roof == 'flat' and n", "n", "'and' joins conditions", ""),
    ("w*x", "x", "'floors' and of 'walls' have different rows", "sum()"),
    ("where(x > '1 m', w, w)", "w", "different rows", ""),
    ("min(q)", "q", "gathers the rows of a column", "column"),
    ("sum(h)", "h", "gathers the rows", ""),
    ("running(h)", "h", "gathers the rows", ""),
    ("previous(h, '0 m')", "h", "gathers the rows", ""),
    ("previous(z, z)", "z", "ends in a single value", ""),
    ("following(z, 0)", "0", "following() needs one kind", "'0 m'"),
    ("K*2", "K", "this is a table", "interpolate(table, x)"),
    ("interpolate(h, h)", "h", "starts with a table", ""),
    ("interpolate(K, q)", "q", "read with a length (z), not a pressure", ""),
    ("interpolate(K, h, h)", "interpolate(K, h, h)", "1 ways in, not 2", ""),
    ("q*hh", "hh", "no value 'hh'", "did you mean 'h'?"),
    ("q*zeta", "zeta", "no value 'zeta'", "declare it above"),
    ("h + '5'", "'5'", "a plain number is not quoted", "write 5"),
    ("h + '5 foo'", "foo", "no unit 'foo'", ""),
    ("h + '1,5 m'", "1,5", "comma", ""),
]


@pytest.mark.parametrize(("text", "marked", "what", "hint"), REFUSED, ids=lambda v: repr(v)[:22])
def test_what_does_not_agree_is_marked(text: str, marked: str, what: str, hint: str) -> None:
    """The first part that does not agree is marked, with both kinds and what to write."""
    with pytest.raises(FormulaError) as caught:
        found(text)
    error = caught.value
    assert error.span is not None
    assert text[slice(*error.span)] == marked
    assert what in error.what
    assert hint in error.hint


def test_units_have_an_error_of_their_own() -> None:
    """Unequal units raise the narrower class, an unknown name the wider one only."""
    with pytest.raises(DimensionError):
        found("q + h")
    with pytest.raises(FormulaError) as caught:
        found("q + hh")
    assert not isinstance(caught.value, DimensionError)


@pytest.mark.parametrize(
    ("text", "name", "rows"),
    [
        ("q*h", "line load", None),
        ("sqrt(h*h) + abs(h)", "length", None),
        ("h**2/h", "length", None),
        ("(h**(1/3))**3 + h", "length", None),
        ("h**0.1*h**0.1*h**0.1 + h**0.3", "length to the power 0.3", None),
        ("h**-1*h + n", "plain number", None),
        ("n**n", "plain number", None),
        ("'4.57 m'/sqrt(h**2)", "plain number", None),
        ("sin(t) + cos('30 deg') + tan(t)", "plain number", None),
        ("atan(h/'2 m') + t", "angle", None),
        ("sum(w*z)", "force", None),
        ("running(w)", "line load", "floors"),
        ("w - previous(w, '0 kN/m')", "line load", "floors"),
        ("following(z, h) - z", "length", "floors"),
        ("max(w)", "line load", None),
        ("max(w, '2 kN/m')", "line load", "floors"),
        ("where(roof == 'gable', z, h)", "length", "floors"),
        ("where(use == 'roof', h, h)", "length", "floors"),
        ("where(h > '0 m', '0 m', h)", "length", None),
        ("interpolate(K, z)*q", "pressure", "floors"),
        ("ln(h/'1 m') + exp(n) + log10(2) + floor(n) + ceil(n)", "plain number", None),
        ("sum(w)*sum(x)", "force", None),
    ],
)
def test_accepted_formulas_have_their_kind(text: str, name: str, rows: str | None) -> None:
    """An accepted formula has the kind of quantity and the rows of its parts."""
    kind = found(text)
    assert (kind.form, kind.rows) == ("number", rows)
    assert kind.dimension is not None
    assert dimension_name(kind.dimension) == name


def test_conditions_are_truth_and_choices_text() -> None:
    """Comparisons give truth, per row where a side is a column; a bare choice is text."""
    assert found("h > '3 m' and not roof == 'gable'") == Type("truth", None, None)
    assert found("'0 m' < z <= h") == Type("truth", None, "floors")
    assert found("title == 'anything'") == Type("truth", None, None)
    assert found("roof").form == "text"


def test_a_formula_as_printed_is_checked_too() -> None:
    """Names are plain numbers in stated units, the result has the unit it gives."""
    text = "0.0488*h**0.75"
    kind = check_printed(parse(text), SCOPE, text, {"h": unit("m")}, unit("s"))
    assert kind == number("s")
    text = "w/4 + 0.1*n"
    kind = check_printed(parse(text), SCOPE, text, {"w": unit("kN/m")}, unit("kN"))
    assert kind == number("kN", "floors")


@pytest.mark.parametrize(
    ("text", "takes", "marked", "what", "hint"),
    [
        ("0.1*h", {"h": "s"}, "h", "'h' is a length and cannot be in s", "unit of length"),
        ("0.1*h*n", {}, "h", "its unit in this formula is not stated", "takes={'h': 'm'}"),
        ("0.1*h", {"h": "m", "hn": "m"}, "", "'hn' has a unit but is not in", "mean 'h'?"),
        ("h*'2 m'", {"h": "m"}, "h*'2 m'", "this one a length", "leave the quotes"),
        ("h + roof", {"h": "m"}, "roof", "this is a choice", ""),
        ("h*zz", {"h": "m"}, "zz", "no value 'zz'", ""),
    ],
)
def test_a_formula_as_printed_is_refused(
    text: str, takes: dict[str, str], marked: str, what: str, hint: str
) -> None:
    """A unit that does not fit, is missing or is not used is refused."""
    units = {name: unit(text) for name, text in takes.items()}
    with pytest.raises(FormulaError) as caught:
        check_printed(parse(text), SCOPE, text, units, unit("s"))
    assert what in caught.value.what
    assert hint in caught.value.hint
    assert text[slice(*caught.value.span or (0, 0))] == marked


# --- dimensional homogeneity ----------------------------------------------------------------------

QUANTITIES = {"L": "m", "H": "m", "F": "kN", "p": "Pa", "m1": "kg", "v": "m/s", "k": ""}
KINDS = {name: number(text) for name, text in QUANTITIES.items()}
formulas = st.recursive(
    st.sampled_from(sorted(QUANTITIES)),
    lambda part: st.one_of(
        st.tuples(part, st.sampled_from(["*", "/", "+", "-"]), part).map(
            lambda t: f"({t[0]}{t[1]}{t[2]})"
        ),
        st.tuples(part, st.sampled_from(["2", "0.5", "-1", "(1/3)"])).map(
            lambda t: f"({t[0]}**{t[1]})"
        ),
        part.map(lambda t: f"sqrt(abs({t}))"),
        st.tuples(part, part).map(lambda t: f"max({t[0]}, {t[1]})"),
        st.tuples(part, part).map(lambda t: f"where({t[0]} > {t[1]}, {t[0]}, 2*{t[1]})"),
    ),
    max_leaves=7,
)


def scale(dimension: Dimension, factors: dict[str, float]) -> float:
    """Return the factor of a dimension when the base units are scaled."""
    result = 1.0
    for base, power in dimension.items():
        result *= factors[base] ** float(power)  # type: ignore[arg-type]
    return result


@settings(max_examples=300, deadline=None)
@given(formulas, st.lists(st.floats(0.3, 3.0), min_size=7, max_size=7))
def test_accepted_formulas_are_homogeneous(text: str, sizes: list[float]) -> None:
    """Scaling the base units scales an accepted formula by the factor of its dimension."""
    node = parse(text)
    try:
        kind = check(node, KINDS, text)
    except DimensionError:
        assume(condition=False)
    factors = {"[length]": 3.7, "[mass]": 0.21, "[time]": 11.0}
    values = dict(zip(QUANTITIES, sizes, strict=True))
    scaled = {
        name: value * scale(KINDS[name].dimension or DIMENSIONLESS, factors)
        for name, value in values.items()
    }
    source = python_source(node, scope=KINDS, array=False)
    try:
        plain, large = (computed(source, found) for found in (values, scaled))
    except (ArithmeticError, ValueError):
        assume(condition=False)
    assert kind.dimension is not None
    size = scale(kind.dimension, factors)
    assert large == pytest.approx(plain * size, rel=1e-7, abs=1e-9 * abs(size))
