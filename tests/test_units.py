from __future__ import annotations

import math
import pickle
import subprocess
import sys
from decimal import ROUND_HALF_UP, Context, Decimal
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.errors import DeclarationError, QuantityError
from calcbook.units import (
    DIMENSIONLESS,
    KINDS,
    Dimension,
    dimension_name,
    display_unit,
    format_number,
    kind,
    pretty_unit,
    read_quantity,
    registry,
    significant_decimals,
    unit,
)

LENGTH = kind("length").dimension
PRESSURE = kind("pressure").dimension
ANGLE = kind("angle").dimension

UNITS = ["m", "mm", "ft", "in", "kN", "kip", "kPa", "psf", "kN/m2", "lb/ft3", "deg", "mph", "1/s"]


def refusal(text: str, dimension: Dimension | None = None) -> QuantityError:
    """Return the error with which a text is refused."""
    with pytest.raises(QuantityError) as caught:
        read_quantity(text, dimension)
    return caught.value


# --- accepted -------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "value", "si"),
    [
        ("70 m/s", 70.0, 70.0),
        ("70m/s", 70.0, 70.0),
        ("3.5 kN/m2", 3.5, 3500.0),
        ("3.5 kN/m^2", 3.5, 3500.0),
        ("3.5 kN/m**2", 3.5, 3500.0),
        ("3.5 kN/m²", 3.5, 3500.0),
        ("-0.18", -0.18, -0.18),
        ("+.5 m", 0.5, 0.5),
        ("1.2e3 N", 1200.0, 1200.0),
        ("5 %", 5.0, 0.05),
        ("12 deg", 12.0, math.radians(12)),
        ("12°", 12.0, math.radians(12)),
        ("2 1/s", 2.0, 2.0),
        ("3 kN*m", 3.0, 3000.0),
        ("3 kN·m", 3.0, 3000.0),
        ("3 kN m", 3.0, 3000.0),
        ("3 kip-ft", 3.0, 3 * 4448.2216152605 * 0.3048),
        ("2 s⁻¹", 2.0, 2.0),
        ("20 K", 20.0, 20.0),
        ("\u00a05\u202fkPa ", 5.0, 5000.0),
    ],
)
def test_accepted(text: str, value: float, si: float) -> None:
    """The forms the design promises are read to value and SI."""
    found = read_quantity(text)
    assert found.value == value
    assert found.si == pytest.approx(si, rel=1e-15)


@pytest.mark.parametrize(
    ("text", "value", "name"),
    [
        ("5 ft 6 in", 5.5, "ft"),
        ("5'-6 1/2\"", 5 + 6.5 / 12, "ft"),
        ("5' 6\"", 5.5, "ft"),
        ("5'6\"", 5.5, "ft"),
        ("5' - 6\"", 5.5, "ft"),
        ("-5'-6\"", -5.5, "ft"),
        ("5 ft-6.5 in", 5 + 6.5 / 12, "ft"),
        ("5 ft 3/4 in", 5 + 0.75 / 12, "ft"),
        ("5'", 5.0, "ft"),
        ("5.25'", 5.25, "ft"),
        ('6"', 6.0, "in"),
        ('6-1/2"', 6.5, "in"),
        ('-3/8"', -0.375, "in"),
        ("6 1/2 in", 6.5, "in"),
        ("6.5 in", 6.5, "in"),
    ],
)
def test_feet_and_inches(text: str, value: float, name: str) -> None:
    """Feet and inches are read in feet, inches alone in inches, the sign over all of it."""
    found = read_quantity(text, LENGTH)
    assert (found.value, found.unit.text, found.text) == (value, name, text)


def test_text_is_kept_as_typed() -> None:
    """Figures typed stay typed: 2.50 is not turned into 2.5."""
    found = read_quantity("  2.50 kPa ")
    assert found.text == "2.50 kPa"
    assert found.parts == ("2.50", "kPa")


