"""A section of a statement as blocks of words, formulas and tables, before any output.

The Markdown and plain text of a cell and the page in JupyterLab are printed from the same
blocks, so that they cannot tell different things.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from calcbook import typeset
from calcbook.live import wording
from calcbook.standing import is_unconfirmed, unconfirmed_rows
from calcbook.wording import (
    FROM_MEMORY,
    OUTSIDE,
    cases_told,
    compared,
    governs,
    not_applied,
    option_words,
    solved_words,
    solver_takes,
    symbols_in,
    verdict,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping

    Plain = Mapping[str, Any]


@dataclass(frozen=True)
class Strong:
    """Words that must not be overlooked."""

    text: str


@dataclass(frozen=True)
class Symbol:
    """A name of the formulas."""

    name: str


@dataclass(frozen=True)
class Relation:
    """A formula in running text, as declared."""

    text: str


@dataclass(frozen=True)
class Amount:
    """A value as printed, with its unit; ``typed`` by the engineer or computed."""

    text: str
    unit: str = ""
    typed: bool = False


Run = str | Strong | Symbol | Relation | Amount
Words = tuple[Run, ...]


@dataclass(frozen=True)
class Equation:
    """A line's formula, the values put into it and its result."""

    name: str
    formula: str
    values: Mapping[str, typeset.Printed]
    result: typeset.Printed | None
    as_printed: bool = False

    def parts(self, output: str) -> list[str]:
        """Return the parts that stand between the equal signs."""
        return typeset.equation(
            self.name, self.formula, output, self.values, self.result, printed_form=self.as_printed
        )


@dataclass(frozen=True)
class Grid:
    """A table: headings, rows of cells, and a last row of totals ('' where there is none)."""

    heads: tuple[Words, ...]
    rows: tuple[tuple[Words, ...], ...]
    numeric: tuple[bool, ...]
    totals: tuple[Words, ...] = ()
    governing: int | None = None


@dataclass(frozen=True)
class Block:
    """One item, ready to be printed: number, words, what it says, and margin notes."""

    kind: str
    number: str
    words: Words = ()
    says: tuple[Words, ...] = ()
    notes: tuple[Words, ...] = ()
    equation: Equation | None = None
    grid: Grid | None = None
    troubles: tuple[str, ...] = ()
    standing: str = ""
    unconfirmed: bool = False
    within: bool = False
    item: Plain = field(default_factory=dict, compare=False)

    @property
    def remarks(self) -> tuple[Words, ...]:
        """The margin notes, and last whether the value stands confirmed."""
        if not self.standing:
            return self.notes
        return (*self.notes, (Strong(self.standing) if self.unconfirmed else self.standing,))


def blocks(section: Plain) -> Iterator[Block]:
    """Yield the blocks of a section, a governing row's lines under their schedule."""
    for item in section["items"]:
        yield block(item)
        if item["kind"] == "schedule" and item["applies"] and item.get("governing"):
            yield from _governing(item)


def _governing(item: Plain) -> Iterator[Block]:
    """Yield the lines worked in each governing row, under what the row governs."""
    row = ""
    for line in item["governing"]["lines"]:
        if line["row"] != row:
            row = line["row"]
            yield Block("row", "", _row_heading(item, row))
        yield _line(line, within=True)


def _row_heading(item: Plain, row: str) -> Words:
    words: Words = (Strong(f"Row {row}"),)
    for which, column in governs(item, row):
        words = (*words, f", {which} ", Symbol(column))
    return words


def phrase(text: str) -> Words:
    """Return words of a workbook, with a symbol such as q_z among them set as a symbol."""
    return tuple(Symbol(p) if is_symbol else p for p, is_symbol in symbols_in(text))


def block(item: Plain) -> Block:
    """Return one item as a block; one that does not apply says why, and nothing else."""
    if not item["applies"]:
        said = phrase(not_applied(item))
        if not item["meaning"]:
            return Block("idle", item["number"], said, item=item)
        return Block("idle", item["number"], phrase(item["meaning"]), (said,), item=item)
    return _SHAPES[item["kind"]](item)


def _common(item: Plain) -> dict[str, Any]:
    notes: list[Words] = [(item["clause"],)] if item.get("clause") else []
    notes += [phrase(item["note"].rstrip("."))] if item.get("note") else []
    notes += [(Strong(FROM_MEMORY),)] if item.get("memory") else []
    return {
        "kind": item["kind"], "number": item["number"], "item": item,
        "words": phrase(item["meaning"]), "notes": tuple(notes),
        "troubles": (item["problem"],) if item.get("problem") else (),
    }  # fmt: skip


