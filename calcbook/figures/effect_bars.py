"""Bars of what a result becomes with a part less and a part more of each entry.

No figure of a workbook: it is drawn from a study's own plain data. The bar of less is open and
stands above, the bar of more is filled and stands below it, so that neither depends on colour.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

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
    from collections.abc import Sequence

MOST = 15
_LABELS = 52.0
_HIGH = 3.0
_GAP = 1.2
_STEP = 9.6
_BETWEEN = 1.2


@dataclass(frozen=True)
class Change:
    """What a result becomes: its change, drawn to scale, in words; None where there is none."""

    size: float | None
    words: str


@dataclass(frozen=True)
class Bar:
    """One entry: its name and value in words, and the changes with less and more of it."""

    label: str
    less: Change
    more: Change


@dataclass(frozen=True)
class Bars:
    """A result in words, by what part its entries are varied ('10 %'), and their bars in order.

    ``left_out`` says what stands for no bar.
    """

    result: str
    part: str
    bars: tuple[Bar, ...]
    left_out: str = ""


def describe(picture: Bars) -> str:
    """Return the picture in words, for those who cannot see it."""
    parts = [f"Changes of {picture.result} with {picture.part} less and more of each entry."]
    parts += [
        f"{bar.label}: {bar.less.words} with less, {bar.more.words} with more."
        for bar in picture.bars[:MOST]
    ]
    return " ".join([*parts, *_below(picture)])


def draw(picture: Bars) -> Sketch:
    """Draw the bars from the line of the result as it is, to one scale."""
    sketch = Sketch()
    bars = picture.bars[:MOST]
    y = 0.0
    if bars:
        frame = _frame(bars)
        _heading(sketch, frame, picture)
        for place, bar in enumerate(bars):
            _row(sketch, frame, bar, -_STEP * (place + 1))
        end = -_STEP * (len(bars) + 0.5)
        sketch.line((frame.zero, -0.4 * _STEP), (frame.zero, end), weight=1.0)
        y = sketch.low - ROW
    for words in _below(picture):
        y = sketch.paragraph(MARGIN, y, words)
    return sketch


def _below(picture: Bars) -> list[str]:
    more = len(picture.bars) - MOST
    words = [f"{more} entries with smaller effects are not drawn."] if more > 0 else []
    return [*words, *([picture.left_out] if picture.left_out else [])]


@dataclass(frozen=True)
class _Frame:
    """Where the labels end, where the result as it is stands, and mm for one of a change."""

    labels: float
    left: float
    zero: float
    scale: float

    def across(self, change: float) -> float:
        return self.zero + change * self.scale


def _frame(bars: Sequence[Bar]) -> _Frame:
    labels = MARGIN + min(_LABELS, max(text_width(bar.label) for bar in bars))
    changes = [one for bar in bars for one in (bar.less, bar.more)]
    drawn = [one for one in changes if one.size is not None]
    room = max([text_width(one.words) for one in drawn], default=0.0) + 2.0 * _BETWEEN
    least = min([0.0, *(one.size for one in drawn if one.size is not None)])
    most = max([0.0, *(one.size for one in drawn if one.size is not None)])
    left, right = labels + 4.0 + room, WIDTH - MARGIN - room
    scale = (right - left) / (most - least) if most > least else 0.0
    return _Frame(labels, labels + 4.0, left - least * scale, scale)


def _heading(sketch: Sketch, frame: _Frame, picture: Bars) -> None:
    y = 0.6 * _STEP
    sketch.text(MARGIN, y, shortened(picture.result, WIDTH - 2.0 * MARGIN), bold=True)
    key = ((f"{picture.part} less", PAPER), (f"{picture.part} more", ACCENT))
    x, y = frame.left, 0.0
    for words, fill in key:
        _block(sketch, x, x + 6.0, y, fill)
        sketch.text(x + 7.5, y, words, ink=GREY)
        x += 7.5 + text_width(words) + 6.0


def _row(sketch: Sketch, frame: _Frame, bar: Bar, y: float) -> None:
    edge = WIDTH - MARGIN
    sketch.line((frame.left, y - _STEP / 2.0), (edge, y - _STEP / 2.0), weight=0.4, ink=LIGHT)
    sketch.text(MARGIN, y, shortened(bar.label, frame.labels - MARGIN))
    half = (_HIGH + _GAP) / 2.0
    for change, height, fill in ((bar.less, y + half, PAPER), (bar.more, y - half, ACCENT)):
        if change.size is None:
            room = edge - frame.zero - _BETWEEN
            sketch.text(frame.zero + _BETWEEN, height, shortened(change.words, room), ink=GREY)
            continue
        end = frame.across(change.size)
        if change.size:
            _block(sketch, frame.zero, end, height, fill)
        right = change.size >= 0.0
        beside = end + (_BETWEEN if right else -_BETWEEN)
        align = "left" if right else "right"
        sketch.text(beside, height, change.words, align=align, ink=INK)


def _block(sketch: Sketch, start: float, end: float, y: float, fill: str) -> None:
    low, high = y - _HIGH / 2.0, y + _HIGH / 2.0
    corners = [(start, low), (end, low), (end, high), (start, high)]
    sketch.area(corners, fill=fill, edge=ACCENT, weight=0.8)
