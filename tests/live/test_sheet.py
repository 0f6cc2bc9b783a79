"""The sheet in a browser: fields, keys, tables, and that only what changed is touched."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from live_samples import WIND, make_job, opened
from sheet_page import SheetPage

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator
    from pathlib import Path

    from calcbook.live import Session

pytestmark = pytest.mark.browser
SPEED = "input[title='Basic wind speed']"


@pytest.fixture
def show(
    browser: Any, wind: Session, monkeypatch: pytest.MonkeyPatch
) -> Iterator[Callable[[str], SheetPage]]:
    """Return what shows a section of the wind sample in a page."""
    page = browser.new_page()
    page.set_viewport_size({"width": 1000, "height": 800})
    yield lambda title: SheetPage(page, wind.views[title], monkeypatch)
    page.close()


def test_a_value_is_committed_by_enter_and_by_leaving(
    show: Callable[[str], SheetPage], wind: Session
) -> None:
    """Enter and blur both send the text once; Escape sends nothing and puts the text back."""
    sheet = show("Site")
    field = sheet.page.locator(SPEED)
    field.fill("80")
    sheet.press("Enter")
    assert wind.record.entries["V"].value == "80 m/s"
    field.fill("252 km/h")
    field.blur()
    sheet.settle()
    assert wind.record.entries["V"].value == "252 km/h"
    assert sheet.page.locator(".cb-field:has-text('= 70 m/s')").count() == 1
    field.fill("99")
    sheet.press("Escape")
    assert field.input_value() == "252 km/h"
    assert [m["do"] for m in sheet.messages] == ["hello", "enter", "enter"]


def test_a_refusal_is_tied_to_its_field_and_let_go_by_escape(
    show: Callable[[str], SheetPage],
) -> None:
    """The field is marked invalid and described by the alert; Escape restores the text in force."""
    sheet = show("Site")
    field = sheet.page.locator(SPEED)
    field.fill("1,5 m")
    sheet.press("Enter")
    assert field.get_attribute("aria-invalid") == "true"
    told = sheet.page.locator(f"#{field.get_attribute('aria-describedby')} [role=alert]")
    assert "70 m/s stays in force" in told.inner_text()
    field.focus()
    sheet.press("Escape")
    assert field.input_value() == "70"
    assert field.get_attribute("aria-invalid") is None
    assert sheet.page.locator("[role=alert]").count() == 0


def test_a_text_being_typed_is_not_overwritten(
    show: Callable[[str], SheetPage], wind: Session
) -> None:
    """A change from elsewhere leaves the half-typed text, its caret and the focus alone."""
    sheet = show("Site")
    sheet.page.locator(SPEED).fill("9")
    sheet.page.locator(SPEED).focus()
    wind.enter("V", "75 m/s")
    sheet.deliver()
    assert sheet.page.locator(SPEED).input_value() == "9"
    assert sheet.focused() == "Basic wind speed"
    sheet.press("Escape")
    assert sheet.page.locator(SPEED).input_value() == "75"


def test_only_what_changed_is_touched(show: Callable[[str], SheetPage], wind: Session) -> None:
    """A new speed changes the line's body and the check, and no other element of the section."""
    sheet = show("Pressure")
    sheet.page.evaluate(
        "() => { window.touched = new Set(); new MutationObserver((all) => all.forEach((m) =>"
        " window.touched.add(m.target.closest('.cb-row')?.dataset.id + ' ' + m.target.parentNode"
        ".className))).observe(document.querySelector('.cb-rows'), { subtree: true,"
        " childList: true, characterData: true, attributes: true }); }"
    )
    wind.enter("V", "75 m/s")
    sheet.deliver()
    touched = set(sheet.page.evaluate("() => [...window.touched]"))
    assert touched == {"q cb-body", "2.2 cb-body"}
    assert "3.448 kPa" in sheet.page.locator("[data-id=q] .cb-result").inner_text()


