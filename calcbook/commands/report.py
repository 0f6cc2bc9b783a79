"""A statement as plain text, for a terminal or a text file."""

from __future__ import annotations

import textwrap
from typing import TYPE_CHECKING, Any

from calcbook.commands import review
from calcbook.standing import is_unconfirmed, unconfirmed_rows
from calcbook.typeset import Printed, equation, number
from calcbook.wording import amount, solved_words, solver_takes, verdict

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    Item = Mapping[str, Any]

WIDTH = 100
MARGIN = "       "


def text_report(statement: Mapping[str, object]) -> str:
    """Return the sections of a statement as text: entries, lines with values, tables, checks."""
    code: Mapping[str, object] = statement["code_set"]  # type: ignore[assignment]
    mark = f", {statement['mark']}" if statement["mark"] else ""
    lines = [f"{statement['title']}{mark}", f"{code['name']}, {statement['units']} units"]
    for part in statement["parts"]:  # type: ignore[attr-defined]
        if part["kind"] != "section":
            continue
        lines += ["", f"{part['number']}  {part['title']}"]
        if not part["applies"]:
            lines.append(f"{MARGIN}does not apply: {part['why']}")
            continue
        for item in part["items"]:
            lines += _item(item)
    return "\n".join(lines)


def _item(item: Item) -> list[str]:
    writers = {
        "line": _line, "schedule": _schedule, "check": _check, "remark": _remark,
        "table": _table, "error": _error, "solver": _solver,
    }  # fmt: skip
    if item["kind"] == "figure":
        return []
    if not item["applies"]:
        why = f": {item['why']}" if item["why"] else ""
        return _wrapped(f"{_head(item)} (does not apply{why})")
    return writers.get(str(item["kind"]), _entry)(item)


def _head(item: Item) -> str:
    name = item["meaning"] or item["name"] or ""
    return f"{item['number']!s:<6} {name}"


def _wrapped(text: str, indent: str = MARGIN) -> list[str]:
    return [
        line for piece in text.split("\n")
        for line in textwrap.wrap(piece, WIDTH, subsequent_indent=indent, break_on_hyphens=False)
    ]  # fmt: skip


def _entry(item: Item) -> list[str]:
    value = amount(item["value"]) if "value" in item else review.value_text(item) or "not given"
    if item.get("shown"):
        value += f" ({amount(item['shown'])})"
    notes = [_origin(item), "unconfirmed" if is_unconfirmed(item) else ""]
    if item["kind"] == "carried" and item["stale"]:
        taken: Mapping[str, object] = item["taken"] or {}
        notes.append(f"was {taken.get('text', 'other')} when taken")
    note = "; ".join(n for n in notes if n)
    lines = _wrapped(f"{_head(item)}: {item['name']} = {value}{f'  [{note}]' if note else ''}")
    return lines + _problem(item)


def _origin(item: Item) -> str:
    if item["kind"] != "carried" or item["fallback"]:
        return ""
    origin: Mapping[str, object] = item["from"]
    return f"from {origin['workbook']} {origin['number'] or origin['name']}"


def _problem(item: Item) -> list[str]:
    return textwrap.indent(str(item["problem"]), MARGIN).split("\n") if item["problem"] else []


def _line(item: Item) -> list[str]:
    clause = f"  ({item['clause']})" if item["clause"] else ""
    head = _wrapped(f"{_head(item)}{clause}")
    if item["problem"]:
        formula = item["formula"] or solved_words(item)
        return [*head, f"{MARGIN}{item['name']} = {formula}", *_problem(item)]
    values: Mapping[str, Mapping[str, str]] = item["values"]
    value: Mapping[str, str] = item["value"]
    parts = equation(
        str(item["name"]), str(item["formula"]), "plain",
        {name: Printed(v["text"], v["unit"]) for name, v in values.items()},
        Printed(value["text"], value["unit"]) if value["text"] else None,
        printed_form=bool(item["takes"]),
    )  # fmt: skip
    why = [f"{MARGIN}because {item['why']}"] if item["why"] else []
    found = _wrapped(f"{MARGIN}({solved_words(item)})") if item["solved"] else []
    return head + _at_equals(parts) + why + found


def _solver(item: Item) -> list[str]:
    lines = [*_wrapped(_head(item)), *_wrapped(f"{MARGIN}{item['method']}")]
    for meaning, names in solver_takes(item):
        told = ", ".join(f"{case} {name}".strip() for case, name in names)
        lines += _wrapped(f"{MARGIN}{meaning}: {told}")
    for text in item["says"]:
        lines += _wrapped(f"{MARGIN}{text}")
    return lines + _problem(item)


