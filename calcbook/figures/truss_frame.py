"""A truss on the sheet: its joints, members and supports, and how places map across."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import MARGIN, WIDTH, Sketch, text_width

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from calcbook.figures.sketch import Point

NEEDS = ("joints", "x", "y", "members", "start", "end", "supports", "held")
TAKES = ("turn",)

TALL = 78.0  # of a truss on the sheet, mm
SIDE = 16.0  # beside it, for words and arrows
_NEAR = 1e-6
_CROSSED = 3.0  # a word this near to another one is moved, mm


@dataclass(frozen=True)
class Frame:
    """A truss in the sheet's millimetres.

    Attributes
    ----------
    joints
        Where each joint is, by its key.
    members
        The keys of the members with the joints at their ends.
    raised
        How many times higher the truss is drawn than it is.
    held
        How each supported joint is held, and the direction in which a roller moves, in rad.
    """

    joints: Mapping[str, Point]
    members: tuple[tuple[str, str, str], ...]
    held: tuple[tuple[str, str, float], ...]
    raised: float = 1.0

    def is_upper(self, joint: str) -> bool:
        """Whether a joint is nearer to the top of the truss than to its bottom, where it stands."""
        x, y = self.joints[joint]
        heights = [y]
        for member in self.members:
            (x1, y1), (x2, y2) = sorted(self.ends(member))
            if x1 - _NEAR <= x <= x2 + _NEAR:
                part = (x - x1) / (x2 - x1) if x2 - x1 > _NEAR else 0.0
                heights += [y1 + part * (y2 - y1), y2 if part == 0.0 and x2 - x1 <= _NEAR else y]
        return y >= (min(heights) + max(heights)) / 2.0 - _NEAR

    def ends(self, member: tuple[str, str, str]) -> tuple[Point, Point]:
        """Return where a member begins and ends."""
        return self.joints[member[1]], self.joints[member[2]]

    def moved(self, down: float) -> Frame:
        """Return the same truss lower on the sheet."""
        joints = {key: (x, y - down) for key, (x, y) in self.joints.items()}
        return Frame(joints, self.members, self.held, self.raised)

    def supports(self, sketch: Sketch) -> None:
        """Draw each support as the trade does."""
        for joint, kind, turn in self.held:
            _support(sketch, self.joints[joint], kind, turn)

    def names(self, sketch: Sketch) -> None:
        """Write the names of the joints outside of the truss, beside those that are supported."""
        held = {joint for joint, *_ in self.held}
        left = min(x for x, _ in self.joints.values())
        for key, (x, y) in self.joints.items():
            if key in held:
                first = x - left < _NEAR
                sketch.text(
                    x + (-3.4 if first else 3.4), y + 2.6, key, align="right" if first else "left"
                )
            else:
                sketch.text(x, y + (3.6 if self.is_upper(key) else -3.4), key, align="center")


def frame_of(
    statement: lookup.Record, uses: Mapping[str, Any], *, least: float = 0.0
) -> Frame | Missing:
    """Return the truss of a statement laid out over the sheet, or why there is none to draw.

    A truss lower than ``least`` mm is drawn higher than it is.
    """
    keys = lookup.rows(statement, uses["joints"])
    if isinstance(keys, Missing):
        return keys
    places = {}
    columns = (lookup.cells(statement, uses["joints"], uses[role]) for role in ("x", "y"))
    for key, x, y in zip(keys, *columns, strict=True):
        if isinstance(x, Missing) or isinstance(y, Missing):
            return Missing(key, f"joint {key} has no place")
        places[key] = (x.si, y.si)
    members = tuple(_members(statement, uses))
    for key, *ends in members:
        for joint in ends:
            if joint not in places:
                return Missing(key, f"{key} ends at joint {joint}, which is not there")
    held = tuple(s for s in _held(statement, uses) if s[0] in places)
    joints, raised = _laid_out(places, least)
    return Frame(joints, members, held, raised)


def _members(statement: lookup.Record, uses: Mapping[str, Any]) -> Iterator[tuple[str, str, str]]:
    keys = lookup.rows(statement, uses["members"])
    if isinstance(keys, Missing):
        return
    starts, ends = (lookup.words(statement, uses["members"], uses[r]) for r in ("start", "end"))
    yield from zip(keys, starts, ends, strict=True)


def _held(statement: lookup.Record, uses: Mapping[str, Any]) -> Iterator[tuple[str, str, float]]:
    keys = lookup.rows(statement, uses["supports"])
    if isinstance(keys, Missing):
        return
    kinds = lookup.words(statement, uses["supports"], uses["held"])
    turns = lookup.cells(statement, uses["supports"], uses["turn"]) if "turn" in uses else ()
    for n, (key, kind) in enumerate(zip(keys, kinds, strict=True)):
        turn = turns[n] if n < len(turns) else None
        yield key, kind, turn.si if isinstance(turn, Shown) else 0.0


def _laid_out(
    places: Mapping[str, tuple[float, float]], least: float
) -> tuple[dict[str, Point], float]:
    """Return the joints in millimetres, as wide as the sheet or as high as allowed, and a factor.

    The factor is that of heights over widths: 1, or more for a truss that is too low.
    """
    across, up = zip(*places.values(), strict=True)
    wide, high = max(across) - min(across), max(up) - min(up)
    room = WIDTH - 2.0 * (MARGIN + SIDE)
    scale = min(room / (wide or 1.0), TALL / (high or 1.0))
    raised = max(least / (high * scale), 1.0) if high else 1.0
    left = (WIDTH - wide * scale) / 2.0
    return {
        key: (left + (x - min(across)) * scale, (y - min(up)) * scale * raised)
        for key, (x, y) in places.items()
    }, raised


def _support(sketch: Sketch, at: Point, kind: str, turn: float) -> None:
    """Draw a triangle under a joint, with wheels under a roller, square to the way it moves."""
    along = (math.cos(turn), math.sin(turn))
    below = (along[1], -along[0])

    def place(side: float, down: float) -> Point:
        return (
            at[0] + side * along[0] + down * below[0],
            at[1] + side * along[1] + down * below[1],
        )

    foot = 4.4 if kind == "pinned" else 3.6
    sketch.area([place(0.0, 0.8), place(-2.4, foot), place(2.4, foot)], gid=f"support-{kind}")
    if kind != "pinned":
        for side in (-1.4, 1.4):
            x, y = place(side, foot + 0.75)
            sketch.disc(x, y, 0.7)
        foot += 1.5
    sketch.line(place(-3.4, foot), place(3.4, foot), weight=1.0)


def clear_of(taken: list[tuple[float, float, float]], x: float, y: float, words: str) -> bool:
    """Whether words centred at a place stay clear of those placed before; notes them if so."""
    half = text_width(words) / 2.0 + 0.8
    for other_x, other_y, other_half in taken:
        if abs(other_y - y) < _CROSSED and abs(other_x - x) < half + other_half:
            return False
    taken.append((x, y, half))
    return True
