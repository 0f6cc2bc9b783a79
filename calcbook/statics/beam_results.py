"""The results of one beam: reactions, values at any place, peaks, envelopes and curves."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics.beam_diagrams import Diagrams, Envelope, Extremes, over_rows
from calcbook.statics.polynomials import value

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from calcbook.statics.beam_parts import Span, Support

    Array = NDArray[np.float64]

__all__ = ["BeamResult", "Envelope", "Extremes"]

SIDES = ("left", "right")
NEAR = 1e-9
"""A place within this part of the beam's length of a cut lies at the cut."""


@dataclass(frozen=True)
class BeamResult(Diagrams):
    """The diagrams of one beam; rows are load cases, or combinations of them.

    Attributes
    ----------
    supports, spans
        As of the beam, from left to right.
    """

    supports: tuple[Support, ...] = ()
    spans: tuple[Span, ...] = ()

    def shear(self, x: ArrayLike, side: str = "right") -> Array:
        """Return the shear force at places x, N, shape (rows, *shape of x); see `at`."""
        return self.at("shear", x, side)

    def moment(self, x: ArrayLike, side: str = "right") -> Array:
        """Return the bending moment at places x, N m, sagging positive; see `at`."""
        return self.at("moment", x, side)

    def slope(self, x: ArrayLike, side: str = "right") -> Array:
        """Return the slope at places x, rad, clockwise positive; see `at`."""
        return self.at("slope", x, side)

    def deflection(self, x: ArrayLike, side: str = "right") -> Array:
        """Return the deflection at places x, m, down positive; see `at`."""
        return self.at("deflection", x, side)

    def at(self, quantity: str, x: ArrayLike, side: str = "right") -> Array:
        """Return a quantity at places x.

        Parameters
        ----------
        quantity
            One of ``shear``, ``moment``, ``slope``, ``deflection``.
        x
            Places from the left end, m, of any shape.
        side
            ``left`` or ``right``: which side counts where there is a jump. At the ends of the beam
            it is the inner side.

        Returns
        -------
        array
            Shape (rows, *shape of x).

        Raises
        ------
        StaticsError
            For a place beyond the beam, or another side.
        """
        if side not in SIDES:
            raise StaticsError(f"the side '{side}' is not known", hint="sides: left, right")
        places = np.asarray(x, dtype=float)
        start, length = self.start[:, 0], self.length[:, 0]
        total = float(start[-1] + length[-1])
        near = NEAR * total
        if not ((places >= -near) & (places <= total + near)).all():
            raise StaticsError(
                f"the {quantity} is asked for at a place beyond the beam",
                hint=f"places run from 0 to {total:g} m",
            )
        flat = places.ravel()
        if side == "right":
            piece = np.searchsorted(start, flat + near, side="right") - 1
        else:
            piece = np.searchsorted(start, flat - near, side="left") - 1
        piece = np.clip(piece, 0, len(start) - 1)
        t = np.clip((flat - start[piece]) / length[piece], 0.0, 1.0)
        found = value(self._coefficients(quantity)[:, piece], t[:, np.newaxis])
        return found.T.reshape(-1, *places.shape)

    def curve(self, quantity: str, points: int = 21) -> tuple[Array, Array]:
        """Return a diagram to draw.

        Parameters
        ----------
        quantity
            What to draw.
        points
            Points on each piece, its two ends among them.

        Returns
        -------
        x, values
            Shapes (n,) and (rows, n). Where two pieces meet there are two points of one x, so that
            a jump is drawn upright.
        """
        t = np.linspace(0.0, 1.0, points)
        x = self.start + self.length * t
        values = value(self._coefficients(quantity)[:, :, np.newaxis], t[:, np.newaxis])
        return x.ravel(), values.reshape(x.size, -1).T

    def reaction_envelope(self) -> Envelope:
        """Return greatest and least reaction at each support over all rows, shape (supports,)."""
        each = self.reactions.T
        x = np.broadcast_to(
            np.array([float(s.x) for s in self.supports])[:, np.newaxis], each.shape
        )
        return over_rows(each, x, each, x)

    def envelope_at(self, quantity: str, x: ArrayLike) -> Envelope:
        """Return greatest and least value over all rows at places x, each of the shape of x."""
        places = np.asarray(x, dtype=float)
        sides = [np.moveaxis(self.at(quantity, places, side), 0, -1) for side in SIDES]
        where = np.broadcast_to(places[..., np.newaxis], sides[0].shape)
        return over_rows(np.maximum(*sides), where, np.minimum(*sides), where)
