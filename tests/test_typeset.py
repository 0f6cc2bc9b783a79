# ruff: noqa: RUF001  true signs and Greek letters are what is printed

from __future__ import annotations

import re
import xml.etree.ElementTree as ET

import pytest
import typst
from formula_trees import NAMES, SCOPE, computed, conditions, linear_trees, trees, values
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from mathml_reader import read

from calcbook.compile import python_source
from calcbook.formula import Node, parse
from calcbook.symbols import GREEK
from calcbook.typeset import OUTPUTS, Printed, equation, expression, number, spoken, symbol

VALUES = {
    "K_h": Printed("0.98"),
    "V": Printed("70", "m/s"),
    "rho": Printed("1.225", "kg/m3"),
    "C_p": Printed("-0.70"),
    "q_h": Printed("2806", "Pa"),
    "roof": Printed("gable"),
}
#: name, MathML, Typst, LaTeX, plain
SYMBOLS = [
    ("q", "<mi>q</mi>", "q", "q", "q"),
    ("K_zt", "<msub><mi>K</mi><mi>zt</mi></msub>", 'K_("zt")', r"K_{\mathrm{zt}}", "K_zt"),
    ("L_r", "<msub><mi>L</mi><mi>r</mi></msub>", "L_(r)", "L_{r}", "L_r"),
    ("rho", "<mi>ρ</mi>", "ρ", r"\rho", "ρ"),
    ("p_net", "<msub><mi>p</mi><mi>net</mi></msub>", 'p_("net")', r"p_{\mathrm{net}}", "p_net"),
    (
        "p_wall_lee",
        "<msub><mi>p</mi><mrow><mi>wall</mi><mo>,</mo><mi>lee</mi></mrow></msub>",
        'p_("wall","lee")',
        r"p_{\mathrm{wall},\mathrm{lee}}",
        "p_wall,lee",
    ),
    (
        "GC_pi",
        "<msub><mi>GC</mi><mi>pi</mi></msub>",
        '"GC"_("pi")',
        r"\mathrm{GC}_{\mathrm{pi}}",
        "GC_pi",
    ),
    ("K_theta", "<msub><mi>K</mi><mi>θ</mi></msub>", "K_(θ)", r"K_{\theta}", "K_θ"),
    ("f1", "<msub><mi>f</mi><mn>1</mn></msub>", "f_(1)", "f_{1}", "f_1"),
    ("Delta_x", "<msub><mi>Δ</mi><mi>x</mi></msub>", "Δ_(x)", r"\Delta_{x}", "Δ_x"),
    ("width", "<mi>width</mi>", '"width"', r"\mathrm{width}", "width"),
    ("lamda_", "<mi>λ</mi>", "λ", r"\lambda", "λ"),
    (
        "carried_by",
        "<mtext>carried&#xA0;by</mtext>",
        '"carried by"',
        r"\mathrm{carried~by}",
        "carried by",
    ),
    (
        "grid_x",
        "<msub><mi>grid</mi><mi>x</mi></msub>",
        '"grid"_(x)',
        r"\mathrm{grid}_{x}",
        "grid_x",
    ),
]


@pytest.mark.parametrize(("name", "mathml", "typ", "latex", "plain"), SYMBOLS)
def test_symbols_come_from_one_table(
    name: str, mathml: str, typ: str, latex: str, plain: str
) -> None:
    """Letters are italic, words upright, Greek names letters, and pi below is not π."""
    assert [symbol(name, output) for output in OUTPUTS] == [mathml, typ, latex, plain]


