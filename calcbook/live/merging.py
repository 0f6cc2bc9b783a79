"""Records compared item by item: what differs, and two changes of one record put together."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.recordform import Form, RowRecord

Place = tuple[str, str]  # 'entries', 'schedules' or 'carried', and the name
Items = dict[Place, Any]  # None stands for an item that is not there
KINDS = ("entries", "schedules", "carried")


def items(form: Form) -> Items:
    """Return what a record says, by place."""
    return {(kind, name): item for kind in KINDS for name, item in getattr(form, kind).items()}


def copied(item: Any) -> Any:  # noqa: ANN401  any item
    """Return a copy of an item that shares nothing that can be changed; None stays None."""
    if isinstance(item, list):
        return [replace(row, cells=dict(row.cells)) for row in item]
    return None if item is None else replace(item)


def by_kind(found: Mapping[Place, Any]) -> dict[str, dict[str, Any]]:
    """Return items as ``Record.change`` takes them."""
    return {kind: {n: i for (k, n), i in found.items() if k == kind} for kind in KINDS}


def difference(before: Form, after: Form) -> Items:
    """Return the items of ``after`` that are not the same in ``before``."""
    old, new = items(before), items(after)
    return {p: new.get(p) for p in (*old, *new) if old.get(p) != new.get(p)}


@dataclass(frozen=True)
class Merged:
    """Two changes of one record put together.

    ``mine`` is what I have to change to say both; ``clashes`` are the items both changed, with
    what they say: those stay as I have them.
    """

    mine: Items
    clashes: Items


def merged(base: Form, mine: Form, theirs: Form) -> Merged:
    """Put two changes of a record together, item by item and in schedules row by row."""
    found = Merged({}, {})
    ours, base_items = items(mine), items(base)
    for place, item in difference(base, theirs).items():
        own, former = ours.get(place), base_items.get(place)
        both, clash = together(former, own, item)
        if clash:
            found.clashes[place] = item
        elif both != own:
            found.mine[place] = both
    return found


def together(base: Any, mine: Any, theirs: Any) -> tuple[Any, bool]:  # noqa: ANN401  any item
    """Return one item with both changes, and whether they contradict each other."""
    if theirs in (base, mine):
        return mine, False
    if mine == base:
        return theirs, False
    if all(isinstance(rows, list) for rows in (base, mine, theirs)):
        both = _rows_together(base, mine, theirs)
        return (mine, True) if both is None else (both, False)
    return mine, True


def _rows_together(
    base: Sequence[RowRecord], mine: Sequence[RowRecord], theirs: Sequence[RowRecord]
) -> list[RowRecord] | None:
    """Return the rows with both changes, or None where they contradict each other.

    One side alone may add, take out, move or rename rows; a row may be changed by one side alone.
    """
    former, own, other = ({row.key: row for row in rows} for rows in (base, mine, theirs))
    if list(own) == list(former):
        order = list(other)
    elif list(other) in (list(former), list(own)):
        order = list(own)
    else:
        return None
    found: list[RowRecord] = []
    for key in dict.fromkeys((*order, *former)):
        row, clash = together(former.get(key), own.get(key), other.get(key))
        if clash:
            return None
        if row is not None and key in order:
            found.append(row)
    return found
