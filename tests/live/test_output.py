"""The stable output of a cell: Markdown with LaTeX, plain text, a picture."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from live_samples import WIND, make_job, opened

from calcbook.live import notebook, open_live, output
from calcbook.run import Filling, Runner

if TYPE_CHECKING:
    from calcbook.live import Session

FOLDER = Path(__file__).parents[2] / "workbooks"


@pytest.fixture(scope="module")
def wind_pressure() -> dict[str, Any]:
    """Return the statement of the wind template, run alone."""
    return Runner().run(Filling(FOLDER / "wind-pressure.ipynb"))[1]


def sections(statement: dict[str, Any]) -> list[dict[str, Any]]:
    """Return the sections of a statement."""
    return [p for p in statement["parts"] if p["kind"] == "section"]


def test_markdown_of_a_section(wind: Session) -> None:
    """Entries as list, formulas split at '=', the result bold, the check with its verdict."""
    told = output.markdown(wind.statement, wind.section("Pressure"))
    assert told.startswith("### 2 Pressure\n")
    assert "$$\n\\begin{aligned}\nq &= " in told
    assert " \\\\\n&= \\boldsymbol{3.004\\,\\mathrm{kPa}}\n\\end{aligned}\n$$" in told
    assert "positive toward the surface" in told
    assert "ratio 0.75: **satisfied**" in told
    site = output.markdown(wind.statement, wind.section("Site"))
    assert "**1.2** Basic wind speed: $V$ = 70 m/s (range 10 m/s to 120 m/s; map; " in site
    assert "; **not confirmed**)" in site
    assert "C: open country" in site


def test_a_schedule_is_a_markdown_table(wind: Session) -> None:
    """One row per key, numbers to the right, totals last."""
    told = output.markdown(wind.statement, wind.section("Floors"))
    assert "| Level | $z$ (m) | Use | $F$ (kN) |\n| :--- | ---: | :--- | ---: |\n" in told
    assert re.search(r"\| Roof \| 7\.2 \| roof \| 43\.2\d* \|", told)
    assert "| **Total** |  |  | **64." in told


@pytest.fixture(scope="module")
def by_case() -> str:
    """Return a section as plain text: a check from below, a column by case, governing rows."""
    book = open_live("cases", "Cases")
    with book.section("Rows") as s:
        s.entry("a", "Length where C_p holds", "3 m", unit="length")
        s.check("a >= '0 m'", "Not below the ground")
        s.remark("Only for short ones.", "reason", when="a < '1 m'")
        keys = [{"key": key, "n": n} for key, n in (("P", "1"), ("Q", "2"), ("R", "3"))]
        with s.schedule("cells", "Cells", heading="Cell", rows=keys) as t:
            t.entry("n", "Count")
            t.line(
                "w",
                "Width",
                unit="length",
                cases=[("n == 1", "a"), ("n == 2", "a"), ("n == 3", "2*a")],
            )
            t.line("u", "Rest", cases=[("n == 1", "n/2"), ("n == 2", "n/2"), ("n == 3", "n/3")])
            t.governing("w", "largest")
            t.governing("w", "smallest")
    statement = book.statement()
    return output.plain(statement, sections(statement)[0])


def test_a_limit_from_below_is_told_as_one(by_case: str) -> None:
    """What must be at least something is a value, not a demand; the ratio is unchanged."""
    assert "value 3.000 m, at least 0.000 m: satisfied" in by_case


def test_a_remark_that_does_not_apply_says_so(by_case: str) -> None:
    """Its number does not stand alone: the reason stands beside it."""
    assert re.search(r"^1\.3 not applied: .+", by_case, re.MULTILINE)


def test_columns_by_case_show_their_formulas(by_case: str) -> None:
    """Each formula is told with its conditions, those that follow each other joined by 'or'."""
    assert "u: Rest, by case:" in by_case
    assert "u = n / 2 where n = 1 or n = 2" in by_case
    assert "u = n / 3 where n = 3" in by_case
    assert "w: Width\n" in by_case


def test_each_governing_row_is_headed(by_case: str) -> None:
    """The lines worked in a row stand under its key and what it governs."""
    largest = by_case.index("Row R, largest w\n")
    smallest = by_case.index("Row P, smallest w\n")
    assert "w = 2 a" in by_case[largest:smallest]


def test_words_cannot_break_the_markdown(wind: Session) -> None:
    """Signs that mean something in Markdown are escaped, line ends are spaces."""
    section = json.loads(json.dumps(wind.section("Open country")))
    section["items"][0]["text"] = "a*b_and_c | <i> $5\nnext"
    told = output.markdown(wind.statement, section)
    assert r"a\*b\_and\_c \| \<i\> \$5 next" in told


def test_plain_text_of_a_section(wind: Session) -> None:
    """The same in plain characters, the equal signs under each other."""
    told = output.plain(wind.statement, wind.section("Pressure"))
    assert "    q = 0.613 kg/m³ · V²\n" in told or "    q = 0.613 kg/m³ V²\n" in told
    assert "      = 3.004 kPa" in told


def test_every_section_of_the_wind_template_prints(wind_pressure: dict[str, Any]) -> None:
    """Both outputs exist for every section, name every item and hold no address or tag."""
    for section in sections(wind_pressure):
        for told in (
            output.markdown(wind_pressure, section), output.plain(wind_pressure, section),
        ):  # fmt: skip
            assert section["title"] in told
            assert " at 0x" not in told
            assert "<m" not in told
            if section["applies"]:
                assert all(item["number"] in told for item in section["items"])


def test_the_output_is_the_same_in_another_run(wind_pressure: dict[str, Any]) -> None:
    """A second run of the same notebook gives the same words and the same picture."""
    again = Runner().run(Filling(FOLDER / "wind-pressure.ipynb"))[1]
    pictures = 0
    for one, two in zip(sections(wind_pressure), sections(again), strict=True):
        assert output.markdown(wind_pressure, one) == output.markdown(again, two)
        assert output.plain(wind_pressure, one) == output.plain(again, two)
        picture = output.picture(wind_pressure, one)
        assert picture == output.picture(again, two)
        pictures += picture is not None
    assert pictures >= 2


def test_a_cell_shows_one_bundle_without_widgets_where_no_one_looks(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Without a front end the bundle has Markdown and plain text, and no widget."""
    monkeypatch.chdir(make_job(tmp_path / "job").folder)
    shown: list[dict[str, Any]] = []
    monkeypatch.setattr(notebook, "publish", lambda bundle, _metadata: shown.append(bundle))
    book = open_live("wind", "Wind")
    with book.section("Site") as s:
        s.entry("V", "Basic wind speed", "70 m/s", unit="speed")
    assert [set(bundle) for bundle in shown] == [{"text/markdown", "text/plain"}]
    assert "70 m/s" in shown[0]["text/markdown"]


