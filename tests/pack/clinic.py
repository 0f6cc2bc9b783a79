"""Statements of an invented clinic, built by hand in the statement's schema."""

from __future__ import annotations

import math
from typing import Any

from calcbook.pack import Cover
from calcbook.standing import is_unconfirmed

Plain = dict[str, Any]
SVG = (
    b'<svg xmlns="http://www.w3.org/2000/svg" width="320" height="150" viewBox="0 0 320 150">'
    b'<path d="M60 130 V30 H240 V130 M20 130 H300" fill="none" stroke="black"/>'
    b'<path d="M20 50 H54 M20 80 H54 M20 110 H54" stroke="black" stroke-width="2"/>'
    b'<text x="120" y="22" font-size="12">15.6 m</text></svg>'
)


def cover(**changes: str) -> Cover:
    """Return the cover of the sample job."""
    given = {
        "job": "Marrowick Community Clinic", "number": "MC-0417", "place": "Osmere Bay",
        "revision": "B", "issue_date": "2026-11-20", "prepared": "RA", "checked": "",
    }  # fmt: skip
    return Cover(**(given | changes))


def drawn(_statement: Plain, _item: Plain) -> bytes:
    """Return a small elevation, whatever is asked for."""
    return SVG


def value(text: str, unit: str = "", si: float | None = None) -> Plain:
    """Return a value of a statement; without an SI number it counts as its text."""
    if not text:
        return {"si": None, "value": None, "unit": unit, "text": ""}
    return {
        "si": float(text) if si is None else si,
        "value": float(text),
        "unit": unit,
        "text": text,
    }


def item(kind: str, number: str, name: str = "", meaning: str = "", **more: object) -> Plain:
    """Return an item with the fields every item has."""
    common = {
        "kind": kind, "number": number, "name": name or None, "meaning": meaning, "clause": "",
        "note": "", "problem": None, "memory": False, "applies": True, "why": "", "used_by": [],
    }  # fmt: skip
    return common | more


def entry(number: str, name: str, meaning: str, text: str, unit: str = "", **more: object) -> Plain:
    """Return an entry confirmed by RA unless said otherwise."""
    given = {
        "value": value(text, unit), "shown": None, "range": "", "source": "",
        "confirmed": "RA 2026-10-02", "fallback": False,
    }  # fmt: skip
    return item("entry", number, name, meaning, **(given | more))


def line(number: str, name: str, meaning: str, formula: str, **more: object) -> Plain:
    """Return a line; ``values`` maps names to (text, unit)."""
    values = {n: {"text": t, "unit": u} for n, (t, u) in more.pop("values", {}).items()}  # type: ignore[attr-defined]
    given = {
        "formula": formula, "cases": [], "takes": {}, "gives": "", "values": values,
        "value": value(""), "result": False, "sign": "",
    }  # fmt: skip
    return item("line", number, name, meaning, **(given | more))


def column(name: str, meaning: str, unit: str, role: str, texts: list[str], **more: Any) -> Plain:
    """Return a column of a schedule."""
    given = {
        "name": name, "number": "", "meaning": meaning, "unit": unit, "role": role, "formula": "",
        "cases": [], "clause": "", "note": "", "memory": False, "applies": True, "texts": texts,
        "si": [None] * len(texts), "total": None, "result": False, "problem": None, "used_by": [],
        "typed": [f"{text} {unit}".strip() for text in texts] if role == "entered" else texts,
    }  # fmt: skip
    return given | more


def schedule(number: str, name: str, meaning: str, rows: list[str], **more: Any) -> Plain:
    """Return a schedule with every row confirmed unless said otherwise."""
    given = {
        "key": "Level", "rows": rows, "confirmed": ["RA 2026-10-02"] * len(rows),
        "sources": [""] * len(rows), "fixed": False, "fallback": False, "stale": False,
        "from": None, "columns": [], "errors": [], "governing": None, "envelope": [],
    }  # fmt: skip
    return item("schedule", number, name, meaning, **(given | more))


def section(number: str, title: str, *items: Plain, **more: object) -> Plain:
    """Return a section that applies unless said otherwise."""
    common = {"kind": "section", "number": number, "title": title, "applies": True, "why": ""}
    return common | {"items": list(items)} | more


