"""Words that screen, paper and terminal share."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Mapping


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
