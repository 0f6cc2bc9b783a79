"""The tables of a plane truss, and what is refused in them before anything is solved."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np

from calcbook.errors import StaticsError, near_match

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]
    Indices = NDArray[np.intp]

CLOSE = 1e-6
"""Joints nearer to each other than this part of the truss's size are one joint."""

STIFFNESS_RATIO = 1e9
"""Stiffest member to softest member: beyond it one of the two was typed in another unit."""


@dataclass(frozen=True)
class Joints:
    """The joints of a truss.

    Attributes
    ----------
    labels
        Their names, each once.
    xy
        Coordinates in m, x to the right and y up, shape (joints, 2).
    """

    labels: Sequence[str]
    xy: ArrayLike


@dataclass(frozen=True)
class Members:
    """The members of a truss, pinned at both ends.

    Attributes
    ----------
    labels
        Their names, each once.
    starts, ends
        The labels of the joints at their ends.
    stiffness
        EA in N, one for all or shape (members,).
    """

    labels: Sequence[str]
    starts: Sequence[str]
    ends: Sequence[str]
    stiffness: ArrayLike = 1.0


@dataclass(frozen=True)
class Held:
    """A joint that is supported, against movement of either sense.

    Attributes
    ----------
    joint
        The label of the joint.
    kind
        'pinned' holds both directions; 'roller' leaves one direction free.
    angle
        The direction in which a roller moves, in rad from the x axis anticlockwise: 0 rolls
        horizontally, pi/2 rolls up and down.
    """

    joint: str
    kind: Literal["pinned", "roller"]
    angle: float = 0.0


def coordinates(joints: Joints) -> Array:
    """Return the coordinates, shape (joints, 2), of a table of joints that can be used.

    Raises
    ------
    StaticsError
        For no joints, a label used twice, a coordinate that is no number, two joints at one place.
    """
    refuse_repeated("joint", joints.labels)
    xy = np.array(joints.xy, dtype=float)
    if xy.shape != (len(joints.labels), 2) or not len(xy):
        raise StaticsError(
            f"{len(joints.labels)} joint labels and coordinates of shape {xy.shape} do not agree",
            hint="Give every joint an x and a y.",
        )
    wrong = np.flatnonzero(~np.isfinite(xy).all(axis=1))
    if len(wrong):
        label = joints.labels[wrong[0]]
        raise StaticsError(f"Joint '{label}' has a coordinate that is not a number", named=(label,))
    _refuse_coincident(joints.labels, xy)
    return xy


def member_ends(members: Members, joints: Joints) -> Indices:
    """Return the joints at the ends of every member as row numbers, shape (members, 2).

    Raises
    ------
    StaticsError
        For no members, a label used twice, an end at a missing joint, both ends at one joint, two
        members between the same joints, a joint without a member.
    """
    refuse_repeated("member", members.labels)
    count = len(members.labels)
    if not count or len(members.starts) != count or len(members.ends) != count:
        raise StaticsError(
            f"{count} members, {len(members.starts)} starts and {len(members.ends)} ends do not "
            "make a truss",
            hint="Give every member a label and the joints at its two ends.",
        )
    row = {label: n for n, label in enumerate(joints.labels)}
    try:
        ends = np.array(
            [[row[s] for s in members.starts], [row[e] for e in members.ends]], dtype=np.intp
        ).T
    except KeyError as error:
        _refuse_missing_end(members, row, error)
    _refuse_ends(members.labels, joints.labels, ends)
    return ends


def stiffnesses(members: Members) -> Array:
    """Return EA of every member, shape (members,).

    Raises
    ------
    StaticsError
        For a value that is not above 0, or values further apart than members of one truss are.
    """
    given = np.asarray(members.stiffness, dtype=float)
    count = len(members.labels)
    if given.ndim and given.shape != (count,):
        raise StaticsError(f"{given.size} stiffnesses EA were given for {count} members")
    ea = np.broadcast_to(given, (count,)).copy()
    wrong = np.flatnonzero(~(np.isfinite(ea) & (ea > 0)))
    if len(wrong):
        label = members.labels[wrong[0]]
        raise StaticsError(
            f"Member '{label}' has the stiffness EA {ea[wrong[0]]:g}",
            hint="EA is a number above 0.",
            named=(label,),
        )
    soft, stiff = members.labels[int(ea.argmin())], members.labels[int(ea.argmax())]
    if ea.max() > STIFFNESS_RATIO * ea.min():
        raise StaticsError(
            f"Member '{stiff}' is {ea.max() / ea.min():.1g} times as stiff as member '{soft}'",
            hint=f"Above {STIFFNESS_RATIO:g} the forces cannot be trusted: is one EA in another "
            "unit?",
            named=(stiff, soft),
        )
    return ea


