"""The ``run`` command: a workbook computed as it is, with other values, or for many cases."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import csv
import json
import sys
from typing import TYPE_CHECKING

from calcbook import cases, units
from calcbook.commands import review
from calcbook.commands.common import (
    Progress,
    Target,
    assignments,
    find_target,
    needs_unit,
    read_rows,
)
from calcbook.commands.report import text_report
from calcbook.csvrows import CaseTable, Header, read_cases
from calcbook.errors import CalcbookError, JobError, near_match
from calcbook.job import template_folder
from calcbook.run import Filling, Runner, all_items
from calcbook.statement import twelve, twelve_digits

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Mapping, Sequence
    from pathlib import Path

    import numpy as np

    from calcbook.workbook import Workbook

Plain = dict[str, object]


def run(arguments: Namespace) -> int:
    """Compute a workbook and print it; nothing is written.

    Returns 1 when a check is not satisfied, 2 when something could not be computed.
    """
    target = find_target(arguments.workbook)
    _refuse_unknown_mark(target)
    _say_whose(target)
    sets = assignments(arguments.set)
    filling = Filling(target.notebook, target.mark, sets=sets)
    with Progress() as progress:
        if arguments.rows:
            book, _ = Runner(target.job).run(filling)
            filling.rows = read_rows(arguments.rows, book)
        book, statement = Runner(target.job, progress).run(filling, strict=True)
        if arguments.cases is not None:
            return _run_cases(book, arguments.cases, progress, as_json=arguments.json)
    if arguments.json:
        print(json.dumps(twelve_digits(as_json(statement)), indent=2))
    else:
        print(text_report(statement))
    sys.stdout.flush()
    troubles = review.troubles(statement)
    if troubles:
        _say_troubles(book.name, troubles)
        return 2
    return 1 if review.not_satisfied(statement) else 0


def _refuse_unknown_mark(target: Target) -> None:
    """Refuse a mark the job has no record of: it would be computed with the template's values."""
    job, name = target.job, target.notebook.stem
    if target.mark is None or job is None:
        return
    marks = job.marks(name)
    if target.mark not in marks:
        hint = near_match(target.mark, marks) or f"it has: {', '.join(marks) or 'none'}"
        raise JobError(f"{name} has no mark '{target.mark}' in this job", hint=hint)


def _say_whose(target: Target) -> None:
    """Say on standard error when it is not a workbook of the job that is computed."""
    job, notebook = target.job, target.notebook
    if notebook.parent == template_folder():
        who = "no job here" if job is None else f"this job has no {notebook.stem}"
        print(f"{who}: the template's values are computed", file=sys.stderr)
    elif job is not None and notebook.resolve().parent == job.folder.resolve():
        hint = job.unlisted(notebook.stem)
        if hint:
            print(f"{notebook.stem} will not be in the package: {hint}", file=sys.stderr)


def _say_troubles(name: str, troubles: Sequence[str]) -> None:
    things = "thing" if len(troubles) == 1 else "things"
    print(f"calcbook: {name}: {len(troubles)} {things} could not be accepted or computed",
          file=sys.stderr)  # fmt: skip
    for text in troubles:
        print(text, file=sys.stderr)


# --- one case as JSON ---------------------------------------------------------------------------


def as_json(statement: Mapping[str, object]) -> Plain:
    """Return the results of a statement as plain data with 12 significant digits."""
    items = [i for i in all_items(statement) if i["applies"]]
    return {
        "workbook": statement["workbook"], "mark": statement["mark"],
        "fingerprint": statement["fingerprint"],
        "values": {
            str(i["name"]): _value(i["value"]) | {"sign": i["sign"]}
            for i in items if i["kind"] == "line"
        },
        "schedules": {str(i["name"]): _schedule(i) for i in items if i["kind"] == "schedule"},
        "checks": [
            {"text": i["text"], "ratio": i["ratio"], "satisfied": i["satisfied"]}
            for i in items if i["kind"] == "check"
        ],
        "entries": {
            str(i["name"]): _entered(i) for i in items
            if i["kind"] in {"entry", "choice", "text", "carried"}
        },
        "problems": review.troubles(statement),
    }  # fmt: skip


