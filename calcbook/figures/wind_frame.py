"""How the wind elevation stands on the sheet: walls, scales, and arrows square to a surface."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from calcbook.figures.lookup import Shown, Value
from calcbook.figures.sketch import MARGIN, ROW, WIDTH, Sketch, shortened, text_width
from calcbook.figures.wind_values import Wind, sense

if TYPE_CHECKING:
    from calcbook.figures.sketch import Point

LONGEST = 12.0
ROOM = 9.0
_SHORTEST = 1.6
LABELS = 34
KEY_ROOM = 20.0
_TALL = 140.0
_LOW = 24.0
_NOT_DRAWN = "not drawn"


@dataclass(frozen=True)
class Frame:
    """The section on the sheet, mm: where the walls stand, and the scales."""

    left: float
    right: float
    height: float
    rise: float
    per_metre: float
    per_pascal: float
    columns: tuple[float, float, float]
    one_scale: bool

    def lengthened(self, pressure: float) -> bool:
        """Tell whether a pressure is so small that its arrow is drawn longer than to scale."""
        return 0.0 < abs(pressure) * self.per_pascal < _SHORTEST

    def arrow_length(self, pressure: float) -> float:
        """Return the length of a pressure's arrow, mm; a very small one is still seen."""
        return max(_SHORTEST, abs(pressure) * self.per_pascal) if pressure else 0.0

    def roof(self, x: float) -> float:
        """Return the height of the roof at a place across the sheet."""
        share = (x - self.left) / (self.right - self.left)
        return self.height + self.rise * (1.0 - abs(2.0 * share - 1.0))

    def off_roof(self, x: float) -> Point:
        """Return the unit direction square to the roof and out of it, at a place across."""
        slope = 2.0 * self.rise / (self.right - self.left)
        size = (1.0 + slope * slope) ** 0.5
        return (slope if 2.0 * x > self.left + self.right else -slope) / size, 1.0 / size

    def along(self, share: float) -> float:
        """Return the place across the sheet of a share of the depth."""
        return self.left + share * (self.right - self.left)


def make_frame(wind: Wind) -> Frame:
    """Return the frame in which everything the figure shows has its room."""
    keys = [text_width(shortened(level.key, KEY_ROOM)) for level in wind.levels]
    z_room = max([text_width("z, m"), *(text_width(level.z.text) for level in wind.levels)])
    p_room = max([text_width("windward"), *(text_width(short(one.value)) for one in wind.levels)])
    z_edge = MARGIN + max([text_width("Level"), *keys]) + 3.0 + z_room
    p_edge = z_edge + 3.0 + p_room
    left = p_edge + LONGEST + 4.0
    beside = [text_width(line) for one in wind.leeward for line in (one.surface, cell(one.value))]
    right = WIDTH - MARGIN - LONGEST - 2.0 - max(beside, default=0.0)
    true = (right - left) / wind.depth.si if wind.depth else None
    low = min(_TALL, max(_LOW, ROW * min(LABELS, len(wind.levels)), ROOM * inner_rows(wind)))
    tall = wind.wall + (wind.roof.rise or 0.0)
    per_metre = true or (_LOW * 1.4 / tall if tall > 0.0 else 1.0)
    if tall > 0.0:
        # Words inside may stand in the lower half of the roof space, so half the rise is room.
        per_metre = max(per_metre, low / (tall - (wind.roof.rise or 0.0) / 2.0))
        per_metre = min(per_metre, _TALL / tall)
    largest = max((abs(value.si) for value, _ in wind.pressures()), default=0.0)
    return Frame(
        left,
        right,
        wind.wall * per_metre if wind.wall > 0.0 else low,
        (wind.roof.rise or 0.0) * per_metre,
        per_metre,
        LONGEST / largest if largest > 0.0 else 0.0,
        (MARGIN, z_edge, p_edge),
        per_metre == true,
    )


def inner_rows(wind: Wind) -> int:
    """Return how many pressures are written inside the section."""
    return len(wind.internal) + len(wind.side)


def short(value: Value) -> str:
    """Return a value's number, or that it is not drawn."""
    return value.text if isinstance(value, Shown) else _NOT_DRAWN


def cell(value: Value) -> str:
    """Return a value with its unit, or that it is not drawn."""
    return value.label if isinstance(value, Shown) else _NOT_DRAWN


def pressure_arrow(
    sketch: Sketch,
    frame: Frame,
    surface: Point,
    outward: Point,
    value: Shown,
    *,
    gid: str,
    dashed: bool = False,
) -> None:
    """Draw an arrow on the side of a surface ``outward`` points to; its way follows the sign."""
    length = frame.arrow_length(value.si)
    far = (surface[0] + outward[0] * length, surface[1] + outward[1] * length)
    tail, head = (far, surface) if value.si > 0.0 else (surface, far)
    sketch.arrow(tail, head, f"{gid}-{sense(value.si)}", dashed=dashed)
