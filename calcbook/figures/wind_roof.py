"""The roof of the wind elevation: its zones' arrows, and the table of their values above."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.figures.layout import spread
from calcbook.figures.lookup import Missing
from calcbook.figures.sketch import GREY, LIGHT, MARGIN, ROW, WIDTH, Sketch, text_width
from calcbook.figures.wind_frame import LONGEST, Frame, cell, pressure_arrow

if TYPE_CHECKING:
    from calcbook.figures.wind_values import Wind, Zone


def roof_pressures(sketch: Sketch, frame: Frame, wind: Wind) -> float:
    """Draw the roof's arrows and the table of its values above them; return the table's top."""
    floor = frame.height + frame.rise
    headed = frame.height + 2.0 * ROW + 4.0 if wind.levels else frame.height
    if not wind.zones:
        return max(floor, headed) + ROW
    for number, zone in enumerate(wind.zones, start=1):
        _zone_arrows(sketch, frame, zone, number)
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
    for zone, centre, place in zip(wind.zones, centres, places, strict=True):
        sketch.text(place, bottom + (count + 1) * ROW, zone.label, align="center", ink=GREY)
        for row, value in enumerate(zone.values):
            sketch.text(place, bottom + (count - row) * ROW, cell(value), align="center")
        end = frame.roof(centre) + LONGEST + 1.0
        low = bottom + ROW - 2.4
        sketch.line((place, low), (centre, low - 2.5), (centre, end), ink=LIGHT, weight=0.5)
    return bottom + (count + 1) * ROW


def _row_names(count: int) -> list[str]:
    if count == 1:
        return ["on the roof"]
    drawn = ["filled arrow", *["open arrow"] * (count - 1)]
    return [f"alternative {number}, {how}" for number, how in enumerate(drawn, start=1)]


def _zone_arrows(sketch: Sketch, frame: Frame, zone: Zone, number: int) -> None:
    """Draw a zone's limits and its arrows, square to the roof, alternatives side by side."""
    begin, end = frame.along(zone.begin), frame.along(zone.end)
    for x in (begin, end):
        sketch.line((x, frame.roof(x)), (x, frame.roof(x) + 2.0), weight=0.5, ink=GREY)
    repeats = max(1, int((end - begin) / 14.0))
    slots = repeats * len(zone.values)
    for slot in range(slots):
        alternative = slot % len(zone.values)
        value = zone.values[alternative]
        if isinstance(value, Missing):
            continue
        x = begin + (end - begin) * (slot + 0.5) / slots
        gid = f"roof-{number}-{alternative + 1}-{slot + 1}"
        place = (x, frame.roof(x))
        square = frame.off_roof(x)
        pressure_arrow(sketch, frame, place, square, value, gid=gid, dashed=alternative > 0)
