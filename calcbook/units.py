"""The one pint registry, units and kinds of quantity, and strict reading of typed quantities.

pint resolves single units (``kip``, ``psf``) from our own definitions; how they are multiplied is
our own grammar, and raw text never reaches pint. Everything is kept in coherent SI (kg, m, s, rad,
K). An angle has a dimension of its own, so that degrees are never taken for plain numbers.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import cache, lru_cache
from pathlib import Path
from typing import Any, NoReturn, cast

import pint
from pint.util import UnitsContainer

from calcbook.errors import DeclarationError, QuantityError, near_match
from calcbook.misspelt import is_misspelt, unit_hint
from calcbook.quantities import (
    Typed,
    format_number,
    read_typed,
    refuse_slope,
    significant_decimals,
)

__all__ = [
    "DIMENSIONLESS",
    "KINDS",
    "Dimension",
    "Kind",
    "Quantity",
    "Unit",
    "dimension_name",
    "display_unit",
    "format_number",
    "kind",
    "pretty_unit",
    "read_quantity",
    "registry",
    "significant_decimals",
    "unit",
]

Dimension = UnitsContainer
DIMENSIONLESS = Dimension()


_DEFINITIONS = Path(__file__).with_name("units.txt").read_text("utf-8").splitlines()


def _spellings() -> dict[str, str]:
    found: dict[str, str] = {}
    for line in _DEFINITIONS:
        if not line.startswith("#"):
            name, _, *others = (part.strip() for part in line.split("="))
            found |= {spelling: name for spelling in (name, *others) if "_" not in spelling}
    return found


_ATOMS = _spellings()
registry: pint.UnitRegistry[Any] = pint.UnitRegistry(None)
registry.load_definitions(_DEFINITIONS)

_OFFSET = {"degC", "degF", "°C", "°F", "C", "F", "celsius", "fahrenheit", "Celsius", "Fahrenheit"}
_ATOM = re.compile(r"(?P<name>[A-Za-zµ°%_]+)(?:(?:(?:\^|\*\*) *)?(?P<power>-?[1-9])(?![0-9.]))?")
_OPERATOR = re.compile(r" *(?P<sign>[*·/]|-(?=[A-Za-z])) *| +")
_EXAMPLES = {"number": "0.85", "speed": "70 m/s", "angle": "12 deg"}
_SUPERSCRIPTS = str.maketrans("¹²³⁴⁵⁶⁷⁸⁹⁻", "123456789-")
_RAISED = str.maketrans("123456789-", "¹²³⁴⁵⁶⁷⁸⁹⁻")
_PRETTY = {"deg": "°", "degree": "°", "degrees": "°", "degR": "°R", "percent": "%"}


@dataclass(frozen=True)
class Unit:
    """A unit as typed; ``factor`` takes a number in it to coherent SI."""

    text: str
    factor: float
    dimension: Dimension


@lru_cache(maxsize=4096)
def unit(text: str) -> Unit:
    """Read a unit.

    Parameters
    ----------
    text
        Units joined by ``*``, ``·``, ``-`` or a space, then by ``/``; powers as ``m2``, ``m^2``,
        ``m**2`` or ``m²``; ``1/s``; '' is a plain number.

    Returns
    -------
    Unit
        With its factor to coherent SI and its dimension.

    Raises
    ------
    QuantityError
        For an unknown unit (with a near match), an offset temperature, or an ambiguous form.
    """
    text = text.strip()
    above, below, dimension = 1.0, 1.0, DIMENSIONLESS
    for name, power in _parse_unit(text):
        factor, base = _atom(_ATOMS[name])
        above *= factor**power if power > 0 else 1.0
        below *= factor**-power if power < 0 else 1.0
        dimension = dimension * base**power
    return Unit(text, above / below, dimension)


@cache
def _atom(name: str) -> tuple[float, Dimension]:
    """Factor and dimension of a unit of the definitions, from pint."""
    factor, _ = registry.get_root_units(name)
    powers = cast("dict[str, int]", dict(registry.get_dimensionality(name).items()))
    return cast("float", factor) * 1.0, Dimension(powers)


@lru_cache(maxsize=4096)
def _parse_unit(typed: str) -> tuple[tuple[str, int], ...]:
    """Take a unit's text apart into names with their powers (not 0)."""
    text = typed.translate(_SUPERSCRIPTS)
    if not text:
        return ()
    parts: list[tuple[str, int]] = []
    start = re.match(r"1 */ *", text)
    place, sign = (start.end(), -1) if start else (0, 1)
    while True:
        match = _ATOM.match(text, place)
        if match is None:
            _refuse_unit(typed, "this is not a unit", (place, len(text)))
        _refuse_unknown(typed, match)
        parts.append((match["name"], sign * int(match["power"] or 1)))
        if match.end() == len(text):
            return tuple(parts)
        operator = _OPERATOR.match(text, match.end())
        if operator is None:
            _refuse_unit(typed, "this is not a power or a unit", (match.end(), len(text)))
        if operator["sign"] == "/":
            sign = -1
        elif sign < 0:
            span = (match.end(), len(text))
            _refuse_unit(typed, "what comes after the stroke can be read in two ways", span)
        place = operator.end()


