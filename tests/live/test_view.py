"""What a view shows beside its fields, and how it answers a browser."""

from __future__ import annotations

import json
import shutil
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from live_samples import WIND, opened
from widgets_in import field, text

from calcbook import figures
from calcbook.errors import InputError
from calcbook.job import Job
from calcbook.live import Session, notebook, output
from calcbook.live.sheet import Sheet
from calcbook.record import CarriedRecord

if TYPE_CHECKING:
    from calcbook.live.view import SectionView

DEMO = Path(__file__).parents[2] / "workbooks" / "demo"


@pytest.fixture
def sent(monkeypatch: pytest.MonkeyPatch) -> list[dict[str, Any]]:
    """Return what is sent to browsers."""
    found: list[dict[str, Any]] = []
    monkeypatch.setattr(Sheet, "send", lambda _sheet, patch: found.append(patch))
    return found


def live(sections: int, name: str, folder: Path, monkeypatch: pytest.MonkeyPatch) -> Session:
    """Open the first sections of a workbook of the demo job, a view for each."""
    job = Path(shutil.copytree(DEMO, folder / "demo"))
    monkeypatch.setattr(notebook, "publish", lambda *_: None)
    session = Session(name, name.replace("-", " "), job=Job.load(job))
    space: dict[str, Any] = {"book": session.book}
    cells = json.loads((job / f"{name}.ipynb").read_text(encoding="utf-8"))["cells"]
    sources = ["".join(c["source"]) for c in cells if c["cell_type"] == "code"]
    for source in sources[1 : 1 + sections]:
        exec(source, space)  # noqa: S102  our own workbook
    for section in list(session.book.sections):
        session.view(section.title)
    return session


