"""Shear, bending moment, slope and deflection of beams as exact pieces: peaks and envelopes.

Every array has the load cases, or what was combined of them, as *rows*; in front of them there may
be an axis of beams. Where there are pieces, they stand in front of both: peaks are then taken over
leading axes, which numpy does fastest.
"""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Self

import numpy as np

from calcbook.errors import StaticsError, near_match
from calcbook.statics.polynomials import candidates, derivative

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]
    Whole = NDArray[np.intp]

QUANTITIES = ("shear", "moment", "slope", "deflection")

SAME = 1e-9
"""Two peaks that differ by this part of the greatest are equal: the first is named."""


@dataclass(frozen=True)
class Pieces:
    """A diagram as polynomials.

    Attributes
    ----------
    start, length
        Of the pieces, shape (pieces,), or (beams, pieces), m.
    coefficients
        Shape (rows, pieces, degree + 1): ``sum(c[k] * t**k)`` with ``t = (x - start)/length``.
    """

    start: Array
    length: Array
    coefficients: Array


@dataclass(frozen=True)
class Extremes:
    """Greatest and least value of each row, and where each is first reached.

    Attributes
    ----------
    max, x_max, min, x_min
        Shape (rows,), or (rows, spans). At a jump both sides count.
    """

    max: Array
    x_max: Array
    min: Array
    x_min: Array


@dataclass(frozen=True)
class Envelope:
    """Greatest and least value over all rows, where, and in which row.

    Attributes
    ----------
    max, x_max, row_max, min, x_min, row_min
        Single values, or one for each span, support or place. Of equal peaks the first row counts.
    """

    max: Array
    x_max: Array
    row_max: Whole
    min: Array
    x_min: Array
    row_min: Whole


@dataclass(frozen=True)
class Diagrams:
    """The diagrams of a beam, or of many beams of one shape.

    Attributes
    ----------
    start, length, stiffness
        Left end, length and EI of the pieces, shape (pieces, 1) or (pieces, beams, 1).
    bending
        Coefficients of the bending moment, lowest power first, shape (4, pieces, ..., rows).
    slope_at, deflection_at
        Slope and deflection where the pieces begin, shape (pieces, ..., rows).
    reactions, reaction_moments
        Shape (..., rows, supports): N up, and N m clockwise.
    residuals
        Of equilibrium at the nodes, relative, shape (..., rows); of combined rows, that of the
        worst case combined.
    span_pieces
        The pieces of each span.
    """

    start: Array
    length: Array
    stiffness: Array
    bending: Array
    slope_at: Array
    deflection_at: Array
    reactions: Array
    reaction_moments: Array
    residuals: Array
    span_pieces: tuple[slice, ...]
    _found: dict[str, Array] = dataclasses.field(default_factory=dict, repr=False, compare=False)

    @property
    def residual(self) -> float:
        """Return the greatest of the residuals."""
        return float(self.residuals.max(initial=0.0))

    def combined(self, factors: ArrayLike) -> Self:
        """Return the diagrams of combinations of the rows.

        Parameters
        ----------
        factors
            Shape (combinations, rows).

        Raises
        ------
        StaticsError
            For factors of another number of rows, or that are no numbers.
        """
        f = np.asarray(factors, dtype=float)
        rows = self.reactions.shape[-2]
        if f.ndim != 2 or f.shape[1] != rows:  # noqa: PLR2004  combinations and cases
            raise StaticsError(
                f"the factors have the shape {f.shape}, and there are {rows} load cases",
                hint="give one row for each combination, with one factor for each load case",
            )
        if not np.isfinite(f).all():
            raise StaticsError("a factor of a combination is no number")
        by_piece = ("bending", "slope_at", "deflection_at")
        changed: dict[str, Any] = {name: getattr(self, name) @ f.T for name in by_piece}
        changed["reactions"] = f @ self.reactions
        changed["reaction_moments"] = f @ self.reaction_moments
        used = np.where(f != 0, self.residuals[..., np.newaxis, :], 0.0)
        worst = used.max(axis=-1, initial=0.0)
        return dataclasses.replace(self, **changed, residuals=worst, _found={})

    def pieces(self, quantity: str) -> Pieces:
        """Return a diagram as polynomials.

        Raises
        ------
        StaticsError
            For an unknown quantity, as in every method that takes one.
        """
        c = self._coefficients(quantity)
        start, length = (a[..., 0].T for a in (self.start, self.length))
        return Pieces(start, length, np.moveaxis(c, (0, 1), (-1, -2)))

    def extremes(self, quantity: str) -> Extremes:
        """Return greatest and least value of each row, from the roots of the derivative."""
        return self._extremes(quantity, slice(None))

    def span_extremes(self, quantity: str) -> Extremes:
        """Return greatest and least value of each row in each span, shape (rows, spans)."""
        each = [self._extremes(quantity, at) for at in self.span_pieces]
        names = ("max", "x_max", "min", "x_min")
        return Extremes(*(np.stack([getattr(e, n) for e in each], axis=-1) for n in names))

    def envelope(self, quantity: str) -> Envelope:
        """Return greatest and least value over all rows."""
        found = self.extremes(quantity)
        return over_rows(found.max, found.x_max, found.min, found.x_min)

    def span_envelope(self, quantity: str) -> Envelope:
        """Return greatest and least value over all rows in each span, shape (spans,)."""
        found = self.span_extremes(quantity)
        each = (np.swapaxes(a, -1, -2) for a in (found.max, found.x_max, found.min, found.x_min))
        return over_rows(*each)

    def _extremes(self, quantity: str, at: slice) -> Extremes:
        places, values = candidates(self._coefficients(quantity)[:, at])
        places *= self.length[at]
        places += self.start[at]
        high, low = values.max(axis=(0, 1)), values.min(axis=(0, 1))
        slack = _slack(high, low)
        reached, sunk = values >= high - slack, values <= low + slack
        return Extremes(high, _leftmost(places, reached), low, _leftmost(places, sunk))

    def _coefficients(self, quantity: str) -> Array:
        if quantity not in self._found:
            if quantity not in _MAKE:
                raise StaticsError(
                    f"a beam has no '{quantity}'",
                    hint=near_match(quantity, QUANTITIES) or f"it has {', '.join(QUANTITIES)}",
                )
            self._found[quantity] = _MAKE[quantity](self)
        return self._found[quantity]


