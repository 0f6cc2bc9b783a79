from __future__ import annotations

import io
import json
import re
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import clinic
import pikepdf
import pypdf
import pytest

from calcbook.errors import PackError
from calcbook.pack import make_pack
from calcbook.pack.schedules import table

HOSTILE = '#panic("x") *b* $x$ @ref <l> [ ] \\ "'


def texts(pdf: bytes) -> list[str]:
    """Return the text of every page, with single spaces and without soft break marks."""
    pages = pypdf.PdfReader(io.BytesIO(pdf)).pages
    return [" ".join(p.extract_text().replace("\u200b", "").split()) for p in pages]


def one(*items: clinic.Plain, **more: object) -> clinic.Plain:
    """Return a statement with one section of these items."""
    made = clinic.statement("beam", "Floor beam", clinic.section("1", "Entries", *items))
    return made | more


def packed(*statements: clinic.Plain, **cover: str) -> bytes:
    """Return the pack of these statements under the sample cover."""
    return make_pack(clinic.cover(**cover), list(statements), clinic.drawn)


@pytest.fixture(scope="module")
def statements() -> list[clinic.Plain]:
    """Return the two sample statements."""
    return [clinic.design_basis(), clinic.wind_pressure()]


@pytest.fixture(scope="module")
def pdf(statements: list[clinic.Plain]) -> bytes:
    """Return the pack of the sample job."""
    return make_pack(clinic.cover(), statements, clinic.drawn)


@pytest.fixture(scope="module")
def pages(pdf: bytes) -> list[str]:
    """Return the text of each page of the sample pack."""
    return texts(pdf)


@pytest.fixture(scope="module")
def whole(pages: list[str]) -> str:
    """Return the text of the sample pack."""
    return " ".join(pages)


def test_standards_are_claimed(pdf: bytes) -> None:
    """The file claims PDF/A-3a and PDF/UA-1, is tagged, and has title, language and outline."""
    with pikepdf.open(io.BytesIO(pdf)) as opened, opened.open_metadata() as claims:
        assert (claims["pdfaid:part"], claims["pdfaid:conformance"]) == ("3", "A")
        assert claims["pdfuaid:part"] == "1"
        assert claims["dc:title"] == "Calculation package: Marrowick Community Clinic"
        assert opened.Root.MarkInfo.Marked
        assert str(opened.Root.Lang) == "en"
        with opened.open_outline() as outline:
            titles = [entry.title for entry in outline.root]
    assert [
        t for t in titles if t in ("Design basis", "Wind pressure on the main frame")
    ] == titles[titles.index("Design basis") : titles.index("Design basis") + 2]


def test_date_is_that_of_issue(pdf: bytes) -> None:
    """The file is dated by the job's issue date, not by the clock."""
    dated = pypdf.PdfReader(io.BytesIO(pdf)).metadata
    assert dated is not None
    assert dated.creation_date is not None
    assert dated.creation_date.date().isoformat() == "2026-11-20"
    assert dated.author == "RA"


def test_statements_are_attached(pdf: bytes, statements: list[clinic.Plain]) -> None:
    """Each attached JSON file equals its statement and is marked as the data of the pages."""
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        found = {
            name: json.loads(spec.get_file().read_bytes())
            for name, spec in opened.attachments.items()
        }
        relations = {str(spec.obj.AFRelationship) for spec in opened.attachments.values()}
    expected = {f"{s['workbook']}.json": s for s in statements}
    assert found == expected
    assert relations == {"/Data"}


def test_marks_give_their_own_attachment() -> None:
    """Two marks of one workbook are attached under two names."""
    pdf = packed(one(mark="B1"), one(mark="B2"))
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        assert set(opened.attachments) == {"beam.B1.json", "beam.B2.json"}


def test_same_input_same_bytes(pdf: bytes, statements: list[clinic.Plain]) -> None:
    """A second pack of the same statements, made in another process, has the same bytes."""
    script = (
        "import sys, clinic; from calcbook.pack import make_pack;"
        "sys.stdout.buffer.write(make_pack(clinic.cover(), "
        "[clinic.design_basis(), clinic.wind_pressure()], clinic.drawn))"
    )
    again = subprocess.run(
        [sys.executable, "-c", script], cwd=Path(__file__).parent, capture_output=True, check=True
    )
    assert again.stdout == pdf
    assert make_pack(clinic.cover(), statements, clinic.drawn) == pdf


