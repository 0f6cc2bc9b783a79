"""What is answered to a unit that is none, and to what is no quantity of the kind wanted."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest

from calcbook.errors import QuantityError
from calcbook.units import DIMENSIONLESS, kind, read_quantity, unit

if TYPE_CHECKING:
    from calcbook.units import Dimension

SPEED, FORCE, AREA = (kind(name).dimension for name in ("speed", "force", "area"))
PRESSURE, MOMENT, ANGLE = (kind(name).dimension for name in ("pressure", "moment", "angle"))


def refusal(text: str, dimension: Dimension | None) -> QuantityError:
    """Return the error with which a text is refused."""
    with pytest.raises(QuantityError) as caught:
        read_quantity(text, dimension)
    return caught.value


@pytest.mark.parametrize(
    ("text", "dimension", "hint"),
    [
        ("250 kph", SPEED, "did you mean 'km/h'?"),
        ("250 KPH", SPEED, "did you mean 'km/h'?"),
        ("250 kmh", SPEED, "did you mean 'km/h'?"),
        ("250 kmph", SPEED, "did you mean 'km/h'?"),
        ("250 kmps", SPEED, "did you mean 'km/h'?"),
        ("5 kn", FORCE, "did you mean 'kN'?"),
        ("5 Kn", FORCE, "did you mean 'kN'?"),
        ("90 kn", SPEED, "write km/h or knot"),
        ("90 kn", PRESSURE, "write kN, km/h or knot"),
        ("5 sqm", AREA, "did you mean 'm2'?"),
        ("5 sqft", AREA, "did you mean 'ft2'?"),
        ("5 lbs", FORCE, "did you mean 'lbf'?"),
        ("5 tons", FORCE, "write tf or kip"),
        ("5 kNm", MOMENT, "did you mean 'kN*m'?"),
        ("25 k", FORCE, "did you mean 'kip'?"),
        ("5 sek", None, "did you mean 'sec'?"),
    ],
)
def test_misspelt_unit(text: str, dimension: Dimension | None, hint: str) -> None:
    """What is often typed for a unit is answered with the unit of the kind that is wanted."""
    assert refusal(text, dimension).hint == hint


@pytest.mark.parametrize(
    ("text", "hint"),
    [
        ("1:4", "write degrees: a rise of 1 on a run of 4 is 14.04 deg"),
        ("3/12", "write degrees: a rise of 3 on a run of 12 is 14.04 deg"),
        ("1 in 4", "write degrees: a rise of 1 on a run of 4 is 14.04 deg"),
        (" 100 %", "write degrees: a rise of 100 on a run of 100 is 45.00 deg"),
        ("1:0", "write a number and its unit, for example 12 deg"),
    ],
)
def test_slope_for_an_angle(text: str, hint: str) -> None:
    """An angle typed as a slope is refused with its degrees."""
    assert refusal(text, ANGLE).hint == hint


@pytest.mark.parametrize(
    ("dimension", "example"),
    [
        (SPEED, "write the number first, for example 70 m/s"),
        (ANGLE, "write the number first, for example 12 deg"),
        (AREA, "write the number first, for example 3.5 m2"),
        (DIMENSIONLESS, "write the number first, for example 0.85"),
        (unit("kg/m/s").dimension, "write the number first, for example 3.5 followed by its unit"),
        (None, "write the number first, for example 3.5 kPa"),
    ],
)
def test_example_of_the_kind_that_is_wanted(dimension: Dimension | None, example: str) -> None:
    """A refusal gives an example of the kind of quantity that is wanted."""
    assert refusal("much", dimension).hint == example