def _refuse_unit(text: str, what: str, span: tuple[int, int]) -> NoReturn:
    raise QuantityError(
        what,
        hint="write units as kN*m or kN/m2, and repeat the stroke to divide twice, as in kg/m/s2",
        text=text,
        span=span,
    )


def _refuse_unknown(text: str, match: re.Match[str]) -> None:
    name, span = match["name"], match.span("name")
    if name in _ATOMS:
        return
    if name in _OFFSET:
        raise QuantityError(
            f"'{name}' is a temperature with an offset, which cannot be computed with",
            hint="write a temperature difference, for example 20 K (or 36 degR)",
            text=text,
            span=span,
        )
    hint = unit_hint(name, _ATOMS, around=(text[: span[0]], text[span[1] :]))
    raise QuantityError(f"there is no unit '{name}'", hint=hint, text=text, span=span)


def pretty_unit(text: str) -> str:
    """Return a unit for plain text: ``kN/m²``, ``kN·m``, ``°``, ``%``; '' for a plain number."""
    written = ""
    for place, (name, power) in enumerate(_parse_unit(text.strip())):
        joint = "/" if power < 0 and "/" in text else "·" if place else ""
        joint = "1/" if joint == "/" and not place else joint
        shown = abs(power) if joint.endswith("/") else power
        raised = "" if shown == 1 else str(shown).translate(_RAISED)
        written += f"{joint}{_PRETTY.get(name, name)}{raised}"
    return written


@dataclass(frozen=True)
class Quantity:
    """A quantity as typed; ``si`` is ``value`` times the factor of its unit."""

    text: str
    value: float
    unit: Unit
    si: float

    @property
    def parts(self) -> tuple[str, str]:
        """The number and the unit as typed; feet and inches stay whole, with the unit ''."""
        if self.unit.text and self.text.endswith(self.unit.text):
            number = self.text.removesuffix(self.unit.text).strip()
            if not re.search("[^-+.0-9eE]", number):
                return number, self.unit.text
        return self.text, ""


def read_quantity(
    text: str, dimension: Dimension | None = None, *, bare: Unit | None = None
) -> Quantity:
    """Read a typed quantity strictly.

    Parameters
    ----------
    text
        A number and its unit; feet and inches as ``5 ft 6 in`` or ``5'-6 1/2"``.
    dimension
        The dimension wanted; None takes any.
    bare
        The unit printed beside the field, which a bare number is stored with.

    Returns
    -------
    Quantity
        ``si`` in coherent SI (kg, m, s, rad, K).

    Raises
    ------
    QuantityError
        With what to type instead and the place of the offending part.
    """
    if dimension == KINDS["angle"].dimension:
        refuse_slope(text)
    typed = read_typed(text, _example(dimension))
    if not typed.unit and bare is not None:
        found, shown = bare, f"{typed.text} {bare.text}".strip()
    else:
        found, shown = _unit_of(typed, dimension), typed.text
    if dimension is not None and found.dimension != dimension:
        _refuse_dimension(typed, found, dimension)
    si = typed.value * found.factor
    if not math.isfinite(si):
        raise QuantityError(
            "the number is too large to be computed with",
            hint="write a value between 1e-300 and 1e300",
            text=typed.text,
            span=(0, typed.start),
        )
    return Quantity(shown, typed.value, found, si)


@lru_cache(maxsize=64)
def _example(dimension: Dimension | None) -> str:
    """Return a quantity of a dimension, as an example of what to type."""
    if dimension is None:
        return "3.5 kPa"
    names = [known for known in KINDS.values() if known.dimension == dimension]
    if not names:
        return "3.5 followed by its unit"
    return _EXAMPLES.get(names[0].name, f"3.5 {names[0].si.text}")


def _unit_of(typed: Typed, wanted: Dimension | None) -> Unit:
    try:
        return unit(typed.unit)
    except QuantityError as error:
        span, hint = error.span or (0, len(typed.unit)), error.hint
        if is_misspelt(typed.unit):
            hint = unit_hint(typed.unit, _ATOMS, fits=lambda text: unit(text).dimension == wanted)
        raise QuantityError(
            error.what,
            hint=hint,
            text=typed.text,
            span=(typed.start + span[0], typed.start + span[1]),
        ) from None


