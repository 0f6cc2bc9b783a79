"""The bar of a workbook in a real JupyterLab: jumps, undo, marks, carries, the PDF, studies."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from lab import PATIENCE, open_notebook, run_all
from pages import (
    BAR,
    SOON,
    SPEED,
    changed_from,
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

from calcbook.record import RowRecord

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.job import Job

pytestmark = pytest.mark.browser


@pytest.fixture(scope="module")
def columns(lab: str, lab_job: Job, browser: Any) -> Any:  # noqa: ARG001  the job stands in it
    """Return the column workbook in a page, with all cells run: it has no mark yet."""
    page = open_notebook(browser, lab, "job/column-accumulation.ipynb")
    run_all(page, ".cb-view:has-text('Service combinations')")
    return page


def test_counts_jump_to_their_places(wind_page: Any) -> None:
    """What is not confirmed is counted and listed; a place brings its field into focus."""
    count = in_sight(wind_page.locator(f"{BAR} .cb-count-unconfirmed summary"))
    assert "not confirmed" in told(count)
    count.press("Enter")
    place = in_sight(wind_page.locator(f"{BAR} .cb-count-unconfirmed .cb-place").first)
    number = told(place).split()[0]
    place.press("Enter")
    wind_page.wait_for_function(
        "number => document.activeElement.closest('[data-id]')?.querySelector('.cb-no')"
        ".textContent === number", arg=number, timeout=SOON,
    )  # fmt: skip
    assert wind_page.locator(f"{BAR} details[open]").count() == 0


def test_undo_and_redo_from_the_bar_and_by_keys(wind_page: Any, lab_job: Job) -> None:
    """Undo brings the value of before back, in the page and in the record; redo the later one."""
    record = lab_job.record_path("wind-pressure")
    typed(wind_page, SPEED, "55 m/s")
    settled(record, '"55 m/s"', wind_page)
    typed(wind_page, SPEED, "56 m/s")
    settled(record, '"56 m/s"', wind_page)
    press(wind_page, "Undo")
    settled(record, '"55 m/s"', wind_page)
    shows(wind_page, SPEED, "55")
    wind_page.locator(SPEED).first.press("Control+Shift+Z")
    settled(record, '"56 m/s"', wind_page)
    wind_page.locator(SPEED).first.press("Control+z")
    settled(record, '"55 m/s"', wind_page)


def test_the_pdf_of_the_workbook_is_made_and_comes_down(wind_page: Any, tmp_path: Path) -> None:
    """The pages are made beside the kernel, typing goes on, and the file can be taken."""
    press(wind_page, "PDF of this workbook")
    wind_page.locator(f"{BAR} progress").wait_for(state="attached", timeout=SOON)
    before = result(wind_page, "q_h")
    typed(wind_page, SPEED, "57 m/s")
    changed_from(wind_page, "q_h", before)
    assert wind_page.locator(f"{BAR} progress").count() == 1
    link = wind_page.locator(f"{BAR} .cb-file a[download]")
    link.wait_for(state="attached", timeout=PATIENCE)
    with wind_page.expect_download() as found:
        in_sight(link).click()
    found.value.save_as(tmp_path / "made.pdf")
    assert (tmp_path / "made.pdf").read_bytes().startswith(b"%PDF")
    assert "pages" in told(wind_page.locator(f"{BAR} .cb-print [role=status]"))


def test_a_carried_value_that_moved_is_shown_and_taken(wind_page: Any, lab_job: Job) -> None:
    """The pack notes what was taken; when the source moves, old and new stand side by side."""
    press(wind_page, "Pack of the job")
    working = wind_page.locator(f"{BAR} progress")
    working.wait_for(state="attached", timeout=SOON)
    working.wait_for(state="detached", timeout=PATIENCE)
    assert "pages" in told(wind_page.locator(f"{BAR} .cb-print [role=status]"))
    record = lab_job.record("design-basis")
    was = record.schedules.get("levels")
    elevations = {"Roof": "9.1 m", "Level 2": "4.2 m", "Ground": "0 m"}
    record.change(schedules={"levels": [
        RowRecord(level, {"elevation": at, "use": "office", "area": "234 m2"})
        for level, at in elevations.items()
    ]})  # fmt: skip
    record.save()
    stale = wind_page.locator(f"{BAR} .cb-count-stale summary")
    stale.wait_for(state="attached", timeout=SOON)
    moved = wind_page.locator(".cb-stale").first
    assert told(moved.locator(".cb-was")) != told(moved.locator(".cb-now"))
    in_sight(moved)
    picture(wind_page, "a carried value that moved")
    press(wind_page, "Take all that moved")
    stale.wait_for(state="detached", timeout=SOON)
    record = lab_job.record("design-basis")
    record.change(schedules={"levels": was})
    record.save()


def test_marks_are_added_copied_switched_and_removed(columns: Any, lab_job: Job) -> None:
    """A first mark comes from the template, a copy is to be confirmed, removing can be undone."""
    typed(columns, f"{BAR} .cb-mark-name", "C-1")
    wait_for_text(columns, f"{BAR} select.cb-mark", "C-1")
    assert lab_job.marks("column-accumulation") == ("C-1",)
    columns.locator(f"{BAR} .cb-mark-name").fill("C-2")
    press(columns, "copy")
    wait_for_text(columns, f"{BAR} select.cb-mark", "C-2")
    assert columns.locator(f"{BAR} select.cb-mark").input_value() == "C-2"
    columns.locator(f"{BAR} select.cb-mark").select_option("C-1")
    columns.wait_for_function(
        f"() => document.querySelector('{BAR} select.cb-mark').value === 'C-1'", timeout=SOON
    )
    columns.locator(f"{BAR} select.cb-mark").select_option("C-2")
    columns.wait_for_function(
        f"() => document.querySelector('{BAR} select.cb-mark').value === 'C-2'", timeout=SOON
    )
    press(columns, "remove")
    columns.wait_for_function(
        f"() => ![...document.querySelectorAll('{BAR} select.cb-mark option')]"
        ".some((one) => one.value === 'C-2')", timeout=SOON,
    )  # fmt: skip
    assert lab_job.marks("column-accumulation") == ("C-1",)
    press(columns, "Undo")
    wait_for_text(columns, f"{BAR} select.cb-mark", "C-2")
    assert lab_job.marks("column-accumulation") == ("C-1", "C-2")


def test_restart_and_run_all_brings_everything_back(wind_page: Any, lab_job: Job) -> None:
    """What was typed is there after the kernel was restarted and all cells were run."""
    typed(wind_page, SPEED, "58 m/s")
    settled(lab_job.record_path("wind-pressure"), '"58 m/s"', wind_page)
    shown = result(wind_page, "q_h")
    wind_page.evaluate(
        "() => document.querySelectorAll('.cb-view').forEach((v) => { v.dataset.former = 'yes'; })"
    )
    wind_page.click("li.lm-MenuBar-item >> text=Kernel")
    wind_page.click("text=Restart Kernel and Run All Cells")
    wind_page.click(".jp-Dialog button:has-text('Restart')")
    anew = ".cb-view:not([data-former]) [data-id='q_h'] .cb-result"
    wind_page.wait_for_selector(anew, state="attached", timeout=PATIENCE)
    wait_for_text(wind_page, anew, shown)
    assert row(wind_page, "V").locator("input[type=text]").input_value() == "58"
