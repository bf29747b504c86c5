"""What has to hold for every case: nothing but a CheckError leaves the package, and its numbers are numbers."""

from __future__ import annotations

import re
import warnings
from collections.abc import Callable
from html.parser import HTMLParser
from typing import Any

import matplotlib.figure  # noqa: F401  (its own import warns in older releases, which is not what is asked here)
import numpy as np
import pandas as pd

import preflight_magic as pf
from preflight_magic.present.html import page
from preflight_magic.present.widgets import bundle
from tests.fuzz.cases import Case, Foreign

NO_NUMBER = re.compile(r"(?i:\bnan\b|\binf\b|\bnat\b)|<NA>")
LAW = 1e-8
DECIDING = ("calendar length", "spread", "shift and trend", "season", "unit root")
LEVELS = DECIDING[2:]
STEPS = (
    pf.Log(), pf.Difference(1), pf.RemoveTrend(), pf.RemovePattern(4), pf.Power(0.5, 1.0), pf.PerDay(),
    pf.Logit(-1.0, 2.0), pf.Difference(12), pf.Difference(10**6),
)  # fmt: skip


def hold(case: Case, messages: set[str] | None = None) -> str:
    """Check everything about one case; the outcome in a word."""
    frame = case.frame()
    table = frame.frame if isinstance(frame, Foreign) else frame
    before = table.copy(deep=True)
    options = options_of(case)
    said: set[str] = set() if messages is None else messages
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        report = attempt(lambda: pf.check(frame, cache=False, **options), said)
        assert_unchanged(table, before)
        if report is None:
            return "refused"
        for one in report:
            series_holds(one, said)
        # What takes long is asked of a part of the cases; which one hangs on the case alone.
        match case.seed % 6:
            case 0:
                whole_holds(report, said)
            case 1:
                same_again(report, frame, options)
            case 2:
                unit_changes_nothing(report)
            case 3:
                origin_changes_nothing(report)
            case 4:
                switches_hold(report, case, said)
            case _:
                pass
    return "infeasible" if all(one.problem for one in report) else "checked"


def options_of(case: Case) -> dict[str, Any]:
    """Options of the call; those that a form needs are added."""
    options: dict[str, Any] = {"progress": False, **dict(case.options)}
    if case.form == "long":
        options = {"time": "when", "series": "who", "value": "v", **options}
    if case.form == "dates in a column":
        options = {"time": "when", **options}
    if case.index in ("range", "numbers"):
        options.setdefault("season", 12)
    return options


def attempt(run: Callable[[], Any], said: set[str]) -> Any:
    """Result of a call, None where it is refused with a message that is in order."""
    try:
        return run()
    except pf.CheckError as error:
        message_holds(str(error))
        said.add(str(error))
        return None


def message_holds(message: str) -> None:
    """One line, which ends as a sentence does, and has an observation and a next step."""
    assert "\n" not in message, message
    assert "failed inside" not in message, message
    assert message.endswith((".", "?")), message
    assert re.search(r"; |, where .* needed|use |give |must |leave | has .* steps?\b|\?$", message), message
    assert len(message) < 1500, message


def assert_unchanged(table: Any, before: Any) -> None:
    """The table of the caller is as it was."""
    same = pd.testing.assert_series_equal if isinstance(table, pd.Series) else pd.testing.assert_frame_equal
    same(table, before)


def words_hold(text: str) -> None:
    """A sentence without a number that is none."""
    assert not NO_NUMBER.search(text), text
    assert "None" not in text, text


def series_holds(one: Any, said: set[str]) -> None:
    """Findings, code, forecast and law of one series."""
    assert one.verdict in ("clear", "transform", "inconclusive", "infeasible")
    if one.problem is not None:
        message_holds(one.problem)
        said.add(one.problem)
        assert one.verdict == "infeasible"
        attempt(one.code, said)
        return
    findings_hold(one)
    assert "def prepare" in one.code()
    forecast = attempt(lambda: one.reference_forecast(3), said)
    if forecast is not None:
        assert forecast.notna().all(axis=None), forecast
    law_holds(one, said)


def switches_hold(report: Any, case: Case, said: set[str]) -> None:
    """Every series without each of its steps, and with one more."""
    rng = np.random.default_rng(case.seed)
    for one in report:
        others = [attempt(lambda one=one, at=at: one.leave_out(at), said) for at in range(len(one.plan.steps))]
        more = (*STEPS, *(pf.RemoveShift(stamp) for stamp in one.series.index[-2:-1]))
        step = more[int(rng.integers(len(more)))]
        others.append(attempt(lambda one=one, step=step: one.put_in(step), said))
        for other in others:
            if other is not None:
                findings_hold(other)
                attempt(other.code, said)


