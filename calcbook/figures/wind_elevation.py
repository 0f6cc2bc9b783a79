"""A section along the wind with the pressure on every surface as arrows."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

from calcbook.figures.layout import every, ordinal_step, spread
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import (
    ACCENT,
    GREY,
    LIGHT,
    MARGIN,
    PAPER,
    ROW,
    Sketch,
    shortened,
    text_width,
)
from calcbook.figures.wind_frame import (
    KEY_ROOM,
    LABELS,
    LONGEST,
    ROOM,
    Frame,
    cell,
    inner_rows,
    make_frame,
    pressure_arrow,
    short,
)
from calcbook.figures.wind_roof import roof_pressures
from calcbook.figures.wind_values import Level, Pressure, Wind, gather, sense

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from calcbook.figures import lookup
    from calcbook.figures.lookup import Value
    from calcbook.figures.sketch import Point

NEEDS = ("levels", "z", "p_windward")
TAKES = (
    "p_leeward",
    "p_side",
    "p_internal",
    "p_internal_both",
    "roof_windward",
    "roof_leeward",
    "roof_zones",
    "zone_start",
    "zone_end",
    "zone_width",
    "zone_p",
    "roof_shape",
    "theta",
    "rise",
    "ridge",
    "along",
    "depth",
    "h_eave",
)

_SAID_LEVELS = 8
_TWO = 2
_UNDER_ROOF = (0.215, 0.785)


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the section in words: every pressure with its sense, the largest and where."""
    wind = gather(statement, uses)
    sizes = [
        f"{words} {value.label}"
        for words, value in (
            ("depth", wind.depth),
            ("eave height", wind.eave),
            ("roof pitch", wind.roof.pitch),
        )
        if value
    ]
    parts = [f"Section along the wind{': ' if sizes else ''}{', '.join(sizes)}."]
    found = wind.pressures()
    if found:
        largest, where = max(found, key=lambda pair: abs(pair[0].si))
        parts.append(f"The largest pressure drawn is {_said(largest)}: {where}.")
        parts.append(f"Pressures: {'; '.join(_listed(wind))}.")
    return " ".join([*parts, *wind.notes])


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the section: table and windward wall at the left, leeward at the right, roof above."""
    sketch = Sketch()
    wind = gather(statement, uses)
    frame = make_frame(wind)
    _building(sketch, frame, wind)
    _inside(sketch, frame, wind)
    _windward(sketch, frame, wind)
    _leeward(sketch, frame, wind.leeward)
    top = roof_pressures(sketch, frame, wind)
    _wind_arrow(sketch, top)
    y = sketch.low - ROW
    for note in (*_legend(frame, wind), *wind.notes):
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def _listed(wind: Wind) -> list[str]:
    """Return every pressure in words, of a high windward wall the lowest and the highest."""
    wall = [one for one in wind.levels if isinstance(one.value, Shown)]
    if len(wall) > _SAID_LEVELS:
        wall = [wall[0], wall[-1]]
    placed = [(one.value, f"windward wall at {one.key}") for one in wall]
    both = [one.surface for one in wind.internal if one.both]
    return [
        f"{where} {value.label if where in both else _said(value)}"
        for value, where in (*placed, *wind.elsewhere())
        if isinstance(value, Shown)
    ]


def _said(value: Shown) -> str:
    if value.si == 0.0:
        return value.label
    return f"{value.label} {sense(value.si)} {'the' if value.si > 0.0 else 'from the'} surface"


def _building(sketch: Sketch, frame: Frame, wind: Wind) -> None:
    left, right, height = frame.left, frame.right, frame.height
    for level in wind.levels:
        y = level.z.si * frame.per_metre
        if 0.0 < y < height - 0.5:
            sketch.line((left, y), (right, y), ink=LIGHT, weight=0.5)
    sketch.line((left, 0.0), (left, height), weight=1.4)
    sketch.line((right, 0.0), (right, height), weight=1.4)
    if wind.roof.rise is not None:
        ridge = ((left + right) / 2.0, height + frame.rise)
        sketch.line((left, height), ridge, (right, height), weight=1.4, gid="roof")
    if wind.roof.raised:
        eave = height - wind.roof.raised * frame.per_metre
        sketch.line((left, eave), (right, eave), weight=0.9, gid="eave")
    sketch.ground(left - 9.0, right + 9.0, 0.0)
    if wind.depth:
        sketch.dimension((left, -5.0), (right, -5.0))
        label = f"depth {wind.depth.label}"
        sketch.text((left + right) / 2.0, -8.4, label, align="center")


def _windward(sketch: Sketch, frame: Frame, wind: Wind) -> None:
    """Draw the table of levels and the arrows on the windward wall, joined at their far ends."""
    step = every(len(wind.levels), LABELS)
    labelled = wind.levels[::-step][::-1]
    heights = [level.z.si * frame.per_metre for level in labelled]
    places = spread(heights, [ROW] * len(heights))
    for level, height, place in zip(labelled, heights, places, strict=True):
        _windward_row(sketch, frame, level, height, place)
    before: tuple[Point, float] | None = None
    for number, level in enumerate(wind.levels, start=1):
        y = level.z.si * frame.per_metre
        if isinstance(level.value, Missing) or not _on_wall(frame, y):
            before = None
            continue
        far = (frame.left - frame.arrow_length(level.value.si), y)
        if before and before[1] * level.value.si > 0.0:
            sketch.line(before[0], far, ink=ACCENT, weight=0.4)
        before = (far, level.value.si)
        gid = f"windward-{number}"
        pressure_arrow(sketch, frame, (frame.left, y), (-1.0, 0.0), level.value, gid=gid)
    if wind.levels:
        _windward_heading(sketch, frame, wind, max(places[-1], heights[-1]) + ROW + 1.5)


def _on_wall(frame: Frame, y: float) -> bool:
    return 0.0 <= y <= frame.height * (1.0 + 1e-9)


def _windward_row(sketch: Sketch, frame: Frame, level: Level, height: float, place: float) -> None:
    key, z, p = frame.columns
    sketch.text(key, place, shortened(level.key, KEY_ROOM))
    sketch.text(z, place, level.z.text, align="right")
    sketch.text(p, place, short(level.value), align="right")
    if isinstance(level.value, Shown) and _on_wall(frame, height):
        far = frame.left - frame.arrow_length(level.value.si)
        sketch.line((p + 1.0, place), (p + 3.0, height), (far, height), ink=LIGHT, weight=0.5)


def _windward_heading(sketch: Sketch, frame: Frame, wind: Wind, y: float) -> None:
    key, z, p = frame.columns
    sketch.text(key, y, "Level", ink=GREY)
    z_unit = Shown("", wind.levels[0].z.unit, 0.0).label.strip()
    sketch.text(z, y, f"z, {z_unit}" if z_unit else "z", align="right", ink=GREY)
    sketch.text(p, y + ROW - 0.6, "windward", align="right", ink=GREY)
    units = [one.value.unit for one in wind.levels if isinstance(one.value, Shown)]
    unit = Shown("", units[0], 0.0).label.strip() if units else ""
    sketch.text(p, y, unit, align="right", ink=GREY)


def _leeward(sketch: Sketch, frame: Frame, pressures: tuple[Pressure, ...]) -> None:
    """Draw the leeward wall's arrows, even over its height, and its label beside them."""
    across = frame.right + LONGEST + 2.0
    middle = frame.height / 2.0
    for number, one in enumerate(pressures):
        y = middle + (len(pressures) - 1 - 2 * number) * 5.0
        sketch.text(across, y + 1.9, one.surface)
        sketch.text(across, y - 1.9, cell(one.value))
        if isinstance(one.value, Missing):
            continue
        far = frame.right + frame.arrow_length(one.value.si)
        if one.value.si and number == 0:
            sketch.line((far, 0.0), (far, frame.height), ink=ACCENT, weight=0.4)
        count = max(4, int(frame.height / 12.0))
        for step in range(count):
            height = frame.height * (step + (0.5, 0.8)[number > 0]) / count
            gid = f"leeward-{number + 1}-{step + 1}"
            place = (frame.right, height)
            pressure_arrow(sketch, frame, place, (1.0, 0.0), one.value, gid=gid, dashed=number > 0)


