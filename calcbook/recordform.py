"""The form a record has as text: what stands in it, and how it is edited in place.

A record file (format 1)::

    format = 1
    workbook = "floor-beam"
    mark = "B1"

    [entries]
    L = { value = "6.2 m", source = "S-3", confirmed = { value = "6.2 m", job = "MC-0417", by = "RA", on = 2026-10-02 } }

    [schedules]
    loads = [
      { key = "D", cells = { w = "12 kN/m" }, source = "dead load take-off" },
    ]

    [carried]
    h_roof = { value = "17.2 m", si = 17.2, origin = "design-basis.h_roof" }
"""  # noqa: E501 - one entry is one line, also here

from __future__ import annotations

import datetime as dt
import json
import math
import re
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

from calcbook.errors import RecordError
from calcbook.tomltext import STRING

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.tomltext import Place, TomlText

FORMAT = 1
_ROW = re.compile(rf"(?P<row>\s*\{{(?:{STRING}|[^\"'#])*\}})\s*,?\s*(?P<comment>#.*)?", re.DOTALL)
_DATE_AT_END = re.compile(rf"{STRING}|#[^\n]*|(?P<date>\bon = \d{{4}}-\d\d-\d\d)\}}", re.DOTALL)


@dataclass(frozen=True)
class Confirmation:
    """The value (or the digest of the row) confirmed, for which job, by whom, on which ISO date."""

    value: str
    job: str
    by: str
    on: str


@dataclass
class EntryRecord:
    """An entry as typed, where it comes from, and who stands for it."""

    value: str
    source: str = ""
    confirmed: Confirmation | None = None


@dataclass
class RowRecord:
    """A row of a schedule: its key and its cells as typed."""

    key: str
    cells: dict[str, str]
    source: str = ""
    confirmed: Confirmation | None = None


@dataclass
class CarriedRecord:
    """What was taken from another workbook: printed with unit, in SI, its origin and sign sense."""

    value: str
    si: float | None = None
    option: str = ""
    origin: str = ""
    sign: str = ""
    fingerprint: str = ""
    confirmed: Confirmation | None = None


@dataclass
class Form:
    """What a record file says."""

    workbook: str
    mark: str | None
    entries: dict[str, EntryRecord] = field(default_factory=dict)
    schedules: dict[str, list[RowRecord]] = field(default_factory=dict)
    carried: dict[str, CarriedRecord] = field(default_factory=dict)


def read_form(toml: TomlText) -> Form:
    """Read the text of a record of the newest format.

    Raises
    ------
    RecordError
        Broken TOML, an unknown key, a wrong type, a row key used twice.
    """
    data = toml.data()
    toml.table(data, (), ("format", "workbook", "mark", "entries", "schedules", "carried"))
    form = Form(
        toml.string(data, "workbook", ()),
        toml.string(data, "mark", ()) if "mark" in data else None,
    )
    for name, value in toml.table(data.get("entries", {}), ("entries",)).items():
        form.entries[name] = _read_entry(toml, value, ("entries", name))
    for name, value in toml.table(data.get("schedules", {}), ("schedules",)).items():
        form.schedules[name] = _read_rows(toml, value, ("schedules", name))
    for name, value in toml.table(data.get("carried", {}), ("carried",)).items():
        form.carried[name] = _read_carried(toml, value, ("carried", name))
    return form


def _read_entry(toml: TomlText, value: object, place: Place) -> EntryRecord:
    if isinstance(value, str):
        hint = f"write {place[-1]} = {_text({'value': value})}"
        raise toml.refuse(f"{place[-1]} must be a table with a value", place, hint)
    table = toml.table(value, place, ("value", "source", "confirmed"))
    return EntryRecord(
        toml.string(table, "value", place),
        toml.string(table, "source", place, ""),
        _read_confirmation(toml, table, place),
    )


