"""A truss with the largest tension and compression of every member, by line and by number."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import MINUS, Missing, Shown
from calcbook.figures.sketch import GREY, INK, MARGIN, ROW, WIDTH, Sketch, text_width
from calcbook.figures.truss_frame import NEEDS as FRAME
from calcbook.figures.truss_frame import TAKES as MORE
from calcbook.figures.truss_frame import clear_of, frame_of
from calcbook.units import pretty_unit

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.figures.sketch import Point
    from calcbook.figures.truss_frame import Frame

NEEDS = (*FRAME, "envelope", "largest", "smallest")
TAKES = MORE

_WORDS = {
    "tension": "pulled only: thick",
    "compression": "pushed only: double",
    "both": "pulled and pushed: double and dashed",
    "zero": "no force: thin",
}
_TALL = 50.0  # a lower truss has no room for its numbers, mm
_ALONG = (0.5, 0.36, 0.64, 0.26, 0.74)  # where on a member its number may stand


@dataclass(frozen=True)
class Bar:
    """A member with its largest tension and compression as printed."""

    key: str
    tension: str
    compression: str

    @property
    def sense(self) -> str:
        """Whether it is pulled, pushed, both or neither."""
        if self.tension and self.compression:
            return "both"
        return "tension" if self.tension else "compression" if self.compression else "zero"

    @property
    def words(self) -> tuple[str, ...]:
        """What stands beside it, a line for each sense."""
        found = (
            f"T {self.tension}" * bool(self.tension),
            f"C {self.compression}" * bool(self.compression),
        )
        return tuple(text for text in found if text) or ("0",)


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> dict[str, Bar]:
    """Look up the forces by member; one without a value is left out."""
    keys = lookup.rows(statement, uses["envelope"])
    if isinstance(keys, Missing):
        return {}
    columns = [lookup.cells(statement, uses["envelope"], uses[r]) for r in ("largest", "smallest")]
    return {
        key: Bar(
            key,
            most.text if most.si > 0 else "",
            least.text.lstrip(MINUS) if least.si < 0 else "",
        )
        for key, most, least in zip(keys, *columns, strict=True)
        if isinstance(most, Shown) and isinstance(least, Shown)
    }  # fmt: skip


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the members and their forces in words."""
    frame = frame_of(statement, uses)
    bars = gather(statement, uses)
    if isinstance(frame, Missing) or not bars:
        why = frame.why if isinstance(frame, Missing) else "the members have no forces"
        return f"No member forces are drawn: {why}."
    said = []
    for bar in bars.values():
        parts = [f"tension {bar.tension}"] * bool(bar.tension)
        parts += [f"compression {bar.compression}"] * bool(bar.compression)
        said.append(f"{bar.key} {' and '.join(parts) or 'no force'}")
    return f"Largest forces of the members: {'; '.join(said)}."


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw every member by a line that says its sense, with its numbers beside it."""
    sketch = Sketch()
    frame = frame_of(statement, uses, least=_TALL)
    bars = gather(statement, uses)
    if isinstance(frame, Missing) or not bars:
        sketch.paragraph(MARGIN, 0.0, describe(statement, uses))
        return sketch
    for member in frame.members:
        sense = bars[member[0]].sense if member[0] in bars else "zero"
        _member(sketch, frame.ends(member), sense, f"member-{member[0]}")
    frame.supports(sketch)
    for x, y in frame.joints.values():
        sketch.disc(x, y, 0.8)
    listed = _numbers(sketch, frame, bars)
    frame.names(sketch)
    column = lookup.column(statement, uses["envelope"], uses["largest"]) or {}
    unit = pretty_unit(str(column.get("unit", "")))
    _key(sketch, {bar.sense for bar in bars.values()}, listed, unit)
    if frame.raised > 1.0:
        words = f"Drawn {frame.raised:.1f} times as high as it is."
        sketch.text(MARGIN, sketch.low - ROW / 2.0, words, ink=GREY)
    return sketch


def _member(sketch: Sketch, ends: tuple[Point, Point], sense: str, gid: str) -> None:
    """Draw one member: thick, double, double and dashed, or thin."""
    if sense in ("tension", "zero"):
        sketch.line(*ends, weight=2.0 if sense == "tension" else 0.5, gid=gid)
        return
    (x1, y1), (x2, y2) = ends
    long = math.dist(*ends) or 1.0
    side = (-0.55 * (y2 - y1) / long, 0.55 * (x2 - x1) / long)
    for sign in (1.0, -1.0):
        a = (x1 + sign * side[0], y1 + sign * side[1])
        b = (x2 + sign * side[0], y2 + sign * side[1])
        sketch.line(a, b, weight=0.8, dashed=sense == "both", gid=gid)


def _numbers(sketch: Sketch, frame: Frame, bars: Mapping[str, Bar]) -> list[Bar]:
    """Write each member's numbers on it, clear of the others; return those without room."""
    taken: list[tuple[float, float, float]] = []
    for x, y in frame.joints.values():
        taken.append((x, y, 1.5))
    left = []
    for member in frame.members:
        bar = bars.get(member[0])
        if bar is None:
            continue
        (x1, y1), (x2, y2) = frame.ends(member)
        wide = max(text_width(words) for words in bar.words)
        steep = abs(y2 - y1) > abs(x2 - x1)
        room = wide + 2.0 < abs(x2 - x1) or (steep and abs(y2 - y1) > 2.5 * ROW)
        places = [(x1 + part * (x2 - x1), y1 + part * (y2 - y1)) for part in _ALONG]
        spot = next((p for p in places if room and _fits(taken, p, bar.words)), None)
        if spot is None:
            left.append(bar)
            continue
        for n, words in enumerate(bar.words):
            sketch.text(
                spot[0], _line_at(spot[1], n, len(bar.words)), words, align="center", patch=True
            )
    return left


def _line_at(middle: float, number: int, count: int) -> float:
    return middle + (ROW - 0.9) * ((count - 1) / 2.0 - number)


def _fits(taken: list[tuple[float, float, float]], at: Point, words: tuple[str, ...]) -> bool:
    """Whether all lines of words fit at a place; they are noted if they do."""
    tried = list(taken)
    for n, text in enumerate(words):
        if not clear_of(tried, at[0], _line_at(at[1], n, len(words)), text):
            return False
    taken[:] = tried
    return True


def _key(sketch: Sketch, senses: set[str], listed: list[Bar], unit: str) -> None:
    """Say what the lines are, and the numbers of members that have no room for them."""
    y = sketch.low - ROW
    x = MARGIN
    for sense, words in _WORDS.items():
        if sense not in senses:
            continue
        if x + 11.0 + text_width(words) > WIDTH - MARGIN:
            x, y = MARGIN, y - ROW
        _member(sketch, ((x, y), (x + 9.0, y)), sense, f"key-{sense}")
        sketch.text(x + 11.0, y, words, ink=GREY)
        x += 16.0 + text_width(words)
    y -= ROW
    sketch.text(MARGIN, y, f"T largest tension, C largest compression, {unit}; 0 no force", ink=INK)
    if listed:
        each = "; ".join(f"{bar.key} {', '.join(bar.words)}" for bar in listed)
        sketch.paragraph(MARGIN, y - ROW, f"Members without room: {each}.", ink=INK)
