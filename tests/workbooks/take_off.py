"""Rows of the take-off as they are filled in, and a take-off worked by hand beside it."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING, Any

from sheets import rows_of

from calcbook.run import all_items
from calcbook.units import read_quantity

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook.record import RowRecord

BOOK = "dead-load-take-off"
Rows = dict[str, list["RowRecord"]]
Cells = dict[str, str]

PLAIN_LAYER = {
    "what": "layer", "made_of": "", "t_l": "0 mm", "g_a": "0 kPa", "part": "superimposed",
    "certain": "no", "lies": "slope",
}  # fmt: skip


def layer(key: str, of: str, **cells: str) -> Cells:
    """Return a layer; superimposed, uncertain and without weight unless said otherwise."""
    return {"key": key, "layer_of": of, **PLAIN_LAYER, **cells}


def slab(key: str, of: str, thickness: str, material: str = "concrete") -> Cells:
    """Return a layer that carries, certain to be there."""
    return layer(key, of, made_of=material, t_l=thickness, part="self", certain="yes")


def kind(key: str, surface: str = "level") -> Cells:
    """Return a build-up."""
    return {"key": key, "construction": f"build-up {key}", "surface": surface}


def floor(key: str, elevation: str, of: str, **cells: str) -> Cells:
    """Return a level of 100 m2 carried by the frame unless said otherwise."""
    given = {"h_s": "3 m", "use": "office", "area": "100 m2", "carried_by": "frame", "g_E": "0 kPa"}
    return {"key": key, "elevation": elevation, "floor_type": of, **given, **cells}


def wall(key: str, level: str, of: str, length: str, height: str, **cells: str) -> Cells:
    """Return one wall without openings unless said otherwise."""
    plain = {"n_w": "1", "A_o": "0 m2"}
    sizes = {"l_w": length, "h_w": height}
    return {"key": key, "wall_level": level, "wall_type": of, **plain, **sizes, **cells}


def member(key: str, level: str, count: str, length: str, **cells: str) -> Cells:
    """Return members that are part of their level unless said otherwise."""
    plain = {"stands": "no", "built_of": "concrete", "A_m": "0 mm2", "w_g": "0 kN/m"}
    return {"key": key, "member_level": level, "n_m": count, "l_m": length, **plain, **cells}


def material(key: str, gamma: str) -> Cells:
    """Return a material."""
    return {"key": key, "gamma": gamma, "from_where": "for the test"}


BUILDING: dict[str, list[Cells]] = {
    "materials": [material("concrete", "24 kN/m3"), material("steel", "77 kN/m3")],
    "build_up_types": [kind("F"), kind("R", "pitched"), kind("E", "upright")],
    "layers": [
        layer("F1", "F", g_a="1.2 kPa"),
        slab("F2", "F", "200 mm"),
        layer("F3", "F", g_a="0.9 kPa", part="partitions", certain="yes"),
        layer("R1", "R", g_a="0.4 kPa", part="self", certain="yes"),
        layer("R2", "R", g_a="0.25 kPa", lies="level"),
        slab("E1", "E", "150 mm"),
        layer("E2", "E", g_a="0.5 kPa"),
    ],
    "floors": [
        floor("Roof", "9 m", "R"),
        floor("Upper", "6 m", "F", g_E="0.6 kPa"),
        floor("Lower", "3 m", "F"),
        floor("Ground", "0 m", "F", carried_by="ground"),
    ],
    "walls": [
        wall("W4", "Roof", "E", "10 m", "1 m"),
        wall("W3", "Upper", "E", "40 m", "2.5 m", A_o="20 m2"),
        wall("W2", "Lower", "E", "20 m", "2.5 m", A_o="10 m2", n_w="2"),
        wall("W1", "Ground", "E", "40 m", "3 m"),
    ],
    "members": [
        member("B3", "Upper", "4", "5 m", A_m="120000 mm2"),
        member("T4", "Roof", "3", "10 m", w_g="0.5 kN/m", built_of=""),
        member("S4", "Roof", "2", "10 m", A_m="1000 mm2", built_of="steel"),
        member("C3", "Upper", "6", "2.5 m", A_m="90000 mm2", stands="yes"),
        member("C1", "Ground", "6", "3 m", A_m="90000 mm2", stands="yes"),
    ],
}
PITCHED = {"roof": "gable", "ridge": "X", "theta": "60 deg", "L_x": "20 m", "L_y": "10 m",
           "r_r": "8.660254037844386 m"}  # fmt: skip


def building(**changed: Sequence[Mapping[str, str]]) -> Rows:
    """Return the rows of the test's building with some of its schedules changed."""
    out: Rows = {}
    for name, cells in {**BUILDING, **changed}.items():
        out |= rows_of(name, *cells)
    return out


