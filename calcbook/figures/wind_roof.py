"""The roof of the wind elevation: its zones' arrows, and the table of their values above."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.figures.layout import spread
from calcbook.figures.lookup import Missing
from calcbook.figures.sketch import GREY, LIGHT, MARGIN, ROW, WIDTH, Sketch, text_width
from calcbook.figures.wind_frame import LONGEST, Frame, cell, pressure_arrow

if TYPE_CHECKING:
    from calcbook.figures.sketch import Point
    from calcbook.figures.wind_values import Wind, Zone

_APART = 4.5


def roof_pressures(sketch: Sketch, frame: Frame, wind: Wind) -> float:
    """Draw the roof's arrows and the table of its values above them; return the table's top."""
    floor = frame.height + frame.rise
    headed = frame.height + 2.0 * ROW + 4.0 if wind.levels else frame.height
    if not wind.zones:
        return max(floor, headed) + ROW
    tips = [_zone_arrows(sketch, frame, zone, n) for n, zone in enumerate(wind.zones, start=1)]
    count = max(len(zone.values) for zone in wind.zones)
    rooms = [
        max(map(text_width, (zone.label, *map(cell, zone.values)))) + 3.0 for zone in wind.zones
    ]
    side = max(text_width(words) for words in _row_names(count)) + 4.0
    centres = [frame.along((zone.begin + zone.end) / 2.0) for zone in wind.zones]
    places = spread(centres, rooms, MARGIN + side, WIDTH - MARGIN)
    bottom = max(floor + LONGEST + 5.0, headed)
    edge = places[0] - rooms[0] / 2.0 - 1.0
    for row, words in enumerate(_row_names(count)):
        sketch.text(edge, bottom + (count - row) * ROW, words, align="right", ink=GREY)
    for zone, place, tip in zip(wind.zones, places, tips, strict=True):
        sketch.text(place, bottom + (count + 1) * ROW, zone.label, align="center", ink=GREY)
        for row, value in enumerate(zone.values):
            sketch.text(place, bottom + (count - row) * ROW, cell(value), align="center")
        low = bottom + ROW - 2.4
        above = (tip[0], min(low - 2.5, tip[1] + 6.0))
        gid = f"leader-{zone.label}"
        sketch.line((place, low), (place, low - 1.0), above, tip, ink=LIGHT, weight=0.5, gid=gid)
    return bottom + (count + 1) * ROW


def _row_names(count: int) -> list[str]:
    if count == 1:
        return ["on the roof"]
    drawn = ["filled arrow", *["open arrow"] * (count - 1)]
    return [f"alternative {number}, {how}" for number, how in enumerate(drawn, start=1)]


def _zone_arrows(sketch: Sketch, frame: Frame, zone: Zone, number: int) -> Point:
    """Draw a zone's limits and, at its middle, its arrows square to the roof.

    Alternatives stand side by side. Returns the upper end of the highest arrow, or a place on the
    roof where there is none.
    """
    begin, end = frame.along(zone.begin), frame.along(zone.end)
    for x in (begin, end):
        sketch.line((x, frame.roof(x)), (x, frame.roof(x) + 2.0), weight=0.5, ink=GREY)
    count = len(zone.values)
    middle = (begin + end) / 2.0
    step = min(_APART, (end - begin) / max(1, count))
    ends = [(middle, frame.roof(middle))]
    for place, value in enumerate(zone.values):
        x = middle + (place - (count - 1) / 2.0) * step
        if isinstance(value, Missing) or not value.si:
            continue
        surface, square = (x, frame.roof(x)), frame.off_roof(x)
        gid = f"roof-{number}-{place + 1}"
        pressure_arrow(sketch, frame, surface, square, value, gid=gid, dashed=place > 0)
        length = frame.arrow_length(value.si)
        ends.append((x + length * square[0], surface[1] + length * square[1]))
    return max(ends, key=lambda point: point[1])
