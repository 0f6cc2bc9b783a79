"""The front pages of a package, and its last: cover, results, verdicts, software."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from calcbook.pack import prose
from calcbook.pack.anchors import items, printed_name
from calcbook.pack.items import carried_words, moved, verdict
from calcbook.pack.nodes import Node, joined, link, page, phrase, strong, symbol, typed, words
from calcbook.pack.schedules import named
from calcbook.standing import is_unconfirmed, unconfirmed_rows
from calcbook.wording import FROM_MEMORY, amount, option_words
from calcbook.wording import verdict as judged

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Iterator

    from calcbook.pack.anchors import Anchors, Item, Statement
    from calcbook.pack.cover import Cover

Row = list[list[Node]]
CAUTION = (
    "The results in this package need the judgement of a licensed engineer. The local building "
    "code in force governs; where it differs from the edition named here, it is followed."
)
BOUNDS = (
    "The program computes what its workbooks state and no more. What a workbook does not cover is "
    "listed under Assumptions, and what is not listed there is not thereby covered."
)
ABOUT = (
    "Every figure in this package comes from one run of the workbooks named below with the entries "
    "printed in them. Their statements, the complete plain data of every item, are attached to "
    "this file as JSON with results to 12 significant digits."
)
MOVED = "moved on since taken"
LIMITS = f"""\
Formulas are evaluated in double precision in coherent SI units. Printed values are rounded; \
verdicts come from unrounded values. Entries are printed as typed and underlined, results in bold. \
Units are checked when a formula is declared.

A value marked '{FROM_MEMORY}' was entered into the code set without its text at hand.

