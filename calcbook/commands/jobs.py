"""The commands about a whole job: ``demo``, ``start``, ``open`` and ``pack``."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import datetime as dt
import importlib.util
import os
import re
import subprocess
import sys
from contextlib import contextmanager, suppress
from typing import TYPE_CHECKING

from calcbook.commands import review
from calcbook.commands.common import Progress, Steps
from calcbook.commands.saved import SavedOutputs, moved_on, moved_words
from calcbook.diskfile import in_plain_words, write_whole
from calcbook.errors import CalcbookError, InputError, JobError, near_match
from calcbook.job import BASIS, Job, template_folder, templates
from calcbook.record import EntryRecord
from calcbook.run import Filling, Runner, all_items

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Iterator, Mapping, Sequence
    from pathlib import Path

FIRST = (
    BASIS, "dead-load-take-off", "wind-pressure", "load-combinations", "floor-beam",
    "beam-schedule", "roof-truss", "column-accumulation", "column-schedule",
)  # fmt: skip
ISSUE_DATE = "issue_date"
_PAGE = re.compile(rb"/Type\s*/Page\b")
_UNFIT = re.compile(r"[^\w.-]+")
_LONGEST_NAME = 60


def start(arguments: Namespace) -> int:
    """Make a new job folder with every template, and say what comes next."""
    folder: Path = arguments.folder
    found = templates()
    with _nothing_left_of(folder) as made:
        job = Job.start(folder, _order(list(found)), found)
        made.extend(_files(job))
        with Progress() as progress:
            progress("preparing the design basis")
            _date_issue(job)
    print(f"started a job in {folder}: {', '.join(job.workbooks)}")
    print("next:")
    print(f"  cd {folder}")
    print(f"  calcbook describe {BASIS}")
    print(f"  calcbook set {BASIS} job_name='...' job_number='...' place='...'")
    print("  calcbook open .      (the same in JupyterLab)")
    print("  calcbook pack .      (the calculation package)")
    return 0


def _order(names: list[str]) -> list[str]:
    return [n for n in FIRST if n in names] + [n for n in names if n not in FIRST]


def _date_issue(job: Job) -> None:
    """Write today's date as the issue date; from here on dates come from the job."""
    if BASIS not in job.workbooks:
        return
    book, _ = Runner(job).run(Filling(job.notebook(BASIS)))
    with suppress(InputError):
        book.input_item(ISSUE_DATE)
        today = dt.datetime.now().astimezone().date().isoformat()
        record = job.record(BASIS)
        record.change({ISSUE_DATE: EntryRecord(today)})
        record.save()


@contextmanager
def _nothing_left_of(folder: Path) -> Iterator[list[Path]]:
    """Take out the files noted in the list, and the folders that were not there, on failure."""
    folders = [path for path in (folder, *folder.parents) if not path.exists()]
    made: list[Path] = []
    try:
        yield made
    except BaseException:
        for path in made:
            with suppress(OSError):
                path.unlink(missing_ok=True)
        for path in folders:
            with suppress(OSError):
                path.rmdir()
        raise


def _files(job: Job) -> list[Path]:
    """Return the files a new job may have, those that guard its records included."""
    found = [job.folder / "job.toml", *(job.notebook(w) for w in job.workbooks)]
    found += [job.record_path(w) for w in job.workbooks]
    return found + [path.with_name(f".{path.name}.lock") for path in found]


def open_job(arguments: Namespace) -> int:
    """Start JupyterLab on a job's folder, and wait until it is closed."""
    job = Job.load(arguments.folder)
    if importlib.util.find_spec("jupyterlab") is None:
        raise JobError("JupyterLab is not installed",
                       hint="install it with: python -m pip install jupyterlab")  # fmt: skip
    _prepare_outputs(job)
    folder = job.folder.resolve()
    words = [sys.executable, "-m", "jupyterlab", "--LabApp.news_url=None",
             f"--ServerApp.root_dir={folder}", *arguments.passed]  # fmt: skip
    print(f"opening {folder} in JupyterLab; press Ctrl-C here to close it")
    print("in a workbook: Run, Run All Cells; then type into its fields", flush=True)
    with subprocess.Popen(words, env={**os.environ, "CALCBOOK_JOB": str(folder)}) as server:  # noqa: S603  our own interpreter
        while True:
            with suppress(KeyboardInterrupt):  # JupyterLab gets it as well, and asks
                if status := server.wait():
                    raise JobError(f"JupyterLab stopped with status {status}",
                                   hint=_why_stopped(arguments))  # fmt: skip
                return 0


def _prepare_outputs(job: Job) -> None:
    """Take dead views out of the saved outputs, and say which show what is no longer so."""
    with Progress() as progress:
        runner = Runner(job, progress)
        for workbook in job.workbooks:
            try:
                _prepare(SavedOutputs(job.notebook(workbook)), job, runner, workbook)
            except CalcbookError as error:  # JupyterLab is where it can be put right
                print(f"{workbook}: its saved outputs cannot be compared: {error}")


