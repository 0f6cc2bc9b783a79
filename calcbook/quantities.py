"""Numbers as typed and as printed: the strict reader, and the one formatter.

Knows no unit: ``read_typed`` says where the number ends and the unit begins, `calcbook.units` says
what the unit is. Nothing is guessed: what could be read in two ways is refused, and the refusal
says what to type instead.
"""

from __future__ import annotations

import math
import re
import unicodedata
from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Context, Decimal
from fractions import Fraction
from typing import NoReturn

from calcbook.errors import QuantityError

LONGEST_TEXT = 100
FEET_EXAMPLE = "write feet and inches as 5 ft 6 in or 5'-6 1/2\""

_NUMBER = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_UNIT_START = re.compile(r" *[A-Za-z°%µ]| +1 ?/ ?[A-Za-z]")
_FEET_AND_INCHES = re.compile(
    r"(?P<sign>[+-]?)"
    r"(?:(?P<feet>[0-9]+) *(?:ft|feet|foot|')(?: *|-| - ))?"
    r"(?:(?P<whole>[0-9]+)[ -](?P<part>[0-9]+/[0-9]+)|(?P<fraction>[0-9]+/[0-9]+)"
    r"|(?P<inches>[0-9]+\.?[0-9]*|\.[0-9]+)) *(?P<mark>inches|inch|in|\")"
)
_FEET_MARK = re.compile(r"(?P<feet>[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)) *'")
_FEET_LIKE = re.compile(
    r"[+-]?[0-9.]+ *(?:'|(?:ft|feet|foot)[ -]) *-? *[0-9.]|[+-]?[0-9./ '-]*[0-9] *['\"]"
)
_COMMAS = re.compile(r"[+-]?[0-9.]*,[0-9.,]*")
_SPACES = re.compile(r"[+-]?[0-9.]+(?: +[0-9.]+)+(?![0-9./])")
_THOUSANDS = re.compile(r"[+-]?[0-9]{1,3}(?:[, ][0-9]{3})+(?:\.[0-9]*)?")
_UNDERSCORES = re.compile(r"[+-]?[0-9.]*_[0-9_.]*")
_VULGAR = re.compile(r"(?P<sign>[+-]?)(?:(?P<whole>[0-9]+) +)?(?P<part>[0-9]+/[0-9]+)")
_POWER_OF_TEN = re.compile(
    " *[x*·\N{MULTIPLICATION SIGN}] *10 *(?:\\^|[*]{2})? *([+-]?[0-9]+|⁻?[⁰¹²³⁴-⁹]+)"
)
_SLOPE = re.compile(
    r"(?P<rise>[0-9]+\.?[0-9]*|\.[0-9]+) *(?:%|(?::|/|in) *(?P<run>[0-9]+\.?[0-9]*|\.[0-9]+))"
)
_NOT_A_NUMBER = re.compile(r"[+-]? *(?:nan|inf(?:inity)?|∞)(?![A-Za-z])", re.IGNORECASE)
_FRACTION_BAR = "\N{FRACTION SLASH}"
_LOOKALIKES = {
    "\N{MINUS SIGN}": "-",
    "\N{EN DASH}": "-",
    "\N{EM DASH}": "-",
    "\N{HYPHEN}": "-",
    "\N{NON-BREAKING HYPHEN}": "-",
    "\N{PRIME}": "'",
    "\N{LEFT SINGLE QUOTATION MARK}": "'",
    "\N{RIGHT SINGLE QUOTATION MARK}": "'",
    "\N{DOUBLE PRIME}": '"',
    "\N{LEFT DOUBLE QUOTATION MARK}": '"',
    "\N{RIGHT DOUBLE QUOTATION MARK}": '"',
}
_WIDE_SPACES = str.maketrans(dict.fromkeys("\u00a0\u2009\u202f\t", " "))


@dataclass(frozen=True)
class Typed:
    """A typed quantity taken apart: its number, and its unit, which is typed at ``start``."""

    text: str
    value: float
    unit: str
    start: int


