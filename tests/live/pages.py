"""What a hand does on the page of a workbook, for the tests in a browser."""

from __future__ import annotations

import os
import re
from pathlib import Path
from typing import Any

SOON = 15_000
SPEED = "input[title='Basic wind speed']"
BAR = ".cb-bar"
PICTURES = "CALCBOOK_PICTURES"


def typed(page: Any, field: str, text: str) -> None:
    """Type into a field and press Enter."""
    found = in_sight(page.locator(field).first)
    found.fill(text)
    found.press("Enter")


def in_sight(found: Any) -> Any:
    """Return an element, brought into sight: JupyterLab does not draw cells that are out of it."""
    found.wait_for(state="attached", timeout=SOON)
    found.evaluate("(node) => node.scrollIntoView({ block: 'center' })")
    found.wait_for(state="visible", timeout=SOON)
    return found


def press(page: Any, text: str) -> None:
    """Press a button of the bar whose words begin like this."""
    begins = re.compile(f"^{re.escape(text)}")
    in_sight(page.locator(f"{BAR} button", has_text=begins).first).click()


def told(found: Any) -> str:
    """Return the text of an element, in sight or not, once it is there."""
    return str(found.text_content(timeout=SOON))


def row(page: Any, name: str) -> Any:
    """Return the row of an item by its name, or its number."""
    return page.locator(f".cb-view [data-id='{name}']").first


def result(page: Any, name: str) -> str:
    """Return the result of a line as it is painted."""
    return told(row(page, name).locator(".cb-result").last)


def wait_for_text(page: Any, selector: str, text: str) -> None:
    """Wait until an element says something."""
    page.wait_for_function(
        "([selector, text]) => [...document.querySelectorAll(selector)]"
        ".some((one) => one.textContent.includes(text))",
        arg=[selector, text], timeout=SOON,
    )  # fmt: skip


def shows(page: Any, field: str, text: str) -> None:
    """Wait until a field shows a text."""
    page.wait_for_function(
        "([field, text]) => document.querySelector(field).value === text",
        arg=[field, text], timeout=SOON,
    )  # fmt: skip


def changed_from(page: Any, name: str, before: str) -> None:
    """Wait until the result of a line is another one."""
    page.wait_for_function(
        "([name, before]) => !document.querySelector(`[data-id='${name}']`)"
        ".textContent.includes(before)", arg=[name, before], timeout=SOON,
    )  # fmt: skip


def settled(record: Path, text: str, page: Any) -> str:
    """Wait until a record holds a text, and return all of it."""
    for _ in range(60):
        found = record.read_text("utf-8") if record.exists() else ""
        if text in found:
            return found
        page.wait_for_timeout(50)
    raise AssertionError(f"{record.name} never held {text!r}:\n{found}")


def at_rest(record: Path, page: Any) -> str:
    """Wait until nothing is written into a record any more, and return what it holds."""
    found = ""
    while (now := record.read_text("utf-8")) != found:
        found = now
        page.wait_for_timeout(500)
    return found


def paste(page: Any, field: str, block: str) -> None:
    """Paste a block of cells, as a spreadsheet copies it, into a field."""
    page.locator(field).first.evaluate(
        "(node, text) => { const data = new DataTransfer(); data.setData('text/plain', text);"
        " node.focus(); node.dispatchEvent(new ClipboardEvent('paste',"
        " { clipboardData: data, bubbles: true, cancelable: true })); }",
        block,
    )


def picture(page: Any, name: str) -> None:
    """Keep a picture of the page in the folder that the environment names, if it names one."""
    folder = os.environ.get(PICTURES)
    if folder:
        Path(folder).mkdir(parents=True, exist_ok=True)
        page.screenshot(path=str(Path(folder) / f"{name}.png"))
