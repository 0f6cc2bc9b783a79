"""Plane trusses by direct stiffness, and the determinate ones by equilibrium of their joints.

Loads and reactions are positive to the right and up, member forces in tension. Source of the
method: the displacement method of any text on structural analysis.
"""

from __future__ import annotations

from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics.truss_crossings import crossings, passed_joints
from calcbook.statics.truss_factor import factorised
from calcbook.statics.truss_mechanism import refuse_inexact, refuse_mechanism
from calcbook.statics.truss_results import TrussResult
from calcbook.statics.truss_tables import (
    coordinates,
    member_ends,
    missing_joint,
    stiffnesses,
    support_rows,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import ArrayLike, NDArray

    from calcbook.statics.truss_factor import Factor
    from calcbook.statics.truss_tables import Held, Joints, Members

    Array = NDArray[np.float64]
    Indices = NDArray[np.intp]

_TINY_COSINE = 1e-15
_EXACT = 1e-12  # unbalanced part of the largest force that needs no further round
_ROUNDS = 6


class Truss:
    """A plane truss: joints, members pinned at their ends, supports.

    Attributes
    ----------
    joints, members, supports
        The tables as given.
    xy
        Coordinates in m, shape (joints, 2).
    ends
        Rows of the joints at the ends of the members, shape (members, 2).
    lengths
        In m, shape (members,).
    directions
        Unit vectors from start to end, shape (members, 2).
    ea
        Axial stiffnesses in N, shape (members,).
    held
        Rows of the supported joints, shape (supports,).

    Raises
    ------
    StaticsError
        For tables that make no truss: see `truss_tables`.
    """

    def __init__(self, joints: Joints, members: Members, supports: Sequence[Held]) -> None:
        self.joints, self.members, self.supports = joints, members, tuple(supports)
        self.xy = coordinates(joints)
        self.ends = member_ends(members, joints)
        self.ea = stiffnesses(members)
        self.held = support_rows(self.supports, joints)
        along = self.xy[self.ends[:, 1]] - self.xy[self.ends[:, 0]]
        self.lengths: Array = np.hypot(along[:, 0], along[:, 1])
        self.directions: Array = along / self.lengths[:, np.newaxis]

    @property
    def redundancy(self) -> int:
        """How many more forces there are than equations of equilibrium: m + r - 2j."""
        held = sum(2 if support.kind == "pinned" else 1 for support in self.supports)
        return len(self.ends) + held - 2 * len(self.xy)

    @property
    def determinate(self) -> bool:
        """Whether equilibrium alone gives the forces (if the truss stands at all)."""
        return self.redundancy == 0

    @cached_property
    def crossings(self) -> tuple[tuple[str, str], ...]:
        """Pairs of members that cross without a joint at the crossing."""
        labels = self.members.labels
        return tuple((labels[a], labels[b]) for a, b in crossings(self.xy, self.ends))

    @cached_property
    def passed(self) -> tuple[tuple[str, str], ...]:
        """Joints that a member runs through without being joined to, as (joint, member)."""
        found = passed_joints(self.xy, self.ends)
        return tuple((self.joints.labels[j], self.members.labels[m]) for j, m in found)

    def loads(self, rows: Iterable[tuple[int, str, float, float]], cases: int) -> Array:
        """Return rows of (case, joint, Fx, Fy) in N as an array, shape (cases, joints, 2).

        Rows at one joint in one case are added.

        Raises
        ------
        StaticsError
            For a load at a missing joint, in a missing case, or that is no number.
        """
        row_of = {label: n for n, label in enumerate(self.joints.labels)}
        total = np.zeros((cases, len(self.xy), 2))
        for case, joint, fx, fy in rows:
            if joint not in row_of:
                raise missing_joint("A load", joint, row_of)
            if not 0 <= case < cases:
                raise StaticsError(
                    f"A load at joint '{joint}' is in case {case + 1} of {cases}", named=(joint,)
                )
            total[case, row_of[joint]] += fx, fy
        return self._checked(total)

    def solve(self, loads: ArrayLike) -> TrussResult:
        """Return forces, reactions and movements for loads in N, shape (cases, joints, 2).

        One case may also be given alone, shape (joints, 2). A case without loads gives zeros.

        Raises
        ------
        StaticsError
            For a mechanism, naming the joint that moves; for forces that do not come out exactly;
            for loads of another shape or that are no numbers.
        """
        given = self._checked(loads)
        self._refuse_mechanism()
        movement, forces, unbalanced = self._settled(given)
        scale = _largest(given, forces)
        refuse_inexact(self, self._left(unbalanced), scale, movement)
        held = np.where(self._is_free, 0.0, -unbalanced).reshape(given.shape)
        return TrussResult(
            truss=self,
            loads=given,
            forces=forces,
            reactions=self._global(held)[:, self.held],
            displacements=self._global(movement.reshape(given.shape)),
            scale=scale,
        )

    def by_joints(self, loads: ArrayLike) -> tuple[Array, Array]:
        """Return member forces (cases, members) and reactions (cases, supports, 2) in N.

        By equilibrium of all joints at once, with the reactions among the unknowns; no stiffness
        enters. A second way to `solve` for a determinate truss.

        Raises
        ------
        StaticsError
            For a truss that is not determinate, or that is a mechanism.
        """
        given = self._checked(loads)
        if not self.determinate:
            raise StaticsError(
                f"Equilibrium alone does not give the forces: the truss has {self.redundancy:+d} "
                "forces against the equations of its joints",
                hint="Only a determinate truss is solved by its joints.",
            )
        self._refuse_mechanism()
        matrix, holding = self._equilibrium()
        right = -given.reshape(len(given), 2 * len(self.xy)).T
        found = np.asarray(np.linalg.solve(matrix, right).T, dtype=float)
        count = len(self.ends)
        reactions = np.zeros((len(given), len(self.held), 2))
        for column, (support, direction) in enumerate(holding):
            reactions[:, support] += found[:, count + column, np.newaxis] * direction
        return found[:, :count], reactions

    def _equilibrium(self) -> tuple[Array, list[tuple[int, Array]]]:
        """Return what unit forces do at the joints, and the support and direction of reactions."""
        members = np.arange(len(self.ends))
        holding = []
        for n, support in enumerate(self.supports):
            turned = support.angle if support.kind == "roller" else 0.0
            holding.append((n, np.array([-np.sin(turned), np.cos(turned)])))
            if support.kind == "pinned":
                holding.append((n, np.array([1.0, 0.0])))
        matrix = np.zeros((len(self.xy), 2, len(self.ends) + len(holding)))
        matrix[self.ends[:, 0], :, members] = self.directions
        matrix[self.ends[:, 1], :, members] = -self.directions
        for column, (n, direction) in enumerate(holding):
            matrix[self.held[n], :, len(self.ends) + column] = direction
        return matrix.reshape(2 * len(self.xy), -1), holding

    def _checked(self, loads: ArrayLike) -> Array:
        given = np.array(loads, dtype=float)
        shape = (len(self.xy), 2)
        given = given[np.newaxis] if given.shape == shape else given
        if given.ndim != len(shape) + 1 or given.shape[1:] != shape:
            raise StaticsError(
                f"Loads of shape {given.shape} do not fit {len(self.xy)} joints",
                hint="Give every case an Fx and an Fy at every joint.",
            )
        wrong = np.argwhere(~np.isfinite(given))
        if len(wrong):
            label = self.joints.labels[wrong[0, 1]]
            raise StaticsError(f"The load at joint '{label}' is not a number", named=(label,))
        return given

    @cached_property
    def _frames(self) -> Array:
        """The own directions of every joint, in rows, shape (joints, 2, 2)."""
        frames = np.broadcast_to(np.eye(2), (len(self.xy), 2, 2)).copy()
        for row, support in zip(self.held, self.supports, strict=True):
            if support.kind == "roller":
                c, s = np.cos(support.angle), np.sin(support.angle)
                frames[row] = np.array([[c, s], [-s, c]])
        frames[np.abs(frames) < _TINY_COSINE] = 0.0
        return frames

    @cached_property
    def _is_free(self) -> NDArray[np.bool_]:
        free = np.ones((len(self.xy), 2), dtype=bool)
        free[self.held] = [(support.kind == "roller", False) for support in self.supports]
        return free.ravel()

    @cached_property
    def _free(self) -> Indices:
        return np.flatnonzero(self._is_free)

    @cached_property
    def _unknowns(self) -> Indices:
        """The movements of the ends of every member, shape (members, 4)."""
        return (2 * self.ends[:, :, np.newaxis] + np.arange(2)).reshape(-1, 4)

    @cached_property
    def _rows(self) -> Array:
        """The elongation of every member per movement of its ends, shape (members, 4)."""
        signed = self.directions[:, np.newaxis] * np.array([[-1.0], [1.0]])
        own: Array = np.einsum("meij,mej->mei", self._frames[self.ends], signed)
        return own.reshape(-1, 4)

    @cached_property
    def _factor(self) -> tuple[Factor, Array]:
        """The stiffness taken apart, and the scale of every free movement."""
        stiffness = self.ea / self.lengths
        met = np.bincount(self.ends.ravel(), weights=np.repeat(stiffness, 2))
        scale = np.repeat(1 / np.sqrt(met), 2)
        number = np.full(2 * len(self.xy), -1)
        number[self._free] = np.arange(len(self._free))
        factor = factorised(
            self._rows * scale[self._unknowns], number[self._unknowns], stiffness, len(self._free)
        )
        return factor, scale[self._free]

    @cached_property
    def _softest(self) -> Array:
        """The movement of the joints that is resisted least, shape (joints, 2)."""
        movement = np.zeros(2 * len(self.xy))
        factor, scale = self._factor
        movement[self._free] = factor.softest() * scale
        found: Array = self._global(movement.reshape(1, -1, 2))[0]
        return found

    def _refuse_mechanism(self) -> None:
        if len(self._free):
            refuse_mechanism(self, self._softest)

    def _moved(self, unbalanced: Array) -> Array:
        """Return the movements in the joints' own directions under forces in them."""
        moved = np.zeros_like(unbalanced)
        factor, scale = self._factor
        moved[:, self._free] = factor.solve((unbalanced[:, self._free] * scale).T).T * scale
        return moved

    def _settled(self, loads: Array) -> tuple[Array, Array, Array]:
        """Return movements, member forces, and what they leave unbalanced in own directions.

        Each round takes away what rounding left over in the one before.
        """
        movement: Array = np.zeros((len(loads), 2 * len(self.xy)))
        forces: Array = np.zeros((len(loads), len(self.ea)))
        unbalanced = wanted = self._local(loads)
        for turn in range(_ROUNDS):
            step = self._moved(unbalanced)
            movement += step
            forces += (step[:, self._unknowns] * self._rows).sum(axis=2) * (self.ea / self.lengths)
            unbalanced = wanted - self._balanced_by(forces)
            if turn and (self._left(unbalanced) <= _EXACT * _largest(loads, forces)).all():
                break
        return movement, forces, unbalanced

    def _left(self, unbalanced: Array) -> Array:
        """Return the largest unbalanced force of each case where a joint is free, in N."""
        left: Array = np.abs(unbalanced[:, self._free]).max(axis=1, initial=0.0)
        return left

    def _local(self, forces: Array) -> Array:
        """Return forces at the joints in the joints' own directions, shape (cases, 2 joints)."""
        own: Array = np.einsum("jik,cjk->cji", self._frames, forces)
        return own.reshape(len(forces), 2 * len(self.xy))

    def _global(self, local: Array) -> Array:
        """Return vectors in the joints' own directions as x and y, shape (cases, joints, 2)."""
        found: Array = np.einsum("jki,cjk->cji", self._frames, local)
        return found

    def _balanced_by(self, forces: Array) -> Array:
        """Return the loads that member forces balance, shape (cases, 2 joints)."""
        size = 2 * len(self.xy)
        at = size * np.arange(len(forces))[:, np.newaxis, np.newaxis] + self._unknowns
        pull = forces[:, :, np.newaxis] * self._rows
        total = np.bincount(at.ravel(), weights=pull.ravel(), minlength=size * len(forces))
        return np.asarray(total, dtype=float).reshape(len(forces), size)


def _largest(loads: Array, forces: Array) -> Array:
    """Return the largest force of each case, shape (cases,)."""
    found: Array = np.maximum(np.abs(loads).max(axis=(1, 2)), np.abs(forces).max(axis=1))
    return found
