"""Pressure over height: velocity pressure and wall pressure, level by level."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.layout import every, ordinal_step, spread
from calcbook.figures.lookup import Missing, Shown, Value
from calcbook.figures.sketch import (
    ACCENT,
    GREY,
    INK,
    LIGHT,
    MARGIN,
    ROW,
    WIDTH,
    Sketch,
    shortened,
    text_width,
)

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

NEEDS = ("levels", "z", "q")
TAKES = ("p", "h")

_TALL = 150.0
_LABELS = 36
_KEY_ROOM = 30.0
_COLUMN = 29.0
_NONE = "none"


@dataclass(frozen=True)
class Row:
    """One level: its height, and the pressures there as printed or why they are missing."""

    key: str
    z: Shown
    pressures: tuple[Value, ...]


@dataclass(frozen=True)
class Profile:
    """The rows from the lowest up, one or two curves, the mean roof height, and the rest."""

    rows: tuple[Row, ...]
    curves: tuple[str, ...]
    h: Value | None
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Profile:
    """Look up heights and pressures, and say what is missing."""
    h = lookup.quantity(statement, uses["h"]) if "h" in uses else None
    left_out = [f"Mean roof height not drawn: {h.why}."] if isinstance(h, Missing) else []
    keys = lookup.rows(statement, uses["levels"])
    curves = ("velocity pressure", "windward pressure")[: 2 if "p" in uses else 1]
    if isinstance(keys, Missing):
        return Profile((), curves, h, (f"No levels are drawn: {keys.why}.", *left_out))
    heights = lookup.cells(statement, uses["levels"], uses["z"])
    columns = [
        lookup.cells(statement, uses["levels"], uses[role]) for role in ("q", "p")[: len(curves)]
    ]
    rows = []
    for key, z, *pressures in zip(keys, heights, *columns, strict=True):
        if isinstance(z, Missing):
            left_out.append(f"{key} is not drawn: {z.why}.")
            continue
        rows.append(Row(key, z, tuple(pressures)))
        for curve, pressure in zip(curves, pressures, strict=True):
            if isinstance(pressure, Missing):
                left_out.append(f"No {curve} at {key}: {pressure.why}.")
    rows.sort(key=lambda row: row.z.si)
    return Profile(tuple(rows), curves, h, tuple(left_out))


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the profile in words: for each curve the largest value and its level."""
    profile = gather(statement, uses)
    parts = ["Pressure over height, z upward."]
    for index, curve in enumerate(profile.curves):
        found = [
            (pressure, row)
            for row in profile.rows
            if isinstance(pressure := row.pressures[index], Shown)
        ]
        if not found:
            parts.append(f"No {curve}.")
            continue
        (low, low_row), (high, high_row) = found[0], found[-1]
        if len(found) > 1:
            parts.append(
                f"The {curve} is {low.label} at {low_row.key} and {high.label} at {high_row.key}."
            )
        largest, row = max(found, key=lambda pair: abs(pair[0].si))
        parts.append(f"Largest {curve}: {largest.label} at {row.key}, height {row.z.label}.")
    if isinstance(profile.h, Shown):
        parts.append(f"Mean roof height {profile.h.label}.")
    return " ".join([*parts, *profile.left_out])


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the profile between a table of heights and a table of the pressures."""
    sketch = Sketch()
    profile = gather(statement, uses)
    y = 0.0
    notes = list(profile.left_out)
    if profile.rows:
        notes.insert(0, _profile(sketch, profile))
        y = sketch.low - ROW
    for note in notes:
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


@dataclass(frozen=True)
class _Frame:
    """Where things stand across the sheet, mm, and how pressures and heights map onto it."""

    z_edge: float
    left: float
    right: float
    columns: tuple[float, ...]
    zero: float
    per_pascal: float
    per_metre: float
    ground: float

    def across(self, pressure: float) -> float:
        return self.zero + pressure * self.per_pascal

    def up(self, height: float) -> float:
        return (height - self.ground) * self.per_metre


def _frame(profile: Profile) -> _Frame:
    key_room = max(text_width(shortened(row.key, _KEY_ROOM)) for row in profile.rows)
    z_room = max(text_width(row.z.text) for row in profile.rows)
    z_edge = MARGIN + max(key_room, text_width("Level")) + 4.0 + max(z_room, text_width("z, m"))
    columns = tuple(
        WIDTH - MARGIN - _COLUMN * place for place in reversed(range(len(profile.curves)))
    )
    left, right = z_edge + 7.0, columns[0] - _COLUMN + 2.0
    values = [one.si for row in profile.rows for one in row.pressures if isinstance(one, Shown)]
    least, most = min([0.0, *values]), max([0.0, *values])
    per_pascal = (right - left - 6.0) / (most - least) if most > least else 0.0
    heights = [row.z.si for row in profile.rows]
    if isinstance(profile.h, Shown):
        heights.append(profile.h.si)
    low, high = min([0.0, *heights]), max([0.0, *heights])
    tall = min(_TALL, max(52.0, 12.0 * len(profile.rows)))
    per_metre = tall / (high - low) if high > low else 0.0
    zero = left + 3.0 - least * per_pascal
    return _Frame(z_edge, left, right, columns, zero, per_pascal, per_metre, low)


def _profile(sketch: Sketch, profile: Profile) -> str:
    """Draw the rows, the axes and the curves; return what must be said below them."""
    frame = _frame(profile)
    step = every(len(profile.rows), _LABELS)
    labelled = profile.rows[::-step][::-1]
    heights = [frame.up(row.z.si) for row in labelled]
    places = spread(heights, [ROW] * len(heights))
    top = max(places[-1], frame.up(max(row.z.si for row in profile.rows)))
    if isinstance(profile.h, Shown):
        top = max(top, frame.up(profile.h.si) + 3.0)
    for row, height, place in zip(labelled, heights, places, strict=True):
        _row(sketch, frame, row, height, place)
    sketch.ground(frame.left, frame.right, frame.up(0.0))
    sketch.line((frame.zero, frame.up(frame.ground)), (frame.zero, top + 2.0), weight=0.8)
    if isinstance(profile.h, Shown):
        _roof_height(sketch, frame, profile.h)
    for index in range(len(profile.curves)):
        _curve(sketch, frame, profile.rows, index)
    _headings(sketch, frame, profile, top + 7.0)
    words = "Pressures are to scale from the vertical line, which is zero."
    return words if step == 1 else f"{words} {ordinal_step(step).capitalize()} level is labelled."


def _row(sketch: Sketch, frame: _Frame, row: Row, height: float, place: float) -> None:
    sketch.text(MARGIN, place, shortened(row.key, _KEY_ROOM))
    sketch.text(frame.z_edge, place, row.z.text, align="right")
    first = text_width(row.pressures[0].text) if isinstance(row.pressures[0], Shown) else 7.0
    ends = ((frame.z_edge + 1.5, place), (frame.left, height))
    sketch.line(*ends, (frame.right, height), (frame.right + 4.0, place), ink=LIGHT, weight=0.5)
    sketch.line(
        (frame.right + 4.0, place), (frame.columns[0] - first - 1.5, place), ink=LIGHT, weight=0.5
    )
    for edge, pressure in zip(frame.columns, row.pressures, strict=True):
        if isinstance(pressure, Shown):
            sketch.text(edge, place, pressure.text, align="right")
        else:
            sketch.text(edge, place, _NONE, align="right", ink=GREY)


def _roof_height(sketch: Sketch, frame: _Frame, h: Shown) -> None:
    y = frame.up(h.si)
    ends = ((frame.left, y), (frame.right, y))
    sketch.line(*ends, weight=1.0, dashed=True, gid="mean-roof-height")
    begin = frame.zero if frame.zero < (frame.left + frame.right) / 2.0 else frame.left
    sketch.text(begin + 1.5, y + 2.4, f"mean roof height {h.label}", patch=True)


def _curve(sketch: Sketch, frame: _Frame, rows: Sequence[Row], index: int) -> None:
    """Draw one curve: markers at the levels, joined where neighbours both have a value."""
    before = None
    for row in rows:
        pressure = row.pressures[index]
        if isinstance(pressure, Missing):
            before = None
            continue
        here = (frame.across(pressure.si), frame.up(row.z.si))
        if before:
            sketch.line(before, here, ink=(GREY, ACCENT)[index], weight=0.9, dashed=index == 0)
        before = here
    for row in rows:
        pressure = row.pressures[index]
        if isinstance(pressure, Shown):
            _marker(sketch, frame.across(pressure.si), frame.up(row.z.si), index)


def _marker(sketch: Sketch, x: float, y: float, index: int) -> None:
    if index == 0:
        sketch.disc(x, y, 1.0)
    else:
        corners = [(x - 0.9, y - 0.9), (x + 0.9, y - 0.9), (x + 0.9, y + 0.9), (x - 0.9, y + 0.9)]
        sketch.area(corners, fill=ACCENT, edge=ACCENT)


def _headings(sketch: Sketch, frame: _Frame, profile: Profile, y: float) -> None:
    sketch.text(MARGIN, y, "Level", ink=GREY)
    sketch.text(
        frame.z_edge, y, _headed("z", [row.z for row in profile.rows]), align="right", ink=GREY
    )
    for index, edge in enumerate(frame.columns):
        words = _headed(
            ("velocity", "windward")[index], [row.pressures[index] for row in profile.rows]
        )
        sketch.text(edge, y, words, align="right", ink=(INK, ACCENT)[index])
        _marker(sketch, edge - text_width(words) - 2.5, y, index)


def _headed(words: str, values: Sequence[Value]) -> str:
    units = [Shown("", one.unit, 0.0).label.strip() for one in values if isinstance(one, Shown)]
    return f"{words}, {units[0]}" if units and units[0] else words
