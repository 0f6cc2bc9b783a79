"""A section's Markdown (with LaTeX) and plain text: the stable output of its cell.

Computed from the statement alone; nothing in it depends on the day, the machine or the kernel.
"""

from __future__ import annotations

import logging
import re
from typing import TYPE_CHECKING, Any, TypeVar

from calcbook import figures, formula, typeset, units
from calcbook.errors import CalcbookError
from calcbook.live import blocks as parts
from calcbook.live.wording import LEFT_OVER
from calcbook.wording import not_applied

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping

    from calcbook.live.blocks import Block, Equation, Grid, Run, Words

    Plain = Mapping[str, Any]

__all__ = ["amount_text", "described", "drawn", "markdown", "picture", "plain"]

T = TypeVar("T")
_log = logging.getLogger(__name__)
_SPECIAL = re.compile(r"([\\`*_\[\]<>|$#~])")


def markdown(statement: Plain, section: Plain) -> str:
    """Return a section as Markdown: formulas in LaTeX split at '=', schedules as tables."""
    return _Markdown(statement).section(section)


def plain(statement: Plain, section: Plain) -> str:
    """Return a section as plain text."""
    return _PlainText(statement).section(section)


def picture(statement: Plain, section: Plain) -> bytes | None:
    """Return the PNG of a section's figure, or None where it has none that can be drawn."""
    for item in section["items"]:
        if item["kind"] == "figure" and item["applies"]:
            try:
                return drawn(statement, item)
            except CalcbookError:
                return None
    return None


def drawn(statement: Plain, item: Plain) -> bytes:
    """Return a figure as PNG; one whose workbook has not changed since is not drawn again.

    Raises CalcbookError where it cannot be drawn; a fault of the program is one as well, so that
    the section around the figure is shown.
    """
    place = (statement["workbook"], statement["mark"], item["number"])
    shows = (statement["fingerprint"], item["figure"], repr(sorted(item["uses"].items())))
    if _DRAWN.get(place, ((), b""))[0] != shows:
        _DRAWN[place] = (shows, _guarded(figures.draw, statement, item, "png"))
    return _DRAWN[place][1]


def described(statement: Plain, item: Plain) -> str:
    """Return what a figure shows, in words; raises as ``drawn``."""
    return _guarded(figures.describe, statement, item)


def _guarded(draw: Callable[..., T], *given: object) -> T:
    try:
        return draw(*given)
    except CalcbookError:
        raise
    except Exception as error:
        _log.info("a figure cannot be drawn", exc_info=True)
        raise CalcbookError(f"{type(error).__name__}: {error}") from error


_DRAWN: dict[tuple[str, str | None, str], tuple[tuple[str, ...], bytes]] = {}


class _Printer:
    """Prints blocks; an output says how words, formulas and tables look in it."""

    def __init__(self, statement: Plain) -> None:
        self.statement = statement

    def section(self, section: Plain) -> str:
        pieces = [self.title(f"{section['number']} {section['title']}")]
        if section.get("left_over"):
            pieces.append(self.strong(LEFT_OVER))
        if section["applies"]:
            pieces += [self.block(b) for b in parts.blocks(section)]
        else:
            pieces.append(self.text(not_applied(section)))
        return "\n\n".join(pieces) + "\n"

    def block(self, block: Block) -> str:
        number = self.number(block.number) if block.number else ""
        head = " ".join(p for p in (number, self.words(block.words)) if p)
        notes = [self.words(note) for note in block.remarks]
        says = [self.words(line) for line in block.says]
        if block.kind in ("entry", "text", "choice", "carried", "check"):
            head, says = f"{head}: {'; '.join(says)}", []
        if block.kind == "idle" and says:
            head, says = f"{head} ({'; '.join(says)})", []
        if notes:
            head = f"{head} ({'; '.join(notes)})"
        pieces = [head]
        if block.equation:
            pieces.append(self.equation(block.equation))
        if block.grid:
            pieces.append(self.grid(block.grid))
        pieces += says
        if block.kind == "figure":
            pieces.append(self.text(self._told(block.item)))
        pieces += [self.trouble(text) for text in block.troubles]
        return "\n\n".join(pieces)

    def _told(self, item: Plain) -> str:
        try:
            return described(self.statement, item)
        except CalcbookError as error:
            return f"The figure cannot be drawn: {error}"

    def words(self, words: Words) -> str:
        return "".join(map(self.run, words))

    def run(self, run: Run) -> str:
        match run:
            case str():
                return self.text(run)
            case parts.Strong(text):
                return self.strong(text)
            case parts.Symbol(name):
                return self.math(typeset.symbol(name, self.form))
            case parts.Relation(text):
                return self.math(typeset.expression(formula.parse(text), self.form))
            case parts.Amount(text, unit):
                return self.text(amount_text(text, unit))

    form = "plain"

    def text(self, text: str) -> str:
        return text

    def math(self, code: str) -> str:
        return code

    def title(self, text: str) -> str:
        return f"{text}\n{'=' * len(text)}"

    def strong(self, text: str) -> str:
        return text

    def number(self, number: str) -> str:
        return number

    def trouble(self, text: str) -> str:
        return self.strong(f"Problem: {text}")

    def equation(self, equation: Equation) -> str:
        raise NotImplementedError

    def grid(self, grid: Grid) -> str:
        raise NotImplementedError


