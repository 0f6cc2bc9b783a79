"""One member of a truss by another method, term by term, so that the equation can be printed."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics.cuts import SLIGHT, find_cut
from calcbook.statics.truss_results import row_of

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

    from numpy.typing import NDArray

    from calcbook.statics.cuts import Cut, Point
    from calcbook.statics.truss_results import TrussResult

    Array = NDArray[np.float64]


@dataclass(frozen=True)
class Term:
    """One known force in the equation.

    Attributes
    ----------
    label
        The joint of a load or reaction, or the member.
    kind
        'load', 'reaction' or 'member'.
    fx, fy
        The force on the part looked at, in N, right and up positive.
    arm
        What one newton of it does: its arm about the centre in m, or its cosine to the direction.
    effect
        The force times its arm: moment in N m, anticlockwise positive, or component in N.
    """

    label: str
    kind: Literal["load", "reaction", "member"]
    fx: float
    fy: float
    arm: float
    effect: float


@dataclass(frozen=True)
class MemberCheck:
    """The equation that gives one member's force: sum of the effects + force x arm = 0.

    Attributes
    ----------
    member
        The member.
    method
        'moment' about the centre, 'force' along the direction, or 'joint': the components at one
        joint along the direction.
    cut
        The section; None at a joint.
    joint
        The joint; empty for a section.
    dropped
        The members that the equation leaves out: they pass through the centre, or are square to
        the direction.
    centre, direction
        Where moments are taken, in m, or the unit vector of the components; the other is None.
    terms
        The known forces.
    arm
        Of a pull of one newton in the member, as in the terms.
    force
        In N, tension positive.
    """

    member: str
    method: Literal["moment", "force", "joint"]
    cut: Cut | None
    joint: str
    dropped: tuple[str, ...]
    centre: Point | None
    direction: Point | None
    terms: tuple[Term, ...]
    arm: float
    force: float


def member_by_cut(result: TrussResult, member: str, case: int = 0) -> MemberCheck:
    """Return a member's force by a section, or by one joint where no section gives it.

    Parameters
    ----------
    result
        The truss with its loads and reactions; at a joint, the other members' forces too.
    member
        The label of the member.
    case
        Row of the result.

    Raises
    ------
    StaticsError
        For a member that is not there.
    """
    cut = find_cut(result.truss, member)
    if cut is None:
        return _by_nearest_joint(result, member, case)
    truss = result.truss
    row = row_of(member, truss.members.labels, "member")
    side = [list(truss.joints.labels).index(joint) for joint in cut.side]
    inner, away = _pull(result, row, side)
    direction = None
    if cut.centre is None:
        across = truss.directions[row_of(cut.others[0], truss.members.labels, "member")]
        direction = _square_to(across, away)
        effect = _component(direction)
    else:
        effect = _moment(cut.centre)
    arm = effect(truss.xy[inner], away)
    terms = tuple(_terms(result, side, case, effect))
    return MemberCheck(
        member, "moment" if direction is None else "force", cut, "", cut.others, cut.centre,
        direction, terms, arm, -sum(term.effect for term in terms) / arm,
    )  # fmt: skip


def joint_balance(result: TrussResult, joint: str, member: str, case: int = 0) -> MemberCheck:
    """Return a member's force by the equilibrium of one of its joints.

    The components are taken square to one other member, which leaves that one out: the one that
    leaves the fewest others in.

    Raises
    ------
    StaticsError
        For a joint or a member that is not there, or a member that does not end at the joint.
    """
    truss = result.truss
    at = row_of(joint, truss.joints.labels, "joint")
    row = row_of(member, truss.members.labels, "member")
    if at not in truss.ends[row]:
        raise StaticsError(
            f"Member '{member}' does not end at joint '{joint}'", named=(member, joint)
        )
    _, away = _pull(result, row, [at])
    others = [m for m in np.flatnonzero((truss.ends == at).any(axis=1)).tolist() if m != row]
    pulls = {other: _pull(result, other, [at])[1] for other in others}
    ways = [_square_to(pull, away) for pull in pulls.values() if abs(_cross(pull, away)) > SLIGHT]
    ways = ways or [(float(away[0]), float(away[1]))]
    direction = min(ways, key=lambda u: (len(_left_in(pulls, u)), -round(float(away @ u), 9)))
    effect = _component(direction)
    left = _left_in(pulls, direction)
    terms = list(_terms(result, [at], case, effect))
    for other in left:
        fx, fy = result.forces[case, other] * pulls[other]
        terms.append(_term(truss.members.labels[other], "member", truss.xy[at], (fx, fy), effect))
    arm = effect(truss.xy[at], away)
    dropped = tuple(truss.members.labels[other] for other in others if other not in left)
    return MemberCheck(
        member, "joint", None, joint, dropped, None, direction, tuple(terms), arm,
        -sum(term.effect for term in terms) / arm,
    )  # fmt: skip


def _by_nearest_joint(result: TrussResult, member: str, case: int) -> MemberCheck:
    truss = result.truss
    ends = truss.ends[row_of(member, truss.members.labels, "member")]
    met = np.bincount(truss.ends.ravel())
    joint = min(ends.tolist(), key=lambda end: int(met[end]))
    return joint_balance(result, truss.joints.labels[joint], member, case)


def _pull(result: TrussResult, member: int, side: list[int]) -> tuple[int, Array]:
    """Return the end of a member on one side, and the direction in which it pulls there."""
    start, end = result.truss.ends[member].tolist()
    away: Array = result.truss.directions[member]
    return (start, away) if start in side else (end, -away)


def _terms(
    result: TrussResult, side: list[int], case: int, effect: Callable[[Array, Array], float]
) -> Iterable[Term]:
    """Yield the loads on one side where there are any, and all its reactions."""
    truss = result.truss
    for joint in side:
        force = result.loads[case, joint]
        if force.any():
            yield _term(truss.joints.labels[joint], "load", truss.xy[joint], force, effect)
    for n, joint in enumerate(truss.held.tolist()):
        if joint in side:
            force = result.reactions[case, n]
            yield _term(truss.joints.labels[joint], "reaction", truss.xy[joint], force, effect)


def _term(
    label: str,
    kind: Literal["load", "reaction", "member"],
    at: Array,
    force: Array | tuple[float, float],
    effect: Callable[[Array, Array], float],
) -> Term:
    fx, fy = float(force[0]), float(force[1])
    size, done = float(np.hypot(fx, fy)), effect(at, np.array([fx, fy])) + 0.0  # no minus zero
    return Term(label, kind, fx, fy, done / size if size else 0.0, done)


def _left_in(pulls: dict[int, Array], direction: Point) -> list[int]:
    """Return the members that have a component along a direction."""
    return [member for member, pull in pulls.items() if abs(pull @ direction) > SLIGHT]


def _moment(centre: Point) -> Callable[[Array, Array], float]:
    return lambda at, force: _cross(at - np.array(centre), force)


def _component(direction: Point) -> Callable[[Array, Array], float]:
    return lambda _at, force: float(force @ np.array(direction))


def _square_to(line: Array, toward: Array) -> Point:
    """Return the unit vector square to a line that has a part along another vector."""
    sign = 1.0 if _cross(line, toward) > 0 else -1.0
    return float(-sign * line[1]), float(sign * line[0])


def _cross(one: Array, two: Array) -> float:
    return float(one[0] * two[1] - one[1] * two[0])
