"""What is kept in files: a notebook run and converted without a browser, and a saved report."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from tests.browser.lab import Lab

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

pytestmark = [pytest.mark.browser, pytest.mark.slow]


def looks_whole(page: Page) -> None:
    """The card is there, its pictures are drawn, a rung opens, the code can be copied."""
    image = page.locator(".pfm-body img").first
    image.wait_for()
    assert image.evaluate("e => e.complete && e.naturalWidth") == 1065
    assert page.locator("h3.pfm-name").first.inner_text() == "passengers"
    rung = page.locator("details.pfm-rung").first
    rung.locator("summary").first.click()
    assert rung.locator("p").first.is_visible()
    assert page.locator("button.pfm-copy").first.is_visible()


def test_converted_notebook(lab: Lab, browser: Browser, tmp_path: Path, pictures: Path) -> None:
    name = lab.write(["%load_ext preflight_magic", "import preflight_magic as pf\npf.check(pf.demo.ferry_line())"])
    command = [sys.executable, "-m", "nbconvert", "--to", "html", "--execute", str(lab.folder / name)]
    subprocess.run(
        [*command, "--output-dir", str(tmp_path)], check=True, capture_output=True, timeout=300, env=lab.environment
    )
    page = browser.new_page(viewport={"width": 1000, "height": 900})
    page.route("http*://**", lambda route: route.abort())  # nothing needs the network
    page.goto((tmp_path / name).with_suffix(".html").as_uri(), wait_until="domcontentloaded")
    looks_whole(page)
    assert "Error displaying widget" not in page.locator("body").inner_text()
    page.screenshot(path=pictures / "converted.png", full_page=True)
    page.close()


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_saved_report(lab: Lab, browser: Browser, tmp_path: Path, pictures: Path, scheme: str) -> None:
    path = tmp_path / "report.html"
    code = "import sys, preflight_magic as pf; pf.check(pf.demo.ferry_line(), progress=False).save(sys.argv[1])"
    subprocess.run([sys.executable, "-c", code, str(path)], check=True, timeout=300, env=lab.environment)
    context = browser.new_context(viewport={"width": 1000, "height": 900}, color_scheme=scheme)
    page = context.new_page()
    asked: list[str] = []
    page.on("request", lambda request: asked.append(request.url))
    page.goto(path.as_uri())
    looks_whole(page)
    page.locator("table.pfm-overview a", has_text="freight").click()
    assert page.url.endswith("#pfm-series-1")
    assert [url for url in asked if url.startswith("http")] == []
    page.screenshot(path=pictures / f"page-{scheme}.png", full_page=True)
    if scheme == "light":
        page.pdf(path=pictures / "page.pdf")
    context.close()


def test_notebook_of_one_series(lab: Lab, browser: Browser, pictures: Path) -> None:
    cells = ["import preflight_magic as pf\nfreight = pf.demo.ferry_line()['freight']\nfreight.iloc[20:23] = None"]
    with lab.notebook(browser, [*cells, "pf.check(freight, progress=False)"]) as notebook:
        notebook.run(0)
        notebook.run(1)
        output = notebook.output(1)
        output.locator(".pfm-body img").first.wait_for()
        assert output.locator("table.pfm-overview").count() == 0
        assert output.locator(".pfm-selector").count() == 0
        assert "3 missing" in output.inner_text()
        notebook.picture_of(pictures / "one.png")
