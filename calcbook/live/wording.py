"""What is said about items on screen and in a cell's output, in words."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.standing import is_unconfirmed, unconfirmed_rows

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    Plain = Mapping[str, Any]

APPLY = "Run all cells again to apply."
LEFT_OVER = "The cell that declared this section was deleted or changed; run all cells again."
USED_NOW = "the results here use the value as it is now"
SILENT = "The kernel has not answered: what was typed last is taken when it does."


def initials(confirmed: str) -> str:
    """Return who confirmed; the day stays in the record and the pack."""
    return confirmed.rpartition(" ")[0] or confirmed


def standing(item: Plain) -> str:
    """Return whether a value stands confirmed, and by whom.

    Returns '' where nothing is entered, or what is entered is refused.
    """
    if item.get("problem"):
        return ""
    if item.get("confirmed"):
        return f"confirmed {initials(item['confirmed'])}"
    if not is_unconfirmed(item):
        return ""
    if item.get("fallback"):
        return "not confirmed: nothing was carried, the fallback serves"
    return "not confirmed"


def range_words(item: Plain) -> str:
    """Return the permitted range, or ''."""
    return f"range {item['range']}" if item.get("range") else ""


def source_words(item: Plain) -> str:
    """Return where a value comes from; that it is not said, for a value or an option."""
    if item.get("source"):
        return str(item["source"])
    return "source not given" if item["kind"] in ("entry", "choice") else ""


def origin_words(item: Plain) -> str:
    """Return where a value was brought forward from."""
    origin = item["from"]
    number = f" {origin['number']}" if origin.get("number") else ""
    return f"from {origin['workbook'].replace('-', ' ')}{number}"


def moved_words(item: Plain) -> str:
    """Return what a stale value was when it was taken and what it is now."""
    was = (item.get("taken") or {}).get("text")
    return f"moved on: was {was} when taken" if was else "moved on since it was taken"


def rows_standing(item: Plain) -> Iterator[str]:
    """Yield which rows are confirmed and which are not."""
    rows = item["rows"]
    waiting = unconfirmed_rows(item)
    by = dict.fromkeys(initials(c) for c in item["confirmed"] if c)
    if by and rows:
        count = f": {len(rows) - len(waiting)} of {len(rows)} rows" if waiting else ""
        yield f"confirmed {', '.join(by)}{count}"
    if waiting:
        which = "every row" if len(waiting) == len(rows) else ", ".join(waiting)
        yield f"not confirmed: {which}"
    yield from dict.fromkeys(source for source in item["sources"] if source)


def schedule_troubles(item: Plain) -> Iterator[str]:
    """Yield what is wrong in a schedule: columns not accepted, cells without a value."""
    yield from (f"Not accepted: {text}" for text in item.get("errors", ()))
    said = [item.get("problem")]
    for column in item["columns"]:
        for problem in column["problem"] or ():
            if problem and problem not in said and not problem.startswith("not available"):
                said.append(problem)
                yield f"{column['name']}: {problem}"