@pytest.mark.parametrize(
    ("text", "unit", "typ", "latex", "plain"),
    [
        ("2806", "Pa", '2806 thin "Pa"', r"2806\,\mathrm{Pa}", "2806 Pa"),
        ("3.50", "kN/m2", '3.50 thin "kN/m"^(2)', r"3.50\,\mathrm{kN/m}^{2}", "3.50 kN/m²"),
        ("-0.18", "", "−0.18", "-0.18", "−0.18"),
        ("12", "deg", '12"°"', r"12\mathrm{{}^{\circ}}", "12°"),
        ("5", "%", '5 thin "%"', r"5\,\mathrm{\%}", "5 %"),
        ("1.234e10", "N", '1.234 × 10^(10) thin "N"', r"1.234 \times 10^{10}\,\mathrm{N}",
         "1.234 × 10¹⁰ N"),
        ("-2e-07", "", "−2 × 10^(−7)", r"-2 \times 10^{-7}", "−2 × 10⁻⁷"),
        ("4", "kN*m", '4 thin "kN·m"', r"4\,\mathrm{kN\cdot m}", "4 kN·m"),
        ("partially enclosed", "", '"partially enclosed"', r"\mathrm{partially~enclosed}",
         "partially enclosed"),
        ("5 ft 6 in", "", '"5 ft 6 in"', r"\mathrm{5~ft~6~in}", "5 ft 6 in"),
        ("mono-slope", "", '"mono-slope"', r"\mathrm{mono\text{-}slope}", "mono-slope"),
    ],
)  # fmt: skip
def test_values_are_printed_with_their_units(
    text: str, unit: str, typ: str, latex: str, plain: str
) -> None:
    """Numbers keep their digits, take a true minus and powers of ten; units are upright."""
    assert [number(text, unit, output) for output in OUTPUTS[1:]] == [typ, latex, plain]


def test_values_in_mathml() -> None:
    """In MathML a unit stands apart by a thin space, with its power raised."""
    assert number("-3.5", "kN/m2", "mathml") == (
        '<mrow><mo form="prefix">−</mo><mrow><mn>3.5</mn><mspace width="0.1667em"/>'
        "<msup><mtext>kN/m</mtext><mn>2</mn></msup></mrow></mrow>"
    )
    assert number("a & b", "", "mathml") == "<mtext>a&#xA0;&amp;&#xA0;b</mtext>"


@pytest.mark.parametrize(
    ("text", "symbolic", "substituted"),
    [
        ("0.613*K_h*V**2", "0.613 K_h V²", "0.613 · 0.98 · (70 m/s)²"),
        ("1/2*rho*V**2", "1 / 2 · ρ · V²", "1 / 2 · 1.225 kg/m³ · (70 m/s)²"),
        ("q_h*C_p", "q_h C_p", "2806 Pa · (−0.70)"),
        ("C_p*q_h", "C_p q_h", "−0.70 · 2806 Pa"),
        ("q_h - C_p*q_h", "q_h − C_p q_h", "2806 Pa − (−0.70 · 2806 Pa)"),
        ("C_p**2", "C_p²", "(−0.70)²"),
        ("x/(2*V)", "x / (2 V)", "x / (2 · 70 m/s)"),
        ("x/V", "x / V", "x / (70 m/s)"),
        ("a*(b/c) + V", "a (b / c) + V", "a · (b / c) + 70 m/s"),
        ("a - (b - c)*V**-0.5", "a − (b − c) V^(−0.5)", "a − (b − c) · (70 m/s)^(−0.5)"),
        ("2*3*V", "2 · 3 V", "2 · 3 · 70 m/s"),
        ("width*height", "width · height", None),
        ("GC_pi*q_h", "GC_pi q_h", "GC_pi · 2806 Pa"),
        ("'4.57 m'/sqrt(K_LL*A_T)", "4.57 m / √(K_LL A_T)", None),
        ("sum(w)*V", "∑(w) V", "∑(w) · 70 m/s"),
        ("max(abs(C_p), floor(x), ceil(y))", "max(|C_p|, ⌊x⌋, ⌈y⌉)", "max(|−0.70|, ⌊x⌋, ⌈y⌉)"),
        ("log10(x) + asin(y)", "log_10(x) + arcsin(y)", None),
        (
            "where(roof == 'gable' and V >= '3 m/s', a, b) + c",
            "(a if roof = gable and V ≥ 3 m/s, otherwise b) + c",
            "(a if gable = gable and 70 m/s ≥ 3 m/s, otherwise b) + c",
        ),
        ("not (a < b or c != d)", "not (a < b or c ≠ d)", None),
        ("previous(w, '0 kN') + running(w)", "previous(w, 0 kN) + running(w)", None),
        ("interpolate(K_z, h/L)*V", "K_z at (h / L) V", "K_z at (h / L) · 70 m/s"),
        ("interpolate(wall_C_p, V, b)", "wall C p at (V, b)", "wall C p at (70 m/s, b)"),
        ("2.01*(z/V)**(2/9.5)", "2.01 (z / V)^(2 / 9.5)", "2.01 · (z / (70 m/s))^(2 / 9.5)"),
        (
            "sum(V) + max(V) + min(V, a)",
            "∑(V) + max(V) + min(V, a)",
            "∑(V) + max(V) + min(70 m/s, a)",
        ),
        ("(-a)**2 - -a", "(−a)² − (−a)", None),
        ("1.2e3*a", "1.2 × 10³ · a", None),
    ],
)
def test_the_author_s_form_is_kept(text: str, symbolic: str, substituted: str | None) -> None:
    """Order and form stay; dots stand between numbers; negatives and powers are in brackets."""
    node = parse(text)
    assert expression(node, "plain") == symbolic
    if substituted is not None:
        assert expression(node, "plain", VALUES) == substituted


