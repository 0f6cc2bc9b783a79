"""ASCE/SEI 7-16, Minimum Design Loads and Associated Criteria for Buildings and Other Structures.

Against the edition before, air density at the site's elevation enters the velocity pressure.
"""

from __future__ import annotations

from calcbook.codes import gravity_asce_7_16 as gravity
from calcbook.codes import wind_directional
from calcbook.codes.clause import Clause, CodeSet

_NUMBERS = {
    "wind speed": "26.5.1",
    "directionality": "Table 26.6-1",
    "exposure category": "26.7.3",
    "topographic condition": "26.8.1",
    "topographic factor": "Eq. 26.8-1",
    "topographic figure": "Fig. 26.8-1",
    "exposure coefficient": "Table 26.10-1",
    "velocity pressure": "Eq. 26.10-1",
    "rigid building": "26.2",
    "gust": "26.11.1",
    "terrain constants": "Table 26.11-1",
    "enclosure": "26.12",
    "internal pressure": "Table 26.13-1",
    "least pressure": "27.1.5",
    "pressure": "Eq. 27.3-1",
    "pressure coefficients": "Fig. 27.3-1",
    "load cases": "27.3.5",
}

_DIFFERENT = {
    "velocity pressure": {
        "formula": "0.613*K_z*K_zt*K_d*K_e*V**2",
        "formula_us": "0.00256*K_z*K_zt*K_d*K_e*V**2",
        "note": "The place of K_e in it is from memory.",
        "from_memory": True,
    },
}

_ELEVATION = Clause(
    subject="ground elevation factor",
    edition="ASCE 7-16",
    number="Table 26.9-1",
    meaning="Ground elevation factor",
    name="K_e",
    kind="number",
    formula="exp(-0.000119*z_e)",
    formula_us="exp(-0.0000362*z_e)",
    takes={"z_e": "m"},
    takes_us={"z_e": "ft"},
    note="z_e is the ground above sea level, z_g in the book; 1.0 may be taken at any elevation.",
    from_memory=True,
)

_CLAUSES = {
    **wind_directional.clauses("ASCE 7-16", _NUMBERS, _DIFFERENT),
    _ELEVATION.subject: _ELEVATION,
    **gravity.CLAUSES,
}
_TABLES, _TABLES_US = wind_directional.tables(_CLAUSES)

CODE_SET = CodeSet(
    name="ASCE 7-16",
    title=(
        "ASCE/SEI 7-16, Minimum Design Loads and Associated Criteria for Buildings and Other "
        "Structures"
    ),
    note="Clause numbers are to be compared with the book.",
    clauses=_CLAUSES,
    tables=_TABLES,
    tables_us=_TABLES_US,
    combination_lists=gravity.COMBINATIONS,
    use_list=gravity.USES,
    material_list=gravity.MATERIALS,
)
