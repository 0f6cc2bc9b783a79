"""The building in elevation: its levels, their heights, and the storeys between them."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.layout import difference, every, ordinal_step, spread
from calcbook.figures.lookup import Missing, Shown, Value
from calcbook.figures.sketch import GREY, LIGHT, MARGIN, ROW, WIDTH, Sketch, shortened, text_width

if TYPE_CHECKING:
    from collections.abc import Mapping

NEEDS = ("levels", "elevation")
TAKES = ("storey", "use", "area")

_LABELS = 42
_SAID_LEVELS = 12
_TALL = 175.0
_STOREY = 14.0
_KEY_ROOM = 34.0
_HEIGHT_ROOM = 15.0


@dataclass(frozen=True)
class Level:
    """One level as printed: key, elevation, the storey below, and the optional use and area.

    ``storey`` is None where the height is to be the difference of the two printed elevations.
    """

    key: str
    elevation: Shown
    storey: Value | None
    use: str
    area: str


@dataclass(frozen=True)
class Ladder:
    """The levels from the lowest up, and what could not be drawn, in words."""

    levels: tuple[Level, ...]
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Ladder:
    """Look up the levels that have an elevation, and say which have none."""
    keys = lookup.rows(statement, uses["levels"])
    if isinstance(keys, Missing):
        return Ladder((), (f"No levels are drawn: {keys.why}.",))
    heights = lookup.cells(statement, uses["levels"], uses["elevation"])
    of_use = lookup.words(statement, uses["levels"], uses.get("use", "")) or ("",) * len(keys)
    areas = lookup.cells(statement, uses["levels"], uses.get("area", ""))
    storeys: tuple[Value | None, ...] = (None,) * len(keys)
    if "storey" in uses:
        storeys = lookup.cells(statement, uses["levels"], uses["storey"])
    levels, left_out = [], []
    for key, height, storey, use, area in zip(keys, heights, storeys, of_use, areas, strict=True):
        if isinstance(height, Missing):
            left_out.append(f"{key} is not drawn: {height.why}.")
        else:
            label = area.label if isinstance(area, Shown) else ""
            levels.append(Level(key, height, storey, use, label))
    levels.sort(key=lambda level: level.elevation.si)
    return Ladder(tuple(levels), tuple(left_out))


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the elevation, to scale, with key and use at the left and elevation at the right."""
    sketch = Sketch()
    ladder = gather(statement, uses)
    bottom = _building(sketch, ladder.levels) if ladder.levels else 0.0
    notes = list(ladder.left_out)
    if ladder.levels and not _has_ground(ladder.levels):
        notes.append("Elevations count from a datum far from the building: no ground is drawn.")
    step = every(len(ladder.levels), _LABELS)
    if step > 1:
        notes.append(f"{ordinal_step(step).capitalize()} level is labelled, from the top.")
    elif len(ladder.levels) > 1 and _storey(*ladder.levels[:2]):
        notes.insert(
            0, Shown("Storey heights in", ladder.levels[0].elevation.unit, 0.0).label + "."
        )
    y = bottom - ROW
    for note in notes:
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the elevation in words: how many levels, from where to where."""
    ladder = gather(statement, uses)
    if not ladder.levels:
        return " ".join(["Elevation of the building, empty.", *ladder.left_out])
    lowest, highest = ladder.levels[0], ladder.levels[-1]
    count = len(ladder.levels)
    parts = [f"Elevation of the building with {count} level{'s' if count > 1 else ''}:"]
    shown = ladder.levels if count <= _SAID_LEVELS else (lowest, highest)
    parts.append(", ".join(f"{one.key} at {one.elevation.label}" for one in shown) + ".")
    if count > 1:
        parts.append(f"The highest is {highest.key}, the lowest {lowest.key}.")
    storeys = [
        (upper.elevation.si - lower.elevation.si, height, lower, upper)
        for lower, upper in pairwise(ladder.levels)
        if (height := _storey(lower, upper))
    ]
    if storeys:
        _, height, lower, upper = max(storeys, key=lambda storey: storey[0])
        label = Shown(height, upper.elevation.unit, 0.0).label
        parts.append(f"The tallest storey is {label}, from {lower.key} to {upper.key}.")
    return " ".join([*parts, *ladder.left_out])


def _has_ground(levels: tuple[Level, ...]) -> bool:
    """Tell whether elevation zero is at or near the building, so that it is the ground."""
    low, high = levels[0].elevation.si, levels[-1].elevation.si
    reach = max(high - low, 6.0)
    return low <= reach and high >= -reach


def _building(sketch: Sketch, levels: tuple[Level, ...]) -> float:
    """Draw everything but the notes; return the height of the lowest mark."""
    ground = _has_ground(levels)
    low = min(levels[0].elevation.si, 0.0) if ground else levels[0].elevation.si
    high = max(levels[-1].elevation.si, 0.0) if ground else levels[-1].elevation.si
    tall = min(_TALL, max(40.0, _STOREY * len(levels))) if high > low else 0.0
    scale = tall / (high - low) if high > low else 0.0
    heights = [(level.elevation.si - low) * scale for level in levels]
    across = _columns(levels)
    left, right = across.left, across.right
    for height in heights:
        sketch.line((left, height), (right, height), weight=1.0)
    for side in (left, right):
        sketch.line((side, 0.0), (side, tall), weight=1.0)
    labelled = list(range(len(levels)))[:: -every(len(levels), _LABELS)][::-1]
    places = spread([heights[one] for one in labelled], [ROW] * len(labelled))
    for one, place in zip(labelled, places, strict=True):
        _label(sketch, levels[one], heights[one], place, across)
    if len(labelled) == len(levels):
        _storeys(sketch, levels, heights, left - 4.0)
    if ground:
        sketch.ground(left - 2.5, right + 2.0, -low * scale)
    return min(sketch.low, *places)


@dataclass(frozen=True)
class _Columns:
    """Where words and walls stand across the sheet, mm."""

    use: float
    words_end: float
    left: float
    right: float
    elevation: float


def _columns(levels: tuple[Level, ...]) -> _Columns:
    """Return where the walls stand so that the words at both sides have room."""
    keys = max(text_width(shortened(level.key, _KEY_ROOM), bold=True) for level in levels)
    uses = max(text_width(shortened(level.use, _KEY_ROOM)) for level in levels)
    heights = max(text_width(level.elevation.label) for level in levels)
    areas = max(text_width(level.area) for level in levels)
    use = MARGIN + keys + 3.0
    words_end = use + uses if uses else MARGIN + keys
    elevation = WIDTH - MARGIN - (areas + 4.0 if areas else 0.0)
    return _Columns(
        use, words_end, words_end + _HEIGHT_ROOM + 6.0, elevation - heights - 11.5, elevation
    )


def _label(sketch: Sketch, level: Level, height: float, place: float, across: _Columns) -> None:
    """Write a level's words at ``place``, leading to its line at ``height``."""
    sketch.text(MARGIN, place, shortened(level.key, _KEY_ROOM), bold=True)
    sketch.text(across.use, place, shortened(level.use, _KEY_ROOM), ink=GREY)
    begin = across.words_end + 1.5
    sketch.line(
        (begin, place),
        (begin + 1.0, place),
        (begin + 4.0, height),
        (across.left, height),
        ink=LIGHT,
    )
    right, out = across.right, across.right + 9.5
    sketch.line((right, height), (right + 2.0, height), (right + 5.0, place), (out, place))
    sketch.area([(out - 1.5, place), (out - 2.7, place + 1.8), (out - 0.3, place + 1.8)])
    sketch.text(across.elevation, place, level.elevation.label, align="right")
    sketch.text(WIDTH - MARGIN, place, level.area, align="right", ink=GREY)


def _storeys(
    sketch: Sketch, levels: tuple[Level, ...], heights: list[float], across: float
) -> None:
    """Draw the storey heights as exact differences of the printed elevations."""
    middles = [(low + high) / 2.0 for low, high in pairwise(heights)]
    places = spread(middles, [ROW - 0.4] * len(middles))
    for one, place in enumerate(places):
        height = _storey(levels[one], levels[one + 1])
        if height:
            sketch.dimension((across, heights[one]), (across, heights[one + 1]))
            sketch.text(across - 1.8, place, height, align="right")


def _storey(lower: Level, upper: Level) -> str | None:
    """Return the printed height of the storey between two levels, or None when not known."""
    if upper.storey is not None:
        return upper.storey.text if isinstance(upper.storey, Shown) else None
    if lower.elevation.unit != upper.elevation.unit:
        return None
    return difference(upper.elevation.text, lower.elevation.text)
