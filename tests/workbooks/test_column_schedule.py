"""The column schedule of the demo job: what closes, and what does not when a mark is wrong."""

from __future__ import annotations

import shutil
import time
from typing import TYPE_CHECKING, Any

import pytest

from calcbook.commands import review
from calcbook.job import Job, template_folder, templates
from calcbook.pack.package import pack_job
from calcbook.record import Confirmation, EntryRecord, Record
from calcbook.run import Runner, find_item

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

COLUMNS, SCHEDULE, BASIS = "column-accumulation", "column-schedule", "design-basis"
Plain = dict[str, Any]
CLOSING = (
    "The tributary areas of all columns are not more than the plan",
    "No part of the plan is without a column",
    "The weight of the take-off is found at the bases, within 1 %",
)


@pytest.fixture
def job(tmp_path: Path) -> Job:
    """Return the demo job with the notebooks of the templates, in a folder of its own."""
    for path in (template_folder() / "demo").glob("*.toml"):
        shutil.copy(path, tmp_path / path.name)
    for name, path in templates().items():
        shutil.copy(path, tmp_path / f"{name}.ipynb")
    return Job.load(tmp_path)


def enter(job: Job, workbook: str, mark: str | None, **values: str) -> None:
    """Write entries into a record, confirmed by nobody."""
    record = job.record(workbook, mark)
    record.change(entries={name: EntryRecord(text) for name, text in values.items()})
    record.save()


def run(job: Job, workbook: str = SCHEDULE, mark: str | None = None) -> Plain:
    """Run a workbook of the job as it is now."""
    return Runner(Job.load(job.folder)).statement(workbook, mark)


def column(statement: Plain, schedule: str, name: str) -> Plain:
    """Return a column of a schedule."""
    item = find_item(statement, schedule)
    assert item is not None
    found: Plain = next(c for c in item["columns"] if c["name"] == name)
    return found


def verdicts(statement: Plain) -> dict[str, bool | None]:
    """Return the verdict of each check, by what it requires."""
    return {str(c["meaning"]): c["satisfied"] for c in review.checks(statement)}


def test_demo_columns_close(job: Job) -> None:
    """Thirteen marks, 24 columns: the plan's 477.36 m2, and the weight of the take-off exactly.

    Over the take-off comes what beams B2 and B3 bring beside floors: screen, beam B2, canopy with
    its end of B3 by the lever, 6.75/6 of it to D, and 0.2 m of B3 within the face of the column.
    """
    statement = run(job)
    assert find_item(statement, "marks")["rows"] == [f"C-{n}" for n in range(1, 14)]  # type: ignore[index]
    assert column(statement, "marks", "A_n")["total"]["si"] == pytest.approx(477.36)
    found = verdicts(statement)
    assert all(found[text] is True for text in CLOSING)
    weight = find_item(run(job, "dead-load-take-off"), "W_bases")
    assert weight is not None
    total = column(statement, "marks", "W_n")["total"]["si"]
    b3 = 0.3 * 0.4 * 23.6e3
    over = 4.2e3 * 4 + 0.25 * 0.25 * 23.6e3 * 6 + (2.4e3 + b3) * 1.5 * 6.75 / 6 + 0.2 * b3
    assert total - over == pytest.approx(weight["value"]["si"], rel=1e-9)


def test_governing_combination_of_every_mark(job: Job) -> None:
    """The factored load of the table is that of the mark, by the combination it names."""
    statement = run(job)
    named = column(statement, "base_loads", "U_most")["texts"]
    for place, mark in enumerate(("C-1", "C-2", "C-3")):
        own = run(job, COLUMNS, mark)
        strength = find_item(own, "strength")
        assert strength is not None
        row = strength["rows"].index(named[place])
        force = next(c for c in strength["columns"] if c["name"] == "U")["si"]
        assert force[row] == max(force)
        assert column(statement, "base_loads", "N_u")["si"][place] == force[row]


def test_two_columns_at_one_place_are_both_named(job: Job) -> None:
    """C-2 moved to where C-1 stands: the row names both, the areas are too small by the plan."""
    enter(job, COLUMNS, "C-2", at_x="1")
    statement = run(job)
    told = column(statement, "marks", "at_y")["problem"]
    assert told[1] == "C-2 is at 1-A, where C-1 is already"
    assert not any(told[:1] + told[2:])
    assert verdicts(statement)[CLOSING[1]] is False
    figure = next(i for p in statement["parts"] for i in p.get("items", ()) if "figure" in i)
    assert "C-1 and C-2 are at one place, 1-A" in figure["alt"]


def test_area_sum_over_the_plan(job: Job) -> None:
    """A third column alike where there are two: more area than the plan has is not accepted."""
    enter(job, COLUMNS, "C-5", n_alike="3")
    found = verdicts(run(job))
    assert found[CLOSING[0]] is False
    assert found[CLOSING[2]] is False


