"""The design basis workbook against figures worked by hand."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import pytest
from sheets import CODES, Sheet, rows_of

from calcbook.errors import CalcbookError
from calcbook.job import Job, templates
from calcbook.run import Filling, Runner

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    Fill = Callable[..., Sheet]

BASIS = "design-basis"
TOWER = [
    {"key": "Roof", "elevation": "17.8 m", "use": "roof", "area": "280 m2"},
    {"key": "Level 5", "elevation": "14.4 m", "use": "office", "area": "300 m2"},
    {"key": "Level 4", "elevation": "11.0 m", "use": "office", "area": "300 m2"},
    {"key": "Level 3", "elevation": "7.6 m", "use": "office", "area": "300 m2"},
    {"key": "Level 2", "elevation": "4.2 m", "use": "shop", "area": "320 m2"},
    {"key": "Ground", "elevation": "0 m", "use": "shop", "area": "320 m2"},
    {"key": "Basement", "elevation": "-3.3 m", "use": "garage", "area": "320 m2"},
]
GRID = {
    **rows_of("grid_x", *({"x": x} for x in ("0 m", "7 m", "14.5 m", "21.5 m"))),
    **rows_of("grid_y", *({"y": y} for y in ("-6 m", "0 m", "8.5 m"))),
}


@pytest.fixture(scope="module")
def tower(fill: Fill) -> Sheet:
    """Return the design basis of a five-storey building with a basement."""
    return fill(BASIS, {"o_x": "0.25 m", "o_y": "0.4 m"}, {**rows_of("levels", *TOWER), **GRID})


def test_storey_heights(tower: Sheet) -> None:
    """Each storey reaches from the level below; the lowest level has none."""
    found = tower.by_key("levels", "h_s")
    assert list(found.values()) == pytest.approx([3.4, 3.4, 3.4, 3.4, 4.2, 3.3, 0.0], abs=1e-9)
    assert sum(found.values()) == pytest.approx(17.8 + 3.3)


def test_extent_in_height(tower: Sheet) -> None:
    """The eaves are the highest level, the base the lowest; areas add up to 2140 m2."""
    assert tower.value("h_eave") == pytest.approx(17.8)
    assert tower.value("h_base") == pytest.approx(-3.3)
    area = next(c for c in tower.item("levels")["columns"] if c["name"] == "area")
    assert area["total"]["si"] == pytest.approx(2140.0)


def test_plan(tower: Sheet) -> None:
    """21.5 + 2 x 0.25 by 14.5 + 2 x 0.4 m: 22.0 x 15.3 = 336.6 m2."""
    assert tower.value("L_x") == pytest.approx(22.0)
    assert tower.value("L_y") == pytest.approx(15.3)
    assert tower.value("A_plan") == pytest.approx(336.6)
    assert all(tower.checks().values())


def test_floor_larger_than_the_plan(fill: Fill) -> None:
    """A floor of 340 m2 on a plan of 336.6 m2 does not satisfy the check; 336.6 m2 does."""
    for area, satisfied in (("340 m2", False), ("336.6 m2", True)):
        levels = [TOWER[0], {**TOWER[1], "area": area}, *TOWER[2:]]
        sets = {"o_x": "0.25 m", "o_y": "0.4 m"}
        sheet = fill(BASIS, sets, {**rows_of("levels", *levels), **GRID})
        assert sheet.checks()["No floor is larger than the plan"] is satisfied


def test_building_without_height(fill: Fill) -> None:
    """One level alone gives a building without a height: the check says so."""
    sheet = fill(BASIS, {}, rows_of("levels", TOWER[5]))
    assert sheet.checks()["The building has a height"] is False


def test_flat_roof(tower: Sheet) -> None:
    """A flat roof has no slope and no rise; its mean height is that of the eaves."""
    assert (tower.value("theta"), tower.value("r_r")) == (0.0, 0.0)
    assert tower.value("h_m") == pytest.approx(17.8)


@pytest.mark.parametrize(
    ("ridge", "pitch", "rise", "mean"),
    [
        ("X", "45 deg", 6.3, 7.2 + 3.15),
        ("Y", "45 deg", 9.3, 7.2 + 4.65),
        ("X", "10 deg", 6.3 * 0.1763269807, 7.2),
        ("X", "10.001 deg", 6.3 * 0.1763449769, 7.2 + 6.3 * 0.1763449769 / 2),
        ("Y", "26.56505118 deg", 4.65, 7.2 + 2.325),
        ("X", "1 deg", 6.3 * 0.0174550649, 7.2),
    ],
)
def test_gable_roof(ridge: str, pitch: str, rise: float, mean: float, fill: Fill) -> None:
    """Rise: half the width across the ridge by the slope; over 10 degrees half of it counts."""
    sheet = fill(BASIS, {"roof": "gable", "ridge": ridge, "pitch": pitch})
    assert sheet.value("r_r") == pytest.approx(rise, rel=1e-8)
    assert sheet.value("h_m") == pytest.approx(mean, rel=1e-8)
    assert sheet.value("theta") == pytest.approx(math.radians(float(pitch.removesuffix(" deg"))))


@pytest.mark.parametrize("code", CODES)
def test_category_belongs_to_the_code(code: str, fill: Fill) -> None:
    """Occupancy category under NSCP 2015, risk category under ASCE 7-16, never both."""
    statement = fill(BASIS, code=code).statement
    shown = {i["name"] for part in statement["parts"] for i in part["items"]}
    assert ("occupancy_category" in shown) is (code == "NSCP 2015")
    assert ("risk_category" in shown) is (code == "ASCE 7-16")


def test_us_customary_units(fill: Fill) -> None:
    """A building typed in feet: 60 ft and 2 x 1 ft 6 in are 63 ft, and shown in feet."""
    grid = rows_of("grid_x", {"key": "1", "x": "0 ft"}, {"key": "2", "x": "60 ft"})
    sheet = fill(BASIS, {"o_x": "1 ft 6 in"}, grid, units="US")
    assert sheet.value("L_x") == pytest.approx(63 * 0.3048)
    assert sheet.item("L_x")["value"]["unit"] == "ft"
    assert sheet.item("L_x")["value"]["value"] == pytest.approx(63.0)


@pytest.mark.parametrize(
    ("sets", "rows", "words"),
    [
        ({"pitch": "75 deg", "roof": "gable"}, {}, ["pitch", "1 deg to 60 deg", "tabulated"]),
        ({"pitch": "-5 deg", "roof": "gable"}, {}, ["pitch", "1 deg to 60 deg"]),
        ({"o_x": "-1 m"}, {}, ["o_x", "0 m to 10 m"]),
        ({"roof": "hip"}, {}, ["roof", "flat, gable"]),
        ({"code_set": "NSCP 2010"}, {}, ["NSCP 2015"]),
        ({}, rows_of("levels", *TOWER[::-1]), ["levels", "out of order", "highest first"]),
        ({}, rows_of("levels", TOWER[0], TOWER[0]), ["levels", "two rows", "Roof"]),
        ({}, rows_of("levels", {**TOWER[0], "area": "0 m2"}), ["area", "1 m2 to 100000 m2"]),
        ({}, rows_of("levels", {**TOWER[0], "area": "280 m"}), ["area", "an area"]),
        ({}, rows_of("levels", {**TOWER[0], "elevation": "17,8 m"}), ["elevation", "17.8 m"]),
        (
            {},
            rows_of("grid_x", {"key": "1", "x": "6 m"}, {"key": "2", "x": "0 m"}),
            ["x", "out of order", "lowest first"],
        ),
        ({}, {"levels": []}, ["levels", "no rows"]),
    ],
)
def test_refused(
    sets: dict[str, str], rows: dict[str, list[object]], words: list[str], run: Fill
) -> None:
    """The message names the entry or column and what would be right."""
    with pytest.raises(CalcbookError) as caught:
        run(BASIS, sets, rows)
    for word in words:
        assert word in str(caught.value)


@pytest.mark.parametrize("pitch", ["10 deg", "20 deg", "0.17453292519943295 rad"])
def test_a_carried_slope_is_the_slope_typed(pitch: str, tmp_path: Path) -> None:
    """A pitch at a threshold, or at a point of a table, is still there after it was carried."""
    names = (BASIS, "wind-pressure")
    job = Job.start(tmp_path / "job", names, templates())
    typed = {"roof": "gable", "ridge": "Y", "pitch": pitch}
    job.record_path(BASIS).write_text(
        f'format = 1\nworkbook = "{BASIS}"\n[entries]\n'
        + "".join(f'{name} = {{ value = "{text}" }}\n' for name, text in typed.items()),
        encoding="utf-8",
    )
    runner = Runner(job)
    basis, carried = (Sheet(runner.statement(n), runner.books[n, None][0]) for n in names)
    lengths = {"r_r": "r_r", "h": "h_m", "h_e": "h_eave", "L_x": "L_x", "L_y": "L_y"}
    sets = {name: f"{basis.value(source)!r} m" for name, source in lengths.items()}
    sets |= {"roof": "gable", "ridge": "Y", "theta": pitch}
    book, statement = Runner().run(Filling(templates()["wind-pressure"], sets=sets))
    alone = Sheet(statement, book)
    for name in ("theta", "C_aX", "C_bX", "N_min", "V_max"):  # C_aX applies from 10 deg on
        assert carried.value(name) == alone.value(name)
