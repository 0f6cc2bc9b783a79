"""Gravity loads and load combinations of ASCE 7-16."""

from __future__ import annotations

from calcbook.codes import live_loads, roof_live_load
from calcbook.codes.clause import Clause
from calcbook.codes.combinations import expanded
from calcbook.codes.materials import read_materials
from calcbook.codes.uses import read_uses

EDITION = "ASCE 7-16"

_NUMBERS = {
    "live load": "Table 4.3-1",
    "live load factor": "2.3.1",
    "live load reduction": "Eq. 4.7-1",
    "live load element factor": "Table 4.7-1",
    "reducible floor": "4.7.2",
    "heavy floor": "4.7.3",
    "garage floor": "4.7.4",
    "heavy live load": "4.7.3",
    "garage live load": "4.7.4",
}

_DIFFERENT = {
    "reducible floor": {
        "note": "That public assembly is not reduced, whatever its load, is from memory.",
        "from_memory": True,
    },
}

_OWN = (
    Clause(
        subject="strength combinations",
        edition=EDITION,
        number="2.3.1 and 2.3.6",
        meaning="Load combinations for strength design",
        note=(
            "H is listed where it adds to the principal load; where it resists, its factor is 0.9 "
            "if it is permanent and 0 otherwise. T is combined by 2.3.4, case by case. E holds its "
            "horizontal and its vertical part."
        ),
    ),
    Clause(
        subject="service combinations",
        edition=EDITION,
        number="2.4.1 and 2.4.5",
        meaning="Load combinations for allowable stress design",
        note=(
            "H is listed where it adds to the principal load; where it resists, its factor is 0.6 "
            "if it is permanent and 0 otherwise. T is combined by 2.4.4, case by case."
        ),
        from_memory=True,
    ),
    Clause(
        subject="dead loads",
        edition=EDITION,
        number="Tables C3.1-1 and C3.1-2",
        meaning="Least dead loads and unit weights of materials",
    ),
    Clause(
        subject="partition dead load",
        edition=EDITION,
        number="4.3.2",
        meaning="Allowance for partitions, as dead load",
        name="p_D",
        kind="pressure",
        formula="'0 kPa'",
        formula_us="'0 psf'",
        note="Partitions that may be moved count as live load in this code.",
    ),
    Clause(
        subject="partition live load",
        edition=EDITION,
        number="4.3.2",
        meaning="Allowance for partitions, as live load",
        name="p_L",
        kind="pressure",
        cases=(("L_o < '3.83 kPa'", "'0.72 kPa'"), ("L_o >= '3.83 kPa'", "'0 kPa'")),
        cases_us=(("L_o < '80 psf'", "'15 psf'"), ("L_o >= '80 psf'", "'0 psf'")),
        note=(
            "Where partitions may be moved, in offices and the like. None is asked for from a live "
            "load of 3.83 kPa (80 psf), a limit from memory."
        ),
        from_memory=True,
    ),
)

USES = read_uses(EDITION, f"{EDITION} {_NUMBERS['live load']}")
MATERIALS = read_materials(EDITION, {"unit weight": "Table C3.1-2", "pressure": "Table C3.1-1"})
CLAUSES = {
    **{clause.subject: clause for clause in (*_OWN, *roof_live_load.ASCE_7_16)},
    **live_loads.clauses(EDITION, _NUMBERS, _DIFFERENT, USES, live_loads.HEAVY_US),
}


def _roof(factor: str) -> tuple[str, ...]:
    return tuple(f"{factor} {case}" for case in ("Lr", "S", "R"))


_STRENGTH = (
    ("1", "2.3.1", "D", ("1.4 D", "1.4 F")),
    ("2", "2.3.1", "L", ("1.2 D", "1.2 F", "1.6 L", "1.6 H", _roof("0.5"))),
    ("3", "2.3.1", "Lr|S|R", ("1.2 D", "1.2 F", _roof("1.6"), "1.6 H", ("f_1 L", "0.5 W"))),
    ("4", "2.3.1", "W", ("1.2 D", "1.2 F", "1.0 W", "f_1 L", "1.6 H", _roof("0.5"))),
    ("5", "2.3.1", "W", ("0.9 D_min", "1.0 W", "1.6 H")),
    ("6", "2.3.6", "E", ("1.2 D", "1.2 F", "1.0 E", "f_1 L", "1.6 H", "0.2 S")),
    ("7", "2.3.6", "E", ("0.9 D_min", "0.9 F", "1.0 E", "1.6 H")),
)
_SERVICE = (
    ("1", "2.4.1", "D", ("1 D", "1 F")),
    ("2", "2.4.1", "L", ("1 D", "1 F", "1 H", "1 L")),
    ("3", "2.4.1", "Lr|S|R", ("1 D", "1 F", "1 H", _roof("1"))),
    ("4", "2.4.1", "L", ("1 D", "1 F", "1 H", "0.75 L", _roof("0.75"))),
    ("5", "2.4.1", "W", ("1 D", "1 F", "1 H", "0.6 W")),
    ("6", "2.4.1", "W", ("1 D", "1 F", "1 H", "0.75 L", "0.75*0.6 W", _roof("0.75"))),
    ("7", "2.4.1", "W", ("0.6 D_min", "0.6 W", "1 H")),
    ("8", "2.4.5", "E", ("1 D", "1 F", "1 H", "0.7 E")),
    ("9", "2.4.5", "E", ("1 D", "1 F", "1 H", "0.75*0.7 E", "0.75 L", "0.75 S")),
    ("10", "2.4.5", "E", ("0.6 D_min", "0.6 F", "0.7 E", "1 H")),
)
COMBINATIONS = {
    what: tuple(
        combination
        for number, clause, principal, parts in listed
        for combination in expanded(
            number, f"{EDITION} {clause}", principal, parts, from_memory=from_memory
        )
    )
    for what, listed, from_memory in (("strength", _STRENGTH, False), ("service", _SERVICE, True))
}
