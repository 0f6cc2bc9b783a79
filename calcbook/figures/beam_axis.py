"""The axis of a beam on the sheet: supports, spans and how places map across."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown, Value
from calcbook.figures.sketch import GREY, LIGHT, MARGIN, ROW, WIDTH, Sketch, shortened, text_width

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

FREE = "free end"
SIDE = 14.0
_WORDS = {
    "pinned": "pinned", "roller": "on a roller", "fixed": "fixed", "spring": "on a spring",
    FREE: "a free end",
}  # fmt: skip


@dataclass(frozen=True)
class Held:
    """A support or a free end: its key, how it holds, and its place."""

    key: str
    kind: str
    x: Shown


def held_words(support: Held) -> str:
    """Return how a support holds the beam, in words."""
    return _WORDS.get(support.kind, support.kind)


def supports_of(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Held, ...] | Missing:
    """Return supports and free ends from left to right, or why there are none to draw."""
    keys = lookup.rows(statement, uses["supports"])
    if isinstance(keys, Missing):
        return keys
    kinds = lookup.words(statement, uses["supports"], uses["held"]) if "held" in uses else ()
    places = lookup.cells(statement, uses["supports"], uses["x"])
    found = []
    for n, (key, x) in enumerate(zip(keys, places, strict=True)):
        if isinstance(x, Missing):
            return Missing(str(uses["x"]), f"{key} has no place: {x.why}")
        found.append(Held(key, kinds[n] if kinds else "", x))
    if found[-1].x.si <= found[0].x.si:
        return Missing(str(uses["x"]), "the beam has no length")
    return tuple(found)


@dataclass(frozen=True)
class Axis:
    """A beam along the sheet: ``across`` gives the place on the sheet, mm, of one along it, m."""

    held: tuple[Held, ...]
    left: float
    right: float
    scale: float

    def across(self, x: float) -> float:
        """Return the place on the sheet of a place along the beam."""
        return self.left + (x - self.held[0].x.si) * self.scale

    def beam(self, sketch: Sketch) -> None:
        """Draw the beam."""
        sketch.line((self.left, 0.0), (self.right, 0.0), weight=2.0, gid="beam")

    def supports(self, sketch: Sketch) -> None:
        """Draw each support as the trade does, with its key below."""
        for one in self.held:
            x = self.across(one.x.si)
            _DRAWN.get(one.kind, _nothing)(sketch, x, one is self.held[0])
            sketch.text(x, -8.6, shortened(one.key, 24.0), align="center")

    def spans(self, sketch: Sketch, lengths: Sequence[Value]) -> None:
        """Draw the dimension line of the spans below the supports."""
        y = -14.6
        for n, (one, other) in enumerate(zip(self.held, self.held[1:], strict=False)):
            a, b = self.across(one.x.si), self.across(other.x.si)
            sketch.dimension((a, y), (b, y))
            length = lengths[n] if n < len(lengths) else None
            if isinstance(length, Shown):
                fits = text_width(length.label) < b - a - 2.0
                height = y if fits else y - ROW
                sketch.text((a + b) / 2.0, height, length.label, align="center", patch=True)


def place_axis(held: tuple[Held, ...]) -> Axis:
    """Return the axis of a beam over the width of the sheet."""
    left, right = MARGIN + SIDE, WIDTH - MARGIN - SIDE
    return Axis(held, left, right, (right - left) / (held[-1].x.si - held[0].x.si))


def _nothing(sketch: Sketch, x: float, first: bool) -> None:
    """Draw nothing: a free end has no support."""


def _triangle(sketch: Sketch, x: float, low: float) -> None:
    sketch.area([(x, -0.7), (x - 2.4, low), (x + 2.4, low)])


def _pinned(sketch: Sketch, x: float, _first: bool) -> None:
    _triangle(sketch, x, -4.6)
    _ground(sketch, x, -4.6)


def _roller(sketch: Sketch, x: float, _first: bool) -> None:
    _triangle(sketch, x, -3.8)
    for side in (-1.4, 1.4):
        sketch.disc(x + side, -4.5, 0.7)
    _ground(sketch, x, -5.2)


def _fixed(sketch: Sketch, x: float, first: bool) -> None:
    out = -1.6 if first else 1.6
    sketch.line((x, -4.0), (x, 4.0), weight=1.4)
    for step in range(5):
        y = -4.0 + 2.0 * step
        sketch.line((x, y), (x + out, y - 1.2), weight=0.5, ink=GREY)


def _spring(sketch: Sketch, x: float, _first: bool) -> None:
    turns = [(x + (1.6 if step % 2 else -1.6), -1.4 - 0.7 * step) for step in range(5)]
    sketch.line((x, -0.7), *turns, (x, -5.2))
    _ground(sketch, x, -5.2)


def _ground(sketch: Sketch, x: float, y: float) -> None:
    sketch.line((x - 3.4, y), (x + 3.4, y), weight=1.0)
    for step in range(4):
        left = x - 2.4 + 1.9 * step
        sketch.line((left, y), (left - 1.0, y - 1.0), weight=0.4, ink=LIGHT)


_DRAWN = {"pinned": _pinned, "roller": _roller, "fixed": _fixed, "spring": _spring}
