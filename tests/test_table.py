from __future__ import annotations

import math
import pickle
from itertools import pairwise
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from calcbook.errors import DeclarationError
from calcbook.table import Axis, Table
from calcbook.units import unit

PLAIN = unit("")


def one_way(outside: str = "hold") -> Table:
    """Return a made-up table over a height in feet, giving psf."""
    axis = Axis("z", unit("ft"), (0, 15, 20, 60))
    return Table("q", (axis,), (10.0, 10.0, 12.0, 20.0), unit("psf"), outside, "made up")


def two_way(outside: str = "hold") -> Table:
    """Return a made-up table over a ratio and an angle."""
    axes = (Axis("ratio", PLAIN, (0.25, 0.5, 1.0)), Axis("slope", unit("deg"), (10, 15)))
    values = ((-0.7, -0.5), (-0.9, -0.7), (-1.3, -1.0))
    return Table("C_p", axes, values, PLAIN, outside, "made up")


def test_between_the_points_of_one_axis() -> None:
    """Halfway between two points lies halfway between their values, in SI on both sides."""
    assert one_way().at(17.5 * 0.3048) == pytest.approx(11.0 * unit("psf").factor, rel=1e-14)


def test_between_the_points_of_two_axes() -> None:
    """Bilinear: 0.75 and 12.5 deg lie in the middle of four corners."""
    expected = (-0.9 - 0.7 - 1.3 - 1.0) / 4
    assert two_way().at(0.75, math.radians(12.5)) == pytest.approx(expected, rel=1e-14)


def test_hold_keeps_the_value_at_the_end() -> None:
    """Beyond the ends the end value is kept, on each axis by itself."""
    psf = unit("psf").factor
    assert one_way().at(-1.0) == 10.0 * psf
    assert one_way().at(1e9) == one_way().at(math.inf) == 20.0 * psf
    assert two_way().at(9.0, math.radians(90)) == -1.0
    assert two_way().at(0.75, 0.0) == pytest.approx(-1.1)
    assert two_way().at(9.0, math.radians(12.5)) == pytest.approx(-1.15)


def test_refuse_gives_nan_outside_and_not_at_the_ends() -> None:
    """Beyond the ends there is no value; at the ends there is."""
    table = one_way("refuse")
    assert math.isnan(table.at(math.nextafter(0.0, -1.0)))
    assert math.isnan(table.at(math.nextafter(60 * 0.3048, 1e9)))
    assert table.at(0.0) == 10.0 * unit("psf").factor
    assert table.at(60 * 0.3048) == 20.0 * unit("psf").factor
    assert math.isnan(two_way("refuse").at(0.5, 1.0))
    assert math.isnan(two_way("refuse").at(2.0, math.radians(12)))
    assert two_way("refuse").at(1.0, math.radians(15)) == -1.0


@pytest.mark.parametrize("outside", ["hold", "refuse"])
def test_nan_stays_nan(outside: str) -> None:
    """A place that is not a number has no value, also in an array."""
    assert math.isnan(one_way(outside).at(math.nan))
    assert math.isnan(two_way(outside).at(math.nan, 0.2))
    assert math.isnan(two_way(outside).at(0.5, math.nan))
    assert np.isnan(one_way(outside).at(np.array([1.0, math.nan]))).tolist() == [False, True]


def test_arrays_broadcast() -> None:
    """A column against a row gives a grid; a number against an array gives an array."""
    ratios, slopes = np.array([[0.3], [0.6], [0.9]]), np.radians([10.0, 12.0, 14.0, 15.0])
    found = two_way().at(ratios, slopes)
    assert found.shape == (3, 4)
    assert two_way().at(0.6, slopes).tolist() == found[1].tolist()
    assert two_way().at(ratios[:, 0], float(slopes[1])).tolist() == found[:, 1].tolist()


def test_whole_numbers_are_places() -> None:
    """An integer place is as good as a float."""
    assert two_way().at(1, 0) == -1.3


def test_number_of_places() -> None:
    """One place for each axis, no more and no fewer."""
    with pytest.raises(DeclarationError, match="read at 'ratio' and 'slope'"):
        two_way().at(0.5)
    with pytest.raises(DeclarationError, match="one place for each axis"):
        one_way().at(0.5, 0.5)


def test_tables_are_values() -> None:
    """Equal tables are equal, hash alike, and survive a copy to another process."""
    assert one_way() == one_way() != one_way("refuse")
    assert hash(two_way()) == hash(two_way())
    copied = pickle.loads(pickle.dumps(two_way()))  # noqa: S301 - made here
    assert copied == two_way()
    assert copied.at(0.3, 0.2) == two_way().at(0.3, 0.2)


@pytest.mark.parametrize(
    ("points", "message"),
    [
        ((0, 10, 10), "do not ascend: 10 after 10"),
        ((0, 10, 5), "do not ascend: 5 after 10"),
        ((3,), "fewer than two points"),
        ((), "fewer than two points"),
        ((0, math.nan), "holds nan"),
        ((0, math.inf), "holds inf"),
        ((0, "15"), "holds '15'"),
        ((False, True), "holds False"),
    ],
)
def test_refused_axes(points: Any, message: str) -> None:
    """An axis needs two or more finite points that ascend."""
    with pytest.raises(DeclarationError, match=message):
        Axis("z", PLAIN, points)