def test_every_page_says_page_n_of_m(pages: list[str]) -> None:
    """Every page carries job, number, revision, date, initials and 'page n of m'."""
    for count, page in enumerate(pages, start=1):
        assert f"page {count} of {len(pages)}" in page
        assert "MC-0417" in page
        assert "revision B, 2026-11-20" in page
        assert "prepared RA" in page


def test_first_page_counts(pages: list[str]) -> None:
    """Page one gives unconfirmed entries, verdicts, problems, memory, codes and the caution."""
    first = pages[0]
    assert "4 entries and rows not confirmed" in first
    assert "1 check satisfied" in first
    assert "1 check NOT SATISFIED" in first
    assert "1 check not decided" in first
    assert "3 items with a problem" in first
    assert "2 values of the code set from memory: confirm against the code" in first
    assert "Volume 1, 7th edition" in first
    assert "judgement of a licensed engineer" in first
    assert "local building code in force governs" in first
    assert "moved on since taken" in first
    assert "same person" not in first


def test_what_did_not_move_on_is_not_counted() -> None:
    """A count of carried values that moved on is printed only where there are some."""
    assert "moved on" not in texts(packed(one()))[0]


def test_values_from_memory_are_listed(pages: list[str]) -> None:
    """Each is listed with its clause and page, columns of a schedule too."""
    first = next(page for page in pages if "Values from memory, to be confirmed" in page)
    assert "2.8 Force coefficient of a wall maker's data p." in first
    assert "3.1 Exposure coefficient at roof height Table 207B.3-1 p." in first
    column = clinic.column("K_z", "Exposure", "", "computed", ["1"], formula="2*z", memory=True)
    made = clinic.schedule("1.1", "s", "Levels", ["Roof"], columns=[column | {"number": "1.1.2"}])
    counted = {**one()["counts"], "memory": 2}
    remark = clinic.item("remark", "1.2", tone="caution", text="Torsion.", memory=True)
    whole = " ".join(texts(packed(one(made, remark, counts=counted))))
    assert "1.1 Exposure no clause named p." in whole
    assert "1.2 Torsion. no clause named p." in whole
    assert "Values from memory, to be confirmed" not in " ".join(texts(packed(one())))


def test_words_left_empty_are_neither_confirmed_nor_waited_for() -> None:
    """Nothing entered is said where it stands; it is not listed among what nobody confirmed."""
    empty = {"text": "", "source": "", "confirmed": "", "fallback": False}
    seen = clinic.item("text", "1.1", "seen_by", "Seen by", **empty)
    revision = clinic.item("text", "1.2", "revision", "Revision", **(empty | {"text": "B"}))
    whole = " ".join(texts(packed(one(seen, revision))))
    assert whole.count("nothing entered") == 1
    assert whole.count("1.1 Seen by") == 1
    assert whole.count("1.2 Revision") == 2
    assert "1 entry or row not confirmed" in whole


@pytest.mark.parametrize("checked", ["RA", " ra "])
def test_same_person_is_warned_of(checked: str) -> None:
    """When one person prepared and checked, page one says so in words."""
    assert "prepared and checked by the same person" in texts(packed(one(), checked=checked))[0]
    assert "same person" not in texts(packed(one(), checked="TV"))[0]


