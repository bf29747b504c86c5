"""A person's walk: check a frame, open a rung, switch a step, copy the code, run it."""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from tests.browser.lab import Lab, Notebook

if TYPE_CHECKING:
    from playwright.sync_api import Browser, Locator

pytestmark = [pytest.mark.browser, pytest.mark.slow]

LOAD = "%load_ext preflight_magic"
CHECK = """%%checkseries --into report
import preflight_magic as pf
monthly = pf.demo.ferry_line()
monthly"""
COMPARE = """import numpy as np
y = monthly["passengers"].astype(float)
plan = report["passengers"].leave_out(pf.Difference(12)).plan
prepared = prepare(y)
same = np.allclose(prepared, plan.apply(y), equal_nan=True) and prepared.notna().sum() == len(y) - 1
past, ahead = y[:-6], prepare(y, history=y[:-6])[-6:]
print("forward", same, "back", np.allclose(restore(ahead, past), y[-6:]), str(plan))"""


_ALL_NEW = "old => [...document.querySelectorAll('.pfm-body img.pfm-picture')].every(image => !old.includes(image.src))"
_ROWS = "n => document.querySelectorAll('table.pfm-overview tbody tr').length === n"
_TOP_ROW = "name => document.querySelector('table.pfm-overview th[scope=row]').innerText === name"


def choose(field: Locator, words: str) -> None:
    """Choose an option by its first words; the widget writes them with spaces that do not break."""
    field.wait_for()
    options = [told.replace("\u00a0", " ") for told in field.locator("option").all_inner_texts()]
    field.select_option(index=next(i for i, told in enumerate(options) if told.startswith(words)))


@pytest.fixture
def opened(lab: Lab, browser: Browser) -> Iterator[Notebook]:
    with lab.notebook(browser, [LOAD, CHECK, "", COMPARE, ""]) as notebook:
        faults: list[str] = []
        notebook.page.on("pageerror", lambda error: faults.append(str(error)))
        notebook.run(0)
        notebook.run(1)
        notebook.output(1).locator(".pfm-body img").first.wait_for()
        yield notebook
        assert faults == []


def test_from_check_to_code_that_gives_the_numbers_of_the_plan(opened: Notebook) -> None:
    page, output = opened.page, opened.output(1)
    assert "5 series" in output.locator(".pfm-summary").inner_text()
    assert output.locator("h3.pfm-name").inner_text() == "passengers"

    rung = output.locator("details.pfm-rung", has_text="season").first
    assert not rung.locator("p").first.is_visible()
    rung.locator("summary").first.click()
    assert rung.locator("p").first.is_visible()

    pictures, code = output.locator(".pfm-body img.pfm-picture"), output.locator("pre.pfm-code").first
    before, source = [pictures.nth(i).get_attribute("src") for i in range(pictures.count())], code.inner_text()
    assert len(before) == 4
    output.locator(".pfm-switch", has_text="difference 12").locator("input").click()
    page.wait_for_function(
        _ALL_NEW,
        arg=before,
    )
    after = [pictures.nth(i).get_attribute("src") for i in range(pictures.count())]
    assert len(after) == len(before)
    assert all(new != old for new, old in zip(after, before, strict=True))
    assert "x.diff(12)" in source
    assert "x.diff(12)" not in code.inner_text()
    assert "(left out)" in output.locator(".pfm-plan").inner_text()
    assert "verdict on residuals" in output.locator(".pfm-changes").inner_text()
    page.wait_for_function("() => document.querySelectorAll('details.pfm-rung[open]').length === 1")

    button = output.locator("button.pfm-copy").first
    button.click()
    page.wait_for_function("() => document.querySelector('button.pfm-copy').textContent === 'Copied'")

    opened.cell(2).locator(".cm-content").click()
    page.keyboard.press("Control+V")
    opened.run(2)
    assert opened.cell(2).locator(".cm-content").inner_text().startswith("import numpy as np")
    opened.run(3)
    told = opened.output(3).inner_text()
    assert told.split() == ["forward", "True", "back", "True", "log,", "difference", "1"]

    output.locator("button.pfm-copy").nth(1).click()
    model = opened.cell(4).locator(".cm-content")
    model.click()
    page.keyboard.press("Control+V")
    assert "SARIMAX" in model.inner_text()
    page.keyboard.press("Control+End")
    page.keyboard.insert_text("\n\nprint(len(forecast(monthly['passengers'].astype(float), steps=12)))")
    opened.run(4)
    assert opened.output(4).inner_text().strip() == "12"


def test_forecasts_from_the_past_on_request(opened: Notebook, pictures: Path) -> None:
    page, output = opened.page, opened.output(1)
    output.locator(".pfm-prove").click()
    output.locator("table.pfm-errors").wait_for()
    assert output.locator("table.pfm-errors tbody th").first.inner_text() == "the plan"
    assert "origins from" in (output.locator("img.pfm-proof").get_attribute("alt") or "")
    output.locator(".pfm-switch input").first.click()
    page.wait_for_function("() => !document.querySelector('table.pfm-errors')")
    output.locator(".pfm-prove").click()
    output.locator(".pfm-changes", has_text="hold-out error").wait_for()
    opened.picture_of(pictures / "proof.png")


