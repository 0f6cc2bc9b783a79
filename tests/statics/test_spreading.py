"""Loads brought to joints, levels and girders: what arrives is what was there."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from truss_samples import gable_of_13, grown

from calcbook.errors import StaticsError
from calcbook.statics.spreading import (
    at_joints,
    chord_loads,
    chord_wind,
    face_wind,
    girder_points,
    lever,
    member_weights,
    tributary,
)

MANY = settings(max_examples=60, deadline=None)
steps = st.lists(st.floats(0.1, 10.0), min_size=1, max_size=12)
rises = st.lists(st.floats(-5.0, 5.0), min_size=13, max_size=13)
loads = st.floats(-5e3, 5e3)


def chord(step: list[float], rise: list[float]) -> np.ndarray:
    """Return the joints of a chord, left to right."""
    x = np.concatenate(([0.0], np.cumsum(step)))
    return np.stack((x, np.array(rise[: len(x)])), axis=1)


def test_half_of_each_member_to_its_joints() -> None:
    """The gable of 13 members at 0.1 kN/m gives each joint the sum of its halves (by hand)."""
    truss = gable_of_13(3, 2)
    forces = member_weights(truss, 0.1)
    down = dict(zip(truss.joints.labels, -forces[:, 1], strict=True))
    wanted = {"A": 0.3303, "B": 0.6408, "C": 0.4, "D": 0.5606, "E": 0.8606, "F": 0.6408,
              "G": 0.4, "H": 0.3303}  # fmt: skip
    for joint, weight in wanted.items():
        assert down[joint] == pytest.approx(weight, abs=5.1e-5), joint
    assert not forces[:, 0].any()
    assert sum(down.values()) == pytest.approx(0.1 * 41.633308, rel=1e-7)


@given(st.integers(0, 1000), st.floats(0, 1e3))
@MANY
def test_weights_add_up_and_stay_where_they_are(seed: int, weight: float) -> None:
    """All weight arrives, and its moment about any point is that of the members."""
    truss = grown(seed)
    each = weight * np.linspace(1, 2, len(truss.lengths))
    down = -member_weights(truss, each)[:, 1]
    middles = truss.xy[truss.ends].mean(axis=1)[:, 0]
    assert down.sum() == pytest.approx((each * truss.lengths).sum())
    assert (down * truss.xy[:, 0]).sum() == pytest.approx((each * truss.lengths * middles).sum())


def test_panel_loads_on_plan() -> None:
    """12 m in 4 panels, trusses 4 m apart, 0.5 kPa on plan: 3, 6, 6, 6 and 3 kN (by hand)."""
    x = np.linspace(0, 12, 5)
    forces = chord_loads(np.stack((x, 0.3 * x), axis=1), 500.0, 4.0)
    assert (-forces[:, 1]).tolist() == pytest.approx([3000, 6000, 6000, 6000, 3000])
    assert -forces[:, 1].sum() == pytest.approx(0.5e3 * 12 * 4)


def test_panel_loads_on_the_slope() -> None:
    """A load per area of the surface grows with the slope: 5/4 of that on plan at 3 in 4."""
    x = np.linspace(0, 12, 5)
    joints = np.stack((x, 0.75 * x), axis=1)
    plan, slope = (chord_loads(joints, 500.0, 4.0, measured=m) for m in ("plan", "slope"))
    np.testing.assert_allclose(slope, 1.25 * plan, rtol=1e-12)


@given(steps, rises, loads, st.floats(0.5, 10))
@MANY
def test_chord_loads_add_up(
    step: list[float], rise: list[float], load: float, spacing: float
) -> None:
    """The sum over the joints is load times area, on plan and on the slope."""
    joints = chord(step, rise)
    plan = chord_loads(joints, load, spacing)[:, 1].sum()
    slope = chord_loads(joints, load, spacing, measured="slope")[:, 1].sum()
    surface = np.linalg.norm(np.diff(joints, axis=0), axis=1).sum()
    assert plan == pytest.approx(-load * spacing * sum(step), rel=1e-9, abs=1e-6)
    assert slope == pytest.approx(-load * spacing * surface, rel=1e-9, abs=1e-6)


def test_wind_square_to_a_roof() -> None:
    """On a rise of 3 in 4 a pressure of 1 kPa pushes down with its plan, across with its height."""
    forces = chord_wind([[0, 0], [4, 3], [8, 0]], 1000.0, 2.0)
    np.testing.assert_allclose(
        forces, [[3000, -4000], [0, -8000], [-3000, -4000]], rtol=1e-12, atol=1e-9
    )


def test_wind_by_panel() -> None:
    """Pressure on one slope and suction on the other both push to leeward."""
    forces = chord_wind([[0, 0], [4, 3], [8, 0]], [500.0, -500.0], 2.0)
    np.testing.assert_allclose(forces.sum(axis=0), [6000, 0], atol=1e-9)
    assert forces[1].tolist() == pytest.approx([3000, 0])


def test_wind_from_below() -> None:
    """A pressure from below is one from above with its sign turned."""
    joints = [[0, 0], [4, 3], [8, 1]]
    np.testing.assert_array_equal(
        chord_wind(joints, 700.0, 2.0, face="below"), chord_wind(joints, -700.0, 2.0)
    )


@given(steps, rises, loads)
@MANY
def test_wind_is_square_to_each_panel_and_adds_up(
    step: list[float], rise: list[float], load: float
) -> None:
    """The resultant is the pressure on plan and on height; each part is square to its panel."""
    joints = chord(step, rise)
    total = chord_wind(joints, load, 3.0).sum(axis=0)
    run, up = joints[-1] - joints[0]
    assert total == pytest.approx([3 * load * up, -3 * load * run], rel=1e-9, abs=1e-6)
    alone = np.zeros(len(step))
    alone[0] = load
    first = chord_wind(joints, alone, 3.0)[0]
    assert abs(first @ (joints[1] - joints[0])) <= 1e-9 * abs(load) * 100
    assert np.linalg.norm(first) == pytest.approx(
        1.5 * abs(load) * np.linalg.norm(joints[1] - joints[0])
    )


def test_wind_on_a_face() -> None:
    """Storeys of 4, 3 and 3 m, 10 m wide, 1 kPa: half a storey above and below each level."""
    forces = face_wind([0, 4, 7, 10], 1000.0, 10.0)
    assert forces.tolist() == pytest.approx([20e3, 35e3, 30e3, 15e3])
    by_storey = face_wind([0, 4, 7, 10], [800.0, 900.0, 1000.0], 10.0)
    assert by_storey.sum() == pytest.approx(10 * (800 * 4 + 900 * 3 + 1000 * 3))


@given(steps)
@MANY
def test_tributary_lengths_cover_the_line(step: list[float]) -> None:
    """Tributary lengths add up to the line, and an inner one is the mean of its two bays."""
    x = np.concatenate(([2.0], 2.0 + np.cumsum(step)))
    lengths = tributary(x)
    assert lengths.sum() == pytest.approx(sum(step))
    np.testing.assert_allclose(lengths[1:-1], (np.array(step)[1:] + np.array(step)[:-1]) / 2)


def test_lever_rule() -> None:
    """10 kN at 1.5 m of a girder of 6 m gives 7.5 and 2.5 kN (P(1 - x/L) and P x/L)."""
    near, far = lever(10.0, 1.5, 6.0)
    assert (float(near), float(far)) == (7.5, 2.5)


@given(st.lists(st.tuples(loads, st.floats(0, 1)), min_size=1, max_size=8), st.floats(0.5, 30))
@MANY
def test_the_lever_rule_balances(parts: list[tuple[float, float]], span: float) -> None:
    """The shares add up to the load, and their moment is its moment."""
    load = np.array([one for one, _ in parts])
    x = np.array([part for _, part in parts]) * span
    near, far = lever(load, x, span)
    np.testing.assert_allclose(near + far, load, rtol=1e-12, atol=1e-9)
    np.testing.assert_allclose(far * span, load * x, rtol=1e-12, atol=1e-9)


def test_beams_on_a_girder() -> None:
    """Beams from both sides at one place are added, in every case, and places come in order."""
    places, point = girder_points([4.0, 2.0, 4.0, 0.0], [[1, 2, 3, 4], [10, 20, 30, 40]])
    assert places.tolist() == [0, 2, 4]
    assert point.tolist() == [[4, 2, 4], [40, 20, 40]]


@given(st.lists(st.tuples(st.sampled_from([0.0, 1.5, 3.0, 4.5]), loads), min_size=1, max_size=9))
@MANY
def test_reactions_on_a_girder_add_up(beams: list[tuple[float, float]]) -> None:
    """Nothing is lost on the way, and each place stands once."""
    x, reactions = (np.array(column) for column in zip(*beams, strict=True))
    places, point = girder_points(x, reactions)
    assert len(set(places.tolist())) == len(places) == len(set(x.tolist()))
    assert point.sum() == pytest.approx(reactions.sum(), abs=1e-6)
    assert (point[0] * places).sum() == pytest.approx((reactions * x).sum(), abs=1e-6)


def test_forces_are_put_where_the_truss_has_its_joints() -> None:
    """Forces by label stand in the rows of the truss, the other joints having none."""
    truss = gable_of_13(3, 2)
    forces = at_joints(truss, ["D", "A"], [[1, -2], [3, -4]])
    assert forces[truss.joints.labels.index("D")].tolist() == [1, -2]
    assert forces[truss.joints.labels.index("A")].tolist() == [3, -4]
    assert np.count_nonzero(forces) == 4


@pytest.mark.parametrize(
    ("call", "what"),
    [
        (lambda: tributary([1.0]), "two places at least"),
        (lambda: tributary([0.0, 2.0, 1.0]), "not in order"),
        (lambda: tributary([0.0, float("nan")]), "two places at least"),
        (lambda: chord_loads([[0, 0], [0, 1]], 1.0, 1.0), "not in order"),
        (lambda: chord_loads([[0, 0, 0], [1, 0, 0]], 1.0, 1.0), "an x and a y"),
        (lambda: chord_loads([[0, 0], [1, 1]], 1.0, 0.0), "The spacing is 0"),
        (lambda: chord_loads([[0, 0], [1, 1]], float("nan"), 1.0), "The load is not a number"),
        (lambda: chord_loads([[0, 0], [1, 1]], [1.0, 2.0], 1.0), "2 values for 1 parts"),
        (lambda: chord_loads([[0, 0], [1, 1]], 1.0, 1.0, measured="roof"), "measured on 'roof'"),
        (lambda: chord_wind([[0, 0], [1, 1]], 1.0, 1.0, face="left"), "on the face 'left'"),
        (lambda: chord_wind([[0, 0], [1, 1]], 1.0, float("inf")), "The spacing is inf"),
        (lambda: face_wind([0, 3], 1.0, -2.0), "The width is -2"),
        (lambda: face_wind([3, 0], 1.0, 2.0), "not in order"),
        (lambda: lever(1.0, 7.0, 6.0), "outside the span"),
        (lambda: lever(1.0, -0.1, 6.0), "outside the span"),
        (lambda: lever(float("nan"), 1.0, 6.0), "not a number"),
        (lambda: lever(1.0, 0.0, 0.0), "The span of a lever"),
        (lambda: girder_points([1.0, 2.0], [1.0]), "1 reactions do not fit 2 beams"),
        (lambda: girder_points([], []), "0 reactions do not fit 0 beams"),
        (lambda: girder_points([1.0, float("nan")], [1.0, 2.0]), "not a number"),
        (lambda: member_weights(gable_of_13(3, 2), -1.0), "below 0"),
        (lambda: member_weights(gable_of_13(3, 2), [1.0, 2.0]), "2 values for 13 parts"),
        (lambda: at_joints(gable_of_13(3, 2), ["Z"], [[0, 1]]), "There is no joint 'Z'"),
        (lambda: at_joints(gable_of_13(3, 2), ["A", "A"], [[0, 1]] * 2), "'A' is given twice"),
        (lambda: at_joints(gable_of_13(3, 2), ["A"], [0, 1]), "do not fit 1 joints"),
    ],
)
def test_what_is_refused(call: object, what: str) -> None:
    """Places out of order, lengths that are none, loads that are no numbers are refused."""
    with pytest.raises(StaticsError, match=what):
        call()  # type: ignore[operator]
