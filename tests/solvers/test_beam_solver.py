"""The beam as workbooks see it: what it gives, what it says, and what it refuses."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from calcbook import solvers
from calcbook.errors import StaticsError

SOLVER = solvers.find("beam")


def given(**more: Any) -> dict[str, Any]:
    """Return two spans of 5 m that begin at 20 m, with 10 kN/m of dead and of live load."""
    loads = {"D": np.array([1.0, 0.0]), "L": np.array([0.0, 1.0])}
    found = {
        "supports": ["A", "B", "C"], "support place": np.array([20.0, 25.0, 30.0]),
        "support kind": ["pinned", "roller", "roller"], "vertical stiffness": np.zeros(3),
        "turning stiffness": np.zeros(3), "stretch from": np.array([20.0]),
        "stretch to": np.array([30.0]), "stretch stiffness": np.array([1e7]),
        "lines": ["D", "L"], "line from": np.array([20.0, 20.0]),
        "line to": np.array([30.0, 30.0]), "line load": np.array([1e4, 1e4]),
        "line load at the end": np.array([1e4, 1e4]), "line share": loads, "pattern": "by span",
        "cases": ["D", "L"], "strength": ["1", "2"],
        "strength factors": {"D": np.array([1.4, 1.2]), "L": np.array([0.0, 1.6])},
    }  # fmt: skip
    return found | more


def test_reactions_and_moments_of_two_spans() -> None:
    """3/8, 10/8 and w L2/8, 9 w L2/128 at 3L/8; places are measured as the supports are."""
    found = SOLVER.solution(given())
    assert found.give("reaction", "D") == pytest.approx([18750.0, 62500.0, 18750.0])
    assert found.give("largest reaction", "L") == pytest.approx([21875.0, 62500.0, 21875.0])
    assert found.give("smallest moment by case", "") == pytest.approx([-31250.0, -31250.0])
    assert found.give("moment of the case", "D") == pytest.approx(17578.125)
    assert found.give("place of the moment of the case", "D") == pytest.approx(21.875)
    assert found.give("combination of the smallest moment in the span", "") == ["2", "2", ""]
    assert found.give("spans loaded for the smallest moment", "") == ["none", "all"]


def test_it_says_how_live_load_was_arranged() -> None:
    """Equilibrium, and the spans that were tried, are told; without patterns nothing is."""
    said = SOLVER.solution(given()).says()
    assert said[0].startswith("equilibrium is closed to")
    assert said[1] == "live load is given on 2 of 2 spans: every arrangement on them tried"
    assert len(SOLVER.solution(given(pattern="all spans")).says()) == 1


def test_it_says_so_of_one_span_with_live_load() -> None:
    """Live load on one of two spans is tried with it and without it."""
    ends = {"line to": np.array([30.0, 25.0])}
    said = SOLVER.solution(given(**ends)).says()
    assert said[1] == "live load is given on 1 of 2 spans: with it and without it tried"


def test_a_moment_that_is_nowhere_has_no_combination() -> None:
    """A simple span hogs nowhere: its smallest moment is that of no combination."""
    one = {
        "supports": ["A", "B"], "support place": np.array([20.0, 30.0]),
        "support kind": ["pinned", "roller"], "vertical stiffness": np.zeros(2),
        "turning stiffness": np.zeros(2),
    }  # fmt: skip
    found = SOLVER.solution(given(**one))
    assert found.give("combination of the smallest moment in the span", "") == ["", ""]
    assert found.give("combination of the largest moment in the span", "") == ["2", ""]


def test_what_is_rounding_is_nothing() -> None:
    """A moment that only rounding leaves is 0, not 1e-12."""
    moments = SOLVER.solution(given()).give("smallest moment in the span", "")
    assert moments == pytest.approx([-87500.0, -87500.0, 0.0])
    ends = SOLVER.solution(given(**{"line share": {"D": np.zeros(2), "L": np.zeros(2)}}))
    assert list(ends.give("reaction", "D")) == [0.0, 0.0, 0.0]  # type: ignore[call-overload]


@pytest.mark.parametrize(("more", "said"), [
    ({"cases": ["D", "Lr"]}, "no load for the case Lr"),
    ({"strength factors": {"W": np.array([0.0, 1.0])}}, "combination 2 takes the load case W"),
    ({"support kind": ["pinned", "free end", "roller"]}, "free end B lies between supports"),
    ({"support kind": ["free end", "free end", "free end"]}, "free end B"),
])  # fmt: skip
def test_what_it_refuses(more: dict[str, Any], said: str) -> None:
    """A case or a combination without its load and a free end within are named."""
    with pytest.raises(StaticsError, match=said):
        SOLVER.solution(given(**more))
