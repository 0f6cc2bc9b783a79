"""The bar of a workbook in a real JupyterLab: jumps, undo, marks, carries, the PDF, studies."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from lab import IDLE, PATIENCE, open_notebook, run_all
from pages import BAR, SOON, SPEED, row, settled, typed, wait_for_text

from calcbook.record import RowRecord

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.job import Job

pytestmark = pytest.mark.browser


@pytest.fixture(scope="module")
def columns(lab: str, browser: Any) -> Any:
    """Return the column workbook in a page, with all cells run: it has no mark yet."""
    page = open_notebook(browser, lab, "column-accumulation.ipynb")
    run_all(page, ".cb-view:has-text('Service combinations')")
    return page


def press(page: Any, text: str) -> None:
    """Press a button of the bar."""
    page.locator(f"{BAR} button", has_text=text).first.click()


def test_counts_jump_to_their_places(wind_page: Any) -> None:
    """What is not confirmed is counted and listed; a place brings its field into focus."""
    count = wind_page.locator(f"{BAR} .cb-count-unconfirmed summary")
    assert "not confirmed" in count.text_content()
    count.press("Enter")
    place = wind_page.locator(f"{BAR} .cb-place", has_text="Exposure").first
    place.press("Enter")
    wind_page.wait_for_function(
        "() => document.activeElement.closest('[data-id]')?.dataset.id === 'exposure'",
        timeout=SOON,
    )


def test_undo_and_redo_from_the_bar_and_by_keys(wind_page: Any, lab_job: Job) -> None:
    """Undo brings the value of before back, in the page and in the record; redo the later one."""
    record = lab_job.record_path("wind-pressure")
    typed(wind_page, SPEED, "55 m/s")
    settled(record, '"55 m/s"', wind_page)
    typed(wind_page, SPEED, "56 m/s")
    settled(record, '"56 m/s"', wind_page)
    press(wind_page, "Undo")
    settled(record, '"55 m/s"', wind_page)
    assert wind_page.locator(SPEED).first.input_value() == "55"
    wind_page.locator(SPEED).first.press("Control+Shift+Z")
    settled(record, '"56 m/s"', wind_page)
    wind_page.locator(SPEED).first.press("Control+z")
    settled(record, '"55 m/s"', wind_page)


def test_the_pdf_of_the_workbook_is_made_and_comes_down(wind_page: Any, tmp_path: Path) -> None:
    """The pages are made beside the kernel, typing goes on, and the file can be taken."""
    press(wind_page, "PDF of this workbook")
    wind_page.locator(f"{BAR} progress").wait_for(state="attached", timeout=SOON)
    typed(wind_page, SPEED, "57 m/s")
    wait_for_text(wind_page, "[data-id='q_h'] .cb-body", "57 m/s")
    link = wind_page.locator(f"{BAR} .cb-file a[download]")
    link.wait_for(state="attached", timeout=PATIENCE)
    with wind_page.expect_download() as found:
        link.click()
    found.value.save_as(tmp_path / "made.pdf")
    assert (tmp_path / "made.pdf").read_bytes().startswith(b"%PDF")
    assert "pages" in wind_page.locator(f"{BAR} .cb-print [role=status]").text_content()


def test_a_carried_value_that_moved_is_shown_and_taken(wind_page: Any, lab_job: Job) -> None:
    """The pack notes what was taken; when the source moves, old and new stand side by side."""
    press(wind_page, "Pack of the job")
    wait_for_text(wind_page, f"{BAR} .cb-print [role=status]", "pages")
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
    assert moved.locator(".cb-was").text_content() != moved.locator(".cb-now").text_content()
    press(wind_page, "Take all that moved")
    stale.wait_for(state="detached", timeout=SOON)
    record = lab_job.record("design-basis")
    record.change(schedules={"levels": was})
    record.save()


def test_marks_are_added_copied_switched_and_removed(columns: Any, lab_job: Job) -> None:
    """A first mark comes from the template, a copy is to be confirmed, removing can be undone."""
    columns.locator(f"{BAR} .cb-mark-name").fill("C-1")
    columns.locator(f"{BAR} .cb-mark-name").press("Enter")
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
    wind_page.click("li.lm-MenuBar-item >> text=Kernel")
    wind_page.click("text=Restart Kernel and Run All Cells")
    wind_page.click(".jp-Dialog button:has-text('Restart')")
    wind_page.wait_for_timeout(1500)
    wind_page.wait_for_selector(IDLE, timeout=PATIENCE)
    wait_for_text(wind_page, "[data-id='q_h'] .cb-body", "58 m/s")
    assert row(wind_page, "V").locator("input[type=text]").input_value() == "58"
