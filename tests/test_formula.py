# ruff: noqa: RUF001  signs that only look like those of the keyboard are what is tested

from __future__ import annotations

import warnings

import pytest
from formula_trees import bracketed, conditions, trees
from hypothesis import given, settings

from calcbook.errors import FormulaError
from calcbook.formula import (
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
    parse,
    split_definition,
)

#: text, the part under the caret, words of the message, words of the hint
REFUSED = [
    ("a.b", "a.b", "dot after a name", "names are plain"),
    ("a.__class__.__mro__", "a.__class__.__mro__", "dot after a name", ""),
    ("''.join(a)", "''.join", "dot after a name", ""),
    ("a[1]", "a[1]", "square brackets", "its own line"),
    ("lambda: 1", "lambda: 1", "lambda", "the expression itself"),
    ("[x for x in y]", "[x for x in y]", "lists", "sum(w)"),
    ("[1, 2]", "[1, 2]", "lists", ""),
    ("sum(x for x in y)", "(x for x in y)", "lists", ""),
    ("print(1)", "print", "no function 'print'", ""),
    ("__import__('os')", "__import__", "no function '__import__'", "the functions are"),
    ("sqr(2)", "sqr", "no function 'sqr'", "did you mean 'sqrt'?"),
    ("eval('1')", "eval", "no function 'eval'", ""),
    ("max(a=1)", "a=1", "'=' inside a function", "max(a, b)"),
    ("max(*a)", "*a", "'*' before a value", ""),
    ("max(**a)", "**a", "'=' inside a function", ""),
    ("a if b else c", "a if b else c", "'a if b else c'", "where(condition, a, b)"),
    ("(a := 1)", "a := 1", "':='", "line of its own"),
    ("f'x'", "f'x'", "f before it", "'4.6 m'"),
    ("b'x'", "b'x'", "b before it", "'4.6 m'"),
    ("r'x'", "r'x'", "one plain piece", ""),
    ("'4 m' '5 m'", "'4 m' '5 m'", "one plain piece", ""),
    ("2*__x", "__x", "cannot be the name", "starting with a letter"),
    ("lambda*2", "lambda", "reserved word", ""),
    ("2*import", "import", "reserved word", "another name"),
    ("2*sin", "sin", "'sin' is a function", "sin(...)"),
    ("V^2", "^", "'^' is not a power", "**"),
    ("a = b", "=", "'=' does not compare", "=="),
    ("a//b", "/", "'//'", "floor(a/b)"),
    ("a%b", "%", "'%'", "'5 %'"),
    ("(a)@b", "@", "'@'", "*"),
    ("a & b", "&", "'&'", "and"),
    ("a | b", "|", "'|'", "or"),
    ("a << b", "<", "'<<'", ""),
    ("~a", "~", "'~'", "not"),
    ("+a", "+", "leading '+'", "leave it out"),
    ("a in b", "a in b", "'in'", "or a == 'y'"),
    ("a is not b", "a is not b", "'is not'", "!="),
    ("9**9**9", "9**9", "power stands in the exponent", "line of its own"),
    ("x**-2**9", "-2**9", "power stands in the exponent", ""),
    ("x**(9**9)", "9**9", "power stands in the exponent", ""),
    ("x**1000", "1000", "exponent 1000 is too large", "up to 100"),
    ("a +", "+", "stops too early", "missing"),
    ("a b", "b", "cannot be read here", "+ - * / **"),
    ("'2 m' x", "x", "cannot be read here", ""),
    ("5 m", "5 m", "stands beside a name", "'5 m'"),
    ("5m", "5", "runs into a name", "quoted"),
    ("1or 2", "1", "runs into a name", ""),
    ("0x10", "0", "runs into a name", ""),
    ("1_000", "1", "runs into a name", ""),
    ("1j", "1", "runs into a name", ""),
    ("007", "007", "starts with 0", ""),
    ("1,5", "1,5", "comma", "1.5"),
    ("(a", "(", "opened and not closed", ""),
    ("a)", ")", "closed that was not opened", ""),
    ("a + 'b", "'b", "quote is opened and not closed", "'4.6 m'"),
    ("' '", "' '", "nothing stands between the quotes", ""),
    ("True", "True", "'True' is not a number", ""),
    ("1e999", "1e999", "too large", "smaller"),
    ("a # why", "#", "'#'", "beside it"),
    ("a\\b", "\\", "'\\'", "5 ft 6 in"),
    ("a; b", ";", "';'", ""),
    ("{1}", "{", "'{'", ""),
    ("2(a)", "2", "bracket follows a value", "*"),
    ("(a+b)(c)", "a+b", "bracket follows a value", "*"),
    ("sqrt()", "sqrt()", "takes 1 value, not 0", "sqrt(a)"),
    ("min()", "min()", "takes 1 or more values, not 0", "min(a)"),
    ("where(a, b)", "where(a, b)", "takes 3 values, not 2", "where(condition, a, b)"),
    ("interpolate(a)", "interpolate(a)", "takes 2 or 3 values, not 1", "interpolate(table, x)"),
    ("ρ*2", "ρ", "the character 'ρ'", "rho"),
    ("2 − 1", "−", "the character '−'", "type -"),
    ("V²", "²", "the character '²'", "**2"),
    ("é", "é", "the character 'é'", "plain letters"),
    ("a\x00", "\x00", "control character", ""),
    ("await x", "await x", "not part of a formula", ""),
]


