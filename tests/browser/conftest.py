"""A real JupyterLab, offline, driven by a real browser: one server and one browser a run, page and kernel a test.

A page that asks for anything outside this machine, throws an error, or whose kernel reports one, fails its test,
whatever the test itself looks at. Under CI a missing browser fails; elsewhere it skips.
"""

from __future__ import annotations

import json
import os
import secrets
import shutil
import signal
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import nbformat
import pytest
from parts import CELL_ERRORS, RUN_ALL, ready

NEEDED = ("playwright", "jupyterlab", "axe_playwright_python", "anywidget")
collect_ignore_glob = [] if all(map(find_spec, NEEDED)) else ["test_*.py"]

REPOSITORY = Path(__file__).parents[2]
BROWSER = os.environ.get("CHROMIUM") or shutil.which("chromium")
BROWSER_FLAGS = [
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
START_LIMIT = 60.0
STOP_LIMIT = 20.0

LAB_SETTINGS = {
    "@jupyterlab/apputils-extension:notification": {
        "fetchNews": "false",
        "checkForUpdates": False,
        "doNotDisturbMode": True,
    },
    "@jupyterlab/extensionmanager-extension:plugin": {"enabled": False},
    "@jupyterlab/notebook-extension:tracker": {"windowingMode": "none"},  # every cell is in the page
    "@jupyterlab/docmanager-extension:plugin": {"autosave": False},
}
SERVER_SETTINGS = {
    "LabApp": {
        "news_url": None,
        "extension_manager": "readonly",
        "check_for_updates_class": "jupyterlab.handlers.announcements.NeverCheckForUpdate",
        "expose_app_in_browser": True,
    },
    "LanguageServerManager": {"autodetect": False},
    "ServerApp": {"shutdown_no_activity_timeout": 900},  # a server whose run was killed goes away
    "MappingKernelManager": {"cull_idle_timeout": 600, "cull_interval": 60, "cull_connected": True},
}


@dataclass
class Server:
    """A running JupyterLab: its address, its token, and the folder it serves."""

    address: str
    token: str
    folder: Path

    def ask(self, method: str, path: str) -> Any:
        """Return what the server answers."""
        request = urllib.request.Request(
            self.address + path, method=method, headers={"Authorization": f"token {self.token}"}
        )
        with urllib.request.urlopen(request, timeout=10) as answer:
            text = answer.read()
        return json.loads(text) if text else None

    def end_kernels(self) -> None:
        """End every kernel that is running."""
        for session in self.ask("GET", "/api/sessions"):
            self.ask("DELETE", f"/api/sessions/{session['id']}")


def _port_when_ready(process: subprocess.Popen[bytes], info: Path, log: Path) -> int:
    """Return the port the server has taken, once it answers there."""
    end = time.monotonic() + START_LIMIT
    while time.monotonic() < end and process.poll() is None:
        try:
            port = int(json.loads(info.read_text())["port"])
            urllib.request.urlopen(f"http://127.0.0.1:{port}/api", timeout=1).read()
        except (OSError, ValueError, urllib.error.URLError):
            time.sleep(0.05)
        else:
            return port
    message = f"JupyterLab did not start:\n{log.read_text()}"
    raise RuntimeError(message)


@pytest.fixture(scope="session")
def server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Server]:
    """Start a JupyterLab with nothing of this machine's settings in it, and leave nothing of it behind."""
    base = tmp_path_factory.mktemp("lab")
    places = {
        name: base / name for name in ("folder", "config", "data", "runtime", "ipython", "mpl", "work", "settings")
    }
    for place in places.values():
        place.mkdir()
    (places["config"] / "labconfig").mkdir()
    (places["config"] / "labconfig" / "default_setting_overrides.json").write_text(json.dumps(LAB_SETTINGS))
    (places["config"] / "jupyter_server_config.json").write_text(json.dumps(SERVER_SETTINGS))
    token = secrets.token_hex(16)
    environment = os.environ | {
        "JUPYTER_CONFIG_DIR": str(places["config"]),
        "JUPYTER_DATA_DIR": str(places["data"]),
        "JUPYTER_RUNTIME_DIR": str(places["runtime"]),
        "JUPYTERLAB_WORKSPACES_DIR": str(places["work"]),
        "JUPYTERLAB_SETTINGS_DIR": str(places["settings"]),
        "JUPYTER_TOKEN": token,
        "IPYTHONDIR": str(places["ipython"]),
        "MPLCONFIGDIR": str(places["mpl"]),
    }
    command = [
        *(sys.executable, "-m", "jupyterlab", "--no-browser", "--allow-root", "--ServerApp.ip=127.0.0.1"),
        *("--ServerApp.port=0", f"--ServerApp.root_dir={places['folder']}"),
    ]
    log = base / "server.log"
    with log.open("wb") as told:
        process = subprocess.Popen(command, env=environment, stdout=told, stderr=told, start_new_session=True)
    try:
        port = _port_when_ready(process, places["runtime"] / f"jpserver-{process.pid}.json", log)
        yield Server(f"http://127.0.0.1:{port}", token, places["folder"])
    finally:
        process.send_signal(signal.SIGTERM)  # lets it end its kernels first
        try:
            process.wait(STOP_LIMIT)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()


