"""Many cases of one workbook at once: entries as columns of text in, results as arrays out.

Reading and computing are apart: ``read`` takes text and checks it as strictly as a single entry,
``compute`` runs the compiled workbook on arrays in coherent SI.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from calcbook import units
from calcbook.errors import CalcbookError, InputError
from calcbook.items import Carry, Check, Choice, Entry, Schedule, Text
from calcbook.reading import SLACK, read_value
from calcbook.verdict import STRICT, margin
from calcbook.workbook import first_problem

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    from calcbook.bind import Bound
    from calcbook.items import Item
    from calcbook.program import Program, Value
    from calcbook.workbook import Workbook

OPENING = ("code_set", "units")  # decided when a workbook is opened, the same for every case
_PLAIN = re.compile(r"[-+]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)")
_LONGEST = 30  # a plain number this short cannot be too large or too small for a float


@dataclass(frozen=True)
class Cases:
    """The inputs of many cases in coherent SI.

    Attributes
    ----------
    count
        How many cases there are.
    values
        Every input by name: entries given per case as arrays (count,), options as arrays of text;
        all others as single values; columns of schedules as arrays (rows, 1).
    rows
        The number of rows of each set of rows.
    idle
        Why an input has no value that does not apply with the values on record; it may not apply
        in any of the cases either.
    """

    count: int
    values: Mapping[str, Value]
    rows: Mapping[str, int]
    idle: Mapping[str, str]


def entries(book: Workbook) -> dict[str, Entry | Choice | Text | Carry]:
    """Return the entries that may differ from case to case, by name."""
    return {
        item.name: item for item in (b.item for b in book.bound if b.schedule is None)
        if isinstance(item, (Entry, Choice, Text, Carry)) and item.name not in OPENING
    }  # fmt: skip


def read(book: Workbook, columns: Mapping[str, Sequence[str]]) -> Cases:
    """Read the entries of many cases strictly; what has no column keeps its value on record.

    Parameters
    ----------
    book
        An evaluated workbook.
    columns
        For each entry given per case its text in every case, with units.

    Raises
    ------
    InputError, QuantityError
        For the first case that is refused, named by its number, the first being case 1; for
        columns of unequal length; for another input that has no value.
    """
    counts = {len(texts) for texts in columns.values()}
    if len(counts) != 1:
        raise InputError("the columns of the cases are not of one length")
    known = entries(book)
    _refuse_shaping(book, columns)
    program_values: dict[str, Value] = {}
    for name, value in book.readings.values.items():
        program_values[name] = _fixed(value)
    for name, texts in columns.items():
        if name not in known:
            book.input_item(name)
            raise InputError(f"{name} is the same for every case", hint=f"use --set {name}=VALUE",
                             where=book.name)  # fmt: skip
        program_values[name] = _column(known[name], texts)
    idle = _refuse_missing(book, columns)
    for name in idle:
        words = book.program.scope[name].form == "text"
        program_values[name] = "" if words else np.float64(np.nan)
    return Cases(counts.pop(), program_values, book.readings.rows, idle)


def compute(
    program: Program, values: Mapping[str, Value], rows: Mapping[str, int]
) -> dict[str, Value]:
    """Compute every line of a workbook for many cases.

    Parameters
    ----------
    program
        The workbook compiled for many cases, ``book.many()``.
    values, rows
        As in `Cases`.

    Returns
    -------
    dict
        Scalar lines as arrays (cases,), or single values where nothing differs; columns as arrays
        (rows, cases), in coherent SI. What a case cannot compute, or does not apply, is nan.
    """
    with np.errstate(all="ignore"):
        found = program.compute(values, rows)[1]
    return {bound.name: value for bound, value in zip(program.computed, found, strict=True)}


def evaluate(book: Workbook, columns: Mapping[str, Sequence[str]]) -> dict[str, np.ndarray]:
    """Read many cases and compute the results of the workbook.

    Returns
    -------
    dict
        See `results`.

    Raises
    ------
    InputError, QuantityError
        See `read` and `results`.
    """
    cases, program = read(book, columns), book.many()
    return results(book, program, cases, compute(program, cases.values, cases.rows))


def result_lines(book: Workbook) -> list[Bound]:
    """Return the lines given per case: the results declared, or every line when none is."""
    lines = [b for b in book.program.lines if b.schedule is None and not b.is_words]
    return [b for b in lines if getattr(b.item, "result", False)] or lines


def results(
    book: Workbook, program: Program, cases: Cases, found: Mapping[str, Value]
) -> dict[str, np.ndarray]:
    """Return the results among the lines computed.

    Returns
    -------
    dict
        Each of `result_lines` as an array (cases,) in coherent SI; nan where the line does not
        apply in that case.

    Raises
    ------
    InputError
        For the first case in which a result that applies has no value, or an input that has none
        applies.
    """
    values = {**cases.values, **found}
    for name, reason in cases.idle.items():
        places = np.flatnonzero(_applies(program, book.scope[name], values, cases.count))
        if places.size:
            raise InputError(_reason(name, reason), where=f"case {places[0] + 1}")
    given = {}
    for bound in result_lines(book):
        array = np.array(np.broadcast_to(np.asarray(found[bound.name], float), cases.count))
        applies = _applies(program, bound, values, cases.count)
        bad = np.flatnonzero(applies & ~np.isfinite(array))
        if bad.size:
            raise _no_value(book, bound, cases, int(bad[0]))
        array[~applies] = np.nan
        given[bound.name] = array
    return given


def failing(
    program: Program, cases: Cases, found: Mapping[str, Value]
) -> list[tuple[Bound, np.ndarray]]:
    """Return each check that fails somewhere, with the places (from 0) of the cases it fails in.

    A check that cannot be decided fails.
    """
    values = {**cases.values, **found}
    failed = []
    for step in program.steps():
        if not isinstance(step.bound.item, Check):
            continue
        if step.sides is not None:
            left, right = (program.run(side, values) for side in step.sides)
            held = _held(left, right, step.bound.branches[0][1].rest[0][0])  # type: ignore[union-attr]
        else:
            held = np.asarray(program.run(step.branches[0][1], values), bool)
        every = np.broadcast_to(held.all(axis=0) if held.ndim > 1 else held, cases.count)
        applies = _applies(program, step.bound, values, cases.count)
        places = np.flatnonzero(applies & ~every)
        if places.size:
            failed.append((step.bound, places))
    return failed


# --- reading ------------------------------------------------------------------------------------


def _refuse_shaping(book: Workbook, names: Iterable[str]) -> None:
    """Refuse an entry that rows depend on: every case has the same rows."""
    for item in (b.item for b in book.bound):
        shaped = item.shaped if isinstance(item, Schedule) else None
        if shaped is None:
            continue
        here = item.name in book.readings.shaped
        found = [shaped.choice, *(shaped.takes.values() if here else ())]
        for name in (n for n in names if n in found):
            raise InputError(
                f"the rows of {item.name} depend on {name}, and every case has the same rows",
                hint=f"use --set {name}=VALUE", where=book.name,
            )  # fmt: skip


def _fixed(value: Value) -> Value:
    """Return a value that is the same in every case, ready to be computed with arrays."""
    if isinstance(value, np.ndarray):
        return value[:, np.newaxis]
    return np.float64(value) if isinstance(value, float) else value


def _refuse_missing(book: Workbook, columns: Mapping[str, Sequence[str]]) -> dict[str, str]:
    """Refuse an input without a value, unless it does not apply; returns these with the reason."""
    idle = {}
    for name in book.program.inputs:
        reason = first_problem(book, [name])
        if not reason or name in columns:
            continue
        bound = book.scope[name]
        if book.results.applies.get(bound.number, True):
            raise InputError(_reason(name, reason), where=book.name)
        idle[name] = reason
    return idle


def _reason(name: str, reason: str) -> str:
    said = "\n" in reason or reason.startswith(f"{name}:")
    return reason if said else f"{name} {reason}"


def _column(item: Item, texts: Sequence[str]) -> np.ndarray:
    words = isinstance(item, Text) or (isinstance(item, Carry) and item.text)
    if words or getattr(item, "labels", None):
        _read_each_once(item, texts)
        return np.array(texts, dtype=np.str_)
    return _numbers(item, texts)


def _read_each_once(item: Item, texts: Sequence[str]) -> None:
    for text in dict.fromkeys(texts):
        _read(item, text, texts.index(text))


def _read(item: Item, text: str, place: int) -> units.Quantity | str:
    try:
        return read_value(item, text)
    except CalcbookError as error:
        raise error.at(f"case {place + 1}") from None


def _numbers(item: Item, texts: Sequence[str]) -> np.ndarray:
    """Read quantities; a plain number with a unit met before needs no grammar."""
    factors: dict[str, float] = {}
    si = np.empty(len(texts))
    for place, text in enumerate(texts):
        number, _, unit = text.partition(" ")
        factor = factors.get(unit)
        if factor is not None and len(number) < _LONGEST and _PLAIN.fullmatch(number):
            si[place] = float(number) * factor
            continue
        quantity = _read(item, text, place)
        if isinstance(quantity, units.Quantity):
            si[place] = quantity.si
            if quantity.unit.text == unit:
                factors[unit] = quantity.unit.factor
    _refuse_outside(item, texts, si)
    return si


def _refuse_outside(item: Item, texts: Sequence[str], si: np.ndarray) -> None:
    dimension = item.kind.dimension  # type: ignore[attr-defined]
    bad = np.zeros(len(si), dtype=bool)
    low, high = (getattr(item, side) for side in ("low", "high"))
    if low:
        least = units.read_quantity(low, dimension).si
        bad |= si < least - SLACK * abs(least)
    if high:
        most = units.read_quantity(high, dimension).si
        bad |= si > most + SLACK * abs(most)
    for place in np.flatnonzero(bad):
        _read(item, texts[int(place)], int(place))


# --- deciding -----------------------------------------------------------------------------------


def _applies(program: Program, bound: Bound, values: Mapping[str, Value], count: int) -> np.ndarray:
    """Return in which cases the conditions of an item hold."""
    applies = np.ones(count, dtype=bool)
    for _, code in program.step(bound).guards:
        applies &= np.asarray(program.run(code, values), bool)
    return applies


def _held(left: Value, right: Value, relation: str) -> np.ndarray:
    if np.asarray(left).dtype.kind in "UO":
        return np.asarray(left == right if relation == "==" else left != right, bool)
    margins = margin(left, right, relation)
    held = margins > 0 if relation in STRICT else margins >= 0
    return np.asarray(held & np.isfinite(margins))


def _no_value(book: Workbook, bound: Bound, cases: Cases, place: int) -> InputError:
    """Return why one case has no value, found by computing that case alone."""
    one: dict[str, Value] = {}
    for name, value in cases.values.items():
        if not isinstance(value, np.ndarray):
            one[name] = float(value) if isinstance(value, np.floating) else value
        elif value.ndim > 1:
            one[name] = value[:, 0]
        else:
            one[name] = str(value[place]) if value.dtype.kind == "U" else float(value[place])
    results = book.program.evaluate(one, cases.rows, {}, {})
    reasons = {
        b.name: results.problems[b.number] for b in book.program.lines
        if b.number in results.problems
    }  # fmt: skip
    name, reason = next(iter(reasons.items()), (bound.name, "has no finite value"))
    return InputError(f"{name} {reason}", where=f"case {place + 1}",
                      hint="check the entries of this case")  # fmt: skip