def _prepare(outputs: SavedOutputs, job: Job, runner: Runner, workbook: str) -> None:
    outputs.drop_views()
    try:
        shown = moved_on(outputs, job, runner, workbook)
        outputs.say_moved(shown)
    finally:
        outputs.save()
    if shown:
        print(f"{workbook}: {moved_words(shown)}")


def _why_stopped(arguments: Namespace) -> str:
    as_root = getattr(os, "geteuid", lambda: None)() == 0  # there is no root on Windows
    if as_root and "--allow-root" not in arguments.passed:
        return ("as root it starts only when told so: "
                f"calcbook open {arguments.folder} -- --allow-root")  # fmt: skip
    return "its messages stand above"


def demo(arguments: Namespace) -> int:
    """Make the demo job and its calculation package."""
    folder: Path = arguments.folder
    steps = Steps(sys.stdout)
    steps(f"job folder {folder}")
    source = template_folder() / "demo"  # its notebooks hold the outputs of the filled records
    found = {path.stem: path for path in sorted(source.glob("*.ipynb"))}
    with _nothing_left_of(folder) as made:
        job = Job.start(folder, _order(list(found)), found)
        made.extend(_files(job))
        with in_plain_words(folder, JobError):
            for path in sorted(source.glob("*.toml")):
                made.append(folder / path.name)
                write_whole(made[-1], path.read_bytes())
        status = _make_pack(job, None, steps, made)
    print(f"look at it with: calcbook open {folder}")
    return status


def pack(arguments: Namespace) -> int:
    """Make the calculation package of a job."""
    job = Job.load(arguments.folder)
    only = _filling(job, arguments.only) if arguments.only else None
    return _make_pack(job, arguments.output, Steps(sys.stderr), [], only)


def _filling(job: Job, named: str) -> Filling:
    """Return the filling that ``WORKBOOK[:MARK]`` names in a job; JobError where there is none."""
    workbook, _, mark = named.partition(":")
    marks = job.marks(workbook) if workbook in job.workbooks else ()
    if workbook in job.workbooks and (mark in marks if marks else not mark):
        return Filling(job.notebook(workbook), mark or None)
    known = [f"{w}:{m}" if m else w for w, m in job.fillings()]
    hint = near_match(named, known) or f"it has {', '.join(known)}"
    raise JobError(f"the job has no '{named}' to print", hint=hint)


def _make_pack(
    job: Job, output: Path | None, steps: Steps, made: list[Path], only: Filling | None = None
) -> int:
    """Write the pack of a job, or of one filling, and say how it stands; returns the exit status.

    ``made`` receives the path of the file before it is written.
    """
    from calcbook.pack import package  # noqa: PLC0415  the pack's libraries are slow

    def save(pdf: bytes) -> None:
        path = output or job.folder / f"{_file_name(job)}{_part_name(only)}.pdf"
        made.append(path)
        with in_plain_words(path, JobError):
            write_whole(path, pdf)

    if only is not None:
        packed = package.pack_filling(job, only, steps)
        save(packed.pdf)
    else:
        packed = package.pack_job(job, steps, save)
    steps.done()
    print(f"{made[-1]}: {len(_PAGE.findall(packed.pdf))} pages")
    if packed.moved:
        print("carried values that moved since they were last taken:")
    for text in packed.moved:
        print(f"  {text}")
    return _stands(packed.statements)


def _part_name(only: Filling | None) -> str:
    """Return what the file of one filling adds to the name of the job's: '-wind-pressure'."""
    if only is None:
        return ""
    return "-".join(["", only.notebook.stem, *([only.mark] if only.mark else [])])


def _file_name(job: Job) -> str:
    """Return number and revision of a job as a file's name, or its folder's name without one."""
    words = {"job_number": "", "revision": ""}
    if BASIS in job.workbooks:
        for item in all_items(Runner(job).statement(BASIS)):
            if item["name"] in words and item["kind"] == "text":
                words[item["name"]] = _UNFIT.sub("-", item["text"]).strip("-.")[:_LONGEST_NAME]
    number, revision = words.values()
    if not number:
        return job.folder.resolve().name or "job"
    return f"{number}-{revision}" if revision else number


def _stands(statements: Sequence[Mapping[str, object]]) -> int:
    """Say what is unconfirmed, not satisfied or without a value in a pack; returns 1 or 0."""
    status = 0
    for statement in statements:
        mark = f":{statement['mark']}" if statement["mark"] else ""
        title = f"{statement['workbook']}{mark}"
        unconfirmed = review.unconfirmed(statement)
        if unconfirmed:
            print(f"{title}: unconfirmed: {', '.join(unconfirmed)}")
        wrong = [
            f"NOT SATISFIED: {check['meaning']}, {check['text']}"
            for check in review.checks(statement)
            if check["satisfied"] is False
        ]
        for text in (*wrong, *review.troubles(statement)):
            status = 1
            print(f"{title}: {text}")
    return status
