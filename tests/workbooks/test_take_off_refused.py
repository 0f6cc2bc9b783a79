"""What the take-off refuses or marks, and that nothing else stops."""

from __future__ import annotations

import shutil
from typing import TYPE_CHECKING, Any

import pytest
from sheets import Sheet, rows_of
from take_off import (
    BOOK,
    BUILDING,
    PITCHED,
    building,
    floor,
    kind,
    layer,
    material,
    member,
    slab,
    wall,
    with_row,
)

from calcbook.errors import CalcbookError
from calcbook.job import Job, template_folder
from calcbook.record import RowRecord
from calcbook.run import Runner, find_item

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    Fill = Callable[..., Sheet]


def raw(sheet: Sheet, schedule: str, name: str) -> dict[str, Any]:
    """Return a column as the statement has it, with or without a problem."""
    found = find_item(sheet.statement, schedule)
    assert found is not None
    return next(dict(c) for c in found["columns"] if c["name"] == name)


@pytest.mark.parametrize(
    ("schedule", "key", "cells", "words"),
    [
        ("layers", "F2", {"t_l": "3 m"}, ["row F2", "3 m", "0 mm to 1 m", "up to 1 m thick"]),
        ("layers", "F2", {"t_l": "200"}, ["row F2", "needs its unit"]),
        ("layers", "F1", {"g_a": "-1.2 kPa"}, ["row F1", "-1.2 kPa", "not negative"]),
        ("layers", "F1", {"g_a": "120 kPa"}, ["row F1", "0 kPa to 50 kPa"]),
        ("layers", "F1", {"g_a": "1.2 kN/m"}, ["row F1", "a pressure"]),
        ("layers", "F2", {"part": "slab"}, ["F2", "self, superimposed, partitions"]),
        ("layers", "F2", {"certain": "maybe"}, ["F2", "yes, no"]),
        ("build_up_types", "F", {"surface": "sloped"}, ["F", "level, pitched, upright"]),
        ("materials", "concrete", {"gamma": "-24 kN/m3"}, ["concrete", "0.1 kN/m3"]),
        ("walls", "W3", {"A_o": "-2 m2"}, ["W3", "0 m2"]),
        ("walls", "W3", {"h_w": "300 m"}, ["W3", "0.1 m to 30 m"]),
        ("members", "T4", {"w_g": "-0.5 kN/m"}, ["T4", "not negative"]),
        ("members", "T4", {"n_m": "0"}, ["T4", "1 to 100000"]),
        ("floors", "Upper", {"g_E": "-0.6 kPa"}, ["Upper", "not negative"]),
        ("floors", "Upper", {"area": "0 m2"}, ["Upper", "1 m2 to 100000 m2"]),
        ("floors", "Upper", {"carried_by": "sky"}, ["Upper", "frame, ground"]),
    ],
)
def test_refused_cells(
    schedule: str, key: str, cells: dict[str, str], words: list[str], run: Fill
) -> None:
    """Three metres of layer, negative weight, absurd sizes: row, cell and remedy are named."""
    with pytest.raises(CalcbookError) as caught:
        run(BOOK, PITCHED, with_row(schedule, key, **cells))
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize(("name", "said"), [
    ("", "nothing is entered to look up in build_up, which has "),
    ("F9", "there is no row 'F9' in build_up"),
])  # fmt: skip
def test_a_level_without_a_build_up(name: str, said: str, fill: Fill) -> None:
    """The level says that its build-up is not there; the other levels have their loads."""
    sheet = fill(BOOK, PITCHED, with_row("floors", "Upper", floor_type=name))
    column = raw(sheet, "floors", "D")
    assert column["si"] == [pytest.approx(1050), None, pytest.approx(6900), pytest.approx(6900)]
    assert column["problem"][1].startswith(f"row Upper: {said}")
    total = find_item(sheet.statement, "W_total")
    assert total is not None
    assert "not available because of W_level" in total["problem"]


def test_a_build_up_without_layers(fill: Fill) -> None:
    """A floor that weighs nothing is no floor: the check is not satisfied."""
    rows = building(build_up_types=[*BUILDING["build_up_types"], kind("X")])
    assert fill(BOOK, PITCHED, rows).checks()["Every build-up has layers"] is False


