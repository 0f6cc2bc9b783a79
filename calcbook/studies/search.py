"""All places in a range where a function is zero, from values it gives for many places at once.

The range is scanned first; where neighbours differ in sign the bracket is parted again and again
until its ends are neighbours as floats (bisection, many places a round). Where the function comes
near zero without passing it, the place is looked at more closely. A jump over zero is told apart
from a zero. What is narrower than the scan can be missed.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable

    Many = Callable[[np.ndarray], np.ndarray]

PARTS = 32
ROUNDS = 14
NEAR = 1e-12
REACHED = 1e-9
MOST = 40
_LINEAR, _SPREAD, _AROUND = 201, 121, 81
_STRETCH = 3


@dataclass(frozen=True)
class Root:
    """A zero: the place, the bracket it was found in, and the width it was refined to."""

    at: float
    low: float
    high: float
    width: float


@dataclass
class Search:
    """What was found.

    Attributes
    ----------
    roots
        In order of their places.
    stretches
        Ranges (low, high) in which every place is a zero.
    jumps
        (below, above, value below, value above) where the function passes zero without being it.
    nearest
        The place where it is nearest to zero, and its value there; nan where it has none at all.
    scanned
        How many places the scan had.
    missing
        Whether the function has no value somewhere in the range.
    flat
        Whether it is the same everywhere.
    crowded
        Whether it passes zero more often than is followed up.
    """

    roots: list[Root] = field(default_factory=list)
    stretches: list[tuple[float, float]] = field(default_factory=list)
    jumps: list[tuple[float, float, float, float]] = field(default_factory=list)
    nearest: tuple[float, float] = (math.nan, math.nan)
    scanned: int = 0
    missing: bool = False
    flat: bool = False
    crowded: bool = False


def places(low: float, high: float, near: float) -> np.ndarray:
    """Return the places to scan: evenly, by powers of ten from zero, and about the value known."""
    size = max(abs(low), abs(high))
    powers = size * np.logspace(-9, 0, _SPREAD)
    about = np.linspace(-0.5, 0.5, _AROUND) * (abs(near) or size / 100)
    every = np.concatenate(
        [np.linspace(low, high, _LINEAR), powers, -powers, near + about, [near, 0.0]]
    )
    inside = (every >= low) & (every <= high)
    return np.unique(np.concatenate([every[inside], [low, high]]))


def search(function: Many, low: float, high: float, near: float, scale: float) -> Search:
    """Find all zeros of a function in a range.

    Parameters
    ----------
    function
        Takes places (n,) and returns values (n,), nan where it has none.
    low, high, near
        The range, and a place in it that is known.
    scale
        The size its values are judged by: below ``NEAR`` of it a value is zero.
    """
    x = places(low, high, near)
    y = function(x)
    found = Search(scanned=x.size, missing=not np.isfinite(y).all())
    x, y = _toward_edges(function, x, y)
    kept = np.isfinite(y)
    if not kept.any():
        return found
    spread = float(y[kept].max() - y[kept].min())
    found.flat = spread <= NEAR * scale
    if found.flat:
        best = int(np.argmin(np.abs(x - near) + np.where(kept, 0.0, math.inf)))
        found.nearest = (float(x[best]), float(y[best]))
        if abs(y[best]) <= REACHED * scale:
            found.stretches.append((float(x[kept][0]), float(x[kept][-1])))
        return found
    x, y = _near_misses(function, x, y, NEAR * scale)
    best = int(np.nanargmin(np.abs(y)))
    found.nearest = (float(x[best]), float(y[best]))
    _zeros(function, x, y, scale, found)
    _crossings(function, x, y, scale, found, near=near)
    found.roots.sort(key=lambda root: root.at)
    return found


def _merged(
    function: Many, x: np.ndarray, y: np.ndarray, more: np.ndarray
) -> tuple[np.ndarray, np.ndarray]:
    """Add places, and the values there, in order."""
    more = np.setdiff1d(more, x)
    if not more.size:
        return x, y
    every, values = np.concatenate([x, more]), np.concatenate([y, function(more)])
    order = np.argsort(every)
    return every[order], values[order]


def _between(x: np.ndarray, left: np.ndarray) -> np.ndarray:
    """Return places between each of the places ``left`` and the one after it."""
    parts = np.linspace(0.0, 1.0, PARTS + 1)[1:-1]
    return np.concatenate([x[i] + (x[i + 1] - x[i]) * parts for i in left])


def _toward_edges(function: Many, x: np.ndarray, y: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Add places toward where the function ceases to have a value."""
    for _ in range(3):
        edges = np.flatnonzero(np.diff(np.isfinite(y).astype(int)))
        if not 0 < edges.size <= PARTS:
            break
        x, y = _merged(function, x, y, _between(x, edges))
    return x, y