def statement(workbook: str, title: str, *parts: Plain, **more: object) -> Plain:
    """Return a statement whose counts and results follow from its items."""
    items = [i for p in parts if p["kind"] == "section" and p["applies"]
             for i in p["items"] if i["applies"]]  # fmt: skip
    asked = [i for i in items if i["kind"] in ("entry", "text", "choice") or i.get("fallback")]
    rows = [c for i in items if i["kind"] == "schedule" for c in i["confirmed"]]
    checks = [i for i in items if i["kind"] == "check"]
    counts = {
        "entries": len(asked) + len(rows),
        "unconfirmed": sum(map(is_unconfirmed, items)) + sum(not c for c in rows),
        "checks": len(checks),
        "not_satisfied": sum(i["satisfied"] is False for i in checks),
        "problems": sum(bool(i["problem"]) or i["kind"] == "error" for i in items),
        "stale": sum(bool(i.get("stale")) for i in items),
        "memory": sum(bool(i["memory"]) for i in items),
    }
    results = [
        {k: i[k] for k in ("name", "meaning", "value", "sign", "number")}
        for i in items if i["kind"] == "line" and i["result"]
    ]  # fmt: skip
    given = {
        "schema": 1, "engine": "0.1.0", "workbook": workbook, "mark": None, "title": title,
        "code_set": {
            "name": "NSCP 2015",
            "title": "National Structural Code of the Philippines 2015, Volume 1, 7th edition",
        },
        "units": "SI", "signs": [], "fingerprint": "9f" * 32, "counts": counts,
        "parts": list(parts), "results": results,
        "software": {"calcbook": "0.1.0", "python": "3.11.7", "numpy": "2.4.6", "typst": "0.15.2"},
    }  # fmt: skip
    return given | more


LEVELS = ["Roof", "Level 4", "Level 3", "Level 2", "Ground"]
HEIGHTS = ["15.6", "11.7", "7.8", "4.25", "0"]


def levels(number: str, count: int) -> Plain:
    """Return a schedule of nine columns with as many rows as asked."""
    rows = [f"Level {n}" for n in range(count, 0, -1)]
    heights = [round(3.9 * n, 1) for n in range(count, 0, -1)]
    areas = [420.5 + n for n in range(count)]
    return schedule(
        number, "levels", "Levels of the building", rows,
        columns=[
            column("z", "height above ground", "m", "entered", [f"{z:g}" for z in heights]),
            column("A", "plan area", "m2", "entered", [f"{a:.2f}" for a in areas],
                   total=value(f"{sum(areas):.2f}", "m2")),
            column("use", "use", "", "text", ["wards and treatment rooms"] * count),
            column("D_floor", "dead load", "kPa", "entered", ["4.85"] * count),
            column("L_o", "live load", "kPa", "entered", ["1.9"] * count),
            column("W_D", "dead weight", "kN", "computed", [f"{4.85 * a:.1f}" for a in areas],
                   formula="D_floor*A", total=value(f"{4.85 * sum(areas):.1f}", "kN")),
            column("W_L", "live load on the level", "kN", "computed",
                   [f"{1.9 * a:.1f}" for a in areas], formula="L_o*A"),
            column("N_D", "dead weight from above", "kN", "computed",
                   [f"{4.85 * sum(areas[: n + 1]):.1f}" for n in range(count)],
                   formula="running(W_D)"),
            column("q_z", "velocity pressure", "kPa", "computed",
                   [f"{0.6 * math.sqrt(z):.3f}" for z in heights],
                   formula="'0.6 kPa'*sqrt(z/'1 m')"),
        ],
    )  # fmt: skip