A, B = Axis("a", PLAIN, (0, 1)), Axis("b", PLAIN, (0, 1, 2))


@pytest.mark.parametrize(
    ("axes", "values", "outside", "message"),
    [
        ((), (), "hold", "has 0 axes"),
        ((A, B, A), ((1, 2),), "hold", "has 3 axes"),
        ((A, A), ((1, 2), (3, 4)), "hold", "two axes named 'a'"),
        ((A,), (1, 2), "extend", "does not know what 'extend' means"),
        ((A,), (1, 2, 3), "hold", "3 values in a row, and axis 'a' has 2 points"),
        ((A, B), ((1, 2, 3),), "hold", "1 rows, and axis 'a' has 2 points"),
        ((A, B), ((1, 2, 3), (1, 2)), "hold", "2 values in a row, and axis 'b' has 3 points"),
        ((A, B), (1, 2), "hold", "holds 1"),
        ((A,), (1, math.nan), "hold", "holds nan"),
        ((A,), (1, None), "hold", "holds None"),
        ((A,), ((1, 2),), "hold", r"holds \(1, 2\)"),
    ],
)
def test_refused_tables(axes: Any, values: Any, outside: str, message: str) -> None:
    """A table has one axis or two, a value for each point, and says what holds outside."""
    with pytest.raises(DeclarationError, match=message):
        Table("made up", axes, values, PLAIN, outside, "made up")


# --- properties -----------------------------------------------------------------------------------

numbers = st.floats(min_value=-1e6, max_value=1e6).map(lambda x: round(x, 3))


@st.composite
def tables(draw: st.DrawFn) -> Table:
    """Draw a table of one axis or two, in units that are not SI."""
    axes = []
    for name in draw(st.sampled_from([("a",), ("a", "b")])):
        points = sorted(draw(st.sets(numbers, min_size=2, max_size=6)))
        axes.append(Axis(name, unit(draw(st.sampled_from(["ft", "deg", ""]))), tuple(points)))
    row = st.tuples(*[numbers] * len(axes[-1].points))
    values = draw(st.tuples(*[row] * len(axes[0].points)) if len(axes) > 1 else row)
    outside = draw(st.sampled_from(["hold", "refuse"]))
    return Table("drawn", tuple(axes), values, unit("psf"), outside, "made up")


def rows_of(table: Table) -> list[tuple[float, ...]]:
    """Return the values as rows, whatever the number of axes."""
    return [row if isinstance(row, tuple) else (row,) for row in table.values]


def si_points(axis: Axis) -> list[float]:
    """Return the points of an axis in SI."""
    return [point * axis.unit.factor for point in axis.points]


@given(tables())
def test_exact_at_the_points(table: Table) -> None:
    """At a point of the table the value is the one printed there, to the last bit."""
    for x, row in zip(si_points(table.axes[0]), rows_of(table), strict=True):
        places = si_points(table.axes[1]) if len(table.axes) > 1 else [None]
        for y, value in zip(places, row, strict=True):
            assert table.at(x, y) == value * table.unit.factor


@given(tables(), st.lists(st.tuples(numbers, numbers), min_size=1, max_size=8))
def test_array_equals_scalar(table: Table, places: list[tuple[float, float]]) -> None:
    """An array of places gives what each place gives by itself, outside the ends included."""
    columns = [np.array(column) for column in zip(*places, strict=True)][: len(table.axes)]
    one_by_one = [table.at(*place[: len(table.axes)]) for place in places]
    np.testing.assert_allclose(table.at(*columns), one_by_one, rtol=1e-12, atol=1e-6)


@given(tables(), st.floats(0, 1), st.floats(0, 1), st.data())
def test_between_the_corners(table: Table, s: float, t: float, data: st.DataObject) -> None:
    """Between points the value lies between the smallest and the largest of the corners."""
    corners: list[tuple[int, int]] = []
    places: list[float] = []
    for axis, part in zip(table.axes, (s, t), strict=False):
        steps = list(pairwise(si_points(axis)))
        i = data.draw(st.integers(0, len(steps) - 1))
        corners.append((i, i + 1))
        places.append(
            min(max(steps[i][0] + part * (steps[i][1] - steps[i][0]), steps[i][0]), steps[i][1])
        )
    rows = rows_of(table)
    columns = corners[1] if len(corners) > 1 else (0,)
    around = [rows[i][j] * table.unit.factor for i in corners[0] for j in columns]
    slack = 1e-12 * max(abs(value) for value in around)
    assert min(around) - slack <= table.at(*places) <= max(around) + slack


@given(tables(), numbers, numbers)
def test_one_axis_agrees_with_numpy(table: Table, x: float, y: float) -> None:
    """Along the first axis the table is numpy's own linear interpolation, between held ends."""
    held = [si_points(axis)[0] for axis in table.axes[1:]]
    values = [row[0] * table.unit.factor for row in rows_of(table)]
    points = si_points(table.axes[0])
    for place in (x, y):
        found = table.at(place, *held)
        if table.outside == "refuse" and not points[0] <= place <= points[-1]:
            assert math.isnan(found)
        else:
            expected = np.interp(place, points, values)
            assert found == pytest.approx(expected, rel=1e-9, abs=1e-3)
