"""Run everything a change has to pass: the linter, the type checker and all tests.

Arguments are handed on to pytest: ``python tests/run_all.py -k wind``.
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

TOP = Path(__file__).resolve().parent.parent
STEPS = (
    ("ruff", "check", "."),
    ("ruff", "format", "--check", "."),
    ("mypy",),
    (
        "pytest", "--nbval", "--cov=calcbook", "--cov-branch", "--cov-report=term:skip-covered",
        "-q", "tests", "workbooks",
    ),
)  # fmt: skip


def main(arguments: list[str]) -> int:
    """Run the steps one after the other; returns the exit status of the first that fails."""
    for step in STEPS:
        command = [sys.executable, "-m", *step]
        if step[0] == "pytest":
            command += arguments
        sys.stdout.write(f"$ python {' '.join(command[1:])}\n")
        sys.stdout.flush()
        done = subprocess.run(command, cwd=TOP, check=False)
        if done.returncode:
            return done.returncode
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
