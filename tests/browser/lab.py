"""A JupyterLab or Notebook 7 server of one's own and a notebook in a real browser."""

from __future__ import annotations

import json
import os
import shutil
import socket
import subprocess
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from importlib.util import find_spec
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator, Page

Program = Literal["jupyterlab", "notebook"]

ROOT = Path(__file__).resolve().parents[2]
FLAGS = [
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
_READY = """async () => {
  const panel = window.jupyterapp.shell.currentWidget;
  await panel.sessionContext.ready;
  await panel.sessionContext.session.kernel.info;
}"""
_FAULT = """i => {
  const model = window.jupyterapp.shell.currentWidget.content.widgets[i].model;
  if (model.executionCount === null) return 'did not run';
  const faults = model.outputs.toJSON().filter(o => o.output_type === 'error');
  return faults.map(o => o.ename + ': ' + o.evalue + ' ' + o.traceback.join(' ')).join(' ');
}"""
_SETTINGS = {
    "apputils-extension/notification.jupyterlab-settings": {"fetchNews": "false", "checkForUpdates": False},
    "apputils-extension/themes.jupyterlab-settings": {"adaptive-theme": False},
}


def missing() -> str | None:
    """The one command that would make these tests run here, or None where they can."""
    if any(find_spec(name) is None for name in ("playwright", "jupyterlab", "notebook", "axe_playwright_python")):
        return 'pip install "preflight-magic[test]"'
    return None if chromium() else "apt-get install chromium"


def chromium() -> str | None:
    """Path of the browser."""
    return shutil.which("chromium") or shutil.which("chromium-browser")


def free_port() -> int:
    """A port that nobody listens on."""
    with socket.socket() as held:
        held.bind(("127.0.0.1", 0))
        return int(held.getsockname()[1])


@contextmanager
def server(home: Path, program: Program = "jupyterlab") -> Iterator[Lab]:
    """JupyterLab or Notebook 7 with folders of its own under `home`, stopped at the end."""
    notebooks = home / "notebooks"
    notebooks.mkdir()
    environment = dict(os.environ)
    for name in ("CONFIG", "DATA", "RUNTIME"):
        environment[f"JUPYTER_{name}_DIR"] = str(home / name.lower())
    environment["JUPYTERLAB_SETTINGS_DIR"] = str(home / "settings")
    environment["JUPYTERLAB_WORKSPACES_DIR"] = str(home / "workspaces")
    environment["IPYTHONDIR"] = str(home / "ipython")
    environment["PYTHONPATH"] = str(ROOT)
    environment["OPENBLAS_NUM_THREADS"] = "1"
    for name, content in _SETTINGS.items():
        path = home / "settings" / "@jupyterlab" / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(json.dumps(content))
    port = free_port()
    application = "LabApp" if program == "jupyterlab" else "JupyterNotebookApp"
    command = [
        *(sys.executable, "-m", program, "--no-browser", "--allow-root", "--ServerApp.ip=127.0.0.1"),
        *(f"--ServerApp.port={port}", "--ServerApp.port_retries=0", f"--ServerApp.root_dir={notebooks}"),
        *("--IdentityProvider.token=", "--ServerApp.password=", f"--{application}.expose_app_in_browser=True"),
    ]
    with (home / "server.log").open("w") as log:
        process = subprocess.Popen(command, env=environment, cwd=home, stdout=log, stderr=subprocess.STDOUT)
        try:
            _wait_for(f"http://127.0.0.1:{port}/api/status", process, home / "server.log")
            yield Lab(f"http://127.0.0.1:{port}", notebooks, environment, program)
        finally:
            process.terminate()
            try:
                process.wait(20)
            except subprocess.TimeoutExpired:
                process.kill()
                process.wait()


def _wait_for(url: str, process: subprocess.Popen[bytes], log: Path, seconds: float = 60) -> None:
    end = time.monotonic() + seconds
    while time.monotonic() < end:
        if process.poll() is not None:
            break
        try:
            with urllib.request.urlopen(url, timeout=2):
                return
        except (urllib.error.URLError, ConnectionError, TimeoutError):
            time.sleep(0.2)
    raise RuntimeError(f"The server did not start:\n{log.read_text()[-3000:]}")


class Lab:
    """A running server, the folder of its notebooks and the environment it runs in."""

    def __init__(self, url: str, folder: Path, environment: dict[str, str], program: Program) -> None:
        self.url, self.folder, self.environment, self.program = url, folder, environment, program
        self._count = 0

    def write(self, cells: Sequence[str]) -> str:
        """Write a notebook of code cells; its file name."""
        self._count += 1
        name = f"walk{self._count}.ipynb"
        blank = {"cell_type": "code", "metadata": {}, "outputs": [], "execution_count": None}
        made = [blank | {"id": f"cell-{i}", "source": source} for i, source in enumerate(cells)]
        kernel = {"kernelspec": {"name": "python3", "display_name": "Python 3", "language": "python"}}
        content = {"cells": made, "metadata": kernel, "nbformat": 4, "nbformat_minor": 5}
        (self.folder / name).write_text(json.dumps(content))
        return name

    def read(self, name: str) -> dict[str, Any]:
        """A notebook as it was saved."""
        content: dict[str, Any] = json.loads((self.folder / name).read_text())
        return content

    @contextmanager
    def notebook(
        self, browser: Browser, cells: Sequence[str] | str, width: int = 1280, height: int = 1000, dark: bool = False
    ) -> Iterator[Notebook]:
        """Open a notebook in a new page: cells, or the file name of one that was written before."""
        name = cells if isinstance(cells, str) else self.write(cells)
        context = browser.new_context(viewport={"width": width, "height": height})
        context.grant_permissions(["clipboard-read", "clipboard-write"])
        page = context.new_page()
        page.set_default_timeout(90_000)  # of a machine that is busy with other work
        try:
            place = f"lab/tree/{name}?reset" if self.program == "jupyterlab" else f"notebooks/{name}"
            page.goto(f"{self.url}/{place}")
            opened = Notebook(page, name)
            opened.ready(dark)
            yield opened
            page.evaluate("() => window.jupyterapp.shell.currentWidget.sessionContext.shutdown()")
        finally:
            page.close()
            context.close()


class Notebook:
    """An open notebook."""

    def __init__(self, page: Page, name: str) -> None:
        self.page, self.name = page, name

    def ready(self, dark: bool) -> None:
        """Wait until the kernel answers."""
        self.page.wait_for_selector(".jp-NotebookPanel .jp-Cell .cm-content", timeout=60_000)
        self.page.wait_for_function("() => window.jupyterapp?.shell?.currentWidget?.sessionContext", timeout=60_000)
        self.page.evaluate(_READY)
        self.page.evaluate("() => window.jupyterapp.shell.collapseLeft?.()")
        # Always said, since the server remembers what the last page chose.
        self.command("apputils:change-theme", {"theme": f"JupyterLab {'Dark' if dark else 'Light'}"})
        self.page.wait_for_selector(f'body[data-jp-theme-light="{"false" if dark else "true"}"]', state="attached")

    def command(self, name: str, arguments: dict[str, Any] | None = None) -> None:
        """Execute a command of JupyterLab."""
        self.page.evaluate("([n, a]) => window.jupyterapp.commands.execute(n, a)", [name, arguments or {}])

    def run(self, position: int) -> None:
        """Run one cell and wait for its end; an error in it is raised here."""
        self.page.evaluate("i => { window.jupyterapp.shell.currentWidget.content.activeCellIndex = i }", position)
        self.command("notebook:run-cell")
        fault = self.page.evaluate(_FAULT, position)
        if fault:
            raise AssertionError(f"cell {position}: {fault}")

    def cell(self, position: int) -> Locator:
        """A cell of the notebook."""
        return self.page.locator(".jp-NotebookPanel .jp-Notebook-cell").nth(position)

    def output(self, position: int) -> Locator:
        """Output of a cell."""
        return self.cell(position).locator(".jp-Cell-outputArea")

    def picture_of(self, path: Path, everything: bool = True) -> None:
        """Screenshot; `everything` makes the page as high as the notebook first."""
        if everything:
            size = self.page.viewport_size or {"width": 1280, "height": 1000}
            panel = self.page.locator(".jp-WindowedPanel-outer").first
            reach = int(panel.evaluate("e => e.querySelector('.jp-WindowedPanel-viewport').offsetHeight"))
            self.page.set_viewport_size({"width": size["width"], "height": reach + 140})
            panel.evaluate("e => { e.scrollTop = 0 }")
            self.page.wait_for_timeout(300)
            self.page.screenshot(path=path)
            self.page.set_viewport_size(size)
        else:
            self.page.screenshot(path=path)
