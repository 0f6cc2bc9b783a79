"""How fast a large truss is solved: 2,000 joints, from its tables to the member forces.

Run by hand::

    python tests/benchmarks/truss_grid.py

The other side assembles the same stiffness matrix with numpy and solves it with scipy.sparse, as
one would do who has the arrays already and checks nothing.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import timing
from scipy import sparse
from scipy.sparse import linalg

from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held, Joints, Members

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Indices = NDArray[np.intp]

COLUMNS, ROWS = 80, 25
TARGET = 2.0
AGREE = 1e-9


def truss_vs_scipy() -> float:
    """Measure, print a line of context and return the ratio of the times, ours to theirs."""
    xy, ends, ea, loads = grid()
    labels = [f"J{n}" for n in range(len(xy))]
    members = [f"{labels[a]}-{labels[b]}" for a, b in ends]
    starts, finishes = ([labels[n] for n in column] for column in ends.T)
    supports = [Held(label, "pinned") for label in labels[:ROWS]]

    def ours() -> Array:
        table = Members(members, starts, finishes, ea)
        return Truss(Joints(labels, xy), table, supports).solve(loads).forces[0]

    def theirs() -> Array:
        return by_scipy(xy, ends, ea, loads)

    np.testing.assert_allclose(ours(), theirs(), rtol=0, atol=AGREE * np.abs(theirs()).max())
    times = timing.best({"ours": ours, "scipy": theirs})
    timing.say(
        f"truss of {len(xy):,} joints and {len(ends):,} members, from its tables to its forces: "
        f"ours {timing.span(times['ours'])}, assembling and scipy.sparse "
        f"{timing.span(times['scipy'])}"
    )
    return times["ours"] / times["scipy"]


def grid() -> tuple[Array, Indices, Array, Array]:
    """Return joints, members, EA and loads of a latticed wall that is held at its left side."""
    xy = np.array([(2.0 * i, 1.5 * k) for i in range(COLUMNS) for k in range(ROWS)])
    at = np.arange(COLUMNS * ROWS).reshape(COLUMNS, ROWS)
    runs = ((at[:-1], at[1:]), (at[:, :-1], at[:, 1:]), (at[:-1, :-1], at[1:, 1:]))
    ends = np.concatenate([np.stack((a.ravel(), b.ravel()), axis=1) for a, b in runs])
    random = np.random.default_rng(7)
    ea = random.uniform(1e8, 5e8, len(ends))
    return xy, ends, ea, random.uniform(-1e3, 1e3, (1, len(xy), 2))


def by_scipy(xy: Array, ends: Indices, ea: Array, loads: Array) -> Array:
    """Return the member forces in N, the joints of the first column being held."""
    along = xy[ends[:, 1]] - xy[ends[:, 0]]
    length = np.hypot(*along.T)
    row = np.concatenate((-along, along), axis=1) / length[:, None]
    k = ea / length
    unknown = np.stack(
        (2 * ends[:, 0], 2 * ends[:, 0] + 1, 2 * ends[:, 1], 2 * ends[:, 1] + 1), axis=1
    )
    blocks = k[:, None, None] * row[:, :, None] * row[:, None, :]
    down, across = np.repeat(unknown, 4, axis=1), np.tile(unknown, (1, 4))
    size = 2 * len(xy)
    matrix = sparse.coo_array((blocks.ravel(), (down.ravel(), across.ravel())), (size, size))
    free = slice(2 * ROWS, size)
    moved = np.zeros(size)
    moved[free] = linalg.spsolve(matrix.tocsc()[free, free], loads[0].ravel()[free])
    forces: Array = k * (row * moved[unknown]).sum(axis=1)
    return forces


if __name__ == "__main__":
    timing.say(f"ratio {truss_vs_scipy():.4g}, to reach {TARGET:g} or less")
