"""A beam in elevation: supports and spans to scale, and where its loads act."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.beam_axis import Axis, held_words, place_axis, supports_of
from calcbook.figures.layout import every
from calcbook.figures.lookup import Missing, Shown, Value
from calcbook.figures.sketch import ACCENT, MARGIN, ROW, Sketch, text_width

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

NEEDS = ("supports", "x", "held", "span")
TAKES = (
    "hinges", "hinge", "strips", "strip_from", "strip_to", "ramp", "strip_loads", "lines",
    "line_from", "line_to", "line_load", "line_end", "points", "point", "force", "beams", "beam",
    "borne", "moments", "moment_at", "moment", "own", "own_load",
)  # fmt: skip

_HIGH = 6.0
_LEAST = 2.8
_LANE = 11.0
_FIRST = 1.6
_OVER_TURNS = 5.0
_ARROW = 5.0
_STEP = 9.0
_TURN = 2.8
_LISTED = 24


@dataclass(frozen=True)
class Block:
    """A load along the beam: its ends, its ramps, its size at either end in SI, what it is."""

    key: str
    left: float
    right: float
    ramp: float
    sizes: tuple[float, float]
    words: str

    @property
    def most(self) -> float:
        """Return the larger of its sizes, without sense."""
        return max(abs(size) for size in self.sizes)


@dataclass(frozen=True)
class Spot:
    """A load or moment at one place."""

    key: str
    x: float
    words: str
    up: bool = False


@dataclass(frozen=True)
class Loads:
    """What acts on the beam, in the order it is listed."""

    blocks: tuple[Block, ...]
    spots: tuple[Spot, ...]
    turns: tuple[Spot, ...]
    own: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Loads:
    """Look up what acts on the beam; what has no value is left out."""
    strips = _strips(statement, uses)
    return Loads(
        (*strips, *_lines(statement, uses)),
        (*_points(statement, uses), *_beams(statement, uses)),
        _spots(statement, uses, "moments", "moment_at", ["moment"]),
        _own(statement, uses),
    )


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the beam in words: supports with places, spans, and every load."""
    supports = supports_of(statement, uses)
    if isinstance(supports, Missing):
        return f"No beam is drawn: {supports.why}."
    named = ", ".join(f"{s.key} {held_words(s)} at {s.x.label}" for s in supports)
    loads = gather(statement, uses)
    each = [f"{load.key}: {load.words}" for load in _numbers(loads)]
    return " ".join([f"Elevation of the beam on {named}.", *(f"{w}." for w in (*loads.own, *each))])


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the beam with its loads above it and its spans below, and list the loads."""
    sketch = Sketch()
    supports = supports_of(statement, uses)
    if isinstance(supports, Missing):
        sketch.paragraph(MARGIN, 0.0, f"No beam is drawn: {supports.why}.")
        return sketch
    axis = place_axis(supports)
    loads = gather(statement, uses)
    top = _blocks(sketch, axis, loads)
    _spots_drawn(sketch, axis, loads, top)
    axis.supports(sketch)
    _turns(sketch, axis, loads)
    axis.beam(sketch)
    _hinges(sketch, axis, statement, uses)
    axis.spans(sketch, lookup.cells(statement, uses["supports"], uses["span"]))
    _list(sketch, loads)
    return sketch


# --- what acts ------------------------------------------------------------------------------


def _strips(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Block, ...]:
    table = str(uses.get("strips", ""))
    keys = _keys(statement, table)
    if not keys:
        return ()
    ends = [lookup.cells(statement, table, uses[r]) for r in ("strip_from", "strip_to", "ramp")]
    loads = [lookup.cells(statement, table, name) for name in uses.get("strip_loads", ())]
    found = []
    for n, key in enumerate(keys):
        places = [column[n] for column in ends]
        if all(isinstance(p, Shown) for p in places):
            a, b, r = (p.si for p in places if isinstance(p, Shown))
            each = [c[n] for c in loads]
            size = sum(v.si for v in each if isinstance(v, Shown))
            words = _worded(uses["strip_loads"], each)
            found.append(Block(key, a, b, r, (size, size), words))
    return tuple(found)


def _keys(statement: lookup.Record, table: str) -> tuple[str, ...]:
    """Return the keys of a schedule that may be left out, or have no rows."""
    keys = lookup.rows(statement, table) if table else ()
    return () if isinstance(keys, Missing) else keys


def _lines(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Block, ...]:
    table = str(uses.get("lines", ""))
    keys = _keys(statement, table)
    if not keys:
        return ()
    roles = ("line_from", "line_to", "line_load", "line_end")
    columns = [lookup.cells(statement, table, uses[r]) for r in roles]
    found = []
    for n, key in enumerate(keys):
        cells = [c[n] for c in columns]
        if not all(isinstance(c, Shown) for c in cells):
            continue
        a, b, w1, w2 = (c for c in cells if isinstance(c, Shown))
        words = w1.label if w1.text == w2.text else f"{w1.label} to {w2.label}"
        found.append(Block(key, a.si, b.si, 0.0, (w1.si, w2.si), words))
    return tuple(found)


def _points(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Spot, ...]:
    return _spots(statement, uses, "points", "point", [str(uses.get("force", ""))])


def _beams(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Spot, ...]:
    return _spots(statement, uses, "beams", "beam", list(uses.get("borne", ())))


def _spots(
    statement: lookup.Record, uses: Mapping[str, Any], role: str, at: str, values: Sequence[str]
) -> tuple[Spot, ...]:
    table = str(uses.get(role, ""))
    keys = _keys(statement, table)
    if not keys:
        return ()
    named = [str(uses[v]) if v in uses and role == "moments" else v for v in values]
    places = lookup.cells(statement, table, uses[at])
    columns = [lookup.cells(statement, table, name) for name in named]
    found = []
    for n, key in enumerate(keys):
        x = places[n]
        if isinstance(x, Shown):
            first = columns[0][n] if columns else None
            up = isinstance(first, Shown) and first.si < 0
            found.append(Spot(key, x.si, _worded(named, [c[n] for c in columns]), up))
    return tuple(found)


def _own(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[str, ...]:
    table = uses.get("own")
    if not table:
        return ()
    found = [c.label for c in lookup.cells(statement, table, uses["own_load"])
             if isinstance(c, Shown)]  # fmt: skip
    return (f"Own weight {', '.join(found)} along the beam is not drawn",) if found else ()


def _worded(names: Sequence[str], values: Sequence[Value]) -> str:
    """Return values with their names, those that are zero left out where another is not."""
    shown = [(n, v) for n, v in zip(names, values, strict=True) if isinstance(v, Shown)]
    some = [(n, v) for n, v in shown if v.si] or shown[:1]
    if len(names) == 1:
        return some[0][1].label if some else "no value"
    return ", ".join(f"{n.partition('_')[2] or n} {v.label}" for n, v in some) or "no value"


# --- drawing --------------------------------------------------------------------------------


def _numbers(loads: Loads) -> list[Block | Spot]:
    """Return every load in the order of its number, which begins at 1."""
    return [*loads.blocks, *loads.spots, *loads.turns]


def _number(loads: Loads, one: Block | Spot) -> str:
    return str(next(n for n, load in enumerate(_numbers(loads), 1) if load is one))


def _blocks(sketch: Sketch, axis: Axis, loads: Loads) -> float:
    """Draw the blocks in lanes, those that overlap above each other; return the height."""
    lanes: list[float] = []
    first = _OVER_TURNS if loads.turns else _FIRST
    most = max((block.most for block in loads.blocks), default=0.0) or 1.0
    for block in sorted(loads.blocks, key=lambda b: (b.left, b.right)):
        lane = next((n for n, end in enumerate(lanes) if block.left >= end - 1e-9), len(lanes))
        lanes[lane : lane + 1] = [block.right]
        base = first + lane * _LANE
        high = _block(sketch, axis, block, base, _HIGH / most)
        _block_number(sketch, axis, loads, block, base + high)
    return first + len(lanes) * _LANE


def _block(sketch: Sketch, axis: Axis, block: Block, base: float, per: float) -> float:
    """Draw a load to the scale of all, with arrows the way it acts; return its height.

    A small one keeps a height that arrows have room in.
    """
    left, right = axis.across(block.left), axis.across(block.right)
    ramp = block.ramp * axis.scale
    most = max(per * block.most, _LEAST)
    h1, h2 = (most * abs(size) / (block.most or 1.0) for size in block.sizes)
    outline = [(left, base), (left, base + h1), (right, base + h2), (right, base)]
    if ramp:
        high = base + h1
        outline = [(left, base), (left + ramp, high), (right - ramp, high), (right, base)]
    sketch.area(outline, edge=ACCENT, weight=0.8, gid=f"load-{block.key}")
    count = max(1, int((right - left) / _STEP))
    for step in range(count):
        part = (step + 0.5) / count
        x = left + part * (right - left)
        size = block.sizes[0] + part * (block.sizes[1] - block.sizes[0])
        rise = min(1.0, (x - left) / ramp, (right - x) / ramp) if ramp else 1.0
        tail, head = (x, base + most * rise * abs(size) / (block.most or 1.0)), (x, base)
        sketch.arrow(head if size < 0 else tail, tail if size < 0 else head, f"acts-{block.key}")
    return most


def _block_number(sketch: Sketch, axis: Axis, loads: Loads, block: Block, top: float) -> None:
    """Write the number of a block over it, beside the arrows of point loads."""
    words = _number(loads, block)
    x, half = axis.across((block.left + block.right) / 2.0), text_width(words) / 2.0
    for arrow in sorted(axis.across(spot.x) for spot in loads.spots):
        if abs(arrow - x) < half + 1.0:
            x = arrow + half + 1.5
    sketch.text(x, top + 2.0, words, align="center", ink=ACCENT)


def _spots_drawn(sketch: Sketch, axis: Axis, loads: Loads, top: float) -> None:
    """Draw point loads as arrows over everything else."""
    ends = [-1e9, -1e9]
    for spot in sorted(loads.spots, key=lambda s: s.x):
        x = axis.across(spot.x)
        level = 0 if x - ends[0] > ROW else 1 if x - ends[1] > ROW else 0
        ends[level] = x
        tail, head = (x, top + _ARROW + level * ROW), (x, 0.6)
        sketch.arrow(head if spot.up else tail, tail if spot.up else head, f"point-{spot.key}")
        words = _number(loads, spot)
        sketch.text(x, tail[1] + 2.4, words, align="center", ink=ACCENT, patch=True)


def _turns(sketch: Sketch, axis: Axis, loads: Loads) -> None:
    """Draw moments as arcs over the beam, with an arrow the way they turn."""
    for spot in loads.turns:
        x, sense = axis.across(spot.x), -1.0 if spot.up else 1.0
        turns = [math.pi * (0.95 - 0.75 * step / 16) for step in range(17)]
        rim = [(x + sense * _TURN * math.cos(a), _TURN * math.sin(a)) for a in turns]
        sketch.line(*rim, weight=0.9, ink=ACCENT, gid=f"moment-{spot.key}")
        sketch.arrow(rim[-1], (x + sense * _TURN * 1.05, 0.2), f"moment-{spot.key}-sense")
        right = x < (axis.left + axis.right) / 2.0
        side, align = (_TURN + 1.6, "left") if right else (-_TURN - 1.6, "right")
        sketch.text(x + side, 2.4, _number(loads, spot), align=align, ink=ACCENT)


def _hinges(sketch: Sketch, axis: Axis, statement: lookup.Record, uses: Mapping[str, Any]) -> None:
    if "hinges" not in uses or isinstance(lookup.rows(statement, uses["hinges"]), Missing):
        return
    for x in lookup.cells(statement, uses["hinges"], uses["hinge"]):
        if isinstance(x, Shown):
            sketch.disc(axis.across(x.si), 0.0, 1.1, gid="hinge")


def _list(sketch: Sketch, loads: Loads) -> None:
    """List what each number is, in words, under the picture."""
    y = sketch.low - ROW
    every_load = _numbers(loads)
    step = every(len(every_load), _LISTED)
    for n, load in list(enumerate(every_load, 1))[::step]:
        y = sketch.paragraph(MARGIN, y, f"{n} {load.key}: {load.words}")
    if loads.blocks:
        words = "Loads along the beam are to one scale; those too small for it of one height."
        y = sketch.paragraph(MARGIN, y, words)
    for words in loads.own:
        y = sketch.paragraph(MARGIN, y, f"{words}.")