def read_typed(text: str, example: str = "3.5 kPa") -> Typed:
    """Split a typed quantity into its number and the text of its unit.

    Parameters
    ----------
    text
        For example ``3.5 kN/m2``, ``-0.18``, ``1.2e3 N``, ``5 %``, ``5 ft 6 in``, ``5'-6 1/2"``.
    example
        What a refusal gives as an example: a quantity of the kind that is wanted.

    Returns
    -------
    Typed
        Feet and inches come back in ft, inches alone in in; a bare number has the unit ''.

    Raises
    ------
    QuantityError
        With what to type instead and the place of the offending part.
    """
    text = _tidy(text, example)
    _refuse_lookalikes(text)
    feet = _read_feet_and_inches(text)
    if feet is not None:
        return feet
    match = _NUMBER.match(text)
    if match is None:
        _refuse_start(text, example)
    end = match.end()
    if end < len(text) and not _UNIT_START.match(text, end):
        _refuse_after(text, end, example)
    _refuse_power_of_ten(text, end)
    start = end + len(text[end:]) - len(text[end:].lstrip())
    return Typed(text, _finite(match.group(), text, end), text[start:], start)


def refuse_slope(text: str) -> None:
    """Refuse an angle typed as a slope (``1:4``, ``3/12``, ``25 %``), with its degrees."""
    match = _SLOPE.fullmatch(text.strip()) if isinstance(text, str) else None
    if match is None or not float(match["run"] or 1):
        return
    rise, run = float(match["rise"]), float(match["run"] or 100)
    angle = format_number(math.degrees(math.atan2(rise, run)), 2)
    raise QuantityError(
        "a slope is typed where an angle is wanted",
        hint=f"write degrees: a rise of {rise:g} on a run of {run:g} is {angle} deg",
        text=text.strip(),
        span=(0, len(text.strip())),
    )


def _in_full(example: str) -> str:
    plain = _NUMBER.fullmatch(example)
    return f"write a number{'' if plain else ' and its unit'}, for example {example}"


def _tidy(text: str, example: str) -> str:
    if not isinstance(text, str):
        raise QuantityError(f"{text!r} is not text", hint=f'write it in quotes, as in "{example}"')
    text = text.translate(_WIDE_SPACES).strip()
    if not text:
        raise QuantityError("nothing is typed", hint=_in_full(example))
    if len(text) > LONGEST_TEXT:
        raise QuantityError(
            f"the text is longer than {LONGEST_TEXT} characters",
            hint=_in_full(example),
            text=f"{text[:60]!r}"[1:-1],
            span=(0, 1),
        )
    for place, character in enumerate(text):
        if not character.isprintable():
            raise QuantityError(
                f"there is an unprintable character at place {place + 1}",
                hint=_in_full(example),
                text=re.sub(r"[^ -~]", "?", text),
                span=(place, place + 1),
            )
    return text


def _refuse_lookalikes(text: str) -> None:
    """Refuse signs and figures that only look like those of the keyboard."""
    plain = [_keyboard_form(character) for character in text]
    for place, (character, wanted) in enumerate(zip(text, plain, strict=True)):
        if character != wanted:
            raise QuantityError(
                f"'{character}' only looks like '{wanted.strip()}'",
                hint=f"write {''.join(plain)}",
                text=text,
                span=(place, place + 1),
            )


def _keyboard_form(character: str) -> str:
    if character.isascii():
        return character
    if character.isdecimal():
        return str(unicodedata.decimal(character))
    folded = unicodedata.normalize("NFKC", character)
    if _FRACTION_BAR in folded:
        return f" {folded.replace(_FRACTION_BAR, '/')}"
    return _LOOKALIKES.get(character, character)


