"""Where the live tests find their job: a folder of their own, and no job of the machine."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from lab import NO_CHROMIUM, chromium, has_chromium, open_notebook, run_all, running_lab
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


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Let the tests in a browser run last: while Playwright is open the thread has a loop."""
    items.sort(key=lambda item: item.get_closest_marker("browser") is not None)


@pytest.fixture(scope="session")
def browser() -> Iterator[Any]:
    """Yield a Chromium whose pages share what they fetched."""
    if not has_chromium():
        pytest.skip(NO_CHROMIUM)
    pytest.importorskip("playwright.sync_api", reason="needs playwright")
    with chromium() as found:
        yield found.new_context()


@pytest.fixture(scope="session")
def lab_folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Return the folder that the lab shows: in it lie the jobs."""
    folder = tmp_path_factory.mktemp("lab") / "jobs"
    folder.mkdir()
    return folder


@pytest.fixture(scope="session")
def lab_job(lab_folder: Path) -> Job:
    """Return a job from the templates, with number and initials, that a browser works on."""
    folder = lab_folder / "job"
    job = Job.start(folder, ["design-basis", "dead-load-take-off", "wind-pressure",
                             "column-accumulation"], templates())  # fmt: skip
    (folder / "design-basis.toml").write_text(
        'format = 1\nworkbook = "design-basis"\n\n[entries]\n'
        'job_number = { value = "MC-0417" }\nprepared_by = { value = "RA" }\n'
    )
    return job


@pytest.fixture(scope="session")
def lab(lab_folder: Path) -> Iterator[str]:
    """Yield the address of a JupyterLab on that folder."""
    if not has_chromium():
        pytest.skip(NO_CHROMIUM)
    with running_lab(lab_folder) as address:
        yield address


@pytest.fixture(scope="session")
def wind_page(lab: str, lab_job: Job, browser: Any) -> Any:  # noqa: ARG001  the job stands in it
    """Return the wind workbook in a page, with all cells run."""
    page = open_notebook(browser, lab, "job/wind-pressure.ipynb")
    run_all(page, ".cb-view:has-text('Plain stagnation pressure')")
    return page
