"""Undo and redo: what they say, how far they reach, and that they bring everything back."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from hypothesis import settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, invariant, precondition, rule
from live_samples import WIND, make_job, opened
from records import cells, in_memory, keys, on_disk

from calcbook.errors import CalcbookError, InputError

if TYPE_CHECKING:
    from calcbook.live import Session
    from calcbook.live.merging import Items


def test_an_entry_is_undone_and_redone(wind: Session) -> None:
    """The words say what is next; memory, results and disk go back and forth together."""
    assert (wind.undo_words, wind.redo_words) == ("", "")
    before = in_memory(wind)
    wind.enter("V", "252 km/h")
    after = in_memory(wind)
    assert wind.undo_words == "V = 252 km/h"
    wind.undo()
    assert (wind.undo_words, wind.redo_words) == ("", "V = 252 km/h")
    assert in_memory(wind) == on_disk(wind) == before
    assert wind.book.readings.given["V"].text == "70 m/s"
    wind.redo()
    assert in_memory(wind) == on_disk(wind) == after


def test_a_confirmation_comes_back_with_its_value(wind: Session) -> None:
    """The value typed first was confirmed, and is again when the second is undone."""
    wind.enter("V", "72 m/s")
    wind.step("V", "73 m/s")
    assert wind.record.entries["V"].confirmed is None
    wind.undo()
    assert wind.record.entries["V"].confirmed.by == "RA"


def test_rows_are_undone(wind: Session) -> None:
    """A row removed, moved, renamed or typed in comes back as it was, one step at a time."""
    start = cells(wind)
    wind.move_row("floors", "Level 2", -1)
    wind.rename_row("floors", "Roof", "Top")
    wind.add_row("floors", "Top")
    wind.enter_cell("floors", "new", "z", "2 m")
    wind.remove_row("floors", "Level 2")
    assert keys(wind) == ["Top", "new"]
    assert wind.undo_words == "row Level 2 removed"
    said = []
    while wind.undo_words:
        said.append(wind.undo_words)
        wind.undo()
    assert said == ["row Level 2 removed", "new, z = 2 m", "row new added",
                    "row Roof renamed Top", "row Level 2 moved up"]  # fmt: skip
    assert cells(wind) == start
    assert on_disk(wind) == {}


def test_a_change_after_an_undo_ends_the_redo(wind: Session) -> None:
    """What was undone cannot be redone over something new."""
    wind.enter("V", "72 m/s")
    wind.undo()
    wind.enter("V", "74 m/s")
    assert wind.redo_words == ""
    with pytest.raises(InputError, match="nothing to redo"):
        wind.redo()


def test_fifty_steps_are_kept(wind: Session) -> None:
    """Of sixty changes the last fifty can be undone, and no more."""
    for speed in range(20, 80):
        wind.enter("V", f"{speed} m/s")
    for _ in range(50):
        wind.undo()
    assert wind.undo_words == ""
    assert wind.record.entries["V"].value == "29 m/s"
    with pytest.raises(InputError, match="nothing to undo"):
        wind.undo()


def test_arrow_keys_in_a_row_are_one_step(wind: Session) -> None:
    """Ten presses of one key are undone at once; another item, or typing, begins a new step."""
    wind.enter("V", "60 m/s")
    for speed in range(61, 71):
        wind.step("V", f"{speed} m/s")
    wind.step_cell("floors", "Roof", "z", "7.3 m")
    wind.undo()
    assert wind.record.entries["V"].value == "70 m/s"
    wind.undo()
    assert wind.record.entries["V"].value == "60 m/s"


def test_typing_what_is_there_is_no_step(wind: Session) -> None:
    """A value typed again as it stands has nothing to be undone."""
    wind.enter("V", "72 m/s")
    wind.enter("V", "72 m/s")
    wind.undo()
    assert "V" not in wind.record.entries


def test_what_others_changed_since_is_not_undone(wind: Session) -> None:
    """An entry typed here and then in another kernel is left as it is there, and said so."""
    wind.enter("V", "72 m/s")
    other = opened(WIND, wind.job)
    other.enter("V", "80 m/s")
    wind.look()
    with pytest.raises(InputError) as caught:
        wind.undo()
    assert "V was changed elsewhere since" in caught.value.hint
    assert on_disk(wind)["entries", "V"].value == "80 m/s"
    assert wind.undo_words == ""


def test_undo_keeps_what_others_did_to_other_rows(wind: Session) -> None:
    """My cell goes back; the cell another kernel typed in another row stays."""
    wind.enter_cell("floors", "Roof", "z", "8 m")
    other = opened(WIND, wind.job)
    other.enter_cell("floors", "Level 2", "z", "4 m")
    wind.look()
    wind.undo()
    assert [row["z"] for _, row in cells(wind)] == ["7.2 m", "4 m"]
    assert in_memory(wind) == on_disk(wind)


def test_the_history_survives_running_all_cells(wind: Session) -> None:
    """A session that takes over can undo what was done in the one before."""
    wind.enter("V", "72 m/s")
    again = type(wind)("wind", "Wind", job=wind.job, former=wind)
    with again.book.section("Site") as s:
        s.entry("V", "Basic wind speed", "70 m/s", unit="speed")
    assert again.book.readings.given["V"].text == "72 m/s"
    again.undo()
    assert again.book.readings.given["V"].text == "70 m/s"
    assert on_disk(again) == {}


KEYS = st.sampled_from(["Roof", "Level 2", "new", "new 2", "A"])


class Edits(RuleBasedStateMachine):
    """Any order of edits, refused ones among them; undo all and redo all bring both ends back."""

    def __init__(self) -> None:
        super().__init__()
        self.folder = tempfile.TemporaryDirectory()
        self.session = opened(WIND, make_job(Path(self.folder.name) / "job"))
        self.start = in_memory(self.session)
        self.steps = 0

    def teardown(self) -> None:
        """Undo all gives the start, redo all the end, each on disk as in memory."""
        end: Items = in_memory(self.session)
        done = 0
        while self.session.undo_words:
            self.session.undo()
            done += 1
        assert in_memory(self.session) == on_disk(self.session) == self.start
        for _ in range(done):
            self.session.redo()
        assert in_memory(self.session) == on_disk(self.session) == end
        self.folder.cleanup()

    @invariant()
    def settled(self) -> None:
        """Hold that what is on disk is what is in memory."""
        assert on_disk(self.session) == in_memory(self.session)

    def act(self, name: str, *words: object, **more: object) -> None:
        """Do something that may be refused, and then changes nothing."""
        before = in_memory(self.session)
        try:
            getattr(self.session, name)(*words, **more)
        except CalcbookError:
            assert in_memory(self.session) == before

    @rule(speed=st.integers(5, 130), how=st.sampled_from(["enter", "step"]))
    def type_speed(self, speed: int, how: str) -> None:
        """Type a speed, or step to it; some are out of range."""
        self.act(how, "V", f"{speed} m/s")

    @rule(option=st.sampled_from("BCE"))
    def choose(self, option: str) -> None:
        """Pick an exposure; E is refused."""
        self.act("enter", "exposure", option)

    @rule(yes=st.booleans())
    def tick(self, yes: bool) -> None:
        """Confirm the speed, or take it back."""
        self.act("confirm", "V", yes=yes)

    @rule(text=st.sampled_from(["", "map 2", "drawing"]), key=KEYS)
    def source(self, text: str, key: str) -> None:
        """Give sources."""
        self.act("set_source", "V", text)
        self.act("set_row_source", "floors", key, text)

    @rule(key=KEYS, z=st.integers(-20, 30))
    def cell(self, key: str, z: int) -> None:
        """Type a cell."""
        self.act("enter_cell", "floors", key, "z", f"{z} m")

    @rule(key=KEYS, by=st.integers(-2, 2))
    def move(self, key: str, by: int) -> None:
        """Move a row."""
        self.act("move_row", "floors", key, by)

    @rule(key=KEYS, new=KEYS)
    def rename(self, key: str, new: str) -> None:
        """Rename a row."""
        self.act("rename_row", "floors", key, new)

    @rule(key=KEYS)
    def add(self, key: str) -> None:
        """Add a row."""
        self.act("add_row", "floors", key)

    @rule(key=KEYS)
    def remove(self, key: str) -> None:
        """Remove a row."""
        self.act("remove_row", "floors", key)

    @rule(key=KEYS, z=st.integers(-20, 30), first=st.sampled_from(["", "z"]))
    def paste(self, key: str, z: int, first: str) -> None:
        """Paste two rows, some with a bad cell."""
        lead = [["A"], ["B"]] if not first else [[], []]
        self.act("paste", "floors", key, first, [[*lead[0], f"{z}", "x"], [*lead[1], "1", "y"]])

    @precondition(lambda self: self.session.undo_words)
    @rule()
    def undo(self) -> None:
        """Undo once."""
        self.session.undo()

    @precondition(lambda self: self.session.redo_words)
    @rule()
    def redo(self) -> None:
        """Redo once."""
        self.session.redo()


TestEdits = Edits.TestCase
TestEdits.settings = settings(max_examples=12, stateful_step_count=20, deadline=None)
