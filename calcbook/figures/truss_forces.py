"""A truss with the largest tension and compression of every member, by line and by number.

The truss keeps its proportions. Forces stand on the members where all of them have room there;
otherwise each member has a number, and its forces are listed below.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import MINUS, Missing, Shown
from calcbook.figures.sketch import GREY, INK, MARGIN, ROW, WIDTH, Sketch, shortened, text_width
from calcbook.figures.truss_frame import NEEDS as FRAME
from calcbook.figures.truss_frame import TAKES as MORE
from calcbook.figures.truss_frame import clear_of, frame_of
from calcbook.units import pretty_unit

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.figures.sketch import Point
    from calcbook.figures.truss_frame import Frame, Taken

NEEDS = (*FRAME, "envelope", "largest", "smallest")
TAKES = MORE

_WORDS = {
    "tension": "pulled only: thick",
    "compression": "pushed only: double",
    "both": "pulled and pushed: double and dashed",
    "zero": "no force: thin",
}
_ALONG = (0.5, 0.42, 0.58, 0.34, 0.66, 0.26, 0.74)  # where on a member its words may stand
_OFF = 2.3  # words this far above or below a joint leave it in sight, mm
_ABREAST = 3  # columns of the list


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
    frame = frame_of(statement, uses)
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
    shown = {key: bar.words for key, bar in bars.items()}
    numbers: dict[str, tuple[str, ...]] = {k: (str(n),) for n, k in enumerate(bars, 1)}
    places = _places(frame, shown)
    listed = len(places) < len(shown)
    if listed:
        shown, places = numbers, _places(frame, numbers)
    taken = [_written(sketch, places[key], words) for key, words in shown.items() if key in places]
    frame.names(sketch, [place for places in taken for place in places])
    column = lookup.column(statement, uses["envelope"], uses["largest"]) or {}
    _key(sketch, {bar.sense for bar in bars.values()}, pretty_unit(str(column.get("unit", ""))))
    if listed:
        _list(sketch, list(bars.values()))
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


def _places(frame: Frame, shown: Mapping[str, tuple[str, ...]]) -> dict[str, Point]:
    """Return where on its member the words of each one stand clear of others and of the joints."""
    taken: list[Taken] = []
    places = {}
    for member in frame.members:
        words = shown.get(member[0], ())
        (x1, y1), (x2, y2) = frame.ends(member)
        wide = max((text_width(line) for line in words), default=0.0) + 2.0
        high = len(words) * ROW
        if not words or (wide > abs(x2 - x1) and high + 0.5 > abs(y2 - y1)):
            continue
        spots = ((x1 + part * (x2 - x1), y1 + part * (y2 - y1)) for part in _ALONG)
        spot = next((p for p in spots if _fits(frame, taken, p, words)), None)
        if spot is not None:
            places[member[0]] = spot
    return places


def _written(sketch: Sketch, spot: Point, words: tuple[str, ...]) -> list[Taken]:
    """Write the words of one member on it; return where they stand."""
    found = []
    for n, text in enumerate(words):
        y = _line_at(spot[1], n, len(words))
        sketch.text(spot[0], y, text, align="center", patch=True)
        found.append((spot[0], y, text_width(text) / 2.0 + 0.8))
    return found


def _line_at(middle: float, number: int, count: int) -> float:
    return middle + (ROW - 0.9) * ((count - 1) / 2.0 - number)


def _fits(frame: Frame, taken: list[Taken], at: Point, words: tuple[str, ...]) -> bool:
    """Whether all lines of words fit at a place; they are noted if they do."""
    tried = list(taken)
    for n, text in enumerate(words):
        y, half = _line_at(at[1], n, len(words)), text_width(text) / 2.0
        if any(abs(j - y) < _OFF and abs(i - at[0]) < half + 0.9 for i, j in frame.joints.values()):
            return False
        if not clear_of(tried, at[0], y, text):
            return False
    taken[:] = tried
    return True


def _key(sketch: Sketch, senses: set[str], unit: str) -> None:
    """Say what the lines are, and what is written."""
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
    said = f"T largest tension, C largest compression, {unit}; 0 no force"
    sketch.text(MARGIN, y - ROW, said, ink=INK)


def _list(sketch: Sketch, bars: list[Bar]) -> None:
    """List the members by number with their forces, down one column after the other."""
    rows = -(-len(bars) // _ABREAST)
    top = sketch.low - ROW
    step = (WIDTH - 2.0 * MARGIN) / _ABREAST
    for place, bar in enumerate(bars):
        x, y = MARGIN + step * (place // rows), top - (place % rows) * (ROW - 0.4)
        sketch.text(x + 5.0, y, str(place + 1), align="right")
        sketch.text(x + 7.0, y, shortened(bar.key, 13.0), ink=GREY)
        for part, text in enumerate(bar.words):
            sketch.text(x + 21.0 + 14.0 * part, y, text)
