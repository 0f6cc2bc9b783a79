"""Statements made by hand for the figures' tests: small, plain, and easy to spoil."""

from __future__ import annotations

import math
from itertools import pairwise
from typing import Any

FEET = 0.3048
PSF = 47.88025898


def _magnitude(text: str, factor: float) -> float | None:
    try:
        return float(text) * factor
    except ValueError:
        return None


def value(text: str, unit: str, si: float | None) -> dict[str, Any]:
    """Return a VALUE as the statement prints it."""
    return {"si": si, "value": si, "unit": unit, "text": text, "exact": si}


def line(name: str, text: str, unit: str, si: float | None, **more: Any) -> dict[str, Any]:
    """Return a line item that applies and has no problem, unless told otherwise."""
    plain = {"kind": "line", "name": name, "applies": True, "why": "", "problem": None}
    return {**plain, "value": value(text, unit, si), **more}


def column(name: str, unit: str, texts: list[str], factor: float = 1.0) -> dict[str, Any]:
    """Return a schedule column; an empty or worded text has no magnitude."""
    magnitudes = [_magnitude(text, factor) for text in texts]
    return {"name": name, "unit": unit, "texts": texts, "si": magnitudes, "problem": None}


def schedule(name: str, keys: list[str], *columns: dict[str, Any]) -> dict[str, Any]:
    """Return a schedule item."""
    return {
        "kind": "schedule",
        "name": name,
        "rows": keys,
        "columns": list(columns),
        "applies": True,
        "why": "",
        "problem": None,
    }


def statement(*items: dict[str, Any]) -> dict[str, Any]:
    """Return a statement of prose and one section with the items."""
    section = {
        "kind": "section",
        "number": "1",
        "title": "All",
        "applies": True,
        "why": "",
        "items": list(items),
    }
    return {"schema": 1, "parts": [{"kind": "prose", "markdown": "Some words."}, section]}


def figure(name: str, **uses: Any) -> dict[str, Any]:
    """Return a figure item."""
    return {"kind": "figure", "figure": name, "uses": uses, "alt": "", "caption": ""}


def levels(keys: list[str], texts: list[str], unit: str = "m") -> dict[str, Any]:
    """Return a design basis with a schedule of levels; the use and area repeat."""
    uses = ["plant" if key == "Roof" else "wards" for key in keys]
    return statement(
        schedule(
            "levels",
            keys,
            column("elevation", unit, texts, FEET if unit == "ft" else 1.0),
            {"name": "use", "unit": "", "texts": uses, "si": None, "problem": None},
            column("area", "m2", ["864"] * len(keys)),
        )
    )


CLINIC = levels(
    ["Ground", "Level 2", "Level 3", "Level 4", "Roof"], ["0.00", "4.60", "8.10", "11.60", "15.60"]
)
LADDER = figure("level-ladder", levels="levels", elevation="elevation", use="use", area="area")


def grid(xs: list[str], ys: list[str], unit: str = "m") -> dict[str, Any]:
    """Return a design basis with both grids: numbers across, letters up."""
    factor = FEET if unit == "ft" else 1.0
    numbers = [str(place + 1) for place in range(len(xs))]
    letters = [chr(ord("A") + place % 26) for place in range(len(ys))]
    return statement(
        schedule("grid_x", numbers, column("x", unit, xs, factor)),
        schedule("grid_y", letters, column("y", unit, ys, factor)),
    )


PLAN = figure("grid-plan", grid_x="grid_x", x="x", grid_y="grid_y", y="y")
CLINIC_GRID = grid(
    ["0.00", "6.00", "12.00", "18.50", "24.50", "36.00"], ["0.0", "7.5", "10.2", "18.0"]
)


def wind(
    keys: tuple[str, ...] = ("Level 2", "Level 3", "Level 4", "Roof"),
    z: tuple[str, ...] = ("4.6", "8.1", "11.6", "15.6"),
    q: tuple[str, ...] = ("2.170", "2.425", "2.641", "2.806"),
    p: tuple[str, ...] = ("1.476", "1.649", "1.796", "1.908"),
) -> list[dict[str, Any]]:
    """Return the items of a wind workbook: levels, walls, inside, sizes, flat roof in strips."""
    return [
        schedule(
            "levels",
            list(keys),
            column("z", "m", list(z)),
            column("q", "kPa", list(q), 1e3),
            column("p", "kPa", list(p), 1e3),
        ),
        line("h", "15.6", "m", 15.6),
        line("h_e", "15.6", "m", 15.6),
        line("L", "24.5", "m", 24.5),
        line("theta", "0", "deg", 0.0),
        line("p_l", "-1.190", "kPa", -1190.0),
        line("p_s", "-1.670", "kPa", -1670.0),
        line("p_i", "0.505", "kPa", 505.0),
        line("p_i2", "-0.505", "kPa", -505.0),
        line("p_rw", "-0.846", "kPa", -846.0),
        line("p_rw2", "0.431", "kPa", 431.0),
        line("p_rl", "-1.343", "kPa", -1343.0),
        schedule(
            "roof",
            ["0 to h/2", "h/2 to h", "h to 2h", "over 2h"],
            column("w", "m", ["7.8", "7.8", "8.9", "0.0"]),
            column("p1", "kPa", ["-2.147", "-2.147", "-1.193", "-0.716"], 1e3),
            column("p2", "kPa", ["-0.429", "-0.429", "-0.429", "-0.429"], 1e3),
        ),
    ]


