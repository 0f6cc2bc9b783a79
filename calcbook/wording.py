"""Words that screen, paper and terminal share."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from calcbook import typeset

if TYPE_CHECKING:
    from collections.abc import Mapping

_SYMBOL = re.compile(r"(?<![\w./\\-])([A-Za-z]{1,3}_[A-Za-z0-9]{1,4})(?![\w/\\-]|\.\w)")
FROM_MEMORY = "from memory: confirm against the code"
OUTSIDE = {"hold": "outside them the value at the edge holds", "refuse": "not valid outside them"}


def counted(count: int, thing: str) -> str:
    """Return a number of things: '1 row', '2 rows', '3 entries'."""
    many = f"{thing[:-1]}ies" if thing.endswith("y") else f"{thing}s"
    return f"{count} {thing if count == 1 else many}"


def symbols_in(text: str) -> list[tuple[str, bool]]:
    """Return words in pieces, each with whether it is a symbol such as q_z among them."""
    pieces = _SYMBOL.split(text)
    return [(piece, at % 2 == 1) for at, piece in enumerate(pieces) if piece]


def amount(value: Mapping[str, Any] | None) -> str:
    """Return a value of a statement with its unit as plain text, or that there is none."""
    if not value or not value.get("text"):
        return "not available"
    return typeset.number(value["text"], value.get("unit", ""), "plain")


def solved_words(item: Mapping[str, Any]) -> str:
    """Return which outcome of which solver a line or column is; '' for a formula."""
    found = item.get("solved")
    return f"{found['words']}, found by {found['number']}" if found else ""


def solver_takes(item: Mapping[str, Any]) -> list[tuple[str, list[tuple[str, str]]]]:
    """Return what a solver takes: (what it is, its (load case or '', name) pairs) by role.

    Where a solver has main roles, those are told; what else it takes stands in one list of names,
    and in one of the letters of those that it takes for each load case.
    """
    roles: dict[str, list[tuple[str, str]]] = {}
    some = any(taken["main"] for taken in item["takes"])
    rest: dict[str, None] = {}
    letters: dict[str, None] = {}
    for taken in item["takes"]:
        if some and not taken["main"]:
            name = taken["name"]
            if taken["case"]:
                letters[name.partition("_")[0]] = None
            else:
                rest[name] = None
        else:
            roles.setdefault(taken["meaning"], []).append((taken["case"], taken["name"]))
    more = (("and of these", rest), ("and by load case", letters))
    return [*roles.items(), *((words, [("", n) for n in found]) for words, found in more if found)]


AT_LEAST = {">=": "at least", ">": "more than", "==": "to be", "!=": "not to be"}


def compared(check: Mapping[str, Any]) -> str:
    """Return the two sides of a check and its ratio, or '' where neither side has a value.

    A limit from above is 'demand 1.908, limit 2.400 kPa, ratio 0.80', one from below 'value
    18.40 m, at least 0.00 m'.
    """
    demand, limit = check.get("demand") or {}, check.get("limit") or {}
    if not demand.get("text") and not limit.get("text"):
        return ""
    ratio = f", ratio {check['ratio_text']}" if check.get("ratio_text") else ""
    if check.get("relation") in AT_LEAST:
        bound = AT_LEAST[check["relation"]]
        return f"value {amount(demand)}, {bound} {amount(limit)}{ratio}"
    alike = demand.get("text") and limit.get("text") and demand.get("unit") == limit.get("unit")
    shown = amount({**demand, "unit": ""} if alike else demand)
    return f"demand {shown}, limit {amount(limit)}{ratio}"


def verdict(check: Mapping[str, Any]) -> str:
    """Return the verdict of a check."""
    return {True: "satisfied", False: "NOT SATISFIED", None: "not decided"}[check["satisfied"]]


def cases_told(column: Mapping[str, Any]) -> list[tuple[str, list[str]]]:
    """Return a line's formulas by case, each with its conditions ('' for 'otherwise').

    Cases that follow each other with one formula are told once: since the first case that holds
    counts, merging others would change which one that is.
    """
    told: list[tuple[str, list[str]]] = []
    for case in column["cases"]:
        if told and told[-1][0] == case["formula"]:
            told[-1][1].append(case["when"])
        else:
            told.append((case["formula"], [case["when"]]))
    return told


def governs(schedule: Mapping[str, Any], row: str) -> list[tuple[str, str]]:
    """Return for what a row of a schedule governs: ('largest', 'M_b') and the like."""
    return [
        (part["which"], part["column"])
        for part in schedule.get("envelope") or ()
        if part["row"] == row
    ]


def not_applied(part: Mapping[str, Any]) -> str:
    """Return that a section or an item does not apply, and why."""
    return f"not applied: {part['why']}" if part.get("why") else "not applied"


def option_label(option: str, label: str) -> str:
    """Return an option as it is read: its letter or name, and its words."""
    if not option:
        return "nothing chosen"
    named = re.search(rf"\b{re.escape(option)}\b", label, re.IGNORECASE)
    return label if named else f"{option}: {label}"


def option_words(item: Mapping[str, Any]) -> str:
    """Return the option of a choice, or of a carried one, as it is read."""
    option = item.get("option") or ""
    return option_label(option, (item.get("labels") or {}).get(option) or option)