def _read_feet_and_inches(text: str) -> Typed | None:
    mark = _FEET_MARK.fullmatch(text)
    if mark:
        return Typed(text, _finite(mark["feet"], text, mark.end("feet")), "ft", mark.end("feet"))
    match = _FEET_AND_INCHES.fullmatch(text)
    if match is None:
        if _FEET_LIKE.match(text):
            raise QuantityError(
                "the feet and inches cannot be read",
                hint=f"{FEET_EXAMPLE}: whole feet first, then the inches with their mark",
                text=text,
                span=(0, len(text)),
            )
        return None
    if match["feet"] is None and match["inches"] is not None and match["mark"] != '"':
        return None
    inches = _inches(match, text)
    sign = -1 if match["sign"] == "-" else 1
    if match["feet"] is None:
        return Typed(text, float(sign * inches), "in", match.start("mark"))
    feet = int(match["feet"])
    if inches >= 12:  # noqa: PLR2004 - inches to a foot
        more, rest = divmod(inches, 12)
        raise QuantityError(
            "the inches beside feet are 12 or more",
            hint=f"write {match['sign']}{feet + int(more)} ft {_as_decimal(rest)} in",
            text=text,
            span=(match.end("feet"), len(text)),
        )
    return Typed(text, float(sign * (feet + inches / 12)), "ft", match.end("feet"))


def _inches(match: re.Match[str], text: str) -> Fraction:
    if match["inches"] is not None:
        return Fraction(match["inches"])
    group = "part" if match["part"] else "fraction"
    above, below = (int(number) for number in match[group].split("/"))
    if below == 0 or (group == "part" and above >= below):
        raise QuantityError(
            f"{match[group]} is not a fraction of an inch",
            hint=FEET_EXAMPLE,
            text=text,
            span=match.span(group),
        )
    return int(match["whole"] or 0) + Fraction(above, below)


def _as_decimal(value: Fraction) -> str:
    return f"{float(value):.12g}"


def _refuse_start(text: str, example: str) -> NoReturn:
    match = _NOT_A_NUMBER.match(text)
    if match:
        raise QuantityError(
            f"'{match.group()}' is not a value",
            hint=f"write the value in figures, for example {example}",
            text=text,
            span=match.span(),
        )
    match = re.match(r"([+-]) +(?=[0-9.])", text)
    if match:
        raise QuantityError(
            "there is a space after the sign",
            hint=f"write {match[1]}{text[match.end() :]}",
            text=text,
            span=match.span(),
        )
    _refuse_commas(text)
    number = _NUMBER.search(text)
    raise QuantityError(
        "this does not start with a number",
        hint=f"write the number first, for example {example}",
        text=text,
        span=(0, number.start() if number and number.start() else len(text)),
    )


def _refuse_after(text: str, end: int, example: str) -> NoReturn:
    """Refuse what follows a number and is neither a unit nor the end."""
    _refuse_commas(text)
    _refuse_power_of_ten(text, end)
    _refuse_parted_number(text, example)
    match = _VULGAR.match(text)
    if match and not re.fullmatch(".*/0+", match["part"]):
        value = int(match["whole"] or 0) + Fraction(match["part"])
        raise QuantityError(
            "a fraction is read only in inches",
            hint=f"write {match['sign']}{_as_decimal(value)}{text[match.end() :]}",
            text=text,
            span=match.span(),
        )
    what = "there are two points in the number" if text[end] == "." else "this cannot be read"
    raise QuantityError(what, hint=_in_full(example), text=text, span=(end, len(text)))


def _refuse_parted_number(text: str, example: str) -> None:
    underscores = _UNDERSCORES.match(text)
    spaces = _SPACES.match(text)
    if underscores:
        hint = f"write {underscores.group().replace('_', '')}{text[underscores.end() :]}"
        raise QuantityError(
            "there is an underscore in the number", hint=hint, text=text, span=underscores.span()
        )
    if spaces:
        hint = f"write one number without spaces, for example {example}"
        if _THOUSANDS.fullmatch(spaces.group()):
            hint = f"write {spaces.group().replace(' ', '')}{text[spaces.end() :]}"
        raise QuantityError(
            "there is a space inside the number", hint=hint, text=text, span=spaces.span()
        )


def _refuse_commas(text: str) -> None:
    match = _COMMAS.match(text)
    if match is not None:
        raise QuantityError(
            "there is a comma in the number", hint=comma_hint(text), text=text, span=match.span()
        )


