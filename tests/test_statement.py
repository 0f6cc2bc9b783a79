from __future__ import annotations

import json
import math
import os
import subprocess
import sys
from typing import TYPE_CHECKING, Any

import books
import jsonschema
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook import typeset
from calcbook.inputs import Carried, Given
from calcbook.run import Filling, Runner
from calcbook.statement import schema, twelve_digits
from calcbook.units import unit

if TYPE_CHECKING:
    from calcbook.workbook import Workbook

VALIDATOR = jsonschema.Draft202012Validator(schema())


def _levels(*cells: str, **declared: Any) -> Workbook:
    book = books.book(rows={"r": [(f"R{n}", {"w": c}) for n, c in enumerate(cells)]}, **declared)
    with book.section("S") as s:
        with s.schedule("r", "Rows", heading="Level") as t:
            t.entry("w", "Width", unit="length")
            t.line("u = 2*w", "Double", unit="length")
            t.line("v = running(u) - previous(u, '0 m')", "Difference", unit="length", result=True)
            t.total("w", "u")
            t.governing("v", "largest")
            t.governing("v", "smallest")
            t.governing("u", "largest magnitude")
        s.line("t = sum(u) + max(u) - min(w)", "Sum", unit="length", result=True)
    return book


# --- schema -------------------------------------------------------------------------------------


def test_the_schema_is_a_schema_and_says_what_everything_is() -> None:
    """Draft 2020-12; every item kind and its parts carry a description."""
    jsonschema.Draft202012Validator.check_schema(schema())
    assert all("description" in part for part in schema()["$defs"].values())


@pytest.mark.parametrize(
    ("workbook", "typed"),
    [
        ("design-basis", {}),
        ("design-basis", {"units": "US", "roof": "gable"}),
        ("dead-load-take-off", {}),
        ("dead-load-take-off", {"code_set": "ASCE 7-16", "units": "US", "z_b": "3 kN"}),
        ("wind-pressure", {}),
        ("wind-pressure", {"code_set": "ASCE 7-16", "units": "US", "V": "1,5 mph"}),
        ("wind-pressure", {"roof": "gable", "theta": "20 deg", "hill": "ridge", "h": "9 kN"}),
    ],
)
def test_templates_follow_the_schema(workbook: str, typed: dict[str, str]) -> None:
    """Every statement the shipped templates make is valid, with refused entries as well."""
    notebook = books.TEMPLATES / f"{workbook}.ipynb"
    _, statement = Runner().run(Filling(notebook, sets=typed))
    VALIDATOR.validate(json.loads(json.dumps(statement)))


def test_every_kind_of_item_follows_the_schema() -> None:
    """Good, refused, not applied and broken items of every kind are valid statements."""
    book = _levels("1 m", "bad", "3 m")
    with book.section("All", when="t > '1 m'") as s:
        s.choice("roof", "Roof", ["flat"], "flat")
        s.text("job", "Job", "x")
        s.carry("p", "a.p", "Pressure", unit="pressure", fallback="1 kPa")
        s.line("y", "y", cases=[("roof == 'flat'", "p"), ("roof != 'flat'", "2*p")])
        s.table("walls", "leeward wall pressure coefficient")
        s.check("y <= '2 kPa'", "Limit")
        s.check("y <= '2 kPa' and roof == 'flat'", "Both")
        s.remark("Text", "caution")
        s.line("z = nothing", "Unknown")
    VALIDATOR.validate(book.statement())
    VALIDATOR.validate(_levels().statement())
    VALIDATOR.validate(books.book().statement())


# --- schedules ----------------------------------------------------------------------------------


def test_a_schedule_with_totals_and_the_governing_row_in_full() -> None:
    """Totals, running sums, shifted rows; the governing row is worked with its own values."""
    found = books.items(_levels("3 m", "1 m", "2 m").statement())
    item, columns = found["r"], books.columns(found["r"])
    assert columns["v"]["si"] == [6.0, 2.0, 10.0]
    assert columns["u"]["total"]["text"] == "12.000"
    assert (item["governing"]["row"], item["governing"]["why"]) == ("R2", "largest v")
    worked = [(line["row"], line["name"]) for line in item["governing"]["lines"]]
    assert worked == [("R2", "u"), ("R2", "v"), ("R1", "u"), ("R1", "v"), ("R0", "u")]
    first = item["governing"]["lines"][0]
    assert first["values"] == {"w": {"text": "2", "unit": "m"}}
    assert first["value"]["text"] == "4.000"
    assert [e["row"] for e in item["envelope"]] == ["R2", "R1", "R0"]
    assert found["t"]["value"]["si"] == 12.0 + 6.0 - 1.0


