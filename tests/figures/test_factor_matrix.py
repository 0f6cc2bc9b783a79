"""The factors of combinations as a matrix."""

from __future__ import annotations

from copy import deepcopy

from drawn import words
from samples import MATRIX, factor_matrix, figure, statement

from calcbook import figures


def test_factors_are_printed_without_idle_noughts() -> None:
    """1.400 stands as 1.4, 0.7143 as it is, and no factor as a dot."""
    printed = words(figures.draw(factor_matrix(), MATRIX))
    assert {"1.4", "1.2", "0.9", "0.7143", "D", "Dmin", "L1", "W", "4a"} <= set(printed)
    assert printed.count("·") == 6
    assert "0.0000" not in printed


def test_those_that_govern_are_counted() -> None:
    """4a is largest of two effects, 1 of one, and 6 smallest of two; the signs are explained."""
    printed = words(figures.draw(factor_matrix(), MATRIX))
    assert [text for text in printed if text in {"2", "3"}] == ["2", "2"]
    assert any(text.startswith("Filled triangle") for text in printed)
    said = figures.describe(factor_matrix(), MATRIX)
    assert "The largest value comes from 4a 2 times, 1 1 times." in said
    assert "4a: 1.2 D, 1 L1, 0.7143 W" in said


def test_without_effects_only_the_factors_stand() -> None:
    """The roles of what governs may be left out."""
    item = figure("factor-matrix", combinations="listed", factors=["a_D"])
    printed = words(figures.draw(factor_matrix(), item))
    assert not any("triangle" in text for text in printed)
    assert "1.4" in printed


def test_a_missing_factor_is_said() -> None:
    """A factor without a value is n/a, and the reason stands below."""
    spoilt = deepcopy(factor_matrix())
    part = spoilt["parts"][1]["items"][0]["columns"][0]
    part["si"][1], part["texts"][1] = None, ""
    part["problem"] = ["", "not available because of f_c", ""]
    printed = words(figures.draw(spoilt, MATRIX))
    assert "n/a" in printed
    assert "4a: a_D is missing, not available because of f_c." in printed
    assert "a_D is missing" in figures.describe(spoilt, MATRIX)


def test_nothing_to_draw_is_said() -> None:
    """Without the list of combinations one sentence is left."""
    printed = words(figures.draw(statement(), MATRIX))
    assert printed == ["No factors are drawn: there is no schedule of this name."]
    assert "no schedule of this name" in figures.describe(statement(), MATRIX)
