"""What a study can be made of: lines, the ratios of checks, and what a schedule adds up to."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from calcbook import typeset, units
from calcbook.errors import InputError, near_match
from calcbook.statement import Writer
from calcbook.tree import Compare

if TYPE_CHECKING:
    from collections.abc import Iterator

    from calcbook.bind import Bound
    from calcbook.workbook import Workbook

LINE, RATIO, TOTAL = "line", "ratio", "total"
Plain = dict[str, Any]


@dataclass(frozen=True)
class Result:
    """A result a study can be made of.

    Attributes
    ----------
    id
        ``V_max`` for a line, ``12.3`` for the ratio of that check, ``W_floor total`` or
        ``V_b largest`` for a column of a schedule.
    which
        'line', 'ratio', 'total', or the rank of a governing row: 'largest', 'smallest',
        'largest magnitude'.
    name, meaning, number
        The symbol ('' for a check), what it is, and the number of its item.
    si, text, unit
        Its value in coherent SI, as printed with its unit, and that unit.
    relation
        For a ratio, how the demand is compared with the limit.
    declared
        Whether the workbook declares it a result.
    """

    id: str
    which: str
    name: str
    meaning: str
    number: str
    si: float
    text: str
    unit: str
    decimals: int
    relation: str = ""
    declared: bool = False

    def written(self, si: float) -> str:
        """Return another value of this result as it would be printed, with its unit."""
        value = si / units.unit(self.unit).factor
        decimals = max(self.decimals, 0)
        if value and abs(value) < 10.0 ** (1 - decimals):
            decimals = units.significant_decimals(value, 2)
        return typeset.number(units.format_number(value, decimals), self.unit, "plain")


@dataclass(frozen=True)
class Chosen:
    """A result with the bound item it is read from."""

    result: Result
    bound: Bound


def results(book: Workbook) -> tuple[Result, ...]:
    """Return what a study of an evaluated workbook can be made of, in its order.

    These are the lines outside schedules that have a value, the checks with a ratio, and the
    totals and governing rows of the columns that lines compute.
    """
    return tuple(chosen.result for chosen in _every(book, Writer(book).write()))


def choose(book: Workbook, identity: str) -> Chosen:
    """Return the result of an id.

    Raises
    ------
    InputError
        There is no such result, or it has no value, with the reason or the nearest id.
    """
    statement = Writer(book).write()
    every = {chosen.result.id: chosen for chosen in _every(book, statement)}
    if identity in every:
        return every[identity]
    for item in (i for p in statement["parts"] for i in p["items"]):
        if identity.partition(" ")[0] in {item["name"], item["number"]}:
            raise InputError(
                f"{identity} has no value to study", where=book.name, hint=_reason(item, identity)
            )
    hint = near_match(identity, every) or f"there are {', '.join(every) or 'none'}"
    raise InputError(f"there is no result '{identity}'", where=book.name, hint=hint)


def _reason(item: Plain, identity: str) -> str:
    if item["problem"]:
        return str(item["problem"])
    if not item["applies"]:
        return f"it is not applied: {item['why']}"
    if item["kind"] == "check":
        return "choose a check that compares a demand with a limit, both above or below zero"
    return f"{identity} is no line, no check, and no total or governing row of a schedule"


def _every(book: Workbook, statement: Plain) -> Iterator[Chosen]:
    by_number = {bound.number: bound for bound in book.bound}
    for item in (i for p in statement["parts"] for i in p["items"]):
        if not item["applies"] or item["problem"] or item["number"] not in by_number:
            continue
        bound = by_number[item["number"]]
        if item["kind"] == "line" and item["value"]["si"] is not None:
            yield Chosen(_line(item), bound)
        elif item["kind"] == "check" and item["ratio"] is not None:
            yield Chosen(_ratio(item), bound)
        elif item["kind"] == "schedule":
            yield from _of_schedule(item, bound)


def _line(item: Plain) -> Result:
    return _valued(item["value"], item, item["name"], LINE, declared=item["result"])


def _ratio(item: Plain) -> Result:
    text = item["ratio_text"]
    return Result(
        id=item["number"], which=RATIO, name="", meaning=item["meaning"], number=item["number"],
        si=item["ratio"], text=text, unit="", decimals=_decimals(text), relation=item["relation"],
    )  # fmt: skip


def _of_schedule(item: Plain, schedule: Bound) -> Iterator[Chosen]:
    """Yield the totals and governing rows of the columns that lines compute."""
    by_name = {bound.name: bound for bound in schedule.columns if bound.branches}
    columns = {c["name"]: c for c in item["columns"] if c["name"] in by_name and c["applies"]}
    for name, column in columns.items():
        total = column["total"]
        if total is not None and total["si"] is not None:
            found = _valued(total, column, f"{name} total", TOTAL, declared=column["result"])
            yield Chosen(replace(found, meaning=f"{column['meaning']}, total"), by_name[name])
    for part in item["envelope"] or ():
        name = part["column"]
        if name in columns and part["value"]["si"] is not None:
            column, which = columns[name], part["which"]
            declared = column["result"]
            found = _valued(part["value"], column, f"{name} {which}", which, declared=declared)
            yield Chosen(replace(found, meaning=f"{column['meaning']}, {which}"), by_name[name])


def _valued(value: Plain, item: Plain, identity: str, which: str, *, declared: bool) -> Result:
    return Result(
        id=identity, which=which, name=item["name"], meaning=item["meaning"],
        number=item["number"], si=value["si"],
        text=typeset.number(value["text"], value["unit"], "plain"),
        unit=value["unit"], decimals=_decimals(value["text"]), declared=declared,
    )  # fmt: skip


def _decimals(text: str) -> int:
    """Return the decimals a printed number has; four figures where it is a power of ten."""
    return 0 if "e" in text else len(text.partition(".")[2])


def relation_of(bound: Bound) -> str:
    """Return how a check compares its sides."""
    node = bound.branches[0][1]
    return node.rest[0][0] if isinstance(node, Compare) else ""
