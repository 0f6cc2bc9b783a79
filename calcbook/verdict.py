"""Verdicts: by how much a demand keeps within its limit, and the ratio a reader sees.

Verdicts come from unrounded values; what is printed must never say otherwise.
"""

from __future__ import annotations

import math

import numpy as np

from calcbook import units

TOLERANCE = 1e-9  # a demand that equals its limit but for rounding is satisfied
LEFTOVER = 1e-6  # of the larger side: what remains of a demand whose terms cancel
STRICT = frozenset({"<", ">", "!="})
MOST_DECIMALS = 12
UPWARD = frozenset({"<=", "<"})
DOWNWARD = frozenset({">=", ">"})

Side = float | str | np.ndarray | None


def margin(left: Side, right: Side, relation: str) -> np.ndarray:
    """Return by how much a comparison holds, elementwise; below zero it does not.

    Equal but for rounding counts as holding for ``<=``, ``>=`` and ``==``; for ``<``, ``>`` and
    ``!=`` a margin of zero does not hold either.
    """
    a, b = np.broadcast_arrays(np.asarray(left, float), np.asarray(right, float))
    slack = TOLERANCE * np.maximum(np.abs(a), np.abs(b))
    margins = {
        "<=": b - a + slack,
        "<": b - a,
        ">=": a - b + slack,
        ">": a - b,
        "==": slack - np.abs(a - b),
        "!=": np.abs(a - b) - slack,
    }
    return np.asarray(margins[relation])


def worst(left: Side, right: Side, relation: str) -> tuple[Side, Side, bool]:
    """Return the pair that decides a comparison, from scalars or columns, and its verdict.

    Raises ValueError when a side has no finite value, or words are compared with a number.
    """
    if isinstance(left, str) or isinstance(right, str):
        return left, right, (left == right) == (relation == "==")
    margins = margin(left, right, relation)
    if not margins.size or not np.isfinite(margins).all():
        raise ValueError
    place = int(np.argmin(margins))
    least = float(margins.flat[place])
    a, b = np.broadcast_arrays(np.asarray(left, float), np.asarray(right, float))
    held = least > 0 if relation in STRICT else least >= 0
    return float(a.flat[place]), float(b.flat[place]), held


def ratio(demand: object, limit: object, relation: str) -> float | None:
    """Return how much of its limit a demand uses: 1 at the limit, more beyond it.

    None where it says nothing: another relation, a side of zero, or sides of unlike sign.
    """
    if not isinstance(demand, float) or not isinstance(limit, float):
        return None
    if relation not in UPWARD | DOWNWARD:
        return None
    toward_zero = (demand < 0 or limit < 0) == (relation in UPWARD)
    over, under = (limit, demand) if toward_zero else (demand, limit)
    alike = (demand > 0 and limit > 0) or (demand < 0 and limit < 0)
    used = over / under if alike else math.inf
    return used if math.isfinite(used) else None


def ratio_text(value: float, relation: str, held: bool | None) -> str:
    """Return a ratio with two decimals, or more where two would contradict the verdict."""
    for decimals in range(2, MOST_DECIMALS):
        text = units.format_number(value, decimals)
        within = float(text) < 1 if relation in STRICT else float(text) <= 1
        if held is None or within == held:
            return text
    return units.format_number(value, MOST_DECIMALS)


def side_texts(demand: float, limit: float) -> tuple[str, str]:
    """Return demand and limit with four significant figures, more when they would print alike."""
    largest = max(abs(demand), abs(limit))
    most = units.significant_decimals(largest, 4) + 3 if largest else 3
    each = (
        units.significant_decimals(v, 4) for v in (demand, limit) if abs(v) > LEFTOVER * largest
    )
    decimals = min(max(each, default=3), most)
    while True:
        one, other = (units.format_number(v, decimals) for v in (demand, limit))
        alike = float(one) == float(other) and demand != limit
        if not alike or decimals >= most + MOST_DECIMALS:
            return one, other
        decimals += 1
