"""Beams as they are filled in: supports, one weightless stretch, and loads, nothing else."""

from __future__ import annotations

from typing import TYPE_CHECKING

from sheets import rows_of

if TYPE_CHECKING:
    from collections.abc import Sequence

    from sheets import Sheet

    from calcbook.record import RowRecord

BOOK = "floor-beam"
Rows = dict[str, list["RowRecord"]]
Cells = dict[str, str]


def support(key: str, x: str, held: str = "pinned", **springs: str) -> Cells:
    """Return a support or a free end."""
    return {"key": key, "x": x, "held": held, "k_v": "0 kN/m", "k_r": "0 kN*m/rad", **springs}


def stretch(key: str, x_1: str, x_2: str, inertia: str = "1e11 mm4", area: str = "0 mm2") -> Cells:
    """Return a stretch of one section, typed; weightless unless an area is given."""
    plain = {"form": "typed", "b_w": "0 mm", "h_w": "0 mm", "t_s": "0 mm"}
    return {"key": key, "x_s1": x_1, "x_s2": x_2, **plain, "A_s": area, "I_s": inertia}


def line(
    key: str, x_1: str, x_2: str, w: str, *, w_end: str = "", case: str = "dead, certain"
) -> Cells:
    """Return a line load of one case, typed."""
    plain = {"what": "typed", "line_of": "", "case_q": case}
    return {"key": key, **plain, "x_3": x_1, "x_4": x_2, "w_3": w, "w_4": w_end or w}


def point(key: str, x: str, load: str, case: str = "dead, certain") -> Cells:
    """Return a point load of one case."""
    return {"key": key, "case_p": case, "x_p": x, "P_p": load}


def panel(key: str, x_1: str, x_2: str, across: str, spread: str = "two-way", **more: str) -> Cells:
    """Return a strip or panel at Level 2 with 5.5 kPa of live load and a use typed."""
    plain = {"bay": "A", "on": "Level 2", "use": "as typed", "L_a": "5.5 kPa"}
    return {"key": key, **plain, "spread": spread, "x_1": x_1, "x_2": x_2, "b_s": across, **more}


def beam(
    supports: Sequence[Cells], *, stretches: Sequence[Cells] = (), **tables: Sequence[Cells]
) -> Rows:
    """Return the rows of a beam without floors; further tables by name."""
    ends = supports[0]["x"], supports[-1]["x"]
    found = {
        **rows_of("supports", *supports),
        **rows_of("stretches", *(stretches or (stretch("1", *ends),))),
        **rows_of("strips"),
    }
    for name, cells in tables.items():
        found |= rows_of(name, *cells)
    return found


def kilonewtons(sheet: Sheet, name: str, schedule: str = "reactions") -> list[float]:
    """Return a column of forces in kN, or of moments in kN m."""
    return [value / 1e3 for value in sheet.column(schedule, name)]


def of_case(sheet: Sheet, case: str, name: str) -> float:
    """Return a moment or shear of a load case in kN m or kN."""
    return sheet.by_key("case_forces", name)[case] / 1e3