def with_row(schedule: str, key: str, **cells: str) -> Rows:
    """Return the building with some cells of one row changed."""
    changed = [{**row, **cells} if row["key"] == key else row for row in BUILDING[schedule]]
    return building(**{schedule: changed})


# --- by hand ---------------------------------------------------------------------------------


def by_hand(statement: Mapping[str, Any], slope: float, share: float) -> dict[str, Any]:
    """Return a take-off from what was entered, in plain sums level by level, SI.

    Parameters
    ----------
    slope
        Area of a pitched surface for one of plan.
    share
        Of movable partitions that is dead load.
    """
    tables = {i["name"]: _records(i) for i in all_items(statement) if i["kind"] == "schedule"}
    gamma = {key: row["gamma"] for key, row in tables["materials"].items()}
    load: dict[str, float] = defaultdict(float)
    least: dict[str, float] = defaultdict(float)
    for row in tables["layers"].values():
        weight = row["g_a"] or row["t_l"] * gamma[row["made_of"]]
        pitched = tables["build_up_types"][row["layer_of"]]["surface"] == "pitched"
        weight *= slope if pitched and row["lies"] == "slope" else 1.0
        partition = row["part"] == "partitions"
        load[row["layer_of"]] += weight * (share if partition else 1.0)
        least[row["layer_of"]] += weight if row["certain"] == "yes" and not partition else 0.0
    names = list(tables["floors"])
    weights = {k: r["area"] * load[r["floor_type"]] for k, r in tables["floors"].items()}
    certain = sum(r["area"] * least[r["floor_type"]] for r in tables["floors"].values())
    for row in tables["walls"].values():
        face = row["n_w"] * (row["l_w"] * row["h_w"] - row["A_o"])
        _half_up(weights, names, row["wall_level"], face * load[row["wall_type"]])
        certain += face * least[row["wall_type"]]
    for row in tables["members"].values():
        per_length = row["w_g"] or row["A_m"] * gamma[row["built_of"]]
        weight = row["n_m"] * row["l_m"] * per_length
        certain += weight
        if row["stands"] == "yes":
            _half_up(weights, names, row["member_level"], weight)
        else:
            weights[row["member_level"]] += weight
    return {"load": load, "least": least, "weights": weights, "certain": certain}


def _half_up(weights: dict[str, float], names: list[str], level: str, weight: float) -> None:
    above = names.index(level) - 1
    weights[level] += weight if above < 0 else weight / 2
    if above >= 0:
        weights[names[above]] += weight / 2


def _records(schedule: Mapping[str, Any]) -> dict[str, dict[str, Any]]:
    rows: dict[str, dict[str, Any]] = {key: {} for key in schedule["rows"]}
    for column in schedule["columns"]:
        words = "labels" in column
        cells = column["texts"] if words else column["si"]
        for key, cell in zip(schedule["rows"], cells, strict=True):
            rows[key][column["name"]] = cell
    return rows


def si(text: str) -> float:
    """Return a quantity in SI."""
    return read_quantity(text).si