@pytest.mark.parametrize(
    ("text", "parts"),
    [
        ("5%", ("5", "%")),
        ("-0.180", ("-0.180", "")),
        ("1.2e3 N", ("1.2e3", "N")),
        ("5'-6 1/2\"", ("5'-6 1/2\"", "")),
        ("5 ft 6 in", ("5 ft 6 in", "")),
        ("6 1/2 in", ("6 1/2 in", "")),
    ],
)
def test_parts(text: str, parts: tuple[str, str]) -> None:
    """Number and unit come apart as typed; feet and inches stay whole."""
    assert read_quantity(text).parts == parts


def test_bare_number_with_a_unit_beside_it() -> None:
    """A bare number takes the unit printed beside the field and is stored with it."""
    found = read_quantity("3.50", PRESSURE, bare=unit("kPa"))
    assert (found.text, found.si) == ("3.50 kPa", 3500.0)
    assert read_quantity("3.5 psf", PRESSURE, bare=unit("kPa")).unit.text == "psf"
    assert read_quantity("3", DIMENSIONLESS, bare=unit("")).text == "3"


def test_plain_numbers() -> None:
    """A plain number needs no unit, and a percentage is one."""
    assert read_quantity("0.85", DIMENSIONLESS).si == 0.85
    assert read_quantity("5 %", DIMENSIONLESS).si == 0.05


# --- refused --------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "hint", "marked"),
    [
        ("1,5 m", "write 1.5 m, with a point", "1,5"),
        (",5 m", "write .5 m, with a point", ",5"),
        ("0,500 m", "write 0.500 m, with a point", "0,500"),
        ("1,234 ft", "write 1234 ft without the comma, or 1.234 ft with a point", "1,234"),
        ("1,234,567.8 ft", "write 1234567.8 ft", "1,234,567.8"),
        ("1.234,5 ft", "write 1234.5 ft, with a point", "1.234,5"),
        ("1.5,5", "one number with one point", "1.5,5"),
        ("1.5,5 ft", "one number with one point", "1.5,5"),
        ("1 234 ft", "write 1234 ft", "1 234"),
        ("12 345.6 kN", "write 12345.6 kN", "12 345.6"),
        ("1\u202f234 ft", "write 1234 ft", "1 234"),
        ("5 3.5 kPa", "without spaces", "5 3.5"),
        ("1_000 m", "write 1000 m", "1_000"),
        ("- 5 m", "write -5 m", "- "),
        ("\u22125 m", "write -5 m", "\u2212"),
        ("\u20135 m", "write -5 m", "\u2013"),
        ("\uff15 kPa", "write 5 kPa", "\uff15"),
        ("\u0665 kPa", "write 5 kPa", "\u0665"),
        ("5\u2019-6\u201d", "write 5'-6\"", "\u2019"),
        ("5'-6½\"", "write 5'-6 1/2\"", "½"),
        ("1/2 m", "write 0.5 m", "1/2"),
        ("-2 1/2 m", "write -2.5 m", "-2 1/2"),
        ("1.2x10^3 N", "write 1.2e3 N", "x10^3"),
        ("1.2*10**3 N", "write 1.2e3 N", "*10**3"),
        ("1.2·10⁻³ N", "write 1.2e-3 N", "·10⁻³"),
        ("nan", "write the value in figures", "nan"),
        ("-inf m", "write the value in figures", "-inf"),
        ("Infinity", "write the value in figures", "Infinity"),
        ("∞ m", "write the value in figures", "∞"),
        ("20 degC", "write a temperature difference, for example 20 K", "degC"),
        ("68 °F", "write a temperature difference", "°F"),
        ("20 C", "write a temperature difference", "C"),
        ("1e999", "write a value between", "1e999"),
        ("1e308 kN", "write a value between", "1e308 "),
        ("1e-999 m", "write a value between", "1e-999"),
        ("5 ft 14 in", "write 6 ft 2 in", " ft 14 in"),
        ("5 ft 6", "5 ft 6 in", "5 ft 6"),
        ("5' 6", "5 ft 6 in", "5' 6"),
        ("5 ft -6 in", "5 ft 6 in", "5 ft -6 in"),
        ("5.5 ft 6 in", "whole feet first", "5.5 ft 6 in"),
        ("5'-6 3/2\"", "5 ft 6 in", "3/2"),
        ('1/0"', "5 ft 6 in", "1/0"),
        ("kPa", "write the number first", "kPa"),
        ("~5 kPa", "write the number first", "~"),
        ("--5", "write the number first", "-"),
        ("1..5 m", "write a number and its unit", ".5 m"),
        ("5 /m", "write a number and its unit", " /m"),
        ("5 kPa;", "write units as", ";"),
        ("5 kN + 3 kN", "write units as", "+ 3 kN"),
        ("5 m 2", "write units as", "2"),
        ("5 m 20 cm", "write units as", "20 cm"),
        ("5 kN/m*s", "repeat the stroke", "*s"),
        ("5 kN/(m*s)", "repeat the stroke", "(m*s)"),
        ("5 m^0", "write units as", "^0"),
        ("5 m12", "write units as", "12"),
        ("5 m^0.5", "write units as", "^0.5"),
        ("5 kPaa", "did you mean 'kPa'?", "kPaa"),
        ("5 KPA", "did you mean 'kPa'?", "KPA"),
        ("5 kn", "write kN, km/h or knot", "kn"),
        ("5 kN/sqm", "did you mean 'kN/m2'?", "sqm"),
        ("5 km/hr", "did you mean 'km/h'?", "hr"),
        ("25 k", "did you mean 'kip'?", "k"),
        ("5 mft", "did you mean 'ft'?", "mft"),
        ("5 zzqq", "write a unit such as m", "zzqq"),
        ("5 pound_force", "did you mean", "pound_force"),
        ("5\nm", "write a number and its unit", "?"),
    ],
)
def test_refused_with_what_to_type(text: str, hint: str, marked: str) -> None:
    """Each refusal says what to type instead and marks the offending part."""
    error = refusal(text)
    assert hint in error.hint
    assert error.span is not None
    assert error.text[slice(*error.span)] == marked