def refusal(text: str) -> FormulaError:
    """Return the error with which a text is refused."""
    with pytest.raises(FormulaError) as caught:
        parse(text)
    return caught.value


@pytest.mark.parametrize(("text", "marked", "what", "hint"), REFUSED, ids=lambda v: repr(v)[:20])
def test_refused_constructs_are_marked(text: str, marked: str, what: str, hint: str) -> None:
    """Whatever is outside the language is refused with its place and what to write instead."""
    error = refusal(text)
    assert error.span is not None
    assert text[slice(*error.span)] == marked
    assert what in error.what
    assert hint in error.hint


def test_size_and_depth_are_bounded() -> None:
    """Long, deep and empty texts are refused without a deep stack or a long wait."""
    assert "more than 2000" in refusal("a" * 2001).what
    assert "more than 2000" in refusal("(" * 10_000 + ")" * 10_000).what
    assert "deep" in refusal("(" * 900 + "a" + ")" * 900).what
    assert "deep" in refusal("-" * 1900 + "x").what
    assert "deep" in refusal("not " * 480 + "x").what
    assert "deep" in refusal("+".join(["a"] * 62)).what
    assert parse("(" * 60 + "a" + ")" * 60) == Name("a")
    assert len(names(parse("+".join(f"a{i}" for i in range(60))))) == 60
    assert "empty" in refusal("  ").what


def test_nothing_warns() -> None:
    """Texts that Python's own parser warns of are refused without the warning."""
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for text in ("1or 2", "2(a)", "'a'()", "a is 2", "a\\d"):
            refusal(text)


def test_numbers_stay_as_typed() -> None:
    """The spelling of a number is kept beside its value."""
    for text in ("2.50", "0.613", "1.2e3", ".5", "3.", "1E-5"):
        assert parse(text) == Number(text, float(text))


def test_every_form_is_read() -> None:
    """Each sign of the language gives its own node, with Python's precedence."""
    assert parse("a - b*c") == Binary("-", Name("a"), Binary("*", Name("b"), Name("c")))
    assert parse("-a**2") == Negative(Binary("**", Name("a"), Number("2", 2.0)))
    assert parse("a/b/c") == Binary("/", Binary("/", Name("a"), Name("b")), Name("c"))
    assert parse("a < b <= 'x'") == Compare(Name("a"), (("<", Name("b")), ("<=", Quoted("x"))))
    assert parse("a or not b and c") == Logic(
        "or", (Name("a"), Logic("and", (Not(Name("b")), Name("c"))))
    )
    assert parse('max(a, "5 ft 6 in")') == Call("max", (Name("a"), Quoted("5 ft 6 in")))


def test_spans_point_into_the_text() -> None:
    """The span of a part covers it in the text as typed, leading space and line breaks included."""
    text = "  a +\n\tmax(b_1, '4 m')"
    node = parse(text)
    assert isinstance(node, Binary)
    assert text[slice(*node.right.span)] == "max(b_1, '4 m')"
    assert [text[slice(*part.span)] for part in children(node.right)] == ["b_1", "'4 m'"]


def test_names_come_once_in_order() -> None:
    """Names are listed in order of first appearance, functions left out."""
    assert names(parse("q*max(G, q) + where(z > h, z, C_p)")) == ("q", "G", "z", "h", "C_p")


@pytest.mark.parametrize("name", sorted(FUNCTIONS))
def test_every_function_is_read(name: str) -> None:
    """Every function is accepted with its fewest values and refused with none."""
    fewest, _ = FUNCTIONS[name]
    assert isinstance(parse(f"{name}({', '.join('abc'[:fewest])})"), Call)
    assert name in refusal(f"{name}()").what


@settings(max_examples=150, deadline=None)
@given(trees)
def test_written_trees_are_read_back(tree: Node) -> None:
    """A tree written as text and read again is the same tree."""
    assert parse(bracketed(tree)) == tree


@settings(max_examples=50, deadline=None)
@given(conditions())
def test_written_conditions_are_read_back(tree: Node) -> None:
    """A condition written as text and read again is the same condition."""
    assert parse(bracketed(tree)) == tree


def test_definitions_are_split_at_the_sign() -> None:
    """A line is split at its one '=' into name and expression; comparisons stay whole."""
    assert split_definition("p = q*G") == ("p", "q*G")
    assert split_definition(" K_1=where(a <= b, a == 'x=y', c != 2) ") == (
        "K_1",
        "where(a <= b, a == 'x=y', c != 2)",
    )


@pytest.mark.parametrize(
    ("text", "marked", "what"),
    [
        ("q*G", None, "no '='"),
        ("a == b", None, "no '='"),
        ("a = b = c", "=", "second '='"),
        ("a = ", "=", "nothing stands after"),
        (" = b", "=", "name is missing"),
        ("2a = b", "2a", "cannot be the name"),
        ("a b = c", "a b", "cannot be the name"),
        ("max = c", "max", "is a function"),
        ("if = c", "if", "reserved word"),
        ("lambda = c", "lambda", "reserved word"),
        ("ρ = c", "ρ", "the character 'ρ'"),
        ("_a = c", "_a", "cannot be the name"),
    ],
)
def test_bad_definitions_are_refused(text: str, marked: str | None, what: str) -> None:
    """A line without one '=' and one proper name is refused with its place."""
    with pytest.raises(FormulaError) as caught:
        split_definition(text)
    error = caught.value
    assert what in error.what
    assert marked is None or text[slice(*error.span or (0, 0))] == marked
