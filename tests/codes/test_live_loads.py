from __future__ import annotations

import math
from typing import TYPE_CHECKING

import pytest

from calcbook import codes
from calcbook.units import kind, read_quantity

if TYPE_CHECKING:
    from collections.abc import Callable

CODES = [codes.get(name) for name in codes.names()]
BOTH = pytest.mark.parametrize("code", CODES, ids=codes.names())
ASCE, NSCP = codes.get("ASCE 7-16"), codes.get("NSCP 2015")
COLUMNS = {"interior column": 4, "exterior column": 4, "edge column with cantilever slab": 3,
           "corner column with cantilever slab": 2}  # fmt: skip


def test_live_loads_are_the_published_ones(state: Callable, published: Callable) -> None:
    """Each listed load is met exactly, by the table of uses and by the clause."""
    for row in published("live_loads"):
        code = codes.get(row["code"])
        use = code.uses()[row["use"]]
        listed = use.load if row["system"] == "SI" else use.load_us
        expected = pytest.approx(read_quantity(row["load"]).si, rel=1e-9)
        assert read_quantity(listed).si == expected, row
        assert state(code, "live load", row["system"])(use=row["use"]) == expected, row


@BOTH
def test_every_use_is_complete(code: codes.CodeSet, published: Callable) -> None:
    """Each has words, a pressure in both systems within 0.5 %, a known kind and its clause."""
    read = {r["use"] for r in published("live_loads") if r["code"] == code.name and r["source"]}
    for name, use in code.uses().items():
        assert use.name == name
        assert use.words
        assert use.clause == code.number("live load")
        assert use.reducible in {"yes", "no", "heavy", "garage", "assembly"}
        load = read_quantity(use.load, kind("pressure").dimension).si
        assert read_quantity(use.load_us, kind("pressure").dimension).si == pytest.approx(
            load, rel=0.005
        )
        assert (load > 4800.0) == (use.reducible == "heavy"), name
        assert use.from_memory or name in read, name


def test_uses_have_the_same_names_in_both_editions() -> None:
    """A job may change code set: only two uses are listed by one edition alone."""
    assert set(NSCP.uses()) ^ set(ASCE.uses()) == {"garage storage", "sleeping room"}
    for name in set(NSCP.uses()) & set(ASCE.uses()):
        assert NSCP.uses()[name].reducible == ASCE.uses()[name].reducible


@BOTH
def test_factor_on_companion_live_load(code: codes.CodeSet, state: Callable) -> None:
    """1.0 for assembly, garages and loads over 4.8 kPa (100 psf) typed either way; else 0.5."""
    for system in ("SI", "US"):
        factor = state(code, "live load factor", system)
        for name, use in code.uses().items():
            load = read_quantity(use.load if system == "SI" else use.load_us).si
            full = load > 4800.0 or use.reducible in {"assembly", "garage"}
            assert factor(use=name, L_o=load) == (1.0 if full else 0.5), name
        for typed, expected in (("100 psf", 0.5), ("4.79 kPa", 0.5), ("101 psf", 1.0)):
            if system == "SI" or typed != "4.79 kPa":
                assert factor(use="office", L_o=read_quantity(typed).si) == expected


@BOTH
def test_every_floor_is_in_at_most_one_pool(code: codes.CodeSet, state: Callable) -> None:
    """Reduced by area, heavy, garage or none of them; a heavier typed load moves an office."""
    pools = [state(code, f"{pool} floor") for pool in ("reducible", "heavy", "garage")]
    for name, use in code.uses().items():
        load = read_quantity(use.load).si
        expected = [float(use.reducible == kind) for kind in ("yes", "heavy", "garage")]
        if code is NSCP:  # whose garages are reduced where they are private
            expected[2] = float(name == "garage private")
        assert [pool(use=name, L_o=load) for pool in pools] == expected, name
        heavier = [0.0, float(use.reducible in {"yes", "heavy"}), expected[2]]
        assert [pool(use=name, L_o=9000.0) for pool in pools] == heavier, name
    limit = {"ASCE 7-16": 4788.026, "NSCP 2015": 4800.0}[code.name]
    assert state(code, "heavy live load limit", "US")() == pytest.approx(limit, abs=0.001)


def test_partitions_are_dead_load_or_live_load(state: Callable) -> None:
    """NSCP adds 1.0 kPa of dead load, ASCE 15 psf of live load below a live load of 80 psf."""
    assert state(NSCP, "partition dead load")() == 1000.0
    assert state(NSCP, "partition live load")() == 0.0
    assert state(ASCE, "partition dead load", "US")() == 0.0
    partition = state(ASCE, "partition live load", "US")
    assert partition(L_o=read_quantity("50 psf").si) == read_quantity("15 psf").si
    assert partition(L_o=read_quantity("80 psf").si) == 0.0
    corridor = read_quantity(ASCE.uses()["corridor above ground"].load).si
    assert state(ASCE, "partition live load")(L_o=corridor) == 0.0
    assert state(ASCE, "partition live load")(L_o=2400.0) == 720.0


def test_floor_reductions_meet_worked_values(state: Callable, published: Callable) -> None:
    """Tables of both editions by area, member and number of floors, within their last digit."""
    for row in published("floor_reductions"):
        code, area = codes.get(row["code"]), read_quantity(row["A_T"]).si
        factor, floors = float(row["K_LL"]), float(row["n_f"])
        if row["subject"].startswith("printed"):
            given = {"A_T": area, "D_o": 4000.0, "L_o": 2400.0}
        elif code is NSCP:
            given = {"A_I": state(code, "influence area")(K_LL=factor, A_T=area)}
        else:
            given = {"K_LL": factor, "A_T": area}
        found = state(code, row["subject"], row["system"])(n_f=floors, **given)
        assert found == pytest.approx(float(row["R_f"]), abs=0.51e-4), row


