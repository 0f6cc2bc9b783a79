"""How names, numbers and units are taken apart for printing: one table for all outputs."""

# ruff: noqa: RUF001  Greek letters and true signs are what this module is about

from __future__ import annotations

import re
from typing import NamedTuple

from calcbook.errors import QuantityError
from calcbook.units import pretty_unit

#: Greek names with the letter and its LaTeX command.
GREEK: dict[str, tuple[str, str]] = {
    "alpha": ("α", r"\alpha"), "beta": ("β", r"\beta"), "gamma": ("γ", r"\gamma"),
    "delta": ("δ", r"\delta"), "epsilon": ("ε", r"\varepsilon"), "zeta": ("ζ", r"\zeta"),
    "eta": ("η", r"\eta"), "theta": ("θ", r"\theta"), "kappa": ("κ", r"\kappa"),
    "lambda": ("λ", r"\lambda"), "lamda": ("λ", r"\lambda"), "mu": ("μ", r"\mu"),
    "nu": ("ν", r"\nu"), "xi": ("ξ", r"\xi"), "pi": ("π", r"\pi"), "rho": ("ρ", r"\rho"),
    "sigma": ("σ", r"\sigma"), "tau": ("τ", r"\tau"), "phi": ("φ", r"\varphi"),
    "chi": ("χ", r"\chi"), "psi": ("ψ", r"\psi"), "omega": ("ω", r"\omega"),
    "Gamma": ("Γ", r"\Gamma"), "Delta": ("Δ", r"\Delta"), "Theta": ("Θ", r"\Theta"),
    "Lambda": ("Λ", r"\Lambda"), "Xi": ("Ξ", r"\Xi"), "Pi": ("Π", r"\Pi"),
    "Sigma": ("Σ", r"\Sigma"), "Phi": ("Φ", r"\Phi"), "Psi": ("Ψ", r"\Psi"),
    "Omega": ("Ω", r"\Omega"),
}  # fmt: skip
#: Subscripts that spell a Greek letter and mean two letters: GC_pi is pressure, internal.
_LETTERS = {"pi", "Pi", "xi", "nu", "mu"}
_INDEXED = re.compile(r"([A-Za-z]|" + "|".join(GREEK) + r")(\d+)")
_VALUE = re.compile(r"([+-]?)(\d+\.?\d*|\.\d+)(?:[eE]([+-]?\d+))?")
_QUANTITY = re.compile(rf"({_VALUE.pattern}) *(\D.*)?")
_UNIT_PART = re.compile(r"([^¹²³⁴⁵⁶⁷⁸⁹⁻]+)([¹²³⁴⁵⁶⁷⁸⁹⁻]*)")
_LOWERED = str.maketrans("¹²³⁴⁵⁶⁷⁸⁹⁻", "123456789-")
_RAISED = str.maketrans("0123456789-", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻")


class Sign(NamedTuple):
    """A part of a symbol: ``kind`` is 'letter', 'greek', 'word' or 'digits'."""

    kind: str
    text: str


def symbol_parts(name: str) -> tuple[Sign, tuple[Sign, ...]]:
    """Take a name apart into its base and its subscripts: ``p_wall_lee`` is p, (wall, lee).

    A name of words alone is words, not a symbol with subscripts: ``carried_by`` is carried by.
    """
    base, *below = [part for part in name.split("_") if part] or [name]
    if below and all(_is_word(part) for part in (base, *below)):
        return Sign("word", " ".join((base, *below))), ()
    if indexed := _INDEXED.fullmatch(base):
        base, below = indexed[1], [indexed[2], *below]
    return _sign(base, frozenset()), tuple(_sign(part, _LETTERS) for part in below)


def _is_word(text: str) -> bool:
    return len(text) > 1 and text.isalpha() and text.islower() and text not in GREEK


def _sign(text: str, letters: frozenset[str] | set[str]) -> Sign:
    if text in GREEK and text not in letters:
        return Sign("greek", text)
    if text.isdigit():
        return Sign("digits", text)
    return Sign("letter" if len(text) == 1 else "word", text)


class Figure(NamedTuple):
    """A number as printed: ``negative``, its digits, the power of ten or ''."""

    negative: bool
    digits: str
    power: str


def read_figure(text: str) -> Figure | None:
    """Take a formatted number apart; None if the text is not a number."""
    found = _VALUE.fullmatch(text.strip())
    if found is None:
        return None
    return Figure(found[1] == "-", found[2], str(int(found[3])) if found[3] else "")


def split_quantity(text: str) -> tuple[str, str] | None:
    """Split a quoted quantity into number and unit as typed; None for other texts."""
    found = _QUANTITY.fullmatch(text.strip())
    if found is None or not found[5]:
        return None
    try:
        pretty_unit(found[5])
    except QuantityError:  # feet and inches, or an option that starts with a figure
        return None
    return found[1], found[5].strip()


def unit_parts(text: str) -> tuple[tuple[str, str], ...]:
    """Take a unit apart: ``kN/m2`` is (('kN/m', '2'),), ``kN*m2/s`` (('kN·m', '2'), ('/s', ''))."""
    found = _UNIT_PART.findall(pretty_unit(text))
    return tuple((base, power.translate(_LOWERED)) for base, power in found)


def raised(text: str) -> str:
    """Return an integer in superscript digits."""
    return text.translate(_RAISED)
