from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook import codes
from calcbook.compile import namespace, python_source
from calcbook.dimensions import Type, check
from calcbook.errors import CodeSetError
from calcbook.formula import parse
from calcbook.units import DIMENSIONLESS

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.codes import Combination

CODES = [codes.get(name) for name in codes.names()]
BOTH = pytest.mark.parametrize("code", CODES, ids=codes.names())
KINDS = pytest.mark.parametrize("kind", ["strength", "service"])
CASES = ("D", "D_min", "L", "Lr", "S", "R", "H", "F", "T", "W", "E")
SYMBOLS = {case: case for case in CASES}
SCOPE = {name: Type("number", DIMENSIONLESS, None) for name in (*CASES, "f_1")}


def total(combination: Combination, loads: Mapping[str, float], f_1: float = 1.0) -> float:
    """Return a combination's total through its formula; loads not given are 0, D_min is D."""
    text = combination.formula(SYMBOLS)
    node = parse(text)
    check(node, SCOPE, text)
    source = python_source(node, scope=SCOPE, array=False)
    values = {"D_min": loads.get("D", 0.0), "f_1": f_1, **loads}
    names = {f"v_{case}": float(values.get(case, 0.0)) for case in SCOPE}
    found: float = eval(source, {**namespace(array=False), **names})  # noqa: S307  checked formula
    return found


def named(code: codes.CodeSet, kind: str, name: str) -> Combination:
    """Return a combination by name."""
    return next(c for c in code.combinations(kind) if c.name == name)


def test_combinations_meet_published_totals(published: Callable) -> None:
    """The four sources of a published table, row by row, within 0.0005, and NSCP's by hand."""
    rows = published("combinations")
    for row in rows:
        loads = {case: float(row[case]) for case in ("D", "L", "Lr", "S", "W", "E")}
        combination = named(codes.get(row["code"]), row["kind"], row["combination"])
        found = total(combination, loads, float(row["f_1"]))
        assert found == pytest.approx(float(row["total"]), abs=0.0005), row


def test_the_edition_changes_two_rows(published: Callable) -> None:
    """Those with 0.5W (0.8W before) and with f_1 = 1 are no longer what 7-05 had."""
    changed = [row for row in published("combinations") if row["edition_7_05"]]
    assert {(row["combination"], row["f_1"]) for row in changed} == {("3b", "0.5"), ("3a", "1.0")}
    for row in changed:
        loads = {case: float(row[case]) for case in ("D", "L", "Lr", "S", "W", "E")}
        combination = named(codes.get(row["code"]), row["kind"], row["combination"])
        found = total(combination, loads, float(row["f_1"]))
        assert abs(found - float(row["edition_7_05"])) > 0.05, row


def test_largest_and_smallest_total_are_the_published_ones(published: Callable) -> None:
    """Over all combinations with both senses of W and E, the extremes are those published."""
    for row in published("governing_combinations"):
        loads = {case: float(row[case]) for case in ("D", "L", "Lr", "S")}
        totals = [
            total(c, {**loads, "W": w, "E": e}, float(row["f_1"]))
            for c in codes.get(row["code"]).combinations("strength")
            for w in (float(row["W_toward"]), -float(row["W_away"]))
            for e in (float(row["E_toward"]), -float(row["E_away"]))
        ]
        assert max(totals) == pytest.approx(float(row["largest"]), abs=0.0005), row
        assert min(totals) == pytest.approx(float(row["smallest"]), abs=0.0005), row


def test_alternatives_stand_apart() -> None:
    """2 and 3 of ASCE 7-16 are expanded over Lr, S, R and over L or W; NSCP has no S."""
    asce, nscp = codes.get("ASCE 7-16"), codes.get("NSCP 2015")
    names = [c.name for c in asce.combinations("strength")]
    assert names == [
        *("1", "2a", "2b", "2c", "3a", "3b", "3c", "3d", "3e", "3f", "4a", "4b", "4c"),
        *("5", "6", "7"),
    ]
    assert len(nscp.combinations("strength")) == 12
    assert named(asce, "service", "6b").text == "D + F + H + 0.75L + 0.75(0.6W) + 0.75S"
    assert named(nscp, "service", "5b").text == "D + H + F + E/1.4"
    assert named(nscp, "strength", "4a").text == "1.2D + 1.0W + f_1 L + 0.5Lr"
    cases = {case for what in ("strength", "service") for c in nscp.combinations(what)
             for case in c.factors}  # fmt: skip
    assert cases == set(CASES) - {"S"}


