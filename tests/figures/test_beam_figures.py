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
LINES = schedule(
    "lines", ["wide down", "up, of a length that no box has room for"],
    column("x_3", "m", ["0", "6"]), column("x_4", "m", ["6", "8"]),
    column("w_a", "kN/m", ["8", "-2"], 1e3), column("w_e", "kN/m", ["8", "-4"], 1e3),
)  # fmt: skip
TURNS = schedule(
    "moments", ["left", "right"], column("x_5", "m", ["0", "6"]),
    column("M_5", "kN*m", ["30", "-30"], 1e3),
)  # fmt: skip
BEAM = statement(SPANS, STRIPS, POINTS, FORCES, SOLVED, LINES, TURNS)
ELEVATION = figure(
    "beam-elevation", supports="supports", x="x", held="held", span="l", strips="strips",
    strip_from="x_1", strip_to="x_2", ramp="r_e", strip_loads=["w_D", "w_L"], points="points",
    point="x_p", force="P_p",
)  # fmt: skip
SENSES = figure(
    "beam-elevation", supports="supports", x="x", held="held", span="l", lines="lines",
    line_from="x_3", line_to="x_4", line_load="w_a", line_end="w_e", moments="moments",
    moment_at="x_5", moment="M_5",
)  # fmt: skip
ENVELOPE = figure(
    "beam-envelope", solver="solved", supports="supports", x="x", forces="forces",
    shear=["V", "v"], shear_at=["at", "at"], moment=["M", "m"], moment_at=["at", "at"],
)  # fmt: skip


def test_supports_spans_and_loads_are_shown() -> None:
    """Keys, span lengths and each load with its values as printed stand in the picture."""
    said = words(figures.draw(BEAM, ELEVATION))
    assert {"A", "B", "tip", "6.000 m", "2.000 m", "1", "2", "3", "4"} <= set(said)
    assert "1 one: D 14.0 kN/m" in said
    assert "2 two: D 7.0 kN/m, L 3.0 kN/m" in said
    assert f"4 up: {MINUS}5 kN" in said


def test_loads_are_to_one_scale_and_point_the_way_they_act() -> None:
    """4 kN/m is half as high as 8 kN/m; uplift has arrows upward; a name is never cut."""
    svg = figures.draw(BEAM, SENSES)
    down, up = (outline(svg, f"load-{key}") for key in LINES["rows"])
    tall = [max(y for _, y in corners) - min(y for _, y in corners) for corners in (down, up)]
    assert tall[1] / tall[0] == pytest.approx(0.5, rel=1e-2)
    for key, sense in zip(LINES["rows"], (1.0, -1.0), strict=True):
        tail, head = outline(svg, f"acts-{key}")
        assert sense * (head[1] - tail[1]) > 0.0  # y is downward in the drawing
    assert any(one.startswith(f"2 {LINES['rows'][1]}: {MINUS}2 kN/m") for one in words(svg))


def test_moments_turn_the_way_they_act_and_lie_over_the_beam() -> None:
    """The arc of a moment ends at its right where clockwise, at its left where not."""
    svg = figures.draw(BEAM, SENSES)
    beam = outline(svg, "beam")[0]
    scale = (outline(svg, "beam")[1][0] - beam[0]) / 8.0
    for key, x, sense in (("left", 0.0, 1.0), ("right", 6.0, -1.0)):
        arc = outline(svg, f"moment-{key}")
        assert sense * (arc[-1][0] - beam[0] - x * scale) > 1.0
        assert max(y for _, y in arc) < beam[1]


def test_a_panel_rises_and_falls() -> None:
    """The load of a panel is a trapezoid whose rises are to the scale of the beam."""
    corners = outline(figures.draw(BEAM, ELEVATION), "load-one")
    (a, _), (b, _), (c, _), (d, _) = corners[:4]
    assert (b - a) / (d - a) == pytest.approx(2 / 6, rel=1e-3)
    assert (d - c) / (d - a) == pytest.approx(2 / 6, rel=1e-3)


@pytest.mark.parametrize("item", [ELEVATION, ENVELOPE, SENSES])
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
