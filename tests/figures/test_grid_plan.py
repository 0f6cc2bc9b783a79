"""The grid in plan."""

from __future__ import annotations

from copy import deepcopy

import pytest
from drawn import outline, words
from samples import CLINIC_GRID, PLAN, grid, line

from calcbook import figures


def test_bubbles_and_spacings_are_printed() -> None:
    """Every line has its mark, every bay its exact spacing, both ways their overall length."""
    printed = words(figures.draw(CLINIC_GRID, PLAN))
    assert {"1", "2", "3", "4", "5", "6", "A", "B", "C", "D"} <= set(printed)
    assert printed.count("6.00") == 3
    assert {"6.50", "11.50", "36.00", "7.5", "2.7", "7.8", "18.0"} <= set(printed)
    assert "Spacings in m." in printed


def test_two_lines_have_one_dimension() -> None:
    """A single bay is dimensioned once, not once more as overall length."""
    printed = words(figures.draw(grid(["0", "6.1"], ["0", "7.2"]), PLAN))
    assert printed.count("6.1") == 1
    assert printed.count("7.2") == 1


def test_negative_positions_keep_their_spacings() -> None:
    """A grid with its origin inside the building has positive spacings."""
    printed = words(figures.draw(grid(["-6.0", "0.0", "5.5"], ["-8", "-3"]), PLAN))
    assert {"6.0", "5.5", "11.5", "5"} <= set(printed)


def test_line_without_position_is_said_not_drawn() -> None:
    """A line whose position is missing is told in words, and no bay is drawn across it."""
    spoilt = deepcopy(CLINIC_GRID)
    column = spoilt["parts"][1]["items"][0]["columns"][0]
    column["si"][2], column["texts"][2] = None, ""
    printed = words(figures.draw(spoilt, PLAN))
    assert "Grid line 3 is not drawn: it has no value." in printed
    assert "12.50" in printed
    assert "3" not in printed


def test_missing_schedule_is_said() -> None:
    """Without one of the grids nothing is drawn but the reason."""
    spoilt = deepcopy(CLINIC_GRID)
    del spoilt["parts"][1]["items"][1]
    assert words(figures.draw(spoilt, PLAN)) == [
        "No grid is drawn: 'grid_y': there is no schedule of this name."
    ]
    assert "No grid lines up the sheet." in figures.describe(spoilt, PLAN)


def test_two_scales_are_said() -> None:
    """A plan too long for one scale says that it has two, and which lines it marks."""
    printed = " ".join(words(figures.draw(grid([f"{n * 9}" for n in range(40)], ["0", "8"]), PLAN)))
    assert "different scales" in printed
    assert "every third is marked" in printed


def test_alt_text_names_the_largest_spacing() -> None:
    """The figure in words counts the lines and finds the largest bay each way."""
    said = figures.describe(CLINIC_GRID, PLAN)
    assert "6 lines across the sheet" in said
    assert "The largest spacing is 11.50 m, 5 to 6." in said
    assert "The largest spacing is 7.8 m, C to D." in said


def test_outline_may_reach_beyond_the_grid() -> None:
    """A plan longer than its grid is drawn centred on it, with its lengths as printed."""
    source = deepcopy(CLINIC_GRID)
    source["parts"][1]["items"] += [line("L_x", "36.60", "m", 36.6), line("L_y", "0", "m", 0.0)]
    item = {**PLAN, "uses": {**PLAN["uses"], "length_x": "L_x", "length_y": "L_y"}}
    svg = figures.draw(source, item)
    left, right = outline(svg, "outline")[0][0], outline(svg, "outline")[1][0]
    low, high = outline(svg, "outline")[0][1], outline(svg, "outline")[2][1]
    assert (right - left) / (low - high) == pytest.approx(36.6 / 18.0, rel=1e-5)
    assert "Outline of the plan 36.60 m across, centred on the grid." in words(svg)
    assert "Outline not drawn to 'L_y': 0 m is no length to draw." in words(svg)
    assert "36.60 m across" in figures.describe(source, item)