def support_rows(supports: Sequence[Held], joints: Joints) -> Indices:
    """Return the joints of the supports as row numbers, shape (supports,).

    Raises
    ------
    StaticsError
        For a support at a missing joint, twice at one joint, of an unknown kind, with an angle
        that is no number; for supports that hold fewer than three directions.
    """
    row = {label: n for n, label in enumerate(joints.labels)}
    for held in supports:
        if held.joint not in row:
            raise missing_joint("The support", held.joint, row)
        if held.kind not in {"pinned", "roller"}:
            raise StaticsError(
                f"The support at joint '{held.joint}' is '{held.kind}'",
                hint="A truss is held by 'pinned' or 'roller' supports.",
                named=(held.joint,),
            )
        if not np.isfinite(held.angle):
            raise StaticsError(
                f"The roller at joint '{held.joint}' has an angle that is not a number",
                named=(held.joint,),
            )
    refuse_repeated("supported joint", [held.joint for held in supports])
    _refuse_few(supports)
    return np.array([row[held.joint] for held in supports], dtype=np.intp)


def missing_joint(what: str, label: str, known: Mapping[str, int]) -> StaticsError:
    """Return the error for something at a joint that is not in the table of joints."""
    hint = near_match(label, known) or "Add the joint, or correct its label."
    return StaticsError(
        f"{what} is at joint '{label}', which is not there", hint=hint, named=(label,)
    )


def refuse_repeated(what: str, labels: Sequence[str]) -> None:
    """Refuse a label that stands twice in a table."""
    if len(set(labels)) == len(labels):
        return
    seen: set[str] = set()
    for label in labels:
        if label in seen:
            raise StaticsError(
                f"The {what} '{label}' is given twice", hint="Keep one of them.", named=(label,)
            )
        seen.add(label)


def _refuse_coincident(labels: Sequence[str], xy: Array) -> None:
    size = float(np.ptp(xy, axis=0).max())
    if len(xy) > 1 and size == 0:
        raise _coincident(labels[0], labels[1])
    # Joints of nearly one x are put together, then sorted by y: what coincides are neighbours.
    by_x = np.argsort(xy[:, 0], kind="stable")
    column = np.empty(len(xy), dtype=np.intp)
    column[by_x] = np.cumsum(np.diff(xy[by_x, 0], prepend=xy[by_x[0], 0]) > CLOSE * size)
    order = np.lexsort((xy[:, 1], column))
    near = (np.abs(np.diff(xy[order], axis=0)) <= CLOSE * size).all(axis=1)
    if near.any():
        at = int(near.argmax())
        raise _coincident(*sorted((labels[order[at]], labels[order[at + 1]]), key=labels.index))


def _coincident(first: str, second: str) -> StaticsError:
    return StaticsError(
        f"Joints '{first}' and '{second}' are at the same place",
        hint="Keep one of them and join its members there.",
        named=(first, second),
    )


def _refuse_missing_end(members: Members, row: Mapping[str, int], error: KeyError) -> None:
    """Raise the error for the first member that ends at a missing joint."""
    for label, *joints in zip(members.labels, members.starts, members.ends, strict=True):
        for joint in joints:
            if joint not in row:
                refusal = missing_joint(f"An end of member '{label}'", joint, row)
                refusal.named = (label, joint)
                raise refusal from error


def _refuse_ends(labels: Sequence[str], joints: Sequence[str], ends: Indices) -> None:
    same = np.flatnonzero(ends[:, 0] == ends[:, 1])
    if len(same):
        label, joint = labels[same[0]], joints[ends[same[0], 0]]
        raise StaticsError(
            f"Member '{label}' has no length: both its ends are joint '{joint}'",
            hint="Give it two different joints.",
            named=(label, joint),
        )
    pair = ends.min(axis=1) * len(joints) + ends.max(axis=1)
    order = np.argsort(pair, kind="stable")
    twice = np.flatnonzero(np.diff(pair[order]) == 0)
    if len(twice):
        first, second = (labels[order[twice[0] + k]] for k in (0, 1))
        raise StaticsError(
            f"Members '{first}' and '{second}' join the same two joints",
            hint="Keep one of them, with the EA of both together.",
            named=(first, second),
        )
    alone = np.flatnonzero(np.bincount(ends.ravel(), minlength=len(joints)) == 0)
    if len(alone):
        label = joints[alone[0]]
        raise StaticsError(
            f"Joint '{label}' has no member",
            hint="Join it to the truss, or leave it out.",
            named=(label,),
        )


def _refuse_few(supports: Sequence[Held]) -> None:
    needed = 3  # a body in a plane moves in two directions and turns
    held = sum(2 if support.kind == "pinned" else 1 for support in supports)
    if held >= needed:
        return
    names = tuple(support.joint for support in supports)
    at = " and ".join(f"'{name}'" for name in names)
    raise StaticsError(
        f"The support at {at} is not enough to hold the truss"
        if names
        else "No joint is supported",
        hint="At least three directions have to be held, such as by one pinned support and one "
        "roller.",
        named=names,
    )