def _value(value: object) -> Plain:
    found: Mapping[str, object] = value  # type: ignore[assignment]
    return {"value": found["value"], "unit": found["unit"], "si": found["si"]}


def _entered(item: Mapping[str, object]) -> Plain:
    value: Plain = {"value": review.value_text(item)}
    if "value" in item:
        value = _value(item["value"])
    if item["kind"] == "carried" and not item["fallback"]:
        origin: Mapping[str, object] = item["from"]  # type: ignore[assignment]
        return value | {"from": f"{origin['workbook']}.{origin['name']}"}
    return value | {"confirmed": bool(item["confirmed"])}


def _schedule(item: Mapping[str, object]) -> Plain:
    columns: Sequence[Mapping[str, object]] = item["columns"]  # type: ignore[assignment]
    return {"key": item["rows"], "columns": {str(c["name"]): _column(c) for c in columns}}


def _column(column: Mapping[str, object]) -> Plain:
    si: Sequence[float | None] = column["si"]  # type: ignore[assignment]
    if "labels" in column:
        return {"unit": "", "values": column["texts"], "si": si}
    unit = units.unit(str(column["unit"]))
    values = [None if v is None else twelve(v / unit.factor) for v in si]
    return {"unit": unit.text, "values": values, "si": si}


# --- many cases ---------------------------------------------------------------------------------


def _run_cases(book: Workbook, path: Path, progress: Progress, *, as_json: bool) -> int:
    progress(f"reading {path.name}")
    known = {name: needs_unit(item) for name, item in cases.entries(book).items()}
    table = read_cases(path, known)
    try:
        progress(f"computing {len(table)} cases")
        many, program = cases.read(book, table.entries), book.many()
        found = cases.compute(program, many.values, many.rows)
        results = cases.results(book, program, many, found)
    except CalcbookError as error:
        raise error.at(path.name) from None
    failed = cases.failing(program, many, found)
    progress("printing")
    _print_cases(table, _in_units(book, results), as_json=as_json)
    for bound, places in failed:
        print(f"not satisfied: {bound.number} {bound.item.meaning}, {bound.item.formula}, "  # type: ignore[attr-defined]
              f"in {len(places)} of {len(table)} cases, the first is case {places[0] + 1}",
              file=sys.stderr)  # fmt: skip
    return 1 if failed else 0


def _in_units(book: Workbook, results: Mapping[str, np.ndarray]) -> list[tuple[Header, list[str]]]:
    """Return each result with its values (12 significant digits; '' where not applied)."""
    found = []
    for bound in cases.result_lines(book):
        kind = bound.item.kind  # type: ignore[attr-defined]
        unit = kind.si if book.system == "SI" else kind.us
        values = (results[bound.name] / unit.factor).tolist()
        texts = ["" if v != v else f"{v:.12g}" for v in values]  # noqa: PLR0124  nan
        found.append((Header(bound.name, unit.text), texts))
    return found


def _print_cases(
    table: CaseTable, results: Sequence[tuple[Header, list[str]]], *, as_json: bool
) -> None:
    """Print the columns given, as given, and beside them the results."""
    given = list(zip(table.headers, table.given, strict=True))
    if as_json:
        print(json.dumps({
            "entries": {h.name: {"unit": h.unit, "values": list(cells)} for h, cells in given},
            "names": {
                h.name: {"unit": h.unit, "values": [float(v) if v else None for v in texts]}
                for h, texts in results
            },
        }))  # fmt: skip
        return
    headers, columns = zip(*given, *results, strict=True)
    rows = csv.writer(sys.stdout, lineterminator="\n")
    rows.writerow(headers)
    rows.writerows(zip(*columns, strict=True))
