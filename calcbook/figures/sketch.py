"""A sheet of paper in millimetres: what a figure draws on, and how it becomes SVG or PNG.

A figure collects lines, areas and words here without knowing the drawing library; the sheet is
as wide as the text measure and as high as what was drawn. Words are measured with one font for
both forms, wider than the one the pages are set in, so what fits here fits there.
"""

from __future__ import annotations

import io
import math
from dataclasses import dataclass, field
from functools import lru_cache
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Sequence

    from matplotlib.artist import Artist

WIDTH = 150.0
MARGIN = 1.5
SIZE = 8.0
ROW = 4.2
INK = "#1a1a1a"
GREY = "#5f5f5f"
LIGHT = "#bdbdbd"
PAPER = "#ffffff"
ACCENT = "#1f4e79"

_MM_PER_POINT = 25.4 / 72.0
_MEASURED_FONT = "DejaVu Sans"
_PAGE_FONT = "Libertinus Serif"
_HALF_FIGURE = 0.35
_DESCENT = 0.24
_DASHES = (0, (3.0, 2.0))
_PIXELS_PER_INCH = 160

Point = tuple[float, float]


@lru_cache(maxsize=4096)
def text_width(words: str, *, bold: bool = False) -> float:
    """Return the width of one line of words, mm."""
    from matplotlib.font_manager import FontProperties  # noqa: PLC0415
    from matplotlib.textpath import text_to_path  # noqa: PLC0415

    weight = "bold" if bold else "normal"
    font = FontProperties(family=_MEASURED_FONT, size=SIZE, weight=weight)
    width, _, _ = text_to_path.get_text_width_height_descent(words, font, ismath=False)
    return float(width) * _MM_PER_POINT


def shortened(words: str, width: float) -> str:
    """Return the words, cut with an ellipsis where they are wider than ``width`` mm."""
    if text_width(words) <= width:
        return words
    while words and text_width(words + "…") > width:
        words = words[:-1]
    return words.rstrip() + "…"


def wrapped(words: str, width: float) -> list[str]:
    """Return the words as lines no wider than ``width`` mm; a single long word is cut."""
    lines: list[str] = []
    for word in words.split():
        longer = f"{lines[-1]} {word}" if lines else word
        if lines and text_width(longer) <= width:
            lines[-1] = longer
        else:
            lines.append(shortened(word, width))
    return lines


@dataclass(frozen=True)
class Line:
    """An open line through points, mm; the weight is in points."""

    points: tuple[Point, ...]
    weight: float
    ink: str
    dashed: bool
    gid: str


@dataclass(frozen=True)
class Area:
    """A closed outline, mm, filled and edged."""

    points: tuple[Point, ...]
    fill: str
    edge: str
    weight: float
    gid: str


@dataclass(frozen=True)
class Words:
    """One line of words: the anchor, mm, on the baseline."""

    x: float
    y: float
    words: str
    align: str
    ink: str
    bold: bool


