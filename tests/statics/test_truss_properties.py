"""What holds for every truss: equilibrium, superposition, symmetry, scaling, reciprocity."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from truss_samples import grown, random_loads

from calcbook.statics.generators import Web, gable
from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held, Joints, Members

EXACT = 1e-9
MANY = settings(max_examples=40, deadline=None)

trusses = st.builds(grown, st.integers(0, 10_000), more=st.integers(0, 3), turned=st.booleans())
seeds = st.integers(0, 10_000)
scales = st.floats(0.01, 100.0)


@given(trusses, seeds)
@MANY
def test_equilibrium_of_the_whole(truss: Truss, seed: int) -> None:
    """Loads and reactions balance in both directions and in moment about any point."""
    found = truss.solve(random_loads(truss, seed, cases=2))
    total = found.loads.sum(axis=1) + found.reactions.sum(axis=1)
    about = np.array([3.0, -7.0])
    arms, lower = truss.xy - about, truss.xy[truss.held] - about
    moment = (arms[:, 0] * found.loads[..., 1] - arms[:, 1] * found.loads[..., 0]).sum(axis=1)
    moment += (lower[:, 0] * found.reactions[..., 1] - lower[:, 1] * found.reactions[..., 0]).sum(
        axis=1
    )
    assert np.abs(total).max() < EXACT * found.scale.max()
    assert np.abs(moment).max() < 20 * EXACT * found.scale.max()


@given(trusses, seeds)
@MANY
def test_equilibrium_of_every_joint(truss: Truss, seed: int) -> None:
    """At every joint the pulls of its members, its load and its reaction add up to nothing."""
    found = truss.solve(random_loads(truss, seed))
    supported = [held.joint for held in truss.supports]
    for row, label in enumerate(truss.joints.labels):
        left = found.loads[0, row].copy()
        if label in supported:
            left += found.reaction(label)
        for member, (start, end) in enumerate(truss.ends):
            way = truss.xy[end] - truss.xy[start]
            pull = found.forces[0, member] * way / np.linalg.norm(way)
            left += pull * ((row == start) * 1.0 - (row == end) * 1.0)
        assert np.abs(left).max() < EXACT * found.scale[0]
    assert found.residual < EXACT


@given(trusses, seeds)
@MANY
def test_a_roller_pushes_square_to_its_way(truss: Truss, seed: int) -> None:
    """A roller does not push along its free direction, and its joint moves only along it."""
    found = truss.solve(random_loads(truss, seed))
    roller = next(n for n, held in enumerate(truss.supports) if held.kind == "roller")
    angle = truss.supports[roller].angle
    way = np.array([np.cos(angle), np.sin(angle)])
    moved = found.displacements[0, truss.held[roller]]
    assert abs(found.reactions[0, roller] @ way) < EXACT * found.scale[0]
    assert abs(moved @ [-way[1], way[0]]) <= EXACT * np.abs(found.displacements).max()


@given(trusses, seeds, st.lists(st.floats(-3, 3), min_size=3, max_size=3))
@MANY
def test_superposition(truss: Truss, seed: int, factors: list[float]) -> None:
    """A combination of results is the result of the combined loads."""
    loads = random_loads(truss, seed, cases=3)
    cases = truss.solve(loads)
    combined = cases.combined(factors)
    at_once = truss.solve(np.tensordot(np.array([factors]), loads, axes=1))
    tolerance = EXACT * cases.scale.max()
    np.testing.assert_allclose(combined.forces, at_once.forces, rtol=0, atol=tolerance)
    np.testing.assert_allclose(combined.reactions, at_once.reactions, rtol=0, atol=tolerance)
    np.testing.assert_allclose(
        combined.displacements, at_once.displacements, rtol=0,
        atol=EXACT * np.abs(cases.displacements).max(),
    )  # fmt: skip
    assert combined.residual < EXACT


@given(trusses, seeds, scales, scales, scales)
@MANY
def test_scaling(truss: Truss, seed: int, load: float, size: float, stiffness: float) -> None:
    """Forces grow with the loads alone; movements with load and size, and less with EA."""
    loads = random_loads(truss, seed)
    table = truss.members
    other = Truss(
        Joints(truss.joints.labels, size * truss.xy),
        Members(table.labels, table.starts, table.ends, stiffness * truss.ea),
        truss.supports,
    ).solve(load * loads)
    found = truss.solve(loads)
    np.testing.assert_allclose(
        other.forces, load * found.forces, rtol=0, atol=EXACT * other.scale[0]
    )
    moved = load * size / stiffness * found.displacements
    np.testing.assert_allclose(other.displacements, moved, rtol=0, atol=EXACT * np.abs(moved).max())


@given(trusses, seeds, st.floats(-3.1, 3.1))
@MANY
def test_turning_everything_changes_no_force(truss: Truss, seed: int, angle: float) -> None:
    """A truss turned with its rollers and its loads has the same member forces."""
    c, s = np.cos(angle), np.sin(angle)
    turn = np.array([[c, -s], [s, c]])
    loads = random_loads(truss, seed)
    held = [Held(one.joint, one.kind, one.angle + angle) for one in truss.supports]
    other = Truss(Joints(truss.joints.labels, truss.xy @ turn.T), truss.members, held)
    found = truss.solve(loads)
    turned = other.solve(loads @ turn.T)
    np.testing.assert_allclose(turned.forces, found.forces, rtol=0, atol=EXACT * found.scale[0])
    np.testing.assert_allclose(
        turned.reactions, found.reactions @ turn.T, rtol=0, atol=EXACT * found.scale[0]
    )


@given(trusses, seeds)
@MANY
def test_the_order_of_the_tables_does_not_matter(truss: Truss, seed: int) -> None:
    """Rows in another order, and members from end to start, give the same forces by label."""
    random = np.random.default_rng(seed)
    joints, members = (random.permutation(n) for n in (len(truss.xy), len(truss.ends)))
    loads = random_loads(truss, seed)
    table = truss.members
    other = Truss(
        Joints([truss.joints.labels[n] for n in joints], truss.xy[joints]),
        Members(
            [table.labels[n] for n in members],
            [table.ends[n] for n in members],
            [table.starts[n] for n in members],
            truss.ea[members],
        ),
        truss.supports[::-1],
    )
    found, shuffled = truss.solve(loads), other.solve(loads[:, joints])
    np.testing.assert_allclose(
        shuffled.forces, found.forces[:, members], rtol=0, atol=EXACT * found.scale[0]
    )


@given(trusses, seeds)
@MANY
def test_reciprocity(truss: Truss, seed: int) -> None:
    """What a unit load at one joint moves another, a unit load there moves the first."""
    one, two = np.random.default_rng(seed).choice(len(truss.xy), 2, replace=False)
    loads = np.zeros((2, len(truss.xy), 2))
    loads[0, one, 0] = loads[1, two, 1] = 1.0
    moved = truss.solve(loads).displacements
    assert abs(moved[0, two, 1] - moved[1, one, 0]) <= EXACT * np.abs(moved).max()


@given(trusses, seeds)
@MANY
def test_work_of_the_loads_is_stored_in_the_members(truss: Truss, seed: int) -> None:
    """The loads do the work that the members store: sum F u = sum N2 L / EA."""
    found = truss.solve(random_loads(truss, seed))
    work = (found.loads * found.displacements).sum()
    stored = (found.forces**2 * truss.lengths / truss.ea).sum()
    assert abs(work - stored) <= EXACT * stored


@given(
    st.integers(1, 5),
    st.tuples(st.floats(4, 40), st.floats(0.5, 8)),
    st.sampled_from([0.0, 0.1, 0.5]),
    st.sampled_from(["Pratt", "Howe"]),
    seeds,
)
@MANY
def test_symmetry(panels: int, size: tuple[float, float], heel: float, web: Web, seed: int) -> None:
    """Gravity loads mirrored on a gable give mirrored forces."""
    span, height = size
    shape = gable(span, height, panels, web, heel=heel * height)
    truss = shape.truss(1e8)
    mirrored = {label: f"{label[0]}{2 * panels - int(label[1:])}" for label in truss.joints.labels}
    row = {label: n for n, label in enumerate(truss.joints.labels)}
    loads = random_loads(truss, seed)
    loads[..., 0] = 0.0
    other = loads[:, [row[mirrored[label]] for label in truss.joints.labels]]
    found, opposite = truss.solve(loads), truss.solve(other)
    pair = {
        frozenset((start, end)): label
        for label, (start, end, _) in zip(shape.labels, shape.bars, strict=True)
    }
    for label, (start, end, _) in zip(shape.labels, shape.bars, strict=True):
        twin = pair[frozenset((mirrored[start], mirrored[end]))]
        assert abs(found.force(label) - opposite.force(twin)) < 1e-8 * found.scale[0]
