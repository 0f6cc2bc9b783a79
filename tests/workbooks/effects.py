"""Effects as they are filled in, and combinations worked from the words they are printed in."""

from __future__ import annotations

import itertools
import re
from typing import TYPE_CHECKING

from sheets import rows_of

from calcbook import codes

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from calcbook.record import RowRecord

BOOK = "load-combinations"
WINDS = ("W1", "W2", "W3", "W4")
CASES = ("D", "Dmin", "L", "L1", "Lr", "S", "E", *WINDS)
OTHERS = ("R", "H", "F", "T")
_TERM = re.compile(
    r"(?P<outer>[\d.]+)?\(?(?P<factor>[\d.]+|f_1 )?"
    r"(?P<case>D_min|Lr|[DLSRHFTWE])\)?(?:/(?P<by>[\d.]+))?"
)


def effect(
    key: str,
    code: str = "NSCP 2015",
    unit: str = "kN",
    symbol: str = "P",
    **cases: float | str,
) -> dict[str, str]:
    """Return a row of effects, ``cases`` by load case in the unit; what is not named is 0."""
    names = [c for c in CASES if c != "S" or code != "NSCP 2015"]
    names += [c for c in OTHERS if c in cases]
    given = {"Dmin": cases.get("D", 0), **cases}
    row = {"key": key, f"what_{symbol}": "", **({"lifts": "uplift"} if symbol == "P" else {})}
    for name in names:
        value = given.get(name, 0)
        row[f"{symbol}_{name}"] = value if isinstance(value, str) else f"{value!r} {unit}"
    return row


def forces(*rows: Mapping[str, str]) -> dict[str, list[RowRecord]]:
    """Return rows of the schedule of forces; the row worked in full is the first."""
    return rows_of("forces", *rows)


def terms(text: str, f_1: float) -> dict[str, float]:
    """Return the factors in a combination as the trade writes it: '0.75(0.6W)', 'E/1.4'."""
    found = {}
    for part in text.split(" + "):
        match = _TERM.fullmatch(part)
        assert match, part
        one = f_1 if match["factor"] == "f_1 " else float(match["factor"] or 1)
        found[match["case"]] = float(match["outer"] or 1) * one / float(match["by"] or 1)
    return found


def totals(
    code: str, kind: str, loads: Mapping[str, float], *, relieving: bool = True
) -> Iterator[tuple[str, float]]:
    """Yield every combination's name and total, with any variable load absent where it may be."""
    for c in codes.get(code).combinations(kind):
        small, large = terms(c.text, 0.5), terms(c.text, 1.0)
        winds = WINDS if "W" in small else ("",)
        senses = (1.0, -1.0) if "E" in small else (0.0,)
        variable = [n for n in ("L", "L1", "Lr", "S", "R") if n.rstrip("1") in small]
        absent = [(1.0, 0.0) if relieving else (1.0,)] * len(variable)
        for wind, sense, kept in itertools.product(winds, senses, itertools.product(*absent)):
            total = small.get("W", 0.0) * loads.get(wind, 0.0)
            total += small.get("E", 0.0) * sense * loads.get("E", 0.0)
            for name, there in zip(variable, kept, strict=True):
                factor = large["L"] if name == "L1" else small[name]
                total += factor * there * loads.get(name, 0.0)
            for name in ("D", "D_min", "H", "F", "T"):
                total += small.get(name, 0.0) * loads.get(name.replace("_", ""), 0.0)
            yield c.name, total
