"""Rows of another schedule found by key: ``lookup`` and ``sum_for``."""

# ruff: noqa: RUF001  Greek letters are what is printed

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import books
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.compile import namespace, python_source
from calcbook.dimensions import Type, check
from calcbook.errors import DimensionError, FormulaError
from calcbook.formula import parse
from calcbook.keyed import MissingRowError, lookup, lookup_rows, sum_for, sum_for_rows
from calcbook.typeset import OUTPUTS, Printed, equation, spoken
from calcbook.units import kind

if TYPE_CHECKING:
    from calcbook.workbook import Workbook

UNIT_WEIGHT, LENGTH = kind("unit weight").dimension, kind("length").dimension
SCOPE = {
    "gamma": Type("number", UNIT_WEIGHT, "materials"),
    "material": Type("text", None, "materials"),
    "made_of": Type("text", None, "layers"),
    "t": Type("number", LENGTH, "layers"),
    "g": Type("number", kind("pressure").dimension, "layers"),
    "own": Type("text", None, None),
    "L": Type("number", LENGTH, None),
}
MATERIALS = [("concrete", {"gamma": "24 kN/m3"}), ("steel", {"gamma": "77.3 kN/m3"})]


def trial(
    *layers: tuple[str, str, str], materials: list[tuple[str, dict[str, str]]] | None = None
) -> Workbook:
    """Return materials, and layers (key, material, thickness) that look their weight up."""
    rows = {
        "materials": materials or MATERIALS,
        "layers": [(key, {"made_of": of, "t": thick}) for key, of, thick in layers],
    }
    book = books.book(rows=rows)
    with book.section("Trial") as s:
        with s.schedule("materials", "Materials", key="material") as t:
            t.entry("gamma", "Unit weight", unit="unit weight", low="0.1 kN/m3")
        with s.schedule("layers", "Layers") as t:
            t.text("made_of", "Material")
            t.entry("t", "Thickness", unit="section length")
            t.line("g = t*lookup(gamma, material, made_of)", "Weight", unit="pressure")
            t.governing("g", "largest")
        with s.schedule("per_material", "Per material", same_rows="materials") as t:
            t.line("G = sum_for(g, made_of, material)", "Weight", unit="pressure")
        s.line("g_s = lookup(gamma, material, 'steel')*'2 mm'", "Plate", unit="pressure")
        s.line("g_c = sum_for(g, made_of, 'concrete')", "Concrete", unit="pressure")
    return book


LAYERS = (("1", "concrete", "200 mm"), ("2", "steel", "10 mm"), ("3", "concrete", "55 mm"))


def column(book: Workbook, schedule: str, name: str) -> dict[str, Any]:
    """Return a column of a schedule."""
    return books.columns(books.item(book, schedule))[name]


# --- dimensions -----------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "rows"),
    [
        ("lookup(gamma, material, made_of)", "layers"),
        ("lookup(gamma, material, 'steel')", None),
        ("lookup(gamma, material, own)", None),
        ("lookup(2*gamma, material, made_of)", "layers"),
        ("sum_for(gamma, material, 'steel')", None),
        ("sum_for(gamma, material, made_of)", "layers"),
    ],
)
def test_a_value_found_has_the_kind_of_its_column_and_the_rows_of_its_key(
    text: str, rows: str | None
) -> None:
    """What is found is a unit weight, one for each key asked for, or one for a single key."""
    assert check(parse(text), SCOPE, text) == Type("number", UNIT_WEIGHT, rows)


@pytest.mark.parametrize(
    ("text", "marked", "what"),
    [
        ("lookup(L, material, made_of)", "L", "reads a column of a schedule"),
        ("lookup(gamma, made_of, made_of)", "made_of", "keys of the rows of that column"),
        ("lookup(gamma, t, made_of)", "t", "keys of the rows of that column"),
        ("sum_for(gamma, own, made_of)", "own", "keys of the rows of that column"),
        ("lookup(gamma, material, t)", "t", "finds a row by words, and this is a length"),
        ("sum_for(material, material, made_of)", "material", "needs a number"),
    ],
)
def test_what_cannot_be_found_by_key_is_refused(text: str, marked: str, what: str) -> None:
    """The caret stands under the part that is no column, no key or no word."""
    with pytest.raises(FormulaError, match=what) as caught:
        check(parse(text), SCOPE, text)
    start, end = caught.value.span or (0, 0)
    assert text[start:end] == marked


def test_a_value_found_keeps_its_dimension_in_the_formula() -> None:
    """A length is not added to a unit weight because it was looked up."""
    text = "t + lookup(gamma, material, made_of)"
    with pytest.raises(DimensionError):
        check(parse(text), SCOPE, text)


# --- values ---------------------------------------------------------------------------------


def test_one_value_and_one_sum() -> None:
    """24 for concrete; 3 + 5 of both rows called b; 0 where no row is called so."""
    keys = np.array(["a", "b", "b"], dtype=object)
    values = np.array([2.0, 3.0, 5.0])
    assert lookup(values, keys, "a") == 2.0
    assert lookup(values, keys, "b") == 3.0
    assert sum_for(values, keys, "b") == 8.0
    assert sum_for(values, keys, "c") == 0.0
    with pytest.raises(MissingRowError, match="no row 'c'"):
        lookup(values, keys, "c")


