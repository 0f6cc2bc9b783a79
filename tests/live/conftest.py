"""Where the live tests find their job: a folder of their own, and no job of the machine."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from live_samples import WIND, make_job, opened

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.job import Job
    from calcbook.live import Session


@pytest.fixture(autouse=True)
def _no_job_around(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """Every test starts in an empty folder without a job."""
    monkeypatch.delenv("CALCBOOK_JOB", raising=False)
    monkeypatch.delenv("JPY_SESSION_NAME", raising=False)
    monkeypatch.delenv("VSCODE_PID", raising=False)
    monkeypatch.chdir(tmp_path)


@pytest.fixture
def job(tmp_path: Path) -> Job:
    """Return a signed job with a design basis and a wind workbook."""
    return make_job(tmp_path / "job")


@pytest.fixture
def wind(job: Job) -> Session:
    """Return the wind workbook of the job, opened live with all its sections shown."""
    return opened(WIND, job)
