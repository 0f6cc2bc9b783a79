"""A truss with the loads at its joints, one picture for each load case shown."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import INK, MARGIN, PAPER, ROW, WIDTH, Sketch, text_width
from calcbook.figures.truss_frame import NEEDS as FRAME
from calcbook.figures.truss_frame import TAKES as MORE
from calcbook.figures.truss_frame import Frame, clear_of, frame_of
from calcbook.units import pretty_unit

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.figures.sketch import Point
    from calcbook.figures.truss_frame import Taken

NEEDS = (*FRAME, "loads", "down", "right")
TAKES = MORE

_ARROW = 13.0
_LEAST = 3.5
_GAP = 10.0


@dataclass(frozen=True)
class JointLoad:
    """The load at one joint: downward and to the right, as printed."""

    joint: str
    down: Shown
    right: Shown

    @property
    def size(self) -> float:
        """The force, in SI."""
        return math.hypot(self.down.si, self.right.si)

    @property
    def words(self) -> str:
        """What is printed beside the arrow: the parts that are not nothing."""
        parts = [("", self.down), ("→ ", self.right)]
        return ", ".join(f"{sign}{part.text}" for sign, part in parts if part.si)


@dataclass(frozen=True)
class Picture:
    """One load case: its column, what it is, its unit, and the loads that are not nothing."""

    column: str
    name: str
    unit: str
    loads: tuple[JointLoad, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Picture, ...]:
    """Look up the joint loads of every load case; one that does not apply is left out."""
    found = []
    keys = lookup.rows(statement, uses["joints"])
    for table, down, right in zip(uses["loads"], uses["down"], uses["right"], strict=True):
        cells = (lookup.cells(statement, t, c) for t, c in ((table, down), (uses["joints"], right)))
        if isinstance(keys, Missing):
            continue
        rows = [
            JointLoad(key, d, r)
            for key, d, r in zip(keys, *cells, strict=True)
            if isinstance(d, Shown) and isinstance(r, Shown)
        ]
        if rows:
            loads = tuple(load for load in rows if load.size)
            told = lookup.column(statement, table, down) or {}
            found.append(Picture(down, str(told.get("meaning") or down), rows[0].down.unit, loads))
    return tuple(found)


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the truss and its joint loads in words."""
    frame = frame_of(statement, uses)
    if isinstance(frame, Missing):
        return f"No truss is drawn: {frame.why}."
    held = ", ".join(f"{joint} ({kind})" for joint, kind, _ in frame.held)
    told = [
        f"Truss of {len(frame.joints)} joints and {len(frame.members)} members, held at {held}."
    ]
    for picture in gather(statement, uses):
        each = ", ".join(f"{load.joint} {load.words}" for load in picture.loads) or "none"
        told.append(f"{picture.name}, joint loads in {picture.unit}, down and right: {each}.")
    return " ".join(told)


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the truss once for each load case, its loads as arrows with their values."""
    sketch = Sketch()
    frame = frame_of(statement, uses)
    if isinstance(frame, Missing):
        sketch.paragraph(MARGIN, 0.0, f"No truss is drawn: {frame.why}.")
        return sketch
    low = 0.0
    for picture in gather(statement, uses):
        top = max(y for _, y in frame.joints.values())
        low = _one(sketch, frame.moved(top + _ARROW + ROW + _GAP - low), picture) - ROW
    sketch.paragraph(
        MARGIN, low,
        "Joints are named; values are downward, after an arrow to the right, with their signs. "
        "Each picture has its own scale of arrows; a joint without an arrow has no load.",
    )  # fmt: skip
    return sketch


def _one(sketch: Sketch, frame: Frame, picture: Picture) -> float:
    """Draw the truss with one load case; return the lowest height used."""
    title_at = max(y for _, y in frame.joints.values()) + _ARROW + 2.0 * ROW
    sketch.text(
        MARGIN, title_at, f"{picture.name}, {pretty_unit(picture.unit)}", ink=INK, bold=True
    )
    for member in frame.members:
        sketch.line(*frame.ends(member), weight=0.9, gid=f"member-{member[0]}")
    frame.supports(sketch)
    for x, y in frame.joints.values():
        sketch.disc(x, y, 0.8, fill=PAPER)
    most = max((load.size for load in picture.loads), default=0.0)
    taken: list[Taken] = []
    ends = [
        _arrow(sketch, frame, load, max(_ARROW * load.size / most, _LEAST), picture.column)
        for load in picture.loads
    ]
    for load, far in zip(picture.loads, ends, strict=True):
        if load.down.si:
            _value(sketch, load.words, far, taken, upper=frame.is_upper(load.joint))
        else:
            _beside(sketch, load.words, frame.joints[load.joint], far, taken)
    joints = (frame.joints[load.joint] for load in picture.loads)
    arrows = list(zip(joints, ends, strict=True))
    frame.names(sketch, taken, arrows)
    return min(y for _, y in frame.joints.values()) - _ARROW


def _arrow(sketch: Sketch, frame: Frame, load: JointLoad, long: float, column: str) -> Point:
    """Draw one load from outside of the truss: onto the joint, or away; return its outer end."""
    x, y = frame.joints[load.joint]
    along = (load.right.si / load.size, -load.down.si / load.size)
    upper = frame.is_upper(load.joint)
    toward = (along[1] < 0.0) == upper
    if not load.down.si:
        toward = (along[0] > 0.0) == (x <= WIDTH / 2.0)
    away = -1.0 if toward else 1.0
    near = (x + away * 1.2 * along[0], y + away * 1.2 * along[1])
    far = (x + away * (1.2 + long) * along[0], y + away * (1.2 + long) * along[1])
    sketch.arrow(*((far, near) if toward else (near, far)), gid=f"load-{column}-{load.joint}")
    return far


def _value(sketch: Sketch, words: str, far: Point, taken: list[Taken], *, upper: bool) -> None:
    """Write a load's value beyond its arrow, clear of those before."""
    step = ROW - 0.6 if upper else -(ROW - 0.6)
    at = far[1] + (2.2 if upper else -2.2)
    half = text_width(words) / 2.0
    across = min(max(far[0], MARGIN + half), WIDTH - MARGIN - half)
    while not clear_of(taken, across, at, words):
        at += step
    sketch.text(across, at, words, align="center", patch=True)


def _beside(sketch: Sketch, words: str, joint: Point, far: Point, taken: list[Taken]) -> None:
    """Write the value of a level load over its arrow, off the joint and what holds it."""
    half = text_width(words) / 2.0
    side = 1.0 if far[0] > joint[0] else -1.0
    across = joint[0] + side * max(abs(far[0] - joint[0]) / 2.0, half + 2.0)
    at = far[1] + 2.4
    while not clear_of(taken, across, at, words):
        at += ROW - 0.6
    sketch.text(across, at, words, align="center", patch=True)
