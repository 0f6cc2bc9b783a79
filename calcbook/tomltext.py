"""TOML files read strictly: every refusal names the file, the line and the column."""

from __future__ import annotations

import datetime as dt
import re
import tomllib
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from calcbook.errors import CalcbookError, near_match

if TYPE_CHECKING:
    from collections.abc import Collection, Iterator

Place = tuple[str | int, ...]
Table = dict[str, Any]

#: A string in any of TOML's four spellings, for patterns compiled with re.DOTALL.
STRING = (
    r'"""(?:\\.|[^\\])*?"{3,5}'
    r"|'{3}.*?'{3,5}"
    r'|"(?:\\.|[^"\\\n])*"'
    r"|'[^'\n]*'"
)

_TOKEN = re.compile(
    rf"(?P<string>{STRING})"
    r"|(?P<comment>\#[^\n]*)|(?P<bare>[A-Za-z0-9_+:-]+)|(?P<sign>[=.,\[\]{}\n])",
    re.DOTALL,
)
_PLACE = re.compile(r" \(at (?:line (\d+), column (\d+)|end of document)\)$")
_KINDS: tuple[tuple[type, str], ...] = (
    (bool, "true or false"),
    (str, "text"),
    (int, "a whole number"),
    (float, "a number"),
    (dt.datetime, "a date with a time"),
    (dt.date, "a date"),
    (list, "a list"),
    (dict, "a table"),
)


@dataclass(frozen=True)
class TomlText:
    """The text of one TOML file, and the kind of error its refusals are raised as."""

    name: str
    text: str
    kind: type[CalcbookError]

    @classmethod
    def decoded(cls, name: str, data: bytes, kind: type[CalcbookError]) -> TomlText:
        """Decode a file; a byte order mark is dropped, anything but UTF-8 is refused."""
        try:
            return cls(name, data.decode("utf-8-sig"), kind)
        except UnicodeDecodeError as error:
            line = data.count(b"\n", 0, error.start) + 1
            raise kind(
                "this file is not UTF-8 text",
                hint="save it as UTF-8 in the editor",
                where=f"{name}, line {line}",
            ) from error

    def data(self) -> Table:
        """Return the whole file as plain data; broken TOML is refused with its place."""
        try:
            return tomllib.loads(self.text)
        except RecursionError as error:
            raise self.kind("brackets are nested too deeply", where=self.name) from error
        except ValueError as error:
            message = str(error)
            found = _PLACE.search(message)
            what = _PLACE.sub("", message)
            offset = self._offset(found) if found else None
            raise self._error(
                f"broken TOML: {what[:1].lower()}{what[1:]}",
                offset,
                "the file was left as it is; put this line right in a text editor",
            ) from error

    def refuse(self, what: str, path: Place = (), hint: str = "") -> CalcbookError:
        """Return the error for what stands at a path of keys and row numbers."""
        known = _Places(self.text).found
        while path and path not in known:
            path = path[:-1]
        return self._error(what, known[path] if path else None, hint)

    def table(self, value: object, path: Place, known: Collection[str] | None = None) -> Table:
        """Return a value that must be a table, with none but the known keys."""
        if not isinstance(value, dict):
            raise self._wrong(value, path, "a table")
        for key in value:
            if known is not None and key not in known:
                hint = near_match(key, known) or f"known here: {', '.join(known)}"
                raise self.refuse(f"unknown key '{key}'", (*path, key), hint)
        return value

    def rows(self, value: object, path: Place) -> list[Any]:
        """Return a value that must be a list."""
        if not isinstance(value, list):
            raise self._wrong(value, path, "a list")
        return value

    def string(self, table: Table, key: str, path: Place, default: str | None = None) -> str:
        """Return the text under a key; without a default the key must be there."""
        value = self._get(table, key, path, default)
        if not isinstance(value, str):
            hint = f'write {key} = "{value}"' if isinstance(value, int | float) else ""
            raise self._wrong(value, (*path, key), "text in quotes", hint)
        return value

    def whole(self, table: Table, key: str, path: Place) -> int:
        """Return the whole number under a key that must be there."""
        value = self._get(table, key, path, None)
        if not isinstance(value, int) or isinstance(value, bool):
            raise self._wrong(value, (*path, key), "a whole number")
        return value

    def finite(self, table: Table, key: str, path: Place) -> float | None:
        """Return the finite number under a key, or None when the key is not there."""
        value = table.get(key)
        if value is None:
            return None
        if not isinstance(value, int | float) or isinstance(value, bool):
            raise self._wrong(value, (*path, key), "a number")
        if not abs(value) < float("inf"):
            raise self.refuse(f"{_words((*path, key))} must be finite", (*path, key))
        return float(value)

    def date(self, table: Table, key: str, path: Place) -> str:
        """Return the date under a key that must be there, as ISO text."""
        value = self._get(table, key, path, None)
        if not isinstance(value, dt.date) or isinstance(value, dt.datetime):
            hint = f"write it without quotes: {key} = 2026-10-02"
            raise self._wrong(value, (*path, key), "a date", hint)
        return value.isoformat()

    def _get(self, table: Table, key: str, path: Place, default: str | None) -> object:
        value = table.get(key, default)
        if value is None:
            place = f"in {_words(path)}" if path else "at the top of the file"
            raise self.refuse(f"'{key}' is missing {place}", path)
        return value

    def _wrong(self, value: object, path: Place, wanted: str, hint: str = "") -> CalcbookError:
        found = next((word for kind, word in _KINDS if isinstance(value, kind)), "something else")
        return self.refuse(f"{_words(path)} must be {wanted}, not {found}", path, hint)

    def _offset(self, found: re.Match[str]) -> int:
        if found[1] is None:
            return len(self.text.rstrip())
        before = self.text.split("\n")[: int(found[1]) - 1]
        return sum(len(line) + 1 for line in before) + int(found[2]) - 1

    def _error(self, what: str, offset: int | None, hint: str) -> CalcbookError:
        if offset is None:
            return self.kind(what, hint=hint, where=self.name)
        start = self.text.rfind("\n", 0, offset) + 1
        line = self.text.count("\n", 0, offset) + 1
        column = offset - start
        return self.kind(
            what,
            hint=hint,
            where=f"{self.name}, line {line}, column {column + 1}",
            text=self.text[start:].split("\n", 1)[0].rstrip("\r").replace("\t", " "),
            span=(column, column + 1),
        )


