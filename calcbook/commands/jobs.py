"""The commands about a whole job: ``demo``, ``start``, ``open`` and ``pack``."""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import datetime as dt
import importlib.util
import os
import re
import subprocess
import sys
from contextlib import suppress
from typing import TYPE_CHECKING

from calcbook.commands import review
from calcbook.commands.common import Progress, Steps
from calcbook.diskfile import in_plain_words, write_whole
from calcbook.errors import InputError, JobError
from calcbook.job import BASIS, Job, template_folder, templates
from calcbook.record import EntryRecord
from calcbook.run import Filling, Runner

if TYPE_CHECKING:
    from argparse import Namespace
    from collections.abc import Mapping, Sequence
    from pathlib import Path

FIRST = (BASIS, "wind-pressure")
ISSUE_DATE = "issue_date"
_PAGE = re.compile(rb"/Type\s*/Page\b")
_UNFIT = re.compile(r"[^\w.-]+")


def start(arguments: Namespace) -> int:
    """Make a new job folder with every template, and say what comes next."""
    folder: Path = arguments.folder
    found = templates()
    job = Job.start(folder, _order(list(found)), found)
    try:
        with Progress() as progress:
            progress("preparing the design basis")
            _date_issue(job)
    except BaseException:
        _take_out(job)
        raise
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


def _take_out(job: Job) -> None:
    """Take a job just made out again, so that a command that failed has written nothing."""
    made = [job.folder / "job.toml", *(job.notebook(w) for w in job.workbooks)]
    made += [job.record_path(w) for w in job.workbooks]
    made += [path.with_name(f".{path.name}.lock") for path in made]
    for path in made:
        with suppress(OSError):
            path.unlink(missing_ok=True)
    with suppress(OSError):
        job.folder.rmdir()


def open_job(arguments: Namespace) -> int:
    """Start JupyterLab on a job's folder, and wait until it is closed."""
    job = Job.load(arguments.folder)
    if importlib.util.find_spec("jupyterlab") is None:
        raise JobError("JupyterLab is not installed",
                       hint="install it with: python -m pip install jupyterlab")  # fmt: skip
    folder = job.folder.resolve()
    words = [sys.executable, "-m", "jupyterlab", "--LabApp.news_url=None",
             f"--ServerApp.root_dir={folder}"]  # fmt: skip
    print(f"opening {folder} in JupyterLab; press Ctrl-C here to close it", flush=True)
    with subprocess.Popen(words, env={**os.environ, "CALCBOOK_JOB": str(folder)}) as server:  # noqa: S603  our own interpreter
        while True:
            with suppress(KeyboardInterrupt):  # JupyterLab gets it as well, and asks
                if server.wait() != 0:
                    raise JobError("JupyterLab stopped", hint="its messages stand above")
                return 0


def demo(arguments: Namespace) -> int:
    """Make the demo job and its calculation package."""
    folder: Path = arguments.folder
    steps = Steps(sys.stdout)
    steps(f"job folder {folder}")
    source = template_folder() / "demo"  # its notebooks hold the outputs of the filled records
    found = {path.stem: path for path in sorted(source.glob("*.ipynb"))}
    job = Job.start(folder, _order(list(found)), found)
    made: list[Path] = []
    try:
        with in_plain_words(folder, JobError):
            for path in sorted(source.glob("*.toml")):
                made.append(folder / path.name)
                write_whole(made[-1], path.read_bytes())
        status = _make_pack(job, None, steps, made)
    except BaseException:
        for path in made:
            with suppress(OSError):
                path.unlink(missing_ok=True)
        _take_out(job)
        raise
    print(f"look at it with: calcbook open {folder}")
    return status


def pack(arguments: Namespace) -> int:
    """Make the calculation package of a job."""
    job = Job.load(arguments.folder)
    return _make_pack(job, arguments.output, Steps(sys.stderr), [])


def _make_pack(job: Job, output: Path | None, steps: Steps, made: list[Path]) -> int:
    """Write the pack of a job and say how it stands; returns the exit status.

    ``made`` receives the path of the file before it is written.
    """
    from calcbook.pack.package import pack_job  # noqa: PLC0415  the pack's libraries are slow

    pdf, statements = pack_job(job, progress=steps)
    steps.done()
    path = output or job.folder / f"{_file_name(job)}.pdf"
    made.append(path)
    with in_plain_words(path, JobError):
        write_whole(path, pdf)
    print(f"{path}: {len(_PAGE.findall(pdf))} pages")
    return _stands(statements)


def _file_name(job: Job) -> str:
    """Return the job number as a file's name, or the folder's name when there is none."""
    return _UNFIT.sub("-", job.number).strip("-.") or job.folder.resolve().name


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
