"""Pieces of running text as plain data, the way page.typ reads them.

A piece is a string, printed literally, or a mapping whose ``t`` says what it is.
"""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from calcbook import typeset
from calcbook.wording import symbols_in

if TYPE_CHECKING:
    from collections.abc import Sequence

Node = str | dict[str, Any]
LONG_RUN = re.compile(r"[^\s\u200b]{25,}")
LONGEST_RUN = 24
BREAK_HERE = "\u200b"
RUN_OF_NUMBERS = 3


def words(text: str) -> str:
    """Return text that can be broken over lines: a very long word gets places to break at."""
    return LONG_RUN.sub(_breakable, str(text))


def _breakable(found: re.Match[str]) -> str:
    run = found[0]
    return BREAK_HERE.join(run[i : i + LONGEST_RUN] for i in range(0, len(run), LONGEST_RUN))


def phrase(text: str) -> list[Node]:
    """Return words of a workbook, with a symbol such as q_z among them set as a symbol."""
    return [symbol(p) if is_symbol else words(p) for p, is_symbol in symbols_in(str(text))]


def numbers(given: Sequence[str]) -> str:
    """Return item numbers in a row, three or more that follow each other as '2.3 to 2.9'."""
    runs: list[list[str]] = []
    for number in given:
        if runs and _follows(runs[-1][-1], number):
            runs[-1].append(number)
        else:
            runs.append([number])
    return ", ".join(
        f"{run[0]} to {run[-1]}" if len(run) >= RUN_OF_NUMBERS else ", ".join(run) for run in runs
    )


def _follows(before: str, after: str) -> bool:
    (head, _, last), (same, _, following) = before.rpartition("."), after.rpartition(".")
    both = last.isdecimal() and following.isdecimal()
    return head == same and both and int(following) == int(last) + 1


def strong(*content: Node) -> Node:
    """Return bold text."""
    return {"t": "strong", "c": list(content)}


def typed(*content: Node) -> Node:
    """Return text marked as typed by the engineer."""
    return {"t": "typed", "c": list(content)}


def math(code: str, alt: str) -> Node:
    """Return a formula in running text, with the words a screen reader speaks."""
    return {"t": "math", "m": code, "alt": alt}


def link(target: str | None, *content: Node) -> list[Node]:
    """Return text that leads to a target, or the bare text where there is no target."""
    return [{"t": "link", "to": target, "c": list(content)}] if target else list(content)


def page(target: str | None) -> list[Node]:
    """Return 'p. 7' for the page a target stands on, or nothing."""
    return [{"t": "page", "to": target}] if target else []


def symbol(name: str) -> Node:
    """Return a symbol of the formulas."""
    return math(typeset.symbol(name, "typst"), typeset.symbol(name, "plain"))


def joined(parts: Sequence[Sequence[Node]], separator: str) -> list[Node]:
    """Return the parts one after the other with a separator between them."""
    result: list[Node] = []
    for part in parts:
        if part:
            result += [separator, *part] if result else part
    return result