def _given(item: Plain, says: Words) -> Block:
    common = _common(item)
    told = (wording.range_words(item), wording.source_words(item))
    common["notes"] += tuple((words,) for words in told if words)
    return Block(
        **common, says=(says,), standing=wording.standing(item),
        unconfirmed=is_unconfirmed(item) and not item.get("problem"),
    )  # fmt: skip


def _amount(item: Plain, *, typed: bool) -> Words:
    value = item["value"]
    says: Words = (Symbol(item["name"]), " = ", Amount(value["text"], value["unit"], typed))
    shown = item.get("shown")
    return (*says, " = ", Amount(shown["text"], shown["unit"])) if shown else says


def _entry(item: Plain) -> Block:
    return _given(item, _amount(item, typed=True))


def _text(item: Plain) -> Block:
    return _given(item, (Amount(item["text"] or "nothing entered", typed=bool(item["text"])),))


def _choice(item: Plain) -> Block:
    return _given(item, (Amount(option_words(item), typed=True),))


def _carried(item: Plain) -> Block:
    if "option" in item:
        says: Words = (Amount(option_words(item)),)
    elif "text" in item:
        says = (Amount(item["text"] or "nothing carried"),)
    else:
        says = _amount(item, typed=False)
    if item["fallback"]:
        return _given(item, says)
    common = _common(item)
    notes: list[Words] = [(wording.origin_words(item),)]
    if item["stale"]:
        notes.append((Strong(wording.moved_words(item)),))
    common["notes"] = (*common["notes"], *notes)
    return Block(**common, says=(says,))


def _printed(value: Plain) -> typeset.Printed | None:
    return typeset.Printed(value["text"], value["unit"]) if value.get("text") else None


def _line(item: Plain, *, within: bool = False) -> Block:
    common = _common(item)
    says: tuple[Words, ...] = (phrase(f"because {item['why']}"),) if item.get("why") else ()
    spoken = [f"{name} in {unit}" for name, unit in item["takes"].items() if unit]
    if spoken:
        common["notes"] += ((f"as printed: {', '.join(spoken)}",),)
    if item.get("sign"):
        common["notes"] += ((f"positive {item['sign']}",),)
    if item.get("solved"):
        common["notes"] += ((solved_words(item),),)
    values = {n: typeset.Printed(v["text"], v["unit"]) for n, v in item["values"].items()}
    equation = Equation(
        item["name"], item["formula"], values, _printed(item["value"]), bool(item["takes"])
    )
    return Block(**common, says=says, equation=equation, within=within)


def _solver(item: Plain) -> Block:
    takes = tuple(
        (f"{meaning}: ", *(run for place, one in enumerate(names) for run in _taken(place, *one)))
        for meaning, names in solver_takes(item)
    )
    says = tuple((text,) for text in item["says"])
    return Block(**_common(item), says=((item["method"],), *takes, *says))


def _taken(place: int, case: str, name: str) -> Words:
    return (", " if place else "", f"{case} " if case else "", Symbol(name))


def _check(item: Plain) -> Block:
    sides = compared(item)
    says: Words = (f"{sides}: " if sides else "", Strong(verdict(item)))
    return Block(**_common(item), says=((Relation(item["text"]),), says))


def _remark(item: Plain) -> Block:
    common = _common(item)
    common["words"] = (Strong(f"{item['tone'].capitalize()}."), " ", *phrase(item["text"]))
    return Block(**common)


def _figure(item: Plain) -> Block:
    common = _common(item)
    common["words"] = (f"Figure {item['number']}. {item['caption']}",)
    return Block(**common)


def _error(item: Plain) -> Block:
    common = _common(item)
    common["troubles"] = (f"Not accepted: {item['text']}",)
    return Block(**common, says=((f"as typed: {item['source']}",),) if item["source"] else ())


def _table(item: Plain) -> Block:
    down, *across = item["axes"]
    common = _common(item)
    common["notes"] += ((f"between points by straight lines; {OUTSIDE[item['outside']]}",),)
    if not across:
        heads = (_head(down["name"], down["unit"]), _head(item["name"], item["unit"]))
        cells = tuple(
            ((Amount(p),), (Amount(v),)) for p, v in zip(down["texts"], item["texts"], strict=True)
        )
        return Block(**common, grid=Grid(heads, cells, (True, True)))
    name, unit = across[0]["name"], across[0]["unit"]
    points: list[Words] = [(name, " = ", Amount(p, unit)) for p in across[0]["texts"]]
    rows = tuple(
        ((Amount(point),), *((Amount(text),) for text in texts))
        for point, texts in zip(down["texts"], item["texts"], strict=True)
    )
    tops = (_head(down["name"], down["unit"]), *points)
    return Block(**common, grid=Grid(tops, rows, (True,) * len(tops)))


