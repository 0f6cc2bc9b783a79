from __future__ import annotations

from typing import Any

import books
import pytest

from calcbook.errors import CalcbookError
from calcbook.inputs import Carried, GivenRow
from calcbook.units import unit


def entry(text: str, **limits: Any) -> dict[str, Any]:
    """Return the statement's item of one length typed as text."""
    book = books.book({"x": text})
    with book.section("S") as s:
        s.entry("x", "Length", unit="length", **limits)
        s.line("y = 2*x", "y")
    return books.item(book, "x")


@pytest.mark.parametrize(
    ("text", "part"),
    [
        ("1,5 m", "1.5"), ("1 234 ft", "1234"), ("1.5,5", "1.5"), ("3", "m"), ("3 kN", "length"),
        ("nan", ""), ("inf m", ""), ("20 degC", ""), ("3 furlongz", "unit"),
    ],
)  # fmt: skip
def test_a_refused_entry_keeps_its_text_and_says_what_to_type(text: str, part: str) -> None:
    """The item holds the text typed, no value, and the reason with what would be right."""
    found = entry(text)
    assert found["value"]["si"] is None
    assert found["value"]["text"] == text
    assert part in found["problem"]


@pytest.mark.parametrize(
    ("text", "held"),
    [("2 m", True), ("200 cm", True), ("1.999 m", False), ("-3 m", False), ("5 m", True),
     ("5000 mm", True), ("5.0001 m", False), ("16.404199475 ft", True)],
)  # fmt: skip
def test_ranges_hold_at_their_limits_in_any_unit(text: str, held: bool) -> None:
    """Both limits belong to the range, whatever the unit they are typed in."""
    found = entry(text, low="2 m", high="5 m", refusal="check the drawing")
    assert (found["problem"] is None) == held
    if not held:
        assert f"{text} is outside the range 2 m to 5 m" in found["problem"]
        assert "check the drawing" in found["problem"]


@pytest.mark.parametrize(("text", "held"), [("-10 m", True), ("-10.01 m", False), ("-2 m", True)])
def test_a_negative_limit_belongs_to_its_range(text: str, held: bool) -> None:
    """A lower limit below zero can be typed exactly."""
    assert (entry(text, low="-10 m", high="-2 m")["problem"] is None) == held


def _choices(**typed: str) -> dict[str, Any]:
    book = books.book(typed)
    with book.section("S") as s:
        s.choice(
            "roof", "Roof", {"flat": "flat", "gable": "with a ridge"}, "flat",
            refused={"dome": "domes are not covered"},
        )  # fmt: skip
        s.text("day", "Day", "2026-11-20", pattern=r"\d{4}-\d{2}-\d{2}", refusal="year-month-day")
    return books.items(book.statement())


def test_choices_take_one_of_their_options() -> None:
    """An option is taken; another is refused with the nearest, or with its own reason."""
    assert _choices()["roof"]["option"] == "flat"
    assert _choices(roof="gable")["roof"]["labels"]["gable"] == "with a ridge"
    assert "did you mean 'gable'?" in _choices(roof="gabel")["roof"]["problem"]
    assert "domes are not covered" in _choices(roof="dome")["roof"]["problem"]
    assert "choose one of: flat, gable" in _choices(roof="x")["roof"]["problem"]


def test_texts_fit_their_pattern() -> None:
    """Words that do not fit are refused with what to write."""
    assert _choices()["day"]["problem"] is None
    assert "year-month-day" in _choices(day="20 November")["day"]["problem"]


# --- schedules ----------------------------------------------------------------------------------


def _levels(rows: list[tuple[str, str]], *, ascending: bool = False) -> dict[str, Any]:
    book = books.book(rows={"levels": [(k, {"z": c}) for k, c in rows]})
    with book.section("S") as s:
        with s.schedule("levels", "Levels") as t:
            t.entry("z", "Elevation", unit="length")
            (t.ascending if ascending else t.descending)("z")
            t.line("h = z - following(z, '0 m')", "Height")
        s.line("top = max(z)", "Top")
    return books.items(book.statement())


@pytest.mark.parametrize(("last", "held"), [("1 m", True), ("4 m", False), ("5 m", False)])
def test_levels_out_of_order_are_named(last: str, held: bool) -> None:
    """Levels that do not fall are refused, with both rows and what they say."""
    found = _levels([("Roof", "8 m"), ("Mid", "4 m"), ("Low", last)])
    assert (found["top"]["problem"] is None) == held
    if not held:
        text = books.columns(found["levels"])["z"]["problem"][0]
        assert text == (
            f"out of order: Mid (4 m) is not above Low ({last}); list the highest first"
        )
        assert found["top"]["problem"] == "not available because of z"


def test_positions_out_of_order_are_named() -> None:
    """The same where values have to rise."""
    assert _levels([("A", "0 m"), ("B", "6 m")], ascending=True)["top"]["problem"] is None
    found = _levels([("A", "6 m"), ("B", "0 m")], ascending=True)
    assert "A (6 m) is not below B (0 m)" in books.columns(found["levels"])["z"]["problem"][0]