def test_back_to_the_recommendation_and_fast_clicks(opened: Notebook) -> None:
    page, output = opened.page, opened.output(1)
    plan, back = output.locator(".pfm-plan"), output.locator("button.pfm-back")
    assert back.is_disabled()
    recommended = plan.inner_text()
    box = output.locator(".pfm-switch input").first
    for _ in range(5):
        box.click()
    page.wait_for_function("() => document.querySelector('.pfm-plan').textContent.includes('log (left out)')")
    page.wait_for_timeout(1500)
    assert "log (left out)" in plan.inner_text()
    assert not box.is_checked()
    back.click()
    page.wait_for_function("old => document.querySelector('.pfm-plan').innerText === old", arg=recommended)
    assert box.is_checked()


def test_keyboard_reaches_every_control(opened: Notebook) -> None:
    page, output = opened.page, opened.output(1)
    output.locator(".pfm-selector select").focus()
    page.keyboard.press("Tab")
    assert page.evaluate("() => document.activeElement.matches('.pfm-switch input')")
    page.keyboard.press("Space")
    page.wait_for_function("() => document.querySelector('.pfm-plan').textContent.includes('(left out)')")
    summary = output.locator("details.pfm-rung > summary").first
    summary.focus()
    page.keyboard.press("Enter")
    assert output.locator("details.pfm-rung").first.locator("p").first.is_visible()


def test_selecting_another_series(opened: Notebook) -> None:
    output = opened.output(1)
    assert output.locator(".pfm-closed:visible").count() == 0, "names are buttons where they can open a card"
    output.locator("button.pfm-open", has_text="freight").click()
    opened.page.wait_for_function("() => document.querySelector('h3.pfm-name').textContent === 'freight'")
    assert output.locator("h3.pfm-name").count() == 1
    assert "shift" in output.locator(".pfm-plan").inner_text()
    choose(output.locator(".pfm-selector select"), "fuel_price")
    opened.page.wait_for_function("() => document.querySelector('h3.pfm-name').textContent === 'fuel_price'")


def test_other_plan_step_season_and_span(opened: Notebook) -> None:
    page, output = opened.page, opened.output(1)
    plan, back = output.locator(".pfm-plan"), output.locator("button.pfm-back")
    recommended = plan.inner_text()

    def until(words: str) -> None:
        page.wait_for_function("w => document.querySelector('.pfm-head').textContent.includes(w)", arg=words)

    output.locator(".pfm-more-changes").click()
    choose(output.locator(".pfm-take select"), "log, difference 12 (")
    until("(left out)")
    choose(output.locator(".pfm-put-in select"), "remove trend: a straight line subtracted")
    until("remove trend (put in)")
    assert output.locator(".pfm-switch", has_text="remove trend").locator("input").is_checked()
    season = output.locator(".pfm-season input")
    season.fill("1")
    season.press("Enter")
    until("You chose the season: none, where the check took 12.")
    span = output.locator(".pfm-span input")
    span.fill("2018-03..2018-05")
    span.press("Enter")
    until("You left out 2018-03 to 2018-05.")
    span.fill("2031-01..2031-02")
    span.press("Enter")
    page.wait_for_function("() => document.querySelector('.pfm-message').textContent.includes('no row lies in it')")
    back.click()
    page.wait_for_function("old => document.querySelector('.pfm-plan').innerText === old", arg=recommended)
    assert season.input_value() == "12"


MANY = """%%checkseries
import numpy as np, pandas as pd
rng = np.random.default_rng(4)
berths = rng.normal(size=(60, 40))
berths[:, 10:20] = berths[:, 10:20].cumsum(axis=0)
berths[:, 39] = 7.0
names = [f"berth {i}" for i in range(40)]
pd.DataFrame(berths, index=pd.period_range("2020-01", periods=60, freq="M"), columns=names)"""


def test_many_series_are_paged_sorted_and_found(lab: Lab, browser: Browser, pictures: Path) -> None:
    with lab.notebook(browser, [LOAD, MANY]) as notebook:
        notebook.run(0)
        notebook.run(1)
        page, output = notebook.page, notebook.output(1)
        output.locator(".pfm-body img").first.wait_for()
        rows, part = output.locator("table.pfm-overview tbody tr"), output.locator(".pfm-many > p").last
        assert rows.count() == 25
        assert "1 to 25 of 40" in part.inner_text()
        notebook.picture_of(pictures / "many.png")
        output.locator(".pfm-later").click()
        page.wait_for_function(_ROWS, arg=15)
        choose(output.locator(".pfm-order select"), "by name")
        page.wait_for_function(_TOP_ROW, arg="berth 0")
        assert rows.nth(2).locator("th").inner_text() == "berth 2"
        choose(output.locator(".pfm-filter select"), "\u25a0 infeasible (1)")
        page.wait_for_function(_ROWS, arg=1)
        assert "one value only" in rows.first.inner_text()
        choose(output.locator(".pfm-filter select"), "every verdict")
        page.wait_for_function(_ROWS, arg=25)
        output.locator(".pfm-find input").fill("berth 17")
        page.wait_for_function(_ROWS, arg=1)
        rows.first.locator("button.pfm-open").click()
        page.wait_for_function("() => document.querySelector('h3.pfm-name').textContent === 'berth 17'")