@dataclass
class Sketch:
    """What has been drawn so far: x from 0 to WIDTH, y upward from any origin, mm."""

    marks: list[Line | Area | Words] = field(default_factory=list)
    low: float = math.inf
    high: float = -math.inf

    def line(
        self,
        *points: Point,
        weight: float = 0.6,
        ink: str = INK,
        dashed: bool = False,
        gid: str = "",
    ) -> None:
        """Draw a line through the points."""
        self._reach(*(y for _, y in points))
        self.marks.append(Line(points, weight, ink, dashed, gid))

    def area(
        self,
        points: Sequence[Point],
        *,
        fill: str = PAPER,
        edge: str = INK,
        weight: float = 0.6,
        gid: str = "",
    ) -> None:
        """Draw a closed, filled outline."""
        self._reach(*(y for _, y in points))
        self.marks.append(Area(tuple(points), fill, edge, weight, gid))

    def disc(self, x: float, y: float, radius: float, *, fill: str = PAPER, gid: str = "") -> None:
        """Draw a circle with a thin edge."""
        turns = [math.tau * step / 48 for step in range(48)]
        rim = [(x + radius * math.cos(turn), y + radius * math.sin(turn)) for turn in turns]
        self.area(rim, fill=fill, gid=gid)

    def text(
        self,
        x: float,
        y: float,
        words: str,
        *,
        align: str = "left",
        ink: str = INK,
        bold: bool = False,
        patch: bool = False,
    ) -> None:
        """Write one line of words centred on the height ``y``; ``patch`` clears what is below."""
        words = " ".join(words.split())
        if not words:
            return
        em = SIZE * _MM_PER_POINT
        base = y - _HALF_FIGURE * em
        if patch:
            wide = text_width(words, bold=bold)
            left = x - wide * {"left": 0.0, "center": 0.5, "right": 1.0}[align]
            box = (left - 0.6, base - 0.25 * em, left + wide + 0.6, base + 0.9 * em)
            corners = [(box[0], box[1]), (box[2], box[1]), (box[2], box[3]), (box[0], box[3])]
            self.area(corners, edge=PAPER, weight=0.0)
        self._reach(base - _DESCENT * em, base + em)
        self.marks.append(Words(x, base, words, align, ink, bold))

    def paragraph(self, x: float, y: float, words: str, *, ink: str = GREY) -> float:
        """Write words wrapped to the sheet from the height ``y`` down; return the next height."""
        for part in wrapped(words, WIDTH - MARGIN - x):
            self.text(x, y, part, ink=ink)
            y -= ROW - 0.4
        return y

    def arrow(self, tail: Point, head: Point, gid: str, *, dashed: bool = False) -> None:
        """Draw an arrow; its shaft runs from tail to head and carries the ``gid``."""
        length = math.dist(tail, head)
        if length == 0.0:
            return
        along = ((head[0] - tail[0]) / length, (head[1] - tail[1]) / length)
        barb = min(2.2, 0.6 * length)
        half = 0.36 * barb
        neck = (head[0] - barb * along[0], head[1] - barb * along[1])
        side = (-along[1] * half, along[0] * half)
        wings = [(neck[0] + side[0], neck[1] + side[1]), (neck[0] - side[0], neck[1] - side[1])]
        self.line(tail, head, weight=0.9, ink=ACCENT, dashed=dashed, gid=gid)
        fill = PAPER if dashed else ACCENT
        self.area([head, *wings], fill=fill, edge=ACCENT, gid=f"{gid}-head")

    def dimension(self, start: Point, end: Point) -> None:
        """Draw a dimension line with an oblique stroke at either end."""
        self.line(start, end, weight=0.5, ink=GREY)
        for x, y in (start, end):
            self.line((x - 0.9, y - 0.9), (x + 0.9, y + 0.9), weight=0.8)

    def ground(self, left: float, right: float, y: float) -> None:
        """Draw a ground line with its strokes below."""
        self.line((left, y), (right, y), weight=1.4)
        for step in range(int((right - left) / 4.0) + 1):
            x = left + 1.6 + 4.0 * step
            if x <= right:
                self.line((x, y), (x - 1.6, y - 1.6), weight=0.5, ink=GREY)

    def render(self, form: str) -> bytes:
        """Return the sheet as an ``svg`` or a ``png``; equal sheets give equal bytes."""
        import matplotlib as mpl  # noqa: PLC0415
        from matplotlib.backends.backend_agg import FigureCanvasAgg  # noqa: PLC0415
        from matplotlib.figure import Figure  # noqa: PLC0415
        from matplotlib.transforms import Affine2D  # noqa: PLC0415

        with mpl.rc_context():
            mpl.rcdefaults()
            mpl.rcParams.update(_SETTINGS)
            height = self.high - self.low + 2.0 * MARGIN
            figure = Figure(figsize=(WIDTH / 25.4, height / 25.4), facecolor=PAPER)
            FigureCanvasAgg(figure)
            place = Affine2D().translate(0.0, MARGIN - self.low).scale(1.0 / 25.4)
            for order, mark in enumerate(self.marks):
                artist = _artist(mark, place + figure.dpi_scale_trans)
                artist.set_zorder(order)
                figure.add_artist(artist)
            return _saved(figure, form)

    def _reach(self, *heights: float) -> None:
        self.low = min(self.low, *heights)
        self.high = max(self.high, *heights)


_SETTINGS: Any = {
    "svg.hashsalt": "calcbook",
    "svg.fonttype": "none",
    "font.family": _MEASURED_FONT,
    "font.size": SIZE,
    "path.simplify": False,
    "lines.solid_capstyle": "butt",
}


def _artist(mark: Line | Area | Words, place: Any) -> Artist:  # noqa: ANN401
    from matplotlib.lines import Line2D  # noqa: PLC0415
    from matplotlib.patches import Polygon  # noqa: PLC0415
    from matplotlib.text import Text  # noqa: PLC0415

    artist: Artist
    if isinstance(mark, Words):
        artist = Text(mark.x, mark.y, mark.words, color=mark.ink, ha=mark.align, va="baseline")
        artist.set_fontweight("bold" if mark.bold else "normal")
        artist.set_parse_math(False)
    elif isinstance(mark, Line):
        across, up = zip(*mark.points, strict=True)
        artist = Line2D(across, up, color=mark.ink, linewidth=mark.weight)
        artist.set_linestyle(_DASHES if mark.dashed else "solid")
        artist.set_gid(mark.gid or None)
    else:
        artist = Polygon(mark.points, facecolor=mark.fill, edgecolor=mark.edge)
        artist.set_linewidth(mark.weight)
        artist.set_gid(mark.gid or None)
    artist.set_transform(place)
    return artist


def _saved(figure: Any, form: str) -> bytes:  # noqa: ANN401
    out = io.BytesIO()
    if form == "png":
        figure.savefig(out, format="png", dpi=_PIXELS_PER_INCH, metadata={"Software": None})
        return out.getvalue()
    figure.savefig(out, format="svg", metadata={"Date": None, "Creator": None})
    # The page font lives in the PDF engine, not on this machine: it is named, never looked up.
    named = f"'{_PAGE_FONT}', '{_MEASURED_FONT}', serif".encode()
    return out.getvalue().replace(f"'{_MEASURED_FONT}'".encode(), named)
