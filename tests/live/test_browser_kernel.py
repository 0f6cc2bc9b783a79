"""A small workbook in a real kernel: haste, faults, a damaged record, two kernels, studies."""

from __future__ import annotations

import shutil
from typing import TYPE_CHECKING, Any

import pytest
from lab import open_notebook, run_all
from live_samples import WIND, make_job, notebook
from pages import (
    BAR,
    SOON,
    SPEED,
    in_sight,
    picture,
    press,
    result,
    row,
    settled,
    shows,
    told,
    typed,
    wait_for_text,
)

from calcbook.commands.saved import SavedOutputs

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.job import Job

pytestmark = pytest.mark.browser
FAULTY = """
with book.section("Pictures") as s:
    s.line("f = q*'2 m2'", "Force", unit="force")
    s.figure("level-ladder", "Floors", levels="floors", elevation="z")
"""
FAULT = """
from calcbook import figures
def fail(*_):
    raise ZeroDivisionError("no paper")
figures.level_ladder.draw = fail
"""
HASTE = """
(field) => new Promise((done) => {
  const input = document.querySelector(field);
  input.focus();
  let n = 0;
  const next = () => {
    input.value = `${20 + n / 4}`;
    input.dispatchEvent(new Event("input", { bubbles: true }));
    input.dispatchEvent(new KeyboardEvent("keydown", { key: "Enter", bubbles: true }));
    if (++n < 200) setTimeout(next, 10); else done();
  };
  next();
})
"""
DAMAGED = "format = 1\nworkbook = \n"


@pytest.fixture(scope="module")
def small_job(lab_folder: Path) -> Job:
    """Return a job of the samples, whose wind workbook has a figure that fails."""
    job = make_job(lab_folder / "small")
    opening, rest = WIND.split("\nwith book.", 1)
    source = f"{opening}{FAULT}\nwith book.{rest}{FAULTY}"
    (job.folder / "wind.ipynb").write_text(notebook(source), encoding="utf-8")
    return job


@pytest.fixture(scope="module")
def small(lab: str, small_job: Job, browser: Any) -> Any:  # noqa: ARG001  the job stands in it
    """Return the sample workbook in a page, with all cells run."""
    page = open_notebook(browser, lab, "small/wind.ipynb")
    run_all(page, ".cb-view[data-section='Open country']")
    return page


def test_a_figure_that_fails_is_told_and_the_rest_goes_on(small: Any) -> None:
    """The fault stands at the figure; the line above it and the section after it are there."""
    wait_for_text(small, "[data-section='Pictures'] .cb-figure .cb-trouble", "ZeroDivisionError")
    assert "6.007 kN" in result(small, "f")
    assert small.locator("[data-mime-type*=stderr]").all_text_contents() == []


def test_two_hundred_changes_in_two_seconds(small: Any, small_job: Job) -> None:
    """The last is shown and on disk, and every one was taken: undo goes back one by one."""
    record = small_job.record_path("wind")
    small.evaluate(HASTE, SPEED)
    wait_for_text(small, "[data-id='q'] .cb-body", "69.75m/s")
    settled(record, '"69.75 m/s"', small)
    for value in ("69.5 m/s", "69.25 m/s"):
        press(small, "Undo")
        settled(record, f'"{value}"', small)
    shows(small, SPEED, "69.25")


def test_sensitivity_is_found_in_the_bar(small: Any) -> None:
    """The pressure answers to the speed twice over; the bars are drawn with words for them."""
    press(small, "Sensitivity, value needed")
    in_sight(small.locator(f"{BAR} select[aria-label=result]")).select_option("q")
    press(small, "sensitivity")
    wait_for_text(small, f"{BAR} .cb-study-found", "Basic wind speed")
    wait_for_text(small, f"{BAR} .cb-study-found", "2.000 %")
    assert "V = 69.25 m/s: 2.381 kPa" in small.locator(f"{BAR} img.cb-figure").get_attribute("alt")
    picture(small, "sensitivity")


