"""Typing into the fields of a section: what is taken, what is refused, what is written."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import BASIS, WIND, make_job, opened
from widgets_in import button, field, marks, notices, text

from calcbook.errors import CalcbookError

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.job import Job
    from calcbook.live import Session

SPEED = "Basic wind speed"


def result(session: Session, name: str) -> float:
    """Return a result of the session's statement in SI."""
    return next(r["value"]["si"] for r in session.statement["results"] if r["name"] == name)


def test_the_same_speed_in_another_unit_changes_no_result(wind: Session) -> None:
    """252 km/h where it said 70 m/s: same pressure, and the unit of the workbook beside it."""
    before = result(wind, "q")
    field(wind, "Site", SPEED).value = "252 km/h"
    assert result(wind, "q") == before == pytest.approx(0.613 * 70**2)
    assert "= 70" in text(wind, "Site")
    assert "m/s" in text(wind, "Site")


def test_a_new_value_updates_every_section_shown(wind: Session) -> None:
    """A speed typed in the first section changes the line, the table and the check elsewhere."""
    field(wind, "Site", SPEED).value = "90 m/s"
    assert result(wind, "q") == pytest.approx(0.613 * 90**2)
    assert "4.965 kPa" in text(wind, "Pressure")
    assert "NOT SATISFIED" in text(wind, "Pressure")
    assert "71.5" in text(wind, "Floors")


def test_a_bare_number_takes_the_unit_beside_the_field(wind: Session) -> None:
    """80 in a field that shows m/s is stored as 80 m/s and shown as 80."""
    speed = field(wind, "Site", SPEED)
    assert speed.value == "70"
    speed.value = "80"
    assert wind.job.record("wind").entries["V"].value == "80 m/s"
    assert speed.value == "80"


def test_a_bare_number_over_another_unit_is_refused(wind: Session) -> None:
    """With 252 km/h in force, 260 could be either unit: it is refused, and 252 km/h stands."""
    speed = field(wind, "Site", SPEED)
    speed.value = "252 km/h"
    speed.value = "260"
    assert wind.job.record("wind").entries["V"].value == "252 km/h"
    assert "Not taken" in text(wind, "Site")


@pytest.mark.parametrize(
    ("typed", "reason"),
    [
        ("1,5 m", "comma"), ("70 m", "length"), ("7 m/s", "outside the range"), ("nan", "nan"),
        ("fast", "number"), ("1 234 ft/s", "1234 ft/s"),
    ],
)  # fmt: skip
def test_a_refusal_says_why_and_the_last_good_value_stands(
    wind: Session, typed: str, reason: str
) -> None:
    """What cannot be read is explained beside the field, stays in it, and changes nothing."""
    before = wind.job.record("wind").digest(), result(wind, "q")
    speed = field(wind, "Site", SPEED)
    speed.value = typed
    told = text(wind, "Site")
    assert "Not taken:" in told
    assert reason in told
    assert "70 m/s stays in force" in told
    assert speed.value == typed
    assert (wind.job.record("wind").digest(), result(wind, "q")) == before
    speed.value = "75"
    assert "Not taken" not in text(wind, "Site")
    assert result(wind, "q") == pytest.approx(0.613 * 75**2)


def test_a_refused_text_survives_a_change_elsewhere(wind: Session) -> None:
    """A text kept for correction is not overwritten when another field is typed in."""
    speed = field(wind, "Site", SPEED)
    speed.value = "1,5 m"
    field(wind, "Site", "Exposure").value = "B"
    assert speed.value == "1,5 m"
    assert "Not taken" in text(wind, "Site")


def test_a_choice_that_is_refused_gives_its_reason(wind: Session) -> None:
    """An option that is not covered is listed, and picking it says why it is refused."""
    field(wind, "Site", "Exposure").value = "E"
    assert "not built on" in text(wind, "Site")
    assert "C: open country stays in force" in text(wind, "Site")
    assert "exposure" not in wind.job.record("wind").entries


def test_a_choice_decides_whether_a_section_applies(wind: Session) -> None:
    """A section whose condition no longer holds says so and why, and comes back."""
    exposure = field(wind, "Site", "Exposure")
    exposure.value = "B"
    assert "not applied" in text(wind, "Open country")
    assert "No shielding" not in text(wind, "Open country")
    exposure.value = "C"
    assert "No shielding" in text(wind, "Open country")