def _inside(sketch: Sketch, frame: Frame, wind: Wind) -> None:
    """Draw what is seen inside the section: internal pressures, and the wall facing the reader."""
    middle = (frame.left + frame.right) / 2.0
    room = max(ROOM, frame.height / max(1, inner_rows(wind)))
    # Written from the ground up: the last internal pressure lowest, the side walls highest.
    for row, one in enumerate((*reversed(wind.internal), *wind.side)):
        y = room * (row + 0.5)
        sketch.text(middle, y + 1.9, one.surface, align="center", patch=True)
        sketch.text(middle, y - 1.9, cell(one.value), align="center", patch=True)
        if row >= len(wind.internal) and isinstance(one.value, Shown) and one.value.si:
            wide = max(text_width(one.surface), text_width(one.value.label))
            _facing(sketch, middle - wide / 2.0 - 3.2, y, one.value, row - len(wind.internal))
    for place, one in enumerate(wind.internal):
        if isinstance(one.value, Shown):
            y = frame.height * (len(wind.internal) - place - 0.5) / inner_rows(wind)
            roof = wind.roof.rise is not None
            _internal_arrows(sketch, frame, one.value, y + 1.2 * one.both, place, roof=roof)
            if one.both:
                turned = replace(one.value, si=-one.value.si)
                _internal_arrows(sketch, frame, turned, y - 1.2, place + 1, roof=roof)


