"""Members of a truss that meet without being joined: worth a second look, and not refused."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Indices = NDArray[np.intp]

_CLOSE = 1e-9  # of the size of the truss


def crossings(xy: Array, ends: Indices) -> Iterator[tuple[int, int]]:
    """Yield the pairs of members that cross between their ends, by row.

    Parameters
    ----------
    xy
        Coordinates, shape (joints, 2).
    ends
        Rows of the joints at the ends of the members, shape (members, 2).
    """
    start, end = xy[ends[:, 0]], xy[ends[:, 1]]
    low, high = np.minimum(start, end), np.maximum(start, end)
    for member in range(len(ends) - 1):
        later = slice(member + 1, None)
        near = (low[later] <= high[member]) & (high[later] >= low[member])
        others = member + 1 + np.flatnonzero(near.all(axis=1))
        one, two = start[others], end[others]
        across = _apart(start[member], end[member], one, two)
        across &= _apart(one, two, start[member], end[member])
        for other in others[across]:
            yield member, int(other)


def passed_joints(xy: Array, ends: Indices) -> Iterator[tuple[int, int]]:
    """Yield (joint, member) where a member runs through a joint that is not one of its ends."""
    close = _CLOSE * float(np.ptp(xy, axis=0).max())
    for member, (first, last) in enumerate(ends):
        along = xy[last] - xy[first]
        length = float(np.hypot(*along))
        x, y = (xy - xy[first]).T
        at = (x * along[0] + y * along[1]) / length
        off = np.abs(x * along[1] - y * along[0]) / length
        for joint in np.flatnonzero((off <= close) & (at > close) & (at < length - close)):
            if joint not in (first, last):
                yield int(joint), member


def _apart(start: Array, end: Array, one: Array, two: Array) -> NDArray[np.bool_]:
    """Return whether two points are on the two sides of a line, neither of them on it."""
    along = end - start
    first, second = (
        along[..., 0] * (point - start)[..., 1] - along[..., 1] * (point - start)[..., 0]
        for point in (one, two)
    )
    off = _CLOSE * (along**2).sum(axis=-1)
    two_sides: NDArray[np.bool_] = (np.minimum(first, second) < -off) & (
        np.maximum(first, second) > off
    )
    return two_sides
