"""Where labels go: kept apart, near what they name; and exact differences of printed numbers."""

from __future__ import annotations

import math
from decimal import Decimal, InvalidOperation
from itertools import pairwise
from typing import TYPE_CHECKING

from calcbook.figures.lookup import MINUS

if TYPE_CHECKING:
    from collections.abc import Sequence

_LONGEST = 24


def spread(
    centres: Sequence[float],
    sizes: Sequence[float],
    low: float = -math.inf,
    high: float = math.inf,
) -> list[float]:
    """Return new centres that do not overlap, moved as little as possible.

    Parameters
    ----------
    centres, sizes
        Wanted centres in ascending order and the room each takes, in one unit.
    low, high
        The bounds all the room must lie in; held where everything fits between them.

    Notes
    -----
    Least squares under order constraints, by pooling adjacent violators.
    """
    if not centres:
        return []
    offsets = [0.0]
    for before, after in pairwise(sizes):
        offsets.append(offsets[-1] + (before + after) / 2.0)
    pools: list[tuple[float, int]] = []
    for centre, offset in zip(centres, offsets, strict=True):
        mean, count = centre - offset, 1
        while pools and pools[-1][0] > mean:
            other, others = pools.pop()
            mean = (mean * count + other * others) / (count + others)
            count += others
        pools.append((mean, count))
    wanted = [mean for mean, count in pools for _ in range(count)]
    floor = low + sizes[0] / 2.0
    ceiling = high - sizes[-1] / 2.0 - offsets[-1]
    return [
        max(floor, min(ceiling, place)) + offset
        for place, offset in zip(wanted, offsets, strict=True)
    ]


def every(count: int, most: int) -> int:
    """Return the step at which ``count`` labels become at most ``most``: 1 when all fit."""
    return max(1, math.ceil(count / most))


def difference(upper: str, lower: str) -> str | None:
    """Return ``upper - lower`` of two printed decimals, exactly, or None when they are not.

    No digit is rounded away or added, so a reader who subtracts the two gets what is printed.
    """
    try:
        exact = Decimal(upper.replace(MINUS, "-")) - Decimal(lower.replace(MINUS, "-"))
    except InvalidOperation:
        return None
    if not exact.is_finite():
        return None
    printed = format(exact, "f").replace("-", MINUS)
    return printed if len(printed) <= _LONGEST else None


def ordinal_step(step: int) -> str:
    """Return ``every second level`` and the like, in words where the trade would use words."""
    return {2: "every second", 3: "every third"}.get(step, f"one in {step}")