def _refuse_dimension(typed: Typed, found: Unit, wanted: Dimension) -> NoReturn:
    number = format_number(typed.value, significant_decimals(typed.value))
    number = number.rstrip("0").rstrip(".") if "." in number and "e" not in number else number
    names = [known for known in KINDS.values() if known.dimension == wanted]
    written = dict.fromkeys([names[0].si.text, names[0].us.text] if names else [])
    examples = " or ".join(f"{number} {text}".strip() for text in written)
    example = f", for example {examples}" if examples else ""
    if not found.text:
        what, hint = f"{_with_article(wanted)} needs its unit", f"write the unit{example}"
    elif wanted == DIMENSIONLESS:
        what = f"'{found.text}' is a unit of {dimension_name(found.dimension)}"
        what, hint = f"{what}, and a plain number is wanted", f"write the number alone{example}"
    else:
        what = f"'{found.text}' is a unit of {dimension_name(found.dimension)}"
        what += f", and a unit of {dimension_name(wanted)} is wanted"
        hint = f"write {_with_article(wanted)}{example}"
    if wanted / found.dimension == KINDS["acceleration"].dimension:
        hint += " (kg, t and lb are masses; forces are N, kN, kgf, tf, lbf, kip)"
    raise QuantityError(what, hint=hint, text=typed.text, span=(typed.start, len(typed.text)))


def _with_article(dimension: Dimension) -> str:
    name = dimension_name(dimension)
    return f"an {name}" if name[0] in "aeiou" else f"a {name}"


@dataclass(frozen=True)
class Kind:
    """A kind of quantity: the units it is shown in, and the fixed step of its results."""

    name: str
    dimension: Dimension
    si: Unit
    us: Unit
    decimals_si: int
    decimals_us: int


# Of kinds that share a dimension the first gives it its name.
_KINDS = (
    ("number", "", "", 3, 3),
    ("count", "", "", 0, 0),
    ("percent", "%", "%", 1, 1),
    ("length", "m", "ft", 3, 2),
    ("section length", "mm", "in", 1, 2),
    ("area", "m2", "ft2", 2, 1),
    ("section area", "mm2", "in2", 0, 2),
    ("volume", "m3", "ft3", 2, 1),
    ("section modulus", "mm3", "in3", 0, 1),
    ("second moment of area", "mm4", "in4", 0, 1),
    ("angle", "deg", "deg", 2, 2),
    ("time", "s", "s", 3, 3),
    ("frequency", "Hz", "Hz", 3, 3),
    ("speed", "m/s", "mph", 1, 1),
    ("acceleration", "m/s2", "ft/s2", 3, 2),
    ("mass", "kg", "lb", 1, 1),
    ("mass per length", "kg/m", "lb/ft", 2, 2),
    ("mass per area", "kg/m2", "lb/ft2", 1, 2),
    ("density", "kg/m3", "lb/ft3", 1, 1),
    ("force", "kN", "kip", 1, 2),
    ("line load", "kN/m", "plf", 2, 0),
    ("pressure", "kPa", "psf", 3, 2),
    ("stress", "MPa", "ksi", 1, 2),
    ("unit weight", "kN/m3", "pcf", 2, 1),
    ("subgrade modulus", "kN/m3", "pci", 0, 1),
    ("moment", "kN*m", "kip*ft", 1, 1),
    ("overturning moment", "kN*m", "kip*ft", 0, 0),
    ("stiffness", "kN/m", "kip/in", 0, 1),
    ("rotational stiffness", "kN*m/rad", "kip*ft/rad", 0, 0),
    ("bending stiffness", "kN*m2", "kip*ft2", 0, 0),
    ("temperature difference", "K", "degR", 1, 1),
)


def _make_kinds() -> dict[str, Kind]:
    kinds = {}
    for name, si, us, decimals_si, decimals_us in _KINDS:
        shown = unit(si)
        kinds[name] = Kind(name, shown.dimension, shown, unit(us), decimals_si, decimals_us)
    return kinds


KINDS = _make_kinds()


def kind(name: str) -> Kind:
    """Return a kind of quantity by name; `DeclarationError` with a near match if there is none."""
    if name not in KINDS:
        hint = near_match(name, KINDS) or f"known are: {', '.join(KINDS)}"
        raise DeclarationError(f"there is no kind of quantity '{name}'", hint=hint)
    return KINDS[name]


def display_unit(kind_name: str, system: str) -> Unit:
    """Return the unit a kind of quantity is shown in; ``system`` is 'SI' or 'US'."""
    found = kind(kind_name)
    if system not in {"SI", "US"}:
        raise DeclarationError(f"there is no unit system '{system}'", hint="write 'SI' or 'US'")
    return found.si if system == "SI" else found.us


_NAMES = {known.dimension: known.name for known in reversed(KINDS.values())}
_NAMES[DIMENSIONLESS] = "plain number"
_POWERS: dict[float, str] = {1: "", 2: " squared", 3: " cubed"}


def dimension_name(dimension: Dimension) -> str:
    """Return the name of a dimension: 'pressure', 'plain number', 'length per time cubed'."""
    if dimension in _NAMES:
        return _NAMES[dimension]
    above: list[str] = []
    below: list[str] = []
    for base, power in sorted(cast("dict[str, float]", dict(dimension.items())).items()):
        words = base.strip("[]") + _POWERS.get(abs(power), f" to the power {abs(power):g}")
        (above if power > 0 else below).append(words)
    return " ".join([" times ".join(above) or "one", *(f"per {words}" for words in below)])
