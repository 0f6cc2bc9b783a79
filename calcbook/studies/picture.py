"""The bar picture of a sensitivity."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.errors import DeclarationError
from calcbook.figures import effect_bars
from calcbook.figures.effect_bars import Bar, Bars, Change
from calcbook.studies.sensitivity import SAME, ZERO

if TYPE_CHECKING:
    from calcbook.studies.sensitivity import Changed, Effect, Sensitivity

FORMS = ("png", "svg")


def draw(study: Sensitivity, form: str = "png") -> bytes:
    """Return the picture of ±10 %, 150 mm wide: 'png' for the screen, 'svg' for the page.

    Raises
    ------
    DeclarationError
        The form is not known.
    """
    if form not in FORMS:
        raise DeclarationError(f"a figure cannot be drawn as '{form}'", hint="use 'svg' or 'png'")
    return effect_bars.draw(_bars(study)).render(form)


def describe(study: Sensitivity) -> str:
    """Return the picture in words."""
    return effect_bars.describe(_bars(study))


def _bars(study: Sensitivity) -> Bars:
    still = [e.entry.name for e in study.effects if _unchanged(e)]
    zero = [e.entry.name for e in study.effects if e.low.problem == ZERO]
    told = [f"No change with: {', '.join(still)}."] if still else []
    told += [f"Zero, so not varied: {', '.join(zero)}."] if zero else []
    drawn = [e for e in study.effects if e.entry.name not in {*still, *zero}]
    result = study.result
    words = f"{result.name or result.meaning} = {result.text}"
    return Bars(words, "10 %", tuple(_bar(e, result.si) for e in drawn), " ".join(told))


def _unchanged(effect: Effect) -> bool:
    found = [changed for changed in (effect.low, effect.high) if changed.si is not None]
    return bool(found) and all(changed.change == SAME for changed in found)


def _bar(effect: Effect, base: float) -> Bar:
    label = f"{effect.entry.name} = {effect.entry.text}"
    if effect.entry.kind == "column":
        label = f"{effect.entry.name}, {effect.entry.text}"
    return Bar(label, _change(effect.low, base), _change(effect.high, base))


def _change(changed: Changed, base: float) -> Change:
    if changed.si is None:
        return Change(None, changed.problem)
    return Change(changed.si - base, f"{changed.text} ({changed.change})")
