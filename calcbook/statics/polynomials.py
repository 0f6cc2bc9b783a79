"""Polynomials on a piece of a beam: many at once, values, derivatives, roots and peaks.

Coefficients stand on the first axis, lowest power first: ``c[k]`` multiplies ``t**k``, and every
other axis is one polynomial more. The variable ``t`` runs from 0 to 1 along the piece.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

STEPS = 80
"""Bisection alone would settle a root in 53 steps; Newton's method needs far fewer."""


def value(c: Array, t: Array | float) -> Array:
    """Return the polynomials at ``t``, by Horner's rule.

    Parameters
    ----------
    c
        Coefficients, shape (degree + 1, ...).
    t
        Places, of a shape that broadcasts with that of one coefficient.
    """
    total: Array = c[-1] + 0.0 * t
    for k in range(len(c) - 2, -1, -1):
        total *= t
        total += c[k]
    return total


def derivative(c: Array) -> Array:
    """Return the coefficients of the derivatives with respect to ``t``, shape (degree, ...)."""
    powers = np.arange(1, len(c), dtype=float).reshape(-1, *[1] * (c.ndim - 1))
    return c[1:] * powers


def roots(c: Array) -> list[Array]:
    """Return where the polynomials change sign between 0 and 1.

    Up to the second degree the formula is used. Beyond, the roots of the derivative part the
    piece where the polynomial only rises or only falls, so that a change of sign brackets one
    root, found by Newton's method kept inside its bracket.

    Parameters
    ----------
    c
        Coefficients, shape (degree + 1, ...). A degree whose coefficients are all zero is dropped.

    Returns
    -------
    list of array
        As many arrays as there can be roots, each of the shape of one coefficient; nan where there
        is no such root.
    """
    while len(c) > 1 and not c[-1].any():
        c = c[:-1]
    if len(c) == 1:
        return []
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        if len(c) == 2:  # noqa: PLR2004  a straight line
            return [_inside(-c[0] / c[1])]
        if len(c) == 3:  # noqa: PLR2004  a parabola
            return _of_parabola(c)
    return _by_brackets(c)


def _inside(t: Array) -> Array:
    return np.where((t > 0) & (t < 1), t, np.nan)


def _of_parabola(c: Array) -> list[Array]:
    """Return both roots; the sum avoids taking two nearly equal numbers from each other."""
    root = np.sqrt(c[1] * c[1] - 4 * c[0] * c[2])
    q = -0.5 * (c[1] + np.copysign(root, c[1]))
    return [_inside(q / c[2]), _inside(c[0] / q)]


def _by_brackets(c: Array) -> list[Array]:
    shape = c.shape[1:]
    turning = [np.where(np.isnan(t), 1.0, t) for t in roots(derivative(c))]
    inner = np.sort(np.stack(turning), axis=0) if turning else np.empty((0, *shape))
    borders = np.concatenate([np.zeros((1, *shape)), inner, np.ones((1, *shape))])
    signs = np.sign(np.stack([value(c, t) for t in borders]))
    found = []
    for i in range(len(borders) - 1):
        changes = signs[i] * signs[i + 1] < 0
        root = np.full(shape, np.nan)
        root[changes] = _between(c[:, changes], borders[i][changes], borders[i + 1][changes])
        touches = (signs[i] == 0) & (borders[i] > 0) & (borders[i] < 1)
        found.append(np.where(touches, borders[i], root))
    return found


def _between(c: Array, low: Array, high: Array) -> Array:
    """Return the one root of each polynomial between ``low`` and ``high``."""
    slope = derivative(c)
    rises = value(c, high) > 0
    t = 0.5 * (low + high)
    for _ in range(STEPS):
        f = value(c, t)
        above = (f > 0) == rises
        low, high = np.where(above, low, t), np.where(above, t, high)
        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            newton = t - f / value(slope, t)
        after = np.where((newton > low) & (newton < high), newton, 0.5 * (low + high))
        after = np.where(f == 0, t, after)
        still = np.abs(after - t) > 4 * np.finfo(float).eps * after
        t = after
        if not still.any():
            break
    return t


def candidates(c: Array) -> tuple[Array, Array]:
    """Return the places where a polynomial can be greatest or least on its piece, and its values.

    Returns
    -------
    places, values
        Shape (candidates, ...): the two ends, and the roots of the derivative; a root that is not
        there is given as the left end.
    """
    inner = roots(derivative(c)) if len(c) > 1 else []
    places = np.zeros((len(inner) + 2, *c.shape[1:]))
    values = np.empty_like(places)
    values[0] = c[0]
    for i, t in enumerate(inner, start=1):
        np.copyto(places[i], t, where=~np.isnan(t))
        values[i] = value(c, places[i])
    places[-1] = 1.0
    values[-1] = c.sum(axis=0)
    return places, values
