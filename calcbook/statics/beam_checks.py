"""What a beam is refused for, in words for the engineer."""

from __future__ import annotations

import itertools
import math
from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics.beam_loads import SAME_PLACE

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

    from calcbook.statics.beam_parts import Hinge, Support

    Array = NDArray[np.float64]

STIFFEST = 1e12
"""Ratio of the greatest to the least EI beyond which a beam is refused."""

LOOSE = 1e-9
"""Part of the greatest singular value below which a movement meets no resistance."""


def check_length(length: float) -> None:
    """Refuse a beam without a positive length."""
    if not (math.isfinite(length) and length > 0):
        raise StaticsError("the length of the beam is not a positive number")


def check_places(supports: Sequence[Support], hinges: Sequence[Hinge], length: float) -> None:
    """Refuse supports and hinges that are off the beam, double, or in each other's place.

    Raises
    ------
    StaticsError
        Naming them.
    """
    near = SAME_PLACE * length
    if not supports:
        raise StaticsError("the beam has no support", hint="give two, or one that is fixed")
    named = [("support", s.label, s.x) for s in supports]
    named += [("hinge", h.label, h.x) for h in hinges]
    for what, label, x in named:
        if not (math.isfinite(x) and -near <= x <= length + near):
            raise StaticsError(
                f"{what} {label} does not lie on the beam",
                hint=f"places run from 0 to {length:g} m",
                named=(label,),
            )
    _check_labels([label for _, label, _ in named])
    _check_spans(supports, near)
    for hinge in hinges:
        _check_hinge(hinge, supports, length, near)
    _check_apart(hinges, near)


def _check_labels(labels: Sequence[str]) -> None:
    double = [label for i, label in enumerate(labels) if label in labels[:i]]
    if double:
        raise StaticsError(
            f"two supports or hinges are called {double[0]}",
            hint="give each a label of its own",
            named=(double[0],),
        )


def _check_spans(supports: Iterable[Support], near: float) -> None:
    for a, b in itertools.pairwise(supports):
        if b.x - a.x <= near:
            raise StaticsError(
                f"the span between supports {a.label} and {b.label} has no length",
                hint="move one of them, or leave it out",
                named=(a.label, b.label),
            )


def _check_apart(hinges: Sequence[Hinge], near: float) -> None:
    for a, b in itertools.pairwise(hinges):
        if b.x - a.x <= near:
            raise StaticsError(
                f"hinges {a.label} and {b.label} are in one place",
                hint="leave one of them out",
                named=(a.label, b.label),
            )


def _check_hinge(hinge: Hinge, supports: Iterable[Support], length: float, near: float) -> None:
    if min(hinge.x, length - hinge.x) <= near:
        raise StaticsError(
            f"hinge {hinge.label} is at the end of the beam",
            hint="a free or pinned end carries no moment: leave the hinge out, or make a fixed "
            "end pinned",
            named=(hinge.label,),
        )
    for support in supports:
        if abs(hinge.x - support.x) <= near:
            raise StaticsError(
                f"hinge {hinge.label} is at support {support.label}",
                hint="a beam that is hinged over a support is two beams: give them one by one, or "
                "move the hinge into a span",
                named=(hinge.label, support.label),
            )


def stretches(
    stiffness: float | Sequence[tuple[float, float, float]], length: float
) -> tuple[tuple[float, float, float], ...]:
    """Return (from, to, EI) from left to right, checked.

    Raises
    ------
    StaticsError
        For EI that is not positive, stretches that overlap or leave a gap, or EI so different that
        rounding would decide the result.
    """
    if isinstance(stiffness, (int, float)):
        stiffness = [(0.0, length, float(stiffness))]
    found = sorted((float(a), float(b), float(e)) for a, b, e in stiffness)
    if not found or not all(math.isfinite(v) for one in found for v in one):
        raise StaticsError("the stiffness of the beam is missing or no number")
    for i, (_, _, e) in enumerate(found, start=1):
        if e <= 0:
            raise StaticsError(f"EI of stretch {i} from the left is not positive")
    ratio = max(e for *_, e in found) / min(e for *_, e in found)
    if ratio > STIFFEST:
        raise StaticsError(
            f"the greatest EI is {ratio:.3g} times the least: rounding would decide the result",
            hint=f"keep EI within a factor of {STIFFEST:g}, or give a stretch that does not bend "
            "as a support",
        )
    _check_cover(found, length)
    return tuple(found)


