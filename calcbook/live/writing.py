"""A record that is open: what is in memory, what of it is on disk, and what others wrote."""

from __future__ import annotations

import copy
from contextlib import suppress
from typing import TYPE_CHECKING

from calcbook.diskfile import in_plain_words
from calcbook.errors import RecordChangedError, RecordError
from calcbook.live.merging import by_kind, difference, items, merged

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.live.merging import Items
    from calcbook.record import Record
    from calcbook.recordform import Form

WAIT_SECONDS = 1.0  # a kernel that waits longer for a lock seems to hang
TRIES = 3
_SUPERFLUOUS = "nothing was changed; "
DELETED = "the file was deleted; it is written anew with the next change"


class Kept:
    """One record in memory beside its file.

    Changes are made to ``record``, which is never saved itself: ``write`` brings the file to
    what it says. What others wrote meanwhile comes into it, item by item; where both changed the
    same item it keeps mine, and the file theirs, until somebody decides.

    Parameters
    ----------
    record
        As it was read.
    filed
        Whether it has a file; without a job it has none.

    Attributes
    ----------
    held
        The items both changed, with what the file says of them.
    trouble
        Why the file does not say what the record says, or ''.
    damaged
        The file cannot be read any more, and is not written over unless somebody says so.
    """

    def __init__(self, record: Record, *, filed: bool) -> None:
        self.record = record
        self.filed = filed
        self._file = copy.deepcopy(record)
        self._known = record.content()
        self.held: Items = {}
        self.trouble = ""
        self.damaged = False

    @property
    def path(self) -> Path:
        """The record's file."""
        return self.record.path

    def missing(self) -> Items:
        """Return the items the file does not say as the record does, those held left out."""
        return difference(self._known, self._wanted())

    def unwritten(self) -> str:
        """Return what is not on disk and why, in words, or ''."""
        if not self.trouble:
            return ""
        names = ", ".join(dict.fromkeys(name for _, name in self.missing()))
        told = f"{self.path.name}: {self.trouble}."
        return f"Not on disk: {names}. {told}" if names else told

    def write(self) -> Items:
        """Bring the file to what the record says; returns what came in from others.

        What goes wrong is in ``trouble``; the record in memory stays as it is.
        """
        if not self.filed:
            return {}
        incoming: Items = {}
        try:
            for _ in range(TRIES):
                with suppress(RecordChangedError):
                    self._save()
                    self.trouble, self.damaged = "", False
                    return incoming
                incoming |= self._take_in(renew=True)
            self.trouble = "somebody else keeps writing it"
        except RecordError as error:
            self.trouble = _why(error)
        return incoming

    def look(self) -> Items:
        """Take in what others wrote since; returns what came in."""
        if not self.filed:
            return {}
        try:
            return self._take_in(renew=False) if self._file.moved() else self._calm()
        except RecordError as error:
            self.trouble = _why(error)
            return {}

    def set_aside(self) -> None:
        """Rename a damaged file, so that the record can be written anew.

        Raises RecordError where it cannot be renamed.
        """
        number, aside = 1, self.path.with_name(f"{self.path.name}.damaged")
        while aside.exists():
            number += 1
            aside = self.path.with_name(f"{self.path.name}.damaged-{number}")
        with in_plain_words(self.path, RecordError):
            self.path.rename(aside)
        self.damaged = False

    def _calm(self) -> Items:
        """Forget a trouble with reading: the file is again as it was."""
        if self.damaged or self.trouble == DELETED:
            self.damaged, self.trouble = False, ""
        return {}

    def _wanted(self) -> Form:
        """Return what the file should say: the record, but for the items held."""
        if not self.held:
            return self.record.content()
        wanted = copy.deepcopy(self.record)
        wanted.change(**by_kind(self.held))
        return wanted.content()

    def _save(self) -> None:
        wanted = self._wanted()
        self._file.change(**by_kind(difference(self._known, wanted)))
        try:
            self._file.save(wait=WAIT_SECONDS)
        except RecordError:
            self._file.change(**by_kind(difference(wanted, self._known)))
            raise
        self._known = wanted

    def _take_in(self, *, renew: bool) -> Items:
        """Read the file again and put its changes and mine together.

        ``renew``: a file that is gone is going to be written anew; else it is told.
        """
        if not self.path.exists() and self._file.on_disk:
            if not renew:
                self.trouble = DELETED
                return {}
            self._file.reload()
            self._known = self._file.content()
            return {}
        try:
            self._file.reload()
        except RecordError:
            self.damaged = True
            raise
        return self._merge(self._file.content())

    def _merge(self, theirs: Form) -> Items:
        found = merged(self._known, self.record.content(), theirs)
        said, ours = items(theirs), items(self.record.content())
        held = {place: said.get(place) for place in (*self.held, *found.clashes)}
        incoming = {place: item for place, item in found.mine.items() if place not in held}
        self.held = {place: item for place, item in held.items() if item != ours.get(place)}
        self.record.change(**by_kind(incoming))
        self._known = theirs
        self.trouble, self.damaged = "", False
        return incoming


def _why(error: RecordError) -> str:
    """Return what an error says in one line, without the place: the file is named beside it."""
    hint = error.hint.removeprefix(_SUPERFLUOUS).removeprefix("nothing was written; ")
    place = error.where.rpartition(".toml")[2].strip(", ")
    what = f"{place}: {error.what}" if place else error.what
    return f"{what}; {hint}" if hint else what
