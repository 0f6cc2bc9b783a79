"""The job folder: ``job.toml``, its workbooks in order, their records and marks."""

from __future__ import annotations

import json
import os
import re
import shutil
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from calcbook.diskfile import in_plain_words, read_bytes, write_whole
from calcbook.errors import JobError, near_match
from calcbook.record import Record, record_path
from calcbook.tomltext import TomlText

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

__all__ = ["BASIS", "JOB_NUMBER", "Job", "find_notebook", "template_folder", "templates"]

FORMAT = 1
_FILE = "job.toml"
_ENVIRONMENT = "CALCBOOK_JOB"
BASIS, JOB_NUMBER = "design-basis", "job_number"  # where the job's own data are entered
_LIST_HINT = 'list the notebooks in order: workbooks = ["design-basis", "wind-pressure"]'
_START_HINT = "start a job with: calcbook start FOLDER"


@dataclass(frozen=True)
class Job:
    """One building's folder.

    Parameters
    ----------
    folder
        Where ``job.toml`` lies.
    workbooks
        The identities of its workbooks, in the order of ``job.toml``.
    """

    folder: Path
    workbooks: tuple[str, ...]

    @classmethod
    def find(cls, start: Path | None = None) -> Job | None:
        """Return the job of ``CALCBOOK_JOB``, else the nearest upward of `start`, else None.

        Raises
        ------
        JobError
            ``CALCBOOK_JOB`` names no job, or the job found is broken.
        """
        named = os.environ.get(_ENVIRONMENT)
        if named:
            try:
                return cls.load(Path(named))
            except JobError as error:
                raise error.at(_ENVIRONMENT) from None
        here = (start or Path.cwd()).resolve()
        for folder in (here, *here.parents):
            if _is_job(folder):
                return cls.load(folder)
        return None

    @classmethod
    def load(cls, folder: Path) -> Job:
        """Read the job in a folder.

        Raises
        ------
        JobError
            No ``job.toml``, a broken one, an unknown key, a newer format, or a notebook it lists
            that is not there.
        """
        path = folder / _FILE
        with in_plain_words(path, JobError):
            data = read_bytes(path)
        if data is None:
            raise JobError(f"'{folder}' is not a job: no {_FILE} in it", hint=_START_HINT)
        toml = TomlText.decoded(_FILE, data, JobError)
        job = cls(folder, _read_workbooks(toml))
        for index, workbook in enumerate(job.workbooks):
            if not job.notebook(workbook).is_file():
                raise toml.refuse(
                    f"the notebook {workbook}.ipynb is not in the folder",
                    ("workbooks", index),
                    f"put it back, or take '{workbook}' out of {_FILE}",
                )
        return job

    @classmethod
    def start(cls, folder: Path, workbooks: Sequence[str], templates: Mapping[str, Path]) -> Job:
        """Make a job folder with copies of templates; on failure nothing is left behind.

        Raises
        ------
        JobError
            The folder has something in it, a workbook is unknown or named twice, or the disk
            refuses.
        """
        for index, workbook in enumerate(workbooks):
            if workbook not in templates:
                hint = near_match(workbook, templates) or f"there are: {', '.join(templates)}"
                raise JobError(f"there is no workbook '{workbook}'", hint=hint)
            if workbook in workbooks[:index]:
                raise JobError(f"the workbook '{workbook}' is named twice", hint="name it once")
        with in_plain_words(folder, JobError):
            if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
                hint = "choose a new folder, or an empty one; nothing was changed"
                raise JobError(f"'{folder}' exists already and is not empty", hint=hint)
            _fill(folder, {workbook: templates[workbook] for workbook in workbooks})
        return cls.load(folder)

    def notebook(self, workbook: str) -> Path:
        """Return the path of a workbook's notebook; one the job does not have is refused."""
        if workbook not in self.workbooks:
            hint = near_match(workbook, self.workbooks) or f"it has: {', '.join(self.workbooks)}"
            raise JobError(f"this job has no workbook '{workbook}'", hint=hint, where=_FILE)
        return self.folder / f"{workbook}.ipynb"

    def unlisted(self, workbook: str) -> str:
        """Return what to do about a notebook of the folder that is not in the list, or ''."""
        if workbook in self.workbooks or not (self.folder / f"{workbook}.ipynb").is_file():
            return ""
        return f"add '{workbook}' to the list of workbooks in {_FILE}"

    def record_path(self, workbook: str, mark: str | None = None) -> Path:
        """Return the path of the record of a workbook and mark."""
        return record_path(self.folder, workbook, mark)

    def record(self, workbook: str, mark: str | None = None) -> Record:
        """Read the record of a workbook and mark; empty when there is none yet."""
        return Record.load(self.record_path(workbook, mark), workbook, mark)

    def marks(self, workbook: str) -> tuple[str, ...]:
        """Return the marks a workbook has records of, B2 before B10.

        Raises
        ------
        RecordError
            A file is named as a record and its mark cannot be one.
        """
        start = self.record_path(workbook).stem + "."
        found = [
            path.name.removeprefix(start).removesuffix(".toml")
            for path in self.folder.iterdir()
            if path.name.startswith(start)
            and path.name != f"{start}toml"
            and path.suffix == ".toml"
        ]
        for mark in found:
            self.record_path(workbook, mark)
        return tuple(sorted(found, key=_natural))

    def fillings(self) -> list[tuple[str, str | None]]:
        """Return every workbook with each of its marks, in the order of the pack.

        A workbook with marks has a filling without one only where that has a record.
        """
        found: list[tuple[str, str | None]] = []
        for workbook in self.workbooks:
            marks = self.marks(workbook)
            if not marks or self.record_path(workbook).exists():
                found.append((workbook, None))
            found += [(workbook, mark) for mark in marks]
        return found

    @property
    def number(self) -> str:
        """The job number: an entry of the design basis; '' when it has none."""
        entry = self.record(BASIS).entries.get(JOB_NUMBER)
        return entry.value if entry else ""

    def claim(self, workbook: str, notebook: Path) -> None:
        """Let a notebook speak for a workbook, unless another one in the folder does so too.

        Raises
        ------
        JobError
            Names both notebooks.
        """
        claimant = notebook.resolve()
        others = [path for path in sorted(self.folder.glob("*.ipynb")) if _opens(path, workbook)]
        if workbook in self.workbooks:
            others.insert(0, self.notebook(workbook))
        for other in others:
            if other.resolve() != claimant:
                raise JobError(
                    f"two notebooks claim the record of '{workbook}': "
                    f"{notebook.name} and {other.name}",
                    hint="take one out of the job's folder, or open it under another name",
                    where=str(self.folder),
                )