@pytest.mark.parametrize("text", ["", "   ", "\u00a0"])
def test_nothing_typed(text: str) -> None:
    """An empty field is refused with an example."""
    assert "for example 3.5 kPa" in refusal(text).hint


def test_long_text_is_refused_short() -> None:
    """A hundred characters are read, one more is refused, and not repeated in full."""
    assert read_quantity("0." + "1" * 98).value == pytest.approx(1 / 9)
    error = refusal("1" * 101)
    assert "longer than 100 characters" in error.what
    assert len(error.text) < 80


def test_something_that_is_no_text() -> None:
    """A number handed in from a file is refused with how to write it."""
    with pytest.raises(QuantityError, match="write it in quotes"):
        read_quantity(3.5)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("text", "dimension", "what", "hint"),
    [
        ("3.5", PRESSURE, "a pressure needs its unit", "write the unit, for example 3.5 kPa"),
        ("30", ANGLE, "an angle needs its unit", "write the unit, for example 30 deg"),
        ("5 m", PRESSURE, "unit of length, and a unit of pressure is wanted", "5 kPa or 5 psf"),
        ("5 kg/m2", PRESSURE, "unit of mass per area", "lb are masses; forces are N, kN"),
        ("5 m", DIMENSIONLESS, "a plain number is wanted", "write the number alone, for example 5"),
        ("5 deg", DIMENSIONLESS, "a plain number is wanted", "write the number alone"),
        ("5 %", LENGTH, "unit of plain number", "write a length, for example 5 m or 5 ft"),
        ("5 ft 6 in", PRESSURE, "unit of length", "write a pressure, for example 5.5 kPa"),
    ],
)
def test_wrong_dimension(text: str, dimension: Dimension, what: str, hint: str) -> None:
    """A wrong dimension names both kinds and says what to type."""
    error = refusal(text, dimension)
    assert what in error.what
    assert hint in error.hint


