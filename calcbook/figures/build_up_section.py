"""Sections through build-ups of floors, roofs and walls, to one scale, with every layer's load."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from calcbook.figures.build_up_values import BuildUp, Layer, Sections, gather
from calcbook.figures.layout import spread
from calcbook.figures.lookup import Shown
from calcbook.figures.sketch import (
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
    from collections.abc import Mapping, Sequence

    from calcbook.figures import lookup
    from calcbook.figures.sketch import Point

NEEDS = ("build_ups", "load", "layers", "layer_of", "thickness", "weight")
TAKES = ("title", "surface", "least", "layer", "part", "certain", "partitions")

_SCALES = (5, 10, 20, 50, 100, 200)
_WIDE = 42.0
_WORDS = 52.0
_THICKNESS = 112.0
_WEIGHT = 134.0
_GAP = 4.0
_TALL = 190.0
_TALLEST = 30.0
_WALL = 3 * ROW
_SELF = "#dddddd"
_LONG_ENOUGH = 1200


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw each build-up: its section at the left, and its layers by name at the right."""
    sketch = Sketch()
    found = gather(statement, uses)
    scale = _scale(found.build_ups)
    drawn, notes = _fitting(found, scale)
    y = 0.0
    for one in drawn:
        y = _build_up(sketch, one, y, scale) - _GAP
    if drawn:
        notes.insert(0, _key(drawn, scale))
    for note in notes:
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the sections in words: every build-up with its load and its layers."""
    found = gather(statement, uses)
    if not found.build_ups:
        return " ".join(["Sections through build-ups, empty.", *found.left_out])
    count = len(found.build_ups)
    said = [f"Sections to scale through {count} build-up{'s' if count > 1 else ''}."]
    for place, one in enumerate(found.build_ups):
        words = _said(one)
        if len(" ".join([*said, words])) > _LONG_ENOUGH:
            said.append(f"{count - place} more, with layers as listed in the schedule.")
            break
        said.append(words)
    told = len(" ".join(said))
    notes = [note for note in found.left_out if (told := told + len(note)) < _LONG_ENOUGH]
    return " ".join([*said, *notes])


def _said(one: BuildUp) -> str:
    layers = "; ".join(", ".join([layer.words, *_figures(layer)]) for layer in one.layers)
    begin = "from outside" if one.upright else "from the top"
    name = f"{one.key} {one.title}".strip()
    load = f", {one.load.label}" if isinstance(one.load, Shown) else ""
    return f"{name}{load}, {begin}: {layers}."


def _figures(layer: Layer) -> list[str]:
    thick = [layer.thickness.label] if layer.depth and isinstance(layer.thickness, Shown) else []
    return thick + ([layer.weight.label] if isinstance(layer.weight, Shown) else [])


# --- how large -------------------------------------------------------------------------------


def _scale(build_ups: Sequence[BuildUp]) -> int:
    """Return the largest scale, as 1:n, at which every section and the sheet have room.

    Where the words alone fill the sheet a smaller scale would not help.
    """
    least = sum(_height(one, math.inf) for one in build_ups)
    for scale in _SCALES:
        walls = [one.depth for one in build_ups if one.upright]
        others = [one.depth for one in build_ups if not one.upright]
        fits = (
            max(walls, default=0.0) * 1e3 / scale <= _WIDE
            and max(others, default=0.0) * 1e3 / scale <= _TALLEST
            and sum(_height(one, scale) for one in build_ups) <= max(_TALL, least)
        )
        if fits:
            return scale
    return _SCALES[-1]


def _height(one: BuildUp, scale: float) -> float:
    """Return the room of one build-up on the sheet, mm, heading and gap included."""
    stack = _WALL if one.upright else one.depth * 1e3 / scale
    return ROW + max(stack, ROW * len(one.layers)) + 1.0 + _GAP


def _fitting(found: Sections, scale: int) -> tuple[list[BuildUp], list[str]]:
    """Return the build-ups there is room for, and what is left out, in words."""
    drawn: list[BuildUp] = []
    room = _TALL
    for one in found.build_ups:
        room -= _height(one, scale)
        if room < 0.0 and drawn:
            break
        drawn.append(one)
    notes = list(found.left_out)
    rest = [one.key for one in found.build_ups[len(drawn) :]]
    if rest:
        more = f" and {len(rest) - 1} more" if len(rest) > 1 else ""
        notes.insert(0, f"{rest[0]}{more} not drawn: the sheet is full.")
    shown = 6
    if len(notes) > shown:
        notes = [*notes[:shown], f"{len(notes) - shown} more are not drawn as they should be."]
    return drawn, notes


def _key(drawn: Sequence[BuildUp], scale: int) -> str:
    parts = {layer.part for one in drawn for layer in one.layers}
    marks = {layer.certain for one in drawn for layer in one.layers}
    words = f"Sections 1:{scale} on a sheet {WIDTH:g} mm wide."
    if "self" in parts:
        words += " Filled grey: self-weight."
    if "yes" in marks:
        words += " Certain: counts toward the least load."
    if any(one.surface == "pitched" for one in drawn):
        words += " A build-up on a slope is drawn square to it; weights are per area of plan."
    return words


# --- one build-up ----------------------------------------------------------------------------


def _build_up(sketch: Sketch, one: BuildUp, top: float, scale: int) -> float:
    """Draw one build-up below the height ``top``; return the height of its lowest mark."""
    y = top - ROW / 2.0
    right = _totals(one)
    sketch.text(WIDTH - MARGIN, y, right, align="right", bold=True)
    room = WIDTH - 2 * MARGIN - text_width(right, bold=True) - 6.0
    key = shortened(one.key, room / 2.0)
    sketch.text(MARGIN, y, key, bold=True)
    begin = MARGIN + text_width(key, bold=True) + 3.0
    sketch.text(begin, y, shortened(one.title, MARGIN + room - begin))
    sketch.line((MARGIN, top - ROW), (WIDTH - MARGIN, top - ROW), weight=0.4, ink=LIGHT)
    down = top - ROW - 1.0
    if one.upright:
        return _wall(sketch, one, down, scale)
    return _stack(sketch, one, down, scale)


def _totals(one: BuildUp) -> str:
    words = one.load.label if isinstance(one.load, Shown) else "no load"
    if isinstance(one.least, Shown):
        words += f", least {one.least.label}"
    return words


def _stack(sketch: Sketch, one: BuildUp, top: float, scale: int) -> float:
    """Draw level layers one under the other; leaders run to their words."""
    y, centres = top, []
    for number, layer in enumerate(one.layers, 1):
        tall = layer.depth * 1e3 / scale
        if tall:
            box = [(MARGIN, y), (_WIDE, y), (_WIDE, y - tall), (MARGIN, y - tall)]
            _fill(sketch, box, layer, f"layer-{one.key}-{number}")
        elif not layer.spread:
            sketch.line((MARGIN, y), (_WIDE, y), weight=1.6)
        centres.append(y - tall / 2.0)
        y -= tall
    places = [-p for p in spread([-c for c in centres], [ROW] * len(centres), low=-top)]
    for layer, centre, place in zip(one.layers, centres, places, strict=True):
        if not layer.spread:
            ends = (_WIDE, centre), (_WIDE + 3.0, centre), (_WORDS - 2.5, place)
            sketch.line(*ends, (_WORDS - 1.0, place), weight=0.5, ink=GREY)
        _row(sketch, layer, place)
    return min(y, places[-1] - ROW / 2.0)


def _wall(sketch: Sketch, one: BuildUp, top: float, scale: int) -> float:
    """Draw upright layers side by side, outside at the left; a dot in each leads to its words."""
    tall = max(_WALL, ROW * len(one.layers))
    places = [top - ROW * (row + 0.5) for row in range(len(one.layers))]
    x, middles = MARGIN, []
    for number, layer in enumerate(one.layers, 1):
        wide = layer.depth * 1e3 / scale
        if wide:
            box = [(x, top), (x + wide, top), (x + wide, top - tall), (x, top - tall)]
            _fill(sketch, box, layer, f"layer-{one.key}-{number}")
        elif not layer.spread:
            sketch.line((x, top), (x, top - tall), weight=1.6)
        middles.append(x + wide / 2.0)
        x += wide
    for layer, middle, place in zip(one.layers, middles, places, strict=True):
        if not layer.spread:
            sketch.line((middle, place), (_WORDS - 1.0, place), weight=0.5, ink=GREY)
            sketch.disc(middle, place, 0.45, fill=INK)
        _row(sketch, layer, place)
    return top - tall


def _fill(sketch: Sketch, box: Sequence[Point], layer: Layer, gid: str) -> None:
    sketch.area(box, fill=_SELF if layer.part == "self" else PAPER, gid=gid)


def _row(sketch: Sketch, layer: Layer, y: float) -> None:
    """Write a layer's words, thickness and weight on one height."""
    thick = layer.thickness.label if layer.depth and isinstance(layer.thickness, Shown) else ""
    heavy = layer.weight.label if isinstance(layer.weight, Shown) else "no weight"
    room = _THICKNESS - text_width(thick) - 2.0 - _WORDS
    sketch.text(_WORDS, y, shortened(layer.words, room))
    sketch.text(_THICKNESS, y, thick, align="right")
    sketch.text(_WEIGHT, y, heavy, align="right")
    mark = "certain" if layer.certain == "yes" else layer.note
    sketch.text(WIDTH - MARGIN, y, mark, align="right", ink=GREY)
