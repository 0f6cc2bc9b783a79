"""A column in elevation: what each level adds to it, and what it carries below each level."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook import typeset
from calcbook.figures import lookup
from calcbook.figures.layout import every, ordinal_step, spread
from calcbook.figures.lookup import Missing, Shown, Value
from calcbook.figures.sketch import (
    ACCENT,
    GREY,
    INK,
    LIGHT,
    MARGIN,
    PAPER,
    ROW,
    WIDTH,
    Sketch,
    shortened,
    text_width,
)

if TYPE_CHECKING:
    from collections.abc import Mapping

NEEDS = ("levels", "elevation", "added", "total")
TAKES = ()

_FILLS = (ACCENT, LIGHT, PAPER)
_KEY_ROOM = 26.0
_ARROW = 9.0
_LEVELS = 40
_TALL = 165.0
_STOREY = 13.0
_SAID_LEVELS = 10
_NONE = "none"


@dataclass(frozen=True)
class Rung:
    """One level: its elevation, the loads it adds and the loads in the column below it."""

    key: str
    elevation: Shown
    added: tuple[Value, ...]
    total: tuple[Value, ...]

    @property
    def sum_below(self) -> float:
        """The loads in the column below the level, together, in SI; missing ones left out."""
        return sum(one.si for one in self.total if isinstance(one, Shown))


@dataclass(frozen=True)
class Stack:
    """The levels from the highest down, the symbols of the loads, and what is left out."""

    rungs: tuple[Rung, ...]
    added: tuple[str, ...]
    total: tuple[str, ...]
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Stack:
    """Look up the levels with their loads, and say what is missing."""
    added, total = (tuple(lookup.numbered(uses, role)) for role in ("added", "total"))
    keys = lookup.rows(statement, uses["levels"])
    if isinstance(keys, Missing):
        return Stack((), added, total, (f"No levels are drawn: {keys.why}.",))
    heights = lookup.cells(statement, uses["levels"], uses["elevation"])
    columns = {n: lookup.cells(statement, uses["levels"], n) for n in (*added, *total)}
    rungs, left_out = [], []
    for row, (key, height) in enumerate(zip(keys, heights, strict=True)):
        if isinstance(height, Missing):
            left_out.append(f"{key} is not drawn: {height.why}.")
            continue
        for name in (*added, *total):
            found = columns[name][row]
            if isinstance(found, Missing):
                left_out.append(f"No {_symbol(name)} at {key}: {found.why}.")
        rungs.append(
            Rung(
                key,
                height,
                tuple(columns[n][row] for n in added),
                tuple(columns[n][row] for n in total),
            )
        )
    rungs.sort(key=lambda rung: -rung.elevation.si)
    return Stack(tuple(rungs), added, total, tuple(left_out))


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the column to the scale of its levels, its breadth to the scale of its load."""
    sketch = Sketch()
    stack = gather(statement, uses)
    notes = list(stack.left_out)
    if stack.rungs:
        notes = [*_column(sketch, stack), *notes]
    y = sketch.low - ROW if stack.rungs else 0.0
    for note in notes:
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the ladder in words: what the column carries below each level."""
    stack = gather(statement, uses)
    if not stack.rungs:
        return " ".join(["Column as a ladder, empty.", *stack.left_out])
    rungs = stack.rungs
    parts = [f"Column as a ladder with {len(rungs)} level{'s' if len(rungs) > 1 else ''}."]
    shown = rungs if len(rungs) <= _SAID_LEVELS else (rungs[0], rungs[-1])
    for rung in shown:
        said = [
            f"{_symbol(name)} {value.label}"
            for name, value in zip(stack.total, rung.total, strict=True)
            if isinstance(value, Shown)
        ]
        parts.append(f"Below {rung.key}: {', '.join(said) or 'nothing known'}.")
    return " ".join([*parts, *stack.left_out[:_SAID_LEVELS]])


def _symbol(name: str) -> str:
    return typeset.symbol(name, "plain")


@dataclass(frozen=True)
class _Room:
    """Where the columns of words end and the drawn column stands across the sheet, mm."""

    added: tuple[float, ...]
    axis: float
    half: float
    total: tuple[float, ...]


def _room(stack: Stack) -> _Room:
    """Return the places across the sheet: keys, loads added, the column, loads below."""
    keys = max(text_width(shortened(r.key, _KEY_ROOM), bold=True) for r in stack.rungs)
    wide = [
        [
            max(text_width(_text(r, which, n)) for r in stack.rungs)
            for n in range(len(getattr(stack, which)))
        ]
        for which in ("added", "total")
    ]
    for widths, names in zip(wide, (stack.added, stack.total), strict=True):
        widths[:] = [
            max(width, text_width(_symbol(name), bold=True))
            for width, name in zip(widths, names, strict=True)
        ]
    gap = 3.0
    ends, x = [], MARGIN + keys + 4.0
    for width in wide[0]:
        x += width
        ends.append(x)
        x += gap
    left = x + _ARROW
    right = WIDTH - MARGIN - sum(wide[1]) - gap * len(wide[1]) - 6.0
    totals, x = [], right + 6.0
    for width in wide[1]:
        x += width
        totals.append(x)
        x += gap
    return _Room(tuple(ends), (left + right) / 2.0, max(4.0, (right - left) / 2.0), tuple(totals))


def _text(rung: Rung, which: str, place: int) -> str:
    value: Value = getattr(rung, which)[place]
    return value.text.replace("-", "−") if isinstance(value, Shown) else _NONE  # noqa: RUF001


def _column(sketch: Sketch, stack: Stack) -> list[str]:
    """Draw the column and its words; return what must be said below it."""
    rungs = stack.rungs
    reach = rungs[0].elevation.si - rungs[-1].elevation.si
    tall = min(_TALL, max(20.0, _STOREY * len(rungs))) if reach > 0.0 else 0.0
    foot = 8.0  # the last level's load is shown on a short piece below it
    heights = [
        foot + (r.elevation.si - rungs[-1].elevation.si) * (tall / reach if reach > 0.0 else 0.0)
        for r in rungs
    ]
    room = _room(stack)
    largest = max((abs(r.sum_below) for r in rungs), default=0.0)
    for place, rung in enumerate(rungs):
        low = heights[place + 1] if place + 1 < len(rungs) else 0.0
        _bar(sketch, rung, (heights[place], low), room, largest)
    step = every(len(rungs), _LEVELS)
    labelled = list(range(len(rungs)))[::step]
    places = spread([-heights[n] for n in labelled], [ROW] * len(labelled))
    for n, y in zip(labelled, places, strict=True):
        _words(sketch, rungs[n], heights[n], -y, room)
    head = max(-places[0], heights[0]) + ROW + 2.0
    _heads(sketch, stack, head, room)
    return _notes(stack, step)


def _bar(
    sketch: Sketch, rung: Rung, ends: tuple[float, float], room: _Room, largest: float
) -> None:
    """Draw the load below a level as the breadth of the column, one part for each load."""
    left, (top, low) = room.axis - room.half, ends
    for place, value in enumerate(rung.total):
        if not isinstance(value, Shown) or largest == 0.0:
            continue
        right = left + abs(value.si) / largest * 2.0 * room.half
        corners = [(left, low), (right, low), (right, top), (left, top)]
        fill = _FILLS[min(place, len(_FILLS) - 1)]
        sketch.area(corners, fill=fill, weight=0.5, gid=f"below-{rung.key}-{place}")
        left = right


def _words(sketch: Sketch, rung: Rung, height: float, y: float, room: _Room) -> None:
    """Write a level's key and loads at ``y``, leading to its height on the column."""
    sketch.text(MARGIN, y, shortened(rung.key, _KEY_ROOM), bold=True)
    for place, end in enumerate(room.added):
        sketch.text(end, y, _text(rung, "added", place), align="right")
    left = room.axis - room.half
    start = room.added[-1] + 1.5
    sketch.line((start, y), (start + 1.5, y), (left - 2.5, height), (left, height), ink=GREY)
    sketch.area(
        [(left, height), (left - 2.2, height + 0.8), (left - 2.2, height - 0.8)],
        fill=INK,
        weight=0.3,
    )
    right = room.axis + room.half
    below = y - ROW / 2.0
    sketch.line(
        (room.axis - room.half, height), (right + 1.0, height), (right + 5.0, below), ink=LIGHT
    )
    for place, end in enumerate(room.total):
        sketch.text(end, below, _text(rung, "total", place), align="right")


def _heads(sketch: Sketch, stack: Stack, y: float, room: _Room) -> None:
    for names, ends in ((stack.added, room.added), (stack.total, room.total)):
        for name, end in zip(names, ends, strict=True):
            sketch.text(end, y, _symbol(name), align="right", bold=True)
    middle = (MARGIN + room.added[-1]) / 2.0
    sketch.text(middle, y + ROW, "added at the level", align="center", ink=GREY)
    right = room.total[-1]
    sketch.text(right, y + ROW, "in the column below it", align="right", ink=GREY)


def _notes(stack: Stack, step: int) -> list[str]:
    values = [v for r in stack.rungs for v in (*r.added, *r.total) if isinstance(v, Shown)]
    unit = Shown("", values[0].unit, 0.0).label.strip() if values else ""
    fills = ("dark", "grey", "white")
    parts = [
        f"{_symbol(name)} {fills[min(n, len(fills) - 1)]}" for n, name in enumerate(stack.total)
    ]
    said = f"Loads in {unit}, unfactored. " if unit else ""
    said += f"The breadth of the column is its load: {', '.join(parts)}."
    notes = [said]
    if step > 1:
        notes.append(f"{ordinal_step(step).capitalize()} level is labelled, from the top.")
    return notes
