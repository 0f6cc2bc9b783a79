"""Stacks as they are filled in: levels of a column with typed areas, nothing else in its way."""

from __future__ import annotations

from typing import TYPE_CHECKING

from sheets import rows_of

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from sheets import Sheet

    from calcbook.record import RowRecord

BOOK = "column-accumulation"
Rows = dict[str, list["RowRecord"]]
Cells = dict[str, str]

TYPED = {"area_from": "typed", "section": "area", "length_by": "floor to floor"}


def level(key: str, area: str, dead: str, use: str, **cells: str) -> Cells:
    """Return a level carried by the frame, 3 m above the next, weightless column below it."""
    plain = {
        "h_s": "3 m", "carried_by": "frame", "here": "yes", "L_a": "0 kPa", "A_ct": "0 mm2",
        "D_min": dead,
    }  # fmt: skip
    return {"key": key, "A_t": area, "D": dead, "use": use, **plain, **cells}


def stack(*levels: Cells, lateral: Sequence[Mapping[str, str]] = ()) -> Rows:
    """Return the rows of a stack, highest level first; ``lateral`` goes with the levels in order.

    The levels stand 3 m apart; one beam of no length satisfies the schedule of line loads.
    """
    count = len(levels)
    cells = [{"elevation": f"{3 * (count - n)} m", **one} for n, one in enumerate(levels)]
    nothing = {"W_c": "0 kN", "W_t": "0 kN", "E_c": "0 kN", "E_t": "0 kN"}
    frame = [
        {"key": one["key"], **nothing, **(lateral[n] if n < len(lateral) else {})}
        for n, one in enumerate(levels)
    ]
    line = {"what": "typed", "line_of": "", "line_level": levels[0]["key"], "l_k": "0 m"}
    return {
        **rows_of("levels", *cells),
        **rows_of("frame", *frame),
        **rows_of("lines", {"key": "none", **line, "w_t": "0 kN/m"}),
    }


def base(sheet: Sheet, *names: str) -> list[float]:
    """Return values at the base in kN, areas in m2."""
    return [sheet.value(name) / (1e3 if name.startswith(("N_", "W_")) else 1.0) for name in names]


def kilonewtons(sheet: Sheet, schedule: str, name: str) -> list[float]:
    """Return a column of forces in kN."""
    return [force / 1e3 for force in sheet.column(schedule, name)]


def combination(sheet: Sheet, key: str, schedule: str = "strength", column: str = "U") -> float:
    """Return the force of a combination in kN."""
    return sheet.by_key(schedule, column)[key] / 1e3
