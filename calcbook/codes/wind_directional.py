"""The directional procedure for the main wind force resisting system, as its editions share it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.codes.clause import issued, template
from calcbook.codes.tables import read_tables
from calcbook.codes.topography import HILL

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.codes.clause import Clause
    from calcbook.table import Table

    Tables = tuple[dict[str, Table], dict[str, Table]]


def clauses(
    edition: str, numbers: Mapping[str, str], different: Mapping[str, Mapping[str, Any]]
) -> dict[str, Clause]:
    """Return the clauses of an edition by subject; see `issued`."""
    shared = (*_SITE, *HILL, *_VELOCITY_PRESSURE, *_WALLS, *_ROOFS, *_PRESSURES)
    return issued(shared, edition, numbers, different)


def tables(stated: Mapping[str, Clause]) -> Tables:
    """Return the tables of an edition, in SI and where different in US units, by subject."""
    sources = {subject: clause.reference for subject, clause in stated.items()}
    return read_tables("wind_directional.toml", sources)


_SITE = (
    template("basic wind speed", "wind speed", "Basic wind speed"),
    template("exposure category", "exposure category", "Exposure of the site"),
    template("enclosure classification", "enclosure", "Enclosure of the building"),
    template(
        "directionality factor",
        "directionality",
        "Wind directionality factor of a building",
        name="K_d",
        kind="number",
        formula="0.85",
    ),
    template(
        "terrain exponent",
        "terrain constants",
        "Exponent of the profile of wind speed",
        name="alpha",
        kind="number",
        cases=(
            ("exposure == 'B'", "7.0"),
            ("exposure == 'C'", "9.5"),
            ("exposure == 'D'", "11.5"),
        ),
        note="C and D from memory.",
        from_memory=True,
    ),
    template(
        "gradient height",
        "terrain constants",
        "Height above which the wind speed grows no further",
        name="z_g",
        kind="length",
        cases=(
            ("exposure == 'B'", "'365.76 m'"),
            ("exposure == 'C'", "'274.32 m'"),
            ("exposure == 'D'", "'213.36 m'"),
        ),
        cases_us=(
            ("exposure == 'B'", "'1200 ft'"),
            ("exposure == 'C'", "'900 ft'"),
            ("exposure == 'D'", "'700 ft'"),
        ),
        note="C and D from memory.",
        from_memory=True,
    ),
)

_VELOCITY_PRESSURE = (
    template(
        "velocity pressure exposure coefficient",
        "exposure coefficient",
        "Velocity pressure exposure coefficient",
        name="K_z",
        kind="number",
        formula="2.01*(max(z, '4.6 m')/z_g)**(2/alpha)",
        formula_us="2.01*(max(z, '15 ft')/z_g)**(2/alpha)",
        note="For heights up to z_g.",
    ),
    template(
        "velocity pressure",
        "velocity pressure",
        "Velocity pressure",
        name="q_z",
        kind="pressure",
        formula="0.613*K_z*K_zt*K_d*V**2",
        formula_us="0.00256*K_z*K_zt*K_d*V**2",
        takes={"V": "m/s"},
        takes_us={"V": "mph"},
        gives="N/m2",
        gives_us="psf",
    ),
    template(
        "rigid building frequency",
        "rigid building",
        "Natural frequency from which a building counts as rigid",
        name="n_rigid",
        kind="frequency",
        formula="'1 Hz'",
        from_memory=True,
    ),
    template(
        "gust effect factor",
        "gust",
        "Gust effect factor of a rigid building",
        name="G",
        kind="number",
        formula="0.85",
    ),
    template(
        "internal pressure coefficient",
        "internal pressure",
        "Internal pressure coefficient, to be taken with both signs",
        name="GC_pi",
        kind="number",
        cases=(
            ("enclosure == 'enclosed'", "0.18"),
            ("enclosure == 'partially enclosed'", "0.55"),
        ),
        from_memory=True,
    ),
)

_WALLS = (
    template(
        "windward wall pressure coefficient",
        "pressure coefficients",
        "External pressure coefficient of the windward wall",
        name="C_p_windward",
        kind="number",
        formula="0.8",
        note="With q_z at each height.",
    ),
    template(
        "leeward wall pressure coefficient",
        "pressure coefficients",
        "External pressure coefficient of the leeward wall",
        name="C_p_leeward",
        kind="number",
        formula="interpolate(leeward_wall, L/B)",
        note="With q_h. L is the plan length along the wind, B across it.",
    ),
    template(
        "side wall pressure coefficient",
        "pressure coefficients",
        "External pressure coefficient of the side walls",
        name="C_p_side",
        kind="number",
        formula="-0.7",
        note="With q_h.",
    ),
)


def _roof_zone(number: int, where: str) -> Clause:
    return template(
        f"roof zone {number} pressure coefficient",
        "pressure coefficients",
        f"External pressure coefficient of the roof {where}, first value",
        name=f"C_p_{number}",
        kind="number",
        formula=f"interpolate(roof_zone_{number}, h/L)",
        note="Slope under 10 degrees, or wind parallel to the ridge. With q_h.",
    )


_ROOFS = (
    template(
        "windward roof suction coefficient",
        "pressure coefficients",
        "External pressure coefficient of the windward slope, first value",
        name="C_p_suction",
        kind="number",
        formula="interpolate(windward_roof_suction, h/L, theta)",
        note="Slope of 10 degrees or more, wind normal to the ridge. With q_h.",
    ),
    template(
        "windward roof second negative coefficient",
        "pressure coefficients",
        "External pressure coefficient of the windward slope, second value where negative",
        name="C_p_second_negative",
        kind="number",
        formula="interpolate(windward_roof_second_negative, h/L, theta)",
        note="Interpolated between values of one sign, 0 where none is listed. With q_h.",
    ),
    template(
        "windward roof second positive coefficient",
        "pressure coefficients",
        "External pressure coefficient of the windward slope, second value where positive",
        name="C_p_second_positive",
        kind="number",
        formula="interpolate(windward_roof_second_positive, h/L, theta)",
        note="Interpolated between values of one sign, 0 where none is listed. With q_h.",
    ),
    template(
        "leeward roof pressure coefficient",
        "pressure coefficients",
        "External pressure coefficient of the leeward slope",
        name="C_p_leeward_roof",
        kind="number",
        formula="interpolate(leeward_roof, h/L, theta)",
        note="Slope of 10 degrees or more, wind normal to the ridge. With q_h.",
    ),
    _roof_zone(1, "from the windward edge to h/2"),
    _roof_zone(2, "from h/2 to h"),
    _roof_zone(3, "from h to 2h"),
    _roof_zone(4, "beyond 2h"),
    template(
        "roof zone second coefficient",
        "pressure coefficients",
        "External pressure coefficient of all roof zones, second value",
        name="C_p_second",
        kind="number",
        formula="-0.18",
    ),
    template(
        "roof area reduction",
        "pressure coefficients",
        "Reduction of C_p = -1.3 for the area it acts on",
        name="R_A",
        kind="number",
        cases=(
            ("h/L >= 1.0", "interpolate(roof_area, A)"),
            ("h/L < 1.0", "1.0"),
        ),
        note="Taken only where C_p is the listed -1.3; an interpolated value is not reduced.",
    ),
)

_PRESSURES = (
    template(
        "wall pressure",
        "pressure",
        "Design wind pressure on a wall",
        name="p",
        kind="pressure",
        formula="q*G*C_p - q_i*GC_pi",
        note="q is q_z on the windward wall, q_h on the others; q_i is q_h.",
        from_memory=True,
    ),
    template(
        "roof pressure",
        "pressure",
        "Design wind pressure on a roof",
        name="p",
        kind="pressure",
        formula="q*G*C_p - q_i*GC_pi",
        note="q and q_i are q_h.",
        from_memory=True,
    ),
    template(
        "least wall pressure",
        "least pressure",
        "Least design wind pressure on the projected area of the walls",
        name="p_least_wall",
        kind="pressure",
        formula="'0.77 kN/m2'",
        formula_us="'16 psf'",
        note="A load case of its own, on the area projected normal to the wind.",
        from_memory=True,
    ),
    template(
        "least roof pressure",
        "least pressure",
        "Least design wind pressure on the projected area of the roof",
        name="p_least_roof",
        kind="pressure",
        formula="'0.38 kN/m2'",
        formula_us="'8 psf'",
        note="A load case of its own, on the area projected normal to the wind.",
        from_memory=True,
    ),
    template("wind load cases", "load cases", "Wind load cases with torsion and both directions"),
)
