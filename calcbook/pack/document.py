"""Statements as the data page.typ lays out: cover, summary, workbooks, software page."""

from __future__ import annotations

import json
from typing import TYPE_CHECKING, Any

from calcbook.errors import CalcbookError, PackError
from calcbook.pack import front, prose
from calcbook.pack.anchors import Anchors, items, printed_name
from calcbook.pack.items import Writer, governing
from calcbook.pack.nodes import Node, joined, numbers, phrase, words
from calcbook.pack.repeats import Repeats
from calcbook.statement import twelve_digits
from calcbook.wording import not_applied

if TYPE_CHECKING:
    from collections.abc import Callable

    from calcbook.pack.anchors import Item, Statement
    from calcbook.pack.cover import Cover

LONGEST_JOB, LONGEST_NUMBER, LONGEST_BOOK, LONGEST_INITIALS, LONGEST_ISSUE = 44, 20, 44, 12, 34
LISTED_TONES = ("assumption", "not covered")
SAID_ONCE = "Method, limits, remarks and what columns are: where they hold for all marks, in "


def document(
    cover: Cover,
    statements: list[Statement],
    figures: Callable[[Statement, Item], bytes],
    *,
    title: str,
) -> tuple[dict[str, Any], dict[str, bytes]]:
    """Return the data of the whole package, and the files it names (figures, attachments).

    Raises
    ------
    PackError
        When there is no statement, or one of them holds something that cannot be printed.
    """
    if not statements:
        raise PackError("there is no workbook to print", hint="add a workbook to the job first")
    date = cover.date()
    anchors = Anchors(statements)
    numbers = _remark_numbers(statements)
    files: dict[str, bytes] = {}
    repeats = Repeats(statements)
    books = [
        _book(Writer(index, statement, anchors, figures, numbers, files, repeats))
        for index, statement in enumerate(statements)
    ]
    attachments = _attach(statements, files)
    data = {
        "title": words(title),
        "paper": "us-letter" if statements[0]["units"] == "US" else "a4",
        "date": [date.year, date.month, date.day],
        "author": cover.prepared,
        "strip": _strip(cover),
        "cover": front.cover_page(cover, statements),
        "summary": front.summary(statements, anchors),
        "assumptions": _assumptions(statements, anchors, numbers),
        "books": books,
        "software": front.software(statements),
        "attachments": attachments,
    }
    return data, files


def shortened(text: str, longest: int) -> str:
    """Return the text, cut with an ellipsis where it is longer than allowed."""
    text = " ".join(text.split())
    return text if len(text) <= longest else text[: longest - 1].rstrip() + "…"


def _strip(cover: Cover) -> dict[str, str]:
    return {
        "job": shortened(cover.job, LONGEST_JOB),
        "number": shortened(cover.number, LONGEST_NUMBER),
        "revision": shortened(cover.issue, LONGEST_ISSUE),
        "prepared": shortened(cover.prepared, LONGEST_INITIALS),
        "checked": shortened(cover.checked, LONGEST_INITIALS),
    }


def _attach(statements: list[Statement], files: dict[str, bytes]) -> list[dict[str, str]]:
    """Put every statement among the files as JSON; returns what is attached under which name."""
    attached = []
    for index, statement in enumerate(statements):
        file = f"statement-{index}.json"
        text = json.dumps(
            twelve_digits(statement), ensure_ascii=False, allow_nan=False, indent=1, sort_keys=True
        )
        files[file] = text.encode()
        name = ".".join(p for p in (statement["workbook"], statement.get("mark"), "json") if p)
        description = f"Statement of {printed_name(statement)}: every item as plain data"
        attached.append({"file": file, "name": name, "description": description})
    return attached


