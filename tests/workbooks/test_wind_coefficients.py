"""The wind workbook's pressure coefficients of walls and roofs, listed and interpolated.

ASCE 7-16 Fig. 27.3-1 and NSCP 2015 Fig. 207B.4-1; source and status of each value stand beside it
in the files of references.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import pytest
from sheets import CODES

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]
    Published = Callable[[str], list[dict[str, str]]]

WIND = "wind-pressure"
BOTH = pytest.mark.parametrize("code", CODES)


@BOTH
def test_wall_coefficients(code: str, fill: Fill, published: Published) -> None:
    """Windward 0.8, side -0.7, leeward by L/B, listed and interpolated (Fig. 27.3-1)."""
    rows = [
        r for r in published("pressure_coefficients") if r["subject"].startswith("leeward wall")
    ]
    assert len(rows) == 7
    for row in rows:
        ratio = max(float(row["ratio"]), 0.001)  # no building has L/B of zero
        lengths = {"L_x": f"{1000 * ratio:.12g} m", "L_y": "1000 m"}
        if ratio > 1.0:
            lengths = {"L_x": f"{10 * ratio:.12g} m", "L_y": "10 m"}
        sheet = fill(WIND, lengths, code=code)
        assert sheet.value("C_lX") == pytest.approx(float(row["C_p"]), abs=1e-9), row
        swapped = fill(WIND, {"L_x": lengths["L_y"], "L_y": lengths["L_x"]}, code=code)
        assert swapped.value("C_lY") == pytest.approx(float(row["C_p"]), abs=1e-9), row
        assert (sheet.value("C_w"), sheet.value("C_s")) == (0.8, -0.7)


@BOTH
def test_windward_slope(code: str, fill: Fill, published: Published) -> None:
    """Both values of every listed pair of Fig. 27.3-1 to 60 degrees, in the strips of the slope."""
    rows = [r for r in published("windward_roof") if float(r["theta_deg"]) <= 60]
    assert len(rows) == 24
    for row in rows:
        sets = {"roof": "gable", "ridge": "Y", "L_x": "20 m", "theta": f"{row['theta_deg']} deg"}
        sheet = fill(WIND, {**sets, "h": f"{20 * float(row['h_over_L'])} m"}, code=code)
        pair = {"1": float(row["first"] or 0.0), "2": float(row["second"])}
        for which, expected in pair.items():
            found = sheet.column("roof_X", f"C_X{which}")
            assert found[:2] == pytest.approx([expected] * 2, abs=1e-9), (row, which)
            assert found[2:] == [sheet.value("C_rX")] * 2
            pressure = sheet.value("q_h") * 0.85 * expected
            assert sheet.column("roof_X", f"p_X{which}")[0] == pytest.approx(pressure, abs=1e-6)


@pytest.mark.parametrize(
    ("ratio", "theta", "first", "second"),
    [
        (0.375, "10 deg", -0.8, -0.18),
        (0.5, "12.5 deg", -0.8, -0.18),
        (0.75, "17.5 deg", -0.7, -0.135),
        (0.5, "17.5 deg", -0.55, -0.09),
        (0.5, "22.5 deg", -0.35, 0.1),
        (0.25, "17.5 deg", -0.4, 0.1),
        (0.25, "12.5 deg", -0.6, -0.09),
        (0.375, "20 deg", -0.35, 0.1),
        (0.25, "32.5 deg", -0.1, 0.35),
        (1.5, "30 deg", -0.3, 0.2),
        (0.1, "50 deg", 0.0, 0.4 + 0.2 / 3),
    ],
)
def test_windward_slope_interpolated(
    ratio: float, theta: str, first: float, second: float, fill: Fill
) -> None:
    """Between listed values of one sign, 0.0 where none of that sign is listed (Fig. 27.3-1, note).

    Worked by hand between the listed pairs; beyond h/L of 0.25 and 1.0 the values hold.
    """
    sets = {"roof": "gable", "ridge": "X", "L_y": "20 m", "theta": theta}
    sheet = fill(WIND, {**sets, "h": f"{20 * ratio} m"})
    assert sheet.column("roof_Y", "C_Y1")[0] == pytest.approx(first, abs=1e-9)
    assert sheet.column("roof_Y", "C_Y2")[0] == pytest.approx(second, abs=1e-9)


@BOTH
def test_leeward_slope(code: str, fill: Fill, published: Published) -> None:
    """C_p of the leeward slope by h/L and angle, listed and interpolated (Fig. 27.3-1)."""
    rows = [
        r for r in published("pressure_coefficients") if r["subject"].startswith("leeward roof")
    ]
    assert len(rows) == 14
    for row in rows:
        sets = {"roof": "gable", "ridge": "Y", "L_x": "20 m", "theta": f"{row['theta_deg']} deg"}
        sheet = fill(WIND, {**sets, "h": f"{20 * float(row['ratio'])} m"}, code=code)
        assert sheet.value("C_rX") == pytest.approx(float(row["C_p"]), abs=1e-9), row


@BOTH
def test_roof_zones(code: str, fill: Fill, published: Published) -> None:
    """C_p of the four zones by h/L, listed and interpolated, -0.18 besides (Fig. 27.3-1)."""
    rows = [r for r in published("pressure_coefficients") if r["subject"].startswith("roof zone")]
    assert len(rows) == 20
    for ratio in sorted({row["ratio"] for row in rows}):
        sheet = fill(WIND, {"L_x": "20 m", "h": f"{20 * float(ratio)} m"}, code=code)
        for row in (r for r in rows if r["ratio"] == ratio):
            name = f"C_{row['subject'].split()[2]}X"
            assert sheet.value(name) == pytest.approx(float(row["C_p"]), abs=1e-9), row
        assert sheet.column("roof_X", "C_X2") == [-0.18] * 4


@pytest.mark.parametrize(
    ("given", "direction", "zones"),
    [
        ({"roof": "flat"}, "X", True),
        ({"roof": "gable", "ridge": "Y", "theta": "9.99 deg"}, "X", True),
        ({"roof": "gable", "ridge": "Y", "theta": "10 deg"}, "X", False),
        ({"roof": "gable", "ridge": "X", "theta": "40 deg"}, "X", True),
        ({"roof": "gable", "ridge": "X", "theta": "40 deg"}, "Y", False),
        ({"roof": "gable", "ridge": "X", "theta": "9.99 deg"}, "Y", True),
    ],
)
def test_which_roofs_have_zones(
    given: dict[str, str], direction: str, zones: bool, fill: Fill
) -> None:
    """Zones from the windward edge: slopes under 10 degrees and wind parallel to the ridge."""
    sheet = fill(WIND, {**given, "h": "8 m", "L_x": "36 m", "L_y": "36 m"})
    widths = sheet.column(f"roof_{direction}", f"w_{direction}")
    assert widths == pytest.approx([4.0, 4.0, 8.0, 20.0] if zones else [9.0] * 4, abs=1e-9)
    first = sheet.column(f"roof_{direction}", f"C_{direction}1")
    assert (first == pytest.approx([-0.9, -0.9, -0.5, -0.3])) is zones


@pytest.mark.parametrize(
    ("height", "widths"),
    [
        ("6 m", [3.0, 3.0, 6.0, 0.0]),
        ("10 m", [5.0, 5.0, 2.0, 0.0]),
        ("18 m", [9.0, 3.0, 0.0, 0.0]),
        ("30 m", [12.0, 0.0, 0.0, 0.0]),
    ],
)
def test_zones_end_at_the_far_edge(height: str, widths: list[float], fill: Fill) -> None:
    """Zones end at h/2, h and 2h or at the far edge, whichever comes first, and cover the roof."""
    sheet = fill(WIND, {"h": height, "L_x": "12 m"})
    assert sheet.column("roof_X", "w_X") == pytest.approx(widths, abs=1e-9)
    assert sheet.column("roof_X", "e_X")[-1] == pytest.approx(12.0)


@BOTH
def test_area_reduction(code: str, fill: Fill, published: Published) -> None:
    """C_p of -1.3 reduced by 1.0, 0.9, 0.8 with the area it acts on (Fig. 27.3-1, note).

    The first zone is made h/2 wide, so that with h = L its area is h/2 times the breadth.
    """
    for row in published("roof_area_reduction"):
        amount, unit = row["area"].split()
        h, per_length = ("2 m", 1.0) if unit == "m2" else ("10 ft", 5.0)
        breadth = f"{float(amount) / per_length:.12g} {unit.rstrip('2')}"
        sets = {"h": h, "L_x": h, "L_y": breadth}
        sheet = fill(WIND, sets, code=code, units=row["system"])
        expected = float(row["R_A"])
        assert sheet.value("R_AX") == pytest.approx(expected, abs=1e-9), row
        assert sheet.column("roof_X", "C_X1")[0] == pytest.approx(-1.3 * expected, abs=1e-9)


def test_interpolated_value_is_not_reduced(fill: Fill) -> None:
    """Under h/L of 1.0 the first zone has no reduction: the note speaks of the listed -1.3."""
    sheet = fill(WIND, {"h": "15 m", "L_x": "20 m", "L_y": "60 m"})
    assert sheet.column("roof_X", "C_X1")[0] == pytest.approx(-1.1)


def test_pitch_in_radians_and_degrees(fill: Fill) -> None:
    """An angle typed in radians gives the same coefficients as in degrees."""
    sets = {"roof": "gable", "ridge": "Y"}
    one = fill(WIND, {**sets, "theta": "25 deg"}).column("roof_X", "C_X1")
    other = fill(WIND, {**sets, "theta": f"{math.radians(25)!r} rad"}).column("roof_X", "C_X1")
    assert one == pytest.approx(other, abs=1e-9)