def test_a_front_end_gets_the_widget_too(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """With a front end the same bundle also names the view."""
    monkeypatch.chdir(make_job(tmp_path / "job").folder)
    shown: list[dict[str, Any]] = []
    monkeypatch.setattr(notebook, "publish", lambda bundle, _metadata: shown.append(bundle))
    monkeypatch.setattr(notebook, "has_widgets", lambda: True)
    book = open_live("wind", "Wind")
    with book.section("Site") as s:
        s.entry("V", "Basic wind speed", "70 m/s", unit="speed")
    assert shown[0][notebook.WIDGET]["model_id"]


def test_plain_python_prints_plain_text(capsys: pytest.CaptureFixture[str]) -> None:
    """A notebook's code run as a script prints its sections."""
    book = open_live("alone", "Alone")
    with book.section("Sum") as s:
        s.line("a = 1 + 2", "A sum")
    assert "a = 1 + 2" in capsys.readouterr().out


def test_what_was_typed_outside_a_job_survives_opening_again() -> None:
    """Run all cells again keeps what was typed in this kernel."""
    former = open_live("kept", "Kept")
    with former.section("One") as s:
        s.entry("a", "Length", "1 m", unit="length")
    session = former.on_show.__self__  # type: ignore[attr-defined]
    session.enter("a", "3 m")
    again = open_live("kept", "Kept")
    with again.section("One") as s:
        s.entry("a", "Length", "1 m", unit="length")
    assert again.readings.given["a"].text == "3 m"


def test_the_notebook_named_by_the_server_must_be_the_workbooks(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A second notebook that claims a record of the job is refused when it is opened."""
    job = make_job(tmp_path / "job")
    copy = job.folder / "wind copy.ipynb"
    copy.write_text((job.folder / "wind.ipynb").read_text(encoding="utf-8"), encoding="utf-8")
    monkeypatch.chdir(job.folder)
    monkeypatch.setenv("JPY_SESSION_NAME", str(copy))
    with pytest.raises(Exception, match=r"wind copy\.ipynb"):
        open_live("wind", "Wind")


def test_views_and_output_tell_the_same(wind: Session) -> None:
    """The page and the plain text show the same values: both come from the same blocks."""
    from widgets_in import text  # noqa: PLC0415

    told = output.plain(wind.statement, wind.section("Floors"))
    values = re.findall(r"\d+\.\d{2,}", told)
    assert values
    assert all(value in text(wind, "Floors") for value in values)


def test_an_opened_sample_shows_every_section(wind: Session) -> None:
    """Each declared section has a view."""
    assert list(wind.views) == ["Site", "Pressure", "Floors", "Open country"]
    assert opened(WIND, None).views.keys() == wind.views.keys()
