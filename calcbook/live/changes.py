"""Changes of a workbook's record by a person, and how they are taken back."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.errors import CarryError, InputError, JobError, RecordError
from calcbook.live.history import MarkStep, Step
from calcbook.live.marking import Marking
from calcbook.live.merging import by_kind, copied, together
from calcbook.record import EntryRecord, RowRecord
from calcbook.run import carries
from calcbook.taking import taken_now

if TYPE_CHECKING:
    from calcbook import units
    from calcbook.live.merging import Items, Place

Stale = tuple[str, str, str, str, str]


class Changing(Marking):
    """A workbook whose entries are typed, confirmed and taken back."""

    # --- one change -------------------------------------------------------------------------

    def _change(self, words: str, changes: Items, *, stepped: bool = False) -> None:
        """Set items of the record in memory, note it for undo, have it written and shown.

        Raises RecordError where an item could not be written as text; nothing is changed then.
        """
        before = {place: self._said(place) for place in changes}
        self.record.change(**by_kind(changes))
        after = {place: copied(item) for place, item in changes.items()}
        if before != after:
            self.history.add(Step(words, self.mark, before, after, stepped))
        self._follow()

    def _said(self, place: Place) -> Any:  # noqa: ANN401  any item
        """Return a copy of what the record says of an item, None where it says nothing."""
        kind, name = place
        return copied(getattr(self.record, kind).get(name))

    def _follow(self) -> None:
        """Write, compute and show what is in memory now; in a kernel it is written afterwards."""
        self.notice = ""
        self._writing()
        self._compute()

    # --- entries ----------------------------------------------------------------------------

    def enter(self, name: str, text: str, *, bare: units.Unit | None = None) -> None:
        """Take a typed entry: read it strictly, keep it confirmed, recompute.

        Raises CalcbookError when it is refused; nothing is changed then.
        """
        stored = self.book.accept(name, text, bare=bare)
        confirmed = self.signer((name, stored)).confirm(stored)
        entry = EntryRecord(stored, self._source(name, stored), confirmed)
        self._change(f"{name} = {stored}", {("entries", name): entry})

    def step(self, name: str, text: str, *, bare: units.Unit | None = None) -> None:
        """Take an entry moved by arrow keys, as ``enter`` does; it is not confirmed."""
        stored = self.book.accept(name, text, bare=bare)
        entry = EntryRecord(stored, self._source(name, stored))
        self._change(f"{name} = {stored}", {("entries", name): entry}, stepped=True)

    def confirm(self, name: str, *, yes: bool) -> None:
        """Confirm the value an entry has, or take the confirmation back."""
        value = self.book.readings.given[name].text
        confirmed = self.signer().sign(value) if yes else None
        words = f"{name} confirmed" if yes else f"{name} not confirmed"
        entry = EntryRecord(value, self._source(name, value), confirmed)
        self._change(words, {("entries", name): entry})

    def set_source(self, name: str, text: str) -> None:
        """Say where the value of an entry comes from; whether it is confirmed stays as it is."""
        given = self.book.readings.given.get(name)
        if given is None:
            raise InputError(f"{name} has no value of its own to give a source for")
        former = self.record.entries.get(name)
        confirmed = former.confirmed if former is not None else None
        entry = EntryRecord(given.text, " ".join(text.split()), confirmed)
        self._change(f"source of {name}", {("entries", name): entry})

    def bring_forward(self, name: str) -> None:
        """Drop what was typed over a carried value."""
        self._change(f"{name} brought forward", {("entries", name): None})

    def _source(self, name: str, value: str) -> str:
        """Return the source in force, which another value does not have."""
        given = self.book.readings.given.get(name)
        return given.source if given is not None and given.text == value else ""

    # --- carried values ---------------------------------------------------------------------

    def stale(self) -> list[Stale]:
        """Return the carried values that moved since they were taken.

        Each is (name, old text, new text, number, title of its section). Results always use the
        value as it is now: one from a value that is superseded would be silently wrong.
        """
        found: list[Stale] = []
        for part in self.statement["parts"]:
            for item in part.get("items", ()):
                carried = self.book.readings.carried.get(item["name"])
                if item.get("stale") and carried is not None and carried.item is not None:
                    was = str((item.get("taken") or {}).get("text") or "")  # of rows none is noted
                    now = taken_now(carried.origin, carried.item).value
                    found.append((item["name"], was, now, item["number"], part["title"]))
        return found

    def take(self, name: str) -> None:
        """Note a carried value as taken as it is now, so that it is no longer stale.

        Raises
        ------
        InputError
            Outside a job, or the name carries nothing.
        CarryError
            Its source has no such result.
        """
        self._take([name], f"{name} taken")

    def take_all(self) -> None:
        """Note every carried value that moved as taken."""
        names = [name for name, *_ in self.stale()]
        if names:
            self._take(names, f"{', '.join(names)} taken")

    def _take(self, names: list[str], words: str) -> None:
        origins = carries(self.book)
        changes: Items = {}
        for name in names:
            carried = self.book.readings.carried.get(name)
            if name not in origins or carried is None:
                raise InputError(f"{name} is not carried from another workbook")
            if carried.item is None:
                raise CarryError(carried.problem or f"{origins[name]} is not there")
            changes["carried", origins[name]] = taken_now(origins[name], carried.item)
        self._change(words, changes)

    # --- taking back ------------------------------------------------------------------------

    @property
    def undo_words(self) -> str:
        """What undo takes back, in words, or ''."""
        return self.history.undo_words

    @property
    def redo_words(self) -> str:
        """What redo does again, in words, or ''."""
        return self.history.redo_words

    def undo(self) -> None:
        """Take the last change back; it is written to the record like a change.

        Raises InputError where there is none, or somebody else changed the same item since.
        """
        self._move(undone=False)

    def redo(self) -> None:
        """Do the change again that was taken back last; raises as ``undo`` does."""
        self._move(undone=True)

    def _move(self, *, undone: bool) -> None:
        step = self.history.last(undone=undone)
        try:
            self._take_step(step)
        except (InputError, JobError):  # it cannot be taken any more
            self.history.forget(undone=undone)
            raise
        self.history.moved(undone=undone)

    def _take_step(self, step: Step | MarkStep) -> None:
        """Do a step, from what was before it to what is after it."""
        if isinstance(step, MarkStep):
            self._take_mark_step(step)
            return
        if step.mark != self.mark:
            self.open_mark(step.mark)
        changes: Items = {}
        for place, item in step.after.items():
            own, former = self._said(place), step.before[place]
            if item is None and place[0] == "schedules" and own != former:
                item = self._template_rows(place[1])  # noqa: PLW2901  others typed over them too
            changes[place], clash = together(former, own, item)
            if clash:
                raise InputError(
                    f"'{step.words}' cannot be taken back or done again",
                    hint=f"{place[1]} was changed elsewhere since",
                )
        try:
            self.record.change(**by_kind(changes))
        except RecordError as error:  # two rows of one key, one of them from elsewhere
            raise InputError(error.what, hint=error.hint) from error
        self._typed = {}
        self._follow()

    def _template_rows(self, schedule: str) -> list[RowRecord]:
        """Return the rows a schedule has where the record has none."""
        item = self.book.schedule_item(schedule)
        return [RowRecord(key, dict(found), item.source) for key, found in item.default]