@pytest.mark.parametrize(
    ("rows", "reason"),
    [
        ([("A", "2 m"), ("A", "1 m")], "two rows are called 'A'"),
        ([("", "2 m")], "a row has no key"),
        ([], "the schedule has no rows"),
    ],
)
def test_rows_have_keys_of_their_own(rows: list[tuple[str, str]], reason: str) -> None:
    """Duplicate, empty or missing rows: the schedule says so and gives no values."""
    found = _levels(rows)
    assert found["levels"]["problem"] == reason
    assert found["top"]["value"]["si"] is None


def test_fixed_rows_are_not_typed_over() -> None:
    """Rows that belong to the method stay, whatever a record holds; rows are shared by name."""
    book = books.book(rows={"r": [("9", {"w": "9"})]})
    with book.section("S") as s:
        rows = [{"key": "1", "w": "2"}, {"key": "2", "w": "3"}]
        with s.schedule("r", "Fixed", key="strip", rows=rows, fixed=True) as t:
            t.entry("w", "w")
        with s.schedule("q", "Shared", same_rows="r") as t:
            t.line("u = where(strip == '1', w, 10*w)", "u")
    found = books.items(book.statement())
    assert (found["r"]["rows"], found["q"]["rows"]) == (["1", "2"], ["1", "2"])
    assert books.columns(found["q"])["u"]["si"] == [2.0, 30.0]
    assert found["r"]["fixed"]
    assert found["q"]["fixed"]


# --- values brought forward ---------------------------------------------------------------------

VALUE = {"si": 2500.0, "value": 2.5, "unit": "kPa", "text": "2.5"}


def _carry(item: dict[str, Any] | None, problem: str = "", **carry: Any) -> dict[str, Any]:
    found = None if item is None and not problem else Carried("source.p", item, problem=problem)
    book = books.book(carried=lambda _: found)
    settings = {"unit": "pressure", "fallback": "1 kPa"} | carry
    with book.section("S") as s:
        s.carry("p", "source.p", "Pressure", **settings)
        s.line("y = p*1", "y") if "unit" in settings else None
    return books.item(book, "p")


def test_a_value_is_brought_forward_with_its_origin() -> None:
    """The value stands with where it comes from; it is no fallback and not stale."""
    found = _carry({"value": VALUE, "number": "3.2", "sign": "toward the surface"})
    assert (found["value"]["si"], found["fallback"], found["stale"]) == (2500.0, False, False)
    assert found["from"] == {"workbook": "source", "name": "p", "number": "3.2"}


def test_the_fallback_serves_outside_a_job_and_is_unconfirmed() -> None:
    """Without a source the fallback serves and counts as an unconfirmed entry."""
    book = books.book()
    with book.section("S") as s:
        s.carry("p", "source.p", "Pressure", unit="pressure", fallback="1 kPa")
    statement = book.statement()
    found = books.items(statement)["p"]
    assert (found["value"]["text"], found["fallback"]) == ("1", True)
    assert (statement["counts"]["entries"], statement["counts"]["unconfirmed"]) == (1, 1)


@pytest.mark.parametrize(
    ("item", "reason"),
    [
        ({"value": VALUE | {"unit": "kN"}}, "here pressure is expected"),
        ({"value": VALUE, "sign": "away from it"}, "here positive toward the surface is expected"),
        ({"value": VALUE, "sign": ""}, "in no stated sense"),
        ({"value": {"si": None, "unit": "kPa"}}, "has no value"),
        ({"value": VALUE, "problem": "a division by zero"}, "a division by zero"),
        ({"value": VALUE, "applies": False, "why": "roof is flat"}, "does not apply: roof is flat"),
        ({"value": VALUE | {"si": 9e9}, "sign": "toward the surface"}, "outside the range"),
        ({"option": "gable"}, "has no value"),
    ],
)
def test_what_does_not_fit_is_not_brought_forward(item: dict[str, Any], reason: str) -> None:
    """Another kind of quantity or sense, no value, a problem or a range: each is said."""
    found = _carry(item, sign="toward the surface", high="5 kPa")
    assert reason in found["problem"]
    assert found["value"]["si"] is None


def test_a_source_that_lacks_the_result_gives_its_reason() -> None:
    """The reason the runner found (a near match, say) stands at the item."""
    assert "did you mean 'q'?" in _carry(None, "no result 'p'; did you mean 'q'?")["problem"]


def test_a_value_that_moved_is_stale_and_shows_both() -> None:
    """Old and new value are in the statement, and it is counted."""
    book = books.book(carried=lambda o: Carried(o, {"value": VALUE}, taken={"text": "2.2"}))
    with book.section("S") as s:
        s.carry("p", "source.p", "Pressure", unit="pressure")
    statement = book.statement()
    found = books.items(statement)["p"]
    assert (found["stale"], found["taken"], found["value"]["text"]) == (
        True,
        {"text": "2.2"},
        "2.5",
    )
    assert statement["counts"]["stale"] == 1


