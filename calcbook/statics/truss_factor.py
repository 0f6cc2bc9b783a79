"""The stiffness of a truss, taken apart once for any number of load cases.

The unknowns are the movements of the joints in their own directions: x and y, or along and across
the free direction of a roller. Each joint is scaled by the members it has, so that stiff and soft
ones are seen alike; not each direction, or a joint that is held in one only would not show.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Protocol

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Indices = NDArray[np.intp]

DENSE = 160
"""Up to this many unknowns a full matrix is quicker than loading and using scipy."""

_ROUNDS = 3  # a movement without stiffness stands alone after one; the others are for near ones
_SHIFT = 1e-12


class Factor(Protocol):
    """A matrix that was taken apart."""

    def solve(self, right: Array) -> Array:
        """Return the unknowns for right-hand sides, shape (unknowns, cases)."""

    def softest(self) -> Array:
        """Return the movement that the matrix resists least, shape (unknowns,)."""


@dataclass(frozen=True)
class _Dense:
    values: Array
    vectors: Array

    def solve(self, right: Array) -> Array:
        found: Array = self.vectors @ ((self.vectors.T @ right) / self.values[:, np.newaxis])
        return found

    def softest(self) -> Array:
        return self.vectors[:, 0]


@dataclass(frozen=True)
class _Sparse:
    lu: Any

    def solve(self, right: Array) -> Array:
        found: Array = self.lu.solve(right)
        return found

    def softest(self) -> Array:
        movement: Array = np.random.default_rng(1).standard_normal(self.lu.shape[0])
        for _ in range(_ROUNDS):
            movement = self.solve(movement)
            movement /= np.abs(movement).max()
        return movement


def factorised(rows: Array, unknowns: Indices, stiffness: Array, count: int) -> Factor:
    """Return the scaled stiffness matrix, taken apart.

    Parameters
    ----------
    rows
        Elongation of each member per movement of its unknowns, scaled, shape (members, 4).
    unknowns
        The numbers of these unknowns, -1 for a direction that is held, shape (members, 4).
    stiffness
        EA/L of each member, shape (members,).
    count
        The number of unknowns.
    """
    blocks = stiffness[:, np.newaxis, np.newaxis] * rows[:, :, np.newaxis] * rows[:, np.newaxis, :]
    down = np.broadcast_to(unknowns[:, :, np.newaxis], blocks.shape)
    across = np.broadcast_to(unknowns[:, np.newaxis, :], blocks.shape)
    free = (down >= 0) & (across >= 0)
    if count <= DENSE:
        matrix = np.bincount(
            down[free] * count + across[free], weights=blocks[free], minlength=count * count
        )
        return _dense(np.asarray(matrix, dtype=float).reshape(count, count))
    return _sparse(blocks[free], down[free], across[free], count)


def _dense(matrix: Array) -> Factor:
    values, vectors = np.linalg.eigh(matrix)
    # An eigenvalue of nothing is a mechanism and refused as such; dividing by it would only warn.
    return _Dense(np.maximum(values, np.finfo(float).tiny ** 0.5), vectors)


def _sparse(values: Array, down: Indices, across: Indices, count: int) -> Factor:
    # Imported here so that `import calcbook` stays light; scipy ships no types.
    from scipy.sparse import (  # type: ignore[import-untyped] # noqa: PLC0415
        csc_array,
        eye_array,
    )
    from scipy.sparse.linalg import splu  # type: ignore[import-untyped] # noqa: PLC0415

    matrix = csc_array((values, (down, across)), shape=(count, count))
    options = {"permc_spec": "MMD_AT_PLUS_A", "diag_pivot_thresh": 0.0,
               "options": {"SymmetricMode": True}}  # fmt: skip
    try:
        return _Sparse(splu(matrix, **options))
    except RuntimeError:  # exactly singular: a little added shows the movement that is not held
        return _Sparse(splu(csc_array(matrix + _SHIFT * eye_array(count)), **options))
