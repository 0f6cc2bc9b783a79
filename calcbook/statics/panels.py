"""The load of a slab panel on the beams along its edges.

A two-way panel gives each beam what lies between it and lines at 45 degrees from the corners: a
triangle to the short edges, a trapezoid to the long ones. The equivalent uniform loads give the
same largest moment, or the same end shear, in a beam that spans the edge simply supported (the
usual formulas of two-way slabs, derived from the two shapes).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from calcbook.errors import StaticsError

Piece = tuple[float, float, float, float]


@dataclass(frozen=True)
class EdgeLoad:
    """What one panel gives to one of its edge beams.

    Attributes
    ----------
    length
        Of the edge in m.
    shape
        'triangle', 'trapezoid', 'uniform', or 'none'.
    peak, total
        The greatest load in N/m; all of it in N.
    pieces
        (x1, x2, w1, w2) from one end of the edge to the other, in m and N/m.
    for_moment, for_shear
        Equivalent uniform loads in N/m.
    """

    length: float
    shape: Literal["triangle", "trapezoid", "uniform", "none"]
    peak: float
    total: float
    pieces: tuple[Piece, ...]
    for_moment: float
    for_shear: float


@dataclass(frozen=True)
class Panel:
    """The load of a panel on one short and on one long edge; the opposite edges have the same.

    Attributes
    ----------
    one_way
        Whether the panel carries to its long edges only.
    short, long
        What one short and one long edge beam receives.
    """

    one_way: bool
    short: EdgeLoad
    long: EdgeLoad

    @property
    def total(self) -> float:
        """What the four edges receive together, in N."""
        return 2 * (self.short.total + self.long.total)


def slab_panel(pressure: float, width: float, depth: float, limit: float = 2.0) -> Panel:
    """Return what a rectangular slab panel gives to its edges.

    Parameters
    ----------
    pressure
        Load per area in Pa, down positive.
    width, depth
        The sides in m, in either order.
    limit
        Long to short side above which the panel carries one way (2 is common practice).

    Raises
    ------
    StaticsError
        For a side that is not above 0, a load that is no number, a limit below 1.
    """
    if not (np.isfinite([width, depth]).all() and width > 0 and depth > 0):
        raise StaticsError(
            f"A slab panel has the sides {width:g} and {depth:g}", hint="Give two lengths above 0."
        )
    if not np.isfinite(pressure):
        raise StaticsError("The load of a slab panel is not a number")
    if not limit >= 1:
        raise StaticsError(
            f"A slab panel carries one way above a ratio of {limit:g}",
            hint="Long side to short side is 1 at least.",
        )
    short, long = sorted((width, depth))
    if long > limit * short:
        return Panel(True, _nothing(short), _uniform(pressure * short / 2, long))
    return Panel(False, _triangle(pressure, short), _trapezoid(pressure, short, long))


def _nothing(length: float) -> EdgeLoad:
    return EdgeLoad(length, "none", 0.0, 0.0, (), 0.0, 0.0)


def _uniform(peak: float, length: float) -> EdgeLoad:
    return EdgeLoad(
        length, "uniform", peak, peak * length, ((0.0, length, peak, peak),), peak, peak
    )


def _triangle(pressure: float, length: float) -> EdgeLoad:
    peak, middle = pressure * length / 2, length / 2
    pieces = ((0.0, middle, 0.0, peak), (middle, length, peak, 0.0))
    total = peak * length / 2
    return EdgeLoad(length, "triangle", peak, total, pieces, peak * 2 / 3, peak / 2)


def _trapezoid(pressure: float, short: float, length: float) -> EdgeLoad:
    peak, slope, ratio = pressure * short / 2, short / 2, length / short
    if ratio == 1:
        return _triangle(pressure, length)
    far = length - slope
    pieces = ((0.0, slope, 0.0, peak), (slope, far, peak, peak), (far, length, peak, 0.0))
    for_moment, for_shear = peak * (1 - 1 / (3 * ratio**2)), peak * (1 - 1 / (2 * ratio))
    total = peak * (length - slope)
    return EdgeLoad(length, "trapezoid", peak, total, pieces, for_moment, for_shear)