def gable() -> list[dict[str, Any]]:
    """Return the same building with a roof of 22 degrees."""
    return changed(wind(), "theta", value=value("22", "deg", math.radians(22.0)))


def changed(items: list[dict[str, Any]], name: str, **more: Any) -> list[dict[str, Any]]:
    """Return the items with one of them changed."""
    return [{**one, **more} if one["name"] == name else one for one in items]


def flipped(items: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Return the items with the sign of every pressure turned about."""
    return [_flipped(one) for one in items]


WALLS = {
    "levels": "levels",
    "z": "z",
    "p_windward": "p",
    "p_leeward": "p_l",
    "p_side": "p_s",
    "p_internal": "p_i",
    "p_internal_2": "p_i2",
    "depth": "L",
    "h_eave": "h_e",
}
FLAT = figure(
    "wind-elevation",
    **WALLS,
    roof_zones="roof",
    zone_width="w",
    zone_p=["p1", "p2"],
    theta="theta",
)
GABLE = figure(
    "wind-elevation",
    **WALLS,
    theta="theta",
    roof_windward="p_rw",
    roof_windward_2="p_rw2",
    roof_leeward="p_rl",
)
HEIGHT = figure("pressure-height", levels="levels", z="z", q="q", p="p", h="h")


def word_column(name: str, texts: list[str]) -> dict[str, Any]:
    """Return a column of words."""
    return {"name": name, "unit": "", "texts": texts, "si": [None] * len(texts), "problem": None}


FLOOR_AND_WALL = [
    ("F1", "tile on mortar", "23", "0.77", "superimposed", "no"),
    ("F1", "slab", "200", "4.72", "self", "yes"),
    ("F1", "ducts", "0", "0.19", "superimposed", "no"),
    ("F1", "partitions", "0", "1.00", "partitions", "no"),
    ("E1", "plaster", "16", "0.29", "superimposed", "no"),
    ("E1", "block", "150", "3.83", "self", "yes"),
]


def build_ups(
    layers: list[tuple[str, str, str, str, str, str]] | None = None,
    kinds: tuple[tuple[str, str, str, str], ...] = (
        ("F1", "floor", "level", "6.68"),
        ("E1", "outside wall", "upright", "4.12"),
    ),
    share: float = 1.0,
) -> dict[str, Any]:
    """Return a take-off: build-ups (key, words, surface, load) and their layers."""
    rows = FLOOR_AND_WALL if layers is None else layers
    of, what, thick, heavy, part, certain = (list(found) for found in zip(*rows, strict=True))
    keys, titles, surfaces, loads = (list(found) for found in zip(*kinds, strict=True))
    return statement(
        schedule(
            "types", keys, word_column("title", titles), word_column("surface", surfaces)
        ),
        schedule(
            "layers", [f"{home}.{n}" for n, home in enumerate(of, 1)],
            word_column("of", of), word_column("what", what), column("t", "mm", thick, 1e-3),
            column("g", "kPa", heavy, 1e3), word_column("part", part),
            word_column("certain", certain),
        ),
        schedule(
            "loads", keys, column("D", "kPa", loads, 1e3), column("D_min", "kPa", loads, 1e3)
        ),
        line("f", f"{share:g}", "", share),
    )  # fmt: skip


SECTION = figure(
    "build-up-section", build_ups="types", title="title", surface="surface", load="D",
    least="D_min", layers="layers", layer_of="of", layer="what", thickness="t", weight="g",
    part="part", certain="certain", partitions="f",
)  # fmt: skip


def column_stack(
    keys: list[str] | None = None, step: float = 3.5, scale: float = 1.0
) -> dict[str, Any]:
    """Return a column with levels from the roof down: what each adds, and the running totals."""
    keys = keys or ["Roof", "Level 3", "Level 2", "Ground"]
    count = len(keys)
    heights = [f"{step * (count - 1 - n):.2f}" for n in range(count)]
    dead = [f"{scale * (100 if n < count - 1 else 0):.1f}" for n in range(count)]
    live = [f"{scale * (40 if 0 < n < count - 1 else 0):.1f}" for n in range(count)]
    totals = [
        [f"{sum(float(v) for v in values[: n + 1]):.1f}" for n in range(count)]
        for values in (dead, live)
    ]
    return statement(
        schedule("levels", keys, column("z", "m", heights)),
        schedule("adds", keys, column("G", "kN", dead, 1e3), column("Q", "kN", live, 1e3)),
        schedule(
            "below", keys, column("P_D", "kN", totals[0], 1e3), column("P_L", "kN", totals[1], 1e3)
        ),
    )


STACK = figure(
    "column-ladder", levels="levels", elevation="z", added=["G", "Q"], total=["P_D", "P_L"]
)


def key_plan(
    marks: list[tuple[str, str, str, str, str]] | None = None,
    xs: tuple[float, ...] = (0, 6, 12, 18),
    ys: tuple[float, ...] = (0, 5, 10),
) -> dict[str, Any]:
    """Return a grid with what each line takes, and marks: key, lines, alike at, area."""
    rows = marks or [
        ("C-1", "1", "A", "4-A, 1-C, 4-C", "12.00"),
        ("C-2", "2", "A", "3-A, 2-C 3-C", "18.00"),
        ("C-3", "1", "B", "B-4", "20.00"),
        ("C-4", "2", "B", "3-B", "30.00"),
    ]
    names, at_x, at_y, alike, areas = (list(found) for found in zip(*rows, strict=True))
    return statement(
        _strips("grid_x", [str(n + 1) for n in range(len(xs))], "x", xs, 1.0),
        _strips("grid_y", [chr(65 + n % 26) for n in range(len(ys))], "y", ys, 0.5),
        schedule(
            "marks", names, word_column("at_x", at_x), word_column("at_y", at_y),
            word_column("alike", alike), column("A", "m2", areas),
        ),
    )  # fmt: skip


def _strips(
    name: str, keys: list[str], way: str, places: tuple[float, ...], over: float
) -> dict[str, Any]:
    ends = (places[0] - 2 * over, *places, places[-1] + 2 * over)
    middles = [(one + other) / 2 for one, other in pairwise(ends)]
    low, high = middles[:-1], middles[1:]
    texts = [[f"{v:g}" for v in values] for values in (places, low, high)]
    columns = (way, f"{way}_a", f"{way}_b")
    return schedule(name, keys, *map(column, columns, ["m"] * 3, texts))


KEY_PLAN = figure(
    "key-plan", grid_x="grid_x", x="x", x_from="x_a", x_to="x_b", grid_y="grid_y", y="y",
    y_from="y_a", y_to="y_b", marks="marks", at_x="at_x", at_y="at_y", alike="alike", area="A",
)  # fmt: skip


def _turned(text: str) -> str:
    return text[1:] if text.startswith("-") else f"-{text}"


def _flipped(one: dict[str, Any]) -> dict[str, Any]:
    if one["kind"] == "schedule":
        columns = [
            {
                **each,
                "texts": [_turned(text) for text in each["texts"]],
                "si": [-si for si in each["si"]],
            }
            if each["unit"] == "kPa"
            else each
            for each in one["columns"]
        ]
        return {**one, "columns": columns}
    old = one["value"]
    if old["unit"] != "kPa":
        return one
    return {**one, "value": value(_turned(old["text"]), "kPa", -old["si"])}


MATRIX = figure(
    "factor-matrix", combinations="listed", factors=["a_D", "a_Dmin", "a_L1", "a_W"],
    largest=["c_P"], smallest=["d_P"],
)  # fmt: skip


def factor_matrix(
    keys: tuple[str, ...] = ("1", "4a", "6"), largest: tuple[str, ...] = ("4a", "1", "4a")
) -> dict[str, Any]:
    """Return combinations with their factors, and three effects with those that govern them."""
    texts = {
        "a_D": ("1.400", "1.200", "0.0000"),
        "a_Dmin": ("0.0000", "0.0000", "0.9000"),
        "a_L1": ("0.0000", "1.000", "0.0000"),
        "a_W": ("0.0000", "0.7143", "1.000"),
    }
    columns = [
        column(name, "", [found[n % 3] for n in range(len(keys))]) for name, found in texts.items()
    ]
    governs = schedule(
        "governing", ["C-1", "C-2", "B1"],
        column("c_P", "", list(largest)), column("d_P", "", ["6", "6", ""]),
    )  # fmt: skip
    return statement(schedule("listed", list(keys), *columns), governs)
