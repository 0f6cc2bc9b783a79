"""The key plan: the grid with the tributary area of every column, each with its mark."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.layout import every, ordinal_step, spread
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import GREY, INK, MARGIN, PAPER, ROW, WIDTH, Sketch, text_width

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

NEEDS = (
    "grid_x", "x", "x_from", "x_to", "grid_y", "y", "y_from", "y_to", "marks", "at_x", "at_y"
)  # fmt: skip
TAKES = ("area", "alike")

_LEFT = 17.0
_DEEP = 120.0
_LEAST = 60.0
_BUBBLE = 3.6
_PITCH = 7.8
_TINT = "#dfe8f1"
_MOST = {"across": 18, "up": 22}
_SAID = 24
_NOTED = 8


@dataclass(frozen=True)
class Strip:
    """One grid line: its position, and from where to where it takes the floor, SI."""

    key: str
    at: float
    low: float
    high: float


@dataclass(frozen=True)
class Place:
    """One column in the plan: its mark, its lines, its area as printed; ``own`` or one alike."""

    mark: str
    across: Strip
    up: Strip
    area: str
    own: bool


@dataclass(frozen=True)
class Plan:
    """Both sets of lines, every column that has a place, and what is said in words."""

    across: tuple[Strip, ...]
    up: tuple[Strip, ...]
    places: tuple[Place, ...]
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Plan:
    """Look up the lines and the places of all marks, and say what cannot be drawn."""
    left_out: list[str] = []
    across = _strips(statement, uses, "x", left_out)
    up = _strips(statement, uses, "y", left_out)
    places = list(_places(statement, uses, across, up, left_out)) if across and up else []
    return Plan(across, up, tuple(places), (*left_out, *_twice(places)))


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the plan to scale with the tributary areas; small ones are left without words."""
    sketch = Sketch()
    plan = gather(statement, uses)
    notes = list(plan.left_out)
    if plan.across and plan.up:
        notes = [*_drawn(sketch, plan), *notes]
    y = sketch.low - ROW if plan.across and plan.up else 0.0
    more = len(notes) - _NOTED
    for note in [*notes[:_NOTED], *([f"And {more} more like these."] if more > 0 else [])]:
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the plan in words: where each mark stands and the area it takes."""
    plan = gather(statement, uses)
    own = [place for place in plan.places if place.own]
    parts = [f"Key plan with {len(own)} mark{'' if len(own) == 1 else 's'}."]
    for place in own[:_SAID]:
        area = f", {place.area}" if place.area else ""
        parts.append(f"{place.mark} at {place.across.key}-{place.up.key}{area}.")
    if len(own) > _SAID:
        parts.append(f"And {len(own) - _SAID} more.")
    return " ".join([*parts, *plan.left_out[:_NOTED]])


def _strips(
    statement: lookup.Record, uses: Mapping[str, Any], way: str, left_out: list[str]
) -> tuple[Strip, ...]:
    schedule = uses[f"grid_{way}"]
    keys = lookup.rows(statement, schedule)
    if isinstance(keys, Missing):
        left_out.append(f"No grid is drawn: '{schedule}': {keys.why}.")
        return ()
    roles = (way, f"{way}_from", f"{way}_to")
    columns = [lookup.cells(statement, schedule, uses[role]) for role in roles]
    strips = []
    for key, *cells in zip(keys, *columns, strict=True):
        known = [cell.si for cell in cells if isinstance(cell, Shown)]
        if len(known) == len(roles):
            strips.append(Strip(key, *known))
        else:
            why = next(cell.why for cell in cells if isinstance(cell, Missing))
            left_out.append(f"Grid line {key} is not drawn: {why}.")
    return tuple(sorted(strips, key=lambda strip: strip.at))


def _places(
    statement: lookup.Record,
    uses: Mapping[str, Any],
    across: Sequence[Strip],
    up: Sequence[Strip],
    left_out: list[str],
) -> list[Place]:
    marks = lookup.rows(statement, uses["marks"])
    if isinstance(marks, Missing):
        left_out.append(f"No columns are drawn: {marks.why}.")
        return []
    nothing = ("",) * len(marks)
    at_x, at_y, alike = (
        lookup.words(statement, uses["marks"], uses.get(role, "")) or nothing
        for role in ("at_x", "at_y", "alike")
    )
    areas = lookup.cells(statement, uses["marks"], uses.get("area", ""))
    xs, ys = ({strip.key: strip for strip in strips} for strips in (across, up))
    places = []
    for row, mark in enumerate(marks):
        area = areas[row]
        label = area.label if isinstance(area, Shown) else ""
        if at_x[row] in xs and at_y[row] in ys:
            places.append(Place(mark, xs[at_x[row]], ys[at_y[row]], label, own=True))
        else:
            left_out.append(f"{mark} is not drawn: there is no crossing {at_x[row]}-{at_y[row]}.")
        for token in re.split(r"[,;\s]+", alike[row].strip()):
            pair = _crossing(token, xs, ys)
            if pair:
                places.append(Place(mark, *pair, label, own=False))
            elif token:
                left_out.append(f"{mark} at {token} is not drawn: there is no such crossing.")
    return places


def _crossing(
    token: str, xs: Mapping[str, Strip], ys: Mapping[str, Strip]
) -> tuple[Strip, Strip] | None:
    """Return the lines of '6-A' or 'A-6', whatever hyphens their names have."""
    for place in (found.start() for found in re.finditer("-", token)):
        one, other = token[:place], token[place + 1 :]
        for across, up in ((one, other), (other, one)):
            if across in xs and up in ys:
                return xs[across], ys[up]
    return None


def _twice(places: Sequence[Place]) -> list[str]:
    """Return in words which columns stand at one place."""
    marks: dict[tuple[str, str], list[str]] = {}
    for place in places:
        marks.setdefault((place.across.key, place.up.key), []).append(place.mark)
    return [
        f"{' and '.join(found)} are at one place, {x}-{y}."
        for (x, y), found in marks.items()
        if len(found) > 1
    ]


@dataclass(frozen=True)
class _Scale:
    """From the plan to the sheet: mm of sheet for one metre, each way, and where it begins."""

    left: float
    x_low: float
    y_low: float
    across: float
    up: float

    def x(self, at: float) -> float:
        return self.left + (at - self.x_low) * self.across

    def y(self, at: float) -> float:
        return (at - self.y_low) * self.up


def _scale(plan: Plan) -> _Scale:
    x_low, x_high = min(s.low for s in plan.across), max(s.high for s in plan.across)
    y_low, y_high = min(s.low for s in plan.up), max(s.high for s in plan.up)
    wide, deep = max(x_high - x_low, 1e-9), max(y_high - y_low, 1e-9)
    room = WIDTH - _LEFT - MARGIN - 4.0
    one = min(room / wide, _DEEP / deep)
    across, up = max(one, _LEAST / wide), max(one, _LEAST / deep)
    across, up = min(across, room / wide), min(up, _DEEP / deep)
    return _Scale(_LEFT + (room - wide * across) / 2.0, x_low, y_low, across, up)


def _drawn(sketch: Sketch, plan: Plan) -> list[str]:
    """Draw areas, lines and words; return what must be said below."""
    scale = _scale(plan)
    unnamed = sum([not _area(sketch, place, scale) for place in plan.places])
    left, right = scale.x(scale.x_low), scale.x(max(s.high for s in plan.across))
    low, top = 0.0, scale.y(max(s.high for s in plan.up))
    _outline(sketch, left, right, low, top)
    steps = (
        _lines_up(sketch, [(s.key, scale.x(s.at)) for s in plan.across], low, top),
        _lines_across(sketch, [(s.key, scale.y(s.at)) for s in plan.up], left, right),
    )
    for place in plan.places:
        x, y = scale.x(place.across.at), scale.y(place.up.at)
        sketch.area(
            [(x - 0.8, y - 0.8), (x + 0.8, y - 0.8), (x + 0.8, y + 0.8), (x - 0.8, y + 0.8)],
            fill=INK if place.own else PAPER,
            weight=0.6,
        )
    said = ["Tinted: the column that a mark is worked for; white: columns alike."]
    if abs(scale.across - scale.up) > 1e-9 * scale.across:
        said.append("The two ways are drawn to different scales.")
    for way, step in zip(("across", "up"), steps, strict=True):
        if step > 1:
            said.append(f"Of the lines {way} the sheet, {ordinal_step(step)} is marked.")
    if unnamed:
        said.append(f"{unnamed} areas are too small for words; they stand in the schedule.")
    return [" ".join(said)]


def _area(sketch: Sketch, place: Place, scale: _Scale) -> bool:
    """Draw a tributary area with its mark and size; tell whether there was room for words."""
    left, right = scale.x(place.across.low), scale.x(place.across.high)
    low, top = scale.y(place.up.low), scale.y(place.up.high)
    corners = [(left, low), (right, low), (right, top), (left, top)]
    fill = _TINT if place.own else PAPER
    sketch.area(corners, fill=fill, edge=GREY, weight=0.5, gid=f"area-{place.mark}")
    y, room = scale.y(place.up.at), right - left - 1.6
    above, below = top - y, y - low
    tall = max(above, below) - 1.4
    if text_width(place.mark, bold=True) > room or tall < ROW:
        return False
    lines = [place.mark]
    if place.area and text_width(place.area) <= room and tall >= 2.0 * ROW:
        lines.append(place.area)
    start = y + 1.0 + ROW * (len(lines) - 0.5) if above >= below else y - 1.0 - ROW / 2.0
    ink = INK if place.own else GREY
    for n, words in enumerate(lines):
        centre = (left + right) / 2.0
        sketch.text(centre, start - n * ROW, words, align="center", bold=n == 0, ink=ink)
    return True


def _outline(sketch: Sketch, left: float, right: float, low: float, top: float) -> None:
    corners = ((left, low), (right, low), (right, top), (left, top), (left, low))
    sketch.line(*corners, weight=1.4, gid="outline")


def _bubble(sketch: Sketch, x: float, y: float, key: str) -> None:
    sketch.disc(x, y, _BUBBLE)
    sketch.text(x, y, key[:4], align="center", bold=True)


def _lines_up(sketch: Sketch, lines: Sequence[tuple[str, float]], low: float, top: float) -> int:
    """Mark the lines running up the sheet at their lower ends; return every how many."""
    for _, x in lines:
        sketch.line((x, low), (x, low - 4.0), weight=0.5, ink=GREY)
        sketch.line((x, top), (x, top + 3.0), weight=0.5, ink=GREY)
    step = every(len(lines), _MOST["across"])
    marked = lines[::step]
    spots = spread([x for _, x in marked], [_PITCH] * len(marked), MARGIN, WIDTH - MARGIN)
    for (key, x), spot in zip(marked, spots, strict=True):
        sketch.line((x, low - 4.0), (spot, low - 6.0), weight=0.5, ink=GREY)
        _bubble(sketch, spot, low - 6.0 - _BUBBLE, key)
    return step


def _lines_across(
    sketch: Sketch, lines: Sequence[tuple[str, float]], left: float, right: float
) -> int:
    """Mark the lines running across the sheet at their left ends; return every how many."""
    for _, y in lines:
        sketch.line((left, y), (left - 4.0, y), weight=0.5, ink=GREY)
        sketch.line((right, y), (right + 3.0, y), weight=0.5, ink=GREY)
    step = every(len(lines), _MOST["up"])
    marked = lines[::step]
    spots = spread([y for _, y in marked], [_PITCH] * len(marked))
    for (key, y), spot in zip(marked, spots, strict=True):
        sketch.line((left - 4.0, y), (left - 6.0, spot), weight=0.5, ink=GREY)
        _bubble(sketch, left - 6.0 - _BUBBLE, spot, key)
    return step
