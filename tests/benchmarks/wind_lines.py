"""Velocity pressure and wall pressures by the clauses of a code set, and the same by hand."""

# ruff: noqa: N803, N806  the symbols are those of the formulas

from __future__ import annotations

import numpy as np

from calcbook import codes
from calcbook.workbook import Workbook

Array = np.ndarray
DIFFERING = ("V", "h", "L_x", "L_y")


def workbook() -> Workbook:
    """Return a workbook of the clauses for an enclosed building on open, level ground."""
    book = Workbook("walls", "Walls", code=codes.get("NSCP 2015"))
    with book.section("Entries") as s:
        s.entry("V", "Basic wind speed", "70 m/s", unit="speed")
        s.entry("h", "Mean height of the roof", "15.6 m", unit="length")
        s.entry("L_x", "Length along X", "30.6 m", unit="length")
        s.entry("L_y", "Length along Y", "15.6 m", unit="length")
        s.choice("exposure", "Exposure", ["B", "C", "D"], "C")
        s.choice("enclosure", "Enclosure", ["enclosed", "partially enclosed"], "enclosed")
        s.entry("K_zt", "Topographic factor", "1", unit="number")
    with book.section("Clauses") as s:
        for subject in ("directionality factor", "gust effect factor", "terrain exponent",
                        "internal pressure coefficient", "gradient height"):  # fmt: skip
            s.clause(subject)
        s.clause("velocity pressure exposure coefficient", K_z="K_h", z="h")
        s.clause("velocity pressure", q_z="q_h", K_z="K_h", unit="pressure")
        s.clause("windward wall pressure coefficient", C_p_windward="C_w")
        s.clause("side wall pressure coefficient", C_p_side="C_s")
        s.table("leeward_wall", "leeward wall pressure coefficient")
        s.clause("leeward wall pressure coefficient", C_p_leeward="C_lX", L="L_x", B="L_y")
        s.clause("leeward wall pressure coefficient", C_p_leeward="C_lY", L="L_y", B="L_x")
        for formula in ("p_i = q_h*GC_pi", "p_w = q_h*G*C_w", "p_s = q_h*G*C_s",
                        "p_lX = q_h*G*C_lX", "p_lY = q_h*G*C_lY"):  # fmt: skip
            s.line(formula, "Pressure", unit="pressure")
    book.evaluate()
    return book


def on_arrays(V: Array, h: Array, L_x: Array, L_y: Array) -> dict[str, Array]:
    """Compute the same pressures on numpy arrays in coherent SI."""
    K_h = 2.01 * (np.maximum(h, 4.6) / 274.32) ** (2 / 9.5)
    q_h = 0.613 * K_h * 0.85 * V**2
    ratios, coefficients = (1.0, 2.0, 4.0), (-0.5, -0.3, -0.2)
    return {
        "q_h": q_h,
        "p_i": q_h * 0.18,
        "p_w": q_h * 0.85 * 0.8,
        "p_s": q_h * 0.85 * -0.7,
        "p_lX": q_h * 0.85 * np.interp(L_x / L_y, ratios, coefficients),
        "p_lY": q_h * 0.85 * np.interp(L_y / L_x, ratios, coefficients),
    }