def test_typing_confirms_for_this_job(wind: Session) -> None:
    """With job number and initials in the design basis, a typed value is confirmed by them."""
    assert marks(wind, "Site")[0].description == "not confirmed"
    field(wind, "Site", SPEED).value = "72"
    entry = wind.job.record("wind").entries["V"]
    assert (entry.confirmed.job, entry.confirmed.by, entry.confirmed.value) == (
        "MC-0417", "RA", "72 m/s",
    )  # fmt: skip
    assert marks(wind, "Site")[0].value
    assert marks(wind, "Site")[0].description == "confirmed RA"


def test_another_value_does_not_keep_the_source(wind: Session) -> None:
    """The source belonged to the value it was given for; the same value typed again keeps it."""
    field(wind, "Site", SPEED).value = "70.0"
    assert wind.job.record("wind").entries["V"].source == ""
    assert "source not given" in text(wind, "Site")
    again = opened(WIND, make_job(wind.job.folder.parent / "again"))
    marks(again, "Site")[0].value = True
    assert again.job.record("wind").entries["V"].source == "map"
    again.enter("V", "70 m/s")
    assert again.job.record("wind").entries["V"].source == "map"


def test_no_mark_stands_beside_a_refused_text(wind: Session) -> None:
    """What is seen in the field is not what was confirmed; the mark comes back with a value."""
    speed = field(wind, "Site", SPEED)
    speed.value = "72"
    count = len(marks(wind, "Site"))
    speed.value = "7 m/s"
    assert len(marks(wind, "Site")) == count - 1
    field(wind, "Site", "Exposure").value = "B"
    assert len(marks(wind, "Site")) == count - 1
    speed.value = "73"
    assert len(marks(wind, "Site")) == count


def test_a_refused_value_of_the_record_is_not_called_confirmed(wind: Session) -> None:
    """A confirmed value that is out of range is a problem, and nothing says it is confirmed."""
    field(wind, "Site", SPEED).value = "72"
    path = wind.job.record_path("wind")
    path.write_text(path.read_text(encoding="utf-8").replace("72 m/s", "7 m/s"), encoding="utf-8")
    told = text(opened(WIND, wind.job), "Site")
    assert "outside the range" in told
    assert "confirmed RA" not in told


def test_ticking_confirms_the_value_that_stands(wind: Session) -> None:
    """Ticking a template's value writes it confirmed; taking the tick away undoes it."""
    mark = marks(wind, "Site")[0]
    mark.value = True
    assert wind.job.record("wind").entries["V"].confirmed.by == "RA"
    mark.value = False
    assert wind.job.record("wind").entries["V"].confirmed is None


def test_without_initials_nothing_is_confirmed(tmp_path: Path) -> None:
    """Typed values are kept unconfirmed, the session says why, and a tick is refused."""
    session = opened(WIND, make_job(tmp_path / "job", signed=False))
    assert "no job number and no initials" in session.unsigned
    field(session, "Site", SPEED).value = "72"
    assert session.job.record("wind").entries["V"].confirmed is None
    mark = marks(session, "Site")[0]
    mark.value = True
    assert not mark.value
    assert "who confirms is not known yet" in text(session, "Site")


def test_typing_the_job_number_makes_it_count(tmp_path: Path) -> None:
    """In the design basis itself the number and initials just typed confirm what follows."""
    session = opened(BASIS, make_job(tmp_path / "job", signed=False))
    field(session, "Job", "Job number").value = "MC-0500"
    field(session, "Job", "Prepared by (initials)").value = "LT"
    field(session, "Height", "Height of the building").value = "16.2"
    entry = session.job.record("design-basis").entries["h"]
    assert (entry.value, entry.confirmed.job, entry.confirmed.by) == ("16.2 m", "MC-0500", "LT")


def test_a_new_unit_system_asks_for_a_fresh_run(job: Job) -> None:
    """Changing the units says to run all cells again, and opening again uses them."""
    session = opened(BASIS, job)
    field(session, "Job", "Units").value = "US"
    assert "Run all cells again to apply." in text(session, "Job")
    again = opened(BASIS, job)
    assert again.book.system == "US"
    assert "Run all cells again" not in text(again, "Job")
    assert "ft" in text(again, "Height")


def test_carried_values_are_shown_with_their_origin(wind: Session) -> None:
    """A value of the design basis is brought forward, not typed."""
    told = text(wind, "Site")
    assert "15.6" in told
    assert "from design basis" in told
    with pytest.raises(IndexError):
        field(wind, "Site", "Mean height")


def test_a_change_of_the_source_is_seen(wind: Session, job: Job) -> None:
    """When the design basis changed on disk, the next change here carries the new value."""
    basis = job.record("design-basis")
    basis.change(entries={"h": type(basis.entries["job_number"])("18 m")})
    basis.save()
    field(wind, "Site", SPEED).value = "71"
    assert "18" in text(wind, "Site")


