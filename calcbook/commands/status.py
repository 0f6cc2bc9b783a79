"""The ``status`` command: how each workbook of a job stands."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import sys
from contextlib import suppress
from typing import TYPE_CHECKING

from calcbook.commands import review
from calcbook.commands.common import Progress
from calcbook.commands.saved import SavedOutputs, moved_on
from calcbook.errors import CalcbookError
from calcbook.job import BASIS, Job
from calcbook.run import Runner
from calcbook.wording import verdict

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Mapping, Sequence


def status(arguments: Namespace) -> int:
    """Print checks, unconfirmed, missing and stale values of every workbook and mark of a job.

    Returns 1 when a check is not satisfied, 2 when something could not be computed.
    """
    job = Job.load(arguments.folder)
    failed: list[str] = []
    checked = True
    with Progress() as progress:
        runner = Runner(job, progress)
        for workbook, mark in job.fillings():
            title = f"{workbook}:{mark}" if mark else workbook
            try:
                statement = runner.statement(workbook, mark)
            except CalcbookError as error:
                failed.append(f"{title} cannot be run: {error}")
                continue
            print(f"{title}: {summary(statement)}")
            _print(statement, runner.books[workbook, mark][0].not_used())
            checked = checked and not review.not_satisfied(statement)
            troubles = review.troubles(statement)
            failed += [f"{title}: {text}" for text in troubles]
        _print_moved(job, runner)
    for text in failed:
        print(f"calcbook: {text}", file=sys.stderr)
    return 2 if failed else 0 if checked else 1


def _print_moved(job: Job, runner: Runner) -> None:
    """Say which notebooks were saved with outputs that are no longer so."""
    found = []
    for workbook in job.workbooks:
        with suppress(CalcbookError):  # what cannot be run was said already
            if moved_on(SavedOutputs(job.notebook(workbook)), job, runner, workbook):
                found.append(workbook)
    if found:
        print(f"saved outputs of an earlier record, run all cells: {', '.join(found)}")


def summary(statement: Mapping[str, object]) -> str:
    """Return the checks of a statement counted by verdict, in words."""
    found = [verdict(check) for check in review.checks(statement)]
    counts = [f"{found.count(word)} {word}" for word in dict.fromkeys(found)]
    return f"checks: {', '.join(counts)}" if counts else "no checks"


def _print(statement: Mapping[str, object], not_used: Sequence[str]) -> None:
    for check in review.checks(statement):
        if check["satisfied"] is not True:
            ratio = f", ratio {check['ratio_text']}" if check["ratio_text"] else ""
            print(f"  {verdict(check)}: {check['number']} {check['meaning']}, "
                  f"{check['text']}{ratio}")  # fmt: skip
    unconfirmed = review.unconfirmed(statement)
    if unconfirmed:
        print(f"  unconfirmed: {', '.join(unconfirmed)}")
    if statement["workbook"] == BASIS and (empty := review.nothing_entered(statement)):
        print(f"  nothing entered: {', '.join(empty)}")
    for text in review.stale(statement):
        print(f"  stale: {text}")
    if not_used:
        code: Mapping[str, object] = statement["code_set"]  # type: ignore[assignment]
        print(f"  not used with {code['name']}: {', '.join(not_used)}")