def _words(path: Place) -> str:
    """Return a path as it is spoken: ``schedules.levels row 2 cells.z``."""
    words = ""
    after_key = False
    for step in path:
        if isinstance(step, int):
            words += f" row {step + 1}"
        else:
            words += f"{'.' if after_key else ' '}{step}"
        after_key = isinstance(step, str)
    return words.strip()


class _Places:
    """Where each key and list element of a valid TOML text begins; values are passed over."""

    def __init__(self, text: str) -> None:
        self.found: dict[Place, int] = {}
        self._tokens = [m for m in _TOKEN.finditer(text) if m.lastgroup != "comment"]
        self._at = 0
        prefix: Place = ()
        while self._at < len(self._tokens):
            if self._peek() == "\n":
                self._at += 1
            elif self._peek() == "[":
                prefix = self._header()
            else:
                self._pair(prefix)

    def _peek(self) -> str:
        return self._tokens[self._at].group() if self._at < len(self._tokens) else "\n"

    def _next(self) -> re.Match[str]:
        self._at += 1
        return self._tokens[self._at - 1]

    def _header(self) -> Place:
        brackets = 0
        while self._peek() == "[":
            self._at += 1
            brackets += 1
        path = self._keys((), "]")
        self._at += brackets - 1
        if brackets == 1:
            return path
        number = 0
        while (*path, number) in self.found:
            number += 1
        self.found[*path, number] = self.found[path]
        return (*path, number)

    def _keys(self, prefix: Place, stop: str) -> Place:
        while (token := self._next()).group() != stop:
            if token.group() != ".":
                prefix = (*prefix, _key(token))
                self.found.setdefault(prefix, token.start())
        return prefix

    def _pair(self, prefix: Place) -> None:
        self._value(self._keys(prefix, "="))

    def _value(self, path: Place) -> None:
        first = self._next().group()
        if first == "{":
            for _ in self._members("}"):
                self._pair(path)
        elif first == "[":
            for number in self._members("]"):
                self.found[*path, number] = self._tokens[self._at].start()
                self._value((*path, number))
        else:
            while self._peek() not in {",", "\n", "]", "}"}:
                self._at += 1

    def _members(self, stop: str) -> Iterator[int]:
        number = 0
        while True:
            while self._peek() in {",", "\n"}:
                self._next()
            if self._peek() == stop:
                self._at += 1
                return
            yield number
            number += 1


def _key(token: re.Match[str]) -> str:
    if token.lastgroup != "string":
        return token.group()
    return next(iter(tomllib.loads(f"{token.group()} = 0")))
