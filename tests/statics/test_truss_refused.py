"""Trusses that are refused: one message each, naming what is wrong."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from truss_samples import Places, down, gable_of_13, grown, lettered, random_loads

from calcbook.errors import StaticsError
from calcbook.statics.generators import flat
from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held, Joints, Members

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

SQUARE: Places = {"A": (0.0, 0.0), "B": (3.0, 0.0), "C": (3.0, 3.0), "D": (0.0, 3.0)}
BRACED = "AB BC CD DA AC"
HELD = [Held("A", "pinned"), Held("B", "roller")]


def refused(
    places: Places, members: str, supports: list[Held], stiffness: ArrayLike = 1e6
) -> StaticsError:
    """Return the error that a truss, or its first solution, is refused with."""
    with pytest.raises(StaticsError) as caught:
        solved(places, members, supports, stiffness)
    return caught.value


def solved(places: Places, members: str, supports: list[Held], stiffness: ArrayLike) -> None:
    """Make a truss and solve it for a load at joint C."""
    truss = lettered(places, members, supports, stiffness)
    truss.solve(down(truss, C=1000))


def test_the_braced_square_is_accepted() -> None:
    """The truss that the tests below spoil is a good one."""
    truss = lettered(SQUARE, BRACED, HELD)
    assert truss.solve(down(truss, C=1000)).force("BC") == pytest.approx(-1000)


def test_a_panel_without_a_diagonal() -> None:
    """A square without a diagonal is a mechanism: an upper joint moves, a member is missing."""
    error = refused(SQUARE, "AB BC CD DA", HELD)
    assert error.named in {("C",), ("D",)}
    assert "mechanism" in error.what
    assert "1 more" in error.hint


def test_a_mechanism_beside_a_redundant_panel() -> None:
    """Enough members in the wrong place: the panel without a diagonal is named."""
    places = {**SQUARE, "E": (6.0, 0.0), "F": (6.0, 3.0)}
    error = refused(places, "AB BC CD DA AC BD BE EF FC", HELD)
    assert error.named in {("E",), ("F",)}
    assert "panel without a diagonal" in error.hint


def test_two_members_in_one_line() -> None:
    """A joint between two members in one line moves across it, and is named."""
    places = {**SQUARE, "E": (1.5, 0.0)}
    error = refused(places, "AE EB BC CD DA AC", HELD)
    assert error.named == ("E",)


@pytest.mark.parametrize("off", [1e-7, -1e-8, 1e-12])
def test_members_almost_in_one_line(off: float) -> None:
    """A joint held by members almost in one line is refused and named."""
    places = {**SQUARE, "E": (1.5, off)}
    error = refused(places, "AE EB BC CD DA AC", [Held("A", "pinned"), Held("B", "pinned")])
    assert error.named == ("E",)


def test_a_flat_joint_that_is_still_held() -> None:
    """A rise of a thousandth of the span is steep enough, and balances."""
    places = {**SQUARE, "E": (1.5, 0.003)}
    truss = lettered(places, "AE EB BC CD DA AC", [Held("A", "pinned"), Held("B", "pinned")])
    found = truss.solve(down(truss, E=1.0))
    assert found.force("AE") == pytest.approx(-np.hypot(1.5, 0.003) / 0.006, rel=1e-9)


def test_a_large_truss_with_a_gap() -> None:
    """In a truss of 200 joints the joints of the panel that lost its diagonal are named."""
    shape = flat(100.0, 2.0, 100)
    bars = [bar for bar in shape.bars if set(bar[:2]) != {"U20", "L21"}]
    table = Members([f"M{n}" for n in range(len(bars))], [b[0] for b in bars], [b[1] for b in bars])
    truss = Truss(shape.joints, table, shape.supports)
    with pytest.raises(StaticsError, match="mechanism") as caught:
        truss.solve(random_loads(truss, 1))
    assert caught.value.named[0] in {"L20", "L21", "U20", "U21"}
    with pytest.raises(StaticsError):
        truss.by_joints(random_loads(truss, 1))


def test_by_joints_refuses_a_determinate_mechanism() -> None:
    """A truss with the right number of members in the wrong places has no forces by joints."""
    places = {**SQUARE, "E": (6.0, 0.0), "F": (6.0, 3.0)}
    truss = lettered(places, "AB BC CD DA AC BD BE EF FC", HELD)
    assert truss.determinate
    with pytest.raises(StaticsError, match="mechanism"):
        truss.by_joints(down(truss, C=1))


def test_by_joints_refuses_an_indeterminate_truss() -> None:
    """Equilibrium alone does not solve a truss with a member more."""
    truss = grown(1, more=1)
    with pytest.raises(StaticsError, match=r"Equilibrium alone.*\+1"):
        truss.by_joints(random_loads(truss, 1))


def test_two_parts_of_which_one_is_held() -> None:
    """A part that no support holds is named by one of its joints."""
    places = {**SQUARE, "E": (6.0, 0.0), "F": (7.0, 0.0), "G": (6.0, 1.0)}
    error = refused(places, BRACED + " EF FG GE", HELD)
    assert error.named[0] in {"E", "F", "G"}


def test_a_member_between_two_pinned_joints() -> None:
    """A truss with nothing free to move stands, its loads going straight to the supports."""
    held = [Held("A", "pinned"), Held("C", "pinned")]
    truss = lettered({"A": (0.0, 0.0), "C": (2.0, 1.0)}, "AC", held)
    found = truss.solve(down(truss, C=5))
    assert found.reaction("C").tolist() == [0, 5]
    assert found.force("AC") == 0


def test_no_supports() -> None:
    """A truss without supports is refused before anything is solved."""
    error = refused(SQUARE, BRACED, [])
    assert "No joint is supported" in error.what
    assert "one pinned support and one roller" in error.hint


@pytest.mark.parametrize(
    "supports",
    [[Held("A", "pinned")], [Held("A", "roller"), Held("B", "roller")], [Held("A", "roller")]],
)
def test_too_few_supports(supports: list[Held]) -> None:
    """Supports that hold fewer than three directions are refused, and named."""
    error = refused(SQUARE, BRACED, supports)
    assert error.named == tuple(held.joint for held in supports)
    assert "not enough" in error.what


def test_three_rollers_that_roll_together() -> None:
    """Three rollers that all roll horizontally let the truss slide: the supports are blamed."""
    rollers = [Held(joint, "roller") for joint in "ABC"]
    error = refused(SQUARE, BRACED, rollers)
    assert "supports do not hold the truss as a whole" in error.hint


def test_a_roller_that_points_at_the_pin() -> None:
    """A roller that pushes through the pinned joint lets the truss turn about it."""
    error = refused(SQUARE, BRACED, [Held("A", "pinned"), Held("B", "roller", np.pi / 2)])
    assert "supports do not hold the truss as a whole" in error.hint
    assert error.named == ("C",)


def test_joints_at_one_place() -> None:
    """Two joints at one place are refused, and both named in the order of the table."""
    error = refused({**SQUARE, "Z": (3.0, 3.0)}, BRACED + " ZB ZA", HELD)
    assert error.named == ("C", "Z")


def test_joints_nearly_at_one_place() -> None:
    """Joints apart by a millionth of the size count as one place, however they are ordered."""
    close = 1e-7
    places = {"Y": (3.0 - close, 3.0 + close), **SQUARE, "X": (3.0, 1.0)}
    assert refused(places, BRACED + " YB YA XA XC", HELD).named == ("Y", "C")


def test_all_joints_at_one_place() -> None:
    """Joints that are all at one place are refused as that."""
    assert refused({"A": (1.0, 1.0), "B": (1.0, 1.0)}, "AB", HELD).named == ("A", "B")


def test_a_member_without_length() -> None:
    """A member from a joint to itself is refused, and named."""
    error = refused(SQUARE, BRACED + " DD", HELD)
    assert error.named == ("DD", "D")
    assert "no length" in error.what


def test_a_member_given_twice_in_the_other_direction() -> None:
    """Two members between the same joints are refused, and both named."""
    error = refused(SQUARE, BRACED + " CA", HELD)
    assert error.named == ("AC", "CA")


def test_a_label_given_twice() -> None:
    """A member label that stands twice is refused."""
    assert refused(SQUARE, BRACED + " AB", HELD).named == ("AB",)


def test_a_joint_label_given_twice() -> None:
    """A joint label that stands twice is refused."""
    with pytest.raises(StaticsError, match="The joint 'A' is given twice"):
        Truss(Joints(["A", "A"], [[0, 0], [1, 0]]), Members(["M"], ["A"], ["A"]), HELD)


def test_a_member_at_a_missing_joint() -> None:
    """A member that ends nowhere is refused, with the label of member and joint."""
    error = refused(SQUARE, BRACED + " BX", HELD)
    assert error.named == ("BX", "X")


def test_a_missing_joint_with_a_near_match() -> None:
    """A joint typed with a slip is answered with the label that is there."""
    table = Members(["M"], ["L11"], ["L10x"])
    with pytest.raises(StaticsError, match="did you mean 'L10'"):
        Truss(Joints(["L10", "L11"], [[0, 0], [1, 0]]), table, [])


def test_a_support_at_a_missing_joint() -> None:
    """A support at a joint that is not there is refused."""
    assert refused(SQUARE, BRACED, [*HELD, Held("Q", "roller")]).named == ("Q",)


def test_a_support_given_twice() -> None:
    """Two supports at one joint are refused."""
    assert refused(SQUARE, BRACED, [*HELD, Held("A", "roller")]).named == ("A",)


def test_an_unknown_kind_of_support() -> None:
    """A truss support is pinned or a roller; another word is refused."""
    error = refused(SQUARE, BRACED, [Held("A", "fixed"), HELD[1]])  # type: ignore[arg-type]
    assert error.named == ("A",)
    assert "'pinned' or 'roller'" in error.hint


def test_a_roller_without_an_angle() -> None:
    """A roller whose angle is no number is refused."""
    assert refused(SQUARE, BRACED, [HELD[0], Held("B", "roller", np.nan)]).named == ("B",)


def test_a_load_at_a_missing_joint() -> None:
    """A load at a joint that is not there is refused."""
    with pytest.raises(StaticsError, match="A load is at joint 'Q'"):
        down(gable_of_13(3, 2), Q=1)


def test_a_load_in_a_missing_case() -> None:
    """A load in a case that is not there is refused, counting as an engineer counts."""
    with pytest.raises(StaticsError, match="case 3 of 2"):
        gable_of_13(3, 2).loads([(2, "A", 0, 1)], 2)


@pytest.mark.parametrize("value", [np.nan, np.inf])
def test_a_load_that_is_no_number(value: float) -> None:
    """A load that is no number is refused, and its joint named."""
    truss = gable_of_13(3, 2)
    loads = np.zeros((2, 8, 2))
    loads[1, 3, 0] = value
    with pytest.raises(StaticsError, match="not a number") as caught:
        truss.solve(loads)
    assert caught.value.named == (truss.joints.labels[3],)
    with pytest.raises(StaticsError, match="not a number"):
        truss.loads([(0, "A", value, 0.0)], 1)


def test_loads_of_another_shape() -> None:
    """Loads for another number of joints are refused."""
    with pytest.raises(StaticsError, match="do not fit 8 joints"):
        gable_of_13(3, 2).solve(np.zeros((1, 7, 2)))


def test_a_joint_without_a_member() -> None:
    """A joint that nothing is joined to is refused, and named."""
    assert refused({**SQUARE, "Z": (9.0, 9.0)}, BRACED, HELD).named == ("Z",)


@pytest.mark.parametrize("ea", [0.0, -1.0, np.nan, np.inf])
def test_a_stiffness_that_is_not_above_0(ea: float) -> None:
    """EA of 0, below 0 or no number is refused, and the member named."""
    error = refused(SQUARE, BRACED, HELD, [1e6, 1e6, ea, 1e6, 1e6])
    assert error.named == ("CD",)


def test_stiffnesses_in_two_units() -> None:
    """EA a million million times that of another is refused, and both members named."""
    error = refused(SQUARE, BRACED, HELD, [1e6, 1e6, 1e6, 1e-6, 1e6])
    assert error.named[1] == "DA"
    assert "1e+12 times" in error.what


def test_stiffnesses_within_the_limit_balance() -> None:
    """EA apart by a hundred million still gives forces that balance."""
    truss = lettered(SQUARE, BRACED + " BD", HELD, [1e8, 1, 1e8, 1, 1e8, 1])
    assert truss.solve(random_loads(truss, 1)).residual < 1e-10


def test_forces_that_do_not_balance() -> None:
    """A truss a thousand times as long as deep, of very unlike members, is refused."""
    plain = flat(200.0, 0.2, 200).truss()
    ea = 9e8 ** np.random.default_rng(0).integers(0, 2, len(plain.ends)).astype(float)
    table = plain.members
    members = Members(table.labels, table.starts, table.ends, ea)
    truss = Truss(plain.joints, members, plain.supports)
    with pytest.raises(StaticsError, match="do not come out exactly") as caught:
        truss.solve(random_loads(truss, 0))
    assert caught.value.named[0] in truss.joints.labels


def test_too_many_stiffnesses() -> None:
    """A list of EA of another length is refused."""
    assert "3 stiffnesses" in refused(SQUARE, BRACED, HELD, [1, 1, 1]).what


def test_a_coordinate_that_is_no_number() -> None:
    """A joint without a place is refused, and named."""
    assert refused({**SQUARE, "C": (np.nan, 3.0)}, BRACED, HELD).named == ("C",)


def test_tables_that_do_not_fit() -> None:
    """Labels and values of different number are refused; so is a truss without members."""
    with pytest.raises(StaticsError, match="2 joint labels"):
        Truss(Joints(["A", "B"], [[0, 0]]), Members(["M"], ["A"], ["B"]), HELD)
    with pytest.raises(StaticsError, match="2 members, 1 starts"):
        Truss(Joints(["A", "B"], [[0, 0], [1, 0]]), Members(["M", "N"], ["A"], ["B"]), HELD)
    with pytest.raises(StaticsError, match="0 members"):
        Truss(Joints(["A", "B"], [[0, 0], [1, 0]]), Members([], [], []), HELD)
    with pytest.raises(StaticsError, match="0 joint labels"):
        Truss(Joints([], np.zeros((0, 2))), Members([], [], []), HELD)


def test_factors_that_do_not_fit() -> None:
    """Factors for another number of cases are refused."""
    found = gable_of_13(3, 2).solve(np.zeros((2, 8, 2)))
    with pytest.raises(StaticsError, match="do not combine 2 cases"):
        found.combined([[1.0, 1.0, 1.0]])


def test_labels_that_are_not_there() -> None:
    """A force or a reaction asked for by a wrong label is answered with the near one."""
    found = gable_of_13(3, 2).solve(np.zeros((8, 2)))
    with pytest.raises(StaticsError, match=r"There is no member 'ab'\n.*'AB'"):
        found.force("ab")
    with pytest.raises(StaticsError, match="There is no supported joint 'B'"):
        found.reaction("B")


def test_an_envelope_of_nothing() -> None:
    """The envelope of no case is refused."""
    with pytest.raises(StaticsError, match="no case"):
        gable_of_13(3, 2).solve(np.zeros((0, 8, 2))).envelope()
