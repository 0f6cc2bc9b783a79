"""Tables of one or two axes, read by linear interpolation, in coherent SI."""

from __future__ import annotations

import math
from bisect import bisect_right
from dataclasses import dataclass, field
from itertools import pairwise
from typing import TYPE_CHECKING, overload

import numpy as np

from calcbook.errors import DeclarationError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from calcbook.units import Unit

    Array = NDArray[np.float64]


@dataclass(frozen=True)
class Axis:
    """One axis of a table: its points in its unit, strictly ascending."""

    name: str
    unit: Unit
    points: tuple[float, ...]

    def __post_init__(self) -> None:
        """Check the points."""
        object.__setattr__(self, "points", _numbers(self.points, f"axis '{self.name}'"))
        if len(self.points) < 2:  # noqa: PLR2004 - a straight line has two ends
            raise DeclarationError(
                f"axis '{self.name}' has fewer than two points",
                hint="give at least two points to interpolate between",
            )
        for before, after in pairwise(self.points):
            if after <= before:
                raise DeclarationError(
                    f"the points of axis '{self.name}' do not ascend: {after:g} after {before:g}",
                    hint="give the points from the smallest to the largest, each once",
                )


@dataclass(frozen=True)
class Table:
    """Values over one or two axes.

    Parameters
    ----------
    name
        What the table gives.
    axes
        One or two axes.
    values
        In ``unit``; shape (points of the first axis) or (first axis, second axis).
    unit
        The unit of the values.
    outside
        What holds beyond the ends: 'hold' keeps the value at the end, 'refuse' gives nan.
    source
        Where the values come from.
    from_memory
        Whether the values still have to be confirmed against the source.

    Raises
    ------
    DeclarationError
        If the points do not ascend, the shape is wrong, or a value is not a finite number.
    """

    name: str
    axes: tuple[Axis, ...]
    values: tuple[float, ...] | tuple[tuple[float, ...], ...]
    unit: Unit
    outside: str
    source: str
    from_memory: bool = False
    _points: tuple[tuple[float, ...], ...] = field(init=False, repr=False, compare=False)
    _steps: tuple[tuple[float, ...], ...] = field(init=False, repr=False, compare=False)
    _rows: tuple[tuple[float, ...], ...] = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        """Check the form and the values, and keep them in SI."""
        object.__setattr__(self, "axes", tuple(self.axes))
        self._check_form()
        rows = self._checked_rows()
        object.__setattr__(self, "values", rows if len(self.axes) > 1 else rows[0])
        si = tuple(tuple(value * self.unit.factor for value in row) for row in rows)
        points = tuple(
            tuple(point * axis.unit.factor for point in axis.points) for axis in self.axes
        )
        # The step after the last point is never walked; 1 keeps the division there harmless.
        steps = tuple(
            (*(after - before for before, after in pairwise(along)), 1.0) for along in points
        )
        object.__setattr__(self, "_points", points)
        object.__setattr__(self, "_steps", steps)
        object.__setattr__(self, "_rows", si)

    def _check_form(self) -> None:
        if len(self.axes) not in {1, 2}:
            raise DeclarationError(
                f"table '{self.name}' has {len(self.axes)} axes", hint="give one axis or two"
            )
        if self.outside not in {"hold", "refuse"}:
            raise DeclarationError(
                f"table '{self.name}' does not know what '{self.outside}' means outside its ends",
                hint="write 'hold' to keep the value at the end, or 'refuse'",
            )
        if len({axis.name for axis in self.axes}) < len(self.axes):
            raise DeclarationError(
                f"table '{self.name}' has two axes named '{self.axes[0].name}'",
                hint="give each axis its own name",
            )

    def _checked_rows(self) -> tuple[tuple[float, ...], ...]:
        """Return the values as rows; a table of one axis has a single row."""
        where = f"table '{self.name}'"
        if len(self.axes) == 1:
            rows: tuple[tuple[float, ...], ...] = (_numbers(self.values, where),)
        else:
            if len(self.values) != len(self.axes[0].points):
                self._refuse_shape(f"{len(self.values)} rows", self.axes[0])
            rows = tuple(_numbers(row, where) for row in self.values)
        for row in rows:
            if len(row) != len(self.axes[-1].points):
                self._refuse_shape(f"{len(row)} values in a row", self.axes[-1])
        return rows

    def _refuse_shape(self, found: str, axis: Axis) -> None:
        raise DeclarationError(
            f"table '{self.name}' has {found}, and axis '{axis.name}' has "
            f"{len(axis.points)} points",
            hint="give one value for each point of the axis",
        )

    @overload
    def at(self, x: float, y: float | None = None) -> float: ...
    @overload
    def at(self, x: Array, y: Array | float | None = None) -> Array: ...
    @overload
    def at(self, x: float, y: Array) -> Array: ...

    def at(self, x: float | Array, y: float | Array | None = None) -> float | Array:
        """Interpolate linearly (bilinearly over two axes).

        Parameters
        ----------
        x, y
            Places on the axes in coherent SI; numbers, or arrays that broadcast. ``y`` is given
            exactly when there are two axes.

        Returns
        -------
        float or ndarray
            In coherent SI; exact at the points; nan for nan, and outside where that is refused.

        Raises
        ------
        DeclarationError
            If the number of places is not the number of axes.
        """
        if (y is None) == (len(self.axes) > 1):
            names = " and ".join(f"'{axis.name}'" for axis in self.axes)
            raise DeclarationError(
                f"table '{self.name}' is read at {names}", hint="give one place for each axis"
            )
        if isinstance(x, (float, int)) and isinstance(y, (float, int, type(None))):
            return self._at_place(x, y)
        return self._at_places(np.asarray(x, float), None if y is None else np.asarray(y, float))

    def _at_place(self, x: float, y: float | None) -> float:
        hold = self.outside == "hold"
        i, t = _locate(x, self._points[0], self._steps[0], hold)
        rows = self._rows
        if t != t:  # noqa: PLR0124 - nan: outside, or handed in
            return math.nan
        if y is None:
            low = rows[0][i]
            return low + (rows[0][i + 1] - low) * t if t else low
        j, u = _locate(y, self._points[1], self._steps[1], hold)
        if u != u:  # noqa: PLR0124 - nan: outside, or handed in
            return math.nan
        # At t or u = 0 the neighbour may be beyond the end, and is not needed.
        near, far = rows[i], rows[i + 1 if t else i]
        k = j + 1 if u else j
        low = near[j] + (far[j] - near[j]) * t
        high = near[k] + (far[k] - near[k]) * t
        return low + (high - low) * u

    def _at_places(self, x: Array, y: Array | None) -> Array:
        hold = self.outside == "hold"
        rows: Array = np.array(self._rows)
        i, t = _locate_all(x, self._points[0], self._steps[0], hold)
        if y is None:
            row = rows[0]
            return _between(row[i], row[np.minimum(i + 1, row.size - 1)], t)
        j, u = _locate_all(y, self._points[1], self._steps[1], hold)
        i1, j1 = np.minimum(i + 1, rows.shape[0] - 1), np.minimum(j + 1, rows.shape[1] - 1)
        low = _between(rows[i, j], rows[i1, j], t)
        return _between(low, _between(rows[i, j1], rows[i1, j1], t), u)