def test_the_other_outputs_of_one_formula() -> None:
    """One formula in the three outputs that stack fractions."""
    node = parse("1/2*rho*K_h*V**2 + sqrt(max(a, b))")
    assert expression(node, "typst") == (
        'frac(1, 2) thin ρ thin K_(h) thin V^(2) + sqrt(op("max") (a, b))'
    )
    assert expression(parse("(a/b)**(2/9.5)"), "typst") == r"(frac(a, b))^(2 \/ 9.5)"
    assert expression(node, "latex") == (
        r"\frac{1}{2}\,\rho\,K_{h}\,V^{2} + \sqrt{\max\left(a, b\right)}"
    )
    assert expression(parse("a*b"), "mathml") == (
        '<mrow><mi>a</mi><mo>&#x2062;</mo><mspace width="0.1667em"/><mi>b</mi></mrow>'
    )
    assert expression(parse("where(a < b, a, b)"), "latex") == (
        r"\begin{cases}a & \text{if } a \lt b \\ b & \text{otherwise}\end{cases}"
    )


def test_a_line_is_printed_in_parts() -> None:
    """Symbol, formula, formula with values, result; what says nothing new is left out."""
    found = equation("q", "0.613*K_h*V**2", "plain", VALUES, Printed("2.944", "kPa"))
    assert found == ["q", "0.613 K_h V²", "0.613 · 0.98 · (70 m/s)²", "2.944 kPa"]
    assert equation("G", "0.85", "plain", VALUES, Printed("0.85")) == ["G", "0.85"]
    assert equation("q", "q_h", "plain", VALUES, Printed("2806", "Pa")) == ["q", "q_h", "2806 Pa"]
    assert equation("q", "2*x", "plain", {}, None) == ["q", "2 x"]
    printed = equation("T", "0.0488*h_n**0.75", "plain", {"h_n": Printed("12.0", "m")},
                       Printed("0.3147", "s"), printed_form=True)  # fmt: skip
    assert printed == ["T", "0.0488 h_n^0.75", "0.0488 · 12.0^0.75", "0.3147 s"]


def test_units_of_named_values_can_be_left_out() -> None:
    """Names of a formula as printed stand without their units, the others with them."""
    shown = expression(parse("V*q_h"), "plain", VALUES, takes=frozenset({"V"}))
    assert shown == "70 · 2806 Pa"