@pytest.fixture(scope="session")
def browser() -> Iterator[Any]:
    """Start a browser with an empty profile."""
    if not BROWSER:
        (pytest.fail if os.environ.get("CI") else pytest.skip)("no chromium here: apt-get install chromium")
    from playwright.sync_api import sync_playwright  # noqa: PLC0415 - a plain test run does without it

    with sync_playwright() as playwright:
        chromium = playwright.chromium.launch(executable_path=BROWSER, headless=True, args=BROWSER_FLAGS)
        yield chromium
        chromium.close()


REPORTS = pytest.StashKey[dict[str, pytest.TestReport]]()


@pytest.hookimpl(wrapper=True)
def pytest_runtest_makereport(item: pytest.Item) -> Iterator[None]:
    """Keep the report, so that a failed test leaves a picture."""
    report = yield
    item.stash.setdefault(REPORTS, {})[report.when] = report
    return report


@pytest.fixture
def page(server: Server, browser: Any, request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[Any]:
    """Open a fresh page, which may ask nothing of the world and throw nothing, nor may its kernel."""
    from playwright.sync_api import expect  # noqa: PLC0415

    context = browser.new_context(viewport={"width": 1280, "height": 1400})
    page = context.new_page()
    page.set_default_timeout(20_000)
    expect.set_options(timeout=15_000)
    outside: list[str] = []
    thrown: list[str] = []
    inside = (server.address, server.address.replace("http", "ws", 1), "data:", "blob:", "about:")
    page.on("request", lambda asked: None if asked.url.startswith(inside) else outside.append(asked.url))
    page.on("pageerror", lambda error: thrown.append(str(error)))
    yield page
    report = request.node.stash.get(REPORTS, {}).get("call")
    if report is not None and report.failed:
        picture = Path(os.environ.get("PICTURES", tmp_path)) / f"{request.node.name}.png"
        page.screenshot(path=picture)
        print("picture of the failed page:", picture)  # noqa: T201
    reported = page.evaluate("() => window.kernelErrors ?? []")
    context.close()
    server.end_kernels()
    assert (outside, thrown, reported) == ([], [], [])


Notebook = Callable[..., Any]


@pytest.fixture
def notebook(server: Server, page: Any, request: pytest.FixtureRequest) -> Notebook:
    """``notebook(*sources)``: writes, opens and runs a notebook of these cells; returns where it stands in the page."""

    def run(*sources: str) -> Any:
        name = f"{request.node.name}.ipynb"
        book = nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(source) for source in sources])
        book.metadata.kernelspec = {"name": "python3", "display_name": "Python 3", "language": "python"}
        nbformat.write(book, server.folder / name)
        page.goto(f"{server.address}/lab/tree/{name}?reset&token={server.token}")
        ready(page)
        finished = page.evaluate(RUN_ALL)  # resolves when the last cell has run
        assert page.evaluate(CELL_ERRORS) == []
        assert finished
        return page.locator(".jp-NotebookPanel:not(.lm-mod-hidden)")

    return run
