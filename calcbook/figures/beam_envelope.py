"""Envelopes of shear and moment along a beam, with the values that govern named."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.beam_axis import Axis, place_axis, supports_of
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import ACCENT, GREY, INK, LIGHT, MARGIN, ROW, Sketch, text_width

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

NEEDS = (
    "solver", "supports", "x", "forces", "shear", "shear_at", "moment", "moment_at",
)  # fmt: skip
TAKES = ()

_TALL = 22.0
_GAP = 13.0
_ROOM = 7.0


@dataclass(frozen=True)
class Peak:
    """A value that governs: what it is, where, and the combination it comes from."""

    value: Shown
    x: Shown
    key: str


@dataclass(frozen=True)
class Curve:
    """One envelope: places, largest and smallest value in SI, and the peaks that are named."""

    name: str
    x: tuple[float, ...]
    largest: tuple[float, ...]
    smallest: tuple[float, ...]
    peaks: tuple[Peak, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> tuple[Curve, ...] | Missing:
    """Look up the envelopes and the values that govern, or say why there are none."""
    solver = lookup.item(statement, uses["solver"])
    if solver is None or not solver.get("curves"):
        why = str((solver or {}).get("problem") or "the beam is not solved")
        return Missing(str(uses["solver"]), why)
    found = []
    for curve in solver["curves"]:
        name = str(curve["name"])
        peaks = _peaks(statement, uses["forces"], uses[name], uses[f"{name}_at"])
        x, largest, smallest = (tuple(curve[k]) for k in ("x", "largest", "smallest"))
        found.append(Curve(name, x, largest, smallest, peaks))
    return tuple(found)


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the envelopes in words: the largest and the smallest value of each."""
    curves = gather(statement, uses)
    if isinstance(curves, Missing):
        return f"No envelopes are drawn: {curves.why}."
    told = [
        f"{which} {curve.name} {peak.value.label} at {peak.x.label}, combination {peak.key}"
        for curve in curves
        for which, peak in zip(("largest", "smallest"), curve.peaks, strict=False)
    ]
    return f"Envelopes along the beam: {'; '.join(told)}."


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw shear over moment, the largest as a full line and the smallest dashed."""
    sketch = Sketch()
    curves = gather(statement, uses)
    supports = supports_of(statement, uses)
    if isinstance(curves, Missing) or isinstance(supports, Missing):
        why = curves.why if isinstance(curves, Missing) else supports.why  # type: ignore[union-attr]
        sketch.paragraph(MARGIN, 0.0, f"No envelopes are drawn: {why}.")
        return sketch
    axis = place_axis(supports)
    zero = 0.0
    for curve in curves:
        zero = _panel(sketch, axis, curve, zero) - _GAP
    y = sketch.low - ROW
    sketch.paragraph(
        MARGIN, y,
        "Full line: largest; dashed: smallest. Sagging moment and shear upward on the left part "
        "are drawn upward. Each diagram has its own scale.",
    )  # fmt: skip
    return sketch


def _peaks(
    statement: lookup.Record, table: str, names: Sequence[str], places: Sequence[str]
) -> tuple[Peak, ...]:
    """Return the largest of the first column and the smallest of the second."""
    keys = lookup.rows(statement, table)
    if isinstance(keys, Missing):
        return ()
    found = []
    for name, place, sense in zip(names, places, (1.0, -1.0), strict=True):
        values = lookup.cells(statement, table, name)
        at = lookup.cells(statement, table, place)
        best: Peak | None = None
        for key, value, x in zip(keys, values, at, strict=True):
            if not (isinstance(value, Shown) and isinstance(x, Shown)):
                continue
            if best is None or sense * value.si > sense * best.value.si:
                best = Peak(value, x, key)
        if best is not None:
            found.append(best)
    return tuple(found)


def _panel(sketch: Sketch, axis: Axis, curve: Curve, top: float) -> float:
    """Draw one envelope below ``top``; return the lowest height used."""
    most, least = max(0.0, *curve.largest), min(0.0, *curve.smallest)
    per = _TALL / ((most - least) or 1.0)
    zero = top - _ROOM - most * per
    for one in axis.held:
        x = axis.across(one.x.si)
        sketch.line((x, zero + most * per + 1.5), (x, zero + least * per - 1.5), ink=LIGHT)
    sketch.line((axis.left, zero), (axis.right, zero), weight=1.4)
    for values, dashed in ((curve.largest, False), (curve.smallest, True)):
        points = [(axis.across(x), zero + v * per) for x, v in zip(curve.x, values, strict=True)]
        ends = [(axis.left, zero), *points, (axis.right, zero)]
        gid = f"{'smallest' if dashed else 'largest'}-{curve.name}"
        sketch.line(*ends, weight=1.1, ink=INK if dashed else ACCENT, dashed=dashed, gid=gid)
    sketch.text(MARGIN, top - 1.0, curve.name.capitalize(), ink=GREY)
    for n, peak in enumerate(curve.peaks):
        _named(sketch, axis, peak, zero, per, below=n == 1)
    return zero + least * per - _ROOM


def _named(sketch: Sketch, axis: Axis, peak: Peak, zero: float, per: float, *, below: bool) -> None:
    x, y = axis.across(peak.x.si), zero + peak.value.si * per
    sketch.disc(x, y, 0.8)
    words = f"{peak.value.label}, {peak.key}, at {peak.x.label}"
    half = text_width(words) / 2.0
    centre = min(max(x, MARGIN + half + 16.0), axis.right + 12.0 - half)
    away = -3.6 if below else 3.6
    sketch.text(centre, y + away, words, align="center", patch=True)