@pytest.mark.parametrize(
    ("text", "by", "stepped"),
    [
        ("70", 1, "71"), ("70", 10, "80"), ("0.85", 1, "0.86"), ("1.0", -1, "0.9"),
        ("0.05", -10, "-0.05"), ("-1", 1, "0"), ("252 km/h", 1, "253 km/h"),
        ("3.5 kN/m2", 1, "3.6 kN/m2"), ("9.99", 1, "10.00"), ("5 ft 6 in", 1, None),
        ("5'-6 1/2\"", 1, None), ("", 1, None), ("wide", 1, None),
    ],
)  # fmt: skip
def test_the_last_typed_digit_is_stepped(
    show: Callable[[str], SheetPage], text: str, by: int, stepped: str | None
) -> None:
    """The place of the last digit typed is stepped exactly; two numbers or none are left alone."""
    sheet = show("Site")
    found = sheet.page.evaluate("([text, by]) => window.sheet.stepped(text, by)", [text, by])
    assert found == stepped


def test_keys_go_through_a_table(show: Callable[[str], SheetPage], wind: Session) -> None:
    """Enter goes down, Shift+Enter up, arrows between rows, Tab across; a value typed is taken."""
    sheet = show("Floors")
    sheet.page.locator("input[aria-label='Roof, Elevation']").fill("8")
    sheet.press("Enter")
    assert wind.record.schedules["floors"][0].cells["z"] == "8 m"
    assert sheet.focused() == "Level 2, Elevation"
    sheet.press("ArrowUp")
    assert sheet.focused() == "Roof, Elevation"
    sheet.press("Tab")
    assert sheet.focused() == "Roof, Use"
    sheet.press("ArrowDown", "Shift+Tab", "Shift+Enter")
    assert sheet.focused() == "Roof, Elevation"


def test_a_row_is_added_named_and_removed(show: Callable[[str], SheetPage], wind: Session) -> None:
    """A new row has the focus in its key; renamed it keeps its fields; a removed one is gone."""
    sheet = show("Floors")
    sheet.page.locator("button[title='add a row below Roof']").click()
    sheet.settle()
    assert sheet.focused() == "new, key of the row"
    sheet.page.locator("input[aria-label='new, key of the row']").fill("Level 3")
    sheet.press("Enter")
    assert [row.key for row in wind.record.schedules["floors"]] == ["Roof", "Level 3", "Level 2"]
    sheet.page.locator("button[title='remove row Level 3']").click()
    sheet.settle()
    keys = sheet.page.locator("input[title='key of the row']")
    assert [key.input_value() for key in keys.all()] == ["Roof", "Level 2"]
    assert sheet.focused() == "Level 2, key of the row"


def test_a_block_is_pasted_at_its_cell(show: Callable[[str], SheetPage]) -> None:
    """Tabs and line ends make a block; a single cell is pasted as text by the browser."""
    sheet = show("Floors")
    sheet.page.locator("input[aria-label='Roof, Elevation']").focus()
    sheet.paste("8 m\tplant\r\n4 m\tstore\r\n")
    assert sheet.did()[-1] == {
        "do": "paste", "schedule": "floors", "key": "Roof", "column": "z",
        "block": [["8 m", "plant"], ["4 m", "store"]],
    }  # fmt: skip
    before = len(sheet.messages)
    sheet.paste("8 m\n")
    assert len(sheet.messages) == before


def test_a_confirm_mark_follows_the_kernel(tmp_path: Path, browser: Any,
                                           monkeypatch: pytest.MonkeyPatch) -> None:  # fmt: skip
    """A tick that is refused is taken back, and the reason stands at its entry."""
    session = opened(WIND, make_job(tmp_path / "unsigned", signed=False))
    page = browser.new_page()
    sheet = SheetPage(page, session.views["Site"], monkeypatch)
    mark = page.locator("input[aria-label='confirm: Basic wind speed']")
    mark.click()
    assert mark.is_checked()
    sheet.settle()
    assert not mark.is_checked()
    assert "who confirms is not known yet" in page.locator("[data-id=V]").inner_text()
    page.close()


