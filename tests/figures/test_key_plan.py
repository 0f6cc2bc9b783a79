"""The key plan with the tributary areas of all columns."""

from __future__ import annotations

import pytest
from drawn import named, outline, words
from samples import KEY_PLAN, key_plan, statement

from calcbook import figures


def area(svg: bytes, name: str) -> float:
    """Return the area of a named rectangle on the sheet, mm2."""
    xs, ys = zip(*outline(svg, name), strict=True)
    return (max(xs) - min(xs)) * (max(ys) - min(ys))


def test_every_mark_has_its_area_and_those_alike() -> None:
    """Four marks and eight columns alike, each with mark and area as printed."""
    printed = words(figures.draw(key_plan(), KEY_PLAN))
    assert [printed.count(m) for m in ("C-1", "C-2", "C-3", "C-4")] == [4, 4, 2, 2]
    assert [printed.count(f"{a} m²") for a in ("12.00", "18.00", "20.00", "30.00")] == [4, 4, 2, 2]
    assert {"1", "4", "A", "C"} <= set(printed)


def test_areas_are_to_scale() -> None:
    """C-1, C-2 and C-4 are 12, 18 and 30 parts, the outline 220."""
    svg = figures.draw(key_plan(), KEY_PLAN)
    part = area(svg, "area-C-4") / 30
    assert area(svg, "area-C-1") == pytest.approx(12 * part, rel=1e-4)
    assert area(svg, "area-C-2") == pytest.approx(18 * part, rel=1e-4)
    assert area(svg, "outline") == pytest.approx(220 * part, rel=1e-4)
    assert named(svg).count("area-C-1") == 4


def test_two_columns_at_one_place_are_said() -> None:
    """A mark, or one alike, where another stands: both are named with the place."""
    marks = [("C-1", "1", "A", "", "12.00"), ("C-7", "2", "A", "1-A", "18.00")]
    source = key_plan(marks)
    said = "C-1 and C-7 are at one place, 1-A."
    assert said in words(figures.draw(source, KEY_PLAN))
    assert said in figures.describe(source, KEY_PLAN)


def test_mark_outside_the_grid_is_said() -> None:
    """Lines that the grid does not have are told, for a mark and for those alike."""
    marks = [("C-1", "9", "A", "", "12.00"), ("C-2", "2", "A", "2-Z", "18.00")]
    said = figures.describe(key_plan(marks), KEY_PLAN)
    assert "C-1 is not drawn: there is no crossing 9-A." in said
    assert "C-2 at 2-Z is not drawn: there is no such crossing." in said
    assert "C-2 at 2-A, 18.00 m²." in said


def test_lines_with_hyphens_in_their_names() -> None:
    """A place such as A-1-B is read by the lines there are."""
    marks = [("C-1", "1", "A", "2-B", "12.00")]
    source = key_plan(marks)
    source["parts"][1]["items"][0]["rows"][1] = "A-2"
    marks_item = source["parts"][1]["items"][2]
    marks_item["columns"][2]["texts"] = ["A-2-B"]
    assert figures.draw(source, KEY_PLAN).count(b'id="area-C-1"') == 2


def test_nothing_to_draw_is_said() -> None:
    """Without grids and marks the reasons stand alone."""
    said = words(figures.draw(statement(), KEY_PLAN))
    assert any("No grid is drawn" in line for line in said)
    assert "0 marks" in figures.describe(statement(), KEY_PLAN)
