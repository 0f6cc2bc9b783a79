"""What a truss gives: member forces, reactions, movements, combinations and envelopes."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Literal

import numpy as np

from calcbook.errors import StaticsError, near_match

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from calcbook.statics.truss import Truss

    Array = NDArray[np.float64]
    Indices = NDArray[np.intp]

Sense = Literal["tension", "compression", "zero"]

NOTHING = 1e-9
"""A member force below this part of the largest force of its case is zero."""


@dataclass(frozen=True)
class TrussEnvelope:
    """The highest and lowest force of each member, and where it comes from.

    Attributes
    ----------
    highest, lowest
        Forces in N, tension positive, shape (members,).
    highest_case, lowest_case
        The rows of the result that give them, shape (members,).
    """

    highest: Array
    highest_case: Indices
    lowest: Array
    lowest_case: Indices


@dataclass(frozen=True)
class TrussResult:
    """The forces of a truss under some cases, or some combinations of cases.

    Attributes
    ----------
    truss
        The truss.
    loads
        At the joints, in N, right and up positive, shape (cases, joints, 2).
    forces
        Of the members, in N, tension positive, shape (cases, members).
    reactions
        Of the supports on the truss, in N, right and up positive, shape (cases, supports, 2).
    displacements
        Of the joints, in m, right and up positive, shape (cases, joints, 2).
    scale
        The largest force of each case in N, against which a force is nothing or an error small;
        of a combination, the sum of what its cases bring, so that cases may cancel. Shape (cases,).
    """

    truss: Truss
    loads: Array
    forces: Array
    reactions: Array
    displacements: Array
    scale: Array

    @cached_property
    def residual(self) -> float:
        """The largest unbalanced force at a joint, as part of the largest force of its case."""
        left = self.loads.transpose(1, 0, 2).copy()
        pull = (self.forces[:, :, np.newaxis] * self.truss.directions).transpose(1, 0, 2)
        np.add.at(left, self.truss.held, self.reactions.transpose(1, 0, 2))
        np.add.at(left, self.truss.ends[:, 0], pull)
        np.subtract.at(left, self.truss.ends[:, 1], pull)
        largest = np.where(self.scale > 0, self.scale, 1.0)
        return float((np.abs(left).max(axis=(0, 2)) / largest).max(initial=0.0))

    @property
    def zero(self) -> NDArray[np.bool_]:
        """Whether a member has no force, shape (cases, members)."""
        return np.abs(self.forces) <= NOTHING * self.scale[:, np.newaxis]

    @property
    def zero_always(self) -> tuple[str, ...]:
        """The members without force in every case."""
        always = self.zero.all(axis=0)
        return tuple(np.array(self.truss.members.labels, dtype=object)[always])

    def senses(self, case: int = 0) -> tuple[Sense, ...]:
        """Return 'tension', 'compression' or 'zero' for every member in a case."""
        return tuple(
            "zero" if zero else "tension" if force > 0 else "compression"
            for zero, force in zip(self.zero[case], self.forces[case], strict=True)
        )

    def force(self, member: str, case: int = 0) -> float:
        """Return the force of a member in N, tension positive."""
        return float(self.forces[case, row_of(member, self.truss.members.labels, "member")])

    def reaction(self, joint: str, case: int = 0) -> Array:
        """Return the reaction at a supported joint in N, right and up positive, shape (2,)."""
        supported = [support.joint for support in self.truss.supports]
        found: Array = self.reactions[case, row_of(joint, supported, "supported joint")]
        return found

    def combined(self, factors: ArrayLike) -> TrussResult:
        """Return the result of combinations, their factors of shape (combinations, cases).

        Raises
        ------
        StaticsError
            For factors of another shape or that are no numbers.
        """
        f = np.atleast_2d(np.asarray(factors, dtype=float))
        if f.shape[1:] != (len(self.loads),) or not np.isfinite(f).all():
            raise StaticsError(
                f"Factors of shape {f.shape} do not combine {len(self.loads)} cases",
                hint="Give every combination one factor, a number, for every case.",
            )
        return TrussResult(
            truss=self.truss,
            loads=np.tensordot(f, self.loads, axes=1),
            forces=f @ self.forces,
            reactions=np.tensordot(f, self.reactions, axes=1),
            displacements=np.tensordot(f, self.displacements, axes=1),
            scale=np.abs(f) @ self.scale,
        )

    def envelope(self) -> TrussEnvelope:
        """Return the highest and lowest force of each member over the cases held here.

        Raises
        ------
        StaticsError
            For a result without cases.
        """
        if not len(self.forces):
            raise StaticsError("There is no case to take the highest and lowest force of")
        members = np.arange(self.forces.shape[1])
        high, low = self.forces.argmax(axis=0), self.forces.argmin(axis=0)
        return TrussEnvelope(self.forces[high, members], high, self.forces[low, members], low)


def row_of(label: str, labels: Sequence[str], what: str) -> int:
    """Return the row of a label in a table.

    Raises
    ------
    StaticsError
        For a label that is not there.
    """
    try:
        return list(labels).index(label)
    except ValueError:
        raise StaticsError(
            f"There is no {what} '{label}'", hint=near_match(label, labels), named=(label,)
        ) from None