def test_wrong_dimension_of_the_unit_beside_the_field() -> None:
    """The unit printed beside a field is checked like a typed one."""
    with pytest.raises(QuantityError, match="unit of length, and a unit of pressure"):
        read_quantity("3", PRESSURE, bare=unit("m"))


def test_dimension_without_a_kind() -> None:
    """A dimension that has no name of its own is spelled out."""
    error = refusal("5", unit("kg/m/s").dimension)
    assert error.what == "a mass per length per time needs its unit"
    assert error.hint == "write the unit"


# --- properties -----------------------------------------------------------------------------------


@given(
    st.floats(min_value=-1e200, max_value=1e200).filter(lambda x: x == 0 or abs(x) > 1e-200),
    st.sampled_from(UNITS),
    st.sampled_from(["", " ", "  "]),
)
def test_round_trip(number: float, name: str, gap: str) -> None:
    """A number typed in a unit comes back as it was, and its SI is value times factor."""
    found = read_quantity(f"{number!r}{gap or ' ' * name.startswith('1')}{name}")
    assert found.value == number
    assert found.si == number * unit(name).factor
    again = read_quantity(found.text, found.unit.dimension)
    assert again == found


@given(
    st.integers(0, 2000),
    st.integers(0, 12 * 16 - 1),
    st.booleans(),
    st.sampled_from(["{f} ft {i} in", "{f}'-{i}\"", "{f}' {i}\"", "{f} feet {i} inches"]),
)
def test_feet_and_inches_by_arithmetic(
    feet: int, sixteenths: int, negative: bool, form: str
) -> None:
    """Feet plus sixteenths of an inch are the exact sum, whatever the form."""
    whole, part = divmod(sixteenths, 16)
    inches = f"{whole} {part}/16" if part else f"{whole}"
    text = ("-" if negative else "") + form.format(f=feet, i=inches)
    exact = feet + Fraction(sixteenths, 16 * 12)
    assert read_quantity(text, LENGTH).value == float(-exact if negative else exact)


@given(
    st.lists(st.sampled_from(["kN", "m", "s", "kip", "ft2", "deg", "kg"]), min_size=1, max_size=5),
    st.randoms(use_true_random=False),
)
def test_products_of_units_commute(parts: list[str], random: object) -> None:
    """The order of the factors of a unit changes neither its size nor its dimension."""
    shuffled = list(parts)
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    one, other = unit("*".join(parts)), unit("*".join(shuffled))
    assert one.dimension == other.dimension
    assert one.factor == pytest.approx(other.factor, rel=1e-14)
    inverse = unit("1/" + "/".join(parts))
    assert inverse.factor * one.factor == pytest.approx(1.0, rel=1e-14)
    assert inverse.dimension * one.dimension == DIMENSIONLESS


@given(st.text(max_size=12) | st.from_regex(r"[-+]?[0-9.,' /]{1,6}[a-z%\"']{0,3}", fullmatch=True))
@settings(max_examples=300)
def test_any_text_is_read_or_refused(text: str) -> None:
    """Whatever is typed gives a finite quantity or a refusal with a hint; never another error."""
    try:
        found = read_quantity(text)
    except QuantityError as error:
        assert error.hint  # noqa: PT017 - either outcome is right, each has its assertion
    else:
        assert math.isfinite(found.si)
        assert text.strip()[0] in "+-.0123456789"


