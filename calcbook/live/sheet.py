"""The widgets of the page: a sheet for each section, and the typeface they share.

A sheet is one anywidget for a whole section. Fields, drop-downs and tables are the browser's own
controls, drawn and patched by ``sheet.js`` and the two files joined before it; formulas are
MathML. For schedules ipydatagrid, ipyaggrid and itables were considered: the first draws on a
canvas, where a screen reader finds no field and a heading cannot hold a formula; the second asks
for a licence for pasting blocks; the third shows and does not edit. A table of native fields gives
labels, keyboard, refusals at the cell and patches of single cells without a dependency.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import anywidget
import traitlets

if TYPE_CHECKING:
    from collections.abc import Callable

_HERE = Path(__file__).parent
_SCRIPTS = ("fields.js", "rows.js", "sheet.js")
_FONT = _HERE / "fonts" / "stix-two-math.woff2"


class Sheet(anywidget.AnyWidget):
    """The page of one section in the browser.

    Parameters
    ----------
    page
        The complete page (``patches.Page.data``). It is changed in place, so that a browser that
        opens it later gets it as it is then, and a change does not send all of it again.
    act
        Called with each message of the browser.
    """

    _esm = "\n".join((_HERE / name).read_text(encoding="utf-8") for name in _SCRIPTS)
    _css = _HERE / "page.css"
    page = traitlets.Dict().tag(sync=True)

    def __init__(self, page: dict[str, Any], act: Callable[[dict[str, Any]], None]) -> None:
        super().__init__(page=page)
        self.on_msg(lambda _widget, content, _buffers: act(content))


class Typeface(anywidget.AnyWidget):
    """The mathematical typeface (STIX Two Math, SIL Open Font License), given to the browser.

    It is never shown: its model alone adds the face to the document.
    """

    _esm = """
    function initialize({ model }) {
      const name = "STIX Two Math";
      if ([...document.fonts].some((face) => face.family.replaceAll('"', "") === name)) return;
      const bytes = model.get("font");
      new FontFace(name, bytes).load().then((face) => document.fonts.add(face));
    }
    export default { initialize };
    """
    font = traitlets.Bytes().tag(sync=True)

    def __init__(self) -> None:
        super().__init__(font=_FONT.read_bytes())


def share_typeface() -> None:
    """Give the browser the typeface, once for each kernel."""
    if not _SHARED:
        _SHARED.append(Typeface())


_SHARED: list[Typeface] = []
