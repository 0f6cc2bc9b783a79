"""Trusses as they are filled in: tables of joints, members and supports, and loads at joints."""

from __future__ import annotations

from typing import TYPE_CHECKING

from sheets import rows_of

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.record import RowRecord

BOOK = "roof-truss"
Rows = dict[str, list["RowRecord"]]
Cells = dict[str, str]
Place = tuple[float, float]

#: A truss by tables, without wind but of one case of nothing, one member looked at.
TABLES = {"given_by": "tables", "wind_by": "plain", "k_c": "0"}
STILL = {"key": "W1", "named": "none", "C_l": "0", "C_r": "0", "C_wl": "0", "C_wr": "0"}


def point(at: str, down: float = 0.0, right: float = 0.0, case: str = "live") -> Cells:
    """Return a load at a joint, in kN."""
    return {
        "key": f"{at} {case}", "at_j": at, "case_p": case, "n_c": "0", "F_r": f"{right} kN",
        "F_d": f"{down} kN",
    }  # fmt: skip


def bar(ends: str, sort: str = "bar", face: str = "none") -> Cells:
    """Return a member called by its two joints of one letter each."""
    return {"key": ends, "from_j": ends[0], "to_j": ends[1], "sort": sort, "face": face}


def truss(
    joints: Mapping[str, Place],
    bars: Sequence[str | Cells],
    held: Sequence[tuple[str, str, str]],
    *points: Cells,
    area: str = "1000 mm2",
    modulus: str = "200 GPa",
) -> Rows:
    """Return the tables of a truss of one section, with loads at joints and nothing on it."""
    places = [{"key": k, "x_j": f"{x!r} m", "y_j": f"{y!r} m"} for k, (x, y) in joints.items()]
    section = {"key": "bar", "built_of": "structural steel", "A_s": area, "E_s": modulus}
    return {
        **rows_of("joints", *places),
        **rows_of("members", *(bar(b) if isinstance(b, str) else b for b in bars)),
        **rows_of("supports", *({"key": k, "held": kind, "turn": t} for k, kind, t in held)),
        **rows_of("sections", section),
        **rows_of("points", *points),
        **rows_of("covers"),
        **rows_of("winds", STILL),
    }


ENDS = {
    "T1": ("AB", "BD", "DF", "FH", "AC", "CE", "EG", "GH", "BC", "BE", "DE", "EF", "FG"),
    "T2": (
        "AB", "BC", "CD", "DE", "EF", "FG", "AH", "HJ", "JK", "KL", "LM", "MG", "BH", "CJ", "DK",
        "EL", "FM", "BJ", "CK", "KE", "LF",
    ),
    "T4": ("AB", "BC", "AD", "DC", "BD"),
}  # fmt: skip


def gable(b: float, h: float, outer: float, quarter: float, ridge: float) -> Rows:
    """Return the 13-member gable truss T1 under loads at its upper joints, kN."""
    joints = {
        "A": (0.0, 0.0), "C": (b, 0.0), "E": (2 * b, 0.0), "G": (3 * b, 0.0), "H": (4 * b, 0.0),
        "B": (b, h), "D": (2 * b, 2 * h), "F": (3 * b, h),
    }  # fmt: skip
    loads = dict(zip("ABDFH", (outer, quarter, ridge, quarter, outer), strict=True))
    return truss(joints, ENDS["T1"], [("A", "pinned", "0 deg"), ("H", "roller", "0 deg")],
                 *(point(at, load) for at, load in loads.items()))  # fmt: skip


def howe() -> Rows:
    """Return the Howe roof truss T2: six panels of 3 m, 4.5 m high, loads at B, J and E."""
    joints = dict(zip("AHJKLMG", ((3.0 * n, 0.0) for n in range(7)), strict=True))
    joints |= dict(zip("BCDEF", ((3.0, 1.5), (6.0, 3.0), (9.0, 4.5), (12.0, 3.0), (15.0, 1.5)),
                       strict=True))  # fmt: skip
    return truss(joints, ENDS["T2"], [("A", "pinned", "0 deg"), ("G", "roller", "0 deg")],
                 point("B", 200.0), point("J", 300.0), point("E", 150.0))  # fmt: skip


def king_post(*more: Cells, **section: str) -> Rows:
    """Return the king post truss T4 with 10 kN at its top."""
    joints = {"A": (0.0, 0.0), "B": (4.0, 0.0), "C": (8.0, 0.0), "D": (4.0, 3.0)}
    held = [("A", "pinned", "0 deg"), ("C", "roller", "0 deg")]
    return truss(joints, ENDS["T4"], held, point("D", 10.0), *more, **section)
