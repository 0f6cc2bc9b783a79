"""Pack the job in a folder twice in this process, the second time after one entry changed.

Started by ``pack.py`` in a fresh process; prints seconds by what they were spent on as JSON.
"""

from __future__ import annotations

import json
import sys
import time
from pathlib import Path
from typing import TYPE_CHECKING, Any

START = time.perf_counter()

from calcbook.job import Job  # noqa: E402  importing is measured
from calcbook.pack import package  # noqa: E402
from calcbook.record import EntryRecord  # noqa: E402
from calcbook.run import Runner  # noqa: E402

IMPORTED = time.perf_counter()

if TYPE_CHECKING:
    from collections.abc import Callable

WORKBOOK, ENTRY = "wind-pressure", "V"


class Watch:
    """Adds up the seconds spent inside functions; what one calls of itself counts once."""

    def __init__(self) -> None:
        self.seconds: dict[str, float] = {}
        self._inside: set[str] = set()

    def on(self, owner: Any, name: str, what: str) -> None:
        """Watch a function from now on."""
        setattr(owner, name, self._watched(getattr(owner, name), what))

    def _watched(self, function: Callable[..., Any], what: str) -> Callable[..., Any]:
        def watched(*args: Any, **named: Any) -> Any:
            if what in self._inside:
                return function(*args, **named)
            self._inside.add(what)
            start = time.perf_counter()
            try:
                return function(*args, **named)
            finally:
                self._inside.remove(what)
                spent = time.perf_counter() - start
                self.seconds[what] = self.seconds.get(what, 0.0) + spent

        return watched


def pack(folder: Path, watch: Watch) -> dict[str, float]:
    """Pack a job and return the seconds in all and of each part."""
    watch.seconds = {}
    start = time.perf_counter()
    packed = package.pack_job(Job.load(folder))
    seconds = time.perf_counter() - start
    assert packed.pdf.startswith(b"%PDF")
    return {"all": seconds, **watch.seconds}


def change(folder: Path, value: str) -> None:
    """Type another value for one entry into the job's record."""
    record = Job.load(folder).record(WORKBOOK)
    record.change({ENTRY: EntryRecord(value, "benchmark")})
    record.save()


def main() -> None:
    """Pack from nothing, after the wind speed changed, and with nothing changed."""
    folder = Path(sys.argv[1])
    import typst  # noqa: PLC0415  the first pack imports it in any case

    watch = Watch()
    watch.on(Runner, "run", "running")
    watch.on(package, "draw", "figures")
    watch.on(typst, "compile", "typst")
    seconds = {"imports": IMPORTED - START, "first": pack(folder, watch)}
    change(folder, "65 m/s")
    seconds["again"] = pack(folder, watch)
    seconds["unchanged"] = pack(folder, watch)
    sys.stdout.write(json.dumps(seconds))


if __name__ == "__main__":
    main()
