"""One member by a section or a joint: the same force, from terms a reader can add up."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from truss_samples import down, gable_of_13, grown, howe_roof, lettered, random_loads

from calcbook.errors import StaticsError
from calcbook.statics.cuts import find_cut
from calcbook.statics.generators import TrussShape, cantilever, flat, gable, monopitch
from calcbook.statics.member_checks import MemberCheck, joint_balance, member_by_cut
from calcbook.statics.truss_tables import Held

if TYPE_CHECKING:
    from calcbook.statics.truss import Truss

SHAPES = [
    gable(12, 3, 3), gable(12, 3, 4, "Howe", heel=0.6), gable(8, 3, 1),
    flat(12, 2, 6), flat(15, 2, 5, "Warren"), flat(15, 2, 5, "Warren with posts"),
    monopitch(9, 0.5, 2, 4), monopitch(9, 0, 2, 3, "Howe"), cantilever(6, 2, 0.5, 4),
]  # fmt: skip


def by_hand(check: MemberCheck, truss: Truss) -> float:
    """Return the force from the terms alone, arms taken again from the places of the joints."""
    place = dict(zip(truss.joints.labels, truss.xy, strict=True))
    ends = {
        label: pair
        for label, *pair in zip(
            truss.members.labels, truss.members.starts, truss.members.ends, strict=True
        )
    }
    side = check.cut.side if check.cut else (check.joint,)
    near, far = sorted(ends[check.member], key=lambda joint: joint not in side)
    way = (place[far] - place[near]) / np.linalg.norm(place[far] - place[near])

    def effect(at: np.ndarray, force: np.ndarray) -> float:
        if check.centre is not None:
            x, y = at - np.array(check.centre)
            return float(x * force[1] - y * force[0])
        assert check.direction is not None
        return float(force @ np.array(check.direction))

    total = sum(
        effect(place[check.joint if term.kind == "member" else term.label],
               np.array([term.fx, term.fy]))
        for term in check.terms
    )  # fmt: skip
    return -total / effect(place[near], way)


def test_the_howe_roof_by_sections() -> None:
    """BC and JK follow the closed forms of the method of sections: Baker and Haynes, chapter 6."""
    truss = howe_roof(3.0, 4.5)
    found = truss.solve(down(truss, B=200, J=300, E=150))
    reaction, angle = 416.0 + 2 / 3, np.arctan(4.5 / 9)
    upper, lower = member_by_cut(found, "BC"), member_by_cut(found, "JK")
    assert upper.force == pytest.approx((200 - 2 * reaction) / (2 * np.sin(angle)))
    assert lower.force == pytest.approx((2 * reaction - 200) * 3 / (2 * 4.5 / 3))
    assert lower.cut is not None
    assert lower.method == "moment"
    assert set(lower.cut.others) == {"CD", "CK"}
    assert lower.centre == pytest.approx((6, 3))
    terms = {(term.label, term.kind): term for term in lower.terms}
    assert set(terms) == {("A", "reaction"), ("B", "load"), ("J", "load")}
    assert terms["A", "reaction"].arm == pytest.approx(-6)
    assert terms["A", "reaction"].effect == pytest.approx(-6 * reaction)
    assert terms["B", "load"].effect == pytest.approx(600)
    assert terms["J", "load"].effect == pytest.approx(0, abs=1e-9)
    assert lower.arm == pytest.approx(3)


def test_parallel_chords_give_a_force_equation() -> None:
    """A diagonal between parallel chords is found from the shear: V / sin of its slope."""
    truss = flat(12.0, 2.0, 6).truss()
    found = truss.solve(down(truss, L2=9.0))
    check = member_by_cut(found, "U1-L2")
    assert check.method == "force"
    assert check.centre is None
    assert check.direction == pytest.approx((0, -1)) or check.direction == pytest.approx((0, 1))
    assert set(check.dropped) == {"L1-L2", "U1-U2"}
    assert check.force == pytest.approx(6 * np.sqrt(2))
    assert abs(check.arm) == pytest.approx(1 / np.sqrt(2))


def test_a_joint_where_there_is_no_section() -> None:
    """A triangle has no section: its rafter is found at a joint, the tie left out."""
    places = {"A": (0.0, 0.0), "B": (6.0, 0.0), "C": (3.0, 2.0)}
    truss = lettered(places, "AB BC AC", [Held("A", "pinned"), Held("B", "roller")])
    found = truss.solve(down(truss, C=30))
    assert find_cut(truss, "AC") is None
    check = member_by_cut(found, "AC")
    assert (check.method, check.joint, check.dropped) == ("joint", "A", ("AB",))
    assert [(term.label, term.kind) for term in check.terms] == [("A", "reaction")]
    assert check.force == pytest.approx(-15 / np.sin(np.arctan(2 / 3)))


def test_a_rafter_by_moments_about_the_bottom_chord() -> None:
    """The rafter of the gable is cut with the post and the tie: its reaction about joint C."""
    truss = gable_of_13(3, 2)
    found = truss.solve(down(truss, B=10, D=10, F=10))
    check = member_by_cut(found, "AB")
    assert check.cut is not None
    assert set(check.dropped) == {"BC", "CE"}
    assert check.centre == pytest.approx((3, 0))
    assert check.force == pytest.approx(-15 / np.sin(np.arctan(2 / 3)))


@pytest.mark.parametrize("shape", SHAPES)
def test_every_member_of_the_usual_forms(shape: TrussShape) -> None:
    """Every member by section or joint has the force of the solution, and of its terms alone."""
    truss = shape.truss(3e8)
    found = truss.solve(random_loads(truss, 4, cases=2))
    tolerance = 1e-9 * found.scale.max()
    for member in truss.members.labels:
        check = member_by_cut(found, member, case=1)
        assert check.force == pytest.approx(found.force(member, 1), abs=tolerance), member
        assert by_hand(check, truss) == pytest.approx(check.force, abs=tolerance), member


@pytest.mark.parametrize("shape", SHAPES)
def test_a_section_parts_the_truss(shape: TrussShape) -> None:
    """The three members of a section are all that joins its side to the rest."""
    truss = shape.truss()
    for member in truss.members.labels:
        cut = find_cut(truss, member)
        if cut is None:
            continue
        across = {
            label
            for label, start, end in zip(
                truss.members.labels, truss.members.starts, truss.members.ends, strict=True
            )
            if (start in cut.side) != (end in cut.side)
        }
        assert across == {member, *cut.others}
        assert 0 < len(cut.side) <= len(truss.xy) / 2


@given(st.integers(0, 10_000), st.integers(0, 3), st.integers(0, 10_000))
@settings(max_examples=40, deadline=None)
def test_random_trusses(seed: int, more: int, load: int) -> None:
    """Every member of any truss, determinate or not, is found by section and at both joints."""
    truss = grown(seed, more=more, turned=True)
    found = truss.solve(random_loads(truss, load))
    for member, start, end in zip(
        truss.members.labels, truss.members.starts, truss.members.ends, strict=True
    ):
        wanted = found.force(member)
        for check in (
            member_by_cut(found, member),
            joint_balance(found, start, member),
            joint_balance(found, end, member),
        ):
            assert check.force == pytest.approx(wanted, abs=1e-7 * found.scale[0])
            assert by_hand(check, truss) == pytest.approx(check.force, abs=1e-7 * found.scale[0])


def test_a_long_truss_has_its_section() -> None:
    """A truss of 600 joints is cut without running out of depth."""
    truss = flat(600.0, 2.0, 300).truss()
    cut = find_cut(truss, "L149-L150")
    assert cut is not None
    assert set(cut.others) == {"U149-U150", "U149-L150"}


def test_labels_that_do_not_fit() -> None:
    """A member that is not there, or that does not end at the joint, is refused."""
    truss = gable_of_13(3, 2)
    found = truss.solve(down(truss, D=1))
    with pytest.raises(StaticsError, match="There is no member 'AZ'"):
        member_by_cut(found, "AZ")
    with pytest.raises(StaticsError, match="'AB' does not end at joint 'D'"):
        joint_balance(found, "D", "AB")
