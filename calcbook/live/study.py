"""Sensitivity and value needed as the bar shows them: plain data with HTML ready to show."""

from __future__ import annotations

import base64
from html import escape
from typing import TYPE_CHECKING, Any

from calcbook import formula, studies, typeset
from calcbook.live import page

if TYPE_CHECKING:
    from collections.abc import Iterator

    from calcbook.studies import Answer, Changed, Effect, Needed, Sensitivity
    from calcbook.workbook import Workbook

HEADS = ("Entry", "Now", "Derivative", "1 % more gives", "10 % less", "10 % more")


def choices(book: Workbook, result: str) -> dict[str, Any]:
    """Return what can be studied: results, the one chosen, and the entries it can be asked for."""
    found = sorted(studies.results(book), key=lambda one: not one.declared)
    ids = [one.id for one in found]
    chosen = result if result in ids else next(iter(ids), "")
    entered = studies.entries(book, chosen) if chosen else ()
    return {
        "results": [[one.id, f"{one.number} {one.meaning}: {one.text}"] for one in found],
        "result": chosen,
        "entries": [[one.name, f"{one.number} {one.meaning}: {one.text}"] for one in entered],
    }


def sensitivity(book: Workbook, result: str) -> dict[str, str]:
    """Return the sensitivity of a result as HTML: a table, the bar picture, what is held.

    Raises InputError when the result has no value.
    """
    found = studies.sensitivity(book, result)
    head = "".join(f'<th scope="col">{text}</th>' for text in HEADS)
    rows = "".join(map(_row, found.effects))
    code = base64.b64encode(studies.draw(found)).decode("ascii")
    alt = escape(studies.describe(found))
    return {
        "title": f"Sensitivity of {found.result.meaning}: {found.result.text}",
        "html": f'<div class="cb-scroll"><table class="cb-grid"><thead><tr>{head}</tr></thead>'
        f"<tbody>{rows}</tbody></table></div>"
        f'<img class="cb-figure" alt="{alt}" src="data:image/png;base64,{code}">{_also(found)}',
    }


def _row(effect: Effect) -> str:
    entry = effect.entry
    name = page.math(typeset.symbol(entry.name, "mathml"))
    notes = "".join(f'<div class="cb-quiet">{escape(note)}</div>' for note in effect.notes)
    cells = [
        f"{name} {escape(entry.meaning)}{notes}", escape(entry.text), _slopes(effect),
        escape(f"{effect.relative} %" if effect.relative else ""),
        _changed(effect.low), _changed(effect.high),
    ]  # fmt: skip
    return f"<tr>{''.join(f'<td>{cell}</td>' for cell in cells)}</tr>"


def _slopes(effect: Effect) -> str:
    told = "<br>".join(escape(f"{one.text} {one.side}".strip()) for one in effect.slopes)
    code = ""
    if effect.formula:
        tree = typeset.expression(formula.parse(effect.formula), "mathml")
        code = f"<details><summary>formula</summary>{page.math(f'<mrow>{tree}</mrow>')}</details>"
    return f'{told} <span class="cb-quiet">{escape(effect.way)}</span>{code}'


def _changed(changed: Changed) -> str:
    if changed.problem:
        return f'<span class="cb-quiet">{escape(changed.problem)}</span>'
    return f"{escape(changed.text)} ({escape(changed.change)})"


def _also(found: Sensitivity) -> str:
    held = ", ".join(f"{one.meaning}: {one.text}" for one in found.held)
    told = [f"Held as they are: {held}."] if held else []
    return "".join(f'<div class="cb-quiet">{escape(text)}</div>' for text in (*told, *found.notes))


def needed(book: Workbook, result: str, entry: str, target: str) -> dict[str, Any]:
    """Return which value of an entry gives a result its target: answers to use, or that none does.

    Raises CalcbookError for a target that cannot be read.
    """
    found = studies.needed(book, result, entry, target)
    answers = [_answer(found, one) for one in found.answers]
    return {"answers": answers, "entry": entry, "notes": list(_told(found))}


def _answer(found: Needed, one: Answer) -> dict[str, Any]:
    """Return an answer in words, and the values of it that may be used: rounded first."""
    name = found.entry.name
    held = {True: ", satisfied", False: ", not satisfied", None: ""}[one.rounded_satisfied]
    exact = f"{name} = {one.text} gives {one.result}"
    rounded = f"; {name} = {one.rounded} gives {one.rounded_result}{held}" if one.rounded else ""
    how = one.formula and f"{name} = {one.formula}{f', with {one.given}' if one.given else ''}"
    way = how or f"between {one.interval}"
    uses = [] if found.entry.home else [text for text in (one.rounded, one.text) if text]
    stretch = f"; {one.stretch}" if one.stretch else ""
    return {
        "text": f"{exact}{rounded}{stretch}",
        "way": f"{one.way}: {way}",
        "uses": list(dict.fromkeys(uses)),
    }


def _told(found: Needed) -> Iterator[str]:
    """Yield what else is to be said: how many values there are, where was looked, the nearest."""
    if found.verdict == "several":
        yield f"{len(found.answers)} values give {found.target}; the one nearest to now is first."
    elif found.verdict == "none":
        nearest = found.nearest
        near = f" The nearest: {nearest.result}, with {nearest.entry}." if nearest else ""
        if found.result.which == "ratio" and nearest and float(nearest.result) < 1:
            yield f"The check is satisfied at every value searched.{near}"
        else:
            yield f"No value of {found.entry.name} gives {found.target}.{near}"
    elif found.verdict == "every":
        yield f"Every value of {found.entry.name} gives {found.target}."
    yield f"Searched: {found.searched}."
    yield from found.notes
    if found.entry.home:
        yield f"It is brought forward from {found.entry.home}: change it there."