def test_the_value_needed_is_used_and_to_be_confirmed(small: Any, small_job: Job) -> None:
    """The speed that gives 2 kPa is found in closed form, and stands unconfirmed when used."""
    in_sight(small.locator(f"{BAR} select[aria-label=result]")).select_option("q")
    in_sight(small.locator(f"{BAR} select[aria-label=entry]")).select_option("V")
    typed(small, f"{BAR} input[aria-label='target of the result']", "2 kPa")
    wait_for_text(small, f"{BAR} .cb-study-found", "V = 57.12 m/s gives 2.000 kPa")
    wait_for_text(small, f"{BAR} .cb-study-found", "closed form")
    press(small, "use 57.12 m/s")
    wait_for_text(small, "[data-id='q'] .cb-result", "2.000 kPa")
    settled(small_job.record_path("wind"), '"57.12 m/s"', small)
    assert small_job.record("wind").entries["V"].confirmed is None
    press(small, "Sensitivity, value needed")


def test_a_record_damaged_while_open_is_asked_about(small: Any, small_job: Job) -> None:
    """Nothing writes over it unasked; what is typed counts; anew keeps the damaged one beside."""
    record = small_job.record_path("wind")
    record.write_text(DAMAGED)
    wait_for_text(small, f"{BAR} .cb-ask", "cannot be read")
    typed(small, SPEED, "81 m/s")
    wait_for_text(small, "[data-id='q'] .cb-body", "81m/s")
    wait_for_text(small, f"{BAR} .cb-bad", "Not on disk: V")
    assert record.read_text() == DAMAGED
    picture(small, "a damaged record")
    press(small, "write it anew")
    settled(record, '"81 m/s"', small)
    assert record.with_name("wind.toml.damaged").read_text() == DAMAGED
    small.locator(f"{BAR} .cb-ask").wait_for(state="detached", timeout=SOON)


def test_two_kernels_on_one_item_are_asked(small: Any, small_job: Job) -> None:
    """What the other kernel wrote and what is typed here stand side by side until one decides."""
    record = small_job.record("wind")
    path = small_job.record_path("wind")
    path.write_text(DAMAGED)  # mine waits, so that the other is the earlier one for certain
    wait_for_text(small, f"{BAR} .cb-ask", "cannot be read")
    typed(small, SPEED, "83 m/s")
    wait_for_text(small, f"{BAR} .cb-bad", "Not on disk: V")
    path.write_text(record.text().replace('"81 m/s"', '"90 m/s"'))
    wait_for_text(small, f"{BAR} .cb-ask", "Here: 83 m/s. On disk: 90 m/s.")
    assert '"90 m/s"' in path.read_text()
    assert small.locator(SPEED).first.input_value() == "83"
    picture(small, "two kernels")
    press(small, "take what is there")
    wait_for_text(small, "[data-id='q'] .cb-body", "90m/s")
    small.locator(f"{BAR} .cb-ask").wait_for(state="detached", timeout=SOON)
    assert row(small, "V").locator("input[type=text]").input_value() == "90"


def test_a_saved_file_shows_the_calculation_without_its_kernel(
    small: Any, small_job: Job, lab: str, browser: Any
) -> None:
    """Opened again, its lines are read as they were saved, and no dead view is complained of."""
    small.keyboard.press("Control+s")
    saved = small_job.folder / "wind.ipynb"
    settled(saved, "widget-view+json", small)
    again = small_job.folder.parent / "again" / "wind.ipynb"
    again.parent.mkdir()
    shutil.copy(saved, again)
    outputs = SavedOutputs(again)
    outputs.drop_views()
    outputs.save()
    page = open_notebook(browser, lab, "again/wind.ipynb")
    wait_for_text(page, ".jp-RenderedMarkdown", "Velocity pressure")
    whole = told(page.locator(".jp-Notebook"))
    assert "odel not found" not in whole
    assert "displaying widget" not in whole
    picture(page, "a saved file without its kernel")
    page.close()
