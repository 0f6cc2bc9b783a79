"""Beams and trusses that bear on a column, and the beams of the demo job."""

from __future__ import annotations

import shutil
from typing import TYPE_CHECKING

import pytest
from sheets import CODES, Sheet, rows_of
from stacks import BOOK, TYPED, kilonewtons, level, stack

from calcbook.job import Job, template_folder, templates
from calcbook.record import RowRecord
from calcbook.run import Runner, all_items, find_item

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from calcbook.record import Record

    Fill = Callable[..., Sheet]

NAMES = ("D", "Dmin", "L0", "Lu", "Lr", "Wc", "Wt", "Ec", "Et")
BEAM = dict(zip(NAMES, (60, 40, 20, 15, 0, 3, -4, 5, -5), strict=True))
TRUSS = dict(zip(NAMES, (30, 25, 0, 0, 8, 2, -45, 0, 0), strict=True))


def reactions(letter: str, key: str, forces: dict[str, int]) -> dict[str, str]:
    """Return the row of a reaction as it is brought forward."""
    cells = {f"{letter}_{name}": f"{force} kN" for name, force in forces.items()}
    return {"key": key, **cells, f"{letter}_fL": "0.5"}


def two_levels(fill: Fill, *bearings: dict[str, str], code: str = CODES[0], **sets: str) -> Sheet:
    """Return a column with a roof and a floor, and what is listed to bear on it."""
    rows = stack(
        level("Roof", "10 m2", "1 kPa", "roof"), level("Floor", "10 m2", "4 kPa", "office")
    )
    snow = {"S": 0} if code != CODES[0] else {}
    rows |= rows_of("beam_reactions", reactions("H", "B1 A", BEAM | snow))
    rows |= rows_of("truss_reactions", reactions("T", "T1 left", TRUSS | snow))
    rows |= rows_of("bearings", *bearings)
    return fill(BOOK, {**TYPED, **sets}, rows, code=code)


def bearing(
    brings: str, of: str, at: str, count: str = "1", live: str = "unreduced"
) -> dict[str, str]:
    """Return a row of what bears on the column."""
    return {"key": f"{brings} {at}", "brings": brings, "bearing_of": of, "bears_at": at,
            "n_b": count, "live_as": live}  # fmt: skip


def test_a_beam_and_a_truss_come_in_at_their_level(fill: Fill) -> None:
    """Every load case of a reaction is added from its level down, times the number there."""
    plain = two_levels(fill)
    sheet = two_levels(
        fill, bearing("beam", "B1 A", "Floor", "2"), bearing("truss", "T1 left", "Roof")
    )
    wanted = {
        "P_D": [30, 150], "P_Dmin": [25, 105], "P_L0": [0, 40], "P_L": [0, 40], "P_L1": [0, 20],
        "P_Lr": [8, 8], "P_Wc": [2, 8], "P_Wt": [-45, -53], "P_Ec": [0, 10], "P_Et": [0, -10],
    }  # fmt: skip
    for name, more in wanted.items():
        added = [
            a - b
            for a, b in zip(kilonewtons(sheet, "column", name), kilonewtons(plain, "column", name),
                            strict=True)
        ]  # fmt: skip
        assert added == pytest.approx(more), name
    assert sheet.value("W_base") - plain.value("W_base") == pytest.approx(150e3)


@pytest.mark.parametrize("code", CODES)
def test_their_live_load_is_not_reduced_again(fill: Fill, code: str) -> None:
    """It is taken as it comes, whatever the area of the column reduces."""
    for live, force in (("unreduced", 20), ("reduced", 15)):
        listed = bearing("beam", "B1 A", "Floor", live=live)
        sheet, plain = two_levels(fill, listed, code=code), two_levels(fill, code=code)
        added = kilonewtons(sheet, "column", "P_L")[-1] - kilonewtons(plain, "column", "P_L")[-1]
        assert added == pytest.approx(force)
        assert sheet.checks()["No reduction adds load"]


def test_what_may_count_twice_is_cautioned(fill: Fill) -> None:
    """Area from the grid beside a beam, and lateral loads of both frame and beam, are told."""

    def cautions(**sets: str) -> list[str]:
        sheet = two_levels(fill, bearing("beam", "B1 A", "Floor"), **sets)
        return [
            str(i["text"]) for i in sheet.items()
            if i["kind"] == "remark" and i["applies"] and "twice" in i["text"]
        ]  # fmt: skip

    assert not [text for text in cautions() if "unless" in text or "frame analysis" in text]
    assert any("unless the area is typed" in text for text in cautions(area_from="grid"))
    assert any("frame analysis" in text for text in cautions(lateral="typed"))


def test_a_reaction_that_lifts_is_accounted_for(fill: Fill) -> None:
    """A beam whose dead load lifts its support takes as much off the column, and checks hold."""
    lifted = {name: -force if name in ("D", "Dmin") else force for name, force in BEAM.items()}
    rows = stack(level("Floor", "10 m2", "4 kPa", "office"))
    rows |= rows_of("beam_reactions", reactions("H", "B1 A", lifted))
    plain = fill(BOOK, TYPED, rows)
    sheet = fill(BOOK, TYPED, rows | rows_of("bearings", bearing("beam", "B1 A", "Floor")))
    assert sheet.value("N_D") - plain.value("N_D") == pytest.approx(-60e3)
    assert all(sheet.checks().values())


