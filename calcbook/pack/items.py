"""The items of a statement as data for page.typ: words, formula, margin notes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook import formula, typeset, units
from calcbook.errors import PackError
from calcbook.pack import nodes, schedules
from calcbook.pack.nodes import Node, joined, link, page, phrase, strong, symbol, typed, words
from calcbook.standing import is_unconfirmed
from calcbook.wording import (
    FROM_MEMORY,
    OUTSIDE,
    amount,
    compared,
    governs,
    option_words,
    solved_words,
    solver_takes,
)
from calcbook.wording import verdict as judged

if TYPE_CHECKING:
    from collections.abc import Callable

    from calcbook.pack.anchors import Anchors, Item, Statement
    from calcbook.pack.repeats import Repeats

LONG_TEXT = 500
SURELY_FITS = 50  # characters of a formula that fit on a line whatever they are
READ = " is read between the points by straight lines; "


@dataclass(frozen=True)
class Writer:
    """Writes the items of one workbook.

    Attributes
    ----------
    index, statement, anchors
        Place of the workbook in the package, its statement, and where every item stands.
    figures
        Draws a figure item as SVG; what is drawn is put among ``files``.
    remarks
        Number of each listed remark, by the id of its item.
    repeats
        What was said with an earlier mark of the same workbook.
    """

    index: int
    statement: Statement
    anchors: Anchors
    figures: Callable[[Statement, Item], bytes]
    remarks: dict[int, int]
    files: dict[str, bytes]
    repeats: Repeats

    def block(self, item: Item) -> Node:
        """Return an item as a block of page.typ."""
        shapes: dict[str, Callable[[Item], dict[str, Any]]] = {
            "entry": self._entry,
            "text": self._text,
            "choice": self._choice,
            "carried": self._carried,
            "line": self._line,
            "solver": self._solver,
            "table": self._table,
            "schedule": self._schedule,
            "check": self._check,
            "remark": self._remark,
            "figure": self._figure,
            "error": self._error,
        }
        kind = item["kind"]
        if kind not in shapes:
            raise PackError(
                f"an item of the kind '{kind}' cannot be printed",
                where=f"{self.statement['workbook']} {item['number']}",
            )
        shape = shapes[kind](item)
        lines = [*shape.get("lines", ()), *_trouble(item)]
        return {
            "words": phrase(item.get("meaning", "")),
            "number": item["number"],
            "label": self.anchors.give(self.index, item["number"]),
            "long": _length(shape.get("words", ())) > LONG_TEXT,
            **shape,
            "lines": lines,
            "notes": self._notes(item, shape.get("notes", [])),
        }

    def _notes(self, item: Item, own: list[list[Node]]) -> list[list[Node]]:
        """Return what stands in the margin: clause, the kind's own notes, memory, where used."""
        notes: list[list[Node]] = [[words(item["clause"])]] if item.get("clause") else []
        notes += own
        if item.get("note"):
            notes.append(phrase(item["note"]))
        if item.get("memory"):
            notes.append([FROM_MEMORY])
        refs = [
            [target, number]
            for number in dict.fromkeys(item.get("used_by", ()))
            if (target := self.anchors.item(self.index, number))
        ]
        if refs:
            notes.append([{"t": "used", "refs": refs}])
        return notes

    def _entry(self, item: Item) -> dict[str, Any]:
        value = _equals(item.get("name"), typed(words(amount(item["value"]))))
        if item.get("shown"):
            value += [" = ", amount(item["shown"])]
        return {"t": "entry", "value": value, "notes": confirmation(item)}

    def _text(self, item: Item) -> dict[str, Any]:
        text = item.get("text")
        value = typed(words(text)) if text else strong("nothing entered")
        return {"t": "entry", "value": [value], "notes": confirmation(item)}

    def _choice(self, item: Item) -> dict[str, Any]:
        value = typed(words(option_words(item)))
        return {"t": "entry", "value": [value], "notes": confirmation(item)}

    def _carried(self, item: Item) -> dict[str, Any]:
        value = carried_words(item)
        notes = [fallback_words(item) if item["fallback"] else origin_words(self.anchors, item)]
        lines: list[list[Node]] = []
        if item.get("stale"):
            lines.append([strong("Stale: "), moved(item)])
        return {"t": "entry", "value": value, "lines": lines, "notes": notes}

    def _line(self, item: Item) -> dict[str, Any]:
        notes: list[list[Node]] = []
        if item.get("takes"):
            notes.append(_printed_units(item))
        if item.get("solved"):
            notes.append([solved_words(item)])
        if item.get("result"):
            notes.append(["result" + (f", positive: {item['sign']}" if item.get("sign") else "")])
        return {
            "t": "line",
            "formula": equation(item),
            "lines": [["applies because ", *phrase(item["why"])]] if item.get("why") else [],
            "notes": notes,
        }

    def _solver(self, item: Item) -> dict[str, Any]:
        taken: list[list[Node]] = []
        for meaning, names in solver_takes(item):
            named = [[f"{case} " if case else "", symbol(name)] for case, name in names]
            taken.append([f"{meaning}: " if taken else f"Takes {meaning}: ", *joined(named, ", ")])
        lines: list[list[Node]] = [[words(item["method"])], joined(taken, "; ")]
        lines += [[words(text)] for text in item["says"]]
        return {"t": "words", "words": phrase(item["meaning"]), "lines": lines}

    def _check(self, item: Item) -> dict[str, Any]:
        tree = formula.parse(item["text"])
        code, alt = typeset.expression(tree, "typst"), typeset.expression(tree, "plain")
        return {
            "t": "check",
            "relation": nodes.math(code, alt),
            "verdict": verdict(item),
        }

    def _remark(self, item: Item) -> dict[str, Any]:
        tone = str(item["tone"]).capitalize()
        if number := self.remarks.get(id(item)):
            tone = f"{tone} ({number})"
        return {"t": "words", "words": [strong(f"{tone}: "), *phrase(item["text"])]}

    def _error(self, item: Item) -> dict[str, Any]:
        lines: list[list[Node]] = []
        if item.get("source"):
            lines.append(["as typed: ", {"t": "code", "s": words(item["source"])}])
        said = [strong("Not accepted: "), words(item["text"])]
        return {"t": "words", "words": said, "lines": lines}

    def _figure(self, item: Item) -> dict[str, Any]:
        picture = self.figures(self.statement, item)
        if not isinstance(picture, bytes) or b"<svg" not in picture:
            raise PackError(
                f"the figure '{item['figure']}' was not drawn as SVG",
                where=f"{self.statement['workbook']} {item['number']}",
            )
        file = f"figure-{self.index}-{len(self.files)}.svg"
        self.files[file] = picture
        caption = item.get("caption") or item.get("meaning") or item["figure"]
        return {
            "t": "figure",
            "file": file,
            "alt": item.get("alt") or caption,
            "words": [f"Figure {item['number']}. ", *phrase(caption)],
        }

    def _table(self, item: Item) -> dict[str, Any]:
        told = item.get("source") not in ("", item.get("clause"))
        return {
            "t": "schedule",
            "lines": [[symbol(item["name"]), READ, OUTSIDE[item["outside"]]]],
            "table": schedules.lookup_table(item),
            "after": [],
            "legend": [],
            "notes": [[words(item["source"])]] if told else [],
        }

    def _schedule(self, item: Item) -> dict[str, Any]:
        notes = schedules.confirmations(item)
        lines: list[list[Node]] = []
        if item.get("fallback"):
            notes.insert(0, fallback_words(item))
        elif item.get("from"):
            notes.insert(0, origin_words(self.anchors, item))
        elif item.get("shaped"):
            notes.insert(0, [words(item["shaped"])])
        if item.get("stale"):
            lines.append([strong("Stale: "), "the rows have moved on since they were taken"])
        if not item["rows"] and not item["problem"]:
            notes = [] if item.get("fallback") else notes  # nothing stands in for what is not there
            return {"t": "entry", "value": ["none"], "lines": lines, "notes": notes}
        if self._stands_elsewhere(item):
            told = f"{len(item['rows'])} rows"
            return {"t": "entry", "value": [told], "lines": lines, "notes": notes}
        return {
            "t": "schedule",
            "lines": lines,
            "table": schedules.table(item),
            "after": schedules.remarks(item),
            "legend": self.repeats.new(self.index, schedules.legend(item)),
            "notes": notes,
        }

    def _stands_elsewhere(self, item: Item) -> bool:
        """Whether a schedule only brings forward what is printed at its source."""
        plain = all(column["role"] == "carried" for column in item["columns"])
        trouble = item.get("errors") or any(column["problem"] for column in item["columns"])
        printed = item.get("from") and self.anchors.origin(item["from"])[0]
        return bool(printed and plain and not trouble and not item["problem"])


