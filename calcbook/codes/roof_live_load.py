"""Roof live load of the editions: by area and slope in a table, or with two reduction factors."""

from __future__ import annotations

from calcbook.codes.clause import Clause

_FLAT_OR_LOW = "where(A_T <= '20 m2', '1.00 kPa', where(A_T <= '60 m2', '0.75 kPa', '0.60 kPa'))"
_MODERATE = "where(A_T <= '20 m2', '0.75 kPa', where(A_T <= '60 m2', '0.70 kPa', '0.60 kPa'))"

NSCP_2015 = (
    Clause(
        subject="roof live load",
        edition="NSCP 2015",
        number="Table 205-3",
        meaning="Least roof live load on plan, method 1",
        name="L_r",
        kind="pressure",
        cases=(
            ("tan(theta) < 0.333", _FLAT_OR_LOW),
            ("tan(theta) >= 0.333 and theta < '45 deg'", _MODERATE),
            ("theta >= '45 deg'", "'0.60 kPa'"),
        ),
        note="A_T is the tributary area of the member, with steps at 20 and 60 m2.",
    ),
)

ASCE_7_16 = (
    Clause(
        subject="roof rise",
        edition="ASCE 7-16",
        number="4.8.2",
        meaning="Rise of the roof in 12",
        name="F",
        kind="number",
        formula="12*tan(theta)",
        note="For an arch or dome, 32 times its rise over its span.",
    ),
    Clause(
        subject="roof live load area factor",
        edition="ASCE 7-16",
        number="4.8.2",
        meaning="Reduction of roof live load for tributary area",
        name="R_1",
        kind="number",
        cases=(
            ("A_T <= '18.58 m2'", "1.0"),
            ("A_T > '18.58 m2' and A_T < '55.74 m2'", "max(0.6, 1.2 - 0.011*A_T/'1 m2')"),
            ("A_T >= '55.74 m2'", "0.6"),
        ),
        cases_us=(
            ("A_T <= '200 ft2'", "1.0"),
            ("A_T > '200 ft2' and A_T < '600 ft2'", "max(0.6, 1.2 - 0.001*A_T/'1 ft2')"),
            ("A_T >= '600 ft2'", "0.6"),
        ),
        note="The SI form is from memory; its 0.011 is rounded in print.",
        from_memory=True,
    ),
    Clause(
        subject="roof live load slope factor",
        edition="ASCE 7-16",
        number="4.8.2",
        meaning="Reduction of roof live load for slope",
        name="R_2",
        kind="number",
        cases=(
            ("F <= 4", "1.0"),
            ("F > 4 and F < 12", "1.2 - 0.05*F"),
            ("F >= 12", "0.6"),
        ),
    ),
    Clause(
        subject="roof live load",
        edition="ASCE 7-16",
        number="Eq. 4.8-1",
        meaning="Least roof live load on plan",
        name="L_r",
        kind="pressure",
        formula="max('0.58 kPa', min('0.96 kPa', L_o*R_1*R_2))",
        formula_us="max('12 psf', min('20 psf', L_o*R_1*R_2))",
        note="L_o is the live load of the roof before reduction.",
    ),
)