def _read_rows(toml: TomlText, value: object, place: Place) -> list[RowRecord]:
    rows: dict[str, RowRecord] = {}
    for number, item in enumerate(toml.rows(value, place)):
        here = (*place, number)
        table = toml.table(item, here, ("key", "cells", "source", "confirmed"))
        key = toml.string(table, "key", here)
        if key in rows:
            hint = "give each row a key of its own"
            raise toml.refuse(f"{place[-1]} has two rows '{key}'", (*here, "key"), hint)
        cells = toml.table(table.get("cells", {}), (*here, "cells"))
        rows[key] = RowRecord(
            key,
            {column: toml.string(cells, column, (*here, "cells")) for column in cells},
            toml.string(table, "source", here, ""),
            _read_confirmation(toml, table, here),
        )
    return list(rows.values())


def _read_carried(toml: TomlText, value: object, place: Place) -> CarriedRecord:
    texts = ("option", "origin", "sign", "fingerprint")
    table = toml.table(value, place, ("value", "si", *texts, "confirmed"))
    return CarriedRecord(
        toml.string(table, "value", place),
        toml.finite(table, "si", place),
        **{key: toml.string(table, key, place, "") for key in texts},
        confirmed=_read_confirmation(toml, table, place),
    )


def _read_confirmation(
    toml: TomlText, owner: Mapping[str, object], place: Place
) -> Confirmation | None:
    if "confirmed" not in owner:
        return None
    here = (*place, "confirmed")
    table = toml.table(owner["confirmed"], here, ("value", "job", "by", "on"))
    value, job, by = (toml.string(table, key, here) for key in ("value", "job", "by"))
    return Confirmation(value, job, by, toml.date(table, "on", here))


def migrated(toml: TomlText) -> tuple[TomlText, int]:
    """Return the text brought to the newest format step by step, and the format it had.

    Raises
    ------
    RecordError
        Broken TOML, no format line, or a format newer than this calcbook knows.
    """
    data = toml.data()
    found = toml.whole(data, "format", ())
    if not 0 <= found <= FORMAT:
        what = f"this record has format {found}; this calcbook reads formats 0 to {FORMAT}"
        hint = "open it with the newer calcbook that wrote it" if found > FORMAT else ""
        raise toml.refuse(what, ("format",), hint)
    for step in _STEPS[found:]:
        toml = replace(toml, text=step(toml.text))
    return toml, found


def _from_0_to_1(text: str) -> str:
    """Format 0 had bare text as entries: no source, no confirmation, and no carried values."""
    import tomlkit  # noqa: PLC0415 - reading a record of today must not pay for it

    document = tomlkit.parse(text)
    entries = document.get("entries", {})
    for name, value in list(entries.items()) if hasattr(entries, "items") else []:
        if isinstance(value, str):
            entries[name] = tomlkit.value(_text({"value": str(value)}))
    document["format"] = 1
    return tomlkit.dumps(document)


_STEPS: tuple[Callable[[str], str], ...] = (_from_0_to_1,)


def new_text(workbook: str, mark: str | None) -> str:
    """Return the text of a record in which nothing is filled in yet."""
    head = f"format = {FORMAT}\nworkbook = {_text(workbook)}\n"
    if mark is not None:
        head += f"mark = {_text(mark)}\n"
    return f"{head}\n[entries]\n\n[schedules]\n\n[carried]\n"


def edited(text: str, old: Form, new: Form) -> str:
    """Return the text of the old form changed to say the new one, the rest left as it stands."""
    import tomlkit  # noqa: PLC0415 - reading a record must not pay for it

    document: Any = tomlkit.parse(text)
    for section in ("entries", "schedules", "carried"):
        before, after = getattr(old, section), getattr(new, section)
        if before == after:
            continue
        if section not in document:
            document[section] = tomlkit.table()
        for name in before.keys() - after.keys():
            del document[section][name]
        for name, value in after.items():
            if name in before and before[name] == value:
                continue
            if section == "schedules":
                _put_rows(document[section], name, before.get(name, []), value)
            else:
                _put(document[section], name, _fields(value))
    return _DATE_AT_END.sub(_with_blank, tomlkit.dumps(document))


def _with_blank(found: re.Match[str]) -> str:
    """Put back the blank between a date and its bracket, which tomlkit loses in every line."""
    return f"{found['date']} }}" if found["date"] else found[0]


