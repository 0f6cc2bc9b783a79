"""What a beam is refused for, and how the engineer is told."""

from __future__ import annotations

import math
from typing import Any

import pytest

from calcbook.errors import StaticsError
from calcbook.statics.beam import Beam, Hinge, Support
from calcbook.statics.beam_loads import LineLoad, MomentLoad, PointLoad

A, B, C = Support("A", 0), Support("B", 6), Support("C", 10)
FIXED = Support("A", 0, "fixed")
EI = 1e7


def hinges(*places: float) -> list[Hinge]:
    """Return hinges H1, H2... at places."""
    return [Hinge(f"H{i}", x) for i, x in enumerate(places, start=1)]


BEAMS: dict[str, tuple[dict[str, Any], str, set[str]]] = {
    "no support": ({"supports": []}, "no support", set()),
    "one pinned support": ({"supports": [B]}, "turns about support B freely", {"B"}),
    "a hinge too many": (
        {"supports": [A, B], "length": 6, "hinges": hinges(4)}, "most at hinge H1", {"H1"},
    ),
    "two hinges too many": (
        {"supports": [A, C], "hinges": hinges(3, 6)}, "mechanism", {"H1"},
    ),
    "a part beyond a hinge that nothing holds": (
        {"supports": [A, B], "hinges": hinges(8)}, "hinge H1 to its right end moves", {"H1"},
    ),
    "no length": ({"length": 0.0}, "length of the beam", set()),
    "a length that is no number": ({"length": math.nan}, "length of the beam", set()),
    "a support off the beam": ({"length": 8.0}, "support C does not lie on the beam", {"C"}),
    "a span without length": (
        {"supports": [A, B, Support("D", 6)]}, "supports B and D has no length", {"B", "D"},
    ),
    "a label twice": ({"supports": [A, B, Support("A", 10)]}, "called A", {"A"}),
    "a hinge at a support": (
        {"hinges": hinges(6)}, "hinge H1 is at support B", {"H1", "B"},
    ),
    "a hinge at an end": (
        {"supports": [FIXED, B], "hinges": hinges(10)}, "at the end of the beam", {"H1"},
    ),
    "two hinges in one place": (
        {"supports": [FIXED, C], "hinges": hinges(3, 3)}, "in one place", {"H1", "H2"},
    ),
    "a hinge off the beam": ({"hinges": hinges(-1)}, "does not lie on the beam", {"H1"}),
    "no stiffness": ({"stiffness": []}, "missing", set()),
    "zero stiffness": ({"stiffness": 0.0}, "not positive", set()),
    "stiffness that is no number": ({"stiffness": math.inf}, "no number", set()),
    "negative stiffness of a stretch": (
        {"stiffness": [(0, 4, EI), (4, 10, -EI)]}, "stretch 2 from the left is not positive", set(),
    ),
    "overlapping stretches": (
        {"stiffness": [(0, 5, EI), (4, 10, EI)]}, "overlaps", set(),
    ),
    "a gap between stretches": ({"stiffness": [(0, 4, EI), (5, 10, EI)]}, "gap", set()),
    "stretches that end early": ({"stiffness": [(0, 9, EI)]}, "do not end", set()),
    "a stretch without length": (
        {"stiffness": [(0, 4, EI), (4, 4, EI), (4, 10, EI)]}, "no length", set(),
    ),
    "stretches of hugely different stiffness": (
        {"stiffness": [(0, 4, 1e13), (4, 10, 1)]}, "rounding", set(),
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", BEAMS)
def test_a_beam_that_cannot_stand_is_refused(name: str) -> None:
    """The message says what is wrong and names it."""
    changed, words, named = BEAMS[name]
    given = {"supports": [A, B, C], "length": 10.0, "stiffness": EI, **changed}
    with pytest.raises(StaticsError, match=words) as caught:
        Beam(**given)
    assert named <= set(caught.value.named)


LOADS: dict[str, tuple[Any, str]] = {
    "beyond the right end": (PointLoad(10.5, 1, label="P1"), "load P1 lies beyond the right end"),
    "beyond the left end": (LineLoad(-1, 4, 1), "line load 1 lies beyond the left end"),
    "no length": (LineLoad(4, 4, 1), "ends where it begins"),
    "turned round": (LineLoad(5, 4, 1), "ends where it begins or before"),
    "no number": (PointLoad(5, math.nan), "no number"),
    "infinite": (LineLoad(1, 5, 1, math.inf), "no number"),
    "a place that is no number": (MomentLoad(math.nan, 1), "no number"),
    "a case that is not there": (PointLoad(5, 1, case=2), "belongs to load case 2"),
    "a negative case": (PointLoad(5, 1, case=-1), "belongs to load case -1"),
    "a moment at a hinge": (MomentLoad(8, 1, label="M1"), "load M1 acts exactly at hinge H1"),
}


@pytest.mark.parametrize("name", LOADS)
def test_a_load_that_cannot_act_is_refused(name: str) -> None:
    """The message names the load by its label, or by kind and number."""
    load, words = LOADS[name]
    beam = Beam([FIXED, B, C], 10, EI, hinges(8))
    with pytest.raises(StaticsError, match=words):
        beam.solve([load], cases=2)


SUPPORTS = {
    "an unknown kind": (("A", 0, "pined"), {}, "did you mean 'pinned'"),
    "a spring without stiffness": (("A", 0, "spring"), {}, "without a stiffness"),
    "a pin with stiffness": (("A", 0, "pinned"), {"kv": 1.0}, "stiffness of a spring"),
    "a stiffness of nothing": (("A", 0, "spring"), {"kv": 0.0}, "not a positive number"),
    "a stiffness that is no number": (("A", 0, "spring"), {"kr": math.nan}, "not a positive"),
}


@pytest.mark.parametrize("name", SUPPORTS)
def test_a_support_that_is_none_is_refused(name: str) -> None:
    """Kinds are few, and only springs have a stiffness."""
    given, more, words = SUPPORTS[name]
    with pytest.raises(StaticsError, match=words):
        Support(*given, **more)


def test_what_is_asked_of_a_result_is_checked() -> None:
    """Unknown quantities and sides, places off the beam and factors that do not fit are refused."""
    result = Beam([A, B, C], 10, EI).solve([LineLoad(0, 10, 1)])
    with pytest.raises(StaticsError, match="did you mean 'moment'"):
        result.extremes("moments")
    with pytest.raises(StaticsError, match="side"):
        result.shear(3, "up")
    with pytest.raises(StaticsError, match="beyond the beam"):
        result.moment([3, 11])
    with pytest.raises(StaticsError, match="1 load cases"):
        result.combined([[1, 2]])
    with pytest.raises(StaticsError, match="no number"):
        result.combined([[math.nan]])


def test_a_result_that_rounding_spoils_is_refused() -> None:
    """Stretches 9e11 apart in EI with springs of next to nothing: said, not shown."""
    supports = [Support("A", 0, "spring", kv=1e-9, kr=1e-9), Support("B", 6), Support("C", 7),
                Support("D", 12, "spring", kr=1e-9)]  # fmt: skip
    beam = Beam(supports, 12, [(0, 6.5, 9e11), (6.5, 12, 1.0)])
    with pytest.raises(StaticsError, match="ill-conditioned") as caught:
        beam.solve([LineLoad(0, 12, 5e3)])
    assert caught.value.named == ("B-C",)


def test_a_beam_has_at_least_one_case() -> None:
    """No load case at all is refused; one that is empty is not."""
    beam = Beam([A, B, C], 10, EI)
    with pytest.raises(StaticsError, match="no load case"):
        beam.solve([], cases=0)
    assert beam.solve([]).reactions.tolist() == [[0, 0, 0]]


def test_a_fixed_part_beyond_a_hinge_is_accepted() -> None:
    """The same beams stand once the part that moved is held."""
    Beam([A, B, Support("C", 10)], 10, EI, hinges(8))
    Beam([FIXED], 10, EI)
    Beam([Support("A", 0, "spring", kr=1e3)], 10, EI)
