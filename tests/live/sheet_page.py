"""A sheet drawn by Chromium without JupyterLab: its script, its style, and a view behind it."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import calcbook.live
from calcbook.live.sheet import Sheet

if TYPE_CHECKING:
    import pytest

    from calcbook.live.view import SectionView

STYLE = Path(calcbook.live.__file__).with_name("page.css")
START = """
async ([script, style, page]) => {
  document.head.append(Object.assign(document.createElement("style"), { textContent: style }));
  document.body.innerHTML =
    '<div class="jp-OutputArea-child" id="still">still</div>' +
    '<div class="jp-OutputArea-child"><div id="sheet"></div></div>';
  const url = URL.createObjectURL(new Blob([script], { type: "text/javascript" }));
  const sheet = window.sheet = await import(url);
  window.sent = [];
  const model = {
    get: () => page,
    send: (message) => window.sent.push(message),
    on: (event, receive) => { window.deliver = receive; },
  };
  sheet.default.initialize({ model });
  window.leave = sheet.default.render({ model, el: document.querySelector("#sheet") });
}
"""


class SheetPage:
    """A view and the browser page that shows it; messages go to and fro on ``settle``."""

    def __init__(self, page: Any, view: SectionView, monkeypatch: pytest.MonkeyPatch) -> None:
        self.page, self.view = page, view
        self.patches: list[dict[str, Any]] = []
        self.messages: list[dict[str, Any]] = []
        monkeypatch.setattr(Sheet, "send", lambda _sheet, patch: self.patches.append(patch))
        style = STYLE.read_text(encoding="utf-8")
        page.evaluate(START, [str(Sheet._esm), style, view.box.page])
        self.settle()

    def settle(self) -> None:
        """Hand over what the browser sent, and what the view answered."""
        for message in self.page.evaluate("() => window.sent.splice(0)"):
            self.messages.append(message)
            self.view.act(message)
        self.deliver()

    def deliver(self) -> None:
        """Hand over what the view sent."""
        while self.patches:
            self.page.evaluate("patch => window.deliver(patch)", self.patches.pop(0))

    def press(self, *keys: str) -> None:
        """Press keys where the focus is, and let both sides settle."""
        for key in keys:
            self.page.keyboard.press(key)
        self.settle()

    def paste(self, text: str) -> None:
        """Paste text where the focus is."""
        self.page.evaluate(
            "text => { const data = new DataTransfer(); data.setData('text/plain', text);"
            " document.activeElement.dispatchEvent(new ClipboardEvent('paste',"
            " { clipboardData: data, bubbles: true, cancelable: true })); }",
            text,
        )
        self.settle()

    def focused(self) -> str:
        """Return the label of the element that has the focus."""
        return str(self.page.evaluate("document.activeElement.getAttribute('aria-label')"))

    def did(self) -> list[dict[str, Any]]:
        """Return what was asked for, without running numbers."""
        return [{k: v for k, v in m.items() if k != "n"} for m in self.messages]
