"""Pressure over height."""

# ruff: noqa: RUF001  figures print true minus signs

from __future__ import annotations

from copy import deepcopy

from drawn import named, words
from samples import HEIGHT, changed, figure, flipped, statement, wind

from calcbook import figures


def test_values_are_the_statements_texts() -> None:
    """Heights and both pressures stand as the statement prints them, with their units once."""
    printed = words(figures.draw(statement(*wind()), HEIGHT))
    for text in ("4.6", "15.6", "2.170", "2.806", "1.476", "1.908"):
        assert text in printed
    assert {"z, m", "velocity, kPa", "windward, kPa", "mean roof height 15.6 m"} <= set(printed)


def test_alt_text_has_the_largest_and_where() -> None:
    """The figure in words names the largest of both pressures and its level."""
    said = figures.describe(statement(*wind()), HEIGHT)
    assert "Largest velocity pressure: 2.806 kPa at Roof, height 15.6 m." in said
    assert "Largest windward pressure: 1.908 kPa at Roof, height 15.6 m." in said


def test_largest_is_by_magnitude() -> None:
    """With every pressure a suction the largest is the one furthest from zero."""
    said = figures.describe(statement(*flipped(wind())), HEIGHT)
    assert "Largest windward pressure: −1.908 kPa at Roof" in said


def test_missing_pressure_is_said_at_its_level() -> None:
    """A row without a value says so in the table and below; the others stand."""
    source = deepcopy(statement(*wind()))
    column = source["parts"][1]["items"][0]["columns"][2]
    column["si"][1], column["texts"][1] = None, ""
    printed = words(figures.draw(source, HEIGHT))
    assert "none" in printed
    assert "No windward pressure at Level 3: it has no value." in printed
    assert "1.796" in printed


def test_mean_roof_height_missing_is_said_and_not_drawn() -> None:
    """Without its value there is no line for the mean roof height."""
    source = statement(*changed(wind(), "h", problem="not available because of h_e"))
    svg = figures.draw(source, HEIGHT)
    assert "mean-roof-height" not in named(svg)
    assert "Mean roof height not drawn: not available because of h_e." in words(svg)
    assert "mean-roof-height" in named(figures.draw(statement(*wind()), HEIGHT))


def test_velocity_pressure_alone() -> None:
    """The wall pressure and the roof height may be left out."""
    printed = words(
        figures.draw(statement(*wind()), figure("pressure-height", levels="levels", z="z", q="q"))
    )
    assert "2.806" in printed
    assert "1.908" not in printed


def test_no_levels_is_said() -> None:
    """Without a schedule there is one sentence and no picture."""
    assert words(
        figures.draw(statement(), figure("pressure-height", levels="x", z="z", q="q"))
    ) == ["No levels are drawn: there is no schedule of this name."]


def test_all_zero_is_drawn() -> None:
    """Pressures of nothing stand on the line of zero and divide nothing by nothing."""
    source = statement(*wind(("R",), ("0.0",), ("0.000",), ("0.000",)))
    assert words(figures.draw(source, HEIGHT)).count("0.000") == 2
