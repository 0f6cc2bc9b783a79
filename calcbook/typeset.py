"""A formula as MathML, Typst, LaTeX and plain text, with symbols or with their values."""

# ruff: noqa: RUF001  true minus and multiplication signs are printed

from __future__ import annotations

from functools import lru_cache
from html import escape
from typing import TYPE_CHECKING, ClassVar

from calcbook.formula import names, parse
from calcbook.printer import Printed, Printer, substituted
from calcbook.symbols import GREEK, Sign, raised
from calcbook.units import pretty_unit

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.tree import Node

__all__ = ["OUTPUTS", "Printed", "equation", "expression", "number", "spoken", "symbol"]


_POWERS = {"2": "squared", "3": "cubed"}
_FENCES = {"()": ("(", ")"), "||": ("|", "|"), "floor": ("⌊", "⌋"), "ceil": ("⌈", "⌉")}


class _MathML(Printer):
    """Presentation MathML, the inside of a ``math`` element."""

    def sign(self, sign: Sign) -> str:
        if sign.kind == "digits":
            return f"<mn>{sign.text}</mn>"
        if " " in sign.text:
            return self.words(sign.text)
        return f"<mi>{GREEK[sign.text][0] if sign.kind == 'greek' else sign.text}</mi>"

    def digits(self, text: str) -> str:
        return f"<mn>{text}</mn>"

    def below(self, base: str, subscript: str) -> str:
        return f"<msub>{base}{subscript}</msub>"

    def above(self, base: str, superscript: str) -> str:
        inner = superscript if superscript.startswith("<") else f"<mn>{superscript}</mn>"
        return f"<msup>{base}{inner}</msup>"

    def words(self, text: str) -> str:
        return f"<mtext>{escape(text, quote=False).replace(' ', '&#xA0;')}</mtext>"

    def row(self, *parts: str) -> str:
        return f"<mrow>{''.join(parts)}</mrow>"

    def listed(self, parts: list[str], comma: str = ",") -> str:
        return self.row(f"<mo>{comma}</mo>".join(parts))

    def operator(self, text: str) -> str:
        if text.isalpha() and text.isascii():
            return self.words(f" {text} ")
        return f"<mo>{escape(text)}</mo>"

    def minus(self, text: str) -> str:
        return f'<mrow><mo form="prefix">−</mo>{text}</mrow>'

    def space(self) -> str:
        return '<mspace width="0.1667em"/>'

    def times(self) -> str:
        return f"<mo>&#x2062;</mo>{self.space()}"

    def fence(self, kind: str, inner: str) -> str:
        left, right = _FENCES[kind]
        return f'<mrow><mo form="prefix">{left}</mo>{inner}<mo form="postfix">{right}</mo></mrow>'

    def fraction(self, above: str, below: str) -> str:
        return f"<mfrac>{above}{below}</mfrac>"

    def stroke(self, above: str, below: str) -> str:
        return self.row(above, "<mo>/</mo>", below)

    def root(self, inner: str) -> str:
        return f"<msqrt>{inner}</msqrt>"

    def function(self, name: str) -> str:
        return f"<mi>{name}</mi>"

    def applied(self, name: str, args: list[str]) -> str:
        return super().applied(f"{name}<mo>&#x2061;</mo>", args)

    def cases(self, yes: str, condition: str, no: str) -> str:
        left = '<mtd style="text-align: left">'
        rows = (
            f"<mtr>{left}{yes}</mtd>{left}<mtext>if&#xA0;</mtext>{condition}</mtd></mtr>"
            f"<mtr>{left}{no}</mtd>{left}<mtext>otherwise</mtext></mtd></mtr>"
        )
        return f'<mrow><mo form="prefix">{{</mo><mtable>{rows}</mtable></mrow>'


class _Typst(Printer):
    """Typst, the inside of ``$...$``; marks are characters, so that nothing reads as a call."""

    def sign(self, sign: Sign) -> str:
        if sign.kind == "word":
            return self.words(sign.text)
        return GREEK[sign.text][0] if sign.kind == "greek" else sign.text

    def below(self, base: str, subscript: str) -> str:
        return f"{base}_({subscript})"

    def above(self, base: str, superscript: str) -> str:
        return f"{base}^({superscript.replace('-', '−')})"

    def words(self, text: str) -> str:
        escaped = text.replace("\\", "\\\\").replace('"', '\\"')
        return f'"{escaped}"'

    def operator(self, text: str) -> str:
        return f' "{text}" ' if text.isalpha() and text.isascii() else f" {text} "

    def minus(self, text: str) -> str:
        return f"−{text}"

    def space(self) -> str:
        return " thin "

    def fence(self, kind: str, inner: str) -> str:
        if kind == "()":
            return f"({inner})"
        return f"{'abs' if kind == '||' else kind}({inner})"

    def fraction(self, above: str, below: str) -> str:
        return f"frac({above}, {below})"

    def stroke(self, above: str, below: str) -> str:
        return f"{above} \\/ {below}"

    def root(self, inner: str) -> str:
        return f"sqrt({inner})"

    def function(self, name: str) -> str:
        return f'op("{name}")'

    def applied(self, name: str, args: list[str]) -> str:
        return super().applied(f"{name} ", args)

    def cases(self, yes: str, condition: str, no: str) -> str:
        return f'cases({yes} & "if" {condition}, {no} & "otherwise")'