def design_basis(**more: object) -> Plain:
    """Return the design basis of the clinic."""
    return statement(
        "design-basis", "Design basis",
        {"kind": "prose", "markdown": "# Design basis\n\n## Scope\n\nA clinic of **four storeys** "
         "and a flat roof, with `plan` 24 m by 36 m.\n\n- walls of masonry\n- floors of concrete, "
         "see $K_zt$\n\n### Ground\n\nStiff clay."},
        section("1", "Job and site",
            item("text", "1.1", "job", "Name of the job", text="Marrowick Community Clinic",
                 source="contract", confirmed="RA 2026-10-02"),
            item("choice", "1.2", "exposure", "Exposure of the site", option="C",
                 options=["B", "C"], labels={"B": "suburban terrain", "C": "open terrain"},
                 source="site visit 2026-09-14", confirmed="RA 2026-10-02"),
            entry("1.3", "h", "Mean roof height", "15.6", "m", used_by=["1.6"],
                  source="drawing A-201"),
            entry("1.4", "V", "Basic wind speed, from the site wind map", "250", "km/h",
                  shown=value("69.44", "m/s"), clause="Figure 207A.5-1B"),
            entry("1.5", "q_soil", "Allowable bearing pressure", "150", "kPa", confirmed="",
                  source="template value"),
            item("remark", "1.7", tone="assumption", text="The ground floor slab bears on the "
                 "ground and loads no column."),
            item("error", "1.8", meaning="", text="unknown name 'hh' in the formula; did you mean "
                 "'h'?", source="x = hh*2"),
        ),
        section("2", "Levels", schedule("2.1", "storeys", "Levels of the clinic", LEVELS,
            confirmed=["RA 2026-10-02"] * 4 + [""], used_by=[],
            columns=[
                column("z", "elevation", "m", "entered", HEIGHTS),
                column("h_s", "storey height", "m", "computed",
                       ["3.900", "3.900", "3.550", "4.250", ""],
                       formula="z - following(z, '0 m')",
                       problem=[None] * 4 + ["nothing below the ground"]),
                column("use", "use", "", "text", ["roof", "offices", "wards", "wards", "entrance"]),
                column("A", "plan area", "m2", "entered", ["864"] * 4 + ["864.0"],
                       total=value("4320.0", "m2")),
            ]), levels("2.2", 60)),
        signs=[{"quantity": "elevation", "positive": "upward from the ground floor"}], **more,
    )  # fmt: skip


def wind_pressure(**more: object) -> Plain:
    """Return the wind pressure workbook of the clinic, with every kind of item."""
    kz = ["1.099", "1.035", "0.950", "0.850", "0.850"]
    p = ["1.908", "1.796", "1.649", "1.476", "1.476"]
    return statement(
        "wind-pressure", "Wind pressure on the main frame", _entries(), _pressures(),
        section("4", "Roof zones", applies=False, why="roof is flat"),
        section("5", "Windward wall by level", schedule("5.1", "wall", "Windward wall", LEVELS,
            confirmed=[], fixed=True,
            **{"from": {"workbook": "design-basis", "name": "storeys"}},
            columns=[
                column("z", "height above ground", "m", "carried", HEIGHTS),
                column("K_z", "exposure coefficient", "", "computed", kz,
                       formula="2.01*(max(z, z_min)/z_g)**(2/alpha)", clause="Table 207B.3-1"),
                column("p_w", "pressure", "kPa", "computed", p, formula="q_h*K_z/K_h*G*C_p",
                       clause="Eq. 207B.4-1", result=True),
            ],
            envelope=[{"row": "Roof", "which": "largest", "column": "p_w", "meaning": "External",
                       "value": {"si": 1908.0, "value": 1.908, "unit": "kPa", "text": "1.908"}}],
            governing={"row": "Roof", "why": "largest p_w", "column": "p_w", "lines": [
                line("5.2", "p_w", "Pressure at this level", "q_h*K_z/K_h*G*C_p",
                     values={"q_h": ("2.806", "kPa"), "K_z": ("1.099", ""), "K_h": ("1.099", ""),
                             "G": ("0.85", ""), "C_p": ("0.80", "")},
                     value=value("1.908", "kPa"), clause="Eq. 207B.4-1")]})),
        _checks(),
        purpose="Directional procedure. Pressure *toward* a surface is positive.",
        signs=[{"quantity": "pressure", "positive": "toward the surface"}], **more,
    )  # fmt: skip