def _at_equals(parts: Sequence[str]) -> list[str]:
    """Join the parts of an equation, breaking before '=' where the line would be too long."""
    lines, current = [], f"{MARGIN}{parts[0]}"
    for part in parts[1:]:
        if len(current) + len(part) + 3 > WIDTH:
            lines.append(current)
            current = f"{MARGIN}  = {part}"
        else:
            current += f" = {part}"
    return [*lines, current]


def _check(item: Item) -> list[str]:
    sides = f"{amount(item['demand'])} {item['relation']} {amount(item['limit'])}"
    ratio = f", ratio {item['ratio_text']}" if item["ratio_text"] else ""
    shown = "" if item["problem"] or not item["relation"] else f": {sides}{ratio}"
    told = f"{MARGIN}{item['text']}{shown}, {verdict(item)}"
    return [*_wrapped(_head(item)), told, *_problem(item)]


def _remark(item: Item) -> list[str]:
    tone = "" if item["tone"] == "reason" else f"{str(item['tone']).capitalize()}: "
    return _wrapped(f"{item['number']!s:<6} {tone}{item['text']}")


def _table(item: Item) -> list[str]:
    source = f"  ({item['source']})" if item["source"] else ""
    return _wrapped(f"{_head(item)}: table {item['name']}{source}")


def _error(item: Item) -> list[str]:
    return [f"{item['number']!s:<6} cannot be accepted:",
            *textwrap.indent(str(item["text"]), MARGIN).split("\n")]  # fmt: skip


# --- schedules --------------------------------------------------------------------------------


def _schedule(item: Item) -> list[str]:
    lines = [*_wrapped(_head(item)), *_problem(item)]
    for error in item["errors"]:
        lines += textwrap.indent(error, MARGIN).split("\n")
    columns = [c for c in item["columns"] if c["applies"]]
    rows: Sequence[str] = item["rows"]
    if rows:
        lines += _grid([_keys(item), *map(_cells, columns)])
    for column in columns:
        lines += _formula(column)
    governing: Mapping[str, object] | None = item["governing"]
    if governing:
        lines.append(f"{MARGIN}governing row {governing['row']} ({governing['why']}):")
        for line in governing["lines"]:  # type: ignore[attr-defined]
            lines += [f"  {text}" for text in _line(line)]
    return lines


def _keys(item: Item) -> tuple[bool, list[str]]:
    rows: list[str] = item["rows"]
    waiting = unconfirmed_rows(item)
    marked = [f"{key} *" if key in waiting else key for key in rows]
    has_total = any(c["total"] for c in item["columns"])
    return False, [str(item["key"]), "", *marked, *(["total"] if has_total else [])]


def _cells(column: Mapping[str, object]) -> tuple[bool, list[str]]:
    """Return a column as text: heading, unit, rows, total; numbers stand to the right."""
    texts: list[str] = column["texts"]  # type: ignore[assignment]
    problems: Sequence[object] = column["problem"] or [None] * len(texts)  # type: ignore[assignment]
    numeric = "labels" not in column
    cells = [
        "-" if problem else number(text, "", "plain") if numeric and text else text
        for text, problem in zip(texts, problems, strict=True)
    ]
    unit = number("1", str(column["unit"]), "plain").removeprefix("1").strip() if numeric else ""
    total = column["total"]
    below = [number(total["text"], "", "plain")] if isinstance(total, dict) else [""]
    return numeric, [str(column["name"]), unit, *cells, *below]


def _grid(columns: Sequence[tuple[bool, list[str]]]) -> Iterator[str]:
    height = len(columns[0][1])
    widths = [max(map(len, cells[:height])) for _, cells in columns]
    for row in range(height):
        cells = [
            cells[row].rjust(width) if right else cells[row].ljust(width)
            for (right, cells), width in zip(columns, widths, strict=True)
        ]
        yield f"{MARGIN}{'  '.join(cells)}".rstrip()


def _formula(column: Mapping[str, object]) -> list[str]:
    formulas = [column["formula"]] if column["formula"] else []
    cases: Sequence[Mapping[str, object]] = column["cases"]  # type: ignore[assignment]
    formulas += [solved_words(column)] if column["solved"] else []
    formulas += [f"{c['formula']}  when {c['when'] or 'none of these'}" for c in cases]
    return [
        line for text in formulas
        for line in _wrapped(f"{MARGIN}{column['name']} = {text}", f"{MARGIN}    ")
    ]  # fmt: skip
