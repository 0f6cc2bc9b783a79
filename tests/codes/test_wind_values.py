from __future__ import annotations

import math
from typing import TYPE_CHECKING

import pytest

from calcbook import codes

if TYPE_CHECKING:
    from collections.abc import Callable

CODES = [codes.get(name) for name in codes.names()]
BOTH = pytest.mark.parametrize("code", CODES, ids=codes.names())


def terrain(code: codes.CodeSet, exposure: str, state: Callable, system: str) -> dict[str, float]:
    """Return alpha and z_g of an exposure."""
    return {
        "alpha": state(code, "terrain exponent", system)(exposure=exposure),
        "z_g": state(code, "gradient height", system)(exposure=exposure),
    }


@BOTH
def test_exposure_coefficients_at_all_heights(
    code: codes.CodeSet, state: Callable, si: Callable, published: Callable
) -> None:
    """K_z is within 0.008 of the published table at its 22 heights, in feet and in metres."""
    rows = published("exposure_coefficients")
    assert len(rows) == 66
    for row in rows:
        for system, height in (("US", f"{row['z_ft']} ft"), ("SI", f"{row['z_m']} m")):
            coefficient = state(code, "velocity pressure exposure coefficient", system)
            found = coefficient(z=si(height), **terrain(code, row["exposure"], state, system))
            assert abs(found - float(row["K_z"])) <= 0.008, (row, found)


@BOTH
def test_reference_exposure_is_unity_at_ten_metres(code: codes.CodeSet, state: Callable) -> None:
    """K_z of exposure C at 10 m is 1.00, where the basic wind speed is defined."""
    found = state(code, "velocity pressure exposure coefficient")(
        z=10.0, **terrain(code, "C", state, "SI")
    )
    assert found == pytest.approx(1.0, abs=0.002)


@BOTH
def test_windward_roof_coefficients(code: codes.CodeSet, published: Callable) -> None:
    """Every listed pair of the figure is found: first value, second negative, second positive."""
    rows = published("windward_roof")
    assert len(rows) == 27
    for row in rows:
        at = (float(row["h_over_L"]), math.radians(float(row["theta_deg"])))
        first, second = float(row["first"] or 0.0), float(row["second"])
        expected = (first, min(second, 0.0), max(second, 0.0))
        found = tuple(
            code.table(f"windward roof {what} coefficient").at(*at)
            for what in ("suction", "second negative", "second positive")
        )
        assert found == pytest.approx(expected, abs=1e-12), row


@BOTH
def test_pressure_coefficients(code: codes.CodeSet, published: Callable) -> None:
    """Listed and interpolated C_p of walls, leeward roof and roof zones are met exactly."""
    for row in published("pressure_coefficients"):
        angle = [math.radians(float(row["theta_deg"]))] if row["theta_deg"] else []
        found = code.table(row["subject"]).at(float(row["ratio"]), *angle)
        assert found == pytest.approx(float(row["C_p"]), abs=1e-9), row


@BOTH
def test_other_wall_and_roof_coefficients(code: codes.CodeSet, state: Callable) -> None:
    """Windward wall 0.8, side walls -0.7, second value of all roof zones -0.18."""
    assert state(code, "windward wall pressure coefficient")() == 0.8
    assert state(code, "side wall pressure coefficient")() == -0.7
    assert state(code, "roof zone second coefficient")() == -0.18
    assert state(code, "gust effect factor")() == 0.85
    assert state(code, "directionality factor")() == 0.85


@BOTH
def test_coefficients_through_the_formulas(code: codes.CodeSet, state: Callable) -> None:
    """The clauses look the tables up with the ratios and the angle the figure is drawn for."""
    theta = math.radians(20.0)
    assert state(code, "leeward wall pressure coefficient")(L=30.0, B=20.0) == pytest.approx(-0.4)
    assert state(code, "roof zone 1 pressure coefficient")(h=15.0, L=20.0) == pytest.approx(-1.1)
    assert state(code, "roof zone 2 pressure coefficient")(h=15.0, L=20.0) == pytest.approx(-0.8)
    assert state(code, "roof zone 3 pressure coefficient")(h=15.0, L=20.0) == pytest.approx(-0.6)
    assert state(code, "roof zone 4 pressure coefficient")(h=15.0, L=20.0) == pytest.approx(-0.5)
    given = {"h": 10.0, "L": 20.0, "theta": theta}
    assert state(code, "windward roof suction coefficient")(**given) == pytest.approx(-0.4)
    assert state(code, "leeward roof pressure coefficient")(**given) == pytest.approx(-0.6)
    given["h"] = 20.0
    second = state(code, "windward roof second negative coefficient")
    assert second(**given) == pytest.approx(-0.18)
    given["theta"] = math.radians(45.0)
    assert state(code, "windward roof second positive coefficient")(**given) == pytest.approx(0.3)


@BOTH
def test_roof_area_reduction(
    code: codes.CodeSet, state: Callable, si: Callable, published: Callable
) -> None:
    """The reduction of -1.3 is 1.0, 0.9 and 0.8 at its three areas and holds beyond them."""
    for row in published("roof_area_reduction"):
        found = state(code, "roof area reduction", row["system"])(A=si(row["area"]), h=1.0, L=1.0)
        assert found == pytest.approx(float(row["R_A"]), abs=1e-9), row


