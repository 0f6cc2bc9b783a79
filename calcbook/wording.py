"""Words that screen, paper and terminal share."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from calcbook import typeset

if TYPE_CHECKING:
    from collections.abc import Mapping

FROM_MEMORY = "from memory: confirm against the code"
OUTSIDE = {"hold": "outside them the value at the edge holds", "refuse": "not valid outside them"}


def amount(value: Mapping[str, Any] | None) -> str:
    """Return a value of a statement with its unit as plain text, or that there is none."""
    if not value or not value.get("text"):
        return "not available"
    return typeset.number(value["text"], value.get("unit", ""), "plain")


def verdict(check: Mapping[str, Any]) -> str:
    """Return the verdict of a check."""
    return {True: "satisfied", False: "NOT SATISFIED", None: "not decided"}[check["satisfied"]]


def not_applied(part: Mapping[str, Any]) -> str:
    """Return that a section or an item does not apply, and why."""
    return f"not applied: {part['why']}" if part.get("why") else "not applied"


def option_label(option: str, label: str) -> str:
    """Return an option as it is read: its letter or name, and its words."""
    if not option:
        return "nothing chosen"
    named = re.search(rf"\b{re.escape(option)}\b", label, re.IGNORECASE)
    return label if named else f"{option}: {label}"


def option_words(item: Mapping[str, Any]) -> str:
    """Return the option of a choice, or of a carried one, as it is read."""
    option = item.get("option") or ""
    return option_label(option, (item.get("labels") or {}).get(option) or option)