def governing(item: Item) -> list[tuple[list[Node], list[Item]]]:
    """Return a schedule's governing rows: what each governs, and its lines to be printed."""
    worked = item.get("governing")
    if not worked:
        return []
    used = {column["name"]: column.get("used_by", ()) for column in item["columns"]}
    rows: dict[str, list[Item]] = {}
    for line in worked["lines"]:
        told = {**line, "used_by": used.get(line["name"], ())}
        rows.setdefault(line.get("row", worked["row"]), []).append(told)
    return [(_row_heading(item, row), lines) for row, lines in rows.items()]


def _row_heading(item: Item, row: str) -> list[Node]:
    """Return 'Row WX1+, largest M_b, smallest N_b'."""
    for_what = [[f"{which} ", symbol(column)] for which, column in governs(item, row)]
    return joined([[strong(f"Row {words(row)}")], *for_what], ", ")


def equation(item: Item) -> dict[str, Any]:
    """Return a line's formula in parts, the result in bold at its end, and its spoken form."""
    value = item.get("value") or {}
    result = typeset.Printed(value["text"], value.get("unit", "")) if value.get("text") else None
    values = {
        name: typeset.Printed(shown["text"], shown.get("unit", ""))
        for name, shown in item.get("values", {}).items()
    }
    printed_form = bool(item.get("takes"))
    parts, plain = (
        typeset.equation(
            item["name"], item["formula"], output, values, result, printed_form=printed_form
        )
        for output in ("typst", "plain")
    )
    first: list[list[Node]] = [[" = ".join(plain[:2])]]
    rest: list[list[Node]] = [["= ", part] for part in plain[2:]]
    if result:
        parts[-1] = f"bold({parts[-1]})"
        if rest:
            rest[-1] = ["= ", strong(plain[-1])]
    whole = typeset.spoken(item["name"], item["formula"], values, result)
    return {
        "parts": parts,
        "alt": whole,
        "alts": [whole, *(f"equals {part}" for part in plain[2:])],
        "plain": first + rest,
        "short": len(" = ".join(plain)) < SURELY_FITS,
    }


