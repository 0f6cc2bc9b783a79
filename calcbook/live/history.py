"""Undo and redo: the last steps of a session, each with what was before and after it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from calcbook.errors import InputError

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.live.merging import Items
    from calcbook.recordform import Form

STEPS = 50
_LONGEST = 60


@dataclass(frozen=True)
class Step:
    """A change of items of one record.

    ``stepped``: by arrow keys; such steps of one item that follow each other are undone as one.
    """

    words: str
    mark: str | None
    before: Items
    after: Items
    stepped: bool = False

    def turned(self) -> Step:
        """Return the step that takes this one back."""
        return replace(self, before=self.after, after=self.before)


@dataclass(frozen=True)
class Stored:
    """A record file as it stood: its bytes, and what they say."""

    data: bytes
    form: Form


@dataclass(frozen=True)
class MarkStep:
    """Record files made and removed, by mark; None stands for no file.

    ``open_before`` and ``open_after`` are the marks that were open.
    """

    words: str
    before: Mapping[str | None, Stored | None]
    after: Mapping[str | None, Stored | None]
    open_before: str | None
    open_after: str | None

    def turned(self) -> MarkStep:
        """Return the step that takes this one back."""
        return MarkStep(self.words, self.after, self.before, self.open_after, self.open_before)


class History:
    """The steps done, which can be undone, and those undone, which can be redone."""

    def __init__(self) -> None:
        self._done: list[Step | MarkStep] = []
        self._undone: list[Step | MarkStep] = []

    @property
    def undo_words(self) -> str:
        """What undo takes back, or ''."""
        return _shortened(self._done)

    @property
    def redo_words(self) -> str:
        """What redo does again, or ''."""
        return _shortened(self._undone)

    def add(self, step: Step | MarkStep) -> None:
        """Note a step that was done; nothing can be redone after it."""
        self._undone = []
        last = self._done[-1] if self._done else None
        if isinstance(step, Step) and isinstance(last, Step) and _goes_on(last, step):
            step = replace(step, before=last.before)
            self._done.pop()
        self._done = [*self._done, step][-STEPS:]

    def last(self, *, undone: bool) -> Step | MarkStep:
        """Return the step that undo or redo is about; InputError where there is none.

        It is for ``undone`` the one to be redone, else the one that undoes, turned round.
        """
        steps = self._undone if undone else self._done
        if not steps:
            raise InputError(f"there is nothing to {'redo' if undone else 'undo'}")
        return steps[-1] if undone else steps[-1].turned()

    def moved(self, *, undone: bool) -> None:
        """Note that the last step was undone, or redone."""
        if undone:
            self._done.append(self._undone.pop())
        else:
            self._undone.append(self._done.pop())

    def forget(self, *, undone: bool) -> None:
        """Drop a last step that cannot be taken any more."""
        (self._undone if undone else self._done).pop()


def _goes_on(last: Step, step: Step) -> bool:
    """Whether a step by arrow keys continues the one before it."""
    same = (last.mark, last.after) == (step.mark, step.before)
    return last.stepped and step.stepped and same


def _shortened(steps: list[Step | MarkStep]) -> str:
    words = steps[-1].words if steps else ""
    return words if len(words) <= _LONGEST else f"{words[: _LONGEST - 1]}…"
