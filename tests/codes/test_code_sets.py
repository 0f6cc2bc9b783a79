from __future__ import annotations

import csv
import dataclasses
import re
from pathlib import Path

import pytest

from calcbook import codes
from calcbook.codes import Clause
from calcbook.errors import CodeSetError
from calcbook.units import KINDS

REFERENCES = Path(__file__).parents[1] / "references"
CODES = [codes.get(name) for name in codes.names()]
BOTH = pytest.mark.parametrize("code", CODES, ids=codes.names())


def test_names_are_found() -> None:
    """Every name listed is the name of the code set it finds."""
    assert codes.names() == ("NSCP 2015", "ASCE 7-16")
    assert [codes.get(name).name for name in codes.names()] == list(codes.names())


def test_unknown_code_set_names_the_nearest() -> None:
    """A mistyped edition is refused with the one that was meant."""
    with pytest.raises(CodeSetError, match="there is no code set 'NSCP 2010'") as caught:
        codes.get("NSCP 2010")
    assert caught.value.hint == "did you mean 'NSCP 2015'?"


def test_unlike_code_set_lists_what_there_is() -> None:
    """A name like nothing we have is refused with the names there are."""
    with pytest.raises(CodeSetError) as caught:
        codes.get("xyz")
    assert caught.value.hint == "the code sets are 'NSCP 2015' and 'ASCE 7-16'"


@BOTH
def test_unknown_subject_names_the_nearest(code: codes.CodeSet) -> None:
    """A mistyped subject is refused with the edition and the subject that was meant."""
    with pytest.raises(CodeSetError, match=f"{code.name} has no clause on 'velocity presure'") as c:
        code.clause("velocity presure")
    assert c.value.hint == "did you mean 'velocity pressure'?"
    with pytest.raises(CodeSetError, match="has no table on 'lee wall'"):
        code.table("lee wall")


def test_elevation_factor_is_in_one_edition_only() -> None:
    """The ground elevation factor belongs to ASCE 7-16 and not to NSCP 2015."""
    assert codes.get("ASCE 7-16").has("ground elevation factor")
    assert not codes.get("NSCP 2015").has("ground elevation factor")
    with pytest.raises(CodeSetError, match="NSCP 2015 has no clause"):
        codes.get("NSCP 2015").number("ground elevation factor")


def test_editions_cover_the_same_subjects_otherwise() -> None:
    """One notebook serves both editions: few subjects are in one of them only."""
    nscp, asce = (set(codes.get(name).clauses) for name in codes.names())
    assert asce - nscp == {
        "ground elevation factor",
        "roof rise",
        "roof live load area factor",
        "roof live load slope factor",
    }
    assert nscp - asce == {"influence area", "printed floor live load reduction"}


def test_numbers_are_those_of_each_edition() -> None:
    """Edition and number are given as printed in the margin."""
    nscp, asce = (codes.get(name) for name in codes.names())
    assert asce.number("wall pressure") == "ASCE 7-16 Eq. 27.3-1"
    assert nscp.number("wall pressure") == "NSCP 2015 Eq. 207B.4-1"
    assert nscp.number("directionality factor") == "NSCP 2015 Table 207A.6-1"
    assert nscp.table("leeward roof pressure coefficient").source == "NSCP 2015 Fig. 207B.4-1"


@BOTH
def test_every_clause_is_complete(code: codes.CodeSet) -> None:
    """Each has a number, a meaning, a known kind, and a formula or cases but not both."""
    for subject, clause in code.clauses.items():
        assert clause.subject == subject
        assert clause.edition == code.name
        number = r"((Eq\.|Tables?|Fig\.) )?C?[234]\w*[-.\d]+( and C?[-.\d]+)?"
        assert re.fullmatch(number, clause.number), subject
        assert clause.meaning
        assert bool(clause.formula) != bool(clause.cases) or not clause.name
        assert clause.kind in KINDS or not clause.name
        assert set(clause.takes) | set(clause.takes_us) <= set(clause.symbols)
        assert bool(clause.takes_us) == bool(clause.takes and clause.formula_us), subject


@BOTH
def test_tables_stand_under_the_clause_that_looks_them_up(code: codes.CodeSet) -> None:
    """Each table has a clause of its subject with a lookup, and the clause's reference."""
    for subject, table in code.tables.items():
        clause = code.clause(subject)
        texts = [clause.formula, *(formula for _, formula in clause.cases)]
        assert any("interpolate(" in text for text in texts), subject
        assert table.source == clause.reference


@BOTH
def test_what_was_not_read_is_marked(code: codes.CodeSet) -> None:
    """Numbers known from memory carry the mark; numbers read in a public source do not."""
    for subject in ("internal pressure coefficient", "least wall pressure", "hill shape ratio"):
        assert code.clause(subject).from_memory
    for subject in (
        "directionality factor",
        "gust effect factor",
        "side wall pressure coefficient",
    ):
        assert not code.clause(subject).from_memory
    assert code.clause("velocity pressure").from_memory == (code.name == "ASCE 7-16")