@pytest.fixture
def column(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Session:
    """Return the column workbook of the demo job as far as its levels."""
    return live(4, "column-accumulation", tmp_path, monkeypatch)


def test_a_message_is_answered_with_its_number(wind: Session, sent: list[dict[str, Any]]) -> None:
    """What changed comes first; the last patch says which message was dealt with."""
    view = wind.views["Site"]
    assert isinstance(view.box, Sheet)
    view.act({"do": "enter", "name": "V", "text": "80", "n": 7})
    assert sent[0]["rows"]["V"]["field"]["text"] == "80"
    assert sent[-1]["ack"] == 7
    view.act({"do": "enter", "name": "V", "text": "1,5 m", "n": 8})
    assert sent[-1]["ack"] == 8


def test_a_browser_says_hello(wind: Session, sent: list[dict[str, Any]]) -> None:
    """One that has the page as it is gets nothing; one that is behind gets all of it."""
    view = wind.views["Site"]
    page = view.box.page
    view.act({"do": "hello", "serial": page["serial"]})
    assert sent == []
    view.act({"do": "hello", "serial": page["serial"] - 1})
    assert [patch["type"] for patch in sent] == ["page"]
    assert sent[0]["page"] == page


def test_a_message_nobody_knows_is_told(wind: Session) -> None:
    """Something unforeseen in a message is shown at the section, with where it happened."""
    view = wind.views["Site"]
    view.act({"do": "fly", "name": "V"})
    assert "KeyError" in text(wind, "Site")
    assert "<details>" in view.head["trouble"]
    view.act({"do": "enter", "name": "V", "text": "80"})
    assert view.head["trouble"] == ""


def test_a_refused_text_can_be_let_go(wind: Session) -> None:
    """The field shows the text in force again, and its mark is back."""
    field(wind, "Site", "Basic wind speed").value = "1,5 m"
    view = wind.views["Site"]
    assert view.rows["V"]["confirm"] is None
    assert view.rows["V"]["field"]["force"] == "70"
    view.act({"do": "drop", "name": "V"})
    assert view.rows["V"]["field"]["text"] == "70"
    assert view.rows["V"]["field"]["refused"] == ""
    assert view.rows["V"]["confirm"] is not None


def test_a_cell_in_another_unit_has_its_value_beside_it(wind: Session) -> None:
    """12 ft under a heading in metres is kept, with 3.6576 beside it."""
    field(wind, "Floors", "Elevation", 1).value = "12 ft"
    cells = wind.views["Floors"].rows["floors"]["cells"]
    assert cells["Level 2"]["z"]["beside"] == "= 3.6576"
    assert cells["Roof"]["z"]["beside"] == ""


def test_a_figure_is_drawn_after_the_lines(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, sent: list[dict[str, Any]]
) -> None:
    """In a kernel's loop the lines are sent at once, and the picture when the loop has time."""
    import asyncio  # noqa: PLC0415  here alone

    session = live(6, "dead-load-take-off", tmp_path, monkeypatch)
    view = next(v for v in session.views.values() if "6.4" in v.rows)
    assert view.box.page["rows"]["6.4"]["body"].startswith("<img")
    layer = session.views["Layers"].rows["layers"]["keys"][0]

    async def change() -> int:
        session.enter_cell("layers", layer, "g_a", "1.9 kPa")
        early = sum("6.4" in patch.get("rows", {}) for patch in sent)
        await asyncio.sleep(1.0)
        return early

    assert asyncio.run(change()) == 0
    assert "6.4" in sent[-1]["rows"]


def test_a_figure_that_fails_leaves_the_section_in_sight(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A fault of the program stands at the figure, with its place folded away; the rows are there.

    The output that is kept in the file says it too.
    """

    def fail(*_: object) -> bytes:
        raise ZeroDivisionError("no paper")

    monkeypatch.setattr(figures, "draw", fail)
    session = live(6, "dead-load-take-off", tmp_path, monkeypatch)
    view = next(v for v in session.views.values() if "6.4" in v.rows)
    body = view.rows["6.4"]["body"]
    assert "the figure cannot be drawn: ZeroDivisionError: no paper" in body
    assert "<summary>where</summary>" in body
    assert len(view.rows) > 1
    assert output.picture(session.statement, session.section(view.title)) is None


def test_a_view_that_is_replaced_is_closed(wind: Session) -> None:
    """Run again, a cell has a view of its own, and the former widget is let go."""
    former = wind.views["Site"].box
    other = wind.views["Pressure"].box
    assert wind.view("Site").box is not former
    assert former.comm is None
    assert other.comm is not None


def test_rows_that_moved_are_told_and_taken(column: Session) -> None:
    """The levels of the design basis have another row: they are stale until they are taken."""
    assert column.job is not None
    column.take("levels")
    basis = column.job.record("design-basis")
    basis.change(schedules={"levels": basis.schedules["levels"][1:]})
    basis.save()
    column.look()
    assert "levels" in [name for name, *_ in column.stale()]
    column.take_all()
    assert column.stale() == []


def test_rows_brought_forward_have_fields_in_the_columns_typed_here(column: Session) -> None:
    """The levels come from another workbook; the section of the column is typed beside them."""
    levels: SectionView = column.views["Levels"]
    row = levels.rows["levels"]
    kinds = {c["name"]: c["type"] for c in row["columns"]}
    assert row["fixed"]
    assert kinds[""] == kinds["elevation"] == kinds["D"] == "shown"
    assert kinds["b_c"] == "text"
    key = row["keys"][0]
    levels.act({"do": "cell", "schedule": "levels", "key": key, "column": "b_c", "text": "450"})
    assert levels.rows["levels"]["cells"][key]["b_c"]["text"] == "450"
    assert column.record.schedules["levels"][0].cells["b_c"] == "450 mm"
    assert not column.record.schedules["levels"][0].cells.keys() & {"elevation", "D"}


def test_the_source_stands_once_in_the_margin(wind: Session) -> None:
    """The source has a place of its own that can be changed, and is not a note as well."""
    row = wind.views["Site"].rows["V"]
    assert row["source"]["shown"] == "map"
    assert "map" not in row["margin"]
    assert "range 10 m/s to 120 m/s" in row["margin"]


def test_two_views_of_one_workbook_agree(wind: Session) -> None:
    """A second session on the same record draws the same rows."""
    again = opened(WIND, wind.job)
    for title, view in wind.views.items():
        assert view.rows == again.views[title].rows


@pytest.fixture
def stale(job: Job) -> Session:
    """Return the wind workbook with a mean height that has moved since it was taken."""
    record = job.record("wind")
    origin = "design-basis.h_m"
    record.change(carried={origin: CarriedRecord("15 m", 15.0, origin=origin, fingerprint="0")})
    record.save()
    return opened(WIND, job)


def test_a_stale_carry_shows_old_and_new(stale: Session) -> None:
    """Both values stand side by side, it is said which one is used, and it can be taken."""
    row = stale.views["Site"].rows["h"]
    told = text(stale, "Site")
    assert "when taken 15 m now 15.6 m" in told
    assert "the results here use the value as it is now" in told
    assert [(b["text"], b["do"]) for b in row["buttons"]] == [
        ("take", {"do": "take", "name": "h"}),
    ]  # fmt: skip
    assert "moved" not in stale.views["Pressure"].head["notice"]


@pytest.mark.parametrize(
    ("message", "called"),
    [
        ({"do": "take", "name": "h"}, ("take", "h")),
        ({"do": "source", "name": "V", "text": "map 2"}, ("set_source", "V", "map 2")),
        ({"do": "row_source", "schedule": "floors", "key": "Roof", "text": "A-1"},
         ("set_row_source", "floors", "Roof", "A-1")),
        ({"do": "move_row", "schedule": "floors", "key": "Roof", "by": 1},
         ("move_row", "floors", "Roof", 1)),
        ({"do": "paste", "schedule": "floors", "key": "Roof", "column": "z",
          "block": [["8 m", "plant"]]}, ("paste", "floors", "Roof", "z", [["8 m", "plant"]])),
        ({"do": "undo"}, ("undo",)),
        ({"do": "redo"}, ("redo",)),
        ({"do": "step", "name": "V", "text": "71"}, ("step", "V", "71")),
        ({"do": "step_cell", "schedule": "floors", "key": "Roof", "column": "z", "text": "7.3"},
         ("step_cell", "floors", "Roof", "z", "7.3")),
    ],
)  # fmt: skip
def test_what_is_asked_for_reaches_the_session(
    wind: Session, monkeypatch: pytest.MonkeyPatch, message: dict[str, Any], called: tuple[Any, ...]
) -> None:
    """Each message is one call of the session; what it refuses is told at the section."""
    calls = []

    def refuse(*args: object, **_bare: object) -> None:
        calls.append((called[0], *args))
        raise InputError("this is not possible", hint="try another way")

    monkeypatch.setattr(wind, called[0], refuse, raising=False)
    title = "Floors" if "schedule" in message else "Site"
    wind.views[title].act(message)
    assert calls == [called]
    assert "this is not possible. Try another way." in text(wind, title)
