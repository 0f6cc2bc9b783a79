"""The page of a section as plain data, and what of it changed since it was last sent."""

from __future__ import annotations

from typing import Any

Row = dict[str, Any]


class Page:
    """What a browser needs to draw a section: the head and the rows in order.

    ``data`` is complete at any time, for a browser that comes later; a browser that is there
    gets patches. ``serial`` counts them, so that a browser that missed one can ask for all.
    """

    def __init__(self) -> None:
        self.data: dict[str, Any] = {"serial": 0, "ack": 0, "head": {}, "order": [], "rows": {}}

    @property
    def rows(self) -> dict[str, Row]:
        """The rows by their id, in order."""
        return {key: self.data["rows"][key] for key in self.data["order"]}

    def acknowledge(self, number: int) -> dict[str, Any]:
        """Return a patch that says only which message was dealt with last."""
        self.data["ack"] = number
        return {"type": "patch", "base": self.data["serial"], "serial": self.data["serial"],
                "ack": number}  # fmt: skip

    def update(self, head: dict[str, Any], rows: dict[str, Row]) -> dict[str, Any] | None:
        """Take a new head and new rows in order; return the patch, or None without a change."""
        patch: dict[str, Any] = {}
        changed = {k: v for k, v in head.items() if self.data["head"].get(k) != v}
        if changed:
            self.data["head"] = head
            patch["head"] = changed
        self._take_rows(rows, patch)
        if list(rows) != self.data["order"]:
            self.data["order"] = patch["order"] = list(rows)
        if not patch:
            return None
        base = self.data["serial"]
        self.data["serial"] = base + 1
        return {"type": "patch", "base": base, "serial": base + 1, "ack": self.data["ack"], **patch}

    def _take_rows(self, rows: dict[str, Row], patch: dict[str, Any]) -> None:
        former = self.data["rows"]
        for key, row in rows.items():
            old = former.get(key)
            if old is row or old == row:
                continue
            if old is None or "cells" not in row or "cells" not in old:
                patch.setdefault("rows", {})[key] = row
                continue
            frame = {k: v for k, v in row.items() if k != "cells"}
            if frame != {k: v for k, v in old.items() if k != "cells"}:
                patch.setdefault("rows", {})[key] = frame
            cells = changed_cells(old["cells"], row["cells"])
            if cells:
                patch.setdefault("cells", {})[key] = cells
        self.data["rows"] = dict(rows)


def changed_cells(old: dict[str, Row], new: dict[str, Row]) -> dict[str, Row]:
    """Return the cells of a table that are not what they were, by row and column."""
    found = {}
    for key, row in new.items():
        before = old.get(key, {})
        cells = {column: cell for column, cell in row.items() if before.get(column) != cell}
        if cells:
            found[key] = cells
    return found