def test_printed_metric_rule_gives_a_tenth_of_its_parent(state: Callable) -> None:
    """0.08 (A - 15 m2) reduces by less than a tenth of 0.861 (A - 13.94 m2), or 0.08 per ft2."""
    printed = state(NSCP, "printed floor live load reduction")
    for area in (20.0, 40.0, 60.0):
        reduction = 100.0 * (1.0 - printed(A_T=area, D_o=4000.0, L_o=2400.0, n_f=1.0))
        in_feet = 0.08 * (area / 0.09290304 - 150.0)
        assert 0.861 * (area - 13.94) == pytest.approx(in_feet, abs=0.02)
        assert 0.0 < reduction < in_feet / 10.0
    assert "tenth" in NSCP.clause("printed floor live load reduction").note


def test_printed_rule_has_three_limits(state: Callable) -> None:
    """40 % for one floor, 60 % for others, 23.1 (1 + D/L) %, and nothing below 15 m2."""
    printed = state(NSCP, "printed floor live load reduction")
    given = {"D_o": 4000.0, "L_o": 2400.0}
    assert printed(A_T=2000.0, n_f=1.0, **given) == pytest.approx(0.60)
    assert printed(A_T=2000.0, n_f=2.0, **given) == pytest.approx(0.40)
    assert printed(A_T=10.0, n_f=1.0, **given) == 1.0
    light = printed(A_T=2000.0, n_f=2.0, D_o=240.0, L_o=2400.0)
    assert light == pytest.approx(1.0 - 0.231 * 1.1)


def test_element_factors_by_member(state: Callable) -> None:
    """ASCE lowers columns with cantilever slabs; NSCP has 4 for columns; beams 2, others 1."""
    for member, factor in COLUMNS.items():
        assert state(ASCE, "column live load element factor")(member=member) == factor
        assert state(NSCP, "column live load element factor")(member=member) == 4
    for code in CODES:
        beam = state(code, "beam live load element factor")
        members = ("interior beam", "edge beam", "other member")
        assert [beam(member=member) for member in members] == [2, 2, 1]


def test_heavy_loads_and_garages(state: Callable) -> None:
    """20 % for two or more floors (ASCE), for columns (NSCP); parking not at all in practice."""
    heavy, garage = "heavy live load reduction", "garage live load reduction"
    assert [state(ASCE, heavy)(n_f=n) for n in (1.0, 2.0, 7.0)] == [1.0, 0.8, 0.8]
    stored = state(NSCP, heavy)
    assert [stored(K_LL=k, use="storage heavy") for k in (4.0, 2.0, 1.0)] == [0.8, 1.0, 1.0]
    assert [stored(K_LL=4.0, use=use) for use in ("storage light", "manufacturing light")] == [
        0.8,
        1.0,
    ]
    for code in CODES:
        given = {"n_f": 5.0} if code is ASCE else {"A_I": 900.0}
        assert state(code, garage)(parking="not reduced", **given) == 1.0
    permitted = "as the code permits"
    assert [state(ASCE, garage)(parking=permitted, n_f=n) for n in (1.0, 2.0)] == [1.0, 0.8]
    areas = (39.0, 64.0, 900.0)
    found = [state(NSCP, garage)(parking=permitted, A_I=area) for area in areas]
    assert found == pytest.approx([1.0, 0.82125, 0.6])


def test_roof_live_loads_meet_published_values(state: Callable, published: Callable) -> None:
    """NSCP's table cell by cell; the worked roof of 30 degrees with its 17 psf."""
    for row in published("roof_live_loads"):
        code, system = codes.get(row["code"]), row["system"]
        slope, area = read_quantity(row["slope"]).si, read_quantity(row["A_T"]).si
        theta = math.radians(45.0) if slope == 1.0 else math.atan(slope)
        if code is NSCP:
            found = state(code, "roof live load", system)(theta=theta, A_T=area)
        else:
            found = state(code, "roof live load", system)(
                L_o=read_quantity(code.uses()["roof"].load_us).si,
                R_1=state(code, "roof live load area factor", system)(A_T=area),
                R_2=state(code, "roof live load slope factor", system)(
                    F=state(code, "roof rise", system)(theta=theta)
                ),
            )
        assert found == pytest.approx(read_quantity(row["L_r"]).si, rel=1e-6), row


def test_published_roof_without_rounding_its_rise(state: Callable) -> None:
    """30 degrees rise 6.93 in 12, which the example rounds to 7: R_2 0.8536 and not 0.85."""
    rise = state(ASCE, "roof rise")(theta=math.radians(30.0))
    assert rise == pytest.approx(6.928, abs=0.001)
    assert state(ASCE, "roof live load slope factor")(F=7.0) == pytest.approx(0.85)
    assert state(ASCE, "roof live load slope factor")(F=rise) == pytest.approx(0.8536, abs=1e-4)


def test_roof_live_load_stays_within_its_bounds(state: Callable) -> None:
    """Never under 0.58 kPa (12 psf) nor over 0.96 kPa (20 psf)."""
    roof = state(ASCE, "roof live load")
    assert roof(L_o=957.6, R_1=0.6, R_2=0.6) == pytest.approx(580.0)
    assert roof(L_o=1500.0, R_1=1.0, R_2=1.0) == pytest.approx(960.0)
