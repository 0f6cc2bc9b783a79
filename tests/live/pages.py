"""What a hand does on the page of a workbook, for the tests in a browser."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pathlib import Path

SOON = 15_000
SPEED = "input[title='Basic wind speed']"
BAR = ".cb-bar"


def typed(page: Any, field: str, text: str) -> None:
    """Type into a field and press Enter."""
    found = page.locator(field).first
    found.scroll_into_view_if_needed()
    found.fill(text)
    found.press("Enter")


def row(page: Any, name: str) -> Any:
    """Return the row of an item by its name, or its number."""
    return page.locator(f".cb-view [data-id='{name}']").first


def result(page: Any, name: str) -> str:
    """Return the result of a line as it is painted."""
    return str(row(page, name).locator(".cb-result").last.text_content())


def wait_for_text(page: Any, selector: str, text: str) -> None:
    """Wait until an element says something."""
    page.wait_for_function(
        "([selector, text]) => [...document.querySelectorAll(selector)]"
        ".some((one) => one.textContent.includes(text))",
        arg=[selector, text], timeout=SOON,
    )  # fmt: skip


def settled(record: Path, text: str, page: Any) -> str:
    """Wait until a record holds a text, and return all of it."""
    for _ in range(60):
        found = record.read_text("utf-8") if record.exists() else ""
        if text in found:
            return found
        page.wait_for_timeout(50)
    raise AssertionError(f"{record.name} never held {text!r}:\n{found}")


def paste(page: Any, field: str, block: str) -> None:
    """Paste a block of cells, as a spreadsheet copies it, into a field."""
    page.locator(field).first.evaluate(
        "(node, text) => { const data = new DataTransfer(); data.setData('text/plain', text);"
        " node.focus(); node.dispatchEvent(new ClipboardEvent('paste',"
        " { clipboardData: data, bubbles: true, cancelable: true })); }",
        block,
    )
