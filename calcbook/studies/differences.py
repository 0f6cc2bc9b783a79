"""Derivatives from differences: one-sided and central, extrapolated to a step of zero.

Richardson's extrapolation over steps that halve (L. F. Richardson, Phil. Trans. R. Soc. A 210,
1911), with the entry of the table whose error estimate is smallest, as Ridders does (Adv. Eng.
Softw. 4, 1982). The steps are powers of two, so that a place and its step add without rounding.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

STEPS = 14
FIRST = 6  # the first step is the size of the place over 2**FIRST
_FEWEST = 5
_ORDERS = 6
_EPS = float(np.finfo(float).eps)
_AMPLIFIED = 8.0
_SAME = 1e-9
_KINK = 1e-5
_SETTLED = 1e-4
_STAYS = 0.9


@dataclass(frozen=True)
class Side:
    """What lies on one side of a place.

    ``slope`` is None where there is none; ``start`` is the value the function comes from, where
    it jumps at the place, else None; ``error`` estimates that of the slope.
    """

    slope: float | None
    error: float
    start: float | None = None


@dataclass(frozen=True)
class Local:
    """A function about a place: one slope, or one on either side.

    Attributes
    ----------
    slope
        The derivative, where there is one.
    below, above
        The two sides; None for a side that was not looked at.
    kink
        Whether the sides have slopes that differ.
    """

    slope: float | None
    below: Side | None
    above: Side | None
    kink: bool


def steps(size: float, room: float) -> np.ndarray:
    """Return the steps (STEPS,), largest first, within the room there is; empty where none is."""
    largest = 2.0 ** (math.floor(math.log2(size)) - FIRST)
    if room < largest * 2.0 ** (1 - STEPS):
        return np.empty(0)
    if room < largest:
        largest = 2.0 ** math.floor(math.log2(room))
    return np.asarray(largest * 2.0 ** -np.arange(STEPS))


def local(at: float, size: float, step: np.ndarray, below: np.ndarray, above: np.ndarray) -> Local:
    """Return the slopes of a function about a place.

    Parameters
    ----------
    at
        The value at the place.
    size
        The size of the place, by which slopes are judged to be nothing.
    step, below, above
        The steps (n,), halving, and the values a step below and above the place; nan where there
        is none, and an empty array for a side that is not to be looked at.
    """
    floor = 1e-9 * max(abs(at), _largest(below), _largest(above)) / size
    left = _side(at, -step, below, floor) if below.size else None
    right = _side(at, step, above, floor) if above.size else None
    if left is None or right is None or left.start is not None or right.start is not None:
        return Local(None, left, right, kink=False)
    if left.slope is None or right.slope is None:
        return Local(None, left, right, kink=False)
    apart = abs(right.slope - left.slope)
    larger = max(abs(left.slope), abs(right.slope))
    if apart > _KINK * larger + 20.0 * (left.error + right.error) + 100.0 * floor:
        return Local(None, left, right, kink=True)
    slope, error = _extrapolated((above - below) / (2.0 * step), step, 2, _EPS * abs(at))
    if slope is None or error > left.error + right.error + floor:
        slope = (left.slope + right.slope) / 2.0
    return Local(slope, left, right, kink=False)


def _largest(values: np.ndarray) -> float:
    found = np.abs(values[np.isfinite(values)])
    return float(found.max()) if found.size else 0.0


def _side(at: float, step: np.ndarray, values: np.ndarray, floor: float) -> Side:
    """Return the slope on one side; ``step`` carries the sign of the side."""
    away = values - at
    near = away[-3:]
    largest = max(abs(at), _largest(values))
    if not np.isfinite(near).all():
        return Side(None, math.inf)
    start = None
    if abs(near[-1]) > _SAME * largest and abs(near[-1]) > _STAYS * np.abs(near).max():
        found, _ = _extrapolated(values, step, 1, 0.0)
        start = float(values[-1]) if found is None else found
        away = values - start
    slope, error = _extrapolated(away / step, step, 1, _EPS * largest)
    if slope is None or error > max(_SETTLED * abs(slope), 1e3 * floor):
        return Side(None, math.inf, start)
    return Side(slope, error, start)


def _extrapolated(
    values: np.ndarray, step: np.ndarray, power: int, noise: float
) -> tuple[float | None, float]:
    """Return values extrapolated to a step of zero, and an estimate of the error.

    ``power`` is that of the step in which the error goes; ``noise`` the rounding of a value that
    was divided by the step. Values that are not finite end the series toward larger steps.
    """
    bad = np.flatnonzero(~np.isfinite(values))
    begin = int(bad[-1]) + 1 if bad.size else 0
    row, sizes = values[begin:], np.abs(step[begin:])
    if row.size < _FEWEST:
        return None, math.inf
    best, least = None, math.inf
    for order in range(1, min(_ORDERS, row.size - 1)):
        factor = 2.0 ** (power * order)
        finer = (factor * row[1:] - row[:-1]) / (factor - 1.0)
        rounding = _AMPLIFIED * noise / sizes[order:]
        errors = np.maximum(np.abs(finer - row[1:]), np.abs(finer - row[:-1])) + rounding
        place = int(np.argmin(errors))
        if errors[place] < least:
            best, least = float(finer[place]), float(errors[place])
        row = finer
    return best, least
