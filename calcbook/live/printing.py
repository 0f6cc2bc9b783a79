"""The PDF of a workbook or the pack of its job, made beside the kernel so that typing goes on."""

from __future__ import annotations

import asyncio
import re
import subprocess
import sys
import tempfile
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from calcbook.job import Job

_STEP = re.compile(r"^\s+(\S.*?)\s+[\d.]+ s\s*$")
_PATH = re.compile(r"^(.+\.pdf): (\d+) pages$", re.MULTILINE)
REFUSED = 2


@dataclass
class Printing:
    """One PDF being made, or made.

    Attributes
    ----------
    doing
        What is done just now, in words; '' when it is not running.
    told
        What came of it, in words.
    failed
        Whether there is no PDF.
    """

    doing: str = ""
    told: str = ""
    failed: bool = False
    lines: list[str] = field(default_factory=list)


async def make(
    job: Job, only: str, steps: int, tell: Callable[[Printing], None]
) -> tuple[str, bytes] | None:
    """Make the pack of a job, or the pages of one filling, in a process of its own.

    Parameters
    ----------
    only
        'workbook' or 'workbook:mark'; '' for the whole pack.
    steps
        How many steps the work has, for 'n of m'.
    tell
        Called as it goes on, and at the end.

    Returns
    -------
    The file's name and its bytes, or None where it could not be made: ``Printing`` says why.
    """
    state = Printing(doing="starting")
    tell(state)
    with tempfile.TemporaryFile("w+", encoding="utf-8") as out:
        process = await asyncio.create_subprocess_exec(
            *_words(job, only), stdout=out, stderr=subprocess.PIPE
        )
        assert process.stderr is not None  # noqa: S101  asked for above
        async for raw in process.stderr:
            _note(state, raw.decode("utf-8", "replace"), steps)
            tell(state)
        status = await process.wait()
        out.seek(0)
        text = out.read()
    made = _PATH.search(text)
    state.doing = ""
    if status >= REFUSED or made is None:
        state.failed = True
        state.told = " ".join(line.strip() for line in state.lines) or "it could not be made"
        tell(state)
        return None
    path = Path(made[1])
    state.told = f"{path.name}: {made[2]} pages" + _remarks(text)
    tell(state)
    return path.name, await asyncio.to_thread(path.read_bytes)


def _words(job: Job, only: str) -> Sequence[str]:
    words = [sys.executable, "-m", "calcbook.cli", "pack", str(job.folder)]
    return [*words, "--only", only] if only else words


def _note(state: Printing, line: str, steps: int) -> None:
    """Note a line of the command: a step that is done, or a part of why it stopped."""
    found = _STEP.match(line)
    if found is None:
        state.lines.append(line)
        return
    done = int(state.doing.split(" ", 1)[0]) + 1 if state.doing[:1].isdigit() else 1
    state.doing = f"{done} of {steps}: {found[1]} done"


def _remarks(text: str) -> str:
    """Return what else the command said that the engineer must know."""
    wrong = text.count("NOT SATISFIED")
    moved = text.count(" -> ")
    waiting = sum(line.count(", ") + 1 for line in text.splitlines() if ": unconfirmed: " in line)
    told = [f"{wrong} not satisfied"] if wrong else []
    told += [f"{waiting} not confirmed"] if waiting else []
    told += [f"{moved} carried values had moved and are now taken"] if moved else []
    return f" ({'; '.join(told)})" if told else ""