def test_options_and_words_are_brought_forward() -> None:
    """A carried option is one of the options here; words come from words."""
    options = {"options": ["flat", "gable"], "fallback": "flat"}
    assert _carry({"option": "gable"}, **options)["option"] == "gable"
    assert "no option" in _carry({"option": "dome"}, **options)["problem"]
    assert _carry({"text": "Osmere Bay"}, text=True)["text"] == "Osmere Bay"
    assert "holds no words" in _carry({"value": VALUE}, text=True)["problem"]


def _column(name: str, unit: str, si: list[float | None], **more: Any) -> dict[str, Any]:
    texts = ["" if v is None else str(v) for v in si]
    return {"name": name, "unit": unit, "si": si, "texts": texts, "problem": None} | more


def _rows(
    source: dict[str, Any] | None, typed: list[GivenRow] | None = None
) -> tuple[dict[str, Any], dict[str, Any]]:
    carried = None if source is None else Carried("source.levels", source)
    book = books.book(carried=lambda _: carried)
    if typed is not None:
        book.inputs.rows["levels"] = typed
    with book.section("S") as s:
        fallback = [{"key": "Roof", "z": "9 m", "load": "1 kPa"}]
        with s.schedule("levels", "Levels", origin="source.levels", rows=fallback) as t:
            t.carry("z", "elevation", "Elevation", unit="length", high="100 m")
            t.entry("load", "Load", "2 kPa", unit="pressure")
            t.line("w = load*z", "w")
    item = books.item(book, "levels")
    return item, books.columns(item)


SOURCE = {
    "kind": "schedule",
    "rows": ["Roof", "Low"],
    "columns": [_column("elevation", "m", [8.0, 4.0])],
}


def test_rows_are_brought_forward_and_joined_by_key() -> None:
    """The source gives keys and carried columns; what is typed here is joined by key.

    Until rows are typed the template's serve where their key is there, and nobody confirmed them.
    """
    item, columns = _rows(SOURCE)
    assert (item["rows"], columns["load"]["si"]) == (["Roof", "Low"], [1000.0, 2000.0])
    assert item["confirmed"] == ["", ""]
    typed = [GivenRow("Low", {"load": "5 kPa"}), GivenRow("Roof", {"load": "3 kPa"})]
    item, columns = _rows(SOURCE, typed)
    assert (item["rows"], columns["load"]["si"]) == (["Roof", "Low"], [3000.0, 5000.0])
    assert columns["w"]["si"] == [24000.0, 20000.0]


@pytest.mark.parametrize(
    ("keys", "reason"),
    [(["Roof"], "row 'Low' of source.levels is missing here: enter its cells"),
     (["Roof", "Low", "Mid"],
      "row 'Mid' is not in source.levels: it goes with the next change of levels")],
)  # fmt: skip
def test_missing_and_extra_keys_are_errors(keys: list[str], reason: str) -> None:
    """A key on one side only is said; nothing is computed with half a join."""
    item, columns = _rows(SOURCE, [GivenRow(k, {"load": "1 kPa"}) for k in keys])
    assert item["problem"] == reason
    assert columns["w"]["si"] == [None, None]


def test_the_fallback_rows_serve_outside_a_job() -> None:
    """Without a source the template's rows serve, and are marked."""
    item, columns = _rows(None)
    assert (item["fallback"], columns["w"]["si"]) == (True, [9000.0])


@pytest.mark.parametrize(
    ("column", "reason"),
    [
        (_column("level", "m", [8.0, 4.0]), "has no column 'elevation'"),
        (_column("elevation", "kN", [8.0, 4.0]), "here length is expected"),
        (_column("elevation", "m", [8.0, None]), "row Low: z: has no value there"),
        (_column("elevation", "m", [8.0, None], problem=["", "row Low: bad"]), "row Low: bad"),
        (_column("elevation", "m", [8.0, 400.0]), "outside the range 100 m or less"),
    ],
)
def test_a_carried_column_that_does_not_fit_is_named(column: dict[str, Any], reason: str) -> None:
    """A column that is missing, of another kind, or without a value in a row says so."""
    _, columns = _rows(SOURCE | {"columns": [column]})
    assert any(reason in text for text in columns["z"]["problem"])
    assert columns["w"]["si"][1] is None


def test_a_source_schedule_with_a_problem_gives_no_rows() -> None:
    """What is wrong with the source's rows is said where they are wanted."""
    item, _ = _rows(SOURCE | {"problem": "two rows are called 'Roof'"})
    assert item["problem"] == "source.levels: two rows are called 'Roof'"


# --- typing -------------------------------------------------------------------------------------


def test_accept_reads_as_it_would_be_stored() -> None:
    """A field's text is stripped, a bare number gets the unit beside the field."""
    book = books.lines(entries={"L:length": "1 m"})
    assert book.accept("L", " 2.50 m ") == "2.50 m"
    assert book.accept("L", "2.50", bare=unit("m")) == "2.50 m"
    with pytest.raises(CalcbookError, match="trial"):
        book.accept("L", "2.50")
    with pytest.raises(CalcbookError, match=r"did you mean 'L'|entries are L"):
        book.accept("LL", "2")
