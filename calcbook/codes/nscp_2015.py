"""National Structural Code of the Philippines 2015, Volume 1.

Its wind sections 207A and 207B follow chapters 26 and 27 of ASCE 7-10, number by number, in
metric units with heights rounded.
"""

from __future__ import annotations

from calcbook.codes import gravity_nscp_2015 as gravity
from calcbook.codes import wind_directional
from calcbook.codes.clause import CodeSet

_NUMBERS = {
    "wind speed": "207A.5.1",
    "directionality": "Table 207A.6-1",
    "exposure category": "207A.7.3",
    "topographic condition": "207A.8.1",
    "topographic factor": "Eq. 207A.8-1",
    "topographic figure": "Fig. 207A.8-1",
    "rigid building": "207A.2",
    "gust": "207A.9.1",
    "terrain constants": "Table 207A.9-1",
    "enclosure": "207A.10",
    "internal pressure": "Table 207A.11-1",
    "exposure coefficient": "Table 207B.3-1",
    "velocity pressure": "Eq. 207B.3-1",
    "pressure": "Eq. 207B.4-1",
    "pressure coefficients": "Fig. 207B.4-1",
    "load cases": "207B.4.6",
    "least pressure": "207B.4.7",
}

_DIFFERENT = {
    "velocity pressure exposure coefficient": {
        "formula": "2.01*(max(z, '4.5 m')/z_g)**(2/alpha)",
        "note": "For heights up to z_g. The height of 4.5 m is from memory.",
        "from_memory": True,
    },
}

_CLAUSES = {
    **wind_directional.clauses("NSCP 2015", _NUMBERS, _DIFFERENT),
    **gravity.CLAUSES,
}
_TABLES, _TABLES_US = wind_directional.tables(_CLAUSES)

CODE_SET = CodeSet(
    name="NSCP 2015",
    title="National Structural Code of the Philippines 2015, Volume 1, 7th edition",
    note=(
        "The code is metric; forms in US customary units are those of ASCE 7-10, which its wind "
        "sections follow. Clause numbers follow that parent and are to be compared with the book."
    ),
    clauses=_CLAUSES,
    tables=_TABLES,
    tables_us=_TABLES_US,
    combination_lists=gravity.COMBINATIONS,
    use_list=gravity.USES,
    material_list=gravity.MATERIALS,
)
