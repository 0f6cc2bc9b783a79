"""A truss with its joint loads, and with the forces of its members."""

from __future__ import annotations

from copy import deepcopy
from itertools import combinations
from typing import Any

import pytest
from drawn import boxes, outline, words
from samples import column, figure, schedule, statement

from calcbook import figures
from calcbook.figures.lookup import MINUS


def named(name: str, texts: list[str]) -> dict[str, Any]:
    """Return a column of words."""
    return {**column(name, "", [""] * len(texts)), "texts": texts}


JOINTS = schedule(
    "joints", ["A", "B", "C", "D"], column("x", "m", ["0", "4", "8", "4"]),
    column("y", "m", ["0", "0", "0", "3"]),
)  # fmt: skip
MEMBERS = schedule(
    "members", ["AB", "BC", "AD", "DC", "BD"], named("from", ["A", "B", "A", "D", "B"]),
    named("to", ["B", "C", "D", "C", "D"]),
)  # fmt: skip
SUPPORTS = schedule(
    "supports", ["A", "C"], named("held", ["pinned", "roller"]), column("turn", "deg", ["0", "0"])
)
DOWN = schedule(
    "down", ["A", "B", "C", "D"],
    {**column("P", "kN", ["0.0", "4.0", "0.0", "10.0"], 1e3), "meaning": "Dead load"},
    {**column("W", "kN", ["-2.0", "0.0", "0.0", "0.0"], 1e3), "meaning": "Case W1"},
)  # fmt: skip
RIGHT = schedule(
    "right", ["A", "B", "C", "D"], column("H", "kN", ["0.0"] * 4, 1e3),
    column("V", "kN", ["0.0", "0.0", "0.0", "6.0"], 1e3),
)  # fmt: skip
FORCES = schedule(
    "envelope", ["AB", "BC", "AD", "DC", "BD"],
    column("N", "kN", ["6.7", "7.1", "-1.0", "-8.3", "0.0"], 1e3),
    column("M", "kN", ["1.0", "-2.5", "-8.3", "-9.0", "0.0"], 1e3),
)  # fmt: skip
TRUSS = statement(JOINTS, MEMBERS, SUPPORTS, DOWN, RIGHT, FORCES)
FRAME = {
    "joints": "joints", "x": "x", "y": "y", "members": "members", "start": "from", "end": "to",
    "supports": "supports", "held": "held", "turn": "turn",
}  # fmt: skip
LOADS = figure("truss-loads", **FRAME, loads=["down", "down"], down=["P", "W"], right=["H", "V"])
BARS = figure("truss-forces", **FRAME, envelope="envelope", largest="N", smallest="M")


def test_joints_and_their_loads_are_shown() -> None:
    """Joints are named, each load case has its title, each load its value as printed."""
    said = words(figures.draw(TRUSS, LOADS))
    assert {"A", "B", "C", "D", "Dead load, kN", "Case W1, kN", "4.0", "10.0"} <= set(said)
    assert {f"{MINUS}2.0", "→ 6.0"} <= set(said)


def test_arrows_point_as_the_loads_act() -> None:
    """Down for a weight, up for suction, to the right for a push."""
    svg = figures.draw(TRUSS, LOADS)
    for name, wanted in (("load-P-D", (0, 1)), ("load-W-A", (0, -1)), ("load-W-D", (1, 0))):
        (x1, y1), (x2, y2) = outline(svg, name)
        long = ((x2 - x1) ** 2 + (y2 - y1) ** 2) ** 0.5
        assert ((x2 - x1) / long, (y2 - y1) / long) == pytest.approx(wanted, abs=1e-3)


def test_forces_are_shown_by_number_and_by_line() -> None:
    """Tension and compression stand beside each member; the key says what the lines are."""
    said = words(figures.draw(TRUSS, BARS))
    assert {"T 6.7", "T 7.1", "C 2.5", "C 8.3", "C 9.0", "0"} <= set(said)
    assert "pulled only: thick" in said
    assert "pushed only: double" in said
    assert "pulled and pushed: double and dashed" in said
    assert "no force: thin" in said


