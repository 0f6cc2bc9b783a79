"""The text of a formula before and beside Python's parser: characters, brackets, names, slips.

What is refused here is refused in the engineer's words, with the place in the text.
"""

# ruff: noqa: RUF001  the signs found on paper are listed with what to type instead

from __future__ import annotations

import keyword
import re
from typing import NoReturn

from calcbook.errors import FormulaError
from calcbook.tree import FUNCTIONS

MAX_LENGTH = 2000
MAX_DEPTH = 60
_LONGEST_SHOWN = 200

#: What to type instead of a character found on paper but not on every keyboard.
_INSTEAD = {
    "−": "-", "–": "-", "×": "*", "·": "*", "⋅": "*", "÷": "/", "≤": "<=", "≥": ">=", "≠": "!=",
    "²": "**2", "³": "**3", "√": "sqrt()", "°": "deg", "‘": "'", "’": "'", "“": '"', "”": '"',
    "π": "pi as a number", "α": "alpha", "β": "beta", "γ": "gamma", "δ": "delta", "Δ": "Delta",
    "θ": "theta", "λ": "lamda", "μ": "mu", "ν": "nu", "ρ": "rho", "σ": "sigma", "φ": "phi",
    "ψ": "psi", "ω": "omega", "Ω": "Omega", "∑": "sum()", "Σ": "sum()", "½": "1/2",
}  # fmt: skip
_IDENTIFIER = re.compile(r"[A-Za-z]\w*", re.ASCII)
_QUOTES = re.compile(r"'[^']*'|\"[^\"]*\"")
_NO_SIGN = {
    **dict.fromkeys("`$?;{}", "use + - * / ** ( ) and comparisons"),
    "#": "what the line means is written beside it, not in its formula",
    "\\": "feet and inches are written '5 ft 6 in'",
}
_RUNS_ON = re.compile(r"(?<![\w.])(?>(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)(?=[A-Za-z_])", re.ASCII)
_BESIDE = re.compile(r"(?<![\w.])\d[\d.]* +(?!and\b|or\b|not\b|if\b|else\b)[A-Za-z]\w*", re.ASCII)
_LEADING_ZERO = re.compile(r"(?<![\w.])0\d+(?![\d.])")
_UNFINISHED = re.compile(r"(?:[-+*/<>=!,]|\band|\bor|\bnot)\s*$")
EQUALS = re.compile(r"(?<![<>=!:])=(?!=)")


def without_quotes(text: str) -> str:
    """Return the text with every quoted part, quotes included, blanked at equal length."""
    return _QUOTES.sub(lambda found: "_" * len(found[0]), text)


def check_name(name: str, text: str, span: tuple[int, int]) -> None:
    """Refuse what cannot name a value."""
    if not _IDENTIFIER.fullmatch(name):
        what = f"'{name}' cannot be the name of a value" if name else "the name is missing"
        hint = "a name is letters, digits and _, starting with a letter: K_zt, p_net"
        raise FormulaError(what, hint=hint, text=text, span=span)
    if name in FUNCTIONS:
        what, hint = f"'{name}' is a function", f"write {name}(...), or choose another name"
        raise FormulaError(what, hint=hint, text=text, span=span)
    if keyword.iskeyword(name):
        hint = "lamda is printed as the Greek letter" if name == "lambda" else "choose another name"
        raise FormulaError(
            f"'{name}' is a reserved word and cannot be a name", hint=hint, text=text, span=span
        )


def check_characters(text: str) -> None:
    """Refuse what must not reach the reader: too long, empty, not ASCII, comments, backslashes."""
    if not text.strip():
        raise FormulaError("the formula is empty", hint="write an expression, as in q*G*C_p")
    if len(text) > MAX_LENGTH:
        raise FormulaError(
            f"the formula has {len(text)} characters, more than {MAX_LENGTH}",
            hint="split it into lines with names of their own",
        )
    bare = without_quotes(text)
    for at, character in enumerate(text):
        where = (at, at + 1)
        if not character.isascii():
            instead = _INSTEAD.get(character)
            hint = f"type {instead}" if instead else "use plain letters, digits and signs"
            raise FormulaError(
                f"the character '{character}' is not part of a formula",
                hint=hint,
                text=text,
                span=where,
            )
        if bare[at] in _NO_SIGN or character == "\\":
            raise FormulaError(
                f"the character '{character}' is not part of a formula",
                hint=_NO_SIGN[character],
                text=text,
                span=where,
            )
        if not character.isprintable() and character not in "\t\r\n":
            raise FormulaError(
                "the formula holds a control character", hint="type it again", text=text, span=where
            )


def check_brackets(text: str, flat: str) -> None:
    """Refuse brackets and quotes that do not close, and nesting that is too deep."""
    bare = without_quotes(flat)
    open_: list[int] = []
    for at, character in enumerate(bare):
        if character in "'\"":
            raise FormulaError(
                "a quote is opened and not closed",
                hint="quantities are quoted on both sides: '4.6 m'",
                text=text,
                span=(at, len(text)),
            )
        if character in "([":
            open_.append(at)
            if len(open_) > MAX_DEPTH:
                raise too_deep(text, (at, at + 1))
        elif character in ")]":
            if not open_:
                raise FormulaError(
                    "a bracket is closed that was not opened", text=text, span=(at, at + 1)
                )
            open_.pop()
    if open_:
        raise FormulaError(
            "a bracket is opened and not closed", text=text, span=(open_[-1], open_[-1] + 1)
        )


def too_deep(text: str, span: tuple[int, int] | None) -> FormulaError:
    """Return the error for a formula that is nested too deeply."""
    hint = "split it into lines with names of their own"
    what = f"the formula is nested, or chained, more than {MAX_DEPTH} deep"
    shown = text if len(text) < _LONGEST_SHOWN else ""
    return FormulaError(what, hint=hint, text=shown, span=span)


def check_numbers(text: str, flat: str) -> None:
    """Refuse a number that runs into a name, which Python's parser half accepts."""
    if number := _RUNS_ON.search(without_quotes(flat)):
        raise FormulaError(
            "a number runs into a name",
            hint="multiplication is written *; a quantity is quoted: '4.6 m'",
            text=text,
            span=number.span(),
        )


def refuse_syntax(text: str, flat: str, at: int) -> NoReturn:
    """Say in the engineer's words what Python's parser found at a place in the text."""
    end = len(flat.rstrip())
    bare = without_quotes(flat)
    what = "the formula cannot be read here"
    hint = "between two values stands one of + - * / ** or a comparison"
    span = (min(at, end - 1), min(at, end - 1) + 1)
    if sign := EQUALS.search(bare):
        what, hint, span = "'=' does not compare", "to compare, write ==", sign.span()
    elif word := _reserved_word(bare):
        what, span = f"'{word[0]}' is a reserved word and cannot be a name", word.span()
        hint = "choose another name"
    elif number := _BESIDE.search(bare):
        hint = f"a quantity is quoted: '{number[0]}'; multiplication is written *"
        what, span = "a number stands beside a name", number.span()
    elif number := _LEADING_ZERO.search(bare):
        what, hint, span = "a number starts with 0", "write it without", number.span()
    elif _UNFINISHED.search(bare):
        what, hint, span = "the formula stops too early", "a value is missing", (end - 1, end)
    raise FormulaError(what, hint=hint, text=text, span=span) from None


def _reserved_word(bare: str) -> re.Match[str] | None:
    words = re.finditer(r"[A-Za-z_]\w*", bare)
    usual = {"and", "or", "not", "if", "else"}
    return next((w for w in words if keyword.iskeyword(w[0]) and w[0] not in usual), None)
