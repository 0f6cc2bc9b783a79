"""The column as a ladder."""

from __future__ import annotations

from copy import deepcopy

import pytest
from drawn import outline, words
from samples import STACK, column_stack, statement

from calcbook import figures


def test_every_level_shows_what_it_adds_and_what_is_below() -> None:
    """Loads as printed: added at the level, and running totals in the column."""
    printed = words(figures.draw(column_stack(), STACK))
    assert {"Roof", "Level 3", "Level 2", "Ground", "G", "Q", "P_D", "P_L"} <= set(printed)
    assert printed.count("100.0") == 4  # added thrice, and the total below the roof
    assert {"200.0", "300.0", "40.0", "80.0"} <= set(printed)
    assert any(line.startswith("Loads in kN, unfactored.") for line in printed)


def test_breadth_is_load() -> None:
    """The dead part below level 3 is twice as broad as that below the roof, live beside it."""
    svg = figures.draw(column_stack(), STACK)

    def breadth(name: str) -> float:
        xs = [x for x, _ in outline(svg, name)]
        return max(xs) - min(xs)

    assert breadth("below-Level 3-0") == pytest.approx(2 * breadth("below-Roof-0"), rel=1e-4)
    assert breadth("below-Level 3-1") == pytest.approx(0.2 * breadth("below-Level 3-0"), rel=1e-3)
    assert breadth("below-Roof-1") == pytest.approx(0.0, abs=1e-6)


def test_missing_load_is_said_not_drawn() -> None:
    """A total without a value is told with its reason, and nothing stands for it."""
    spoilt = deepcopy(column_stack())
    column = spoilt["parts"][1]["items"][2]["columns"][1]
    column["problem"] = ["", "", "row Level 2: not available because of L_o", "x"]
    svg = figures.draw(spoilt, STACK)
    said = " ".join(words(svg))
    assert "No P_L at Level 2: row Level 2: not available because of L_o." in said
    assert "none" in words(svg)
    with pytest.raises(StopIteration):
        outline(svg, "below-Level 2-1")


def test_nothing_to_draw_is_said() -> None:
    """Without levels one sentence stands."""
    printed = words(figures.draw(statement(), STACK))
    assert printed == ["No levels are drawn: there is no schedule of this name."]
    assert "empty" in figures.describe(statement(), STACK)


def test_in_words() -> None:
    """The figure in words tells the totals below every level."""
    said = figures.describe(column_stack(), STACK)
    assert "Column as a ladder with 4 levels." in said
    assert "Below Level 2: P_D 300.0 kN, P_L 80.0 kN." in said
    many = figures.describe(column_stack([f"L{n}" for n in range(60)]), STACK)
    assert "Below L0:" in many
    assert "Below L30:" not in many