def test_a_layer_of_a_build_up_that_is_not_listed(fill: Fill) -> None:
    """The layer is named, and the loads of the build-ups that are there stand."""
    rows = building(layers=[*BUILDING["layers"], layer("X1", "X", g_a="1 kPa")])
    sheet = fill(BOOK, PITCHED, rows)
    assert "there is no row 'X'" in raw(sheet, "layers_on_plan", "g_p")["problem"][-1]
    assert sheet.by_key("build_ups", "D_b")["F"] == pytest.approx(6900)


def test_a_material_that_is_not_in_the_design_basis(fill: Fill) -> None:
    """The layer asks for it by name; only what rests on it has no value."""
    sheet = fill(BOOK, PITCHED, with_row("layers", "E1", made_of="adobe"))
    assert "there is no row 'adobe' in material" in str(raw(sheet, "layers", "g_l")["problem"])
    loads = raw(sheet, "build_ups", "D_b")
    assert loads["si"] == [pytest.approx(6900), pytest.approx(1050), None]
    assert "E1" not in str(loads["problem"][:2])


def test_openings_larger_than_the_wall(fill: Fill) -> None:
    """110 m2 of openings in 100 m2 of wall fail a check, and the wall is named."""
    sheet = fill(BOOK, PITCHED, with_row("walls", "W3", A_o="110 m2"))
    assert sheet.checks()["The openings of no wall are larger than the wall"] is False
    smallest = next(e for e in sheet.item("walls")["envelope"] if e["column"] == "A_n")
    assert smallest["row"] == "W3"


def test_a_member_without_section_or_weight(fill: Fill) -> None:
    """A beam that weighs nothing fails a check."""
    rows = building(members=[*BUILDING["members"], member("B9", "Upper", "1", "5 m")])
    assert fill(BOOK, PITCHED, rows).checks()["Every member has a weight"] is False


def test_one_bad_row_of_thirty(fill: Fill) -> None:
    """One wall of thirty is misspelt: it alone is named, the line loads of 29 are there."""
    walls = [wall(f"W{n}", "Upper", "E", "10 m", "2 m") for n in range(30)]
    walls[17]["l_w"] = "10,5 m"
    sheet = fill(BOOK, PITCHED, building(walls=walls))
    loads = raw(sheet, "walls", "w_wall")
    assert [n for n, si in enumerate(loads["si"]) if si is None] == [17]
    assert [n for n, why in enumerate(loads["problem"]) if why] == [17]
    assert "W17" in raw(sheet, "walls", "l_w")["problem"][17]
    assert loads["si"][0] == pytest.approx(8200)
    weights = raw(sheet, "level_weights", "W_walls")
    assert weights["si"] == [0.0, None, 0.0, 0.0]
    assert "W_wall" in weights["problem"][1]


def test_levels_out_of_order_and_twice(run: Fill) -> None:
    """Levels from the ground up, and two of one name, are refused by name."""
    turned = building(floors=BUILDING["floors"][::-1])
    with pytest.raises(CalcbookError, match="out of order"):
        run(BOOK, PITCHED, turned)
    twice = building(floors=[floor("Roof", "9 m", "R"), floor("Roof", "6 m", "F")])
    with pytest.raises(CalcbookError, match="two rows are called 'Roof'"):
        run(BOOK, PITCHED, twice)


def test_no_walls_and_no_members_are_said(fill: Fill) -> None:
    """A take-off without a wall says that the schedule has no rows; the loads per area stand."""
    sheet = fill(BOOK, PITCHED, {**building(), "walls": []})
    item = find_item(sheet.statement, "walls")
    assert item is not None
    assert item["problem"] == "the schedule has no rows"
    assert sheet.by_key("build_ups", "D_b")["F"] == pytest.approx(6900)


def test_thick_fill_is_several_layers(fill: Fill) -> None:
    """One metre is accepted; it is the limit, not beyond it."""
    rows = building(
        materials=[material("concrete", "24 kN/m3"), material("steel", "77 kN/m3")],
        layers=[slab("F1", "F", "1 m"), slab("R1", "R", "10 mm"), slab("E1", "E", "100 mm")],
    )
    assert fill(BOOK, PITCHED, rows).by_key("build_ups", "D_b")["F"] == pytest.approx(24e3)


