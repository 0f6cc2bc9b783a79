"""Workbooks with marks: what the first mark has said is not printed again."""

from __future__ import annotations

import copy
import io
from typing import Any

import clinic
import pypdf
import pytest

from calcbook.pack import make_pack


def marks() -> list[dict[str, Any]]:
    """Return the wind workbook as two marks; the second has another wind speed."""
    first, second = clinic.wind_pressure(), copy.deepcopy(clinic.wind_pressure())
    first["mark"], second["mark"] = "W-1", "W-2"
    for part in second["parts"]:
        for item in part.get("items", ()):
            if item["kind"] == "entry":
                item["source"] = "another map"
    return [clinic.design_basis(), first, second]


@pytest.fixture(scope="module")
def pages() -> list[str]:
    """Return the text of every page of a pack with two marks."""
    pdf = make_pack(clinic.cover(), marks(), clinic.drawn)
    return [page.extract_text() for page in pypdf.PdfReader(io.BytesIO(pdf)).pages]


def of_mark(pages: list[str], mark: str) -> str:
    """Return the text of the pages of one mark, by the strip at their head."""
    return "\n".join(p for p in pages if f", {mark} |" in p.replace("\n", " | "))


def test_a_later_mark_refers_to_the_first(pages: list[str]) -> None:
    """Prose and remarks stand with W-1; W-2 says where, with the page."""
    second = of_mark(pages, "W-2")
    assert "Method, limits, remarks and what columns are" in second
    assert "W-1, p." in second
    assert "Method, limits, remarks and what columns are" not in of_mark(pages, "W-1")
    remark = next(i["text"] for p in marks()[1]["parts"] for i in p.get("items", ())
                  if i["kind"] == "remark")  # fmt: skip
    assert remark[:25] in of_mark(pages, "W-1").replace("\n", " ")
    assert remark[:25] not in second.replace("\n", " ")


def test_what_differs_is_printed(pages: list[str]) -> None:
    """Sections with another source are printed in full, unchanged ones referred to."""
    second = of_mark(pages, "W-2")
    assert "another map" in second
    assert ": as in " in second


def test_assumptions_are_listed_once(pages: list[str]) -> None:
    """The list of assumptions has each once, whatever the number of marks."""
    texts = {i["text"] for p in marks()[1]["parts"] for i in p.get("items", ())
             if i["kind"] == "remark" and i["tone"] in ("assumption", "not covered")}  # fmt: skip
    assert texts
    front = " ".join(p.replace("\n", " ") for p in pages if "cover and summary" in p)
    for text in texts:
        assert front.count(text[:20]) == 1


def test_cover_counts_marks(pages: list[str]) -> None:
    """The cover names the workbook once, with the number of its marks."""
    assert "2 marks" in pages[0]