def test_a_bearing_or_a_level_that_is_not_there_is_named(fill: Fill) -> None:
    """The row says what is missing, and a check says that a load found no level."""
    for row, said in (
        (bearing("beam", "B7 A", "Floor"), "there is no row 'B7 A' in beam_end"),
        (bearing("truss", "T1 left", "Attic"), "there is no row 'Attic' in level"),
    ):
        statement = two_levels(fill, row).statement
        columns = (find_item(statement, "borne") or {})["columns"]
        assert any(said in (c["problem"] or [""])[0] for c in columns)
    assert find_item(statement, "N_D")["value"]["si"] > 0.0  # type: ignore[index]
    lost = "What beams and trusses bring comes in at a level that the column carries"
    assert next(i for i in all_items(statement) if i["meaning"] == lost)["satisfied"] is False


# --- the demo job ---------------------------------------------------------------------------


@pytest.fixture
def job(tmp_path: Path) -> Job:
    """Return the demo job with the notebooks of the templates, in a folder of its own."""
    for path in (template_folder() / "demo").glob("*.toml"):
        shutil.copy(path, tmp_path / path.name)
    for name, path in templates().items():
        shutil.copy(path, tmp_path / f"{name}.ipynb")
    return Job.load(tmp_path)


def test_the_beams_of_the_demo_job_close(job: Job) -> None:
    """Every check of the three beams and of their schedule is satisfied."""
    runner = Runner(job)
    marks = job.marks("floor-beam")
    assert marks == ("B1", "B2", "B3")
    for statement in [*(runner.statement("floor-beam", m) for m in marks),
                      runner.statement("beam-schedule")]:  # fmt: skip
        counts = statement["counts"]
        assert (counts["not_satisfied"], counts["undecided"], counts["problems"]) == (0, 0, 0)
        assert counts["unconfirmed"] == 0


def test_a_girder_carries_what_its_beam_brings(job: Job) -> None:
    """The reaction of B2 at line 4 is the load on B3; a change of B2 arrives there."""
    runner = Runner(job)
    before = find_item(runner.statement("floor-beam", "B3"), "M_u")
    brought = find_item(runner.statement("floor-beam", "B3"), "beam_cases")
    source = find_item(runner.statement("floor-beam", "B2"), "reactions")
    assert before is not None
    assert brought is not None
    assert source is not None
    assert brought["columns"][0]["si"] == [source["columns"][0]["si"][1]]
    change(job.record("floor-beam", "B2"), lines=[
        RowRecord("screen", {"what": "typed", "case_q": "dead", "x_3": "1 m", "x_4": "5 m",
                             "w_3": "20 kN/m", "w_4": "20 kN/m"}),
    ])  # fmt: skip
    after = find_item(Runner(Job.load(job.folder)).statement("floor-beam", "B3"), "M_u")
    assert after is not None
    added = (20 - 4.2) * 4 / 2 * 6 / 4 * 1.2e3  # half the load at mid-span of 6 m, times 1.2
    assert after["value"]["si"] - before["value"]["si"] == pytest.approx(added)


def change(record: Record, **schedules: list[RowRecord]) -> None:
    """Write rows into a record, confirmed by nobody."""
    record.change(schedules=schedules)
    record.save()


def test_a_column_of_the_job_takes_a_beam_by_its_mark(job: Job) -> None:
    """The reaction of B3 at D reaches the base of a column that lists it, once."""
    base = find_item(Runner(job).statement(BOOK, "C-7"), "N_D")
    source = find_item(Runner(job).statement("floor-beam", "B3"), "reactions")
    assert base is not None
    assert source is not None
    row = {k: v for k, v in bearing("beam", "B3 D", "Level 2").items() if k != "key"}
    change(job.record(BOOK, "C-7"), bearings=[RowRecord("B3", row)])
    after = find_item(Runner(Job.load(job.folder)).statement(BOOK, "C-7"), "N_D")
    assert after is not None
    brought = source["columns"][0]["si"][1]
    assert after["value"]["si"] - base["value"]["si"] == pytest.approx(brought)


def test_the_beam_schedule_tells_a_beam_without_a_result(job: Job) -> None:
    """A beam that cannot stand has its reason in the rows of its mark; the others are there."""
    record = job.record("floor-beam", "B1")
    rows = [RowRecord(r.key, {**r.cells, "held": "free end" if r.key == "B" else "pinned"})
            for r in record.schedules["supports"]]  # fmt: skip
    change(record, supports=rows)
    statement = Runner(Job.load(job.folder)).statement("beam-schedule")
    found = find_item(statement, "bearings")
    assert found is not None
    dead = next(c for c in found["columns"] if c["name"] == "R_D")
    assert "not available because of solved" in dead["problem"][0]
    assert dead["si"][-1] == pytest.approx(0.0)  # the tip of B3