The fingerprint tells whether two packages were made from the same input; it does not say who \
made them."""


def page_of(anchors: Anchors, index: int, number: str | None) -> list[Node]:
    """Return 'p. 7' for an item of a workbook."""
    return page(anchors.item(index, number))


def place(anchors: Anchors, index: int, statement: Statement, number: str) -> list[Node]:
    """Return the workbook and the number of an item, leading to it."""
    return link(anchors.item(index, number), f"{words(printed_name(statement))} {number}")


def cover_page(cover: Cover, statements: list[Statement]) -> dict[str, Any]:
    """Return what the first page says."""
    codes = [s.get("code_set") or {} for s in statements]
    editions = dict.fromkeys(c.get("title") or c.get("name") or "" for c in codes)
    systems = dict.fromkeys(s["units"] for s in statements)
    facts: list[tuple[str, list[Node]]] = [
        ("job number", [words(cover.number) or "not given"]),
        ("place", [words(cover.place) or "not given"]),
        ("issue", [words(cover.issue)]),
        ("codes", [words("; ".join(e for e in editions if e)) or "none named"]),
        ("units", [" and ".join(systems)]),
        ("workbooks", [words("; ".join(_titles(statements)))]),
    ]
    same = None
    if cover.same_person:
        same = (
            f"Warning: prepared and checked by the same person ({words(cover.prepared)}). "
            "This is no independent check."
        )
    return {
        "job": words(cover.job),
        "facts": facts,
        "prepared": words(cover.prepared),
        "checked": words(cover.checked),
        "same-person": same,
        "caution": [[strong("Caution. "), CAUTION], [BOUNDS]],
        "counts": _counts(statements),
    }


def _titles(statements: list[Statement]) -> list[str]:
    """Return the titles of the workbooks, each with its marks where it has some."""
    marks: dict[str, list[str]] = {}
    for statement in statements:
        own = [str(statement["mark"])] if statement.get("mark") else []
        marks.setdefault(str(statement["title"]), []).extend(own)
    return [
        f"{title}, {len(own)} marks" if len(own) > 1 else ", ".join([title, *own])
        for title, own in marks.items()
    ]


def _counts(statements: list[Statement]) -> list[tuple[str, list[Node]]]:
    """Return what is to be looked at first: how many, of what; in bold what is wrong."""

    def total(key: str) -> int:
        return sum(int(s["counts"].get(key, 0)) for s in statements)

    checks = [judged(i) for s in statements for i in items(s) if i["kind"] == "check"]
    failed, undecided = checks.count("NOT SATISFIED"), checks.count("not decided")
    verdict_word = "NOT SATISFIED" if failed else "not satisfied"
    told = [
        (total("unconfirmed"), "entry or row", "entries and rows", "not confirmed for this job"),
        (checks.count("satisfied"), "check", "checks", "satisfied"),
        (failed, "check", "checks", verdict_word),
        (undecided, "check", "checks", "not decided"),
        (total("problems"), "item", "items", "with a problem, listed with the results"),
        (total("stale"), "carried value", "carried values", MOVED),
        (total("memory"), "value", "values", f"of the code set {FROM_MEMORY}"),
    ]  # fmt: skip
    wrong = ("not confirmed", "NOT", "not decided", "with a problem", MOVED)
    listed = {
        "not confirmed for this job": "unconfirmed",
        f"of the code set {FROM_MEMORY}": "memory",
    }
    counts: list[tuple[str, list[Node]]] = []
    for count, one, many, state in told:
        text = f"{one if count == 1 else many} {state}"
        said: list[Node] = [strong(text) if count and state.startswith(wrong) else text]
        where = page(listed.get(state) if count else None)
        if count or state != MOVED:
            counts.append((str(count), joined([said, where], ", ")))
    return counts


def summary(statements: list[Statement], anchors: Anchors) -> dict[str, Any]:
    """Return the results, verdicts, problems, and what is to be confirmed, of all workbooks."""
    results = []
    for index, statement in enumerate(statements):
        rows = [_result(index, result, anchors) for result in statement.get("results", ())]
        if rows:
            results.append({"title": _book_title(index, statement), "rows": rows})
    return {
        "results": results,
        "verdicts": _listed(
            statements, anchors, lambda item: verdict(item) if item["kind"] == "check" else []
        ),
        "problems": _listed(statements, anchors, lambda item: phrase(_problem(item))),
        "unconfirmed": _listed(statements, anchors, _unconfirmed),
        "memory": _listed(statements, anchors, _clause, from_memory),
    }


def from_memory(item: Item) -> Iterator[Item]:
    """Yield an item, and the columns of a schedule, that came into the code set from memory."""
    for part in (item, *item.get("columns", ())):
        if part.get("memory") and part.get("applies", True):
            yield part


def _clause(item: Item) -> list[Node]:
    return [words(item.get("clause") or item.get("source") or "no clause named")]


def _listed(
    statements: list[Statement],
    anchors: Anchors,
    told: Callable[[Item], list[Node]],
    parts: Callable[[Item], Iterable[Item]] = lambda item: (item,),
) -> list[dict[str, Any]]:
    """Return, by workbook, the items something is told of: number, meaning, what, page."""
    groups = []
    for index, statement in enumerate(statements):
        rows: list[Row] = [
            [
                link(anchors.item(index, number), number),
                phrase(part.get("meaning") or part.get("text") or ""),
                said,
                page_of(anchors, index, number),
            ]
            for item in items(statement)
            for part in parts(item)
            if (said := told(part))
            for number in [_printed_at(anchors, index, part, item)]
        ]
        if rows:
            groups.append({"title": _book_title(index, statement), "rows": rows})
    return groups


def _printed_at(anchors: Anchors, index: int, part: Item, item: Item) -> str:
    """Return the number a part of an item is printed under: its own, else that of the item."""
    own = part.get("number")
    return str(own if anchors.item(index, own) else item["number"])


def _book_title(index: int, statement: Statement) -> list[Node]:
    return link(f"book-{index}", strong(words(printed_name(statement))))


def _result(index: int, result: dict[str, Any], anchors: Anchors) -> Row:
    number = result.get("number") or ""
    return [
        link(anchors.item(index, number), number),
        phrase(result.get("meaning", "")),
        [symbol(result["name"])],
        [strong(amount(result["value"]))],
        [words(result.get("sign") or "")],
        page_of(anchors, index, number),
    ]


def _problem(item: Item) -> str:
    if item["kind"] == "error":
        return str(item["text"])
    if item.get("stale") and item["kind"] == "carried":
        return moved(item)
    told = [str(item.get("problem") or ""), *item.get("errors", ())]
    for column in item.get("columns", ()):
        told += list(dict.fromkeys(p for p in column.get("problem") or () if p))
    if item.get("stale"):
        told.append("the rows have moved on since they were taken")
    return "; ".join(dict.fromkeys(t for t in told if t))


def _unconfirmed(item: Item) -> list[Node]:
    """Return the value and source of an entry nobody confirmed, or nothing."""
    kind = item["kind"]
    if keys := unconfirmed_rows(item):
        return [f"rows: {named(keys, len(item['rows']))}"]
    if not is_unconfirmed(item):
        return []
    if kind == "carried":
        return [*carried_words(item), "; fallback value"]
    if kind == "text":
        shown = item["text"]
    elif kind == "choice":
        shown = option_words(item)
    else:
        shown = amount(item.get("value"))
    source = f"; {words(item['source'])}" if item.get("source") else ""
    return [typed(words(shown)), source]


def software(statements: list[Statement]) -> dict[str, Any]:
    """Return the last page: versions, fingerprints, sign conventions and limits."""
    versions: dict[str, dict[str, None]] = {}
    for statement in statements:
        found = {"calcbook": statement.get("engine", ""), **(statement.get("software") or {})}
        for name, version in found.items():
            versions.setdefault(name, {})[str(version)] = None
    return {
        "prose": prose.read(ABOUT),
        "limits": prose.read(LIMITS),
        "versions": [[[words(n)], [words(", ".join(v))]] for n, v in versions.items()],
        "fingerprints": list(_fingerprints(statements)),
        "signs": [[[words(text)] for text in row] for row in _signs(statements)],
    }


def _signs(statements: list[Statement]) -> list[tuple[str, str, str]]:
    """Return workbook, quantity and what is positive, once for all marks of a workbook."""
    rows = (
        (str(s["title"]), str(sign["quantity"]), str(sign["positive"]))
        for s in statements
        for sign in s.get("signs") or ()
    )
    return list(dict.fromkeys(rows))


def _fingerprints(statements: list[Statement]) -> Iterator[Row]:
    for statement in statements:
        code = (statement.get("code_set") or {}).get("name") or "no code set"
        groups = re.findall(".{1,16}", statement["fingerprint"])
        yield [
            [words(printed_name(statement))],
            [words(f"{code}, {statement['units']}")],
            [{"t": "code", "s": " ".join(groups)}],
        ]