def test_a_source_turns_into_a_field(show: Callable[[str], SheetPage]) -> None:
    """Enter on the source opens a field with it; Enter sends it, Escape leaves it."""
    sheet = show("Site")
    source = sheet.page.locator("[data-id=V] button.cb-source")
    assert source.inner_text() == "map"
    source.focus()
    sheet.press("Enter")
    assert sheet.focused() == "source: Basic wind speed"
    sheet.press("Escape")
    assert source.inner_text() == "map"
    source.click()
    sheet.page.keyboard.type("map of 2015")
    sheet.page.keyboard.press("Enter")
    sent = sheet.page.evaluate("() => window.sent.at(-1)")
    assert (sent["do"], sent["name"], sent["text"]) == ("source", "V", "map of 2015")


def test_undo_is_asked_for_where_nothing_is_being_typed(show: Callable[[str], SheetPage]) -> None:
    """Ctrl+Z in a settled field or on a button is the workbook's; in a half-typed one it is not."""
    sheet = show("Site")
    asked = "() => window.sent.splice(0).map((m) => m.do)"
    sheet.page.locator(SPEED).focus()
    sheet.page.keyboard.press("Control+z")
    sheet.page.keyboard.press("Control+Shift+z")
    sheet.page.keyboard.press("Control+y")
    assert sheet.page.evaluate(asked) == ["undo", "redo", "redo"]
    sheet.page.locator("[data-id=V] button.cb-source").focus()
    sheet.page.keyboard.press("Control+z")
    assert sheet.page.evaluate(asked) == ["undo"]
    sheet.page.locator(SPEED).focus()
    sheet.page.keyboard.type("9")
    sheet.page.keyboard.press("Control+z")
    assert sheet.page.evaluate(asked) == []


def test_a_missed_patch_is_made_up_for(show: Callable[[str], SheetPage], wind: Session) -> None:
    """A browser that did not get a patch asks for the whole page and shows the last values."""
    sheet = show("Pressure")
    wind.enter("V", "75 m/s")
    sheet.patches.clear()
    wind.enter("V", "80 m/s")
    sheet.page.wait_for_timeout(100)  # the second of two quick changes is painted a little later
    sheet.deliver()
    sheet.settle()
    assert "3.923 kPa" in sheet.page.locator("[data-id=q] .cb-result").inner_text()


def test_the_still_output_is_out_of_sight_while_the_sheet_lives(
    show: Callable[[str], SheetPage],
) -> None:
    """The output before the sheet is hidden, and comes back when the sheet is closed."""
    sheet = show("Site")
    still = sheet.page.locator("#still")
    still.wait_for(state="hidden", timeout=5000)
    sheet.page.evaluate("() => window.leave()")
    still.wait_for(state="visible", timeout=5000)


def test_keys_typed_in_a_sheet_are_not_shortcuts(show: Callable[[str], SheetPage]) -> None:
    """Plain keys and undo are kept from JupyterLab's shortcuts; Ctrl+S is left to it."""
    sheet = show("Site")
    suppressed = "() => document.querySelector('#sheet').hasAttribute('data-lm-suppress-shortcuts')"
    sheet.page.locator("select").focus()
    for key, ours in (("b", True), ("Control+s", False), ("Control+z", True), ("d", True)):
        sheet.page.keyboard.press(key)
        assert sheet.page.evaluate(suppressed) is ours, key


def test_a_kernel_that_does_not_answer_is_told(
    browser: Any, wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Some seconds after a message without an answer the page says so, until there is one."""
    page = browser.new_page()
    page.clock.install()
    sheet = SheetPage(page, wind.views["Site"], monkeypatch)
    page.locator(SPEED).fill("80")
    page.locator(SPEED).press("Enter")
    page.clock.run_for(10_000)
    assert "has not answered" in page.locator("#sheet").inner_text()
    sheet.settle()
    assert "has not answered" not in page.locator("#sheet").inner_text()
    page.close()