class _Markdown(_Printer):
    form = "latex"

    def text(self, text: str) -> str:
        return _SPECIAL.sub(r"\\\1", " ".join(text.split()))

    def run(self, run: Run) -> str:
        if isinstance(run, str):
            start, end = run[: len(run) - len(run.lstrip())], run[len(run.rstrip()) :]
            return f"{start}{self.text(run)}{end}" if run.strip() else run
        return super().run(run)

    def math(self, code: str) -> str:
        return f"${code}$"

    def title(self, text: str) -> str:
        return f"### {self.text(text)}"

    def strong(self, text: str) -> str:
        return f"**{self.text(text)}**"

    def number(self, number: str) -> str:
        return f"**{number}**"

    def equation(self, equation: Equation) -> str:
        name, first, *rest = equation.parts("latex")
        right = [first, *rest]
        if equation.result:
            right[-1] = rf"\boldsymbol{{{right[-1]}}}"
        lines = " \\\\\n".join(f"&= {part}" for part in right)
        return f"$$\n\\begin{{aligned}}\n{name} {lines}\n\\end{{aligned}}\n$$"

    def grid(self, grid: Grid) -> str:
        rules = ["---:" if numeric else ":---" for numeric in grid.numeric]
        rows = [[self.words(cell) for cell in row] for row in (grid.heads, *grid.rows)]
        if grid.governing is not None:
            row = rows[grid.governing + 1]
            rows[grid.governing + 1] = [f"**{cell}**" if cell else "" for cell in row]
        if grid.totals:
            rows.append([f"**{t}**" if (t := self.words(cell)) else "" for cell in grid.totals])
        rows.insert(1, rules)
        return "\n".join(f"| {' | '.join(row)} |" for row in rows)


class _PlainText(_Printer):
    def equation(self, equation: Equation) -> str:
        name, first, *rest = equation.parts("plain")
        lead = " " * (len(name) + 4)
        return "\n".join([f"    {name} = {first}", *(f"{lead} = {part}" for part in rest)])

    def grid(self, grid: Grid) -> str:
        table = [grid.heads, *grid.rows, *([grid.totals] if grid.totals else [])]
        rows = [[self.words(cell) for cell in row] for row in table]
        widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
        return "\n".join(self._row(row, widths, grid.numeric) for row in rows)

    def _row(self, row: list[str], widths: list[int], numeric: Iterable[bool]) -> str:
        cells = [
            cell.rjust(width) if right else cell.ljust(width)
            for cell, width, right in zip(row, widths, numeric, strict=True)
        ]
        return f"    {'  '.join(cells)}".rstrip()


def amount_text(text: str, unit: str) -> str:
    """Return a value with its unit; a unit alone, or words alone, stand as they are."""
    if not text:
        return units.pretty_unit(unit)
    return typeset.number(text, unit, "plain") if unit or _is_number(text) else text


def _is_number(text: str) -> bool:
    return re.fullmatch(r"[+-]?\d+(\.\d*)?(e[+-]?\d+)?", text) is not None
