"""What holds for every figure: same bytes, room for every word, nothing read from outside."""

from __future__ import annotations

import math
import re
from functools import cache
from typing import Any

import matplotlib as mpl
import pytest
from drawn import outside, overlaps, size, words
from samples import (
    CLINIC,
    CLINIC_GRID,
    FLAT,
    GABLE,
    HEIGHT,
    KEY_PLAN,
    LADDER,
    MATRIX,
    PLAN,
    SECTION,
    STACK,
    build_ups,
    changed,
    column_stack,
    factor_matrix,
    flipped,
    gable,
    grid,
    key_plan,
    levels,
    statement,
    value,
    wind,
)

from calcbook import figures


def tower(count: int = 60) -> dict[str, Any]:
    """Return a wind workbook of many levels."""
    keys = tuple(f"Level {place}" for place in range(1, count + 1))
    heights = tuple(f"{place * 3.5:.1f}" for place in range(1, count + 1))
    q = tuple(f"{1.0 + place * 0.03:.3f}" for place in range(count))
    items = wind(keys, heights, q, tuple(f"{float(one) * 0.68:.3f}" for one in q))
    for name in ("h", "h_e"):
        items = changed(items, name, value=value("210", "m", 210.0))
    return statement(*items)


def low_shed() -> dict[str, Any]:
    """Return one level of three metres on ninety of depth."""
    items = wind(("Roof",), ("3.0",), ("1.170",), ("0.796",))
    for name, text in (("h", "3.0"), ("h_e", "3.0"), ("L", "90")):
        items = changed(items, name, value=value(text, "m", float(text)))
    return statement(*items)


def steep() -> dict[str, Any]:
    """Return a roof of 60 degrees on a low wall."""
    items = changed(gable(), "theta", value=value("60", "deg", math.radians(60.0)))
    return statement(*changed(items, "h_e", value=value("3", "m", 3.0)))


def crowded() -> dict[str, Any]:
    """Return levels closer than their words are high, with long names."""
    keys = ["Basement 2, car park and plant rooms", "Ground", "Mezzanine", "Parapet", "Coping"]
    return levels(keys, ["-6.50", "0.00", "0.35", "4.60", "4.75"])


def many_build_ups(count: int, layers: int) -> dict[str, Any]:
    """Return build-ups of many layers with long words, every second one a wall."""
    words = "polymer-modified bituminous membrane, two layers, laid hot"
    rows = [
        (f"T{n}", words, "35", "1234.567", "self", "yes") for n in range(count)
        for _ in range(layers)
    ]  # fmt: skip
    kinds = tuple(
        (f"T{n}", f"{words} on {words}", "upright" if n % 2 else "pitched", "1234.567")
        for n in range(count)
    )
    return build_ups(rows, kinds)


def thick_raft() -> dict[str, Any]:
    """Return a build-up of a metre beside one of a millimetre."""
    rows = [("A", "raft", "1000", "23.6", "self", "yes"), ("B", "sheet", "1", "0.08", "self", "no")]
    return build_ups(rows, (("A", "raft", "level", "23.6"), ("B", "wall", "upright", "0.08")))