def test_whole_columns_are_not_replaced_by_one_row() -> None:
    """A name inside a function of whole columns is printed as a symbol, elsewhere as a value."""
    book = books.book(rows={"r": [("A", {"z": "3 m"}), ("B", {"z": "5 m"})]})
    with book.section("S") as s, s.schedule("r", "Rows") as t:
        t.entry("z", "z", unit="length")
        t.line("f = where(z >= max(z), z, '0 m') + min(z, '4 m')", "f", unit="length")
        t.governing("f")
    line = books.item(book, "r")["governing"]["lines"][0]
    values = {n: typeset.Printed(**v) for n, v in line["values"].items()}
    printed = typeset.expression(books.parse(line["formula"]), "plain", values)
    assert "max(z)" in printed
    assert "5 m ≥" in printed
    assert "min(5 m" in printed


def test_results_are_lines_and_governing_rows() -> None:
    """What is carried to the first page: lines declared so, and the rows of columns declared so."""
    results = _levels("3 m", "1 m", "2 m").statement()["results"]
    assert [(r["name"], r["row"]) for r in results] == [("v", "R2"), ("v", "R1"), ("t", "")]


# --- checks -------------------------------------------------------------------------------------


def check(text: str, **entries: str) -> dict[str, Any]:
    """Return the check item of a requirement on plain or dimensioned entries."""
    book = books.book()
    with book.section("S") as s:
        for name, value in entries.items():
            kind = {"m": "length", "kN": "force"}.get(value.partition(" ")[2], "number")
            s.entry(name, name, value, unit=kind)
        s.check(text, "Requirement")
    found = books.items(book.statement())
    return next(i for i in found.values() if i["kind"] == "check")


@pytest.mark.parametrize(
    ("text", "a", "b", "held", "ratio"),
    [
        ("a <= b", "3", "4", True, "0.75"),
        ("a <= b", "4", "4", True, "1.00"),
        ("a <= b", "4.0000000001", "4", True, "1.00"),
        ("a <= b", "4.001", "4", False, "1.0003"),
        ("a < b", "4", "4", False, None),
        ("a < b", "3.9999", "4", True, "0.99998"),
        ("a >= b", "5", "4", True, "0.80"),
        ("a >= b", "3.999", "4", False, "1.0003"),
        ("a > b", "7.2", "0", True, ""),
        ("a <= b", "0", "4", True, ""),
        ("a >= b", "0", "0", True, ""),
        ("a <= b", "1", "1e-320", False, ""),
        ("a >= b", "-5", "-8", True, "0.63"),
        ("a >= b", "-9", "-8", False, "1.13"),
        ("a <= b", "-5", "-3", True, "0.60"),
        ("a <= b", "1", "-2", False, ""),
        ("a <= b", "1", "0", False, ""),
        ("a == b", "4", "4", True, ""),
        ("a != b", "4", "4", False, ""),
    ],
)
def test_verdicts_and_ratios(text: str, a: str, b: str, held: bool, ratio: str | None) -> None:
    """The verdict is from unrounded values, with a tolerance at equality; the ratio agrees."""
    found = check(text, a=a, b=b)
    assert found["satisfied"] is held
    if ratio is not None:
        assert found["ratio_text"] == ratio


def test_words_left_empty_wait_for_nobody() -> None:
    """An empty text is an entry that needs no confirmation; one with words in it does."""
    book = books.book({"seen_by": ""})
    with book.section("S") as s:
        s.text("job_name", "Job", "Clinic")
        s.text("seen_by", "Seen by")
        s.entry("V", "Speed", "40 m/s", unit="speed")
    counts = book.statement()["counts"]
    assert (counts["entries"], counts["unconfirmed"]) == (3, 2)


@settings(max_examples=200, deadline=None)
@given(
    st.sampled_from(["<=", "<", ">=", ">"]),
    st.floats(-1e4, 1e4, allow_subnormal=False).map(lambda x: float(f"{x:.9g}")),
    st.floats(-1e-6, 1e-6) | st.floats(-2, 2),
)
def test_print_never_contradicts_the_verdict(relation: str, limit: float, off: float) -> None:
    """Neither the ratio nor the printed pair says otherwise than the verdict."""
    demand = float(f"{limit * (1 + off):.12g}")
    found = check(f"a {relation} b", a=repr(demand), b=repr(limit))
    held = found["satisfied"]
    if found["ratio_text"]:
        ratio = float(found["ratio_text"])
        strict = relation in "<>"
        assert held == (ratio < 1 if strict else ratio <= 1) or (strict and demand == limit)
    left, right = float(found["demand"]["text"]), float(found["limit"]["text"])
    if not math.isclose(demand, limit, rel_tol=1e-8):
        told = {"<=": left <= right, "<": left < right, ">=": left >= right, ">": left > right}
        assert told[relation] == held


def test_demand_and_limit_that_print_alike_get_more_figures() -> None:
    """A check that fails by little does not print two equal numbers."""
    found = check("a <= b", a="12.34567", b="12.34561")
    assert (found["demand"]["text"], found["limit"]["text"]) == ("12.3457", "12.3456")
    assert found["satisfied"] is False


