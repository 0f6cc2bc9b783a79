"""A plane truss under its load cases, from the tables of a workbook; one member looked at twice.

The second look only says which equation gives the member's force; the workbook works it.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook.errors import StaticsError, near_match
from calcbook.solvers import Outcome, Role, Solver
from calcbook.statics.member_checks import member_by_cut
from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held, Joints, Members

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from numpy.typing import NDArray

    from calcbook.statics.member_checks import MemberCheck
    from calcbook.statics.truss_results import TrussResult

    Array = NDArray[np.float64]

_LISTED = 8  # names in a row before the rest is counted


@dataclass(frozen=True)
class FoundTruss:
    """A truss solved for its load cases, forces in N with tension positive.

    Attributes
    ----------
    result
        One case for each name in `cases`.
    member, case
        What is looked at a second way.
    """

    result: TrussResult
    cases: tuple[str, ...]
    member: str
    case: str

    def give(self, outcome: str, case: str) -> object:
        """Return an outcome; StaticsError for the second way of a member or case not there."""
        if outcome in _BY_CASE:
            return _BY_CASE[outcome](self.result, self.cases.index(case))
        if outcome == "length":
            return self.result.truss.lengths
        return _LOOKED[outcome](self)

    @cached_property
    def check(self) -> MemberCheck:
        """The equation of the member that is looked at."""
        if self.case not in self.cases:
            hint = near_match(self.case, self.cases) or f"cases: {', '.join(self.cases)}"
            raise StaticsError(f"the load case {self.case} does not act", hint=hint)
        return member_by_cut(self.result, self.member, self.cases.index(self.case))

    @property
    def part(self) -> tuple[str, ...]:
        """The joints of the part that the equation is about."""
        return self.check.cut.side if self.check.cut is not None else (self.check.joint,)

    def says(self) -> tuple[str, ...]:
        """Return determinacy, residual, idle members, and what is odd in the tables."""
        truss = self.result.truss
        unbalanced = f"largest unbalanced force {self.result.residual:.0e}"
        said = [_determinacy(truss), f"{unbalanced} of the largest force of its case"]
        if truss.determinate:
            said.append(self._by_joints())
        if self.result.zero_always:
            said.append(f"without force in every load case: {_listed(self.result.zero_always)}")
        if truss.crossings:
            pairs = [f"{one} with {other}" for one, other in truss.crossings]
            said.append(f"cross without a joint: {_listed(pairs)}")
        if truss.passed:
            pairs = [f"{member} past {joint}" for joint, member in truss.passed]
            said.append(f"run past a joint they are not joined to: {_listed(pairs)}")
        return (*said, self._second_way())

    def _second_way(self) -> str:
        """Return how the member looked at is found a second way, or why it is not."""
        try:
            check = self.check
        except StaticsError as error:
            return f"no second way for {self.member}: {error}"
        dropped = " and ".join(check.dropped)
        if check.cut is None:
            where = f"equilibrium of joint {check.joint}, as no cut through three bars gives it"
        else:
            where = f"a cut through {', '.join((check.member, *check.cut.others))}"
        if check.method == "moment":
            return f"{self.member} a second way: {where}, moments about where {dropped} meet"
        square = f" square to {dropped}" if dropped else ""
        return f"{self.member} a second way: {where}, components{square}"

    def _by_joints(self) -> str:
        """Return how far the forces are from those of joint equilibrium, which knows no EA."""
        forces, _ = self.result.truss.by_joints(self.result.loads)
        scale = np.where(self.result.scale > 0, self.result.scale, 1.0)
        apart = float((np.abs(forces - self.result.forces).max(axis=1) / scale).max(initial=0.0))
        return f"equilibrium of the joints alone gives the same forces within {apart:.0e}"


def run(given: Mapping[str, Any]) -> FoundTruss:
    """Solve a truss; raises StaticsError for one that cannot stand or is given wrongly."""
    joints = Joints(given["joints"], np.column_stack((given["x"], given["y"])))
    members = Members(given["members"], given["start"], given["end"], given["stiffness"])
    rows = zip(given["supports"], given["held"], given["angle"], strict=True)
    truss = Truss(joints, members, [Held(joint, kind, float(turn)) for joint, kind, turn in rows])
    for joint in given.get("loads at", ()):
        if joint not in joints.labels:
            hint = near_match(joint, joints.labels) or "add the joint, or correct its label"
            raise StaticsError(
                f"a load is at joint '{joint}', which is not there", hint=hint, named=(joint,)
            )
    right, down = ({c: v for c, v in given[way].items() if v is not None}
                   for way in ("loads right", "loads down"))  # fmt: skip
    cases = tuple(dict.fromkeys((*right, *down)))
    nothing = np.zeros(len(joints.labels))
    loads = [np.column_stack((right.get(c, nothing), -down.get(c, nothing))) for c in cases]
    result = truss.solve(np.array(loads).reshape(len(cases), len(nothing), 2))
    return FoundTruss(result, cases, given["member looked at"], given["case looked at"])


def _determinacy(truss: Truss) -> str:
    held = truss.redundancy - len(truss.ends) + 2 * len(truss.xy)
    count = f"{len(truss.ends)} members + {held} reactions"
    if truss.determinate:
        return f"statically determinate: {count} = 2 x {len(truss.xy)} joints"
    return (
        f"{truss.redundancy} times statically indeterminate, {count} for 2 x {len(truss.xy)} "
        "joints: the forces depend on EA"
    )


def _listed(texts: Sequence[str]) -> str:
    more = len(texts) - _LISTED
    return ", ".join(texts[:_LISTED]) + (f" and {more} more" if more > 0 else "")


# --- what it gives ------------------------------------------------------------------------------

_BY_CASE: dict[str, Callable[[TrussResult, int], object]] = {
    "force": lambda found, case: np.where(found.zero[case], 0.0, found.forces[case]),
    "sense": lambda found, case: list(found.senses(case)),
    "reaction right": lambda found, case: found.reactions[case, :, 0],
    "reaction up": lambda found, case: found.reactions[case, :, 1],
}


def _bars_cut(found: FoundTruss) -> Array:
    cut = found.check.cut
    bars = (cut.member, *cut.others) if cut is not None else ()
    return np.array([float(label in bars) for label in found.result.truss.members.labels])


def _joints_in(found: FoundTruss) -> Array:
    return np.array([float(joint in found.part) for joint in found.result.truss.joints.labels])


def _members_in(found: FoundTruss) -> Array:
    known = {term.label for term in found.check.terms if term.kind == "member"}
    return np.array([float(label in known) for label in found.result.truss.members.labels])


_WAYS = {"moment": 1.0, "force": 2.0, "joint": 3.0}
_LOOKED: dict[str, Callable[[FoundTruss], object]] = {
    "way": lambda found: _WAYS[found.check.method],
    "cut": _bars_cut,
    "in the part": _joints_in,
    "in the equation": _members_in,
    "centre x": lambda found: (found.check.centre or (0.0, 0.0))[0],
    "centre y": lambda found: (found.check.centre or (0.0, 0.0))[1],
    "direction right": lambda found: (found.check.direction or (0.0, 0.0))[0],
    "direction up": lambda found: (found.check.direction or (0.0, 0.0))[1],
}


def _roles() -> dict[str, Role]:
    return {
        "joints": Role("Joints", "text", "joints"),
        "x": Role("To the right", "length", "joints"),
        "y": Role("Up", "length", "joints"),
        "members": Role("Members", "text", "members"),
        "start": Role("From joint", "text", "members"),
        "end": Role("To joint", "text", "members"),
        "stiffness": Role("EA", "force", "members"),
        "supports": Role("Supported joints", "text", "supports"),
        "held": Role("Held", "text", "supports"),
        "angle": Role("Direction in which a roller moves", "angle", "supports"),
        "loads right": Role(
            "Joint loads to the right", "force", "joints", by_case=True, may_idle=True
        ),
        "loads down": Role("Joint loads downward", "force", "joints", by_case=True, may_idle=True),
        "loads at": Role("Joints that loads are listed at", "text", "loads", optional=True),
        "member looked at": Role("Member found a second way", "text"),
        "case looked at": Role("Load case of it", "text"),
    }


SOLVER = Solver(
    name="truss",
    method=(
        "Plane truss, pinned joints, by the displacement method; sections through three bars by "
        "Ritter's method."
    ),
    roles=_roles(),
    outcomes={
        "length": Outcome("length", "length", "members"),
        "force": Outcome("member force", "force", "members", by_case=True),
        "sense": Outcome("tension or compression", "text", "members", by_case=True),
        "reaction right": Outcome("reaction to the right", "force", "supports", by_case=True),
        "reaction up": Outcome("reaction upward", "force", "supports", by_case=True),
        "way": Outcome(
            "1 a cut with moments, 2 a cut with components, 3 equilibrium of a joint", "number"
        ),
        "cut": Outcome("1 where the member is cut", "number", "members"),
        "in the part": Outcome("1 where the joint is in the part looked at", "number", "joints"),
        "in the equation": Outcome("1 where the member's force is needed", "number", "members"),
        "centre x": Outcome("centre of the moments, to the right", "length"),
        "centre y": Outcome("centre of the moments, up", "length"),
        "direction right": Outcome("direction of the components, to the right", "number"),
        "direction up": Outcome("direction of the components, up", "number"),
    },
    run=run,
)