@pytest.mark.parametrize(
    "printed",
    [
        "demand 1.908, limit 2.400 kPa, ratio 0.80: satisfied",
        "demand 41.2, limit 39.0 mm, ratio 1.06: NOT SATISFIED",
        "demand not available, limit 120.0 kN: not decided",
        "not confirmed: template value",
        "confirmed RA 2026-10-02: drawing A-201",
        "250 km/h = 69.44 m/s",
        "from design basis 1.4, p. 3",
        "Stale: was 15.2 m when taken, is now 15.6 m",
        "2.6, 2.7 not applied: roof is flat",
        "4 Roof zones: not applied: roof is flat",
        "from memory: confirm against the code",
        "Problem: not available because",
        "Not accepted: unknown name 'hh' in the formula; did you mean 'h'?",
        "Governing row: Roof, largest",
        "Assumption (1): The ground floor slab",
        "Not covered (2): Components and cladding.",
        "Caution: Openings on one side",
        "Reason: The wind from the sea governs.",
        "Figure 6.7. Pressure on the elevation",
        "C: open terrain",
        "not confirmed: Ground",
        "Positive sense. pressure: toward the surface.",
        "applies because roof is flat",
        "result, positive: toward the surface",
        "Eq. 207B.3-1",
    ],
)
def test_key_words_are_printed(printed: str, whole: str) -> None:
    """Verdicts, marks of confirmation, origins, reasons and tones are printed in words."""
    assert printed in whole


def test_uses_lead_to_pages(pdf: bytes, pages: list[str]) -> None:
    """'used in' gives item numbers with the page each stands on, and both are links."""
    found = re.search(r"used in 5\.1, 6\.1, 3\.5 p\. (\d+)", " ".join(pages))
    assert found is not None
    assert "Windward wall" in pages[int(found[1]) - 1]
    links = [
        note
        for page in pypdf.PdfReader(io.BytesIO(pdf)).pages
        for note in page.get("/Annots", [])
        if note.get_object()["/Subtype"] == "/Link"
    ]
    assert len(links) > len(pages)


def test_header_row_is_repeated(pages: list[str]) -> None:
    """A schedule of sixty rows breaks over pages with its header on each, and loses no row."""
    carrying = [page for page in pages if "wards and treatment rooms" in page]
    assert len(carrying) >= 2
    assert all("floor kPa" in page for page in carrying)
    for row in range(1, 61):
        assert any(re.search(rf"Level {row} {round(3.9 * row, 1):g} ", page) for page in pages)


@pytest.mark.parametrize("rows", [5, 40])
def test_a_table_is_not_parted_from_its_title(rows: int) -> None:
    """Wherever the page ends, the title stands with the head and the first three rows at least."""
    keys = [f"Level {n}" for n in range(rows)]
    columns = [clinic.column("p", "pressure", "kPa", "computed", ["1.0"] * rows, formula="2*z")]
    table = clinic.schedule("1.90", "s", "Title of the table", keys, columns=columns)
    split = 0
    for count in range(36, 48, 2):
        filling = [clinic.entry(f"1.{n}", "x", "filling", "5.5", "m") for n in range(count)]
        pages = texts(packed(one(*filling, table)))
        page = next(page for page in pages if "1.90 Title of the table" in page)
        assert "Level 0" in page
        assert "Level 2 " in page
        split += "filling" not in page
    assert 0 < split < 6


def test_columns_are_explained_in_their_order() -> None:
    """Symbols follow the columns; one worked below is named, cases of one formula are joined."""
    cases = [("n == 1", "2*z"), ("n == 2", "2*z"), ("", "z")]
    by_case = [{"when": when, "formula": formula, "holds": False} for when, formula in cases]
    line = clinic.line("1.1.1", "w", "Worked", "z*2") | {"row": "A"}
    item = clinic.schedule(
        "1.1", "s", "Rows", ["A"],
        columns=[
            clinic.column("a", "First", "", "computed", ["1"], formula="z+1"),
            clinic.column("z", "Height", "m", "entered", ["1"]),
            clinic.column("w", "Worked", "", "computed", ["1"], formula="z*2"),
            clinic.column("u", "Cases", "", "computed", ["1"], cases=by_case),
        ],
        envelope=[{"row": "A", "which": "largest", "column": "w", "meaning": "Worked",
                   "value": clinic.value("1")}],
        governing={"row": "A", "why": "largest w", "column": "w", "lines": [line]},
    )  # fmt: skip
    whole = " ".join(texts(packed(one(item))))
    places = [whole.index(words) for words in (", First", "Height, entered; ", "Cases, by case:")]
    assert places == sorted(places)
    assert "Worked" in whole[places[1] : places[2]]
    cases_told = whole[places[2] : whole.index("Row A")]
    assert cases_told.count(" where ") == 1
    assert cases_told.count(" or ") == 1
    assert "otherwise" in cases_told