class _Latex(Printer):
    """LaTeX math within what KaTeX and MathJax both read; no bare ``<`` for Markdown's sake."""

    signs: ClassVar[dict[str, str]] = {
        "<": r"\lt", ">": r"\gt", "≤": r"\le", "≥": r"\ge", "≠": r"\ne", "⋅": r"\cdot",
        "×": r"\times", "−": "-", "∑": r"\sum",
    }  # fmt: skip
    known: ClassVar[set[str]] = {
        "sin", "cos", "tan", "arcsin", "arccos", "arctan", "exp", "ln", "log", "min", "max",
    }  # fmt: skip
    escapes: ClassVar[dict[int, str]] = str.maketrans({
        **{character: rf"\{character}" for character in "%&#$_{}"},
        "\\": r"\backslash ", "~": r"\sim ", "^": r"\wedge ", "°": r"{}^{\circ}",
        "·": r"\cdot ", "-": r"\text{-}", " ": "~",
    })  # fmt: skip

    def sign(self, sign: Sign) -> str:
        if sign.kind == "word":
            return self.words(sign.text)
        return GREEK[sign.text][1] if sign.kind == "greek" else sign.text

    def digits(self, text: str) -> str:
        return text.replace("−", "-")

    def below(self, base: str, subscript: str) -> str:
        return f"{base}_{{{subscript}}}"

    def above(self, base: str, superscript: str) -> str:
        return f"{base}^{{{superscript}}}"

    def words(self, text: str) -> str:
        return rf"\mathrm{{{text.translate(self.escapes)}}}"

    def operator(self, text: str) -> str:
        if text.isalpha() and text.isascii():
            return rf"\;\mathrm{{{text}}}\;"
        return f" {self.signs.get(text, text)} "

    def minus(self, text: str) -> str:
        return f"-{text}"

    def space(self) -> str:
        return r"\,"

    def fence(self, kind: str, inner: str) -> str:
        left, right = {
            "()": ("(", ")"),
            "||": (r"\lvert ", r"\rvert "),
            "floor": (r"\lfloor ", r"\rfloor "),
            "ceil": (r"\lceil ", r"\rceil "),
        }[kind]
        return rf"\left{left}{inner}\right{right}"

    def fraction(self, above: str, below: str) -> str:
        return rf"\frac{{{above}}}{{{below}}}"

    def root(self, inner: str) -> str:
        return rf"\sqrt{{{inner}}}"

    def function(self, name: str) -> str:
        return rf"\{name}" if name in self.known else rf"\operatorname{{{name}}}"

    def cases(self, yes: str, condition: str, no: str) -> str:
        rows = rf"{yes} & \text{{if }} {condition} \\ {no} & \text{{otherwise}}"
        return rf"\begin{{cases}}{rows}\end{{cases}}"


class _Plain(Printer):
    """One line of text with the signs of print, for a terminal or a file."""

    stacked = False

    def sign(self, sign: Sign) -> str:
        return GREEK[sign.text][0] if sign.kind == "greek" else sign.text

    def below(self, base: str, subscript: str) -> str:
        return f"{base}_{subscript}"

    def above(self, base: str, superscript: str) -> str:
        power = superscript.replace("−", "-")
        if power.removeprefix("-").isdigit():
            return f"{base}{raised(power)}"
        simple = superscript.replace(".", "").replace("_", "").isalnum()
        return f"{base}^{superscript}" if simple else f"{base}^({superscript})"

    def words(self, text: str) -> str:
        return text

    def operator(self, text: str) -> str:
        return f" {'·' if text == '⋅' else text} "

    def minus(self, text: str) -> str:
        return f"−{text}"

    def space(self) -> str:
        return " "

    def fence(self, kind: str, inner: str) -> str:
        left, right = _FENCES[kind]
        return f"{left}{inner}{right}"

    def fraction(self, above: str, below: str) -> str:
        return self.stroke(above, below)

    def stroke(self, above: str, below: str) -> str:
        return f"{above} / {below}"

    def root(self, inner: str) -> str:
        return (
            f"√({inner})" if not inner.replace("_", "").replace(".", "").isalnum() else f"√{inner}"
        )

    def function(self, name: str) -> str:
        return name

    def cases(self, yes: str, condition: str, no: str) -> str:
        return f"{yes} if {condition}, otherwise {no}"


