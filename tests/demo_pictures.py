"""Pictures of the README: its first cells in JupyterLab, light and dark.

``python -m tests.demo_pictures`` from the root of the project takes them anew; needs Chromium.
"""

from __future__ import annotations

import re
import tempfile
from pathlib import Path

from tests.browser.lab import FLAGS, ROOT, chromium, server

FOLDER = ROOT / "demo_notebooks" / "pictures"
NAME = "ferry.ipynb"
WIDTH, HEIGHT = 1280, 1900


def main() -> None:
    """Run the first cells of the README and take their picture in both themes."""
    from playwright.sync_api import sync_playwright

    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    cells = re.findall(r"^```ipython\n(.*?)\n```$", readme, flags=re.MULTILINE | re.DOTALL)
    with tempfile.TemporaryDirectory() as home, server(Path(home)) as lab, sync_playwright() as playwright:
        (lab.folder / lab.write(cells)).rename(lab.folder / NAME)
        browser = playwright.chromium.launch(executable_path=chromium(), args=FLAGS)
        for theme in ("light", "dark"):
            with lab.notebook(browser, NAME, width=WIDTH, height=HEIGHT, dark=theme == "dark") as notebook:
                notebook.command("notebook:run-all-cells")
                notebook.output(1).locator("img").first.wait_for(timeout=120_000)
                notebook.page.wait_for_timeout(3_000)  # the status of the kernel and the heights of cells settle
                notebook.page.mouse.move(2, 2)
                notebook.page.screenshot(path=FOLDER / f"report_{theme}.png")
        browser.close()


if __name__ == "__main__":
    main()
