"""A real JupyterLab in Chromium: run all, type into a field, see the page follow."""

from __future__ import annotations

import os
import shutil
import socket
import subprocess
import sys
import time
import urllib.request
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

from calcbook.job import Job, templates

if TYPE_CHECKING:
    from collections.abc import Iterator

CHROMIUM = shutil.which("chromium") or "/usr/bin/chromium"
pytestmark = [
    pytest.mark.browser,
    pytest.mark.skipif(not Path(CHROMIUM).exists(), reason="needs Chromium, which is not here"),
]
SPEED = "input[title='Basic wind speed'], [title='Basic wind speed'] input"
PRESSURE = ".cb-view:has-text('Velocity pressure at the mean height') .cb-result >> nth=-1"


@pytest.fixture(scope="module")
def job(tmp_path_factory: pytest.TempPathFactory) -> Job:
    """Return a job from the templates, with number and initials in its design basis."""
    folder = tmp_path_factory.mktemp("lab") / "job"
    job = Job.start(folder, ["design-basis", "wind-pressure"], templates())
    (folder / "design-basis.toml").write_text(
        'format = 1\nworkbook = "design-basis"\n\n[entries]\n'
        'job_number = { value = "MC-0417" }\nprepared_by = { value = "RA" }\n'
    )
    return job


@pytest.fixture(scope="module")
def lab(job: Job) -> Iterator[str]:
    """Start JupyterLab on the job, with settings of its own; yields its address."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    own = job.folder.parent / "settings"
    kinds = ("JUPYTER_CONFIG_DIR", "JUPYTERLAB_SETTINGS_DIR", "JUPYTERLAB_WORKSPACES_DIR",
             "JUPYTER_RUNTIME_DIR", "IPYTHONDIR")  # fmt: skip
    env = os.environ | {kind: str(own / kind) for kind in kinds}
    server = subprocess.Popen(
        [sys.executable, "-m", "jupyterlab", "--no-browser", "--allow-root",
         f"--ServerApp.port={port}", "--ServerApp.port_retries=0", "--ServerApp.token=",
         "--ServerApp.password=", f"--ServerApp.root_dir={job.folder}"],
        env=env, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL,
    )  # fmt: skip
    address = f"http://127.0.0.1:{port}"
    try:
        _wait_for(address, server)
        yield address
    finally:
        server.terminate()
        server.wait(timeout=30)


def _wait_for(address: str, server: subprocess.Popen[bytes]) -> None:
    for _ in range(240):
        assert server.poll() is None, "JupyterLab stopped before it answered"
        try:
            urllib.request.urlopen(f"{address}/api", timeout=5).close()  # noqa: S310  our own
        except OSError:
            time.sleep(0.25)
        else:
            return
    pytest.fail("JupyterLab did not answer within a minute")


@pytest.fixture(scope="module")
def page(lab: str) -> Iterator[Any]:
    """Yield the wind workbook in a browser, with all cells run."""
    api = pytest.importorskip("playwright.sync_api", reason="needs playwright")
    with api.sync_playwright() as tool:
        browser = tool.chromium.launch(
            executable_path=CHROMIUM, args=["--no-sandbox", "--headless=new", "--disable-gpu"]
        )
        page = browser.new_page(viewport={"width": 1000, "height": 1100})
        page.goto(f"{lab}/lab/tree/wind-pressure.ipynb?reset")
        page.wait_for_selector("text=/\\| Idle/", timeout=90_000)
        page.click("li.lm-MenuBar-item >> text=Run")
        page.click("text=Run All Cells")
        page.wait_for_selector(".cb-view:has-text('Plain stagnation pressure')", timeout=90_000)
        page.wait_for_selector("text=/\\| Idle/", timeout=90_000)
        yield page
        browser.close()


def typed(page: Any, text: str) -> None:
    """Type into the field of the wind speed and press Enter."""
    field = page.locator(SPEED).first
    field.scroll_into_view_if_needed()
    field.fill(text)
    field.press("Enter")


def pressure(page: Any) -> str:
    """Return the result of the velocity pressure line as it is painted."""
    return str(page.locator(PRESSURE).text_content())


def test_a_value_typed_changes_the_page_and_the_record(page: Any, job: Job) -> None:
    """252 km/h changes no result; 80 m/s changes the line; both are in the record, confirmed."""
    before = pressure(page)
    assert "kPa" in before
    assert page.locator(SPEED).first.input_value() == "70"

    typed(page, "252 km/h")
    page.wait_for_selector(".cb-field:has-text('= 70 m/s')", timeout=15_000)
    assert pressure(page) == before
    assert job.record("wind-pressure").entries["V"].value == "252 km/h"

    typed(page, "80 m/s")
    page.wait_for_function(
        "before => ![...document.querySelectorAll('.cb-view .cb-result')]"
        ".some(e => e.textContent.includes(before.replace('= ', '')))",
        arg=before, timeout=15_000,
    )  # fmt: skip
    assert pressure(page) != before
    entry = job.record("wind-pressure").entries["V"]
    assert (entry.value, entry.confirmed and entry.confirmed.by) == ("80 m/s", "RA")


def test_a_refused_value_says_why_and_changes_nothing(page: Any, job: Job) -> None:
    """1,5 m gives a reason beside the field; the record and the line keep the last good value."""
    typed(page, "80 m/s")
    kept = pressure(page)
    typed(page, "1,5 m")
    told = page.locator(".cb-refused").first
    told.wait_for(timeout=15_000)
    assert "Not taken:" in told.inner_text()
    assert "80 m/s stays in force" in told.inner_text()
    assert page.locator(SPEED).first.input_value() == "1,5 m"
    assert pressure(page) == kept
    assert job.record("wind-pressure").entries["V"].value == "80 m/s"
    typed(page, "80")
    page.wait_for_selector(".cb-refused", state="detached", timeout=15_000)


@pytest.mark.parametrize("width", [1000, 1600])
@pytest.mark.parametrize("theme", ["Dark", "Light"])
def test_the_page_fits_in_both_themes(page: Any, width: int, theme: str) -> None:
    """No section is wider than its cell, and text stands out from the ground it is on."""
    page.set_viewport_size({"width": width, "height": 1100})
    page.click("text=Settings")
    page.hover("text=Theme")
    page.click(f"text=JupyterLab {theme}")
    chosen = f"body[data-jp-theme-name='JupyterLab {theme}']"
    page.wait_for_selector(chosen, state="attached", timeout=15_000)
    page.locator(SPEED).first.scroll_into_view_if_needed()
    wide = page.evaluate(
        "() => [...document.querySelectorAll('.cb-view')]"
        ".filter(v => v.scrollWidth > v.clientWidth + 1).length"
    )
    assert wide == 0
    text, ground = page.evaluate(
        "() => { const view = document.querySelector('.cb-view');"
        " const cell = document.querySelector('.jp-NotebookPanel-notebook');"
        " return [getComputedStyle(view).color, getComputedStyle(cell).backgroundColor]; }"
    )
    light = [sum(map(float, c[c.index("(") + 1 : -1].split(",")[:3])) for c in (text, ground)]
    assert abs(light[0] - light[1]) > 300