def _entries() -> Plain:
    return section("2", "Entries",
        item("carried", "2.1", "V", "Basic wind speed", value=value("69.44", "m/s"), taken=None,
             stale=False, fallback=False, confirmed="", used_by=["3.2"],
             **{"from": {"workbook": "design-basis", "name": "V", "number": "1.4"}}),
        item("carried", "2.2", "h", "Mean roof height", value=value("15.6", "m"), stale=True,
             taken=value("15.2", "m"), fallback=False, confirmed="", used_by=["3.1"],
             **{"from": {"workbook": "design-basis", "mark": None, "name": "h"}}),
        item("carried", "2.3", "I_w", "Importance factor", value=value("1.15"), stale=False,
             taken=None, fallback=True, confirmed="",
             **{"from": {"workbook": "occupancy", "name": "I_w"}}),
        entry("2.4", "B", "Width facing the wind", "24", "m", confirmed="", source="template value",
              used_by=["3.5"]),
        item("choice", "2.5", "roof", "Roof", option="flat", options=["flat", "gable"], labels={},
             source="drawing A-401", confirmed="RA 2026-10-02"),
        entry("2.6", "theta", "Pitch of the roof", "12", "deg", applies=False, why="roof is flat"),
        entry("2.7", "h_r", "Height of the ridge", "2", "m", applies=False, why="roof is flat"),
        item("table", "2.8", "C_f", "Force coefficient of a wall", clause="maker's data",
             axes=[{"name": "B", "unit": "m", "points": [10.0, 20.0, 40.0],
                   "texts": ["10", "20", "40"]},
                   {"name": "h", "unit": "m", "points": [5.0, 12.5], "texts": ["5", "12.5"]}],
             values=[[1.2, 1.25], [1.3, 1.4], [1.375, 1.5]],
             texts=[["1.2", "1.25"], ["1.3", "1.4"], ["1.375", "1.5"]], unit="", outside="hold",
             source="sheet 14", memory=True),
    )  # fmt: skip


def _pressures() -> Plain:
    loads = {f"p_{n}": (f"{n}.25", "kPa") for n in range(1, 15)}
    return section("3", "Velocity pressure",
        line("3.1", "K_h", "Exposure coefficient at roof height", "2.01*(h/z_g)**(2/alpha)",
             values={"h": ("15.6", "m"), "z_g": ("274.3", "m"), "alpha": ("9.5", "")},
             value=value("1.099"), clause="Table 207B.3-1", memory=True, used_by=["3.2"]),
        line("3.2", "q_h", "Velocity pressure", "0.613*K_h*K_zt*K_d*V**2",
             takes={"V": "m/s"}, gives="N/m2",
             values={"K_h": ("1.099", ""), "K_zt": ("1.00", ""), "K_d": ("0.85", ""),
                     "V": ("69.44", "m/s")},
             value=value("2.761", "kPa"), clause="Eq. 207B.3-1", used_by=["5.1", "6.1", "3.5"],
             result=True, sign="toward the surface"),
        line("3.3", "p_sum", "All pressures together, a long sum",
             " + ".join(f"1.25*{n}" for n in loads), values=loads, value=value("143.28", "kPa")),
        line("3.4", "r_long", "A quotient that is wider than the measure",
             "(" + " + ".join(loads) + ")/(" + " + ".join(reversed(loads)) + ")",
             values=loads, value=value("1.000"), why="roof is flat"),
        line("3.5", "F_w", "Force on the wall", "q_h*B*h/n_rows", problem="not available because "
             "n_rows is missing", values={}, value=value("", "kN"), result=True),
    )  # fmt: skip


def _checks() -> Plain:
    kpa = "kPa"
    return section("6", "Checks and remarks",
        item("check", "6.1", meaning="Cladding as supplied carries the pressure",
             text="p_w <= p_max", clause="maker's data", demand=value("1.908", kpa),
             limit=value("2.400", kpa), relation="<=", ratio=0.795, ratio_text="0.80",
             satisfied=True),
        item("check", "6.2", meaning="Drift of the frame", text="delta <= h/400",
             demand=value("41.2", "mm"), limit=value("39.0", "mm"), relation="<=", ratio=1.056,
             ratio_text="1.06", satisfied=False),
        item("check", "6.3", meaning="Force within the anchors", text="F_w <= F_max",
             demand=value(""), limit=value("120.0", "kN"), relation="<=", ratio=None, ratio_text="",
             satisfied=None, problem="not available because of 3.5"),
        item("remark", "6.4", tone="not covered", text="Components and cladding."),
        item("remark", "6.5", tone="caution", text="Openings on one side change the internal "
             "pressure."),
        item("remark", "6.6", tone="reason", text="The wind from the sea governs."),
        item("figure", "6.7", figure="wind-elevation", uses={}, caption="Pressure on the elevation",
             alt="Elevation of the clinic with arrows toward the windward wall"),
    )  # fmt: skip