def _internal_arrows(
    sketch: Sketch, frame: Frame, value: Shown, y: float, place: int, *, roof: bool
) -> None:
    """Draw one internal pressure on both walls at the height ``y`` and under the roof."""
    x = frame.along(_UNDER_ROOF[place % 2])
    square = frame.off_roof(x)
    faces = [
        ("windward", (frame.left, y), (1.0, 0.0)),
        ("leeward", (frame.right, y), (-1.0, 0.0)),
        ("roof", (x, frame.roof(x)), (-square[0], -square[1])),
    ]
    for face, surface, inward in faces if roof else faces[:2]:
        gid = f"internal-{place + 1}-{face}"
        pressure_arrow(sketch, frame, surface, inward, value, gid=gid, dashed=place > 0)


def _facing(sketch: Sketch, x: float, y: float, value: Shown, place: int) -> None:
    """Draw an arrow seen end on: a dot comes out of the sheet, a cross goes into it."""
    sketch.disc(x, y, 1.7, gid=f"side-{place + 1}-{sense(value.si)}")
    if value.si < 0.0:
        sketch.disc(x, y, 0.5, fill=ACCENT)
        return
    for turn in (-1.2, 1.2):
        sketch.line((x - 1.2, y - turn), (x + 1.2, y + turn), ink=ACCENT, weight=0.9)


def _wind_arrow(sketch: Sketch, y: float) -> None:
    sketch.text(MARGIN, y, "wind")
    begin = MARGIN + text_width("wind") + 1.5
    tip = begin + 12.0
    outline = [(begin, y - 0.8), (tip - 3.0, y - 0.8), (tip - 3.0, y - 1.8), (tip, y)]
    outline += [(x, 2.0 * y - height) for x, height in reversed(outline[:-1])]
    sketch.area(outline, fill=PAPER, weight=0.9, gid="wind")


def _open_arrows(wind: Wind) -> list[str]:
    """Return what the open arrows of the figure are."""

    def drawn(values: Iterable[Value]) -> bool:
        return any(isinstance(value, Shown) and value.si for value in values)

    found = []
    if drawn(value for zone in wind.zones for value in zone.values[1:]):
        more = max(len(zone.values) for zone in wind.zones) > _TWO
        found.append(f"the roof's alternative {'2 and further' if more else '2'}")
    if drawn(one.value for one in wind.leeward[1:]):
        found.append("the further values of the leeward wall")
    if drawn(one.value for one in wind.internal if one.both):
        found.append("the internal pressure with the other sign")
    elif drawn(one.value for one in wind.internal[1:]):
        found.append("the further internal pressures")
    return found


def _legend(frame: Frame, wind: Wind) -> list[str]:
    """Return what a reader needs to know to read the arrows, and the sizes not dimensioned."""
    lengthened = any(frame.lengthened(value.si) for value, _ in wind.pressures())
    but = " but for the shortest" if lengthened else ""
    said = [f"Arrows toward a surface are positive, away from it negative; lengths to scale{but}."]
    if opened := _open_arrows(wind):
        said.append(f"Open arrows are {' and '.join(opened)}.")
    facing = {
        sense(one.value.si) for one in wind.side if isinstance(one.value, Shown) and one.value.si
    }
    if "away" in facing:
        said.append("A dot is an arrow toward the reader, away from the near side wall.")
    if "toward" in facing:
        said.append("A cross is an arrow away from the reader, toward the near side wall.")
    sizes = (("Eave height", wind.eave), ("Roof pitch", wind.roof.pitch))
    said += [f"{words} {value.label}." for words, value in sizes if value]
    if not frame.one_scale and wind.depth:
        said.append("Heights and depth are drawn to different scales.")
    step = every(len(wind.levels), LABELS)
    if step > 1:
        said.append(f"{ordinal_step(step).capitalize()} level is labelled.")
    above = [one.key for one in wind.levels if one.z.si > wind.wall * (1.0 + 1e-9)]
    if above:
        said.append(f"Above the eave, so without an arrow: {', '.join(above)}.")
    return [" ".join(said)]
