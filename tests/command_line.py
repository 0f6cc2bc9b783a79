"""Giving commands in this process, and reading what they say."""

from __future__ import annotations

import json
import subprocess
import sys
from typing import TYPE_CHECKING, Any

from notebooks import contents

from calcbook.cli import main
from calcbook.statement import twelve_digits

if TYPE_CHECKING:
    from pathlib import Path

    import pytest


def command(*words: str, **options: object) -> subprocess.CompletedProcess[str]:
    """Give a command in a process of its own."""
    run = [sys.executable, "-m", "calcbook.cli", *words]
    return subprocess.run(run, capture_output=True, text=True, check=False, **options)  # type: ignore[call-overload]


def printed(capsys: pytest.CaptureFixture[str], *words: str, status: int = 0) -> str:
    """Give a command that ends with a status; returns what it prints on standard output."""
    capsys.readouterr()
    found = main(words)
    text = capsys.readouterr()
    assert found == status, text
    return text.out


def results(capsys: pytest.CaptureFixture[str], *words: str, status: int = 0) -> dict[str, Any]:
    """Run a workbook and return its results as plain data."""
    found: dict[str, Any] = json.loads(printed(capsys, "run", *words, "--json", status=status))
    assert found == twelve_digits(found), "JSON results carry twelve significant digits"
    return found


def refused(capsys: pytest.CaptureFixture[str], folder: Path, *words: str) -> str:
    """Give a command that must be refused and change nothing; returns its message."""
    before = contents(folder)
    capsys.readouterr()
    status = main(words)
    text = capsys.readouterr()
    assert status == 2, text
    assert contents(folder) == before
    assert text.err.startswith("calcbook: ")
    assert "unexpectedly" not in text.err
    return text.err


def says(message: str, *parts: str) -> None:
    """Assert that a message has these parts."""
    missing = [part for part in parts if part not in message]
    assert not missing, message
