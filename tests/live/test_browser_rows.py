"""A schedule in a real JupyterLab: cells, rows, a pasted block, and keys."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from lab import open_notebook, run_all
from pages import SOON, at_rest, in_sight, paste, settled, wait_for_text

if TYPE_CHECKING:
    from calcbook.job import Job

pytestmark = pytest.mark.browser
LEVEL = "[data-id='levels'] input[data-key='{}'][data-column='{}']"


@pytest.fixture(scope="module")
def basis(lab: str, lab_job: Job, browser: Any) -> Any:  # noqa: ARG001  the job stands in it
    """Return the design basis in a page, with all cells run."""
    page = open_notebook(browser, lab, "job/design-basis.ipynb")
    run_all(page, "[data-id='levels'] table")
    return page


def keys(page: Any) -> list[str]:
    """Return the keys of the levels as they stand."""
    found = "() => [...document.querySelectorAll(\"[data-id='levels'] input[data-column='']\")]"
    return list(page.evaluate(f"{found}.map((one) => one.value)"))


def test_a_cell_is_typed_and_refused(basis: Any, lab_job: Job) -> None:
    """A cell goes into the record; a wrong one is named under the table and changes nothing."""
    first = keys(basis)[0]
    cell = in_sight(basis.locator(LEVEL.format(first, "elevation")))
    was = cell.input_value()
    cell.fill("1,5 m")
    cell.press("Enter")
    wait_for_text(basis, "[data-id='levels'] .cb-refused", f"{first}, elevation: ")
    assert cell.get_attribute("aria-invalid") == "true"
    cell.fill(f"{float(was) + 0.1:.1f}")
    cell.press("Enter")
    basis.locator("[data-id='levels'] .cb-refused").wait_for(state="hidden", timeout=SOON)
    settled(lab_job.record_path("design-basis"), f"{float(was) + 0.1:.1f} m", basis)


def test_rows_are_added_moved_and_removed(basis: Any) -> None:
    """A row is put below another, moved, and taken out again; undo brings it back."""
    before = keys(basis)
    basis.locator(f"button[title='add a row below {before[0]}']").press("Enter")
    basis.wait_for_function(
        "n => document.querySelectorAll(\"[data-id='levels'] input[data-column='']\").length === n",
        arg=len(before) + 1, timeout=SOON,
    )  # fmt: skip
    new = keys(basis)[1]
    basis.locator(f"button[title='move row {new} up']").click()
    basis.wait_for_function(
        "key => document.querySelector(\"[data-id='levels'] input[data-column='']\").value === key",
        arg=new, timeout=SOON,
    )  # fmt: skip
    basis.locator(f"button[title='remove row {new}']").click()
    basis.wait_for_function(
        "n => document.querySelectorAll(\"[data-id='levels'] input[data-column='']\").length === n",
        arg=len(before), timeout=SOON,
    )  # fmt: skip
    assert keys(basis) == before


def test_a_block_is_pasted_whole_or_not_at_all(basis: Any, lab_job: Job) -> None:
    """A bad cell in the middle is named and nothing is changed; a good block goes in at once."""
    names = keys(basis)
    record = lab_job.record_path("design-basis")
    before = at_rest(record, basis)
    cell = LEVEL.format(names[0], "elevation")
    paste(basis, cell, "7.5\n3,6\n0\n")
    wait_for_text(basis, "[data-id='levels'] .cb-refused", "3,6")
    assert record.read_text("utf-8") == before
    paste(basis, cell, "7.6\n3.7\n")
    settled(record, "7.6 m", basis)
    assert "3.7 m" in record.read_text("utf-8")