def test_missing_rows_of_a_column_are_not_a_number_in_their_place_only() -> None:
    """A key without a row has nan; the other keys have their values."""
    keys, wanted = np.array(["a", "b"], dtype=object), np.array(["b", "x", "a"], dtype=object)
    found = lookup_rows(np.array([2.0, 3.0]), keys, wanted)
    assert found[[0, 2]].tolist() == [3.0, 2.0]
    assert math.isnan(found[1])
    assert sum_for_rows(np.array([2.0, 3.0]), keys, wanted).tolist() == [3.0, 0.0, 2.0]


_VALUES = st.floats(-1e6, 1e6, allow_subnormal=False)


@settings(max_examples=60, deadline=None)
@given(
    st.lists(st.tuples(st.sampled_from("abcd"), _VALUES), min_size=1, max_size=8),
    st.lists(st.sampled_from("abcd"), min_size=1, max_size=5),
    st.sampled_from(["lookup", "sum_for"]),
)
def test_many_cases_give_what_one_case_gives(
    rows: list[tuple[str, float]], wanted: list[str], function: str
) -> None:
    """Compiled for one case and for many, by name and by quoted key, the values are the same."""
    scope = {
        "v": Type("number", LENGTH, "r"),
        "k": Type("text", None, "r"),
        "w": Type("text", None, "q"),
    }
    keys = np.array([key for key, _ in rows], dtype=object)
    values = np.array([value for _, value in rows])
    asked = np.array(wanted, dtype=object)
    for text in (f"{function}(v, k, w)", f"{function}(v, k, '{wanted[0]}')"):
        one = python_source(parse(text), scope=scope, array=False)
        many = python_source(parse(text), scope=scope, array=True)
        wide = {"v_v": np.stack([values, -values], axis=-1), "v_k": keys[:, None],
                "v_w": asked[:, None]}  # fmt: skip
        given_one = {"v_v": values, "v_k": keys, "v_w": asked}
        try:
            expected = np.asarray(eval(one, namespace(array=False), given_one))  # noqa: S307
        except MissingRowError:
            assert wanted[0] not in keys
            continue
        found = np.asarray(eval(many, namespace(array=True), wide))  # noqa: S307
        assert found[..., 0] == pytest.approx(expected, nan_ok=True)
        assert found[..., 1] == pytest.approx(-expected, nan_ok=True)


def test_values_in_a_workbook() -> None:
    """200 mm x 24 = 4.8, 10 mm x 77.3 = 0.773, 55 mm x 24 = 1.32 kPa; concrete 6.12 kPa."""
    book = trial(*LAYERS)
    assert column(book, "layers", "g")["si"] == pytest.approx([4800.0, 773.0, 1320.0])
    assert column(book, "per_material", "G")["si"] == pytest.approx([6120.0, 773.0])
    assert books.item(book, "g_s")["value"]["si"] == pytest.approx(154.6)
    assert books.item(book, "g_c")["value"]["si"] == pytest.approx(6120.0)


# --- what is missing ------------------------------------------------------------------------


def test_a_missing_key_is_named_and_the_other_rows_stand() -> None:
    """The row that asks for zinc says so; the others, and sums without it, have values."""
    book = trial(*LAYERS, ("4", "zinc", "1 mm"))
    g = column(book, "layers", "g")
    assert g["si"] == [pytest.approx(4800.0), pytest.approx(773.0), pytest.approx(1320.0), None]
    assert g["problem"] == ["", "", "", "row 4: there is no row 'zinc' in material"]
    assert column(book, "per_material", "G")["si"] == pytest.approx([6120.0, 773.0])
    assert books.item(book, "g_c")["value"]["si"] == pytest.approx(6120.0)


def test_a_value_missing_at_a_key_spoils_what_asks_for_it_only() -> None:
    """Concrete without a unit weight: its layers say why, steel and its plate have theirs."""
    book = trial(*LAYERS, materials=[("concrete", {"gamma": "-24 kN/m3"}), MATERIALS[1]])
    g = column(book, "layers", "g")
    assert g["si"] == [None, pytest.approx(773.0), None]
    assert "gamma of concrete" in g["problem"][0]
    assert books.item(book, "g_s")["value"]["si"] == pytest.approx(154.6)
    assert "not available because of g" in books.item(book, "g_c")["problem"]
    total = column(book, "per_material", "G")
    assert total["si"] == [None, pytest.approx(773.0)]


def test_a_single_key_without_a_row_is_named() -> None:
    """A line that asks for a quoted key no row has says which."""
    book = trial(*LAYERS, materials=[MATERIALS[0], ("timber", {"gamma": "5 kN/m3"})])
    assert "there is no row 'steel'" in books.item(book, "g_s")["problem"]


# --- on paper -------------------------------------------------------------------------------

