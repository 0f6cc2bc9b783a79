"""Loads on a beam: line loads, point loads and moments, each of one load case.

Loads down are positive, moments clockwise are positive: a clockwise moment raises the bending
moment where it acts, going from left to right.
"""

from __future__ import annotations

import dataclasses
import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

import numpy as np

from calcbook.errors import StaticsError

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from calcbook.statics.beam import Beam

    Array = NDArray[np.float64]

SAME_PLACE = 1e-9
"""Places nearer to each other than this part of the beam's length are one place."""


@dataclass(frozen=True)
class LineLoad:
    """A load along a part of a beam.

    Parameters
    ----------
    x1, x2
        Where it begins and ends, m from the left end.
    w1, w2
        Its intensity there, N/m down; straight between. Without ``w2`` it is uniform.
    case
        Index of the load case.
    label
        What messages call it.
    """

    x1: float
    x2: float
    w1: float
    w2: float | None = None
    case: int = 0
    label: str = ""

    @property
    def end(self) -> float:
        """Return the intensity at ``x2``, N/m."""
        return self.w1 if self.w2 is None else self.w2

    def at(self, x: float) -> float:
        """Return the intensity at ``x``, N/m, on the straight line through both ends."""
        part = (x - self.x1) / (self.x2 - self.x1)
        return self.w1 * (1 - part) + self.end * part

    def within(self, x1: float, x2: float) -> LineLoad | None:
        """Return the part of the load between two places, or None where there is none."""
        left, right = max(x1, self.x1), min(x2, self.x2)
        if left >= right:
            return None
        return dataclasses.replace(self, x1=left, x2=right, w1=self.at(left), w2=self.at(right))


@dataclass(frozen=True)
class PointLoad:
    """A load at one place.

    Parameters
    ----------
    x
        Place, m from the left end.
    P
        The load, N down.
    case
        Index of the load case.
    label
        What messages call it.
    """

    x: float
    P: float
    case: int = 0
    label: str = ""


@dataclass(frozen=True)
class MomentLoad:
    """A moment applied at one place.

    Parameters
    ----------
    x
        Place, m from the left end.
    M
        The moment, N m clockwise.
    case
        Index of the load case.
    label
        What messages call it.
    """

    x: float
    M: float
    case: int = 0
    label: str = ""


Load: TypeAlias = LineLoad | PointLoad | MomentLoad

_WORDS = {LineLoad: "line load", PointLoad: "point load", MomentLoad: "moment"}


def named(load: Load, index: int) -> str:
    """Return what a message calls a load: its label, or its kind and number."""
    return f"load {load.label}" if load.label else f"{_WORDS[type(load)]} {index + 1}"


def count_cases(loads: Sequence[Load], cases: int | None) -> int:
    """Return the number of load cases: the one given, else one more than the highest index.

    Raises
    ------
    StaticsError
        For a load of a case that is not there, or no case at all.
    """
    highest = max((load.case for load in loads), default=0)
    count = highest + 1 if cases is None else cases
    if count < 1:
        raise StaticsError("there is no load case", hint="a beam has at least one, even if empty")
    for i, load in enumerate(loads):
        if not 0 <= load.case < count:
            name = named(load, i)
            raise StaticsError(
                f"{name} belongs to load case {load.case}, of {count} counted from 0", named=(name,)
            )
    return count


def check_loads(loads: Sequence[Load], length: float) -> None:
    """Refuse a load that is no number, off the beam, or of no length.

    Raises
    ------
    StaticsError
        Naming the load.
    """
    for i, load in enumerate(loads):
        name = named(load, i)
        numbers = [v for k, v in vars(load).items() if k not in {"label", "case"} and v is not None]
        if not all(math.isfinite(v) for v in numbers):
            raise StaticsError(f"{name} has a value that is no number", named=(name,))
        places = (load.x1, load.x2) if isinstance(load, LineLoad) else (load.x,)
        near = SAME_PLACE * length
        if min(places) < -near or max(places) > length + near:
            end = "left" if min(places) < -near else "right"
            raise StaticsError(
                f"{name} lies beyond the {end} end of the beam",
                hint=f"places run from 0 to {length:g} m",
                named=(name,),
            )
        if isinstance(load, LineLoad) and load.x2 - load.x1 <= near:
            raise StaticsError(
                f"{name} ends where it begins or before",
                hint="give its left end first, or a point load",
                named=(name,),
            )


def load_totals(loads: Sequence[Load], cases: int | None = None) -> tuple[Array, Array]:
    """Return the resultants of every load case, for a check of equilibrium.

    Returns
    -------
    down, moment
        Shape (cases,): the total load, N down, and the moment of the loads about the left end,
        N m clockwise. Reactions R (up) at x with moments m (clockwise) balance them when
        ``sum(R) = down`` and ``sum(R*x) = moment + sum(m)``.
    """
    count = count_cases(loads, cases)
    down, moment = np.zeros(count), np.zeros(count)
    for load in loads:
        if isinstance(load, MomentLoad):
            moment[load.case] += load.M
            continue
        for x, force in _resultants(load):
            down[load.case] += force
            moment[load.case] += force * x
    return down, moment


def _resultants(load: LineLoad | PointLoad) -> list[tuple[float, float]]:
    """Return place and size of equal forces; a line load is two triangles."""
    if isinstance(load, PointLoad):
        return [(load.x, load.P)]
    long = load.x2 - load.x1
    return [
        (load.x1 + long / 3, load.w1 * long / 2),
        (load.x1 + 2 * long / 3, load.end * long / 2),
    ]


def split_by_span(beam: Beam, loads: Sequence[Load]) -> tuple[tuple[Load, ...], ...]:
    """Cut loads at the supports.

    Parameters
    ----------
    beam
        Whose spans they are.
    loads
        Of any cases; the parts keep case and label.

    Returns
    -------
    tuple
        For each of ``beam.spans``, the loads on it. What acts exactly at a support belongs to the
        span that begins there; at the right end, to the last span.

    Raises
    ------
    StaticsError
        For a load that is off the beam or no number.
    """
    check_loads(loads, beam.length)
    near = SAME_PLACE * beam.length
    found: list[tuple[Load, ...]] = []
    for span in beam.spans:
        last = span is beam.spans[-1]
        parts: list[Load] = []
        for load in loads:
            if isinstance(load, LineLoad):
                part = load.within(span.x1, span.x2)
                if part is not None and part.x2 - part.x1 > near:
                    parts.append(part)
            elif span.x1 - near <= load.x and (last or load.x < span.x2 - near):
                parts.append(load)
        found.append(tuple(parts))
    return tuple(found)
