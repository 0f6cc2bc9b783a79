"""What is noted of a carried value when it is taken."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.fingerprint import item_digest
from calcbook.record import CarriedRecord
from calcbook.wording import counted

if TYPE_CHECKING:
    from collections.abc import Mapping


def taken_now(origin: str, item: Mapping[str, Any]) -> CarriedRecord:
    """Return what is noted of a carried item as it is now.

    Parameters
    ----------
    origin
        The workbook and the name it comes from: 'design-basis.h_m'.
    item
        The item of the source's statement.
    """
    value = item.get("value") or {}
    text = f"{value.get('text', '')} {value.get('unit', '')}".strip()
    rows = counted(len(item["rows"]), "row") if "rows" in item else ""
    return CarriedRecord(
        value=text or str(item.get("option") or item.get("text") or rows),
        si=value.get("si"), option=str(item.get("option") or ""), origin=origin,
        sign=str(item.get("sign") or ""), fingerprint=item_digest(item),
    )  # fmt: skip