def test_velocity_and_wall_pressures_of_nscp(
    state: Callable, si: Callable, published: Callable
) -> None:
    """The published velocity pressures and the pressures made of them are met within 0.01 Pa."""
    code = codes.get("NSCP 2015")
    for row in published("velocity_pressures"):
        velocity = state(code, "velocity pressure")(
            K_z=float(row["K_z"]), K_zt=1.0, K_d=0.85, V=si(row["V"])
        )
        assert velocity == pytest.approx(float(row["q_Pa"]), abs=0.01), row
        pressure = state(code, "wall pressure")(
            q=velocity, G=float(row["G"]), C_p=float(row["C"]), q_i=velocity, GC_pi=0.0
        )
        assert pressure == pytest.approx(float(row["p_Pa"]), abs=0.01), row


@BOTH
def test_velocity_pressure_against_a_data_sheet(
    code: codes.CodeSet, state: Callable, si: Callable, published: Callable
) -> None:
    """Sixty published roof pressures in psf (importance 1.15) follow from q within 1 psf."""
    elevation = {"K_e": 1.0} if code.has("ground elevation factor") else {}
    for row in published("roof_field_pressures"):
        velocity = state(code, "velocity pressure", "US")(
            K_z=float(row["K_h"]), K_zt=1.0, K_d=0.85, V=si(f"{row['V_mph']} mph"), **elevation
        )
        found = -1.15 * velocity * (float(row["GC_p"]) - 0.18) / si("1 psf")
        assert found == pytest.approx(float(row["p_psf"]), abs=1.0), row


@BOTH
def test_velocity_constant_is_half_the_density_of_air(code: codes.CodeSet, state: Callable) -> None:
    """0.613 (and 0.00256 in psf and mph) is half the density of standard air, within 0.2 %."""
    atmosphere = pytest.importorskip("fluids.atmosphere")
    half = atmosphere.ATMOSPHERE_1976(0.0).rho / 2.0
    elevation = {"K_e": 1.0} if code.has("ground elevation factor") else {}
    for system in ("SI", "US"):
        velocity = state(code, "velocity pressure", system)
        found = velocity(K_z=1.0, K_zt=1.0, K_d=1.0, V=1.0, **elevation)
        assert found == pytest.approx(half, rel=0.002), system


@BOTH
def test_velocity_pressure_of_common_practice(
    code: codes.CodeSet, state: Callable, si: Callable
) -> None:
    """With all factors 1 it is the 0.0473 V squared (Pa, V in km/h) of common practice."""
    elevation = {"K_e": 1.0} if code.has("ground elevation factor") else {}
    for speed in (100, 200, 310):
        found = state(code, "velocity pressure")(
            K_z=1.0, K_zt=1.0, K_d=1.0, V=si(f"{speed} km/h"), **elevation
        )
        assert found == pytest.approx(0.0473 * speed**2, rel=1e-4)


@BOTH
def test_topographic_factors(code: codes.CodeSet, state: Callable, published: Callable) -> None:
    """K_zt worked through every multiplier meets the values worked by hand within 0.0005."""
    for row in published("topographic_factors"):
        at = {name: float(row[f"{name}_m"]) for name in ("H", "L_h", "x", "z")}
        site = {"hill": row["hill"], "exposure": row["exposure"]}
        values: dict[str, float | str] = {**at, **site, "K_1": 0.0, "K_2": 0.0, "K_3": 0.0}
        values["H_min"] = state(code, "least hill height")(**site)
        if row["hill"] != "none":
            for subject, name in (
                ("hill shape ratio", "r_1"),
                ("hill height multiplier", "K_1"),
                ("effective hill length", "L_e"),
                ("hill distance constant", "mu"),
                ("hill elevation constant", "gamma"),
                ("hill distance multiplier", "K_2"),
                ("hill elevation multiplier", "K_3"),
            ):
                values[name] = state(code, subject)(**values)
        found = state(code, "topographic factor")(**values)
        assert found == pytest.approx(float(row["K_zt"]), abs=0.0005), row


def test_ground_elevation_factors(state: Callable, si: Callable, published: Callable) -> None:
    """K_e meets the values worked by hand to four decimals, in feet and in metres."""
    code = codes.get("ASCE 7-16")
    for row in published("ground_elevation"):
        found = state(code, "ground elevation factor", row["system"])(z_e=si(row["z_e"]))
        assert found == pytest.approx(float(row["K_e"]), abs=0.00006), row
    assert state(code, "ground elevation factor")(z_e=0.0) == 1.0


def test_ground_elevation_against_a_standard_atmosphere(state: Callable) -> None:
    """Up to 1829 m K_e is within 0.4 % of the pressure ratio of a standard atmosphere."""
    atmosphere = pytest.importorskip("fluids.atmosphere").ATMOSPHERE_1976
    factor = state(codes.get("ASCE 7-16"), "ground elevation factor")
    for elevation in (0.0, 500.0, 1000.0, 1500.0, 1829.0):
        ratio = atmosphere(elevation).P / atmosphere(0.0).P
        assert factor(z_e=elevation) == pytest.approx(ratio, rel=0.004)
