"""A beam in elevation, and its envelopes."""

from __future__ import annotations

from copy import deepcopy
from itertools import combinations
from typing import Any

import pytest
from drawn import boxes, outline, words
from samples import column, figure, schedule, statement

from calcbook import figures
from calcbook.figures.lookup import MINUS

SPANS = schedule(
    "supports", ["A", "B", "tip"], column("x", "m", ["0", "6", "8"]),
    column("l", "m", ["6.000", "2.000", "0.000"]),
    {**column("held", "", ["", "", ""]), "texts": ["pinned", "roller", "free end"]},
)  # fmt: skip
STRIPS = schedule(
    "strips", ["one", "two"], column("x_1", "m", ["0", "0"]), column("x_2", "m", ["6", "8"]),
    column("r_e", "m", ["2", "0"]), column("w_D", "kN/m", ["14.0", "7.0"], 1e3),
    column("w_L", "kN/m", ["0.0", "3.0"], 1e3),
)  # fmt: skip
POINTS = schedule(
    "points", ["P", "up"], column("x_p", "m", ["3", "8"]), column("P_p", "kN", ["20", "-5"], 1e3)
)
FORCES = schedule(
    "forces", ["1", "2a"], column("M", "kN*m", ["30.0", "50.0"], 1e3),
    column("m", "kN*m", ["-9.0", "-4.0"], 1e3), column("V", "kN", ["20.0", "28.0"], 1e3),
    column("v", "kN", ["-25.0", "-31.0"], 1e3), column("at", "m", ["3", "2.5"]),
)  # fmt: skip
SOLVED = {
    "kind": "solver", "name": "solved", "applies": True, "why": "", "problem": None,
    "curves": [
        {"name": name, "x": [0.0, 3.0, 6.0, 8.0], "largest": [0.0, a, 0.0, 0.0],
         "smallest": [0.0, 0.0, b, 0.0]}
        for name, a, b in (("shear", 28e3, -31e3), ("moment", 50e3, -9e3))
    ],
}  # fmt: skip
BEAM = statement(SPANS, STRIPS, POINTS, FORCES, SOLVED)
ELEVATION = figure(
    "beam-elevation", supports="supports", x="x", held="held", span="l", strips="strips",
    strip_from="x_1", strip_to="x_2", ramp="r_e", strip_loads=["w_D", "w_L"], points="points",
    point="x_p", force="P_p",
)  # fmt: skip
ENVELOPE = figure(
    "beam-envelope", solver="solved", supports="supports", x="x", forces="forces",
    shear=["V", "v"], shear_at=["at", "at"], moment=["M", "m"], moment_at=["at", "at"],
)  # fmt: skip


def test_supports_spans_and_loads_are_shown() -> None:
    """Keys, span lengths and each load with its values as printed stand in the picture."""
    said = words(figures.draw(BEAM, ELEVATION))
    assert {"A", "B", "tip", "6.000 m", "2.000 m", "one", "two", "P", "up"} <= set(said)
    assert "one: D 14.0 kN/m" in said
    assert "two: D 7.0 kN/m, L 3.0 kN/m" in said
    assert f"up: {MINUS}5 kN" in said


def test_a_panel_rises_and_falls() -> None:
    """The load of a panel is a trapezoid whose rises are to the scale of the beam."""
    corners = outline(figures.draw(BEAM, ELEVATION), "load-one")
    (a, _), (b, _), (c, _), (d, _) = corners[:4]
    assert (b - a) / (d - a) == pytest.approx(2 / 6, rel=1e-3)
    assert (d - c) / (d - a) == pytest.approx(2 / 6, rel=1e-3)


@pytest.mark.parametrize("item", [ELEVATION, ENVELOPE])
def test_no_words_lie_on_each_other(item: dict[str, Any]) -> None:
    """Every word has room of its own."""
    found = boxes(figures.draw(BEAM, item))
    assert not [(a, b) for a, b in combinations(found, 2) if a.meets(b)]


def test_values_that_govern_are_named_on_the_envelope() -> None:
    """The largest and the smallest are printed with their combination and place."""
    said = words(figures.draw(BEAM, ENVELOPE))
    assert {"50.0 kN·m, 2a, at 2.5 m", f"{MINUS}9.0 kN·m, 1, at 3 m"} <= set(said)
    assert {"28.0 kN, 2a, at 2.5 m", f"{MINUS}31.0 kN, 2a, at 2.5 m"} <= set(said)


def test_in_words() -> None:
    """Both figures are told in words."""
    assert "A pinned at 0 m, B on a roller at 6 m, tip a free end at 8 m" in (
        figures.describe(BEAM, ELEVATION)
    )
    assert "largest moment 50.0 kN·m at 2.5 m, combination 2a" in figures.describe(BEAM, ENVELOPE)


def test_a_beam_that_is_not_solved_is_said() -> None:
    """Without a solution there is a sentence with the reason and no diagram."""
    broken = deepcopy(BEAM)
    broken["parts"][1]["items"][4] |= {"curves": [], "problem": "has no value: a mechanism"}
    assert words(figures.draw(broken, ENVELOPE)) == [
        "No envelopes are drawn: has no value: a mechanism."
    ]


def test_a_place_that_is_missing_is_said() -> None:
    """A support without a place is named with its reason."""
    broken = deepcopy(BEAM)
    broken["parts"][1]["items"][0]["columns"][0]["problem"] = ["", "row B: has no value", ""]
    assert words(figures.draw(broken, ELEVATION)) == [
        "No beam is drawn: B has no place: row B: has no value."
    ]
    assert "No beam is drawn" in figures.describe(broken, ELEVATION)
