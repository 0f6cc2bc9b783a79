"""The bars of a sensitivity: to scale, readable without colour, words clear of each other."""

from __future__ import annotations

from itertools import combinations

import pytest
from drawn import boxes, words

from calcbook.figures.effect_bars import MOST, Bar, Bars, Change, describe, draw
from calcbook.figures.sketch import ACCENT, PAPER, WIDTH, Area


def bars(count: int = 3) -> Bars:
    """Return a picture with bars on both sides, on one side, and one that is missing."""
    rows = [
        Bar("V = 70 m/s", Change(-190.0, "810 kN (-19.0 %)"), Change(210.0, "1210 kN (+21.0 %)")),
        Bar("theta = 15 deg", Change(12.0, "1012 kN (+1.2 %)"), Change(30.0, "1030 kN (+3.0 %)")),
        Bar("c = 1", Change(None, "0.9 is outside the range 1 to 2"), Change(100.0, "1100 kN")),
    ]
    return Bars("V_max = 1000 kN", "10 %", tuple((rows * count)[:count]), "No change with: r_r.")


def test_words_are_there_and_clear_of_each_other() -> None:
    """Every entry, result and refusal is written, inside the sheet, none upon another."""
    svg = draw(bars()).render("svg")
    written = " ".join(words(svg))
    for text in ("10 % less", "10 % more", "1210 kN (+21.0 %)", "0.9 is outside", "No change with"):
        assert text in written
    found = boxes(svg)
    assert [(a.words, b.words) for a, b in combinations(found, 2) if a.meets(b)] == []
    assert all(box.left >= 0 and box.right <= WIDTH for box in found)


def test_bars_are_to_one_scale_and_told_apart_by_fill_and_place() -> None:
    """Less is open and above, more filled and below; lengths go with the changes."""
    areas = [mark for mark in draw(bars(1)).marks if isinstance(mark, Area)][2:]
    less, more = areas
    assert (less.fill, more.fill) == (PAPER, ACCENT)
    assert min(y for _, y in less.points) > max(y for _, y in more.points)
    lengths = [max(x for x, _ in one.points) - min(x for x, _ in one.points) for one in areas]
    assert lengths[1] / lengths[0] == pytest.approx(210 / 190)


def test_many_and_none() -> None:
    """Beyond the most that are drawn the rest is counted; without any the words stand alone."""
    assert f"{20 - MOST} entries with smaller effects are not drawn." in describe(bars(20))
    assert draw(bars(20)).high - draw(bars(20)).low < 250
    assert words(draw(bars(0)).render("svg")) == ["No change with: r_r."]