# --- units ----------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "factor"),
    [
        # Seven figures, as NIST SP 811 appendix B.8 prints them; ksf, ksi, pcf, klf, kin and kft,
        # which it does not list, follow from those by arithmetic.
        ("psf", 47.88026),
        ("ksf", 47880.26),
        ("psi", 6894.757),
        ("ksi", 6894757.0),
        ("pcf", 157.0875),
        ("plf", 14.59390),
        ("klf", 14593.90),
        ("kip", 4448.222),
        ("lbf", 4.448222),
        ("kgf", 9.80665),
        ("lb", 0.45359237),
        ("lb/ft3", 16.01846),
        ("kin", 4448.222 * 0.0254),
        ("kft", 4448.222 * 0.3048),
        ("ft", 0.3048),
        ("in", 0.0254),
        ("yd", 0.9144),
        ("mi", 1609.344),
        ("mph", 0.44704),
        ("km/h", 0.2777778),
        ("knot", 0.5144444),
        ("in4", 4.162314e-7),
        ("t", 1000.0),
        ("kN/m3", 1000.0),
        ("Hz", 1.0),
        ("%", 0.01),
        ("", 1.0),
    ],
)
def test_factors_against_published_figures(text: str, factor: float) -> None:
    """Factors to SI are those published, to the figures printed."""
    assert unit(text).factor == pytest.approx(factor, rel=5e-7)


@pytest.mark.parametrize(
    ("ours", "theirs"),
    [
        ("psf", "lbf / ft2"),
        ("ksf", "1000 lbf / ft2"),
        ("pcf", "lbf / ft3"),
        ("kcf", "kip / ft3"),
        ("pci", "lbf / inch3"),
        ("plf", "lbf / ft"),
        ("klf", "kip / ft"),
        ("kip", "kip"),
        ("kin", "kip inch"),
        ("kft", "kip ft"),
        ("psi", "psi"),
        ("ksi", "kip / inch2"),
        ("lb", "lb"),
        ("slug", "slug"),
        ("mph", "mile / h"),
        ("km/h", "km / h"),
        ("knot", "kn"),
        ("yd", "yd"),
        ("acre", "acre"),
        ("nmi", "nmi"),
        ("kN/m2", "kN / m2"),
        ("kN*m/rad", "kN m / rad"),
        ("kgf", "9.80665 N"),
        ("tf", "9806.65 N"),
        ("deg/s", "deg / s"),
        ("mrad", "mrad"),
        ("GPa", "GPa"),
        ("hPa", "100 Pa"),
        ("ha", "10000 m2"),
        ("L", "liter"),
        ("day", "d"),
        ("year", "yr"),
        ("min", "min"),
        ("kJ", "kJ"),
        ("kHz", "kHz"),
        ("degR", "deg_R"),
        ("mm4", "mm4"),
    ],
)
def test_factors_against_a_second_library(ours: str, theirs: str) -> None:
    """Factors agree with astropy to 1e-7 (its pound-force differs in the ninth digit)."""
    units = pytest.importorskip("astropy.units")
    imperial = pytest.importorskip("astropy.units.imperial")
    with imperial.enable():
        expected = units.Unit(theirs).to(_coherent(units, unit(ours).dimension))
    assert unit(ours).factor == pytest.approx(expected, rel=1e-7)


def _coherent(units: object, dimension: Dimension) -> object:
    bases = {"[mass]": "kg", "[length]": "m", "[time]": "s", "[angle]": "rad", "[temperature]": "K"}
    found = units.dimensionless_unscaled  # type: ignore[attr-defined]
    for base, power in dimension.items():
        found = found * units.Unit(bases[base]) ** power  # type: ignore[attr-defined]
    return found


def test_published_pressure_and_weight() -> None:
    """1 psf is 0.047880259 kPa and 1 pcf 0.157087464 kN/m3 (pint 0.25.3, its own definitions)."""
    assert unit("psf").factor / unit("kPa").factor == pytest.approx(0.047880259, abs=5e-10)
    assert unit("pcf").factor / unit("kN/m3").factor == pytest.approx(0.157087464, abs=5e-10)
    assert unit("plf").factor / unit("kN/m").factor == pytest.approx(0.014593903, abs=5e-10)
    assert unit("kip").factor / unit("kN").factor == pytest.approx(4.448221615, abs=5e-10)


def test_angles_are_not_plain_numbers() -> None:
    """Degrees have a dimension of their own, and are not mistaken for a number or a ratio."""
    assert unit("deg").dimension == unit("rad").dimension != DIMENSIONLESS
    assert unit("deg/rad").dimension == DIMENSIONLESS
    assert unit("m/m").dimension == DIMENSIONLESS


