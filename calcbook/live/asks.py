"""What a person is asked when two kernels changed the same item, or a record was damaged."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.live.merging import items

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from calcbook.live.merging import Place
    from calcbook.live.writing import Kept
    from calcbook.recordform import CarriedRecord, EntryRecord, RowRecord

DAMAGED = "damaged"
MINE, THEIRS = "mine", "theirs"
ANEW, LATER = "anew", "later"
Ask = dict[str, Any]


def open_questions(kept: Kept, *, hushed: bool) -> Iterator[Ask]:
    """Yield the questions about a record as plain data: id, text, options as (id, words).

    ``hushed``: that it is damaged was answered with 'later'.
    """
    ours = items(kept.record.content())
    for place, theirs in kept.held.items():
        yield _clash(place, ours.get(place), theirs)
    if kept.damaged and not hushed:
        yield {
            "id": DAMAGED,
            "text": f"The record on disk cannot be read. {kept.unwritten()}",
            "options": [
                (ANEW, f"write it anew; the damaged file is kept as {kept.path.name}.damaged"),
                (LATER, "leave it as it is"),
            ],
        }


def place_of(ask: str) -> Place:
    """Return the item a question is about."""
    kind, _, name = ask.partition("/")
    return kind, name


def _clash(place: Place, mine: Any, theirs: Any) -> Ask:  # noqa: ANN401  any item
    kind, name = place
    if kind == "schedules":
        here, there = _rows_told(mine, theirs), _rows_told(theirs, mine)
    else:
        here, there = _told(mine), _told(theirs)
        if here == there:
            here, there = f"{here}{_more(mine)}", f"{there}{_more(theirs)}"
    return {
        "id": f"{kind}/{name}",
        "text": f"{name} was changed elsewhere as well. Here: {here}. On disk: {there}.",
        "options": [(MINE, f"keep what is here: {here}"), (THEIRS, f"take what is there: {there}")],
    }


def _told(item: EntryRecord | CarriedRecord | None) -> str:
    return "the template's value" if item is None else item.value


def _more(item: EntryRecord | CarriedRecord | None) -> str:
    """Return source and confirmation, which tell two equal values apart."""
    source = getattr(item, "source", "")
    by = item.confirmed.by if item is not None and item.confirmed is not None else ""
    stands = f"confirmed {by}" if by else "not confirmed"
    return f" ({f'source {source}' if source else 'no source'}, {stands})"


def _rows_told(rows: Sequence[RowRecord] | None, other: Sequence[RowRecord] | None) -> str:
    """Return the rows that are not the same in the other ones, in words."""
    if rows is None:
        return "the template's rows"
    keys, others = [row.key for row in rows], [row.key for row in other or ()]
    told = [f"the rows {', '.join(keys) or 'none'}"] if keys != others else []
    for row in rows:
        if row not in (other or ()) and (row.key in others or len(keys) == len(others)):
            cells = ", ".join(f"{column} = {text}" for column, text in row.cells.items())
            told.append(f"{row.key}: {cells}")
    return "; ".join(told) or "the same cells, otherwise confirmed"
