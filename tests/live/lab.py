"""A real JupyterLab on a folder, and notebooks opened in it by Chromium."""

from __future__ import annotations

import contextlib
import os
import shutil
import socket
import subprocess
import sys
import time
import urllib.request
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Iterator

CHROMIUM = shutil.which("chromium") or "/usr/bin/chromium"
NO_CHROMIUM = "needs Chromium, which is not here"
IDLE = "text=/\\| Idle/"
PATIENCE = 90_000
NO_NEWS = '{ "fetchNews": "false", "checkForUpdates": false }'
_SETTINGS = (
    "JUPYTER_CONFIG_DIR", "JUPYTERLAB_SETTINGS_DIR", "JUPYTERLAB_WORKSPACES_DIR",
    "JUPYTER_RUNTIME_DIR", "IPYTHONDIR",
)  # fmt: skip


def has_chromium() -> bool:
    """Whether the system's Chromium is here."""
    return Path(CHROMIUM).exists()


@contextlib.contextmanager
def running_lab(folder: Path) -> Iterator[str]:
    """Start JupyterLab on a folder, with settings of its own beside it; yields its address."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        port = probe.getsockname()[1]
    own = folder.parent / "settings"
    quiet = own / "JUPYTERLAB_SETTINGS_DIR" / "@jupyterlab" / "apputils-extension"
    quiet.mkdir(parents=True, exist_ok=True)
    (quiet / "notification.jupyterlab-settings").write_text(NO_NEWS)
    env = os.environ | {kind: str(own / kind) for kind in _SETTINGS}
    server = subprocess.Popen(
        [sys.executable, "-m", "jupyterlab", "--no-browser", "--allow-root",
         "--LabApp.news_url=None", f"--ServerApp.port={port}", "--ServerApp.port_retries=0",
         "--ServerApp.token=", "--ServerApp.password=", f"--ServerApp.root_dir={folder}"],
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
        if server.poll() is not None:
            raise RuntimeError("JupyterLab stopped before it answered")
        try:
            urllib.request.urlopen(f"{address}/api", timeout=5).close()  # noqa: S310  our own
        except OSError:
            time.sleep(0.25)
        else:
            return
    raise RuntimeError("JupyterLab did not answer within a minute")


@contextlib.contextmanager
def chromium() -> Iterator[Any]:
    """Start the system's Chromium; yields the browser."""
    from playwright.sync_api import sync_playwright  # noqa: PLC0415  only where a browser is

    with sync_playwright() as tool:
        browser = tool.chromium.launch(
            executable_path=CHROMIUM, args=["--no-sandbox", "--headless=new", "--disable-gpu"]
        )
        yield browser
        browser.close()


def open_notebook(browser: Any, address: str, notebook: str, width: int = 1000) -> Any:
    """Open a notebook of the lab in a page with a workspace of its own."""
    page = browser.new_page()
    page.set_viewport_size({"width": width, "height": 1100})
    page.goto(f"{address}/lab/workspaces/{Path(notebook).stem}-{width}/tree/{notebook}?reset")
    page.wait_for_selector(IDLE, timeout=PATIENCE)
    return page


def run_all(page: Any, shown: str) -> None:
    """Run all cells and wait until something is shown, in sight or not, and the kernel rests."""
    page.click("li.lm-MenuBar-item >> text=Run")
    page.click("text=Run All Cells")
    page.wait_for_selector(shown, state="attached", timeout=PATIENCE)
    page.wait_for_selector(IDLE, timeout=PATIENCE)
