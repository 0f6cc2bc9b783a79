"""A section as it is seen in JupyterLab: rows of text and rows to type in, on one page."""

from __future__ import annotations

import logging
import traceback
from typing import TYPE_CHECKING, Any

import ipywidgets as widgets

from calcbook.live import blocks, page
from calcbook.live.fields import EntryField, box, html, say, show_widget
from calcbook.live.rows import ScheduleField, editable
from calcbook.live.session import NO_JOB
from calcbook.live.wording import LEFT_OVER
from calcbook.wording import not_applied

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.live.blocks import Block
    from calcbook.live.session import Session

    Plain = Mapping[str, Any]

_log = logging.getLogger(__name__)


class _Text:
    """A run of blocks nothing is typed in, as one piece of the page."""

    def __init__(self) -> None:
        self.widget = html()

    def show(self, shown: list[Block], statement: Plain) -> None:
        say(self.widget, "".join(page.row(b, statement) for b in shown))


class SectionView:
    """The view of one section.

    Parameters
    ----------
    session
        The opened workbook.
    title
        The section's title.
    first
        It is the first one shown, and says once what concerns the whole workbook.
    """

    def __init__(self, session: Session, title: str, *, first: bool = False) -> None:
        self.session, self.title, self.first = session, title, first
        self.head, self.notice, self.trouble = html(), html(), html()
        self.page = widgets.VBox()
        self.box = box([self.head, self.notice, self.trouble, self.page], "cb-view")
        self.box.layout.flex_flow = "column"
        self.parts: list[_Text | EntryField | ScheduleField] = []
        self._shape: list[object] = []

    def show(self, statement: Plain, section: Plain) -> None:
        """Bring the view up to date with a statement; what goes wrong is said in the view."""
        try:
            self._show(statement, section)
        except Exception as error:  # noqa: BLE001  shown at the section, never lost
            self._tell(error)

    def _show(self, statement: Plain, section: Plain) -> None:
        title = f"<span>{section['number']}</span>{page.lines(section['title'])}"
        say(self.head, f'{page.style()}<div class="cb-title">{title}</div>')
        say(self.notice, self._notices(section))
        show_widget(self.page, on=section["applies"])
        if not section["applies"]:
            return
        groups = self._groups(list(blocks.blocks(section)))
        shape = [self._key(group) for group in groups]
        if shape != self._shape:
            self._build(groups)
            self._shape = shape
        late = [b for group in groups for b in group if b.kind == "figure"]
        for part, group in zip(self.parts, groups, strict=True):
            if group[0] not in late:
                self._show_part(part, group, statement)
        for part, group in zip(self.parts, groups, strict=True):
            if group[0] in late:  # figures take longest, so the lines are on the screen before them
                self._show_part(part, group, statement)

    def _show_part(
        self, part: _Text | EntryField | ScheduleField, group: list[Block], statement: Plain
    ) -> None:
        if isinstance(part, _Text):
            part.show(group, statement)
        else:
            part.show(group[0], statement)

    def _groups(self, found: list[Block]) -> list[list[Block]]:
        """Return the blocks in order; those nothing is typed in stand together."""
        groups: list[list[Block]] = []
        for block in found:
            if self._alone(block) or not groups or self._alone(groups[-1][0]):
                groups.append([block])
            else:
                groups[-1].append(block)
        return groups

    def _alone(self, block: Block) -> bool:
        return self._typed_in(block) or block.kind == "figure"

    def _typed_in(self, block: Block) -> bool:
        item = block.item
        if item.get("kind") == "schedule":
            return editable(item)
        if item.get("kind") == "carried":
            return bool(item["fallback"])
        return item.get("kind") in ("entry", "text", "choice")

    def _key(self, group: list[Block]) -> object:
        """Return what decides how a group is laid out: more than its values."""
        item = group[0].item
        if not self._typed_in(group[0]):
            return "figure" if group[0].kind == "figure" else "text"
        if item["kind"] == "schedule":
            columns = [c["name"] for c in blocks.shown_columns(item)]
            return (item["name"], tuple(item["rows"]), tuple(columns))
        return (item["kind"], item["name"])

    def _build(self, groups: list[list[Block]]) -> None:
        former = dict(zip(map(repr, self._shape), self.parts, strict=True))
        self.parts = []
        for group in groups:
            key = self._key(group)
            kept = former.pop(repr(key), None) if key not in ("text", "figure") else None
            self.parts.append(kept or self._part(group[0]))
        self.page.children = [part.widget for part in self.parts]

    def _part(self, block: Block) -> _Text | EntryField | ScheduleField:
        if not self._typed_in(block):
            return _Text()
        if block.item["kind"] == "schedule":
            return ScheduleField(self, block.item)
        return EntryField(self, self.session.book.input_item(block.item["name"]))

    def _notices(self, section: Plain) -> str:
        told = [LEFT_OVER] if section.get("left_over") else []
        if not section["applies"]:
            told.append(f"This section is {not_applied(section)}.")
        if self.first:
            told.append(self.session.mark_words())
            told.append(NO_JOB if self.session.job is None else self._unsigned())
        told.append(self.session.notice)
        return "".join(f'<div class="cb-quiet">{page.lines(text)}</div>' for text in told if text)

    def _unsigned(self) -> str:
        signer = self.session.signer()
        missing = [w for w, v in (("job number", signer.job), ("initials", signer.by)) if not v]
        if not missing:
            return ""
        return (f"Nothing is confirmed by typing yet: the design basis has no "
                f"{' and no '.join(missing)}.")  # fmt: skip

    def guarded(self, act: Callable[[], None]) -> None:
        """Do what a field asks for; whatever goes wrong is shown at the section."""
        say(self.trouble, "")
        try:
            act()
        except Exception as error:  # noqa: BLE001  shown at the section, never lost
            self._tell(error)

    def _tell(self, error: Exception) -> None:
        _log.error("section %s", self.title, exc_info=error)
        frames = "".join(traceback.format_exception(error))
        text = f"{type(error).__name__}: {error}"
        say(self.trouble, f"{page.trouble(text)}<details><summary>where</summary>"
                          f"<pre>{page.lines(frames)}</pre></details>")  # fmt: skip

    def retire(self, reason: str) -> None:
        """Say why this view is out of use and let nothing more be typed into it."""
        self.page.children = []
        self.parts, self._shape = [], []
        say(self.trouble, f'<div class="cb-quiet">{page.lines(reason)}</div>')
