"""Rows of the page in which an entry, a choice or words are typed, and rows with a carry."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook import typeset
from calcbook.live import fieldtext, page, wording
from calcbook.live.output import amount_text
from calcbook.wording import not_applied

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.live.blocks import Block, Words
    from calcbook.live.patches import Row
    from calcbook.live.view import SectionView

    Plain = Mapping[str, Any]

SETTINGS = ("code_set", "units")


def typed_in(item: Plain) -> bool:
    """Whether an item has a field: an entry, or a carry that serves its fallback."""
    if item.get("kind") == "carried":
        return bool(item.get("fallback"))
    return item.get("kind") in ("entry", "text", "choice")


def entry_row(view: SectionView, block: Block) -> Row:
    """Return the row of an entry: its field, and what is to be known of it."""
    item, session = block.item, view.session
    row: Row = {"kind": "text", "name": item["name"], **page.pieces(block)}
    if not item["applies"]:
        row["cls"] = "cb-row cb-entry cb-idle"
        row["body"] = f'<div class="cb-says">{page.lines(not_applied(item))}</div>'
        return row
    in_job = session.job is not None
    refused = (item["name"],) in view.refused
    row |= {
        "kind": "entry", "cls": "cb-row cb-entry", "body": "",
        "margin": page.notes(_notes(block, item, with_standing=not in_job)),
        "field": _field(view, item), "under": _under(view, item, refused=refused),
        "source": _source(view, item), "buttons": _buttons(view, item), "confirm": None,
    }  # fmt: skip
    if in_job and block.standing and not refused:
        row["confirm"] = {
            "on": not block.unconfirmed, "text": block.standing,
            "label": f"confirm: {item['meaning']}",
        }  # fmt: skip
    return row


def carried_row(view: SectionView, block: Block) -> Row:
    """Return the row of a carried value; one that moved shows old and new and asks to be taken."""
    name = block.item["name"]
    row: Row = {"kind": "text", "name": name, **page.pieces(block)}
    stale = stale_pieces(view, block.item)
    row["body"] += stale.get("under", "") + view.told.get(name, "")
    row["buttons"] = stale.get("buttons", [])
    return row


def stale_pieces(view: SectionView, item: Plain) -> Row:
    """Return what a stale carry shows under it and the button that takes it; {} where it is not."""
    if not item.get("stale"):
        return {}
    was, now = (item.get("taken") or {}).get("text") or "", _as_now(item)
    sides = (
        f'<span class="cb-was">when taken <b>{page.lines(was)}</b></span>'
        f'<span class="cb-now">now <b>{page.lines(now)}</b></span>' if was and now else ""
    )  # fmt: skip
    under = (f'<div class="cb-stale">{sides}<span class="cb-quiet">{page.lines(wording.USED_NOW)}'
             "</span></div>")  # fmt: skip
    if view.session.job is None:
        return {"under": under}
    take = {
        "text": "take", "label": f"take {item['meaning'] or item['name']} as it is now",
        "do": {"do": "take", "name": item["name"]},
    }  # fmt: skip
    return {"under": under, "buttons": [take]}


def _as_now(item: Plain) -> str:
    if item["kind"] == "schedule":
        return ""
    if item.get("value"):
        return amount_text(item["value"]["text"], item["value"]["unit"])
    return str(item.get("option") or item.get("text") or "")


def source_field(text: str, shown: str, label: str) -> Row:
    """Return a source that can be changed: as recorded, as shown, and its label."""
    return {"text": text, "shown": shown, "label": f"source: {label}"}


def _notes(block: Block, item: Plain, *, with_standing: bool) -> tuple[Words, ...]:
    """Return the margin notes without the source, which has a place of its own."""
    found = block.remarks if with_standing else block.notes
    return tuple(note for note in found if note != (wording.source_words(item),))


def _field(view: SectionView, item: Plain) -> Row:
    declared, system = view.session.book.input_item(item["name"]), view.session.book.system
    text = view.text_of(item["name"])
    shown = fieldtext.shown_text(declared, text, system)
    refusal = view.refused.get((item["name"],))
    options = fieldtext.options(declared)
    quantity = fieldtext.is_quantity(declared)
    before = beside = ""
    if quantity:
        before = page.math(f"{typeset.symbol(item['name'], 'mathml')}<mo>=</mo>")
        value = item["shown"] or item["value"]
        beside = page.lines(fieldtext.beside(declared, value, text, system))
    return {
        "type": "choice" if options else "text", "label": item["meaning"], "options": options,
        "text": refusal.text if refusal else shown, "force": shown, "before": before,
        "beside": beside, "long": not (quantity or options), "step": quantity,
        "refused": refusal.html if refusal else "",
    }  # fmt: skip


def _under(view: SectionView, item: Plain, *, refused: bool) -> str:
    """Return what the value in force has to say under its field."""
    found = [view.told[item["name"]]] if item["name"] in view.told else []
    if not refused:
        found += [page.trouble(item["problem"])] if item["problem"] else []
    if _to_apply(view, item):
        found.append(f"<div><strong>{wording.APPLY}</strong></div>")
    return "".join(found)


def _to_apply(view: SectionView, item: Plain) -> bool:
    """Whether the code set or the units chosen are not those the workbook was opened with."""
    book = view.session.book
    opened = {"code_set": book.code.name, "units": book.system}
    name = item["name"]
    return name in SETTINGS and item.get("option") not in ("", None, opened[name])


def _source(view: SectionView, item: Plain) -> Row | None:
    words = wording.source_words(item)
    given = item.get("source") or ""
    if not (words and item["name"] in view.session.book.readings.given):
        return None
    return source_field(given, words, item["meaning"])


def _buttons(view: SectionView, item: Plain) -> list[Row]:
    if item["kind"] != "carried" or item["name"] not in view.session.record.entries:
        return []
    return [{
        "text": "take the carried value", "label": f"take the carried value: {item['meaning']}",
        "do": {"do": "back", "name": item["name"]},
    }]  # fmt: skip