def test_a_line_is_spoken_as_a_sentence() -> None:
    """The spoken line has the names as declared, words for signs and the result."""
    text = "0.613*K_h*V**2 - abs(q_h)/(a + b)"
    assert spoken("q", text, VALUES, Printed("-2.9", "kPa")) == (
        "q equals 0.613 times K_h times V squared minus absolute value of q_h end over "
        "open bracket a plus b close bracket, which is 0.613 times 0.98 times open bracket 70 m/s "
        "close bracket squared minus absolute value of 2806 Pa end over open bracket a plus b "
        "close bracket, which equals minus 2.9 kPa."
    )
    assert spoken("T", "sqrt(sum(w))**-0.5", {}, None) == (
        "T equals square root of sum of w end end root to the power minus 0.5."
    )
    assert spoken("T", "where(not a >= b, max(c, 1e-3), log10(d))", {}, None) == (
        "T equals max of c and 1 times 10 to the power minus 3 end if not a is at least b, "
        "otherwise log_10 of d end."
    )


# --- meaning: what is printed is read again -----------------------------------------------------


def value_of(tree: Node, found: dict[str, float]) -> float:
    """Return the value of a tree, or give the example up where it has none."""
    try:
        return float(computed(python_source(tree, scope=SCOPE, array=False), found))
    except (ArithmeticError, ValueError):
        assume(condition=False)
        raise


PLAIN_NAMES = {symbol(name, "mathml"): name for name in NAMES}


def without_angles(mathml: str) -> str:
    """Return MathML without the '1 rad' that makes an angle a number."""
    return re.sub(r"<mrow><mn>1</mn><mspace [^>]*/><mtext>rad</mtext></mrow>", "<mn>1</mn>", mathml)


@settings(max_examples=300, deadline=None)
@given(trees, values)
def test_mathml_means_what_was_written(tree: Node, found: dict[str, float]) -> None:
    """Read as on paper, symbols and printed values both give the value of the formula."""
    expected = value_of(tree, found)
    symbols = {key: found[name] for key, name in PLAIN_NAMES.items()}
    shown = {name: Printed(repr(number)) for name, number in found.items()}
    for printed in (expression(tree, "mathml"), expression(tree, "mathml", shown)):
        try:
            again = read(without_angles(printed), symbols)
        except (ArithmeticError, ValueError):
            assume(condition=False)
            raise
        assert again == pytest.approx(expected, rel=1e-9)


@settings(max_examples=100, deadline=None)
@given(conditions(), values)
def test_conditions_mean_what_was_written(tree: Node, found: dict[str, float]) -> None:
    """Read as on paper, a condition holds where it holds in the formula."""
    symbols = {key: found[name] for key, name in PLAIN_NAMES.items()}
    held = computed(python_source(tree, scope=SCOPE, array=False), found)
    assert bool(read(expression(tree, "mathml"), symbols)) == held


def as_typed(plain: str) -> str:
    """Return plain output as it would be typed again in the formula language."""
    text = plain.replace("−", "-").replace("p_wall,lee", "p_wall_lee").replace("ρ", "rho")
    text = text.replace("b_2", "b2").replace("^", "**")
    digits = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-")
    text = re.sub("[⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+", lambda power: f"**{power[0].translate(digits)}", text)
    text = text.replace(" · ", "*").replace(" × ", "*").replace(" / ", "/")
    return re.sub(r"(?<=[\w).]) (?=[\w(])", "*", text)


@settings(max_examples=300, deadline=None)
@given(linear_trees, values)
def test_plain_text_means_what_was_written(tree: Node, found: dict[str, float]) -> None:
    """Plain text typed again is a formula of the same value, with symbols and with values."""
    expected = value_of(tree, found)
    shown = {name: Printed(repr(number)) for name, number in found.items()}
    for printed in (expression(tree, "plain"), expression(tree, "plain", shown)):
        again = value_of(parse(as_typed(printed)), found)
        assert again == pytest.approx(expected, rel=1e-9)


# --- syntax of the outputs ----------------------------------------------------------------------