def comma_hint(text: str) -> str:
    """Return what to write for a number with commas: both readings where there are two."""
    match = _COMMAS.match(text)
    if match is None:
        return ""
    number, rest = match.group(), text[match.end() :]
    plain = number.replace(",", "")
    pointed = number.replace(".", "").replace(",", ".")
    if re.fullmatch(r"[+-]?[1-9][0-9]{0,2},[0-9]{3}", number):
        return f"write {plain}{rest} without the comma, or {pointed}{rest} with a point"
    if _THOUSANDS.fullmatch(number) and not number.lstrip("+-").startswith("0"):
        return f"write {plain}{rest}"
    if re.fullmatch(r"[+-]?[0-9]*,[0-9]+|[+-]?[0-9]{1,3}(?:\.[0-9]{3})+,[0-9]+", number):
        return f"write {pointed}{rest}, with a point"
    return "write one number with one point, for example 1.5 m"


def _refuse_power_of_ten(text: str, end: int) -> None:
    match = _POWER_OF_TEN.match(text, end)
    if match:
        power = unicodedata.normalize("NFKC", match[1]).replace("\N{MINUS SIGN}", "-")
        raise QuantityError(
            "a power of ten is written with e",
            hint=f"write {text[:end]}e{power}{text[match.end() :]}",
            text=text,
            span=match.span(),
        )


def _finite(number: str, text: str, end: int) -> float:
    value = float(number)
    if math.isinf(value):
        what = "the number is too large to be computed with"
    elif value == 0.0 and re.search("[1-9]", re.split("[eE]", number)[0]):
        what = "the number is too small to be computed with"
    else:
        return value
    raise QuantityError(
        what, hint="write a value between 1e-300 and 1e300", text=text, span=(0, end)
    )


# --- for the reader -------------------------------------------------------------------------------

_LARGE = 1e9
_MOST_DECIMALS = 9
_FIGURES_OF_LARGE = 4


def significant_decimals(value: float, figures: int = 4) -> int:
    """Return the decimals (0 or more) with which ``value`` shows at least ``figures`` figures.

    Rounding counts: 9.9996 needs two decimals for four figures (10.00). Zero, and what is not
    finite, needs none. From 1e9 on, `format_number` shows four figures and one more per decimal.
    """
    value = float(value)
    if value == 0.0 or not math.isfinite(value):
        return 0
    if abs(value) >= _LARGE:
        return max(0, figures - _FIGURES_OF_LARGE)
    rounded = Context(prec=figures, rounding=ROUND_HALF_UP).create_decimal(repr(abs(value)))
    return max(0, figures - 1 - rounded.adjusted())


def format_number(value: float, decimals: int) -> str:
    """Write a number for the reader; no other function of the package does.

    Rounds half away from zero on the decimal expansion as a reader knows it (``repr``), so 2.675
    with two decimals is 2.68. The sign is ASCII ``-``; a zero has none. From 1e9 on, and where more
    than nine decimals are asked for, the form is 1.234e10: four figures and one more per decimal,
    or the figures the decimals ask for (at least four).
    """
    value = float(value)
    if math.isnan(value):
        return "not a number"
    if math.isinf(value):
        return "infinite" if value > 0 else "-infinite"
    number = Decimal(repr(value))
    if abs(value) >= _LARGE:
        return _power_form(number, _FIGURES_OF_LARGE + decimals)
    if decimals > _MOST_DECIMALS:
        if value == 0.0:
            return "0"
        return _power_form(number, max(_FIGURES_OF_LARGE, number.adjusted() + decimals + 1))
    step = Decimal(1).scaleb(-decimals)
    rounded = number.quantize(step, rounding=ROUND_HALF_UP, context=Context(prec=40))
    return f"{abs(rounded) if rounded.is_zero() else rounded:f}"


def _power_form(number: Decimal, figures: int) -> str:
    rounded = Context(prec=figures, rounding=ROUND_HALF_UP).plus(number)
    sign = "-" if rounded.is_signed() else ""
    digits = "".join(str(digit) for digit in rounded.as_tuple().digits).ljust(figures, "0")
    return f"{sign}{digits[0]}.{digits[1:]}e{rounded.adjusted()}"