def _put(table: Any, name: str, fields: dict[str, object]) -> None:  # noqa: ANN401 - tomlkit
    """Set one named item; a table of several lines keeps its lines and their comments."""
    import tomlkit  # noqa: PLC0415 - as above

    present = table.get(name)
    if not isinstance(present, tomlkit.items.Table):
        table[name] = tomlkit.value(_text(fields))
        return
    for key in present.keys() - fields.keys():
        del present[key]
    for key, value in fields.items():
        present[key] = tomlkit.value(_text(value))


@dataclass(frozen=True)
class _Line:
    """A row as it stands in a file: the lines above it, its own text, the comment behind it."""

    above: str
    row: str
    comment: str


def _put_rows(table: Any, name: str, before: list[RowRecord], after: list[RowRecord]) -> None:  # noqa: ANN401
    """Set one schedule; where it has one row per line, rows keep their comments."""
    import tomlkit  # noqa: PLC0415 - as above

    present = table.get(name)
    lines = present.as_string() if isinstance(present, tomlkit.items.Array) else ""
    found, below = _lines(lines, [row.key for row in before], [row.key for row in after])
    same = {row.key for row in after if row in before}
    text = ""
    for row in after:
        line = found.get(row.key, _Line("", "", ""))
        written = line.row if row.key in same and line.row else f"  {_text(_fields(row))}"
        text += f"{line.above}{written},{line.comment and '  '}{line.comment}\n"
    table[name] = tomlkit.value(f"[\n{text}{below}]")


def _lines(text: str, old_keys: list[str], new_keys: list[str]) -> tuple[dict[str, _Line], str]:
    """Return the lines of the rows that stay, by new key, and what stands below the last.

    A row that is gone leaves the lines above it to the row that took its place, else to the next.
    """
    lines = [(line, _ROW.fullmatch(line)) for line in text.split("\n")[1:-1]]
    if sum(found is not None for _, found in lines) != len(old_keys):
        return {}, ""
    staying: dict[str, _Line] = {}
    above, number = "", 0
    for line, found in lines:
        if found is None:
            above += line.rstrip() + "\n"
            continue
        key = old_keys[number]
        if key not in new_keys and number < len(new_keys) and new_keys[number] not in old_keys:
            key = new_keys[number]
        if key in new_keys:
            staying[key] = _Line(above, found["row"], (found["comment"] or "").rstrip())
            above = ""
        number += 1
    return staying, above


def _fields(item: EntryRecord | RowRecord | CarriedRecord) -> dict[str, object]:
    """Return what is written of an item: all that is filled in, in the order of its class."""
    fields = {
        name: value
        for name, value in vars(item).items()
        if name in {"key", "value"} or value not in ("", None, {})
    }
    if item.confirmed is not None:
        on = dt.date.fromisoformat(item.confirmed.on)
        fields["confirmed"] = {**vars(item.confirmed), "on": on}
    return fields


def _text(value: object) -> str:
    """Return a value as TOML on one line."""
    if isinstance(value, dict):
        members = (f"{_key_text(key)} = {_text(member)}" for key, member in value.items())
        return f"{{ {', '.join(members)} }}"
    if isinstance(value, dt.date):
        return value.isoformat()
    if isinstance(value, float):
        return repr(value)
    # JSON's text is TOML's but for the one control character that TOML wants escaped as well.
    return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")


def _key_text(key: str) -> str:
    return key if re.fullmatch(r"[A-Za-z0-9_-]+", key) else _text(key)


def check_item(name: str, item: EntryRecord | RowRecord | CarriedRecord, where: str) -> None:
    """Refuse an item whose parts could not be written and read again as they are.

    Raises
    ------
    RecordError
        A part is not text, is text no file can hold, or the date is not an ISO date.
    """
    if isinstance(item, CarriedRecord) and not math.isfinite(item.si or 0.0):
        raise RecordError(f"'{name}' is not a finite number", where=where)
    if item.confirmed is not None:
        try:
            dt.date.fromisoformat(item.confirmed.on)
        except ValueError as error:
            what = f"'{item.confirmed.on}' is not a date"
            raise RecordError(what, hint="write it as 2026-10-02", where=where) from error
    try:
        _text({name: _fields(item)}).encode()
    except (UnicodeEncodeError, TypeError) as error:
        what = f"'{ascii(name)[1:-1]}' holds something that cannot be written as text"
        raise RecordError(what, hint="type it again", where=where) from error