def find_notebook(name: str, job: Job | None) -> Path:
    """Return the notebook of a WORKBOOK argument: a path, the job's copy, else the template.

    Raises JobError with the nearest name when there is none, or when the job's folder has it and
    its list does not.
    """
    if name.endswith(".ipynb"):
        path = Path(name)
        if not path.is_file():
            raise JobError(f"there is no notebook '{name}'")
        return path
    if job is not None and name in job.workbooks:
        return job.notebook(name)
    known = templates()
    hint = job.unlisted(name) if job is not None else ""
    if name in known and not hint:
        return known[name]
    every = list(dict.fromkeys([*(job.workbooks if job is not None else ()), *known]))
    what = f"the job does not list {name}.ipynb" if hint else f"there is no workbook '{name}'"
    hint = hint or _job_below(Path(name)) or near_match(name, every)
    raise JobError(what, hint=hint or f"there are: {', '.join(every)}")


def template_folder() -> Path:
    """Return the folder of the template notebooks, in an installed package or a source tree.

    Raises
    ------
    JobError
        The installation has none.
    """
    package = Path(__file__).resolve().parent
    for folder in (package / "workbooks", package.parent / "workbooks"):
        if folder.is_dir():
            return folder
    raise JobError("this installation has no template workbooks", hint="install calcbook again")


def templates() -> dict[str, Path]:
    """Return the template notebooks by name, in the order of the alphabet."""
    return {path.stem: path for path in sorted(template_folder().glob("*.ipynb"))}


def _is_job(folder: Path) -> bool:
    """Whether a folder is that of a job."""
    return (folder / _FILE).is_file()


def _job_below(path: Path) -> str:
    """Return where to go when a job's folder is named with a workbook, or instead of one."""
    folder = next((f for f in (path.parent, path) if f.name and _is_job(f)), None)
    return f"go into the job's folder first: cd {folder}" if folder else ""


def _read_workbooks(toml: TomlText) -> tuple[str, ...]:
    data = toml.data()
    found = toml.whole(data, "format", ())
    if found != FORMAT:
        what = f"this job has format {found}; this calcbook reads format {FORMAT}"
        hint = "open it with the newer calcbook that wrote it" if found > FORMAT else ""
        raise toml.refuse(what, ("format",), hint)
    toml.table(data, (), ("format", "workbooks"))
    names: list[str] = []
    if "workbooks" not in data:
        raise toml.refuse("'workbooks' is missing at the top of the file", (), _LIST_HINT)
    for index, name in enumerate(toml.rows(data["workbooks"], ("workbooks",))):
        place = ("workbooks", index)
        if not isinstance(name, str):
            raise toml.refuse("a workbook is named by text in quotes", place)
        if name in names:
            raise toml.refuse(f"the workbook '{name}' is listed twice", place, "list it once")
        names.append(name)
    return tuple(names)


def _fill(folder: Path, notebooks: Mapping[str, Path]) -> None:
    """Make the folder and its files, job.toml last; take everything out again on failure."""
    made_folders = [path for path in (folder, *folder.parents) if not path.exists()]
    made_files: list[Path] = []
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for workbook, template in notebooks.items():
            made_files.append(folder / f"{workbook}.ipynb")
            shutil.copyfile(template, made_files[-1])
        made_files.append(folder / _FILE)
        names = "".join(f"  {json.dumps(workbook)},\n" for workbook in notebooks)
        text = f"format = {FORMAT}\n# the order of the pack\nworkbooks = [\n{names}]\n"
        write_whole(made_files[-1], text.encode())
    except BaseException:
        for path in made_files:
            with suppress(OSError):
                path.unlink(missing_ok=True)
        for path in made_folders:
            with suppress(OSError):
                path.rmdir()
        raise


def _natural(mark: str) -> list[tuple[int, int, str]]:
    parts = re.findall(r"\d+|\D+", mark)
    return [(0, int(part), "") if part.isdigit() else (1, 0, part) for part in parts]


def _opens(path: Path, workbook: str) -> bool:
    """Whether a code cell of a notebook opens the workbook of this name."""
    opening = re.compile(rf"(?i:workbook)\(\s*(['\"]){re.escape(workbook)}\1")
    try:
        data = path.read_bytes()
        if workbook.encode() not in data:
            return False
        cells = json.loads(data)["cells"]
        sources = ["".join(cell["source"]) for cell in cells if cell["cell_type"] == "code"]
    except (OSError, ValueError, KeyError, TypeError):
        return False  # a file that is no notebook claims nothing
    return any(opening.search(source) for source in sources)
