"""The cells of a notebook, run as plain Python without Jupyter."""

from __future__ import annotations

import contextlib
import io
import json
import traceback
from typing import TYPE_CHECKING

from calcbook.errors import CalcbookError, CarryError, JobError

if TYPE_CHECKING:
    from pathlib import Path


def read_cells(path: Path) -> list[tuple[str, str]]:
    """Return (type, source) of every cell; JobError when the file is no notebook."""
    try:
        cells = json.loads(path.read_text(encoding="utf-8"))["cells"]
        return [(str(c["cell_type"]), "".join(c["source"])) for c in cells]
    except (OSError, ValueError, KeyError, TypeError) as error:
        raise JobError(
            "this is no notebook that can be read",
            where=path.name,
            hint=f"{type(error).__name__}: {error}",
        ) from error


def run_cell(path: Path, count: int, source: str, space: dict[str, object]) -> None:
    """Run one code cell in a namespace.

    Raises
    ------
    JobError
        The cell stopped with an error that is not ours, with the line it stopped at; or it holds
        a notebook command.
    CalcbookError
        What the cell itself raised, with the cell in front.
    """
    place = f"<{path.name} cell {count}>"
    try:
        with contextlib.redirect_stdout(io.StringIO()):
            exec(compile(source, place, "exec"), space)  # noqa: S102  the notebook is the program
    except CarryError:
        raise
    except CalcbookError as error:
        raise error.at(f"{path.name}, cell {count}") from None
    except (Exception, SystemExit) as error:
        if isinstance(error, SyntaxError) and error.filename == place:
            _refuse_command(error, path, count, source)
        raise JobError(
            f"the cell stopped: {type(error).__name__}: {error}",
            where=f"{path.name}, cell {count}",
            text=_failing_line(error, place, source),
        ) from error


def _refuse_command(error: SyntaxError, path: Path, count: int, source: str) -> None:
    """Refuse a notebook command, which is what a cell that is no Python stops at or begins with.

    The commands of a whole cell may put the error anywhere below.
    """
    lines = source.splitlines()
    begins = next((line for line in lines if line.strip()), "")
    stops = lines[error.lineno - 1] if error.lineno and error.lineno <= len(lines) else ""
    for line in (stops, begins):
        if line.lstrip().startswith(("%", "!")):
            raise JobError(
                "notebook commands do not run outside Jupyter",
                text=line,
                where=f"{path.name}, cell {count}",
                hint="take this line out, or write it in Python",
            ) from error


def _failing_line(error: BaseException, place: str, source: str) -> str:
    if isinstance(error, SyntaxError) and error.filename == place:
        number = error.lineno or 0
    else:
        frames = traceback.extract_tb(error.__traceback__)
        number = next((f.lineno or 0 for f in reversed(frames) if f.filename == place), 0)
    lines = source.splitlines()
    return lines[number - 1].strip() if 0 < number <= len(lines) else ""
