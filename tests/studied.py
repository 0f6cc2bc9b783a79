"""Studies of workbooks as tests ask for them, and results recomputed without them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook import studies
from calcbook.units import read_quantity

if TYPE_CHECKING:
    from calcbook.studies import Effect, Sensitivity
    from calcbook.workbook import Workbook


def study(workbook: Workbook, result: str) -> Sensitivity:
    """Return the sensitivity of a result of a workbook that was just declared."""
    workbook.evaluate()
    return studies.sensitivity(workbook, result)


def effect(found: Sensitivity, name: str) -> Effect:
    """Return the effect of one entry."""
    return next(one for one in found.effects if one.entry.name == name)


def slope(found: Sensitivity, name: str) -> float:
    """Return the one derivative to an entry, in SI."""
    (only,) = effect(found, name).slopes
    assert only.side == ""
    return only.si


def recomputed(workbook: Workbook, name: str, text: str, result: str) -> float:
    """Return a line of a workbook with a text in the place of an entry."""
    values = {**workbook.readings.values, name: read_quantity(text).si}
    found = workbook.program.evaluate(values, workbook.readings.rows, {}, {}).values[result]
    assert isinstance(found, float)
    return found
