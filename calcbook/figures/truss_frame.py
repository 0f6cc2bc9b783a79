"""A truss on the sheet: its joints, members and supports, and how places map across."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import GREY, MARGIN, WIDTH, Sketch, text_width

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    from calcbook.figures.sketch import Point

    Segment = tuple[Point, Point]
    Taken = tuple[float, float, float]  # the middle of words, and half their width

NEEDS = ("joints", "x", "y", "members", "start", "end", "supports", "held")
TAKES = ("turn",)

TALL = 78.0  # of a truss on the sheet, mm
SIDE = 16.0  # beside it, for words and arrows
_NEAR = 1e-6
_CROSSED = 3.0  # a word this near to another one is moved, mm
_HALF_HIGH = 1.5  # of a line of words, mm
_BESIDE = tuple(
    (side, gap, up) for gap in (1.9, 5.0) for up in (2.7, 0.0, 4.4, -2.7) for side in (-1.0, 1.0)
)  # to either side of a joint, how far from it, how far outward, mm


@dataclass(frozen=True)
class Frame:
    """A truss in the sheet's millimetres.

    Attributes
    ----------
    joints
        Where each joint is, by its key.
    members
        The keys of the members with the joints at their ends.
    held
        How each supported joint is held, and the direction in which a roller moves, in rad.
    """

    joints: Mapping[str, Point]
    members: tuple[tuple[str, str, str], ...]
    held: tuple[tuple[str, str, float], ...]

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
        return Frame(joints, self.members, self.held)

    def supports(self, sketch: Sketch) -> None:
        """Draw each support as the trade does."""
        for joint, kind, turn in self.held:
            _support(sketch, self.joints[joint], kind, turn)

    def names(self, sketch: Sketch, taken: list[Taken], arrows: Sequence[Segment] = ()) -> None:
        """Write the names of the joints beside them, clear of lines and of what was written.

        Outside of the truss comes first; where there is no room, a line gives way.
        """
        lines = [*(self.ends(member) for member in self.members), *arrows]
        for joint, kind, turn in self.held:
            _, left, right = _feet(self.joints[joint], kind, turn)
            lines += [(self.joints[joint], left), (self.joints[joint], right), (left, right)]
        for key, (x, y) in self.joints.items():
            out = 1.0 if self.is_upper(key) else -1.0
            half = text_width(key) / 2.0
            tried = [(x + side * (half + gap), y + out * up) for side, gap, up in _BESIDE]
            free = [at for at in tried if not any(_crosses(line, at, half) for line in lines)]
            for at in (*free, *tried):
                if clear_of(taken, *at, key):
                    sketch.text(*at, key, align="center", ink=GREY, patch=at not in free)
                    break


def frame_of(statement: lookup.Record, uses: Mapping[str, Any]) -> Frame | Missing:
    """Return the truss of a statement laid out over the sheet, or why there is none to draw."""
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
    return Frame(_laid_out(places), members, held)


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


def _laid_out(places: Mapping[str, tuple[float, float]]) -> dict[str, Point]:
    """Return the joints in millimetres at one scale, as wide as the sheet or as high as allowed."""
    across, up = zip(*places.values(), strict=True)
    wide, high = max(across) - min(across), max(up) - min(up)
    room = WIDTH - 2.0 * (MARGIN + SIDE)
    scale = min(room / (wide or 1.0), TALL / (high or 1.0))
    left = (WIDTH - wide * scale) / 2.0
    return {
        key: (left + (x - min(across)) * scale, (y - min(up)) * scale)
        for key, (x, y) in places.items()
    }


def _feet(at: Point, kind: str, turn: float) -> tuple[Point, Point, Point]:
    """Return the corners of a support's triangle: its top, then the ends of its foot."""
    along = (math.cos(turn), math.sin(turn))
    below = (along[1], -along[0])
    foot = 4.4 if kind == "pinned" else 3.6
    top, left, right = (
        (at[0] + side * along[0] + down * below[0], at[1] + side * along[1] + down * below[1])
        for side, down in ((0.0, 0.8), (-2.4, foot), (2.4, foot))
    )
    return top, left, right


def _support(sketch: Sketch, at: Point, kind: str, turn: float) -> None:
    """Draw a triangle under a joint, with wheels under a roller, square to the way it moves."""
    along = (math.cos(turn), math.sin(turn))
    below = (along[1], -along[0])

    def place(side: float, down: float) -> Point:
        return (
            at[0] + side * along[0] + down * below[0],
            at[1] + side * along[1] + down * below[1],
        )

    sketch.area(_feet(at, kind, turn), gid=f"support-{kind}")
    foot = 4.4 if kind == "pinned" else 5.1
    if kind != "pinned":
        for side in (-1.4, 1.4):
            x, y = place(side, foot - 0.75)
            sketch.disc(x, y, 0.7)
    sketch.line(place(-3.4, foot), place(3.4, foot), weight=1.0)


def _crosses(line: Segment, at: Point, half: float) -> bool:
    """Whether a line passes through words centred at a place (the parts of it in both strips)."""
    first, last = 0.0, 1.0
    for start, end, centre, room in (
        (line[0][0], line[1][0], at[0], half + 0.4), (line[0][1], line[1][1], at[1], _HALF_HIGH),
    ):  # fmt: skip
        run = end - start
        if abs(run) < _NEAR:
            if abs(start - centre) >= room:
                return False
            continue
        enters, leaves = sorted(((centre - room - start) / run, (centre + room - start) / run))
        first, last = max(first, enters), min(last, leaves)
    return first < last


def clear_of(taken: list[Taken], x: float, y: float, words: str) -> bool:
    """Whether words centred at a place stay clear of those placed before; notes them if so."""
    half = text_width(words) / 2.0 + 0.8
    for other_x, other_y, other_half in taken:
        if abs(other_y - y) < _CROSSED and abs(other_x - x) < half + other_half:
            return False
    taken.append((x, y, half))
    return True
