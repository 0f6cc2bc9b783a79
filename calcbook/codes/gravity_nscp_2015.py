"""Gravity loads and load combinations of NSCP 2015."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.codes import live_loads, roof_live_load
from calcbook.codes.clause import Clause
from calcbook.codes.combinations import expanded
from calcbook.codes.live_loads import COLUMNS, MEMBERS, members
from calcbook.codes.materials import read_materials
from calcbook.codes.uses import read_uses

if TYPE_CHECKING:
    from collections.abc import Mapping

EDITION = "NSCP 2015"

_NUMBERS = {
    "live load": "Table 205-1",
    "live load factor": "203.3.1",
    "live load reduction": "205.6",
    "live load element factor": "205.6",
    "reducible floor": "205.6",
    "heavy floor": "205.5",
    "garage floor": "205.5",
    "heavy live load": "205.5",
    "garage live load": "205.5",
}

_DIFFERENT: Mapping[str, Mapping[str, Any]] = {
    "live load factor": {"from_memory": True},
    "reducible floor": {"from_memory": True},
    "heavy floor": {"from_memory": True},
    "garage floor": {
        "cases": (
            ("use == 'garage private'", "1.0"),
            ("use != 'garage private'", "0.0"),
        ),
        "cases_us": (),
        "note": "Private garages alone may be reduced; other garages are not.",
        "from_memory": True,
    },
    "heavy live load limit": {"from_memory": True},
    "column live load element factor": {
        "cases": members(dict.fromkeys(COLUMNS, "4")),
        "meaning": "Influence area over tributary area, column",
        "note": "4 for every column; the words are those of a later code of the same family.",
        "from_memory": True,
    },
    "beam live load element factor": {
        "cases": members(dict(zip(MEMBERS, ("2", "2", "1"), strict=True))),
        "meaning": "Influence area over tributary area",
        "note": "A two-way slab has the area of its panel, a precast T span times flange width.",
        "from_memory": True,
    },
    "floor live load reduction": {
        "cases": (
            ("A_I >= '40 m2'", "max(where(n_f >= 2, 0.4, 0.5), 0.25 + '4.57 m'/sqrt(A_I))"),
            ("A_I < '40 m2'", "1.0"),
        ),
        "cases_us": (
            ("A_I >= '40 m2'", "max(where(n_f >= 2, 0.4, 0.5), 0.25 + '15 ft'/sqrt(A_I))"),
            ("A_I < '40 m2'", "1.0"),
        ),
        "note": (
            "A_I is the influence area summed over the reducible floors carried, n_f their number. "
            "Not less than 0.5 for one floor, 0.4 for others."
        ),
        "from_memory": True,
    },
    "heavy live load reduction": {
        "formula": "",
        "cases": (
            ("use == 'storage light' or use == 'storage heavy'", "where(K_LL >= 4, 0.8, 1.0)"),
            ("use != 'storage light' and use != 'storage heavy'", "1.0"),
        ),
        "note": "Columns alone (K_LL 4) may have storage reduced by 20 %, and no other use.",
        "from_memory": True,
    },
    "garage live load reduction": {
        "cases": (
            ("parking == 'not reduced'", "1.0"),
            (
                "parking == 'as the code permits'",
                "where(A_I >= '40 m2', max(0.6, 0.25 + '4.57 m'/sqrt(A_I)), 1.0)",
            ),
        ),
        "cases_us": (
            ("parking == 'not reduced'", "1.0"),
            (
                "parking == 'as the code permits'",
                "where(A_I >= '40 m2', max(0.6, 0.25 + '15 ft'/sqrt(A_I)), 1.0)",
            ),
        ),
        "note": (
            "Not reduced in common practice. By the code at most 40 % in private garages; A_I is "
            "the influence area of the garage floors carried."
        ),
        "from_memory": True,
    },
}

_OWN = (
    Clause(
        subject="strength combinations",
        edition=EDITION,
        number="203.3.1",
        meaning="Load combinations for strength design",
        note="H with 1.6 also beside the resisting dead load. Ponding is not among them.",
        from_memory=True,
    ),
    Clause(
        subject="service combinations",
        edition=EDITION,
        number="203.4.1",
        meaning="Load combinations for allowable stress design",
        note="Those from 6 on are further lines, whose number in 203.4 is to be confirmed.",
        from_memory=True,
    ),
    Clause(
        subject="dead loads",
        edition=EDITION,
        number="Tables 204-1 and 204-2",
        meaning="Unit weights of materials and least dead loads",
    ),
    Clause(
        subject="partition dead load",
        edition=EDITION,
        number="204.3",
        meaning="Allowance for partitions, as dead load",
        name="p_D",
        kind="pressure",
        formula="'1.0 kPa'",
        note="Partitions count as dead load in this code: not reduced, and not in L.",
        from_memory=True,
    ),
    Clause(
        subject="partition live load",
        edition=EDITION,
        number="204.3",
        meaning="Allowance for partitions, as live load",
        name="p_L",
        kind="pressure",
        formula="'0 kPa'",
        note="Partitions count as dead load in this code.",
        from_memory=True,
    ),
    Clause(
        subject="influence area",
        edition=EDITION,
        number="205.6",
        meaning="Influence area",
        name="A_I",
        kind="area",
        formula="K_LL*A_T",
        note="4 times the tributary area for a column, 2 times for a beam.",
        from_memory=True,
    ),
    Clause(
        subject="printed floor live load reduction",
        edition=EDITION,
        number="205.5",
        meaning="Reduction factor of floor live load by the rate per area",
        name="R_f",
        kind="number",
        formula=(
            "1 - min(max(0, 0.08*(A_T - 15)), 23.1*(1 + D_o/L_o), where(n_f >= 2, 60, 40))/100"
        ),
        takes={"A_T": "m2", "D_o": "kPa", "L_o": "kPa"},
        note=(
            "As printed, the metric rule keeps the rate of 0.08 % that its parent has per square "
            "foot, and so gives about a tenth of the reduction: 2 % at 40 m2, 6.8 % at 100 m2."
        ),
        from_memory=True,
    ),
)

USES = read_uses(EDITION, f"{EDITION} {_NUMBERS['live load']}")
MATERIALS = read_materials(
    EDITION, {"unit weight": "Table 204-1", "pressure": "Table 204-2"}, follows="ASCE 7-16"
)
CLAUSES = {
    **{clause.subject: clause for clause in (*_OWN, *roof_live_load.NSCP_2015)},
    **live_loads.clauses(EDITION, _NUMBERS, _DIFFERENT, USES),
}


def _roof(factor: str) -> tuple[str, ...]:
    return tuple(f"{factor} {case}" for case in ("Lr", "R"))


_STRENGTH = (
    ("1", "D", ("1.4 D", "1.4 F")),
    ("2", "L", ("1.2 D", "1.2 F", "1.2 T", "1.6 L", "1.6 H", _roof("0.5"))),
    ("3", "Lr|R", ("1.2 D", _roof("1.6"), ("f_1 L", "0.5 W"))),
    ("4", "W", ("1.2 D", "1.0 W", "f_1 L", _roof("0.5"))),
    ("5", "E", ("1.2 D", "1.0 E", "f_1 L")),
    ("6", "W", ("0.9 D_min", "1.0 W", "1.6 H")),
    ("7", "E", ("0.9 D_min", "1.0 E", "1.6 H")),
)
_SIDEWAYS = ("0.6 W", "1/1.4 E")
_SERVICE = (
    ("1", "D", ("1 D", "1 F")),
    ("2", "L", ("1 D", "1 H", "1 F", "1 L", "1 T")),
    ("3", "Lr|R", ("1 D", "1 H", "1 F", _roof("1"))),
    ("4", "L", ("1 D", "1 H", "1 F", "0.75 L", "0.75 T", _roof("0.75"))),
    ("5", "W|E", ("1 D", "1 H", "1 F", _SIDEWAYS)),
    ("6", "W|E", ("1 D", "1 H", "1 F", "0.75 L", "0.75 Lr", ("0.75*0.6 W", "0.75/1.4 E"))),
    ("7", "W|E", ("0.6 D_min", _SIDEWAYS, "1 H")),
)
COMBINATIONS = {
    what: tuple(
        combination
        for number, principal, parts in listed
        for combination in expanded(number, clause, principal, parts, from_memory=True)
    )
    for what, listed, clause in (
        ("strength", _STRENGTH, f"{EDITION} 203.3.1"),
        ("service", _SERVICE, f"{EDITION} 203.4.1"),
    )
}
