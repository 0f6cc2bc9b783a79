"""The bar of a workbook without a browser: what it shows, and what its buttons do."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from live_samples import WIND, opened

from calcbook.live.bar import Bar

if TYPE_CHECKING:
    from calcbook.job import Job
    from calcbook.live import Session


@pytest.fixture
def bar(wind: Session) -> Bar:
    """Return the bar of the wind workbook, told of every change."""
    found = Bar(wind)
    wind.bar = found
    wind.refresh()
    return found


def counts(bar: Bar) -> dict[str, dict[str, Any]]:
    """Return the counts of a bar by their id."""
    return {count["id"]: count for count in bar.state["counts"]}


def test_counts_name_the_places_to_jump_to(bar: Bar, wind: Session) -> None:
    """What is not confirmed, and a check that fails, is listed with its section and row."""
    places = counts(bar)["unconfirmed"]["places"]
    assert {"text": "1.2 Basic wind speed", "section": "Site", "row": "V"} in places
    assert counts(bar)["checks"]["text"] == "1 check satisfied"
    wind.enter("V", "100 m/s")
    failed = counts(bar)["checks"]
    assert (failed["text"], failed["open"]) == ("1 check not satisfied", True)
    assert failed["places"][0]["row"] == "2.2"
    assert "1.2 Basic wind speed" not in [p["text"] for p in counts(bar)["unconfirmed"]["places"]]


def test_texts_not_taken_are_counted_until_they_are_put_right(bar: Bar, wind: Session) -> None:
    """A refused text stands in the bar with its field, and goes with the refusal."""
    wind.views["Site"].act({"do": "enter", "name": "V", "text": "1,5 m"})
    assert counts(bar)["refused"]["text"] == "1 text not taken"
    (place,) = counts(bar)["refused"]["places"]
    assert place == {"text": "V: '1,5 m'", "section": "Site", "row": "V"}
    wind.views["Site"].act({"do": "enter", "name": "V", "text": "60 m/s"})
    assert counts(bar)["refused"]["text"] == ""


def test_undo_and_redo_are_named_and_done(bar: Bar, wind: Session) -> None:
    """The bar says what would be undone, and does it."""
    assert bar.state["undo"] == ""
    wind.enter("V", "60 m/s")
    assert "60 m/s" in bar.state["undo"]
    bar.act({"do": "undo"})
    assert wind.book.readings.given["V"].text == "70 m/s"
    assert "60 m/s" in bar.state["redo"]
    bar.act({"do": "redo"})
    assert wind.book.readings.given["V"].text == "60 m/s"


def test_what_is_refused_is_told_until_the_next_press(bar: Bar) -> None:
    """A mark's name that cannot be one is refused with what would be right."""
    bar.act({"do": "remove_mark", "mark": "C-9"})
    assert bar.state["told"].startswith("Not done: wind has no mark 'C-9'")
    bar.act({"do": "fly"})
    assert bar.state["told"] == "Not done: the bar does not know fly"
    bar.act({"do": "undo"})
    assert "fly" not in bar.state["told"]


def test_an_error_inside_is_shown_and_not_lost(
    bar: Bar, wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whatever goes wrong behind a button stands in the bar."""

    def broken() -> None:
        raise ZeroDivisionError("inside")

    monkeypatch.setattr(wind, "undo", broken)
    bar.act({"do": "undo"})
    assert bar.state["told"] == "Not done: ZeroDivisionError: inside"


def test_the_pages_are_made_and_handed_over(bar: Bar, wind: Session, job: Job) -> None:
    """The PDF of the workbook has the values just typed, and is sent under its name."""
    files: dict[str, bytes] = {}
    said: list[str] = []
    bar.send_file = files.__setitem__
    bar.changed = lambda state: said.append(state["printing"]["doing"])
    wind.enter("V", "60 m/s")
    bar.act({"do": "print", "whole": False})
    (name,) = files
    assert name.endswith("-wind.pdf")
    assert files[name].startswith(b"%PDF")
    assert bar.state["printing"]["told"].startswith(name)
    assert any("of 2: " in text for text in said)
    assert job.record("wind").entries["V"].value == "60 m/s"


def test_a_package_that_cannot_be_made_says_why(bar: Bar, job: Job) -> None:
    """The command's reason stands in the bar, and there is no file."""
    files: dict[str, bytes] = {}
    bar.send_file = files.__setitem__
    (job.folder / "design-basis.ipynb").unlink()
    bar.act({"do": "print", "whole": True})
    assert files == {}
    assert bar.state["printing"]["failed"]
    assert "design-basis" in bar.state["printing"]["told"]


def test_outside_a_job_nothing_is_printed() -> None:
    """Without a job the bar says so, and the buttons do nothing."""
    bar = Bar(opened(WIND, None))
    bar.show(bar.session.statement)
    assert "Not in a job" in bar.state["printing"]["why_not"]
    bar.act({"do": "print", "whole": True})
    assert bar.state["printing"]["told"] == ""


def test_sensitivity_is_shown_and_goes_with_the_values_it_was_found_for(
    bar: Bar, wind: Session
) -> None:
    """Twice the percentage for the speed, in a table and a picture with words."""
    bar.act({"do": "study", "open": True})
    assert bar.state["study"]["result"] == "q"
    bar.act({"do": "sensitivity", "result": "q"})
    html = bar.state["study"]["sensitivity"]["html"]
    assert "2.000 %" in html
    assert "closed form" in html
    assert '<img class="cb-figure" alt="' in html
    wind.enter("V", "61 m/s")
    assert "sensitivity" not in bar.state["study"]


def test_a_value_needed_is_found_and_used_unconfirmed(bar: Bar, wind: Session, job: Job) -> None:
    """The speed for 2.4 kPa is found in closed form; used, it is in force and to be confirmed."""
    bar.act({"do": "study", "open": True})
    bar.act({"do": "needed", "result": "q", "entry": "V", "target": "2.4 kPa"})
    (answer,) = bar.state["study"]["needed"]["answers"]
    assert "closed form" in answer["way"]
    use = answer["uses"][-1]
    assert float(use.split()[0]) == pytest.approx((2400 / 0.613) ** 0.5, rel=1e-9)
    bar.act({"do": "use", "entry": "V", "text": use})
    assert wind.book.readings.given["V"].text == use
    assert job.record("wind").entries["V"].confirmed is None
    bar.act({"do": "needed", "result": "q", "entry": "V", "target": "2.4"})
    assert "Not done" in bar.state["told"]
