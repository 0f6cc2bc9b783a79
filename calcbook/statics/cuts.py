"""Sections through a truss: three members that hold its two parts together.

Cutting them leaves one member's force in one equation: moments about the point where the other
two meet, or the components square to them where they are parallel (Ritter's method of sections).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from calcbook.statics.truss_results import row_of

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    from calcbook.statics.truss import Truss

    Array = NDArray[np.float64]

Point = tuple[float, float]
Neighbours = list[list[tuple[int, int]]]

SLIGHT = 1e-6
"""An arm below this part of the truss's size, or an angle below it, carries no equation."""

_ROUNDING = 9  # digits in which two sections are compared


@dataclass(frozen=True)
class Cut:
    """A section through exactly three members that parts the truss.

    Attributes
    ----------
    member
        The member looked for.
    others
        The other two.
    side
        The joints of the part to look at: the one with fewer joints.
    centre
        Where the other two meet, in m; None where they are parallel.
    """

    member: str
    others: tuple[str, str]
    side: tuple[str, ...]
    centre: Point | None


def find_cut(truss: Truss, member: str) -> Cut | None:
    """Return the closest section through a member and two others, or None where there is none.

    Of several, the one whose three members lie closest together; a moment form before a force
    form.

    Raises
    ------
    StaticsError
        For a member that is not there.
    """
    wanted = row_of(member, truss.members.labels, "member")
    middles = truss.xy[truss.ends].mean(axis=1)
    size = float(np.ptp(truss.xy, axis=0).max())
    best: tuple[tuple[bool, float, int, int], Cut] | None = None
    for one, two, side in _sections(truss, wanted):
        usable, centre = _centre(truss, (wanted, one, two), size)
        if not usable:
            continue
        apart = np.linalg.norm(middles[[one, two, one]] - middles[[wanted, wanted, two]], axis=1)
        rank = (centre is None, round(float(apart.sum()) / size, _ROUNDING), one, two)
        if best is None or rank < best[0]:
            others = (truss.members.labels[one], truss.members.labels[two])
            joints = tuple(truss.joints.labels[joint] for joint in side)
            best = rank, Cut(member, others, joints, centre)
    return best[1] if best else None


def _sections(truss: Truss, wanted: int) -> Iterator[tuple[int, int, list[int]]]:
    """Yield two other members and the joints of the smaller part for every section."""
    around: Neighbours = [[] for _ in truss.xy]
    for member, (start, end) in enumerate(truss.ends.tolist()):
        around[start].append((member, end))
        around[end].append((member, start))
    for one in range(len(truss.ends)):
        if one == wanted:
            continue
        for two, part in _bridges(around, {wanted, one}):
            if two < one or two == wanted:
                continue
            inside = np.zeros(len(truss.xy), dtype=bool)
            inside[part] = True
            cut = inside[truss.ends].sum(axis=1) == 1
            if cut.sum() == 3 and cut[[wanted, one, two]].all():  # noqa: PLR2004
                small = inside if 2 * inside.sum() < len(inside) else ~inside
                if 2 * inside.sum() == len(inside):
                    small = inside if inside[int(truss.xy[:, 0].argmin())] else ~inside
                yield one, two, np.flatnonzero(small).tolist()


def _bridges(around: Neighbours, without: set[int]) -> Iterator[tuple[int, list[int]]]:
    """Yield each member whose loss parts the rest of the truss, and the joints it parts off.

    A walk from the first joint numbers the joints in the order in which they are met; a member is
    a bridge where nothing beyond it leads back before it (Tarjan). No recursion: a long truss is
    deeper than Python's stack.
    """
    order: dict[int, int] = {0: 0}
    back = {0: 0}
    met = [0]
    trail: list[tuple[int, int, Iterator[tuple[int, int]]]] = [(0, -1, iter(around[0]))]
    while trail:
        joint, came_by, ways = trail[-1]
        for member, beyond in ways:
            if member in without or member == came_by:
                continue
            if beyond in order:
                back[joint] = min(back[joint], order[beyond])
                continue
            order[beyond] = back[beyond] = len(met)
            met.append(beyond)
            trail.append((beyond, member, iter(around[beyond])))
            break
        else:
            trail.pop()
            if trail:
                before = trail[-1][0]
                back[before] = min(back[before], back[joint])
                if back[joint] == order[joint]:
                    yield came_by, met[order[joint] :]


def _centre(truss: Truss, members: tuple[int, int, int], size: float) -> tuple[bool, Point | None]:
    """Return whether the section gives the first member's force, and where the others meet."""
    wanted, one, two = members
    unit, start = truss.directions, truss.xy[truss.ends[:, 0]]
    turn = _cross(unit[one], unit[two])
    if abs(turn) <= SLIGHT:
        return abs(_cross(unit[one], unit[wanted])) > SLIGHT, None
    along = _cross(start[two] - start[one], unit[two]) / turn
    x, y = start[one] + along * unit[one]
    arm = _cross(start[wanted] - (x, y), unit[wanted])
    return abs(arm) > SLIGHT * size, (float(x), float(y))


def _cross(one: Array, two: Array) -> float:
    return float(one[0] * two[1] - one[1] * two[0])