@pytest.mark.parametrize("item", [LOADS, BARS])
def test_no_words_lie_on_each_other(item: dict[str, Any]) -> None:
    """Every word has room of its own."""
    found = boxes(figures.draw(TRUSS, item))
    assert not [(a, b) for a, b in combinations(found, 2) if a.meets(b)]


def flattened() -> dict[str, Any]:
    """Return the same truss with little height, its post pulled and pushed."""
    low = deepcopy(TRUSS)
    for item in low["parts"][1]["items"]:
        if item["name"] == "joints":
            item["columns"][1] = column("y", "m", ["0", "0", "0", "0.5"])
        if item["name"] == "envelope":
            item["columns"][0] = column("N", "kN", ["6.7", "7.1", "-1.0", "-8.3", "2.0"], 1e3)
            item["columns"][1] = column("M", "kN", ["1.0", "-2.5", "-8.3", "-9.0", "-3.0"], 1e3)
    return low


def test_members_without_room_for_their_forces_have_a_number_and_a_list() -> None:
    """A flat truss keeps its proportions: a number on each member, its forces listed by it."""
    svg = figures.draw(flattened(), BARS)
    said = words(svg)
    assert {str(number) for number in range(1, 6)} <= set(said)
    assert {"AB", "BC", "AD", "DC", "BD", "T 6.7", "C 8.3"} <= set(said)
    found = boxes(svg)
    assert not [(a, b) for a, b in combinations(found, 2) if a.meets(b)]


def test_a_roomy_truss_has_its_forces_on_its_members() -> None:
    """Nothing is numbered or listed where every member has room."""
    assert not {"1", "AB"} & set(words(figures.draw(TRUSS, BARS)))


def test_a_level_load_stays_off_the_truss_and_its_supports() -> None:
    """Pushes at both supports are drawn from outside, their values beside, not on, the support."""
    pushed = deepcopy(TRUSS)
    for item in pushed["parts"][1]["items"]:
        if item["name"] == "right":
            item["columns"][1] = column("V", "kN", ["5.0", "0.0", "4.0", "0.0"], 1e3)
        if item["name"] == "down":
            item["columns"][1]["texts"] = ["0.0"] * 4
            item["columns"][1]["si"] = [0.0] * 4
    svg = figures.draw(pushed, LOADS)
    spans = {key: [x for x, _ in outline(svg, f"load-W-{key}")] for key in "AC"}
    left, right = (max(spans["A"]), min(spans["C"]))
    lines = outline(svg, "member-AB")[:1] + outline(svg, "member-BC")[-1:]
    assert left < lines[0][0] < lines[1][0] < right


def test_supports_are_drawn_as_they_hold() -> None:
    """A triangle at a pin, a triangle on wheels at a roller."""
    svg = figures.draw(TRUSS, BARS)
    assert outline(svg, "support-pinned")
    assert outline(svg, "support-roller")


def test_the_words_for_those_who_cannot_see_it() -> None:
    """Loads and forces are told in words."""
    assert "held at A (pinned), C (roller)" in figures.describe(TRUSS, LOADS)
    assert "D 10.0" in figures.describe(TRUSS, LOADS)
    assert "BC tension 7.1 and compression 2.5" in figures.describe(TRUSS, BARS)
    assert "BD no force" in figures.describe(TRUSS, BARS)


@pytest.mark.parametrize("item", [LOADS, BARS])
def test_a_truss_without_its_tables_is_said(item: dict[str, Any]) -> None:
    """A joint without a place, or a member at a missing joint, is named and nothing is drawn."""
    spoiled = deepcopy(TRUSS)
    for one in spoiled["parts"][1]["items"]:
        if one["name"] == "members":
            one["columns"][1] = named("to", ["B", "C", "D", "C", "X"])
    assert "BD ends at joint X, which is not there" in " ".join(words(figures.draw(spoiled, item)))
    assert "X" in figures.describe(spoiled, item)