@BOTH
@KINDS
def test_resisting_dead_load_is_the_certain_part(code: codes.CodeSet, kind: str) -> None:
    """Factors of 0.6 and 0.9 stand on D_min, all others on D, and the condition says so."""
    for c in code.combinations(kind):
        resisting = "D_min" in c.factors
        assert resisting != ("D" in c.factors), c.name
        factor = c.factors["D_min" if resisting else "D"]
        assert (factor in {"0.9", "0.6"}) == resisting, c.name
        assert ("D_min" in c.condition) == resisting, c.name
        assert ("f_1" in c.condition) == ("f_1" in c.factors.values()), c.name
        assert c.principal in {*c.factors, "D"}, c.name
        assert c.clause.startswith(code.name), c.name
    assert len({c.name for c in code.combinations(kind)}) == len(code.combinations(kind))


def test_formula_leaves_out_what_has_no_symbol() -> None:
    """Symbols are the workbook's; absent cases vanish, D stands in for D_min, f_1 is renamed."""
    c = named(codes.get("ASCE 7-16"), "strength", "4a")
    symbols = {"D": "P_D", "L": "P_L", "W": "P_W", "Lr": "P_Lr", "f_1": "f_L"}
    assert c.formula(symbols) == "1.2*P_D + 1.0*P_W + f_L*P_L + 0.5*P_Lr"
    uplift = named(codes.get("ASCE 7-16"), "strength", "5")
    assert uplift.formula({"D": "P_D", "W": "P_W"}) == "0.9*P_D + 1.0*P_W"
    assert uplift.formula({"D": "P_D", "D_min": "P_0", "W": "P_W"}) == "0.9*P_0 + 1.0*P_W"
    with pytest.raises(CodeSetError, match="there is no load case 'L_r'") as caught:
        c.formula({"L_r": "P"})
    assert caught.value.hint == "did you mean 'Lr'?"
    with pytest.raises(CodeSetError, match="none of the load cases of combination 5"):
        uplift.formula({"Lr": "L_r"})


def test_combinations_of_the_cases_present() -> None:
    """Nothing is listed twice, nothing is about an absent case, and suction is not forgotten."""
    asce = codes.get("ASCE 7-16")
    found = asce.combinations("strength", ("D", "L", "Lr", "W"))
    assert [(c.name, c.text) for c in found] == [
        ("1", "1.4D"),
        ("2a", "1.2D + 1.6L + 0.5Lr"),
        ("3a", "1.2D + 1.6Lr + f_1 L"),
        ("3b", "1.2D + 1.6Lr + 0.5W"),
        ("4a", "1.2D + 1.0W + f_1 L + 0.5Lr"),
        ("5", "0.9D_min + 1.0W"),
    ]
    assert [c.text for c in asce.combinations("service", ("D", "L"))] == [
        *("D", "D + L", "D + 0.75L"),
    ]
    found = asce.combinations("strength", ("D", "Lr", "W"))
    assert [c.text for c in found if c.number == "3"] == ["1.2D + 1.6Lr", "1.2D + 1.6Lr + 0.5W"]
    with pytest.raises(CodeSetError, match="there is no load case 'Dmin'"):
        asce.combinations("strength", ("D", "Dmin"))
    with pytest.raises(CodeSetError, match="has no list of load combinations on 'strenght'"):
        asce.combinations("strenght")


_LOAD = st.floats(0.0, 100.0)


@pytest.mark.parametrize("name", codes.names())
@KINDS
@settings(max_examples=40, deadline=None)
@given(
    loads=st.fixed_dictionaries({"D": _LOAD}, optional=dict.fromkeys(("L", "Lr", "S", "R"), _LOAD)),
    sideways=st.fixed_dictionaries({}, optional=dict.fromkeys(("W", "E"), st.floats(-100, 100))),
)
def test_what_is_left_out_never_governs(
    name: str, kind: str, loads: dict[str, float], sideways: dict[str, float]
) -> None:
    """The largest total over the cases present is that over the whole list, absent ones at 0."""
    code, given_loads = codes.get(name), {**loads, **sideways}
    every = max(total(c, given_loads) for c in code.combinations(kind))
    left = max(total(c, given_loads) for c in code.combinations(kind, given_loads))
    assert left == pytest.approx(every)


@BOTH
def test_soil_and_fluid_are_kept_without_another_load(code: codes.CodeSet) -> None:
    """H beside D alone still finds the combination that gives it 1.6."""
    texts = [c.text for c in code.combinations("strength", ("D", "H"))]
    assert "1.2D + 1.6H" in texts
    assert [c.text for c in code.combinations("strength", ("D", "F"))] == ["1.4D + 1.4F"]


def test_what_is_from_memory() -> None:
    """ASCE strength factors were read in a published source; the other lists were not."""
    asce, nscp = codes.get("ASCE 7-16"), codes.get("NSCP 2015")
    assert not any(c.from_memory for c in asce.combinations("strength"))
    for listed in (asce.combinations("service"), *map(nscp.combinations, ("strength", "service"))):
        assert all(c.from_memory for c in listed)
    for code in CODES:
        for kind in ("strength", "service"):
            memory = {c.from_memory for c in code.combinations(kind)}
            assert memory == {code.clause(f"{kind} combinations").from_memory}