def _remark_numbers(statements: list[Statement]) -> dict[int, int]:
    """Return the number of every assumption and everything not covered, by the item's id.

    What several marks of a workbook say alike is listed once.
    """
    repeats = Repeats(statements)
    listed = [
        id(item)
        for index, statement in enumerate(statements)
        for item in items(statement)
        if item["kind"] == "remark" and item["tone"] in LISTED_TONES
        if repeats.remark_is_new(index, item)
    ]
    return {item: number for number, item in enumerate(listed, start=1)}


def _assumptions(
    statements: list[Statement], anchors: Anchors, numbers: dict[int, int]
) -> list[list[list[Node]]]:
    return [
        [
            [str(numbers[id(item)])],
            [item["tone"]],
            phrase(item["text"]),
            front.place(anchors, index, statement, item["number"]),
            front.page_of(anchors, index, item["number"]),
        ]
        for index, statement in enumerate(statements)
        for item in items(statement)
        if id(item) in numbers
    ]


def _book(writer: Writer) -> dict[str, Any]:
    try:
        return _written(writer.index, writer.statement, writer)
    except CalcbookError as error:
        raise error.at(printed_name(writer.statement)) from error


def _written(index: int, statement: Statement, writer: Writer) -> dict[str, Any]:
    title = printed_name(statement)
    later = writer.repeats.later(index)
    purpose = prose.read(statement.get("purpose") or "", title=statement["title"])
    level = prose.last_level(purpose, 1)
    parts: list[Node] = []
    if later:
        purpose = []
        parts.append({"t": "skipped", "c": writer.repeats.reference(index, SAID_ONCE)})
    for number, part in enumerate(statement["parts"]):
        if part["kind"] == "prose":
            if later:
                continue
            text = prose.read(part["markdown"], below=level, title=statement["title"])
            level = prose.last_level(text, level)
            if text:
                parts.append({"t": "prose", "c": text})
        else:
            parts += _section(part, f"section-{index}-{number}", writer)
            level = 2 if part.get("applies", True) else level
    return {
        "label": f"book-{index}",
        "title": words(title),
        "strip": shortened(title, LONGEST_BOOK),
        "under": _under_title(statement),
        "purpose": purpose,
        "parts": parts,
    }


def _under_title(statement: Statement) -> list[list[Node]]:
    """Return the code set, units and signs that hold for a workbook."""
    code = statement.get("code_set") or {}
    first = [[words(code["name"])]] if code.get("name") else []
    lines = [joined([*first, [f"{statement['units']} units"]], "; ")]
    signs = [f"{s['quantity']}: {s['positive']}" for s in statement.get("signs") or ()]
    if signs:
        lines.append(["Positive sense. " + words("; ".join(signs)) + "."])
    return lines


def _section(part: dict[str, Any], label: str, writer: Writer) -> list[Node]:
    name = f"{part['number']} {words(part['title'])}"
    if not part.get("applies", True):
        return [{"t": "skipped", "c": [f"{name}: ", *phrase(not_applied(part))]}]
    if writer.repeats.section_stands(writer.index, part):
        return [{"t": "skipped", "c": writer.repeats.reference(writer.index, f"{name}: as in ")}]
    listed = not writer.repeats.later(writer.index)
    blocks: list[Node] = [{"t": "heading", "s": name, "label": label, "listed": listed}]
    skipped: dict[str, list[str]] = {}
    for item in part["items"]:
        if not item.get("applies", True):
            skipped.setdefault(not_applied(item), []).append(item["number"])
            continue
        if item["kind"] == "remark" and not writer.repeats.remark_is_new(writer.index, item):
            continue
        blocks += _skipped(skipped)
        skipped = {}
        blocks.append(writer.block(item))
        if item["kind"] == "schedule":
            for heading, lines in governing(item):
                blocks.append({"t": "row", "c": heading})
                blocks += [writer.block(line) for line in lines]
    return blocks + _skipped(skipped)


def _skipped(skipped: dict[str, list[str]]) -> list[Node]:
    return [{"t": "skipped", "c": [f"{numbers(n)} ", *phrase(why)]} for why, n in skipped.items()]