def test_outside_a_job_nothing_is_written(tmp_path: Path) -> None:
    """Alone, a workbook computes what is typed; the bar says that nothing is written: so it is."""
    session = opened(WIND, None)
    field(session, "Site", SPEED).value = "80"
    field(session, "Site", "Mean height").value = "9 m"
    assert result(session, "q") == pytest.approx(0.613 * 80**2)
    assert "nothing is written" in notices(session)
    assert not list(tmp_path.rglob("*.toml"))
    assert marks(session, "Site") == []


def test_a_fallback_typed_over_can_be_taken_back(job: Job) -> None:
    """A fallback that was typed is replaced by the carried value on request."""
    record = job.record("wind")
    record.change(entries={"h": type(job.record("design-basis").entries["job_number"])("9 m")})
    record.save()
    session = opened(WIND, job)
    assert field(session, "Site", "Mean height").value == "9"
    button(session, "Site", "take the carried value").click()
    assert "h" not in job.record("wind").entries
    assert "15.6" in text(session, "Site")


def test_a_change_elsewhere_of_another_entry_is_kept(wind: Session, job: Job) -> None:
    """Two kernels on one record: both changes stand, and the bar says it read again."""
    other = opened(WIND, job)
    field(other, "Site", "Exposure").value = "B"
    field(wind, "Site", SPEED).value = "81"
    entries = job.record("wind").entries
    assert (entries["V"].value, entries["exposure"].value) == ("81 m/s", "B")
    assert "changed elsewhere" in notices(wind)
    assert field(wind, "Site", "Exposure").value == "B"


def test_a_change_elsewhere_of_the_same_entry_is_not_overwritten(wind: Session, job: Job) -> None:
    """What another kernel typed stands on disk, what was typed here in memory; one is asked."""
    other = opened(WIND, job)
    field(other, "Site", SPEED).value = "90"
    speed = field(wind, "Site", SPEED)
    speed.value = "81"
    assert job.record("wind").entries["V"].value == "90 m/s"
    assert speed.value == "81"
    assert "Here: 81 m/s. On disk: 90 m/s." in wind.asks[0]["text"]


def test_a_record_that_cannot_be_written_keeps_the_typed_value(
    wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A full disk is told; what was typed stays in force, and the next change writes it."""

    def full(*_: object, **__: object) -> None:
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as patch:
        patch.setattr("os.replace", full)
        patch.setattr("os.write", full)
        field(wind, "Site", SPEED).value = "81"
    assert "Not taken" not in text(wind, "Site")
    assert result(wind, "q") == pytest.approx(0.613 * 81**2)
    assert "disk is full" in wind.unwritten
    field(wind, "Site", "Exposure").value = "B"
    assert wind.unwritten == ""
    assert wind.job.record("wind").entries["V"].value == "81 m/s"


def test_a_damaged_record_is_told_and_left_alone(wind: Session, job: Job) -> None:
    """A record broken on disk while open is reported with its place and not overwritten."""
    path = job.record_path("wind")
    path.write_text("format = 1\nworkbook = \n", encoding="utf-8")
    speed = field(wind, "Site", SPEED)
    speed.value = "81"
    assert speed.value == "81"
    assert "line 2" in wind.unwritten
    assert path.read_text(encoding="utf-8") == "format = 1\nworkbook = \n"


def test_an_error_in_a_callback_is_shown_at_the_section(
    wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Something unforeseen while computing is shown where it was set off, never lost."""

    def broken() -> None:
        raise ZeroDivisionError("a solver tripped")

    monkeypatch.setattr(wind.book, "statement", broken)
    field(wind, "Site", SPEED).value = "81"
    assert "ZeroDivisionError: a solver tripped" in text(wind, "Site")


def test_opening_again_retires_the_old_views(job: Job) -> None:
    """Views of a workbook that was opened again say so and take nothing more."""
    session = opened(WIND, job)
    old = dict(session.views)
    session.retire()
    session.views = old
    assert "opened again" in text(session, "Site")
    with pytest.raises(IndexError):
        field(session, "Site", SPEED)


def test_a_broken_job_is_explained(job: Job) -> None:
    """A workbook whose record is damaged is not opened; the message names the file."""
    job.record_path("wind").write_text("format = 9\n", encoding="utf-8")
    with pytest.raises(CalcbookError, match=r"wind\.toml"):
        opened(WIND, job)
