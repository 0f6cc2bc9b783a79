"""The building in elevation."""

# ruff: noqa: RUF001  figures print true minus signs

from __future__ import annotations

from copy import deepcopy

from drawn import words
from samples import CLINIC, LADDER, column, figure, levels, statement

from calcbook import figures


def test_keys_uses_elevations_and_areas_are_printed() -> None:
    """Every level shows its key, use, elevation and area as the statement prints them."""
    printed = words(figures.draw(CLINIC, LADDER))
    for key, height in (("Ground", "0.00 m"), ("Level 3", "8.10 m"), ("Roof", "15.60 m")):
        assert key in printed
        assert height in printed
    assert printed.count("864 m²") == 5
    assert {"wards", "plant"} <= set(printed)


def test_storey_heights_are_exact_differences() -> None:
    """15.60 - 11.60 is 4.00 to the printed figure, and 0.3 - 0.1 is 0.2."""
    printed = words(figures.draw(CLINIC, LADDER))
    assert [word for word in printed if word in {"4.00", "3.50", "4.60"}] == [
        "4.60",
        "3.50",
        "3.50",
        "4.00",
    ]
    assert "0.2" in words(figures.draw(levels(["A", "B"], ["0.1", "0.3"]), LADDER))


def test_storey_heights_may_come_from_the_schedule() -> None:
    """A column of storey heights is printed as it stands; a missing one is left blank."""
    source = deepcopy(CLINIC)
    texts = ["0.000", "4.600", "", "3.500", "4.000"]
    source["parts"][1]["items"][0]["columns"].append(column("h_s", "m", texts))
    item = figure("level-ladder", levels="levels", elevation="elevation", storey="h_s")
    printed = words(figures.draw(source, item))
    assert {"4.600", "3.500", "4.000"} <= set(printed)
    assert "0.000" not in printed
    assert "3.50" not in printed


def test_levels_are_drawn_by_height_whatever_their_order() -> None:
    """Rows from the roof down give the same drawing as from the ground up."""
    turned = levels(["Roof", "Ground"], ["4.0", "0.0"])
    assert figures.draw(turned, LADDER) == figures.draw(
        levels(["Ground", "Roof"], ["0.0", "4.0"]), LADDER
    )


def test_level_without_elevation_is_said_not_drawn() -> None:
    """A missing elevation is told in words; the other levels stand."""
    spoilt = deepcopy(CLINIC)
    column = spoilt["parts"][1]["items"][0]["columns"][0]
    column["texts"][1], column["si"][1] = "", None
    column["problem"] = [None, "not available because of z_2", None, None, None]
    svg = figures.draw(spoilt, LADDER)
    assert "Level 2 is not drawn: not available because of z_2." in words(svg)
    assert "4.60 m" not in words(svg)
    assert "Level 2 is not drawn" in figures.describe(spoilt, LADDER)


def test_nothing_to_draw_is_said() -> None:
    """No schedule, an empty one and one that does not apply each leave one sentence."""
    empty, away = levels([], []), deepcopy(CLINIC)
    away["parts"][1]["items"][0].update(applies=False, why="there is one storey")
    for source, why in (
        (statement(), "no schedule of this name"),
        (empty, "the schedule has no rows"),
        (away, "it does not apply (there is one storey)"),
    ):
        printed = words(figures.draw(source, LADDER))
        assert len(printed) == 1
        assert why in printed[0]
        assert why in figures.describe(source, LADDER)


def test_elevations_above_a_datum_have_no_ground() -> None:
    """Elevations over the sea do not put the ground fifty metres below the building."""
    printed = " ".join(words(figures.draw(levels(["G", "R"], ["52.30", "56.30"]), LADDER)))
    assert "no ground is drawn" in printed
    assert "4.00" in printed


def test_basement_only() -> None:
    """Levels below the ground alone are drawn with their signs."""
    printed = words(figures.draw(levels(["B2", "B1"], ["-6.5", "-3.0"]), LADDER))
    assert {"−6.5 m", "−3.0 m", "3.5"} <= set(printed)


def test_many_levels_are_thinned_in_words() -> None:
    """Where labels would be too many, every second is left and the figure says so."""
    high = levels([f"L{n}" for n in range(60)], [f"{n}.0" for n in range(60)])
    printed = words(figures.draw(high, LADDER))
    assert "Every second level is labelled, from the top." in printed
    assert "L59" in printed
    assert "L58" not in printed


def test_alt_text_names_levels_and_tallest_storey() -> None:
    """The figure in words has the levels, the elevations and the tallest storey."""
    said = figures.describe(CLINIC, LADDER)
    assert "5 levels" in said
    assert "Level 2 at 4.60 m" in said
    assert "The tallest storey is 4.60 m, from Ground to Level 2." in said


def test_use_and_area_may_be_left_out() -> None:
    """Only levels and elevations are needed."""
    plain = figure("level-ladder", levels="levels", elevation="elevation")
    printed = words(figures.draw(CLINIC, plain))
    assert "wards" not in printed
    assert "864 m²" not in printed
    assert "15.60 m" in printed
