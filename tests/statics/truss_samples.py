"""Trusses for the tests: those of the published values, and random ones."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held, Joints, Members

Array = NDArray[np.float64]
Places = dict[str, tuple[float, float]]


def lettered(
    places: Places, members: str, supports: list[Held], stiffness: ArrayLike = 1e6
) -> Truss:
    """Return a truss whose members are named by the letters of their two joints."""
    names = members.split()
    starts, ends = ([name[k] for name in names] for k in (0, 1))
    joints = Joints(list(places), list(places.values()))
    return Truss(joints, Members(names, starts, ends, stiffness), supports)


def gable_of_13(b: float, h: float) -> Truss:
    """Return the gable of 13 members: Baker and Haynes, Engineering Statics, chapter 6."""
    places = {"A": (0.0, 0.0), "B": (b, h), "C": (b, 0.0), "D": (2 * b, 2 * h), "E": (2 * b, 0.0),
              "F": (3 * b, h), "G": (3 * b, 0.0), "H": (4 * b, 0.0)}  # fmt: skip
    members = "AB AC BC BD BE CE DE DF EF EG FG FH GH"
    return lettered(places, members, [Held("A", "pinned"), Held("H", "roller")])


def howe_roof(w: float, h: float) -> Truss:
    """Return the Howe roof truss of 21 members: Baker and Haynes, Engineering Statics, ch. 6."""
    places = {"A": (0.0, 0.0), "B": (w, h / 3), "C": (2 * w, 2 * h / 3), "D": (3 * w, h),
              "E": (4 * w, 2 * h / 3), "F": (5 * w, h / 3), "G": (6 * w, 0.0), "H": (w, 0.0),
              "J": (2 * w, 0.0), "K": (3 * w, 0.0), "L": (4 * w, 0.0),
              "M": (5 * w, 0.0)}  # fmt: skip
    members = "AB BC CD DE EF FG AH HJ JK KL LM MG BH CJ DK EL FM BJ CK EK FL"
    return lettered(places, members, [Held("A", "pinned"), Held("G", "roller")])


def down(truss: Truss, **loads: float) -> Array:
    """Return one case of downward loads by joint."""
    return truss.loads([(0, joint, 0.0, -load) for joint, load in loads.items()], 1)


def grown(seed: int, *, more: int = 0, turned: bool = False) -> Truss:
    """Return a random truss grown from a triangle, each joint held by two members of the earlier.

    Parameters
    ----------
    seed
        Of the random numbers.
    more
        Members beyond those that equilibrium needs.
    turned
        Whether the roller rolls in any direction; else it rolls horizontally.
    """
    random = np.random.default_rng(seed)
    count = int(random.integers(4, 9))
    xy = [np.array([0.0, 0.0]), np.array([4.0, 0.0]), np.array([2.0, 2.5])]
    pairs = [(0, 1), (1, 2), (0, 2)]
    while len(xy) < count:
        first, second = pairs[int(random.integers(len(pairs)))]
        new = random.uniform([-2.0, -2.0], [10.0, 6.0]).round(2)
        if well_placed(new, xy, xy[first], xy[second]):
            pairs += [(first, len(xy)), (second, len(xy))]
            xy.append(new)
    spare = [(a, b) for a in range(count) for b in range(a + 1, count) if (a, b) not in pairs]
    pairs += [spare[k] for k in random.permutation(len(spare))[:more]]
    labels = [f"J{n}" for n in range(count)]
    angle = float(random.uniform(-1.2, 1.2)) if turned else 0.0
    return Truss(
        Joints(labels, np.array(xy)),
        Members(
            [f"M{n}" for n in range(len(pairs))],
            [labels[a] for a, _ in pairs],
            [labels[b] for _, b in pairs],
            random.uniform(1e7, 1e9, len(pairs)),
        ),
        [Held("J0", "pinned"), Held("J1", "roller", angle)],
    )


def well_placed(new: Array, others: list[Array], first: Array, second: Array) -> bool:
    """Return whether a joint is apart from the others, and its two members are not in one line."""
    apart = min(float(np.linalg.norm(new - other)) for other in others) > 0.8
    one, two = new - first, new - second
    turn = abs(one[0] * two[1] - one[1] * two[0]) / np.linalg.norm(one) / np.linalg.norm(two)
    return apart and bool(turn > 0.2)


def random_loads(truss: Truss, seed: int, cases: int = 1) -> Array:
    """Return random loads at every joint, shape (cases, joints, 2)."""
    return np.random.default_rng(seed).uniform(-1e4, 1e4, (cases, len(truss.xy), 2))


def by_forces(truss: Truss, loads: Array) -> Array:
    """Return member forces (members,) by the force method, dense, from the tables alone.

    Equilibrium leaves the states of self-stress free; of them the one of least energy holds.
    """
    row = {label: n for n, label in enumerate(truss.joints.labels)}
    xy = np.asarray(truss.joints.xy, dtype=float)
    columns, flexibility = [], []
    ea = np.broadcast_to(
        np.asarray(truss.members.stiffness, dtype=float), len(truss.members.labels)
    )
    for start, end, stiff in zip(truss.members.starts, truss.members.ends, ea, strict=True):
        column, along = np.zeros(xy.shape), xy[row[end]] - xy[row[start]]
        length = np.sqrt((along**2).sum())
        column[row[start]], column[row[end]] = along / length, -along / length
        columns.append(column.ravel())
        flexibility.append(length / stiff)
    for held in truss.supports:
        for angle in (held.angle + np.pi / 2, held.angle)[: 1 if held.kind == "roller" else 2]:
            column = np.zeros(xy.shape)
            column[row[held.joint]] = np.cos(angle), np.sin(angle)
            columns.append(column.ravel())
            flexibility.append(0.0)
    matrix, soft = np.array(columns).T, np.diag(flexibility)
    forces = np.linalg.lstsq(matrix, -loads.ravel(), rcond=None)[0]
    _, sizes, rows = np.linalg.svd(matrix)
    free = rows[int((sizes > 1e-10 * sizes[0]).sum()) :].T
    if free.shape[1]:
        forces = forces - free @ np.linalg.solve(free.T @ soft @ free, free.T @ soft @ forces)
    found: Array = forces[: len(ea)]
    return found
