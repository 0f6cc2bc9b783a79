"""The truss as workbooks see it: what it gives, what it says, and what it refuses."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from calcbook import solvers
from calcbook.errors import StaticsError
from calcbook.solvers import shapes

SOLVER = solvers.find("truss")


def given(**more: Any) -> dict[str, Any]:
    """Return the king post truss of 8 m by 3 m with 10 kN down at its top, and 6 kN across."""
    found = {
        "joints": ["A", "B", "C", "D"], "x": np.array([0.0, 4.0, 8.0, 4.0]),
        "y": np.array([0.0, 0.0, 0.0, 3.0]), "members": ["AB", "BC", "AD", "DC", "BD"],
        "start": ["A", "B", "A", "D", "B"], "end": ["B", "C", "D", "C", "D"],
        "stiffness": np.full(5, 2e8), "supports": ["A", "C"], "held": ["pinned", "roller"],
        "angle": np.zeros(2),
        "loads right": {"D": np.zeros(4), "W1": np.array([0.0, 0.0, 0.0, 6e3]), "W2": None},
        "loads down": {"D": np.array([0.0, 0.0, 0.0, 1e4]), "W1": np.zeros(4), "W2": None},
        "member looked at": "AB", "case looked at": "D",
    }  # fmt: skip
    return found | more


def test_forces_reactions_and_senses() -> None:
    """T4: tension positive, reactions on the truss up and to the right, senses in words."""
    found = SOLVER.solution(given())
    assert found.give("force", "D") == pytest.approx([6666.667, 6666.667, -8333.333, -8333.333, 0])
    assert found.give("sense", "D") == ["tension", "tension", "compression", "compression", "zero"]
    assert found.give("reaction up", "D") == pytest.approx([5e3, 5e3])
    assert found.give("reaction right", "W1") == pytest.approx([-6e3, 0.0])
    assert found.give("reaction up", "W1") == pytest.approx([-2250.0, 2250.0])
    assert found.give("length", "") == pytest.approx([4.0, 4.0, 5.0, 5.0, 3.0])


def test_what_is_rounding_is_nothing() -> None:
    """A member without force has 0, not 1e-13."""
    forces = SOLVER.solution(given()).give("force", "D")
    assert list(forces)[4] == 0.0  # type: ignore[call-overload]


def test_the_second_way_is_described_not_worked() -> None:
    """Which bars are cut, about which point, which part is looked at."""
    found = SOLVER.solution(given(**{"member looked at": "AB"}))
    assert found.give("way", "") in (1.0, 3.0)
    part = found.give("in the part", "")
    assert 0.0 < sum(part) < 4.0  # type: ignore[arg-type]
    assert any("AB a second way" in text for text in found.says())


def test_it_says_how_it_was_found() -> None:
    """Determinacy is counted, and joint equilibrium compared."""
    said = SOLVER.solution(given()).says()
    assert said[0] == "statically determinate: 5 members + 3 reactions = 2 x 4 joints"
    assert any(text.startswith("equilibrium of the joints alone") for text in said)
    assert any("without force in every load case: BD" in text for text in said)


@pytest.mark.parametrize(("wrong", "said"), [
    ({"loads at": ["D", "Z"]}, "joint 'Z', which is not there"),
    ({"stiffness": np.array([2e8, -1.0, 2e8, 2e8, 2e8])}, "'BC' has the stiffness EA -1"),
    ({"x": np.array([0.0, 4.0, 8.0, 8.0]), "y": np.zeros(4)}, "same place"),
])  # fmt: skip
def test_what_it_refuses(wrong: dict[str, Any], said: str) -> None:
    """A load at a missing joint, a negative stiffness, joints at one place."""
    with pytest.raises(StaticsError, match=said):
        SOLVER.solution(given(**wrong))


def test_a_case_that_does_not_act_has_no_second_way() -> None:
    """The forces stand; the second way says which cases there are."""
    found = SOLVER.solution(given(**{"case looked at": "W2"}))
    assert found.give("force", "D") is not None
    with pytest.raises(StaticsError, match="the load case W2 does not act"):
        found.give("way", "")


def test_members_of_a_shape_carry_faces() -> None:
    """Roof left and right of the middle, ceiling, walls at clad ends; none at a held root."""
    shape = shapes.find("truss members")
    base = {
        "form": "flat",
        "span": 6.0,
        "height": 2.0,
        "low end": 0.0,
        "panels": 2.0,
        "web": "Howe",
    }
    rows = shape.run(base)
    faces = dict(zip(rows.keys, rows.columns["face"], strict=True))
    assert faces["U0-U1"] == "roof left"
    assert faces["U1-U2"] == "roof right"
    assert faces["L0-L1"] == "ceiling"
    assert (faces["L0-U0"], faces["L1-U1"], faces["L2-U2"]) == ("wall left", "none", "wall right")
    root = shape.run(base | {"form": "cantilever", "low end": 1.0})
    assert dict(zip(root.keys, root.columns["face"], strict=True))["L0-U0"] == "none"