class _Spoken(_Plain):
    """Words for a screen reader; names as they are declared."""

    spoken: ClassVar[dict[str, str]] = {
        "+": "plus", "−": "minus", "⋅": "times", "×": "times", "=": "equals", "∑": "sum",
        "≠": "does not equal", "<": "is less than", ">": "is greater than", "≤": "is at most",
        "≥": "is at least",
    }  # fmt: skip

    def symbol(self, name: str) -> str:
        return name

    def unit(self, text: str) -> str:
        return pretty_unit(text)

    def operator(self, text: str) -> str:
        return f" {self.spoken.get(text, text)} "

    def times(self) -> str:
        return " times "

    def minus(self, text: str) -> str:
        return f"minus {text}"

    def above(self, base: str, superscript: str) -> str:
        power = superscript.replace("−", "minus ")
        return f"{base} {_POWERS.get(superscript, f'to the power {power}')}"

    def fence(self, kind: str, inner: str) -> str:
        word = {"||": "absolute value", "floor": "rounded down", "ceil": "rounded up"}.get(kind)
        return f"{word} of {inner} end" if word else f"open bracket {inner} close bracket"

    def stroke(self, above: str, below: str) -> str:
        return f"{above} over {below}"

    def root(self, inner: str) -> str:
        return f"square root of {inner} end root"

    def applied(self, name: str, args: list[str]) -> str:
        return f"{name} of {' and '.join(args)} end"

    def of_row(self, column: str, where: str) -> str:
        return f"{column} where {where}"


_PRINTERS: dict[str, type[Printer]] = {
    "mathml": _MathML,
    "typst": _Typst,
    "latex": _Latex,
    "plain": _Plain,
}
#: The outputs a formula can be printed in.
OUTPUTS = tuple(_PRINTERS)


@lru_cache(maxsize=4096)
def symbol(name: str, output: str) -> str:
    """Return the symbol of a name: single letters italic, words upright, Greek where it is one."""
    return _PRINTERS[output]().symbol(name)


def number(text: str, unit: str, output: str) -> str:
    """Return a formatted number (ASCII '-', e for powers of ten) with its unit, or an option."""
    return _PRINTERS[output]().value(text, unit).text


@lru_cache(maxsize=4096)
def _in_symbols(formula_text: str, output: str) -> str:
    """Return a formula in symbols; while its values change it stays the same."""
    return expression(parse(formula_text), output)


@lru_cache(maxsize=4096)
def _said_in_symbols(formula_text: str) -> str:
    return _Spoken().write(parse(formula_text)).text


def expression(
    node: Node,
    output: str,
    values: Mapping[str, Printed] | None = None,
    *,
    takes: frozenset[str] = frozenset(),
) -> str:
    """Return a formula in one output.

    Parameters
    ----------
    node
        The tree of the formula.
    output
        One of `OUTPUTS`.
    values
        What is printed instead of each name; names without one stay symbols.
    takes
        Names whose unit is not shown (formulas as printed).
    """
    return _PRINTERS[output](values, takes).write(node).text


def equation(
    name: str,
    formula_text: str,
    output: str,
    values: Mapping[str, Printed],
    result: Printed | None,
    *,
    printed_form: bool = False,
) -> list[str]:
    """Return the parts of a line, to be joined by '=': symbol, formula, with values, result.

    A part that would say the same as the one before it is left out, and so are the values where
    the formula has no names, and the result where there is none. A line that a solver found has
    no formula.

    Parameters
    ----------
    printed_form
        Whether the formula is kept as printed: values stand in it without their units.
    """
    if not formula_text:
        found = [number(result.text, result.unit, output)] if result is not None else []
        return [symbol(name, output), *found]
    node = parse(formula_text)
    used = names(node)
    parts = [symbol(name, output), _in_symbols(formula_text, output)]
    if values.keys() & substituted(node):
        takes = frozenset(used) if printed_form else frozenset()
        parts.append(expression(node, output, values, takes=takes))
    if result is not None:
        parts.append(number(result.text, result.unit, output))
    return [part for at, part in enumerate(parts) if at == 0 or part != parts[at - 1]]


def spoken(
    name: str, formula_text: str, values: Mapping[str, Printed], result: Printed | None
) -> str:
    """Return a line as one spoken sentence, for readers who hear the page."""
    if not formula_text:
        found = f" equals {_Spoken().value(result.text, result.unit).text}" if result else ""
        return f"{name}{found}."
    node = parse(formula_text)
    sentence = f"{name} equals {_said_in_symbols(formula_text)}"
    if values.keys() & substituted(node):
        sentence += f", which is {_Spoken(values).write(node).text}"
    if result is not None:
        sentence += f", which equals {_Spoken().value(result.text, result.unit).text}"
    return f"{sentence}."
