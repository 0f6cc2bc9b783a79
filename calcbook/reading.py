"""One value read strictly against its item: a quantity in its range, an option, words."""

from __future__ import annotations

import re
from functools import lru_cache

from calcbook import units
from calcbook.errors import CalcbookError, InputError, near_match
from calcbook.items import Carry, Choice, Entry, Item, Text

SLACK = 1e-9  # a limit typed in another unit is not missed by the last bit of a float


def read_value(item: Item, text: str, *, bare: units.Unit | None = None) -> units.Quantity | str:
    """Read one entry, choice or text as typed.

    Parameters
    ----------
    item
        The Entry, Choice, Text or Carry the text is typed for.
    bare
        The unit a bare number is taken in: only a live field or cell shows one beside it.

    Returns
    -------
    A Quantity, or the option or words.

    Raises
    ------
    QuantityError
        The text is no quantity of the right kind.
    InputError
        It is out of range, no option, or words that do not fit.
    """
    if isinstance(item, Text) or (isinstance(item, Carry) and item.text):
        return _read_words(item, text)
    if isinstance(item, (Choice, Carry)) and item.labels:
        return read_option(item, text)
    if not isinstance(item, (Entry, Carry)):
        raise InputError(f"{item.name} takes no value")
    try:
        quantity = units.read_quantity(text, dimension_of(item), bare=bare)
    except CalcbookError as error:
        raise error.at(item.name) from None
    refuse_outside(item, quantity.text, quantity.si)
    return quantity


def _read_words(item: Item, text: str) -> str:
    pattern = getattr(item, "pattern", "")
    if pattern and not re.fullmatch(pattern, text):
        refusal = getattr(item, "refusal", "")
        raise InputError(
            f"'{text}' does not fit {item.meaning.lower()}", where=item.name, hint=refusal
        )
    return text


def read_option(item: Choice | Carry, text: str) -> str:
    """Return an option of a choice; InputError with the nearest one where it is none."""
    if text in item.labels:
        return text
    reason = getattr(item, "refused", {}).get(text)
    if reason:
        raise InputError(f"'{text}' is refused: {reason}", where=item.name)
    hint = near_match(text, item.labels) or f"choose one of: {', '.join(item.labels)}"
    raise InputError(f"'{text}' is no option of {item.name}", where=item.name, hint=hint)


def refuse_outside(item: Entry | Carry, text: str, si: float) -> None:
    """Refuse a value outside the range of its item; ``text`` is the value in the message."""
    dimension = dimension_of(item)
    low, high = (_limit(t, dimension) if t else None for t in (item.low, item.high))
    below = low is not None and si < low - SLACK * abs(low)
    above = high is not None and si > high + SLACK * abs(high)
    if below or above:
        raise InputError(
            f"{text} is outside the range {range_text(item)}",
            where=item.name,
            hint=getattr(item, "refusal", "") or "check the number and its unit",
        )


@lru_cache(maxsize=1024)
def _limit(text: str, dimension: units.Dimension) -> float:
    return units.read_quantity(text, dimension).si


def dimension_of(item: Entry | Carry) -> units.Dimension:
    """Return the dimension of what is typed for an item."""
    if item.kind is None:
        raise InputError(f"{item.name} has no kind of quantity")
    return item.kind.dimension


def range_text(item: Item) -> str:
    """Return the permitted range in words, or ''."""
    low, high = getattr(item, "low", ""), getattr(item, "high", "")
    if low and high:
        return f"{low} to {high}"
    return f"{low} or more" if low else f"{high} or less" if high else ""