def _between(low: Array, high: Array, part: Array) -> Array:
    found: Array = low + (high - low) * part
    return found


def _numbers(values: object, where: str) -> tuple[float, ...]:
    if not isinstance(values, (tuple, list)):
        raise DeclarationError(f"{where} holds {values!r}", hint="give a row of numbers")
    numbers = []
    for value in values:
        if isinstance(value, bool) or not isinstance(value, (int, float, np.integer)):
            raise DeclarationError(f"{where} holds {value!r}", hint="give numbers only")
        if not math.isfinite(value):
            raise DeclarationError(f"{where} holds {value!r}", hint="give finite numbers only")
        numbers.append(float(value))
    return tuple(numbers)


def _locate(
    x: float, points: tuple[float, ...], steps: tuple[float, ...], hold: bool
) -> tuple[int, float]:
    """Return the point at or before ``x``, and the part of the step behind it; nan if refused."""
    if points[0] <= x < points[-1]:
        i = bisect_right(points, x) - 1
        return i, (x - points[i]) / steps[i]
    if x == points[-1] or (hold and x > points[-1]):
        return len(points) - 1, 0.0
    return 0, 0.0 if hold and x < points[0] else math.nan


def _locate_all(
    x: Array, points: tuple[float, ...], steps: tuple[float, ...], hold: bool
) -> tuple[NDArray[np.intp], Array]:
    """As ``_locate``, for an array of any shape."""
    ends = np.array(points)
    held = np.clip(x, ends[0], ends[-1])
    i = np.clip(np.searchsorted(ends, held, side="right") - 1, 0, len(ends) - 1)
    t = (held - ends[i]) / np.array(steps)[i]
    if not hold:
        t = np.where(held == x, t, np.nan)
    return i, t