def _head(name: str, unit: str) -> Words:
    return (Symbol(name), " (", Amount("", unit), ")") if unit else (Symbol(name),)


def _schedule(item: Plain) -> Block:
    common = _common(item)
    if item["from"] and not item["fallback"]:
        common["notes"] += ((wording.origin_words(item),),)
    elif item.get("shaped"):
        common["notes"] += ((item["shaped"],),)
    elif not item["fixed"]:
        common["notes"] += tuple((words,) for words in wording.rows_standing(item))
    if item["stale"]:
        common["notes"] += ((Strong("moved on since it was taken"),),)
    common["troubles"] += tuple(wording.schedule_troubles(item))
    return Block(
        **common, grid=schedule_grid(item), says=tuple(_legend(item)),
        unconfirmed=bool(unconfirmed_rows(item)),
    )  # fmt: skip


def shown_columns(item: Plain) -> list[Plain]:
    """Return the columns of a schedule that apply."""
    return [c for c in item["columns"] if c["applies"]]


def column_head(column: Plain) -> Words:
    """Return the heading of a column: its symbol and unit, or its meaning where it is words."""
    if column["role"] in ("text", "choice"):
        return (column["meaning"] or column["name"],)
    return _head(column["name"], column["unit"])


def schedule_grid(item: Plain) -> Grid:
    """Return a schedule as a table, the key column first."""
    columns = shown_columns(item)
    rows = tuple(
        ((key,), *(_cell(column, place) for column in columns))
        for place, key in enumerate(item["rows"])
    )
    totals: tuple[Words, ...] = ()
    if any(c["total"] for c in columns):
        sums = ((Amount(c["total"]["text"]),) if c["total"] else () for c in columns)
        totals = (("Total",), *sums)
    row = item["governing"]["row"] if item.get("governing") else None
    return Grid(
        ((item["key"],), *map(column_head, columns)), rows,
        (False, *(c["role"] not in ("text", "choice") for c in columns)), totals,
        item["rows"].index(row) if row in item["rows"] else None,
    )  # fmt: skip


def _cell(column: Plain, place: int) -> Words:
    text = column["texts"][place]
    if not text and column["problem"] and column["problem"][place]:
        return ("n/a",)
    if column["role"] in ("text", "choice"):
        return (column.get("labels", {}).get(text, text),)
    return (Amount(text, typed=column["role"] == "entered"),)


def _legend(item: Plain) -> Iterator[Words]:
    """Yield what the columns of numbers mean, then who governs."""
    worked = {
        (line["name"], line["formula"]) for line in (item.get("governing") or {}).get("lines", ())
    }
    for column in shown_columns(item):
        if column["role"] not in ("text", "choice"):
            yield from _definitions(column, worked)
    for row in item.get("envelope") or ():
        value = row["value"]
        which = f"{row['which']} of the rows: "
        yield (Symbol(row["column"]), f", {which}", Amount(value["text"], value["unit"]),
               " in ", Strong(str(row["row"])))  # fmt: skip


def _definitions(column: Plain, worked: set[tuple[str, str]]) -> Iterator[Words]:
    """Yield a column's meaning, and its formula, or one by case, unless worked in full."""
    name = column["name"]
    words: Words = (Symbol(name), ": ", *phrase(column["meaning"] or name))
    clause: Words = (f" ({column['clause']})",) if column["clause"] else ()
    if column.get("solved"):
        clause = (", ", solved_words(column), *clause)
    cases = cases_told(column)
    formulas = [text for text, _ in cases] or [column["formula"]]
    if not formulas[0] or all((name, text) in worked for text in formulas):
        yield (*words, *clause)
        return
    if not cases:
        yield (*words, ", ", Relation(column["formula"]), *clause)
        return
    yield (*words, *clause, ", by case:")
    for text, conditions in cases:
        line: Words = (Symbol(name), " = ", Relation(text), " where " if any(conditions) else " ")
        for place, test in enumerate(conditions):
            line = (*line, " or " if place else "", Relation(test) if test else "otherwise")
        yield line


_SHAPES: dict[str, Callable[[Plain], Block]] = {
    "entry": _entry, "text": _text, "choice": _choice, "carried": _carried, "line": _line,
    "solver": _solver,
    "table": _table, "schedule": _schedule, "check": _check, "remark": _remark,
    "figure": _figure, "error": _error,
}  # fmt: skip