def test_each_governing_row_is_headed() -> None:
    """The lines of a row stand under its key and all it governs."""
    lines = [
        clinic.line(f"1.1.{n}", name, f"Worked {name} {row}", "2*z", value=clinic.value("1"))
        | {"row": row}
        for n, (row, name) in enumerate([("A", "M"), ("B", "N")])
    ]
    envelope = [
        {"row": row, "which": which, "column": name, "meaning": "", "value": clinic.value("1")}
        for row, which, name in [("A", "largest", "M"), ("B", "smallest", "N"), ("A", "least", "V")]
    ]
    item = clinic.schedule(
        "1.1", "s", "Rows", ["A", "B"], envelope=envelope,
        columns=[clinic.column("M", "M", "", "computed", ["1", "1"], formula="2*z")],
        governing={"row": "A", "why": "largest M", "column": "M", "lines": lines},
    )  # fmt: skip
    whole = " ".join(texts(packed(one(item))))
    whole = whole[whole.index("Row A") :]
    found = [
        whole.index(words)
        for words in ("Row A, largest", ", least", "Worked M A", "Row B, smallest", "Worked N B")
    ]
    assert found == sorted(found)


def test_only_what_is_shown_as_typed_is_marked() -> None:
    """A cell typed in another unit is shown converted, and not underlined as if typed."""
    column = clinic.column(
        "z", "height", "m", "entered", ["3.658", "3.6"], typed=["12 ft", "3.6 m"]
    )
    item = clinic.schedule("1.1", "s", "Levels", ["A", "B"], columns=[column])
    assert [cell["typed"] for cell in table(item)["columns"][1]["cells"]] == [False, True]


def test_totals_are_printed(whole: str) -> None:
    """The totals row gives the sums of the statement."""
    assert "Total 27000.00 130950.0" in whole


def alternative_texts(pdf: bytes) -> list[str]:
    """Return every alternative text of the tagged file."""
    with pikepdf.open(io.BytesIO(pdf)) as opened:
        return [
            str(entry.Alt)
            for entry in opened.objects
            if isinstance(entry, pikepdf.Dictionary) and "/Alt" in entry and "/S" in entry
        ]


def test_formulas_and_figures_are_spoken(pdf: bytes) -> None:
    """Formulas carry a spoken sentence and figures their alternative text."""
    spoken = alternative_texts(pdf)
    assert any(alt.startswith("q_h equals 0.613") and "2.761" in alt for alt in spoken)
    assert "Elevation of the clinic with arrows toward the windward wall" in spoken


def test_hostile_text_is_printed_literally() -> None:
    """Text that looks like markup or code stands on the page as typed, wherever it comes from."""
    items = [
        clinic.entry("1.1", "x", HOSTILE, "5.5", "m", source=HOSTILE, note=HOSTILE, clause=HOSTILE),
        clinic.item("remark", "1.2", tone="caution", text=HOSTILE),
        clinic.item("error", "1.3", text=HOSTILE, source=HOSTILE),
        clinic.schedule("1.4", "s", HOSTILE, [HOSTILE, "b"], columns=[
            clinic.column("use", HOSTILE, "", "text", [HOSTILE, ""])]),
        clinic.item("figure", "1.5", figure="f", uses={}, caption=HOSTILE, alt=HOSTILE),
    ]  # fmt: skip
    pdf = packed(one(*items, title=HOSTILE), job=HOSTILE, place=HOSTILE)
    assert " ".join(texts(pdf)).count(HOSTILE) >= 14
    assert HOSTILE in alternative_texts(pdf)


def pieces(page: pypdf.PageObject) -> list[tuple[str, float, float, float]]:
    """Return each piece of text with where it begins, its height above the foot, and its size."""
    found: list[tuple[str, float, float, float]] = []

    def visit(text: str, cm: list[float], tm: list[float], *font: object) -> None:
        x = tm[4] * cm[0] + tm[5] * cm[2] + cm[4]
        y = tm[4] * cm[1] + tm[5] * cm[3] + cm[5]
        if text.strip():
            found.append((text.strip(), x, y, float(str(font[-1]))))

    page.extract_text(visitor_text=visit)
    return found


