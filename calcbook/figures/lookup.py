"""Values looked up by name in a statement; what cannot be shown says why."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from calcbook.units import pretty_unit

Record = Mapping[str, Any]
MINUS = "\N{MINUS SIGN}"


@dataclass(frozen=True)
class Shown:
    """A value as the statement prints it, with its magnitude in coherent SI for drawing.

    What is printed as zero is drawn as zero.
    """

    text: str
    unit: str
    si: float

    @property
    def label(self) -> str:
        """The number exactly as printed, with its unit."""
        unit = pretty_unit(self.unit)
        return f"{self.text}{'' if unit in {'', '°', '%'} else ' '}{unit}"


@dataclass(frozen=True)
class Missing:
    """A value that is not there to be drawn, and why, in words."""

    name: str
    why: str


Value = Shown | Missing


def item(statement: Record, name: str) -> Record | None:
    """Return the item of that name, wherever it stands in the statement, or None."""
    found = _placed(statement, name)
    return None if found is None else found[1]


def column(statement: Record, schedule: str, name: str) -> Record | None:
    """Return a column of a schedule, or None when the schedule or the column is not there."""
    table = item(statement, schedule)
    if table is None or table.get("kind") != "schedule":
        return None
    return next((one for one in table["columns"] if one["name"] == name), None)


def rows(statement: Record, schedule: str) -> tuple[str, ...] | Missing:
    """Return the keys of a schedule's rows, in order, or why there are none to draw."""
    found = _placed(statement, schedule)
    if found is None or found[1].get("kind") != "schedule":
        return Missing(schedule, "there is no schedule of this name")
    why = _not_usable(*found)
    if why:
        return Missing(schedule, why)
    keys = tuple(str(key) for key in found[1]["rows"])
    return keys or Missing(schedule, "the schedule has no rows")


def heading(statement: Record, schedule: str) -> str:
    """Return the heading of a schedule's key column, or nothing."""
    table = item(statement, schedule)
    return "" if table is None else str(table.get("key") or "")


def cells(statement: Record, schedule: str, name: str) -> tuple[Value, ...]:
    """Return a column's values row by row; a column that is not there is missing in every row.

    A column may also stand in another schedule that has the same rows.
    """
    keys = rows(statement, schedule)
    if isinstance(keys, Missing):
        return ()
    found = column(statement, schedule, name) or _beside(statement, keys, name)
    if found is None:
        return tuple(Missing(name, f"'{schedule}' has no column of this name") for _ in keys)
    if not found.get("applies", True):
        return tuple(Missing(name, "it does not apply") for _ in keys)
    problems = found.get("problem") or [None] * len(keys)
    magnitudes = found.get("si") or [None] * len(keys)
    return tuple(
        _shown(name, {"text": text, "unit": found.get("unit", ""), "si": si}, problem or "")
        for text, si, problem in zip(found["texts"], magnitudes, problems, strict=True)
    )


def words(statement: Record, schedule: str, name: str) -> tuple[str, ...]:
    """Return a column's texts row by row as printed, units left out; empty when not there."""
    found = column(statement, schedule, name)
    return () if found is None else tuple(str(text) for text in found["texts"])


def quantity(statement: Record, name: str) -> Value:
    """Return a named value in the workbook's unit, or why it cannot be shown."""
    found = _placed(statement, name)
    if found is None:
        return Missing(name, "there is no value of this name")
    why = _not_usable(*found)
    value = found[1].get("shown") or found[1].get("value")
    if why or not isinstance(value, Mapping):
        return Missing(name, why or "it is not a quantity")
    return _shown(name, value, "")


def option(statement: Record, name: str) -> str | Missing:
    """Return the option a choice stands at, or why there is none."""
    found = _placed(statement, name)
    if found is None:
        return Missing(name, "there is no choice of this name")
    why = _not_usable(*found)
    chosen = found[1].get("option")
    return str(chosen) if chosen and not why else Missing(name, why or "nothing is chosen")


def numbered(uses: Mapping[str, Any], role: str) -> list[str]:
    """Return the names under a role and its numbered fellows (``p``, ``p_2``, ...), in order.

    A role may also be given a list of names at once.
    """
    fellows = [
        (int(found.group(1) or 1), [named] if isinstance(named, str) else list(named))
        for key, named in uses.items()
        if (found := re.fullmatch(rf"{re.escape(role)}(?:_(\d+))?", key))
    ]
    return [str(name) for _, named in sorted(fellows) for name in named]


def _items(statement: Record) -> Iterator[tuple[Record, Record]]:
    for part in statement.get("parts", ()):
        if part.get("kind") == "section":
            yield from ((part, one) for one in part.get("items", ()))


def _placed(statement: Record, name: str) -> tuple[Record, Record] | None:
    for section, one in _items(statement):
        if one.get("name") == name and one.get("kind") not in {"figure", "error"}:
            return section, one
    return None


def _beside(statement: Record, keys: tuple[str, ...], name: str) -> Record | None:
    """Return the column of that name in another schedule of the same rows that can be used."""
    for section, one in _items(statement):
        if one.get("kind") == "schedule" and tuple(map(str, one["rows"])) == keys:
            found: Record | None = next((c for c in one["columns"] if c["name"] == name), None)
            if found is not None and not _not_usable(section, one):
                return found
    return None


def _not_usable(section: Record, found: Record) -> str:
    for place in (section, found):
        if not place.get("applies", True):
            why = place.get("why") or ""
            return f"it does not apply ({why})" if why else "it does not apply"
    return str(found.get("problem") or "")


def _shown(name: str, value: Record, problem: str) -> Value:
    si = value.get("si")
    if problem or si is None or not math.isfinite(si):
        return Missing(name, problem or "it has no value")
    text = str(value["text"])
    drawn = 0.0 if _ZERO.fullmatch(text) else float(si)
    return Shown(text.replace("-", MINUS), str(value.get("unit") or ""), drawn)


_ZERO = re.compile(r"[-+]?0*\.?0*(e[-+]?\d+)?")
