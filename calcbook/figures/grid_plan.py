"""The grid in plan: lines with their bubbles, spacings, and the outline they enclose."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.layout import difference, every, ordinal_step, spread
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import GREY, MARGIN, ROW, WIDTH, Sketch, shortened, text_width

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

NEEDS = ("grid_x", "x", "grid_y", "y")
TAKES = ("length_x", "length_y")

_BUBBLE = 3.6
_PITCH = 7.8
_DEEP = 110.0
_LEAST = 26.0
_LEFT = 20.0
_SAID_LINES = 12
_MOST = {"across": 18, "up": 22}


@dataclass(frozen=True)
class GridLine:
    """One grid line: its mark and its position as printed."""

    key: str
    position: Shown


@dataclass(frozen=True)
class Grid:
    """Both sets of lines in ascending order, and what could not be drawn, in words.

    ``outline`` is the plan's length across and up where it is given; else the outer lines are it.
    """

    across: tuple[GridLine, ...]
    up: tuple[GridLine, ...]
    outline: tuple[Shown | None, Shown | None]
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Grid:
    """Look up both sets of grid lines, and say which have no position."""
    left_out: list[str] = []
    across = _lines(statement, uses["grid_x"], uses["x"], left_out)
    up = _lines(statement, uses["grid_y"], uses["y"], left_out)
    outline = (
        _given(statement, uses, "length_x", left_out),
        _given(statement, uses, "length_y", left_out),
    )
    return Grid(across, up, outline, tuple(left_out))


def _given(
    statement: lookup.Record, uses: Mapping[str, Any], role: str, left_out: list[str]
) -> Shown | None:
    if role not in uses:
        return None
    length = lookup.quantity(statement, uses[role])
    if isinstance(length, Shown) and length.si > 0.0:
        return length
    why = length.why if isinstance(length, Missing) else f"{length.label} is no length to draw"
    left_out.append(f"Outline not drawn to '{uses[role]}': {why}.")
    return None


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the plan to one scale where it fits the sheet, to two with a note where not."""
    sketch = Sketch()
    grid = gather(statement, uses)
    notes = list(grid.left_out)
    if grid.across and grid.up:
        notes = [*_plan(sketch, grid), *notes]
    y = sketch.low - ROW if grid.across and grid.up else 0.0
    for note in notes:
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the grid in words: how many lines each way and how far apart."""
    grid = gather(statement, uses)
    parts = ["Grid in plan."]
    for way, lines in (("across", grid.across), ("up", grid.up)):
        if not lines:
            parts.append(f"No grid lines {way} the sheet.")
            continue
        said = lines if len(lines) <= _SAID_LINES else (lines[0], lines[-1])
        named = ", ".join(f"{line.key} at {line.position.label}" for line in said)
        parts.append(f"{len(lines)} line{'s' if len(lines) > 1 else ''} {way} the sheet: {named}.")
        widest = max(
            pairwise(lines),
            key=lambda pair: pair[1].position.si - pair[0].position.si,
            default=None,
        )
        spacing = widest and _spacing(*widest)
        if widest and spacing:
            label = Shown(spacing, widest[0].position.unit, 0.0).label
            parts.append(f"The largest spacing is {label}, {widest[0].key} to {widest[1].key}.")
    return " ".join([*parts, *_outlined(grid), *grid.left_out])


def _lines(
    statement: lookup.Record, schedule: str, name: str, left_out: list[str]
) -> tuple[GridLine, ...]:
    keys = lookup.rows(statement, schedule)
    if isinstance(keys, Missing):
        left_out.append(f"No grid is drawn: '{keys.name}': {keys.why}.")
        return ()
    lines = []
    for key, position in zip(keys, lookup.cells(statement, schedule, name), strict=True):
        if isinstance(position, Missing):
            left_out.append(f"Grid line {key} is not drawn: {position.why}.")
        else:
            lines.append(GridLine(key, position))
    return tuple(sorted(lines, key=lambda line: line.position.si))


def _spacing(lower: GridLine, upper: GridLine) -> str | None:
    if lower.position.unit != upper.position.unit:
        return None
    return difference(upper.position.text, lower.position.text)


def _length(lines: Sequence[GridLine]) -> float:
    return lines[-1].position.si - lines[0].position.si


def _scales(wide: float, deep: float, room: float) -> tuple[float, float]:
    """Return the scales across and up, mm of sheet per metre: one scale unless it cannot be."""
    most = [limit / size for limit, size in ((room, wide), (_DEEP, deep)) if size > 0.0]
    if not most:
        return 1.0, 1.0
    one = min(most)
    # A very long, narrow plan: the short way is stretched until its lines can be told apart.
    scale_x, scale_y = (max(one, _LEAST / size) if size > 0.0 else one for size in (wide, deep))
    return scale_x, scale_y


@dataclass(frozen=True)
class _Way:
    """One set of lines on the sheet: where each stands, the labels between, the overall one."""

    lines: tuple[GridLine, ...]
    places: tuple[float, ...]
    labels: tuple[str, ...]
    overall: str
    step: int


def _way(lines: tuple[GridLine, ...], begin: float, scale: float, most: int) -> _Way:
    start = lines[0].position.si
    places = tuple(begin + (line.position.si - start) * scale for line in lines)
    step = every(len(lines), most)
    pairs = pairwise(lines)
    labels = tuple(_spacing(*pair) or "" for pair in pairs) if step == 1 else ()
    # Of two lines the one spacing is already the overall length.
    overall = _spacing(lines[0], lines[-1]) if len(lines) > 2 else None  # noqa: PLR2004
    return _Way(lines, places, labels, overall or "", step)


def _plan(sketch: Sketch, grid: Grid) -> list[str]:
    """Draw the plan from its lower left corner; return what must be said below it."""
    spacings = [_spacing(*pair) or "" for pair in pairwise(grid.up)]
    overall = (_spacing(grid.up[0], grid.up[-1]) or "") if spacings else ""
    beside = max(map(text_width, spacings), default=0.0) + text_width(overall) + 12.5
    room = WIDTH - MARGIN - _LEFT - beside
    # The outline stands as far beyond the outer lines at one end as at the other.
    edges = [
        (length.si - _length(lines)) / 2.0 if length else 0.0
        for length, lines in zip(grid.outline, (grid.across, grid.up), strict=True)
    ]
    wide, deep = _length(grid.across), _length(grid.up)
    out = [max(0.0, edge) for edge in edges]
    scale_x, scale_y = _scales(wide + 2.0 * out[0], deep + 2.0 * out[1], room)
    left = _LEFT + (room - wide * scale_x) / 2.0
    across = _way(grid.across, left, scale_x, _MOST["across"])
    up = _way(grid.up, 0.0, scale_y, _MOST["up"])
    beyond = (out[0] * scale_x, out[1] * scale_y)
    _vertical_lines(sketch, across, -beyond[1], up.places[-1] + beyond[1])
    _horizontal_lines(sketch, up, across.places[0] - beyond[0], across.places[-1] + beyond[0])
    _outline(sketch, across.places, up.places, (edges[0] * scale_x, edges[1] * scale_y))
    return [*_remarks(across, up, one_scale=scale_x == scale_y), *_outlined(grid)]


def _outlined(grid: Grid) -> list[str]:
    """Return the lengths of the outline in words, where they are given."""
    ways = zip(grid.outline, ("across", "up"), strict=True)
    said = [f"{length.label} {way}" for length, way in ways if length]
    return [f"Outline of the plan {', '.join(said)}, centred on the grid."] if said else []


def _remarks(across: _Way, up: _Way, *, one_scale: bool) -> list[str]:
    unit = Shown("", across.lines[0].position.unit, 0.0).label.strip()
    said = [f"Spacings in {unit}."] if unit else []
    if not one_scale:
        said.append("The two ways are drawn to different scales.")
    for way, words in ((across, "across"), (up, "up")):
        if way.step > 1:
            said.append(
                f"Of the lines {words} the sheet, {ordinal_step(way.step)} is marked; "
                "the spacings stand in the schedule."
            )
    return [" ".join(said)] if said else []


def _outline(
    sketch: Sketch, xs: Sequence[float], ys: Sequence[float], edges: tuple[float, float]
) -> None:
    left, right, low, high = (
        xs[0] - edges[0],
        xs[-1] + edges[0],
        ys[0] - edges[1],
        ys[-1] + edges[1],
    )
    corners = ((left, low), (right, low), (right, high), (left, high), (left, low))
    sketch.line(*corners, weight=1.6, gid="outline")


def _bubble(sketch: Sketch, x: float, y: float, key: str) -> None:
    sketch.disc(x, y, _BUBBLE)
    sketch.text(x, y, shortened(key, 2.0 * _BUBBLE - 0.8), align="center", bold=True)


def _vertical_lines(sketch: Sketch, way: _Way, low: float, top: float) -> None:
    """Draw the lines running up the sheet: bubbles below, spacings above."""
    xs = way.places
    for x in xs:
        sketch.line((x, top + 4.0), (x, low - 5.0), weight=0.5, ink=GREY, dashed=True)
    marked = list(zip(way.lines, xs, strict=True))[:: way.step]
    places = spread([x for _, x in marked], [_PITCH] * len(marked), MARGIN, WIDTH - MARGIN)
    for (line, x), place in zip(marked, places, strict=True):
        sketch.line((x, low - 5.0), (place, low - 9.0), (place, low - 11.0), weight=0.5, ink=GREY)
        _bubble(sketch, place, low - 11.0 - _BUBBLE, line.key)
    middles = [(one + other) / 2.0 for one, other in pairwise(xs)]
    rooms = [text_width(label) + 2.0 for label in way.labels]
    high = top + 6.0
    if way.labels and sum(rooms) < WIDTH - 2.0 * MARGIN:
        places = spread(middles, rooms, MARGIN, WIDTH - MARGIN)
        for one, other, label, place in zip(xs, xs[1:], way.labels, places, strict=False):
            sketch.dimension((one, high), (other, high))
            sketch.text(place, high + 3.2, label, align="center")
        high += 8.5
    if way.overall:
        sketch.dimension((xs[0], high), (xs[-1], high))
        sketch.text((xs[0] + xs[-1]) / 2.0, high + 3.2, way.overall, align="center")


def _horizontal_lines(sketch: Sketch, way: _Way, left: float, right: float) -> None:
    """Draw the lines running across the sheet: bubbles at the left, spacings at the right."""
    ys = way.places
    for y in ys:
        sketch.line((right + 4.0, y), (left - 5.0, y), weight=0.5, ink=GREY, dashed=True)
    marked = list(zip(way.lines, ys, strict=True))[:: way.step]
    places = spread([y for _, y in marked], [_PITCH] * len(marked))
    for (line, y), place in zip(marked, places, strict=True):
        sketch.line(
            (left - 5.0, y), (left - 9.0, place), (left - 11.0, place), weight=0.5, ink=GREY
        )
        _bubble(sketch, left - 11.0 - _BUBBLE, place, line.key)
    middles = [(low + high) / 2.0 for low, high in pairwise(ys)]
    places = spread(middles, [ROW] * len(middles)) if way.labels else []
    for low, high, label, place in zip(ys, ys[1:], way.labels, places, strict=False):
        sketch.dimension((right + 6.0, low), (right + 6.0, high))
        sketch.text(right + 7.8, place, label)
    if way.overall:
        out = right + 10.0 + max(map(text_width, way.labels), default=0.0)
        sketch.dimension((out, ys[0]), (out, ys[-1]))
        sketch.text(out + 1.8, (ys[0] + ys[-1]) / 2.0, way.overall)