def test_running_again_leaves_no_widgets_behind(lab: Lab, browser: Browser) -> None:
    count = "from ipywidgets.widgets import widget\nprint(len(widget._instances))"
    with lab.notebook(browser, [LOAD, CHECK, count]) as notebook:
        seen = []
        for _ in range(3):
            for cell in range(3):
                notebook.run(cell)
            seen.append(int(notebook.output(2).inner_text()))
    assert seen[0] > 5
    assert seen == [seen[0]] * 3


def test_saved_notebook_reads_without_a_kernel_and_without_trust(
    lab: Lab, browser: Browser, opened: Notebook, pictures: Path
) -> None:
    box = opened.output(1).locator(".pfm-switch input").nth(1)
    box.click()
    opened.page.wait_for_function("() => !document.querySelector('pre.pfm-code').textContent.includes('diff(12)')")
    opened.command("docmanager:save")
    opened.page.wait_for_timeout(1000)
    content = lab.read(opened.name)
    content["metadata"].pop("widgets", None)
    for cell in content["cells"]:
        # Another hand wrote these outputs, so that their trust does not hold.
        cell["source"] = "".join(cell["source"]) + " "
        cell["execution_count"] = None
    name = "elsewhere.ipynb"
    (lab.folder / name).write_text(json.dumps(content))
    for dark in (False, True):
        with lab.notebook(browser, name, dark=dark) as notebook:
            output = notebook.output(1)
            output.locator("details").first.wait_for()
            told = output.inner_text()
            for part in ("passengers", "(left out)", "Code", "import numpy as np", "limited power"):
                assert part in told
            assert "not found" not in told
            assert "Loading widget" not in told
            assert output.locator("style").count() == 0, "the notebook is not trusted"
            assert output.locator("button:visible").count() == 0, "no dead button is shown"
            notebook.picture_of(pictures / f"untrusted-{'dark' if dark else 'light'}.png")


_CONTRAST = """root => {
  const canvas = document.createElement('canvas');
  canvas.width = canvas.height = 1;
  const pen = canvas.getContext('2d', {willReadFrequently: true});
  const solid = colors => {
    pen.fillStyle = 'white'; pen.fillRect(0, 0, 1, 1);
    for (const color of colors) { pen.fillStyle = color; pen.fillRect(0, 0, 1, 1); }
    return [...pen.getImageData(0, 0, 1, 1).data].slice(0, 3).map(v => v / 255);
  };
  const light = c => {
    const [r, g, b] = c.map(v => v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4);
    return 0.2126 * r + 0.7152 * g + 0.0722 * b;
  };
  const found = [];
  for (const element of root.querySelectorAll('.pfm, .pfm *')) {
    const own = [...element.childNodes].some(n => n.nodeType === 3 && n.textContent.trim());
    if (!own || !element.checkVisibility()) continue;
    const grounds = [];
    for (let e = element; e; e = e.parentElement) grounds.unshift(getComputedStyle(e).backgroundColor);
    const ground = solid(grounds), ink = solid([...grounds, getComputedStyle(element).color]);
    const [high, low] = [light(ground), light(ink)].sort((a, b) => b - a);
    found.push([(high + 0.05) / (low + 0.05), element.className, element.textContent.slice(0, 40)]);
  }
  return found;
}"""


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
@pytest.mark.parametrize("width", [1280, 800])
def test_look(lab: Lab, browser: Browser, pictures: Path, width: int, dark: bool) -> None:
    with lab.notebook(browser, [LOAD, CHECK], width=width, dark=dark) as notebook:
        notebook.run(0)
        notebook.run(1)
        output = notebook.output(1)
        output.locator(".pfm-body img").first.wait_for()
        folder = "dark" if dark else "light"
        notebook.picture_of(pictures / f"closed-{width}-{folder}.png")
        for place in (4, 5):
            output.locator("details.pfm-rung > summary").nth(place).click()
        for summary in output.locator("details.pfm-more > summary").all():
            summary.click()
        output.locator(".pfm-more-changes").click()
        output.locator(".pfm-take select").wait_for()
        notebook.picture_of(pictures / f"open-{width}-{folder}.png")
        contrasts = output.evaluate(_CONTRAST)
        assert len(contrasts) > 60
        assert [found for found in contrasts if found[0] < 4.5] == []
        wide = output.locator(".pfm").evaluate_all("all => all.map(e => [e.scrollWidth, e.clientWidth])")
        assert [pair for pair in wide if pair[0] > pair[1]] == []
        image = output.locator(".pfm-body img").first
        shown = image.evaluate("e => [e.naturalWidth, e.clientWidth, getComputedStyle(e).filter]")
        assert shown[0] == 1065
        assert 500 < shown[1] <= 710
        assert bool(re.search("invert", shown[2])) == dark