def _check_cover(found: Sequence[tuple[float, float, float]], length: float) -> None:
    near = SAME_PLACE * length
    reached = 0.0
    for i, (a, b, _) in enumerate(found, start=1):
        if b - a <= near:
            raise StaticsError(f"stretch {i} of stiffness from the left has no length")
        if abs(a - reached) > near:
            word = "overlaps the one before" if a < reached else "leaves a gap before it"
            raise StaticsError(
                f"stretch {i} of stiffness from the left {word}",
                hint=f"it should begin at {reached:g} m",
            )
        reached = b
    if abs(reached - length) > near:
        raise StaticsError(
            "the stretches of stiffness do not end where the beam does",
            hint=f"the last should end at {length:g} m",
        )


def check_stable(supports: Sequence[Support], hinges: Sequence[Hinge], length: float) -> None:
    """Refuse a beam that can move without bending.

    The parts between hinges are rigid bars, each with a deflection and a turn; supports and hinges
    tie them. A movement that no tie resists is a mechanism, whatever the stiffness.

    Raises
    ------
    StaticsError
        Naming the part that moves, and the hinge, support or end that moves most.
    """
    borders = [0.0, *(h.x for h in hinges), length]
    ties = _ties(supports, hinges, borders)
    _, sizes, movements = np.linalg.svd(ties)
    full = len(sizes) == ties.shape[1] and sizes[-1] > LOOSE * sizes[0]
    if not full:
        _refuse(movements[-1], supports, hinges, borders)


def _ties(supports: Sequence[Support], hinges: Sequence[Hinge], borders: list[float]) -> Array:
    """Return one row for each tie; the unknowns are deflections of a bar's two ends."""
    rows = []
    for support in supports:
        bar = min(int(np.searchsorted(borders, support.x, side="right")) - 1, len(borders) - 2)
        left, right = borders[bar], borders[bar + 1]
        row = np.zeros(2 * len(borders) - 2)
        part = (support.x - left) / (right - left)
        row[2 * bar : 2 * bar + 2] = 1 - part, part
        rows.append(row)
        if support.turning > 0:
            row = np.zeros_like(row)
            row[2 * bar : 2 * bar + 2] = -1.0, 1.0
            rows.append(row)
    for i in range(len(hinges)):
        row = np.zeros(2 * len(borders) - 2)
        row[2 * i + 1 : 2 * i + 3] = 1.0, -1.0
        rows.append(row)
    return np.array(rows)


def _refuse(
    movement: Array, supports: Sequence[Support], hinges: Sequence[Hinge], borders: list[float]
) -> None:
    names = ["its left end", *(f"hinge {h.label}" for h in hinges), "its right end"]
    ends = np.abs(movement.reshape(-1, 2))
    bar, end = divmod(int(np.argmax(np.round(ends / ends.max(), 9))), 2)
    place = names[bar + end]
    left, right = names[bar], names[bar + 1]
    held = [s.label for s in supports if borders[bar] <= s.x <= borders[bar + 1]]
    which = f"the part from {left} to {right}" if hinges else "the beam"
    by = f"turns about support {held[0]}" if len(held) == 1 else "moves"
    inner = [h.label for i, h in enumerate(hinges) if i in {bar - 1, bar}]
    raise StaticsError(
        f"the beam is a mechanism: {which} {by} freely, most at {place}",
        hint=f"support it at {place} or make a support of that part fixed"
        + (", or leave a hinge out" if hinges else ""),
        named=(*inner, *held),
    )
