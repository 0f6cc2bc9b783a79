"""What a field shows of a text in force, and in which unit a bare number typed in it is taken."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING, Any

from calcbook import typeset, units
from calcbook.errors import CalcbookError
from calcbook.items import Carry, Choice, Text
from calcbook.wording import option_label

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.items import Item

    Plain = Mapping[str, Any]


def display_unit(item: Item, system: str) -> units.Unit:
    """Return the unit printed beside the field of a quantity."""
    kind = getattr(item, "kind", None) or units.KINDS["number"]
    return kind.us if system == "US" else kind.si


@lru_cache(maxsize=8192)
def as_field(text: str, unit: units.Unit) -> tuple[str, units.Unit | None]:
    """Return what a field shows for a quantity as typed, and the unit of a bare number in it.

    A quantity typed in the unit beside the field shows its number alone. One typed in another
    unit stays whole, and then a bare number is not clear: there is no unit to take it in.
    """
    try:
        quantity = units.read_quantity(text)
    except CalcbookError:
        return text, unit
    if quantity.unit.text != unit.text:
        return text, None
    number, written = quantity.parts
    return (number if written else text), unit


def labels_of(item: Item) -> Mapping[str, str]:
    """Return the options of an entry in words, or nothing for one that is typed."""
    return item.labels if isinstance(item, (Choice, Carry)) else {}


def is_words(item: Item) -> bool:
    """Whether an entry is words: no unit, no range."""
    return isinstance(item, Text) or (isinstance(item, Carry) and item.text)


def is_quantity(item: Item) -> bool:
    """Whether what is typed is a number with a unit."""
    return not (labels_of(item) or is_words(item))


def shown_text(item: Item, text: str, system: str) -> str:
    """Return the text a field shows for the text in force."""
    return as_field(text, display_unit(item, system))[0] if is_quantity(item) else text


def bare_unit(item: Item, text: str, system: str) -> units.Unit | None:
    """Return the unit a bare number typed over the text in force is taken in, or None."""
    return as_field(text, display_unit(item, system))[1] if is_quantity(item) else None


def in_force(item: Item, text: str) -> str:
    """Return the text in force as a refusal names it: an option with its words."""
    labels = labels_of(item)
    return option_label(text, labels[text]) if text in labels else text


def options(item: Item) -> list[list[str]]:
    """Return the options of a drop-down as pairs of value and words; refused ones come last."""
    found = [[option, option_label(option, label)] for option, label in labels_of(item).items()]
    refused = getattr(item, "refused", {}) if found else {}
    return found + [[option, f"{option} (not covered)"] for option in refused]


def beside(item: Item, value: Plain | None, text: str, system: str) -> str:
    """Return what stands beside a field: the unit, or the value in the workbook's unit."""
    unit = display_unit(item, system)
    if as_field(text, unit)[0] == text and value and value["text"] and value["unit"]:
        return f"= {typeset.number(value['text'], value['unit'], 'plain')}"
    return units.pretty_unit(unit.text)
