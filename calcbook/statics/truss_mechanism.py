"""Whether a truss can stand, and the joint to name where it cannot."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from calcbook.statics.truss import Truss

    Array = NDArray[np.float64]

STRETCH = 1e-6
"""Members that turn a million times more than they stretch do not hold a joint."""

UNBALANCED = 1e-8
"""More of the largest force than this left over at a joint is not a solution."""

_AS_ONE = 1e-9  # movement of the ends against each other, of a truss that moves as a whole
_ALIKE = 1 - 1e-6


def refuse_mechanism(truss: Truss, softest: Array) -> None:
    """Refuse a truss whose joints can move without stretching its members.

    The movement resisted least is looked at as a movement: the stretch of the members against the
    movement of their ends. So a long slender truss, soft but sound, is not taken for a mechanism,
    and members almost in one line, which hold nothing across, are.

    Parameters
    ----------
    truss
        The truss.
    softest
        The movement of its joints that is resisted least, shape (joints, 2).
    """
    movement = np.hypot(softest[:, 0], softest[:, 1])
    apart = softest[truss.ends[:, 1]] - softest[truss.ends[:, 0]]
    stretch = np.abs((apart * truss.directions).sum(axis=1)).max()
    turned = np.hypot(apart[:, 0], apart[:, 1]).max()
    whole = turned <= _AS_ONE * movement.max()
    if not whole and stretch > STRETCH * turned:
        return
    joint = truss.joints.labels[int((movement >= _ALIKE * movement.max()).argmax())]
    raise StaticsError(
        f"Joint '{joint}' can move without stretching a member: the truss is a mechanism",
        hint=_hint(truss, whole or _turns_as_one(truss, softest), joint),
        named=(joint,),
    )


def refuse_inexact(truss: Truss, left: Array, scale: Array, movement: Array) -> None:
    """Refuse forces that do not balance the loads, naming the joint that moves most.

    Parameters
    ----------
    truss
        The truss.
    left
        The largest unbalanced force of each case in N, shape (cases,).
    scale
        The largest force of each case in N, shape (cases,).
    movement
        The movements of the joints in their own directions, shape (cases, 2 joints).
    """
    wrong = np.flatnonzero(~(left <= UNBALANCED * scale))
    if not len(wrong):
        return
    case = int(wrong[0])
    moved = np.linalg.norm(movement[case].reshape(-1, 2), axis=1)
    joint = truss.joints.labels[int(moved.argmax())]
    raise StaticsError(
        f"The forces do not come out exactly, and joint '{joint}' moves most",
        hint="Look for members almost in one line, a very slender truss, and EA in another unit.",
        named=(joint,),
    )


def _turns_as_one(truss: Truss, movement: Array) -> bool:
    """Return whether a movement is that of one rigid body."""
    x, y = truss.xy.T
    rigid = np.zeros((2 * len(x), 3))
    rigid[0::2, 0] = rigid[1::2, 1] = 1.0
    rigid[0::2, 2], rigid[1::2, 2] = y.mean() - y, x - x.mean()
    wanted = movement.ravel()
    fitted = rigid @ np.linalg.lstsq(rigid, wanted, rcond=None)[0]
    return bool(np.abs(wanted - fitted).max() <= STRETCH * np.abs(wanted).max())


def _hint(truss: Truss, whole: bool, joint: str) -> str:
    if whole:
        return (
            "The supports do not hold the truss as a whole: add one, or turn a roller so that it "
            "holds another direction."
        )
    if truss.redundancy < 0:
        return (
            f"{-truss.redundancy} more members or supported directions are needed at least: a "
            f"truss has as many as twice its joints. Look at the panels by joint '{joint}'."
        )
    return f"Look for a panel without a diagonal, or members in one line, by joint '{joint}'."