def crowded_columns() -> dict[str, Any]:
    """Return a mark at every crossing of a close grid, with long marks."""
    xs, ys = tuple(1.5 * n for n in range(30)), tuple(4.0 * n for n in range(12))
    marks = [
        (f"Column {n}", str(1 + n % 30), chr(65 + n // 30), "", "6.00") for n in range(30 * 12)
    ]
    return key_plan(marks, xs, ys)


SHEETS = {
    "column": (column_stack(), STACK),
    "column of one": (column_stack(["Roof"]), STACK),
    "column high": (column_stack([f"L{n}" for n in range(90, 0, -1)]), STACK),
    "column, long words": (column_stack(["Level of the plant rooms, upper", "B"], 0.4, 1e6), STACK),
    "key plan": (key_plan(), KEY_PLAN),
    "key plan, crowded": (crowded_columns(), KEY_PLAN),
    "key plan of one": (key_plan([("C-1", "1", "A", "", "4.00")], (0.0,), (0.0,)), KEY_PLAN),
    "build-ups": (build_ups(), SECTION),
    "build-ups, many": (many_build_ups(14, 3), SECTION),
    "build-ups of many layers": (many_build_ups(2, 60), SECTION),
    "build-up alone": (many_build_ups(1, 1), SECTION),
    "build-ups, thick and thin": (thick_raft(), SECTION),
    "matrix": (factor_matrix(), MATRIX),
    "matrix, long": (
        factor_matrix(tuple(f"combination {n} of the code" for n in range(40))),
        MATRIX,
    ),
    "ladder": (CLINIC, LADDER),
    "ladder of one": (levels(["Roof"], ["4.20"]), LADDER),
    "ladder of ground": (levels(["Ground"], ["0"]), LADDER),
    "ladder crowded": (crowded(), LADDER),
    "ladder high": (levels([f"L{n}" for n in range(90)], [f"{n * 3}" for n in range(90)]), LADDER),
    "ladder in feet": (levels(["Ground", "Roof"], ["0.00", "15.25"], "ft"), LADDER),
    "grid": (CLINIC_GRID, PLAN),
    "grid of one": (grid(["0"], ["0"]), PLAN),
    "grid long": (grid([f"{n * 6}" for n in range(30)], ["0", "7.25", "9.00"]), PLAN),
    "grid deep": (grid(["0", "6.125"], [f"{n * 9}" for n in range(26)]), PLAN),
    "grid tight": (grid(["0", "0.4", "0.8", "9"], ["0", "0.3", "12.125"]), PLAN),
    "flat": (statement(*wind()), FLAT),
    "gable": (statement(*gable()), GABLE),
    "gable turned": (statement(*flipped(gable())), GABLE),
    "tower": (tower(), FLAT),
    "shed": (low_shed(), FLAT),
    "steep": (steep(), GABLE),
    "height": (statement(*wind()), HEIGHT),
    "height turned": (statement(*flipped(wind())), HEIGHT),
    "height of a tower": (tower(), HEIGHT),
    "height of a shed": (low_shed(), HEIGHT),
}


@cache
def sheet(name: str) -> bytes:
    """Return a sheet as SVG, drawn once for all tests."""
    return figures.draw(*SHEETS[name])


every_sheet = pytest.mark.parametrize("name", SHEETS)


@every_sheet
def test_no_words_overlap_or_leave_the_sheet(name: str) -> None:
    """Every line of words has room of its own on the sheet."""
    svg = sheet(name)
    assert overlaps(svg) == []
    assert outside(svg) == []


@every_sheet
def test_sheet_suits_the_page(name: str) -> None:
    """A figure is 150 mm wide and no higher than the page."""
    width, height = size(sheet(name))
    assert width == pytest.approx(150.0, abs=0.01)
    assert height < 225.0


@every_sheet
def test_words_are_eight_points_in_the_page_font(name: str) -> None:
    """Words stay text, in the font of the pages, at 8 points."""
    svg = sheet(name).decode()
    styles = re.findall(r"<text [^>]*style=\"([^\"]*)\"", svg)
    assert styles
    assert all("8px" in style and "'Libertinus Serif', " in style for style in styles)


@pytest.mark.parametrize("form", ["svg", "png"])
@pytest.mark.parametrize("name", ["ladder", "grid", "gable", "height"])
def test_same_statement_same_bytes(name: str, form: str) -> None:
    """A figure drawn again is the same file, whatever the settings of the notebook."""
    first = figures.draw(*SHEETS[name], form)
    with mpl.rc_context({"font.size": 30, "lines.linewidth": 9, "svg.fonttype": "path"}):
        assert figures.draw(*SHEETS[name], form) == first
        assert mpl.rcParams["font.size"] == 30


def test_no_date_and_no_maker_in_the_files() -> None:
    """Neither file carries when or with what it was drawn."""
    assert b"<dc:date>" not in figures.draw(CLINIC, LADDER)
    assert b"matplotlib" not in figures.draw(CLINIC, LADDER, "png").lower()


def test_png_is_wide_enough_for_the_screen() -> None:
    """The screen's picture has the pixels to read 8 points by."""
    png = figures.draw(CLINIC, LADDER, "png")
    assert png.startswith(b"\x89PNG")
    assert int.from_bytes(png[16:20]) > 900


@every_sheet
def test_alt_text_is_a_few_sentences(name: str) -> None:
    """A figure in words is short enough to be heard and ends as a sentence."""
    said = figures.describe(*SHEETS[name])
    assert said.endswith(".")
    assert 20 < len(said) < 1500


def test_words_with_marks_of_formulas_are_shown_as_typed() -> None:
    """A key with dollars, underscores and brackets is text, not a formula and not markup."""
    svg = figures.draw(levels(["L_1 $x$ <a&b>"], ["3.0"]), LADDER)
    assert "L_1 $x$ <a&b>" in words(svg)