LOOKED_UP = "t*lookup(gamma, material, made_of)"
SUMMED = "sum_for(g, made_of, material)"


@pytest.mark.parametrize(
    ("output", "symbolic", "summed"),
    [
        ("plain", "t γ(material = made of)", "∑(g where made of = material)"),
        ("latex", r"t\,\gamma\left(\mathrm{material} = \mathrm{made~of}\right)", "where"),
        ("typst", '"made of"', '" where "'),
        ("mathml", "made&#xA0;of", "where"),
    ],
)
def test_the_row_asked_for_is_printed(output: str, symbolic: str, summed: str) -> None:
    """A value looked up prints as its column with the row in brackets; a sum says over which."""
    assert symbolic in equation("w", LOOKED_UP, output, {}, None)[1]
    assert summed in equation("G", SUMMED, output, {}, None)[1]


@pytest.mark.parametrize("output", OUTPUTS)
def test_the_value_looked_up_is_substituted(output: str) -> None:
    """Worked in full, the value of the row stands in the formula, with its unit."""
    place = f"2:{len(LOOKED_UP)}"
    values = {"t": Printed("200", "mm"), place: Printed("24", "kN/m3")}
    parts = equation("w", LOOKED_UP, output, values, Printed("4.800", "kPa"))
    assert "24" in parts[2]
    assert "200" in parts[2]
    assert "material" not in parts[2]


def test_a_value_looked_up_alone_is_substituted() -> None:
    """A formula whose only value is one looked up shows it: twice 24 is 48."""
    text = "2*lookup(gamma, material, made_of)"
    values = {f"2:{len(text)}": Printed("24", "kN/m3")}
    parts = equation("w", text, "plain", values, Printed("48", "kN/m3"))
    assert parts == ["w", "2 γ(material = made of)", "2 · 24 kN/m³", "48 kN/m³"]
    assert "which is 2 times 24 kN/m³" in spoken("w", text, values, None)


def test_a_sum_names_the_row_it_is_for() -> None:
    """Worked in full, the sum over a key shows the key of its row, and no other column's."""
    book = books.book(rows={
        "floors": [("Roof", {}), ("Ground", {})],
        "walls": [(f"W{n}", {"stands": "Ground", "w": f"{n} kN"}) for n in (3, 4)],
    })  # fmt: skip
    with book.section("Trial") as s:
        with s.schedule("walls", "Walls", key="wall") as t:
            t.text("stands", "Stands on")
            t.entry("w", "Weight", unit="force")
        with s.schedule("floors", "Floors", key="level") as t:
            t.line("W = sum_for(w, stands, level)", "Walls", unit="force")
            t.governing("W")
    line = books.item(book, "floors")["governing"]["lines"][0]
    values = {name: Printed(**value) for name, value in line["values"].items()}
    parts = equation("W", line["formula"], "plain", values, Printed(**_text(line["value"])))
    assert parts == ["W", "∑(w where stands = level)", "∑(w where stands = Ground)", "7.000 kN"]


def _text(value: dict[str, Any]) -> dict[str, str]:
    return {"text": value["text"], "unit": value["unit"]}


def test_the_formula_is_spoken() -> None:
    """The alternative text names the row that is asked for."""
    said = spoken("w", LOOKED_UP, {}, None)
    assert said == "w equals t times gamma where material equals made_of."


def test_printed_values_close_by_hand() -> None:
    """A reader with the printed statement gets every printed value, looked up or summed."""
    book = trial(("1", "concrete", "137 mm"), ("2", "steel", "3.7 mm"), ("3", "concrete", "61 mm"))
    statement = book.statement()
    reader = books.Reader(book, statement)
    worked = dict.fromkeys(("g_s", "g_c"), 0)
    for name, line, hand in reader.every_line():
        assert books.misses(hand, line["value"]["text"]) <= 1, (name, line)
        worked[line["name"]] = 1
    assert set(worked.values()) == {1}
    for name, found, hand in reader.every_column():
        for one, text in zip(hand, found["texts"], strict=True):
            assert books.misses(float(one), text) <= 1, name


def test_the_governing_row_shows_the_value_it_looked_up() -> None:
    """4.8 kPa governs: 200 mm times 24 kN/m3, both in the substituted line."""
    governing = books.item(trial(*LAYERS), "layers")["governing"]
    assert governing["row"] == "1"
    values = governing["lines"][0]["values"]
    assert {"text": "24", "unit": "kN/m3"} in values.values()
    assert values["t"] == {"text": "200", "unit": "mm"}


def test_a_lookup_with_a_key_for_each_case() -> None:
    """Many cases may each ask for a row of their own; a key that no row has gives no value."""
    keys, column = np.array(["a", "b"], dtype=object), np.array([[1.0], [2.0]])
    asked = np.array(["b", "a", "c", "b"])
    found = lookup(column, keys, asked)
    np.testing.assert_array_equal(found, [2.0, 1.0, math.nan, 2.0])
    wide = np.array([[1.0, 10.0], [2.0, 20.0]])
    np.testing.assert_array_equal(lookup(wide, keys, np.array(["b"])), [2.0, 20.0])