def told(one: Any) -> tuple[Any, ...]:
    """What a person is told of a series, numbers and all."""
    words = [(finding.verdict, finding.headline, finding.reason) for finding in one.findings.values()]
    return one.verdict, one.plan, one.problem, words, repr([finding.tests for finding in one.findings.values()])


def same_again(report: Any, frame: Any, options: dict[str, Any]) -> None:
    """The same input gives the same report."""
    if not isinstance(options.get("season"), int | tuple | list | None):
        return
    again = pf.check(frame, cache=False, **options)
    assert [told(one) for one in again] == [told(one) for one in report]


def _decisions(one: Any, rungs: tuple[str, ...] = DECIDING) -> list[tuple[str, Any]]:
    return [(one.findings[rung].verdict, one.findings[rung].steps) for rung in rungs if rung in one.findings]


def _moved(one: Any, values: pd.Series) -> Any:
    return next(iter(pf.check(values, season=one.season, cache=False, progress=False)))


def unit_changes_nothing(report: Any) -> None:
    """Another unit, a power of two or not, leaves every decision."""
    for one in report:
        # Changes near the last digit of the values are rounded otherwise in another unit.
        fine = one.problem is None and one.series.abs().max() < min(1e70, 1e6 * one.series.std())
        if fine and one.series.std() > 1e-70:
            base = _moved(one, one.series)
            for factor in (2.0**20, 1e-3):
                other = _moved(one, one.series * factor)
                assert (_decisions(base), base.plan) == (_decisions(other), other.plan), (factor, base.plan, other.plan)


def origin_changes_nothing(report: Any) -> None:
    """Another origin leaves what is decided of shift, trend, season and roots where no log is taken."""
    for one in report:
        y = one.series
        # Where the level is large against the changes, another origin costs digits.
        if one.problem is not None or not 1e-60 < y.std() < 1e60 or y.abs().max() > 1e4 * y.std():
            continue
        base, other = _moved(one, y), _moved(one, y + 3.0 * float(y.std()))
        bent = any(isinstance(step, pf.Log | pf.PerDay) for step in (*base.plan.steps, *other.plan.steps))
        if not bent:
            assert _decisions(base, LEVELS) == _decisions(other, LEVELS), (base.plan, other.plan)


def findings_hold(one: Any) -> None:
    """Every number is one, and every sentence is made of words and numbers."""
    for finding in one.findings.values():
        words_hold(finding.headline)
        words_hold(finding.reason)
        for test in finding.tests:
            assert 0.0 <= test.p_value <= 1.0, test
            assert np.isfinite(test.statistic), test
        for root in finding.measures.get("roots", ()):
            assert np.isfinite(root.modulus), root
    assert np.isfinite(one.transformed.to_numpy()).all()


def law_holds(one: Any, said: set[str]) -> None:
    """What is undone on the held-out values gives them back."""
    y, h = one.series, min(3, len(one.series) // 4)
    history = y.iloc[:-h]
    forecast = attempt(lambda: one.plan.apply(y, history=history), said)
    if forecast is None:
        return
    back = attempt(lambda: one.plan.back_transform(forecast.iloc[-h:], history), said)
    if back is None:
        return
    true = y.iloc[-h:]
    seen = (true.notna() & forecast.iloc[-h:].notna()).cummin()
    apart = np.abs(back - true)[seen]
    assert (apart <= LAW * np.nanmax(np.abs(y.to_numpy()))).all(), (one.plan, apart)


class _Tags(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.found: list[tuple[str, list[tuple[str, str | None]]]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.found.append((tag, attrs))


def whole_holds(report: Any, said: set[str]) -> None:
    """Overview, code and every way to show the report."""
    assert len(report.overview) == len(report)
    assert isinstance(repr(report), str)
    attempt(report.code, said)
    shown = [page(report), *(bundle(one)["text/html"] for one in (report, *report))]
    for text in shown:
        assert "alert(1)<" not in text
    tags = _Tags()
    tags.feed(shown[0])
    assert not [tag for tag, attrs in tags.found if tag == "img" and dict(attrs).get("src") == "x"]
    assert not [value for _, attrs in tags.found for key, value in attrs if key.startswith("on") and "alert" in value]
