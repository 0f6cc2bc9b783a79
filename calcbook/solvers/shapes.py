"""Rows that a shape gives: the joints, members and supports of a usual truss from a few entries.

A schedule whose rows may come from a shape names one of these; see ``Rows.shaped``. What a shape
takes are entries and choices, never lines, so that its rows are there before anything is computed.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.errors import DeclarationError, StaticsError, near_match

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from calcbook.statics.generators import TrussShape

__all__ = ["Shape", "ShapedRows", "find", "names"]

_WHOLE = 1e-9
LEFT, RIGHT = "left", "right"


@dataclass(frozen=True)
class ShapedRows:
    """Rows as a shape gives them.

    Attributes
    ----------
    keys
        Their keys, in order.
    columns
        By name, a value for each row: floats in coherent SI, or texts.
    """

    keys: tuple[str, ...]
    columns: Mapping[str, Sequence[float] | Sequence[str]]


@dataclass(frozen=True)
class Shape:
    """A shape of the package, as workbooks see it.

    Attributes
    ----------
    takes
        A kind of quantity, or 'text', for each thing it takes.
    gives
        The same for each column it gives.
    run
        Takes values by name (floats in coherent SI, texts) and returns the rows; raises
        StaticsError for values that make none.
    """

    name: str
    takes: Mapping[str, str]
    gives: Mapping[str, str]
    run: Callable[[Mapping[str, Any]], ShapedRows]


def names() -> tuple[str, ...]:
    """Return the names of all shapes."""
    return tuple(sorted(_SHAPES))


def find(name: str) -> Shape:
    """Return the shape of a name; DeclarationError with a near match when there is none."""
    if name not in _SHAPES:
        hint = near_match(name, _SHAPES) or f"there are {', '.join(names())}"
        raise DeclarationError(f"there is no shape '{name}'", hint=hint)
    return _SHAPES[name]


def _truss(given: Mapping[str, Any]) -> TrussShape:
    """Return a usual truss; StaticsError for a panel count that is no whole number."""
    from calcbook.statics import generators  # noqa: PLC0415  numpy waits for a truss

    panels = float(given["panels"])
    if abs(panels - round(panels)) > _WHOLE:
        raise StaticsError(
            f"the truss has {panels:g} panels", hint="give a whole number of panels, 1 at least"
        )
    form, count, web = given["form"], round(panels), given["web"]
    span, height, low = (float(given[name]) for name in ("span", "height", "low end"))
    if form == "gable":
        return generators.gable(span, height, count, web, low)
    if form == "flat":
        return generators.flat(span, height, count, web)
    if form == "monopitch":
        return generators.monopitch(span, low, height, count, web)
    if form == "cantilever":
        return generators.cantilever(span, height, low, count, web)
    forms = ("gable", "flat", "monopitch", "cantilever")
    hint = near_match(form, forms) or f"there are {', '.join(forms)}"
    raise StaticsError(f"there is no truss of the form '{form}'", hint=hint)


def _joints(given: Mapping[str, Any]) -> ShapedRows:
    shape = _truss(given)
    x, y = zip(*(map(float, point) for point in shape.joints.xy), strict=True)  # type: ignore[arg-type, union-attr]
    return ShapedRows(tuple(shape.joints.labels), {"x": x, "y": y})


def _members(given: Mapping[str, Any]) -> ShapedRows:
    """Return the members with what they are and which face of the roof they carry."""
    shape = _truss(given)
    place = dict(zip(shape.joints.labels, shape.joints.xy, strict=True))  # type: ignore[arg-type]
    starts, ends, roles = zip(*shape.bars, strict=True)
    faces = [_face(given, *bar, place) for bar in shape.bars]
    return ShapedRows(shape.labels, {"start": starts, "end": ends, "role": roles, "face": faces})


def _face(
    given: Mapping[str, Any], start: str, end: str, role: str, place: Mapping[str, Any]
) -> str:
    """Return which face a member carries: roof or wall, left or right of the middle; ceiling."""
    (x1, _), (x2, _) = place[start], place[end]
    span = float(given["span"])
    side = LEFT if x1 + x2 <= span * (1.0 + _WHOLE) else RIGHT
    if role == "top chord":
        return f"roof {side}"
    if role == "bottom chord":
        return "ceiling"
    held_there = given["form"] == "cantilever" and side == LEFT
    at_an_end = x1 == x2 and min(x1, span - x1) <= _WHOLE * span
    return f"wall {side}" if at_an_end and not held_there else "none"


def _supports(given: Mapping[str, Any]) -> ShapedRows:
    held = _truss(given).supports
    kinds, angles = [one.kind for one in held], [float(one.angle) for one in held]
    return ShapedRows(tuple(one.joint for one in held), {"held": kinds, "angle": angles})


_TRUSS = {
    "form": "text",
    "span": "length",
    "height": "length",
    "low end": "length",
    "panels": "number",
    "web": "text",
}
_SHAPES = {
    shape.name: shape
    for shape in (
        Shape("truss joints", _TRUSS, {"x": "length", "y": "length"}, _joints),
        Shape(
            "truss members",
            _TRUSS,
            {"start": "text", "end": "text", "role": "text", "face": "text"},
            _members,
        ),
        Shape("truss supports", _TRUSS, {"held": "text", "angle": "angle"}, _supports),
    )
}