def test_dimensions_are_values() -> None:
    """Dimensions of equal units are equal, hash alike and survive a copy to another process."""
    assert unit("kN/m2").dimension == unit("psf").dimension == PRESSURE
    assert hash(unit("MPa").dimension) == hash(PRESSURE)
    assert pickle.loads(pickle.dumps(unit("kPa"))) == unit("kPa")  # noqa: S301 - made here


def test_registry_is_ours_alone() -> None:
    """The registry knows our units and none of pint's own."""
    assert registry.Quantity(1.0, "psf").to("pascal").magnitude == unit("psf").factor
    assert "parsec" not in registry


@pytest.mark.parametrize(
    ("text", "shown"),
    [
        ("kN/m2", "kN/m²"),
        ("kN/m^2", "kN/m²"),
        ("kN*m", "kN·m"),
        ("kip-ft", "kip·ft"),
        ("kN m", "kN·m"),
        ("m/s", "m/s"),
        ("kg/m/s2", "kg/m/s²"),
        ("kN*m/rad", "kN·m/rad"),
        ("kN*m^-2", "kN·m⁻²"),
        ("1/s", "1/s"),
        ("in4", "in⁴"),
        ("deg", "°"),
        ("degrees", "°"),
        ("%", "%"),
        ("", ""),
    ],
)
def test_pretty_unit(text: str, shown: str) -> None:
    """Units are shown with raised powers and a centred dot, and can be read back."""
    assert pretty_unit(text) == shown
    assert unit(shown).factor == unit(text).factor


def test_unknown_unit() -> None:
    """An unknown unit is refused by every function that takes one, with the place in the text."""
    with pytest.raises(QuantityError, match="did you mean 'meter'"):
        unit("kN/metter")
    with pytest.raises(QuantityError) as caught:
        pretty_unit("kN/metr")
    assert caught.value.span == (3, 7)


def test_importing_is_light() -> None:
    """Units need none of the heavy libraries."""
    code = (
        "import sys, calcbook.units;"
        "print({'sympy', 'matplotlib', 'pandas', 'IPython', 'typst'} & set(sys.modules))"
    )
    found = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert found.stdout.strip() == "set()"


# --- kinds ----------------------------------------------------------------------------------------


def test_kinds_have_units_of_one_dimension() -> None:
    """Both display units of a kind have its dimension, and its step is not negative."""
    for name, found in KINDS.items():
        assert found.name == name
        assert found.si.dimension == found.us.dimension == found.dimension, name
        assert min(found.decimals_si, found.decimals_us) >= 0, name


@pytest.mark.parametrize(
    ("name", "si", "us"),
    [
        ("pressure", ("kPa", 3), ("psf", 2)),
        ("force", ("kN", 1), ("kip", 2)),
        ("line load", ("kN/m", 2), ("plf", 0)),
        ("length", ("m", 3), ("ft", 2)),
        ("section length", ("mm", 1), ("in", 2)),
        ("unit weight", ("kN/m3", 2), ("pcf", 1)),
        ("angle", ("deg", 2), ("deg", 2)),
        ("number", ("", 3), ("", 3)),
    ],
)
def test_kinds(name: str, si: tuple[str, int], us: tuple[str, int]) -> None:
    """Results of a kind are shown in its unit and to its step, in either system."""
    found = kind(name)
    assert (display_unit(name, "SI").text, found.decimals_si) == si
    assert (display_unit(name, "US").text, found.decimals_us) == us


