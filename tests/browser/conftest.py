"""One server of each kind and one browser for all walks; skipped with what would enable them, except in CI."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from tests.browser.lab import FLAGS, Lab, chromium, missing, server

if TYPE_CHECKING:
    from playwright.sync_api import Browser


@pytest.fixture(scope="session", autouse=True)
def enabled() -> None:
    command = missing()
    if command is None:
        return
    if os.environ.get("CI"):
        pytest.fail(f"These tests must run in CI; enable them with: {command}")
    pytest.skip(f"To enable: {command}")


@pytest.fixture(scope="session")
def lab(enabled: None, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    with server(tmp_path_factory.mktemp("lab")) as running:
        yield running


@pytest.fixture(scope="session")
def notebook_server(enabled: None, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Lab]:
    """Notebook 7, which shows one notebook without the frame of JupyterLab."""
    with server(tmp_path_factory.mktemp("notebook"), "notebook") as running:
        yield running


@pytest.fixture(scope="session")
def browser(enabled: None) -> Iterator[Browser]:
    from playwright.sync_api import sync_playwright

    with sync_playwright() as playwright:
        opened = playwright.chromium.launch(executable_path=chromium(), args=FLAGS)
        yield opened
        opened.close()


@pytest.fixture(scope="session")
def pictures(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Folder for screenshots; kept where PREFLIGHT_PICTURES names one."""
    kept = os.environ.get("PREFLIGHT_PICTURES")
    folder = Path(kept) if kept else tmp_path_factory.mktemp("pictures")
    folder.mkdir(parents=True, exist_ok=True)
    return folder
