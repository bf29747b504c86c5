"""For all people and all names: accessibility by axe-core, names that look like markup, and Notebook 7."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

from tests.browser.lab import Lab

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Page

pytestmark = [pytest.mark.browser, pytest.mark.slow]

HOSTILE = """import preflight_magic as pf
books = pf.demo.ferry_line()
names = ["<script>alert(1)</script>", "a\\"b'c", "line\\nbreak", "\U0001f6a2 ferry", "x" * 200]
hostile = books.set_axis(names, axis=1)
hostile[("north", "<b>3</b>")] = books["freight"]
hostile["closed"] = 1.0
report = pf.check(hostile, progress=False)"""
SHOWN = [
    "<script>alert(1)</script>",
    "a\"b'c",
    "line break",
    "\U0001f6a2 ferry",
    "x" * 39 + "\u2026",
    "north / <b>3</b>",
    "closed",
]


def faults(page: Page, within: str | None = None) -> list[tuple[str, str]]:
    """What axe-core finds of the kinds it calls serious and critical: rule and element."""
    from axe_playwright_python.sync_playwright import Axe

    found: Any = Axe().run(page, context=within).response
    assert len(found["passes"]) > 8, "the rules were run"
    return [
        (one["id"], node["html"][:120])
        for one in found["violations"]
        if one["impact"] in ("serious", "critical")
        for node in one["nodes"]
    ]


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_saved_file_is_accessible_whatever_the_names(
    lab: Lab, browser: Browser, tmp_path: Path, pictures: Path, scheme: Any
) -> None:
    path = tmp_path / "hostile.html"
    code = f"{HOSTILE}\nimport sys; report.save(sys.argv[1])"
    subprocess.run([sys.executable, "-c", code, str(path)], check=True, timeout=300, env=lab.environment)
    context = browser.new_context(viewport={"width": 800, "height": 900}, color_scheme=scheme)
    page = context.new_page()
    ran: list[str] = []
    page.on("dialog", lambda dialog: ran.append(dialog.message))
    page.on("pageerror", lambda error: ran.append(str(error)))
    page.goto(path.as_uri())
    names = page.locator("table.pfm-overview tbody th").all_inner_texts()
    assert sorted(names) == sorted(SHOWN)
    titles = page.locator("section h3.pfm-name").all_inner_texts()
    assert sorted(titles) == sorted([*SHOWN[:4], "x" * 119 + "\u2026", *SHOWN[5:]])
    page.evaluate("() => document.querySelectorAll('details').forEach(d => { d.open = true })")
    assert faults(page) == []
    wide = page.evaluate("() => [document.documentElement.scrollWidth, innerWidth]")
    assert wide[0] <= wide[1]
    assert ran == []
    page.screenshot(path=pictures / f"hostile-{scheme}.png", full_page=True)
    if scheme == "light":
        page.emulate_media(media="print")
        assert page.locator("button.pfm-copy:visible").count() == 0
        assert page.locator("pre.pfm-code").first.evaluate("e => e.scrollHeight - e.clientHeight") <= 2
        page.screenshot(path=pictures / "print.png", full_page=True)
    context.close()


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
def test_live_card_is_accessible_in_notebook_7(
    notebook_server: Lab, browser: Browser, pictures: Path, dark: bool
) -> None:
    with notebook_server.notebook(browser, [HOSTILE, "report"], width=800, dark=dark) as notebook:
        ran: list[str] = []
        notebook.page.on("dialog", lambda dialog: ran.append(dialog.message))
        notebook.page.on("pageerror", lambda error: ran.append(str(error)))
        notebook.run(0)
        notebook.run(1)
        page, output = notebook.page, notebook.output(1)
        output.locator(".pfm-body img").first.wait_for()
        assert output.locator("table.pfm-overview tbody tr").count() == len(SHOWN)
        output.locator("button.pfm-open", has_text="ferry").click()
        page.wait_for_function("() => document.querySelector('h3.pfm-name').textContent.includes('ferry')")
        for name, shown in (("<script>", SHOWN[0]), ("north", SHOWN[5])):
            output.locator("button.pfm-open", has_text=name).click()
            page.wait_for_function("n => document.querySelector('h3.pfm-name').textContent === n", arg=shown)
        output.locator(".pfm-more-changes").click()
        output.locator(".pfm-take select").wait_for()
        output.locator(".pfm-switch input").first.click()
        output.locator(".pfm-changes").wait_for()
        for summary in output.locator("details:not(.pfm-how) > summary:visible").all():
            summary.click()
        assert faults(page, ".jp-OutputArea:has(.pfm)") == []
        wide = output.locator(".pfm").evaluate_all("all => all.map(e => [e.scrollWidth, e.clientWidth])")
        assert [pair for pair in wide if pair[0] > pair[1]] == []
        assert ran == []
        notebook.picture_of(pictures / f"notebook7-{'dark' if dark else 'light'}.png")
