"""A filled-in workbook read through its statement, and rows as a schedule is filled in."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook import codes
from calcbook.record import RowRecord
from calcbook.run import all_items, find_item

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.workbook import Workbook

CODES = codes.names()


@dataclass(frozen=True)
class Sheet:
    """An evaluated workbook, read through its statement only; ``book`` is what evaluated it."""

    statement: Mapping[str, Any]
    book: Workbook

    def item(self, name: str) -> Mapping[str, Any]:
        """Return an item, which has to be there and without a problem."""
        found = find_item(self.statement, name)
        assert found is not None, f"there is no {name}"
        assert found["kind"] != "error", found
        assert not found["problem"], found["problem"]
        return dict(found)

    def value(self, name: str) -> float:
        """Return the SI value of an entry, a carried value or a line that applies."""
        found = self.item(name)
        assert found["applies"], f"{name} is not applied: {found['why']}"
        assert found["value"]["si"] is not None, f"{name} has no value"
        return float(found["value"]["si"])

    def column(self, schedule: str, name: str) -> list[float]:
        """Return the SI values of a column."""
        found = next(c for c in self.item(schedule)["columns"] if c["name"] == name)
        assert found["applies"], f"{name} is not applied"
        assert not found["problem"], found["problem"]
        return [float(value) for value in found["si"]]

    def by_key(self, schedule: str, name: str) -> dict[str, float]:
        """Return the SI values of a column by the key of the row."""
        rows = self.item(schedule)["rows"]
        return dict(zip(rows, self.column(schedule, name), strict=True))

    def items(self) -> list[dict[str, Any]]:
        """Return every item in order."""
        found: list[dict[str, Any]] = all_items(self.statement)
        return found

    def checks(self) -> dict[str, bool | None]:
        """Return the verdict of each check that applies, by what it requires."""
        found = [i for i in self.items() if i["kind"] == "check" and i["applies"]]
        return {str(item["meaning"]): item["satisfied"] for item in found}

    def numbers(self) -> dict[str, float]:
        """Return every computed value there is, by name, and by row for columns."""
        out: dict[str, float] = {}
        for item in self.items():
            if item["kind"] == "line" and item["value"]["si"] is not None:
                out[str(item["name"])] = item["value"]["si"]
            for column in item.get("columns", ()):
                if column["role"] == "computed" and column["applies"]:
                    out |= {f"{column['name']} {n}": v for n, v in enumerate(column["si"])}
        return out


def rows_of(schedule: str, *cells: Mapping[str, str]) -> dict[str, list[RowRecord]]:
    """Return rows as a schedule is filled in; ``key`` names each row, else its number does."""
    return {
        schedule: [
            RowRecord(row.get("key", str(n)), {k: v for k, v in row.items() if k != "key"})
            for n, row in enumerate(cells, 1)
        ]
    }


def levels_at(*elevations: str) -> dict[str, list[RowRecord]]:
    """Return the rows of the wind workbook's levels, highest first."""
    return rows_of("levels", *({"elevation": z} for z in elevations))
