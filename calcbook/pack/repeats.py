"""What a workbook with marks says again and again: printed with the first mark, referred to after.

The first mark of a workbook prints its prose, its remarks and what the columns of its schedules
are. A later mark leaves out what is word for word the same, whole sections among it, and says
where it stands.
"""

from __future__ import annotations

import json
import re
from typing import TYPE_CHECKING, Any, TypeVar

from calcbook.pack.nodes import Node, joined, link, page, words

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.pack.anchors import Item, Statement

Said = TypeVar("Said")


class Repeats:
    """Remembers what each workbook of a package has said.

    Parameters
    ----------
    statements
        Everything that is printed, in order.
    """

    def __init__(self, statements: Sequence[Statement]) -> None:
        self._first: dict[str, int] = {}
        for index, statement in enumerate(statements):
            self._first.setdefault(statement["workbook"], index)
        self._statements = statements
        self._said: dict[str, set[str]] = {}

    def first(self, index: int) -> int:
        """Return the place of the first mark of the same workbook, its own where it is that."""
        return self._first[self._statements[index]["workbook"]]

    def later(self, index: int) -> bool:
        """Whether an earlier mark of the same workbook was printed."""
        return self.first(index) != index

    def new(self, index: int, said: Sequence[Said]) -> list[Said]:
        """Return what the workbook has not said before, and remember it."""
        known = self._said.setdefault(self._statements[index]["workbook"], set())
        fresh = []
        for one in said:
            text = json.dumps(one, sort_keys=True)
            if text not in known:
                fresh.append(one)
        known.update(json.dumps(one, sort_keys=True) for one in said)
        return fresh

    def section_stands(self, index: int, section: Mapping[str, Any]) -> bool:
        """Whether the first mark has a section that is the same in everything it prints."""
        if not self.later(index):
            return False
        others = self._statements[self.first(index)]["parts"]
        same = (o for o in others if o.get("title") == section["title"])
        return any(_printed(o) == _printed(section) for o in same)

    def remark_is_new(self, index: int, item: Item) -> bool:
        """Whether a remark was not printed with an earlier mark; it is remembered."""
        return bool(self.new(index, [["remark", item["tone"], item["text"]]]))

    def reference(self, index: int, told: str) -> list[Node]:
        """Return words that end in the first mark and its page, where a later mark refers to it."""
        first = self.first(index)
        label = f"book-{first}"
        statement = self._statements[first]
        name = words(", ".join(str(p) for p in (statement["title"], statement["mark"]) if p))
        return [*joined([[told, *link(label, name)], page(label)], ", "), "."]


def _printed(section: Mapping[str, Any]) -> str:
    """Return a section as text, without what is not its own: who uses its items."""
    parts = {k: section.get(k) for k in ("applies", "why", "items")}
    return re.sub(r'"used_by": \[[^]]*\]', "", json.dumps(parts, sort_keys=True))