UNITS = ["kN/m2", "m/s", "deg", "%", "kN*m", "kg/m3", "1/s", ""]
printed_values = st.fixed_dictionaries(
    {},
    optional={
        name: st.builds(
            Printed,
            st.sampled_from(["-0.7", "2806", "1.2e-9", "0.85"]),
            st.sampled_from(UNITS),
        )
        for name in NAMES
    },
)


def brackets(text: str, mark: str) -> int:
    """Return how often a mark stands in a text."""
    return text.count(mark)


LATEX_COMMANDS = {
    *(command[1:] for _, command in GREEK.values()), "mathrm", "frac", "sqrt", "left", "right",
    "cdot", "times", "lvert", "rvert", "lt", "gt", "le", "ge", "ne", "text", "begin", "end", "min",
    "max", "arctan", "exp", "circ", "lfloor", "rfloor", "lceil", "rceil",
}  # fmt: skip


@settings(max_examples=150, deadline=None)
@given(trees, printed_values)
def test_outputs_are_well_formed(tree: Node, shown: dict[str, Printed]) -> None:
    """MathML is XML, LaTeX is balanced and of common commands, and brackets agree in all three."""
    found = {output: expression(tree, output, shown) for output in OUTPUTS}
    root = ET.fromstring(f"<math>{found['mathml']}</math>")  # noqa: S314  our own output
    assert all(len(part) == 2 for tag in ("msup", "msub", "mfrac") for part in root.iter(tag))
    latex = found["latex"]
    assert set(re.findall(r"\\([A-Za-z]+)", latex)) <= LATEX_COMMANDS
    assert brackets(latex, "{") == brackets(latex, "}")
    assert brackets(latex, r"\left") == brackets(latex, r"\right")
    assert "<" not in latex
    opened = brackets(found["mathml"], ">(<")
    assert opened == brackets(latex, r"\left(")
    bare = re.sub(r"(frac|sqrt|abs|cases|op)\(|[_^]\(", "", found["typst"])
    assert opened == brackets(bare, "(")


def compile_typst(formulas: list[str]) -> bytes:
    """Compile formulas in one Typst document."""
    return bytes(typst.compile("\n\n".join(f"${text}$" for text in formulas).encode()))


@settings(max_examples=8, deadline=None)
@given(st.lists(st.tuples(trees, printed_values), min_size=30, max_size=60))
def test_typst_compiles(found: list[tuple[Node, dict[str, Printed]]]) -> None:
    """Formulas with symbols and with values compile together."""
    formulas = [expression(tree, "typst", shown) for tree, shown in found]
    formulas += [expression(tree, "typst") for tree, _ in found]
    assert compile_typst(formulas).startswith(b"%PDF")


def test_every_sign_is_in_the_fonts() -> None:
    """Every Greek letter, unit, function and sign is printed under PDF/A, which misses no glyph."""
    texts = [
        "where(a <= b and not c != d or e >= f, abs(a), floor(b) - ceil(c))",
        "sqrt(a)*exp(-b)/ln(c) + log10(d)**-2*sin(e) - asin(f)",
        "interpolate(T, x, y) + sum(w) + running(w) + previous(w, '0 kN') + following(w, 1)",
        "where(roof == 'mono-slope', '5 ft 6 in', '12 deg')",
    ]
    shown = [expression(parse(text), "typst") for text in texts]
    shown += [symbol(name, "typst") for name in GREEK if name != "lambda"]
    shown += [number("-1.5e-9", unit, "typst") for unit in UNITS]
    shown += [number('a "quoted" back\\slash $ # option', "", "typst")]
    body = "\n\n".join(f'#math.equation(alt: "a", ${text}$)' for text in shown)
    source = f'#set document(title: "a", date: datetime(year: 2026, month: 1, day: 1))\n{body}'
    assert bytes(typst.compile(source.encode(), pdf_standards="a-3a")).startswith(b"%PDF")