def verdict(item: Item) -> list[Node]:
    """Return 'demand 1.908, limit 2.400 kPa, ratio 0.80: satisfied'."""
    sides = compared(item)
    return [f"{sides}: ", strong(judged(item))] if sides else [strong(judged(item))]


def confirmation(item: Item) -> list[list[Node]]:
    """Return whether the value is confirmed, by whom, and where it comes from.

    Nothing is said of words left empty: there is nothing in them to confirm.
    """
    source = f": {words(item['source'])}" if item.get("source") else ""
    if item.get("confirmed"):
        return [[f"confirmed {words(item['confirmed'])}{source}"]]
    return [[strong("not confirmed"), source]] if is_unconfirmed(item) else []


def carried_words(item: Item) -> list[Node]:
    """Return a carried value, option or text as it is shown."""
    if item.get("option") is not None:
        return [words(option_words(item))]
    if item.get("text") is not None:
        return [words(item["text"] or "nothing carried")]
    return _equals(item.get("name"), amount(item.get("value")))


def moved(item: Item) -> str:
    """Return what a carried value was when it was taken, and what it is now."""
    was, now = item.get("taken") or {}, item.get("value") or {}
    if not was.get("text") or not now.get("text"):
        return "it has moved on since it was taken"
    return f"was {amount(was)} when taken, is now {amount(now)}"


def origin_words(anchors: Anchors, item: Item) -> list[Node]:
    """Return 'from design basis 1.4, p. 4' with a link to the item it was taken from."""
    origin = item["from"]
    target, number = anchors.origin(origin)
    name = origin["workbook"].replace("-", " ")
    told = " ".join(part for part in (name, origin.get("mark"), number) if part)
    return joined([["from ", *link(target, words(told))], page(target)], ", ")


def fallback_words(item: Item) -> list[Node]:
    """Return that a fallback stands in for a carried value, and from where none came."""
    home = (item.get("from") or {}).get("workbook", "").replace("-", " ")
    told = f"fallback value, nothing carried from {words(home)}"
    if isinstance(item.get("confirmed"), str) and item["confirmed"]:
        return [f"{told}; confirmed {words(item['confirmed'])}"]
    return [strong("not confirmed"), f": {told}"]


def _equals(name: str | None, shown: Node) -> list[Node]:
    return [symbol(name), " = ", shown] if name else [shown]


def _printed_units(item: Item) -> list[Node]:
    """Return 'V in m/s, q in N/m²' for a formula shown as the code prints it."""
    spoken = [(name, unit) for name, unit in item["takes"].items() if unit]
    if item.get("gives"):
        spoken.append((item["name"], item["gives"]))
    parts = [[symbol(name), f" in {units.pretty_unit(unit)}"] for name, unit in spoken]
    return joined(parts, ", ")


def _trouble(item: Item) -> list[list[Node]]:
    return [[strong("Problem: "), *phrase(item["problem"])]] if item.get("problem") else []


def _length(content: Any) -> int:  # noqa: ANN401  (nodes nest)
    if isinstance(content, str):
        return len(content)
    if isinstance(content, dict):
        return _length(content.get("c", ()))
    return sum(_length(node) for node in content)
