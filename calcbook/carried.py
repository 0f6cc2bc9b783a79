"""Values brought forward: taken from another workbook's statement, or refused with the reason."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook import units
from calcbook.errors import CarryError, near_match
from calcbook.reading import dimension_of, read_option, refuse_outside

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.items import Carry


@dataclass(frozen=True)
class Carried:
    """A result brought forward: the item of the source's statement, and how it stands.

    ``item`` is None when the source has no such result, and ``problem`` says why;
    ``taken`` is the value last taken where it differs from the source's (then it is stale).
    """

    origin: str
    item: Mapping[str, Any] | None
    fingerprint: str = ""
    problem: str = ""
    taken: Mapping[str, Any] | None = None
    confirmed: str = ""


def carried_value(item: Carry, carried: Carried) -> float | str:
    """Return a scalar brought forward, in SI, or the option or words.

    Raises CarryError when the source has no such result, another dimension or sign sense.
    """
    source = carried.item
    if source is None:
        raise CarryError(carried.problem or f"{carried.origin} is not there", where=item.name)
    if source.get("problem"):
        raise CarryError(f"{carried.origin}: {source['problem']}", where=item.name)
    if not source.get("applies", True):
        why = source.get("why")
        raise CarryError(
            f"{carried.origin} does not apply{f': {why}' if why else ''}", where=item.name
        )
    if item.text:
        if "text" not in source:
            raise CarryError(f"{carried.origin} holds no words", where=item.name)
        return str(source["text"])
    if item.labels:
        return read_option(item, str(source.get("option", "")))
    value = source.get("value")
    if not isinstance(value, dict) or value.get("si") is None:
        raise CarryError(f"{carried.origin} has no value", where=item.name)
    _refuse_other_kind(item, carried, str(value["unit"]))
    refuse_outside(item, f"{value['text']} {value['unit']}".strip(), float(value["si"]))
    sign = str(source.get("sign", ""))
    if item.sign and sign != item.sign:
        raise CarryError(
            f"{carried.origin} is positive {sign or 'in no stated sense'}, "
            f"here positive {item.sign} is expected",
            where=item.name,
        )
    return float(value["si"])


def _refuse_other_kind(item: Carry, carried: Carried, unit: str) -> None:
    theirs, ours = units.unit(unit).dimension, dimension_of(item)
    if theirs != ours:
        raise CarryError(
            f"{carried.origin} is {units.dimension_name(theirs)}, "
            f"here {units.dimension_name(ours)} is expected",
            where=item.name,
        )


def carried_column(item: Carry, carried: Carried) -> Mapping[str, Any]:
    """Return the column brought forward; CarryError when it is not there or of another kind."""
    source = carried.item or {}
    for column in source.get("columns", ()):
        if column["name"] == item.origin:
            if not (item.labels or item.text):
                _refuse_other_kind(item, carried, str(column["unit"]))
            return column  # type: ignore[no-any-return]
    hint = near_match(item.origin, [c["name"] for c in source.get("columns", ())])
    raise CarryError(f"{carried.origin} has no column '{item.origin}'", where=item.name, hint=hint)


def refuse_cell(item: Carry, cell: object, column: Mapping[str, Any]) -> None:
    """Refuse a carried cell that is no option here, or out of range; None has its own reason."""
    if item.labels:
        read_option(item, str(cell))
    elif not item.text and cell is None:
        raise CarryError("has no value there", where=item.name)
    elif not item.text:
        si = float(cell)  # type: ignore[arg-type]
        text = units.format_number(si / units.unit(column["unit"]).factor, 3)
        refuse_outside(item, f"{text} {column['unit']}", si)