@BOTH
def test_data_is_frozen(code: codes.CodeSet) -> None:
    """Neither a code set, a clause nor a table can be changed by whoever uses it."""
    clause = code.clause("velocity pressure")
    with pytest.raises(dataclasses.FrozenInstanceError):
        clause.formula = "1.0"  # type: ignore[misc]
    with pytest.raises(dataclasses.FrozenInstanceError):
        code.name = "mine"  # type: ignore[misc]
    with pytest.raises(dataclasses.FrozenInstanceError):
        code.table("roof area reduction").values = (1.0,)  # type: ignore[misc]
    combination = code.combinations("strength")[0]
    with pytest.raises(dataclasses.FrozenInstanceError):
        combination.name = "9"  # type: ignore[misc]
    for mapping in (
        *(code.clauses, code.tables, code.tables_us, code.combination_lists, code.uses()),
        *(code.materials(), combination.factors, clause.takes, clause.takes_us),
    ):
        with pytest.raises(TypeError):
            mapping["x"] = clause  # type: ignore[index]
    assert codes.get(code.name) is code


def test_renaming_leaves_options_units_and_functions_alone() -> None:
    """Only symbols are renamed: not what stands in quotes, and not the names of functions."""
    clause = Clause(
        subject="test", edition="Test", number="1", meaning="A test", name="m", kind="number",
        cases=(("m == 'm' and max_1 > '1 m'", "max(m, max_1)*1e3"), ("not m", "m_2")),
        takes={"m": "m", "m_2": "s"}, gives="m",
    )  # fmt: skip
    stated = clause.stated(renamed={"m": "n"})
    assert clause.symbols == ("m", "max_1", "m_2")
    assert stated.name == "n"
    assert stated.cases == (
        ("n == 'm' and max_1 > '1 m'", "max(n, max_1)*1e3"),
        ("not n", "m_2"),
    )
    assert stated.takes == {"n": "m", "m_2": "s"}


@BOTH
def test_a_clause_serves_at_another_place(code: codes.CodeSet) -> None:
    """K_z at height z becomes K_h at mean roof height h, in both unit systems."""
    clause = code.clause("velocity pressure exposure coefficient")
    stated = clause.stated("US", {"K_z": "K_h", "z": "h"})
    assert stated.name == "K_h"
    assert stated.formula == "2.01*(max(h, '15 ft')/z_g)**(2/alpha)"


def test_renaming_an_unknown_symbol_names_the_nearest() -> None:
    """A symbol that the clause does not have is refused with the one that was meant."""
    clause = codes.get("NSCP 2015").clause("velocity pressure")
    with pytest.raises(CodeSetError, match="has no symbol 'K_ztt'") as caught:
        clause.stated(renamed={"K_ztt": "K_h"})
    assert caught.value.hint == "did you mean 'K_zt'?"


def test_a_clause_only_referred_to_states_no_formula() -> None:
    """Asking a clause without a formula for one says to refer to it by number."""
    clause = codes.get("ASCE 7-16").clause("wind load cases")
    with pytest.raises(CodeSetError, match=re.escape("ASCE 7-16 27.3.5, wind load cases")):
        clause.stated()


def test_cases_are_given_in_either_unit_system() -> None:
    """Cases come in SI or US customary units; a single formula has no cases."""
    code = codes.get("ASCE 7-16")
    assert code.cases("gradient height")[0] == ("exposure == 'B'", "'365.76 m'")
    assert code.cases("gradient height", "US")[0] == ("exposure == 'B'", "'1200 ft'")
    with pytest.raises(CodeSetError, match="is not given by cases"):
        code.cases("gust effect factor")


def test_unknown_unit_system_is_refused() -> None:
    """A unit system other than SI and US is refused."""
    with pytest.raises(CodeSetError, match="there is no unit system 'metric'"):
        codes.get("ASCE 7-16").table("roof area reduction", "metric")


@pytest.mark.parametrize("file", sorted(REFERENCES.glob("*.csv")), ids=lambda path: path.stem)
def test_published_values_name_their_source(file: Path) -> None:
    """Each row of our files of published values has a clause, a known status and its source."""
    with file.open(encoding="utf-8", newline="") as opened:
        rows = list(csv.DictReader(opened))
    with (REFERENCES / "sources.csv").open(encoding="utf-8", newline="") as opened:
        sources = {row["source"] for row in csv.DictReader(opened)}
    assert rows
    for row in rows:
        if file.stem != "sources":
            assert row["status"] in {"read", "reproduced", "derived", "from memory"}, row
            assert row["source"] in sources or row["status"] == "from memory", row
            assert row["clause"], row
