"""From statements to the bytes of a PDF, by the typst library alone."""

from __future__ import annotations

import datetime as dt
import json
import re
from pathlib import Path
from typing import TYPE_CHECKING, Any

from calcbook.errors import PackError

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.pack.cover import Cover

STANDARDS = ["a-3a", "ua-1"]
TEMPLATES = Path(__file__).parent
MAIN = "page.typ"
NO_GLYPH = re.compile(r'the text `"(.*)"` could not be displayed')


def make_pack(
    cover: Cover,
    statements: list[dict[str, Any]],
    figures: Callable[[dict[str, Any], dict[str, Any]], bytes],
    *,
    title: str = "Calculation package",
) -> bytes:
    """Return the PDF of a calculation package.

    Parameters
    ----------
    cover
        The job data.
    statements
        One evaluated workbook each, in the order to be printed.
    figures
        Draws a figure item of a statement as SVG.
    title
        What the package is called on its cover.

    Raises
    ------
    PackError
        When there is nothing to print, or something that cannot be printed: an unreadable issue
        date, prose with HTML or TeX in it, a sign no font of the pack has, a figure that is no SVG.

    Notes
    -----
    The PDF claims PDF/A-3a and PDF/UA-1 by the checks of the typst library. Only the fonts inside
    that library are used and no clock is read, so equal input gives equal bytes.
    """
    from calcbook.pack.document import document  # noqa: PLC0415  (formulas load pint)

    data, files = document(cover, statements, figures, title=title)
    files["pack.json"] = json.dumps(data, ensure_ascii=False, allow_nan=False).encode()
    return typeset_pages(files, cover.date())


def typeset_pages(files: Mapping[str, bytes], date: dt.date) -> bytes:
    """Return the PDF of the page templates over the given files: pack.json and what it names."""
    import typst  # noqa: PLC0415  (heavy)

    midnight = dt.datetime.combine(date, dt.time(), dt.UTC)
    templates = {path.name: path.read_bytes() for path in sorted(TEMPLATES.glob("*.typ"))}
    try:
        pdf: bytes = typst.compile(  # type: ignore[call-overload]  # its stub knows no dict of files
            {"main": (TEMPLATES / MAIN).read_bytes(), **templates, **files},
            format="pdf",
            pdf_standards=STANDARDS,
            ignore_system_fonts=True,
            timestamp=int(midnight.timestamp()),
        )
    except typst.TypstError as error:
        raise _explained(error.message, error.hints) from error
    return pdf


def _explained(message: str, hints: list[str]) -> PackError:
    if found := NO_GLYPH.search(message):
        return PackError(
            "a sign cannot be printed: the fonts of the pack do not have it",
            hint="write it with Latin, Greek or Cyrillic letters and common signs",
            text=found[1],
        )
    return PackError(f"the pages cannot be set: {message}", hint="; ".join(hints))