def test_a_check_is_printed_in_the_unit_of_what_it_compares() -> None:
    """A product of force and length is a moment, whatever its first name is; a ratio is plain."""
    moment = check("F*d <= '30 kN*m'", F="5 kN", d="4 m")
    assert (moment["demand"]["text"], moment["demand"]["unit"]) == ("20.00", "kN*m")
    plain = check("d/(d + d) <= 2", d="4 m")
    assert (plain["demand"]["text"], plain["demand"]["unit"]) == ("0.5000", "")


def test_compound_checks_and_checks_of_columns() -> None:
    """Several comparisons have one verdict; a column is decided by its worst row."""
    assert check("a <= b and a >= 0", a="1", b="2")["satisfied"] is True
    assert check("a <= b and a >= 0", a="-1", b="2")["satisfied"] is False
    book = _levels("3 m", "1 m", "2 m")
    with book.section("C") as s:
        s.check("w <= '2.5 m'", "Every row")
        s.check("not (w > '4 m')", "No row")
        s.choice("roof", "Roof", ["flat", "gable"], "flat")
        s.check("roof == 'flat'", "A choice")
    found = [i for i in books.items(book.statement()).values() if i["kind"] == "check"]
    assert [i["satisfied"] for i in found] == [False, True, True]
    assert (found[0]["demand"]["text"], found[0]["limit"]["text"]) == ("3.000", "2.500")


# --- fingerprint --------------------------------------------------------------------------------


def _trial(
    a: str = "2 m",
    formula: str = "x = 2*a",
    *,
    row: str = "1",
    gives: str = "m",
    carried: float = 1.0,
    source: str = "drawing",
    confirmed: str = "",
    section: str = "S",
    **declared: Any,
) -> str:
    item = {"value": {"si": carried, "unit": "", "text": "1"}, "meaning": source}
    book = books.book(
        rows={"r": [("k", {"w": row})]}, carried=lambda o: Carried(o, item), **declared
    )
    book.inputs.entries["a"] = Given(a, source, confirmed)
    with book.section(section) as s:
        s.entry("a", "a", unit="length")
        s.carry("c", "other.c", "c")
        s.line(formula, "x")
        s.line("y = a + 1", "y", takes={"a": "m"}, gives=gives)
        with s.schedule("r", "r") as t:
            t.entry("w", "w")
    return str(book.statement()["fingerprint"])


@pytest.mark.parametrize(
    "change",
    [
        {"a": "2.0 m"}, {"row": "2"}, {"formula": "x = a*2"}, {"code": "ASCE 7-16"},
        {"system": "US"}, {"carried": 1.5}, {"gives": "mm"},
    ],
)  # fmt: skip
def test_the_fingerprint_changes_with_what_results_stand_on(change: dict[str, Any]) -> None:
    """Entries as typed, rows, formulas, code set, units and carried values change it."""
    assert _trial(**change) != _trial()


@pytest.mark.parametrize(
    "change", [{"source": "survey"}, {"confirmed": "RA 2026-10-02"}, {"section": "Renamed"}]
)
def test_the_fingerprint_keeps_with_everything_else(change: dict[str, Any]) -> None:
    """Sources, confirmations with their dates and the titles of sections do not change it."""
    assert _trial(**change) == _trial()


_PROCESS = """
import json, sys
from pathlib import Path
from calcbook.run import Filling, Runner
sets = {"roof": "gable", "theta": "20 deg", "hill": "ridge", "code_set": "ASCE 7-16"}
statement = Runner().run(Filling(Path(sys.argv[1]), sets=sets))[1]
sys.stdout.write(json.dumps(statement))
"""


def test_same_inputs_give_the_same_bytes_in_any_process() -> None:
    """Two processes with other hash seeds write the same statement byte for byte."""
    notebook = str(books.TEMPLATES / "wind-pressure.ipynb")
    running = [
        subprocess.Popen(
            [sys.executable, "-c", _PROCESS, notebook],
            stdout=subprocess.PIPE,
            env=os.environ | {"PYTHONHASHSEED": seed},
        )
        for seed in ("1", "4242")
    ]
    outputs = [process.communicate()[0] for process in running]
    assert outputs[0] == outputs[1]
    assert len(outputs[0]) > 10_000


def test_numbers_carry_twelve_digits() -> None:
    """A statement holds full doubles; as JSON it has twelve significant digits everywhere."""
    value = books.item(books.lines("x = a/3", entries={"a:length": "1 ft"}), "x")["value"]
    assert value["si"] == 0.3048 / 3
    assert twelve_digits([value])[0]["si"] == float(f"{0.3048 / 3:.12g}")
    assert twelve_digits([value])[0]["value"] == float(
        f"{0.3048 / 3 / unit(value['unit']).factor:.12g}"
    )
