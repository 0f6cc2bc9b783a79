"""The pieces of a section's rows as HTML with MathML."""

from __future__ import annotations

import base64
import re
import traceback
from functools import lru_cache
from html import escape
from typing import TYPE_CHECKING, Any

from calcbook import formula, typeset
from calcbook.errors import CalcbookError
from calcbook.live import blocks as parts
from calcbook.live.output import amount_text, described, drawn

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.live.blocks import Block, Equation, Grid, Run, Words

    Plain = Mapping[str, Any]

GIVEN = ("entry", "text", "choice", "carried")
WIDE = ("remark", "figure", "schedule", "table", "error", "check", "row")
_CLAUSE = re.compile(r"(?<![^\s(])[\w.]*\d-\d\w*")
_WHOLE = r'<span class="cb-whole">\g<0></span>'


def words(content: Words) -> str:
    """Return running text as HTML."""
    return "".join(map(_run, content))


def _run(run: Run) -> str:
    match run:
        case str():
            return escape(run)
        case parts.Strong(text):
            return f"<strong>{escape(text)}</strong>"
        case parts.Symbol(name):
            return symbol(name)
        case parts.Relation(text):
            return relation(text)
        case parts.Amount(text, unit, typed):
            return _amount(text, unit, typed)


@lru_cache(maxsize=16384)
def _amount(text: str, unit: str, typed: bool) -> str:
    shown = escape(amount_text(text, unit))
    return f'<span class="cb-typed">{shown}</span>' if typed else shown


@lru_cache(maxsize=4096)
def symbol(name: str) -> str:
    """Return a name as a formula in running text."""
    return math(typeset.symbol(name, "mathml"))


@lru_cache(maxsize=4096)
def relation(text: str) -> str:
    """Return a formula as declared, in running text."""
    return math(typeset.expression(formula.parse(text), "mathml"))


def math(code: str) -> str:
    """Return the inside of a formula as a formula in running text."""
    return f'<math><mstyle displaystyle="true">{code}</mstyle></math>'


def pieces(block: Block, *, body: bool = True) -> dict[str, str]:
    """Return a block as the pieces of a row: its classes, number, words, body, margin.

    A figure's picture is not drawn here: it takes longest (``figure``). ``body``: False where the
    row draws its own.
    """
    wide = block.kind in WIDE or (block.kind == "idle" and not block.says)
    kind = {"table": "table-item", "carried": "entry cb-carried"}.get(block.kind, block.kind)
    classes = ["cb-row", f"cb-{kind}", *(["cb-wide"] if wide else [])]
    classes += ["cb-within"] if block.within else []
    return {
        "cls": " ".join(classes), "no": escape(block.number), "words": words(block.words),
        "body": _body(block) if body else "", "margin": notes(block.remarks),
    }  # fmt: skip


def notes(remarks: tuple[Words, ...]) -> str:
    """Return margin notes, one under the other."""
    return "".join(f"<div>{_CLAUSE.sub(_WHOLE, words(note))}</div>" for note in remarks)


def _body(block: Block) -> str:
    found = [equation(block.equation)] if block.equation else []
    if block.grid:
        found.append(grid(block.grid))
    if block.kind == "check":
        state = {True: "held", False: "failed", None: "open"}[block.item["satisfied"]]
        found += [f'<div class="cb-{state}">{words(line)}</div>' for line in block.says]
    else:
        kind = "cb-value" if block.kind in GIVEN else "cb-says"
        found += [f'<div class="{kind}">{words(line)}</div>' for line in block.says]
    found += [trouble(text) for text in block.troubles]
    return "".join(found)


def trouble(text: str) -> str:
    """Return what is wrong, marked by a word and a rule at its side."""
    return f'<div class="cb-trouble" role="status"><strong>Problem:</strong> {lines(text)}</div>'


def where(error: BaseException | None) -> str:
    """Return where a fault of the program came from, folded away; '' where there is none."""
    if error is None:
        return ""
    frames = lines("".join(traceback.format_exception(error)))
    return f"<details><summary>where</summary><pre>{frames}</pre></details>"


def refused(reason: str) -> str:
    """Return why something typed was not taken."""
    return f'<div class="cb-refused" role="alert"><strong>Not taken:</strong> {lines(reason)}</div>'


def lines(text: str) -> str:
    """Return text of several lines as HTML."""
    return "<br>".join(escape(line).replace("  ", "&nbsp; ") for line in text.splitlines())


def equation(shown: Equation) -> str:
    """Return a formula in parts that break before '=', the result in bold at its end."""
    name, first, *rest = shown.parts("mathml")
    pieces = [f"{name}<mo>=</mo>{first}", *(f"<mo>=</mo>{part}" for part in rest)]
    spans = [f'<span class="cb-part">{math(f"<mrow>{piece}</mrow>")}</span>' for piece in pieces]
    if shown.result:
        last = typeset.number(shown.result.text, shown.result.unit, "plain")
        lead = f'<span class="cb-part">{math(f"<mrow>{name}</mrow>")}</span> ' if not rest else ""
        spans[-1] = f'{lead}<span class="cb-part cb-result">= <b>{escape(last)}</b></span>'
    spoken = typeset.spoken(shown.name, shown.formula, shown.values, shown.result)
    return f'<div class="cb-equation" aria-label="{escape(spoken)}">{" ".join(spans)}</div>'


def grid(table: Grid) -> str:
    """Return a table; the governing row is set in bold, totals stand under a rule."""
    head = "".join(_cell("th", cell, number) for cell, number in _paired(table, table.heads))
    body = "".join(
        f'<tr class="cb-governs">{_cells(table, cells)}</tr>'
        if place == table.governing
        else f"<tr>{_cells(table, cells)}</tr>"
        for place, cells in enumerate(table.rows)
    )
    foot = f"<tfoot><tr>{_cells(table, table.totals)}</tr></tfoot>" if table.totals else ""
    return (
        f'<div class="cb-scroll"><table class="cb-grid"><thead><tr>{head}</tr></thead>'
        f"<tbody>{body}</tbody>{foot}</table></div>"
    )


def _paired(table: Grid, cells: tuple[Words, ...]) -> list[tuple[Words, bool]]:
    return list(zip(cells, table.numeric, strict=True))


def _cells(table: Grid, cells: tuple[Words, ...]) -> str:
    return "".join(_cell("td", cell, number) for cell, number in _paired(table, cells))


def _cell(tag: str, content: Words, number: bool) -> str:
    kind = ' class="cb-number"' if number else ""
    return f"<{tag}{kind}>{words(content)}</{tag}>"


def figure(statement: Plain, item: Plain) -> str:
    """Return a figure as a picture with its description, or why it cannot be drawn."""
    try:
        picture = drawn(statement, item)
        told = described(statement, item)
    except CalcbookError as error:
        return trouble(f"the figure cannot be drawn: {error}") + where(error.__cause__)
    code = base64.b64encode(picture).decode("ascii")
    return f'<img class="cb-figure" alt="{escape(told)}" src="data:image/png;base64,{code}">'
