"""What of a statement nobody has confirmed for its job: entries by item, schedules by row."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Mapping

ENTERED = frozenset({"entry", "choice", "text"})


def is_input(item: Mapping[str, Any]) -> bool:
    """Whether an item is supplied here: an entry, or a fallback where nothing was carried."""
    return item["kind"] in ENTERED or (item["kind"] == "carried" and bool(item["fallback"]))


def is_unconfirmed(item: Mapping[str, Any]) -> bool:
    """Whether an item holds something supplied here that nobody confirmed for this job.

    Words that were left empty say nothing, and there is nothing in them to confirm.
    """
    empty_words = item["kind"] == "text" and not item["text"]
    return is_input(item) and not item["confirmed"] and not empty_words


def unconfirmed_rows(item: Mapping[str, Any]) -> list[str]:
    """Return the keys of the rows of a schedule that nobody confirmed; no other item has any."""
    if item["kind"] != "schedule" or item["fixed"]:
        return []
    return [key for key, by in zip(item["rows"], item["confirmed"], strict=False) if not by]
