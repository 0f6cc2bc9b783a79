"""Factors of combinations by load case as a matrix, with signs where effects are governed."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown
from calcbook.figures.sketch import (
    ACCENT,
    GREY,
    INK,
    LIGHT,
    MARGIN,
    PAPER,
    ROW,
    WIDTH,
    Sketch,
    shortened,
    text_width,
)

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

NEEDS = ("combinations", "factors")
TAKES = ("largest", "smallest")

_KEY_ROOM = 30.0
_COUNT_ROOM = 12.0
_HIGH = ROW + 0.6
_NONE = "·"
_SAID_ROWS = 16


@dataclass(frozen=True)
class Matrix:
    """The combinations down, the load cases across.

    Attributes
    ----------
    keys, heads
        Names of the combinations; words of the load cases.
    cells
        By combination, then by load case: the factor as text, '' for none, None where missing.
    largest, smallest
        How many effects each combination governs, by its name.
    left_out
        What could not be drawn, in words.
    """

    keys: tuple[str, ...]
    heads: tuple[str, ...]
    cells: tuple[tuple[str | None, ...], ...]
    largest: Counter[str]
    smallest: Counter[str]
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Matrix:
    """Look the factors up, and count which combination governs how many effects."""
    table = uses["combinations"]
    keys = lookup.rows(statement, table)
    if isinstance(keys, Missing):
        nothing: Counter[str] = Counter()
        why = (f"No factors are drawn: {keys.why}.",)
        return Matrix((), (), (), nothing, nothing, why)
    names = lookup.numbered(uses, "factors")
    columns = [lookup.cells(statement, table, name) for name in names]
    left_out = dict.fromkeys(
        f"{key}: {cell.name} is missing, {cell.why}."
        for cells in columns
        for key, cell in zip(keys, cells, strict=True)
        if isinstance(cell, Missing)
    )
    return Matrix(
        keys,
        tuple(_head(name) for name in names),
        tuple(tuple(_factor(column[row]) for column in columns) for row in range(len(keys))),
        _governed(statement, lookup.numbered(uses, "largest")),
        _governed(statement, lookup.numbered(uses, "smallest")),
        tuple(left_out),
    )


def draw(statement: lookup.Record, uses: Mapping[str, Any]) -> Sketch:
    """Draw the matrix; a triangle up stands where a largest value is, one down for a smallest."""
    sketch = Sketch()
    matrix = gather(statement, uses)
    y = 0.0
    if matrix.keys:
        y = _rows(sketch, matrix, _head_rows(sketch, matrix))
    for note in (*_notes(matrix), *matrix.left_out):
        y = sketch.paragraph(MARGIN, y, note)
    return sketch


def describe(statement: lookup.Record, uses: Mapping[str, Any]) -> str:
    """Return the matrix in words: each combination with its factors, and those that govern."""
    matrix = gather(statement, uses)
    if not matrix.keys:
        return " ".join(["Factors of combinations, empty.", *matrix.left_out])
    parts = [f"Factors of {len(matrix.keys)} combinations by load case."]
    if len(matrix.keys) <= _SAID_ROWS:
        said = [
            f"{key}: " + ", ".join(f"{t} {h}" for t, h in zip(row, matrix.heads, strict=True) if t)
            for key, row in zip(matrix.keys, matrix.cells, strict=True)
        ]
        parts.append("; ".join(said) + ".")
    for word, found in (("largest", matrix.largest), ("smallest", matrix.smallest)):
        if found:
            counts = ", ".join(f"{key} {count} times" for key, count in found.items())
            parts.append(f"The {word} value comes from {counts}.")
    return " ".join([*parts, *matrix.left_out])


def _governed(statement: lookup.Record, names: Iterable[str]) -> Counter[str]:
    """Return how often each word stands in columns of words, wherever they are."""
    columns = (
        column
        for part in statement.get("parts", ())
        for item in part.get("items", ())
        if item.get("kind") == "schedule" and item.get("applies", True) and not item.get("problem")
        for column in item["columns"]
    )
    wanted = set(names)
    return Counter(t for c in columns if c["name"] in wanted for t in c["texts"] if t)


def _head(name: str) -> str:
    """Return what heads a factor: the load case behind its symbol, Lr for a_Lr."""
    return name.partition("_")[2] or name


def _factor(cell: Shown | Missing) -> str | None:
    if isinstance(cell, Missing):
        return None
    if cell.si == 0.0:
        return ""
    return cell.text.rstrip("0").rstrip(".") if "." in cell.text else cell.text


def _place(matrix: Matrix) -> tuple[float, float, float]:
    """Return where the factors begin, how wide each column is, and where the signs begin."""
    keys = max(text_width(shortened(key, _KEY_ROOM), bold=True) for key in matrix.keys)
    begin = MARGIN + max(keys, text_width("Combination")) + 2.0
    signs = WIDTH - MARGIN - 2.0 * _COUNT_ROOM
    return begin, (signs - begin) / max(len(matrix.heads), 1), signs


def _head_rows(sketch: Sketch, matrix: Matrix) -> float:
    begin, step, signs = _place(matrix)
    sketch.text(MARGIN, 0.0, "Combination", ink=GREY)
    for count, head in enumerate(matrix.heads):
        sketch.text(begin + (count + 0.5) * step, 0.0, shortened(head, step), align="center")
    _triangle(sketch, signs + 4.0, 0.0, up=True)
    _triangle(sketch, signs + 4.0 + _COUNT_ROOM, 0.0, up=False)
    rule = -0.5 * _HIGH
    sketch.line((MARGIN, rule), (WIDTH - MARGIN, rule), weight=0.8)
    return -_HIGH


def _rows(sketch: Sketch, matrix: Matrix, y: float) -> float:
    """Draw the rows from the height ``y`` down; return the next height."""
    begin, step, signs = _place(matrix)
    for key, row in zip(matrix.keys, matrix.cells, strict=True):
        governs = matrix.largest[key] + matrix.smallest[key] > 0
        sketch.text(MARGIN, y, shortened(key, _KEY_ROOM), bold=governs)
        for count, text in enumerate(row):
            words = "n/a" if text is None else text or _NONE
            ink = INK if text else GREY
            sketch.text(begin + (count + 0.5) * step, y, words, align="center", ink=ink)
        for place, found, up in ((0.0, matrix.largest, True), (1.0, matrix.smallest, False)):
            if found[key]:
                x = signs + 4.0 + place * _COUNT_ROOM
                _triangle(sketch, x, y, up=up)
                sketch.text(x + 2.4, y, str(found[key]))
        y -= _HIGH
        sketch.line((MARGIN, y + 0.5 * _HIGH), (WIDTH - MARGIN, y + 0.5 * _HIGH), ink=LIGHT)
    return y - 0.4


def _triangle(sketch: Sketch, x: float, y: float, *, up: bool) -> None:
    """Draw a filled triangle pointing up, or an open one pointing down."""
    tip = 1.1 if up else -1.1
    corners = [(x - 1.2, y - tip), (x + 1.2, y - tip), (x, y + tip)]
    sketch.area(corners, fill=ACCENT if up else PAPER, edge=ACCENT)


def _notes(matrix: Matrix) -> Sequence[str]:
    if not matrix.keys:
        return ()
    said = ["W is each named wind case in turn, E either sense."]
    if "Dmin" in matrix.heads or "L1" in matrix.heads:
        said.append("Dmin is the least dead load, L1 live load with f₁ = 1.")
    if matrix.largest or matrix.smallest:
        said.append(
            "Filled triangle: the largest value of so many effects; open triangle: the smallest. "
            "Combinations that govern are in bold."
        )
    return said