def test_unknown_kind_and_system() -> None:
    """A misspelled kind or system is refused with what would be right."""
    with pytest.raises(DeclarationError, match="did you mean 'pressure'"):
        kind("presure")
    with pytest.raises(DeclarationError, match="known are: number, "):
        kind("qqqq")
    with pytest.raises(DeclarationError, match="write 'SI' or 'US'"):
        display_unit("pressure", "metric")


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("psf", "pressure"),
        ("ksi", "pressure"),
        ("in", "length"),
        ("lbf", "force"),
        ("kip*ft", "moment"),
        ("kN/m", "line load"),
        ("pcf", "unit weight"),
        ("", "plain number"),
        ("%", "plain number"),
        ("rad", "angle"),
        ("m/s3", "length per time cubed"),
        ("m5*s6", "length to the power 5 times time to the power 6"),
        ("1/m", "one per length"),
    ],
)
def test_dimension_name(text: str, name: str) -> None:
    """Dimensions have the name of their kind, or are spelled out."""
    assert dimension_name(unit(text).dimension) == name


def test_dimension_name_of_a_root() -> None:
    """A half power, as under a root, is spelled out too."""
    assert dimension_name(LENGTH**0.5) == "length to the power 0.5"


# --- figures shown --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "decimals", "shown"),
    [
        (2.675, 2, "2.68"),  # binary 2.67499999...: a reader sees 2.675
        (1.005, 2, "1.01"),
        (0.5, 0, "1"),
        (2.5, 0, "3"),
        (-2.5, 0, "-3"),
        (-0.0004, 3, "0.000"),
        (-0.0, 0, "0"),
        (123.456, 0, "123"),
        (999.9999, 2, "1000.00"),
        (1e-5, 9, "0.000010000"),
        (999999999.0, 0, "999999999"),
        (1e9, 0, "1.000e9"),
        (12345678901.5, 0, "1.235e10"),
        (12345678901.5, 2, "1.23457e10"),
        (9.9999e10, 0, "1.000e11"),
        (-1.2345e-8, 11, "-1.235e-8"),
        (1e22, 0, "1.000e22"),
        (0.0, 12, "0"),
        (math.nan, 2, "not a number"),
        (math.inf, 2, "infinite"),
        (-math.inf, 2, "-infinite"),
    ],
)
def test_format_number(value: float, decimals: int, shown: str) -> None:
    """Numbers are rounded as a reader would, half away from zero, with no negative zero."""
    assert format_number(value, decimals) == shown


def test_format_number_takes_numpy() -> None:
    """A value out of an array is written as any other."""
    numpy = pytest.importorskip("numpy")
    assert format_number(numpy.float64(2.675), 2) == "2.68"
    assert significant_decimals(numpy.float64(12.3)) == 2


@pytest.mark.parametrize(
    ("value", "figures", "decimals"),
    [
        (2.806123, 4, 3),
        (9.9996, 4, 2),
        (9.9994, 4, 3),
        (0.00012345, 4, 7),
        (123456.0, 4, 0),
        (0.0, 4, 0),
        (-12.5, 6, 4),
        (1.5e10, 6, 2),
        (math.inf, 4, 0),
    ],
)
def test_significant_decimals(value: float, figures: int, decimals: int) -> None:
    """The decimals are those that show the wanted figures after rounding."""
    assert significant_decimals(value, figures) == decimals


@given(st.floats(min_value=-9e8, max_value=9e8), st.integers(0, 9))
def test_format_number_is_within_half_a_step(value: float, decimals: int) -> None:
    """What is printed is within half a step of the number, with the decimals asked for."""
    shown = format_number(value, decimals)
    assert abs(Decimal(shown) - Decimal(repr(value))) <= Decimal(5).scaleb(-decimals - 1)
    assert len(shown.partition(".")[2]) == decimals
    assert format_number(-value, decimals).lstrip("-") == shown.lstrip("-")


@given(
    st.floats(min_value=1e-200, max_value=1e200) | st.floats(min_value=1e-12, max_value=1e12),
    st.integers(4, 12),
)
def test_figures_printed_are_figures_asked_for(value: float, figures: int) -> None:
    """A number printed with its significant decimals equals it rounded to at least so many."""
    shown = Decimal(format_number(value, significant_decimals(value, figures)))
    wanted = Context(prec=figures, rounding=ROUND_HALF_UP).create_decimal(repr(value))
    assert abs(shown - Decimal(repr(value))) <= abs(wanted - Decimal(repr(value)))
