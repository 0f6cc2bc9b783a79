"""Where each item of the package stands, so that others can lead to it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.pack.repeats import Repeats

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

Statement = dict[str, Any]
Item = dict[str, Any]


def sections(statement: Statement) -> Iterator[dict[str, Any]]:
    """Yield the sections of a statement that apply."""
    for part in statement["parts"]:
        if part["kind"] == "section" and part.get("applies", True):
            yield part


def items(statement: Statement) -> Iterator[Item]:
    """Yield the items of a statement that apply, in order."""
    for section in sections(statement):
        for item in section["items"]:
            if item.get("applies", True):
                yield item


def printed_name(statement: Statement) -> str:
    """Return the title of a workbook with its mark."""
    mark = statement.get("mark")
    return f"{statement['title']}, {mark}" if mark else str(statement["title"])


class Anchors:
    """Labels of workbooks, sections and items; an item that is not printed has none."""

    def __init__(self, statements: Sequence[Statement]) -> None:
        self._known: set[str] = set()
        self._books: dict[tuple[str, str | None], int] = {}
        self._names: dict[tuple[int, str], str] = {}
        repeats = Repeats(statements)
        for index, statement in enumerate(statements):
            self._books.setdefault((statement["workbook"], statement.get("mark")), index)
            for section in sections(statement):
                if not repeats.section_stands(index, section):
                    self._add(index, section, repeats)
        self._given: set[str] = set()

    def _add(self, index: int, section: dict[str, Any], repeats: Repeats) -> None:
        """Note what a section prints."""
        for item in section["items"]:
            said = item["kind"] == "remark" and not repeats.remark_is_new(index, item)
            if said or not item.get("applies", True):
                continue
            row = item.get("governing") or {}
            for printed in (item, *row.get("lines", ())):
                self._known.add(f"{index}-{printed['number']}")
            if item.get("name"):
                self._names.setdefault((index, item["name"]), item["number"])

    def give(self, index: int, number: str) -> str | None:
        """Return the label to put on an item; only the first item of a number gets it."""
        key = f"{index}-{number}"
        if key in self._given or key not in self._known:
            return None
        self._given.add(key)
        return key

    def item(self, index: int, number: str | None) -> str | None:
        """Return the label of the item of this number in a workbook, if it is printed."""
        key = f"{index}-{number}"
        return key if key in self._known else None

    def origin(self, origin: dict[str, Any]) -> tuple[str | None, str]:
        """Return the label and number of the item a carried value was taken from."""
        index = self._books.get((origin["workbook"], origin.get("mark")))
        number = origin.get("number") or ""
        if index is None:
            return None, number
        number = number or self._names.get((index, origin.get("name", "")), "")
        return self.item(index, number), number