# --- in a job --------------------------------------------------------------------------------


@pytest.fixture
def job(tmp_path: Path) -> Job:
    """Return a copy of the demo job with the design basis and the take-off."""
    folder = tmp_path / "job"
    folder.mkdir()
    for name in ("design-basis", BOOK):
        for suffix in (".ipynb", ".toml"):
            shutil.copy(template_folder() / "demo" / f"{name}{suffix}", folder)
    (folder / "job.toml").write_text(
        f"format = 1\nworkbooks = ['design-basis', '{BOOK}']\n", encoding="utf-8"
    )
    return Job.load(folder)


def take_off(job: Job) -> Sheet:
    """Return the take-off of a job as it is on disk now."""
    runner = Runner(Job.load(job.folder))
    return Sheet(runner.statement(BOOK), runner.books[BOOK, None][0])


def levels_changed(job: Job, change: Callable[[list[RowRecord]], list[RowRecord]]) -> Sheet:
    """Return the take-off after the levels of the design basis were changed."""
    record = job.record("design-basis")
    record.change(schedules={"levels": change(list(record.schedules["levels"]))})
    record.save()
    return take_off(job)


def test_a_level_that_is_gone(job: Job) -> None:
    """Level 4 is taken out of the design basis: the take-off names the row it still has."""
    sheet = levels_changed(job, lambda rows: [r for r in rows if r.key != "Level 4"])
    item = find_item(sheet.statement, "floors")
    assert item is not None
    assert item["problem"].startswith("row 'Level 4' is not in design-basis.levels")


def test_a_level_that_is_new(job: Job) -> None:
    """A mezzanine is put in: the take-off asks for its row."""
    new = RowRecord("Mezzanine", {"elevation": "6 m", "use": "store", "area": "90 m2"})
    sheet = levels_changed(job, lambda rows: [*rows[:3], new, *rows[3:]])
    item = find_item(sheet.statement, "floors")
    assert item is not None
    told = "row 'Mezzanine' of design-basis.levels is missing here: enter its cells"
    assert item["problem"] == told


def test_a_level_that_moved_moves_the_take_off(job: Job) -> None:
    """The roof 400 mm up: the elevation arrives, the weights typed by length stay, none is lost."""
    before = take_off(job)
    cells = {"elevation": "16.0 m", "use": "roof", "area": "450 m2"}
    sheet = levels_changed(job, lambda rows: [RowRecord("Roof", cells), *rows[1:]])
    assert sheet.by_key("floors", "elevation")["Roof"] == pytest.approx(16.0)
    assert sheet.by_key("floors", "h_s")["Roof"] == pytest.approx(4.2)
    lost = before.by_key("floors", "D")["Roof"] * (477.36 - 450)
    assert before.value("W_total") - sheet.value("W_total") == pytest.approx(lost)


def test_a_flat_roof_takes_the_slope_out(job: Job) -> None:
    """The design basis turns to a flat roof: no slope, no ridge, and the roof weighs its plan."""
    record = job.record("design-basis")
    entry = record.entries["roof"]
    record.change(entries={"roof": type(entry)("flat", entry.source)})
    record.save()
    sheet = take_off(job)
    assert sheet.by_key("layers_on_plan", "g_p")["R1.1"] == pytest.approx(260)
    assert all(sheet.checks().values())


def test_materials_come_from_the_design_basis(job: Job) -> None:
    """Concrete of 25 kN/m3 in the design basis makes the slab of 200 mm weigh 5.0 kPa."""
    record = job.record("design-basis")
    rows = [
        RowRecord(r.key, {**r.cells, "gamma": "25 kN/m3"}) if r.key == "reinforced concrete" else r
        for r in record.schedules["materials"]
    ]
    record.change(schedules={"materials": rows})
    record.save()
    sheet = take_off(job)
    assert sheet.by_key("layers", "g_l")["F1.2"] == pytest.approx(5000)


def test_rows_of_an_unknown_schedule(run: Fill) -> None:
    """A schedule the workbook does not have is refused with the nearest name."""
    with pytest.raises(CalcbookError, match="did you mean 'walls'"):
        run(BOOK, PITCHED, rows_of("wals", {"key": "W"}))
