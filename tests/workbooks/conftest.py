"""Running the shipped workbooks without a screen."""

from __future__ import annotations

import csv
from pathlib import Path
from typing import TYPE_CHECKING

import pytest
from sheets import CODES, Sheet

from calcbook.inputs import Given, GivenRow, Inputs
from calcbook.job import templates
from calcbook.run import Filling, Runner, find_item

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from calcbook.record import RowRecord
    from calcbook.workbook import Workbook

REFERENCES = Path(__file__).parents[1] / "references"


@pytest.fixture(scope="session")
def run() -> Callable[..., Sheet]:
    """Return a function that runs a template as the command line does; refusals are raised."""

    def ran(
        workbook: str,
        sets: Mapping[str, str] | None = None,
        rows: Mapping[str, Sequence[RowRecord]] | None = None,
        *,
        code: str = CODES[0],
        units: str = "SI",
    ) -> Sheet:
        given = {"code_set": code, "units": units, **(sets or {})}
        filling = Filling(templates()[workbook], sets=given, rows=rows or {})
        book, statement = Runner(None).run(filling, strict=True)
        return Sheet(statement, book)

    return ran


@pytest.fixture(scope="session")
def fill(run: Callable[..., Sheet]) -> Callable[..., Sheet]:
    """Return a function that fills a template in anew, as the live side does.

    A notebook is run once for each code set and unit system; after that only its inputs change.
    """
    books: dict[tuple[str, str, str], Workbook] = {}

    def filled(
        workbook: str,
        sets: Mapping[str, str] | None = None,
        rows: Mapping[str, Sequence[RowRecord]] | None = None,
        *,
        code: str = CODES[0],
        units: str = "SI",
    ) -> Sheet:
        key = (workbook, code, units)
        if key not in books:
            books[key] = run(workbook, code=code, units=units).book
        book = books[key]
        given = {"code_set": code, "units": units, **(sets or {})}
        book.inputs = Inputs(
            {name: Given(text) for name, text in given.items()},
            {n: [GivenRow(r.key, r.cells) for r in table] for n, table in (rows or {}).items()},
        )
        book.refuse_unknown()
        statement = book.statement()
        for name in given:
            item = find_item(statement, name)
            assert item is not None, name
            assert not item["problem"], item["problem"]
        return Sheet(statement, book)

    return filled


@pytest.fixture(scope="session")
def published() -> Callable[[str], list[dict[str, str]]]:
    """Return the rows of a file of published values by the name of the file."""

    def rows(name: str) -> list[dict[str, str]]:
        with (REFERENCES / f"{name}.csv").open(encoding="utf-8", newline="") as file:
            return list(csv.DictReader(file))

    return rows