def outside(pdf: bytes) -> list[str]:
    """Return the pieces of text that begin, or surely end, outside the margins of their page."""
    found: list[str] = []
    for page in pypdf.PdfReader(io.BytesIO(pdf)).pages:
        right, top = float(page.mediabox.width) - 38, float(page.mediabox.height) - 20
        for text, x, y, size in pieces(page):
            across = x >= 56 and x + 0.2 * size * len(text) <= right
            if not across or not 40 <= y <= top:
                found.append(text)
    return found


def test_wide_content_stays_on_the_page(pdf: bytes) -> None:
    """Nothing of the sample, nor of schedules of 14 and 40 columns, leaves the page."""
    rows = [f"Level {n}" for n in range(12)]

    def wide(number: str, count: int) -> clinic.Plain:
        columns = [
            clinic.column(
                f"p_{n}", "pressure", "kPa", "computed", ["-1234.567"] * 12, formula="2*z"
            )
            for n in range(count)
        ]
        return clinic.schedule(number, f"s{count}", "Wide", rows, columns=columns)

    made = packed(one(wide("1.1", 14), wide("1.2", 40)), job="J" * 300, number="N" * 90)
    sizes = {tuple(map(float, p.mediabox[2:])) for p in pypdf.PdfReader(io.BytesIO(made)).pages}
    assert {(round(w), round(h)) for w, h in sizes} == {(595, 842), (842, 595)}
    assert outside(made) == []
    assert outside(pdf) == []
    assert " ".join(texts(made)).count("1234.567") == 12 * 54


def test_us_units_print_on_letter() -> None:
    """A job in US units is printed on letter paper, another on A4."""
    letter = pypdf.PdfReader(io.BytesIO(packed(one(units="US")))).pages[0].mediabox
    a4 = pypdf.PdfReader(io.BytesIO(packed(one()))).pages[0].mediabox
    assert (float(letter.width), float(letter.height)) == (612.0, 792.0)
    assert (round(float(a4.width)), round(float(a4.height))) == (595, 842)


def test_nothing_to_print_is_refused() -> None:
    """A pack without workbooks is refused."""
    with pytest.raises(PackError, match="no workbook to print"):
        packed()


def test_unreadable_date_is_refused() -> None:
    """An issue date that is none is refused with the form to write it in."""
    with pytest.raises(PackError, match="2026-11-20"):
        make_pack(replace(clinic.cover(), issue_date="20.11.2026"), [one()], clinic.drawn)


def test_sign_without_glyph_is_refused() -> None:
    """A sign no font of the pack has is named instead of being dropped."""
    with pytest.raises(PackError, match="診"):
        packed(one(), place="診療所")


def test_figure_that_is_no_svg_is_refused() -> None:
    """A figure that was not drawn as SVG is refused with its place."""
    item = clinic.item("figure", "1.1", figure="plan", uses={}, caption="Plan", alt="Plan")
    with pytest.raises(PackError, match=r"Floor beam, beam 1\.1: the figure 'plan'"):
        make_pack(clinic.cover(), [one(item)], lambda _s, _i: b"\x89PNG")


def test_unknown_item_is_refused() -> None:
    """An item of an unknown kind is refused, not left out."""
    with pytest.raises(PackError, match="'sketch' cannot be printed"):
        packed(one(clinic.item("sketch", "1.1")))


def test_undated_job_says_so() -> None:
    """A job without revision, date and initials is packed, and every page says what is missing."""
    pages = texts(packed(one(), revision="", issue_date="", prepared="", number="", place=""))
    assert all("no revision, not dated" in page for page in pages)
    assert "job number not given" in pages[0]


def test_a_schedule_without_rows_is_one_line() -> None:
    """An optional schedule that lists nothing says none, without its columns and formulas."""
    load = clinic.column("P", "Point load", "kN", "computed", [], formula="2*w")
    table = clinic.schedule("1.1", "points", "Point loads", [], columns=[load], fallback=True)
    said = " ".join(texts(packed(one(table))))
    assert "Point loads none" in said
    assert "fallback" not in said
    assert "Level" not in said