def over_rows(most: Array, x_most: Array, least: Array, x_least: Array) -> Envelope:
    """Return the envelope of values and their places with the rows on the last axis."""
    high, low = most.max(axis=-1), least.min(axis=-1)
    slack = _slack(high, low)
    i = np.argmax(most >= (high - slack)[..., np.newaxis], axis=-1)
    j = np.argmax(least <= (low + slack)[..., np.newaxis], axis=-1)
    return Envelope(high, _picked(x_most, i), i, low, _picked(x_least, j), j)


def _slack(high: Array, low: Array) -> Array:
    slack: Array = SAME * np.maximum(np.abs(high), np.abs(low))
    return slack


def _leftmost(places: Array, reached: NDArray[np.bool_]) -> Array:
    found: Array = np.where(reached, places, np.inf).min(axis=(0, 1))
    return found


def _picked(values: Array, index: Whole) -> Array:
    found: Array = np.take_along_axis(values, index[..., np.newaxis], axis=-1)[..., 0]
    return found


def _shear(d: Diagrams) -> Array:
    return derivative(d.bending) / d.length


def _moment(d: Diagrams) -> Array:
    return d.bending


def _slope(d: Diagrams) -> Array:
    """Integrate the curvature -M/EI once."""
    scale = -d.length / d.stiffness
    return np.stack([d.slope_at, *(scale * c / (k + 1) for k, c in enumerate(d.bending))])


def _deflection(d: Diagrams) -> Array:
    """Integrate the slope once more."""
    slope = _slope(d)
    return np.stack([d.deflection_at, *(d.length * c / (k + 1) for k, c in enumerate(slope))])


_MAKE: dict[str, Callable[[Diagrams], Array]] = {
    "shear": _shear,
    "moment": _moment,
    "slope": _slope,
    "deflection": _deflection,
}