def test_mark_outside_the_grid(job: Job) -> None:
    """A mark at a line that the grid does not have is named in the table, others keep theirs."""
    enter(job, COLUMNS, "C-4", at_x="7")
    statement = run(job)
    told = column(statement, "marks", "A_T")["problem"]
    assert [bool(t) for t in told] == [n == 3 for n in range(13)]
    assert "C-4" in told[3]
    assert column(statement, "base_loads", "N_D")["si"][0] > 0
    assert any("C-4" in text for text in review.troubles(statement))


def test_level_that_no_longer_exists(job: Job) -> None:
    """A level renamed in the design basis alone: take-off and columns say which row is gone."""
    record = job.record(BASIS)
    rows = record.schedules["levels"]
    rows[1].key = "Level 4a"
    record.change(schedules={"levels": rows})
    record.save()
    said = "\n".join(review.troubles(run(job, "dead-load-take-off")))
    assert "Level 4" in said
    told = "\n".join(review.troubles(run(job, COLUMNS, "C-1")))
    assert "dead-load-take-off.floors" in told


def test_record_of_another_job_is_unconfirmed(job: Job) -> None:
    """Copied into another job every entry and row of the columns counts as not confirmed."""
    assert review.unconfirmed(run(job, COLUMNS, "C-3")) == []
    enter(job, BASIS, None, job_number="MC-0999")
    found = " ".join(review.unconfirmed(run(job, COLUMNS, "C-3")))
    for name in ("at_x", "n_alike", "member", "levels", "frame", "lines", "gamma_c"):
        assert name in found


def test_code_set_switched_after_filling(job: Job) -> None:
    """ASCE: the rule of the other code is kept and listed as not used; a pack leaves none stale."""
    for n in range(2, 14):
        job.record_path(COLUMNS, f"C-{n}").unlink()
    pack_job(Job.load(job.folder))
    assert run(job)["counts"]["stale"] == 0
    enter(job, BASIS, None, code_set="ASCE 7-16")
    runner = Runner(Job.load(job.folder))
    statement = runner.statement(COLUMNS, "C-1")
    assert runner.books[COLUMNS, "C-1"][0].not_used() == ["rule"]
    assert job.record(COLUMNS, "C-1").entries["rule"].value == "influence area"
    assert not review.troubles(statement)
    assert runner.statement(SCHEDULE)["counts"]["stale"] > 0
    statements = pack_job(Job.load(job.folder)).statements
    assert sum(s["counts"]["stale"] for s in statements) == 0
    assert all(s["code_set"]["name"] == "ASCE 7-16" for s in statements[1:])
    last = next(s for s in statements if s["workbook"] == SCHEDULE)
    heads = [c["name"] for c in find_item(last, "base_loads")["columns"]]  # type: ignore[index]
    assert "N_S" in heads


def test_raised_level_moves_every_column(job: Job) -> None:
    """The roof 400 mm up in one place: each column is heavier by its own section there."""
    before = [run(job, COLUMNS, mark) for mark in ("C-1", "C-5")]
    record = job.record(BASIS)
    record.schedules["levels"][0].cells["elevation"] = "16.0 m"
    record.change(schedules={"levels": record.schedules["levels"]})
    record.save()
    for old, mark in zip(before, ("C-1", "C-5"), strict=True):
        gains = [
            find_item(s, "N_D")["value"]["si"]  # type: ignore[index]
            for s in (old, run(job, COLUMNS, mark))
        ]
        assert gains[1] - gains[0] == pytest.approx(23600 * 0.4 * 0.4 * 0.4, rel=1e-6)


@pytest.mark.slow
def test_two_hundred_marks(job: Job, capsys: pytest.CaptureFixture[str]) -> None:
    """200 marks are gathered into one table, those at one place named; the time is printed."""
    text = job.record_path(COLUMNS, "C-5").read_text(encoding="utf-8")
    for n in range(13, 201):
        path = job.record_path(COLUMNS, f"C-{n}")
        path.write_text(text.replace('mark = "C-5"', f'mark = "C-{n}"'), encoding="utf-8")
    start = time.perf_counter()
    statement = run(job)
    seconds = time.perf_counter() - start
    with capsys.disabled():
        print(f"\n200 column marks gathered in {seconds:.1f} s")  # noqa: T201
    assert len(find_item(statement, "marks")["rows"]) == 200  # type: ignore[index]
    assert sum(map(bool, column(statement, "marks", "at_y")["problem"])) == 188
    assert verdicts(statement)[CLOSING[0]] is False


def test_typing_again_confirms(job: Job) -> None:
    """A record confirmed for this job by RA is listed with nothing to confirm."""
    record = Record.load(job.record_path(COLUMNS, "C-1"), COLUMNS, "C-1")
    found = record.entries["c_x"].confirmed
    assert found == Confirmation("1.0", "MC-0417", "RA", "2026-10-02")


def test_outside_a_job_the_table_stands_on_its_own(fill: Callable[..., Any]) -> None:
    """The template's four marks, 12 columns, close on their plan and weight, in both codes."""
    for code in ("NSCP 2015", "ASCE 7-16"):
        for units in ("SI", "US"):
            sheet = fill(SCHEDULE, code=code, units=units)
            assert all(sheet.checks().values())
            assert sheet.value("N_most") == pytest.approx(602e3)