def _near_misses(
    function: Many, x: np.ndarray, y: np.ndarray, zero: float
) -> tuple[np.ndarray, np.ndarray]:
    """Add places where the function turns back before zero, until it passes it or is settled."""
    for _ in range(8):
        size = np.abs(y)
        inner = (size[1:-1] <= size[:-2]) & (size[1:-1] <= size[2:]) & (size[1:-1] > zero)
        alike = (np.sign(y[1:-1]) == np.sign(y[:-2])) & (np.sign(y[1:-1]) == np.sign(y[2:]))
        wide = (x[2:] - x[:-2]) > 1e-9 * np.maximum(np.abs(x[1:-1]), 1e-300)
        lows = np.flatnonzero(inner & alike & wide) + 1
        if not 0 < lows.size <= PARTS:
            break
        x, y = _merged(function, x, y, _between(x, np.union1d(lows - 1, lows)))
    return x, y


def _zeros(function: Many, x: np.ndarray, y: np.ndarray, scale: float, found: Search) -> None:
    """Note the places of the scan that are zeros, alone or in a row."""
    zero = np.isfinite(y) & (np.abs(y) <= NEAR * scale)
    places_ = np.flatnonzero(zero)
    for run in np.split(places_, np.flatnonzero(np.diff(places_) > 1) + 1):
        if not run.size:
            continue
        first, last = int(run[0]), int(run[-1])
        if run.size >= _STRETCH:
            ends = (_edge(function, x, first, -1, scale), _edge(function, x, last, 1, scale))
            found.stretches.append(ends)
            continue
        best = run[np.argmin(np.abs(y[run]))]
        low, high = x[max(first - 1, 0)], x[min(last + 1, x.size - 1)]
        found.roots.append(Root(float(x[best]), float(low), float(high), 0.0))


def _edge(function: Many, x: np.ndarray, place: int, way: int, scale: float) -> float:
    """Return where a stretch of zeros ends, beyond the last place that is one."""
    if not 0 <= place + way < x.size:
        return float(x[place])
    inside, outside = float(x[place]), float(x[place + way])
    for _ in range(ROUNDS):
        tries = inside + (outside - inside) * np.linspace(0.0, 1.0, PARTS + 1)
        still = np.abs(function(tries)) <= NEAR * scale
        last = int(np.argmin(still)) if not still.all() else PARTS
        inside, outside = float(tries[max(last - 1, 0)]), float(tries[last])
    return inside


def _crossings(
    function: Many, x: np.ndarray, y: np.ndarray, scale: float, found: Search, *, near: float
) -> None:
    """Refine every change of sign, the nearest first, and tell zeros from jumps."""
    small = NEAR * scale
    sides = np.where(np.abs(y) <= small, 0.0, np.sign(y))
    with np.errstate(invalid="ignore"):
        left = np.flatnonzero(sides[:-1] * sides[1:] < 0)
    found.crowded = left.size > MOST
    left = left[np.argsort(np.abs(x[left] - near), kind="stable")]
    for place in map(int, left[:MOST]):
        low, high, y_low, y_high = _refined(function, x[place : place + 2], y[place : place + 2])
        at, value = (low, y_low) if abs(y_low) <= abs(y_high) else (high, y_high)
        if abs(value) <= REACHED * scale:
            ends = float(x[place]), float(x[place + 1])
            found.roots.append(Root(at, *ends, high - low))
        else:
            found.jumps.append((low, high, y_low, y_high))


def _refined(function: Many, ends: np.ndarray, values: np.ndarray) -> tuple[float, ...]:
    """Part a bracket until its ends are neighbours as floats; returns ends and values."""
    x, y = ends, values
    for _ in range(ROUNDS):
        if not np.nextafter(x[0], x[1]) < x[1]:
            break
        tries = np.unique(np.linspace(x[0], x[1], PARTS + 1))
        found = function(tries)
        found[0], found[-1] = y
        with np.errstate(invalid="ignore"):
            passes = np.flatnonzero(np.sign(found[:-1]) * np.sign(found[1:]) <= 0)
        if not passes.size:
            break
        place = int(passes[0])
        x, y = tries[place : place + 2], found[place : place + 2]
        if y[1] == 0.0:
            return float(x[1]), float(x[1]), 0.0, 0.0
    return float(x[0]), float(x[1]), float(y[0]), float(y[1])
