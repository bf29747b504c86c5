"""Time of the processor that cards take: opening an overview of 2,000 series, and each change of a card.

``python -m tests.bench.bench_cards`` from the root of the project.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import preflight_magic as pf
from preflight_magic.report import Report
from preflight_magic.series_report import SeriesReport

MANY = 2000


class Drawn:
    """Stands for the page: remembers when it was drawn on."""

    def __init__(self) -> None:
        self.times: list[float] = []

    def display(self, bundle: dict[str, Any], raw: bool, display_id: bool = False) -> Drawn:
        self.times.append(time.process_time())
        return self

    def update(self, bundle: dict[str, Any], raw: bool) -> None:
        self.times.append(time.process_time())


def main() -> None:
    """Open, select, switch, change season and span, and print milliseconds to the first picture and to the end."""
    from IPython import display

    page = Drawn()
    display.display = page.display  # type: ignore[assignment]
    from preflight_magic.present.widgets import Controller

    five = list(pf.check(pf.demo.ferry_line().iloc[-120:], progress=False))

    def renamed(one: SeriesReport, name: str) -> SeriesReport:
        return SeriesReport(replace(one._source, name=name), one._settings, one._found)

    report = Report(renamed(five[i % 5], f"berth {i}") for i in range(MANY))

    def told(what: str, action: Callable[[], object]) -> None:
        page.times.clear()
        start = time.process_time()
        action()
        end = time.process_time()
        first = page.times[0] if page.times else end
        print(f"{what:40} {1000 * (first - start):6.0f} {1000 * (end - start):6.0f}")

    made: list[Controller] = []

    def opened() -> None:
        made.append(Controller(report))
        made[0].show()

    print(f"{'milliseconds to':40} {'first':>6} {'end':>6}")
    told(f"open {MANY:,} series", opened)
    shown = made[0]
    assert shown.overview is not None
    controls, choice = shown.card.controls, shown.overview.choice
    told("open another card", lambda: setattr(choice, "value", 1))
    told("back to the first card", lambda: setattr(choice, "value", 0))
    for place in (1, 0, 1):
        told(f"turn {controls.boxes[place].description}", lambda at=place: setattr(
            controls.boxes[at], "value", not controls.boxes[at].value))  # fmt: skip
    controls._more.value = True
    told("another season", lambda: setattr(controls._fields["season"], "value", "1"))
    told("a span left out", lambda: setattr(controls._fields["span"], "value", "2018-03..2018-05"))
    told("back to the recommendation", controls._back.click)
    told("next page", shown.overview.later.click)
    told("find a name", lambda: setattr(shown.overview.find, "value", "19"))


if __name__ == "__main__":
    main()
