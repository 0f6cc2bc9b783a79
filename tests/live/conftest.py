"""Where the live tests find their job: a folder of their own, and no job of the machine."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from lab import chromium, has_chromium, open_notebook, run_all, running_lab
from live_samples import WIND, make_job, opened

from calcbook.job import Job, templates

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

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


@pytest.fixture(scope="session")
def lab_job(tmp_path_factory: pytest.TempPathFactory) -> Job:
    """Return a job from the templates, with number and initials, that a browser works on."""
    if not has_chromium():
        pytest.skip("needs Chromium, which is not here")
    folder = tmp_path_factory.mktemp("lab") / "job"
    job = Job.start(folder, ["design-basis", "dead-load-take-off", "wind-pressure",
                             "column-accumulation"], templates())  # fmt: skip
    (folder / "design-basis.toml").write_text(
        'format = 1\nworkbook = "design-basis"\n\n[entries]\n'
        'job_number = { value = "MC-0417" }\nprepared_by = { value = "RA" }\n'
    )
    return job


@pytest.fixture(scope="session")
def lab(lab_job: Job) -> Iterator[str]:
    """Yield the address of a JupyterLab on that job."""
    with running_lab(lab_job.folder) as address:
        yield address


@pytest.fixture(scope="module")  # while it runs, the thread has an event loop that others see
def browser(lab: str) -> Iterator[Any]:  # noqa: ARG001  the lab stands before the browser
    """Yield a Chromium."""
    pytest.importorskip("playwright.sync_api", reason="needs playwright")
    with chromium() as found:
        yield found


@pytest.fixture(scope="module")
def wind_page(lab: str, browser: Any) -> Any:
    """Return the wind workbook in a page, with all cells run."""
    page = open_notebook(browser, lab, "wind-pressure.ipynb")
    run_all(page, ".cb-view:has-text('Plain stagnation pressure')")
    return page
