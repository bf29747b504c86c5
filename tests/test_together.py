"""Series that are meant to explain another."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pandas as pd
import pytest
from IPython.core.error import UsageError
from IPython.core.interactiveshell import InteractiveShell
from traitlets.config import Config

import preflight_magic as pf
from preflight_magic.magic import check_series
from preflight_magic.model import Finding
from preflight_magic.present import make_overview
from preflight_magic.present.html import overview_html
from preflight_magic.present.text import overview_text

MONTHS = pd.period_range("2012-01", periods=132, freq="M")


def frame(seed: int = 5) -> pd.DataFrame:
    rng = np.random.default_rng(seed)
    walk, other = np.cumsum(rng.normal(size=(2, 132)), axis=1)
    return pd.DataFrame(
        {
            "tickets": 200 + 3 * walk + rng.normal(size=132),
            "visitors": 90 + walk,
            "fuel": 60 + other,
            "rain": 30 + rng.normal(size=132),
        },
        index=MONTHS,
    )


def finding(columns: list[str], target: str = "tickets", **options: object) -> Finding:
    report = pf.check(frame()[columns], season=1, target=target, progress=False, **options)
    assert report.together is not None
    return report.together


def test_no_target_no_finding() -> None:
    assert pf.check(frame()[["tickets", "fuel"]], season=1, progress=False).together is None


def test_tied_series_keep_their_levels() -> None:
    found = finding(["tickets", "visitors"])
    assert found.verdict == "clear"
    assert "cointegrated" in found.headline
    assert "do not difference both" in found.reason
    assert [test.test for test in found.tests] == ["Engle-Granger", "Johansen trace", "Johansen trace"]
    assert found.tests[0].p_value < 0.05
    assert found.measures["relations"] == 1


def test_walks_apart_are_a_spurious_regression() -> None:
    found = finding(["tickets", "fuel"])
    assert found.verdict == "inconclusive"
    assert "spurious" in found.headline
    assert "difference both" in found.reason
    assert found.tests[0].p_value >= 0.05


def test_a_steady_series_does_not_explain_a_wandering_one() -> None:
    found = finding(["tickets", "rain"])
    assert "not of one kind" in found.headline
    assert "'tickets' wanders and 'rain' does not" in found.reason
    turned = finding(["tickets", "rain"], target="rain")
    assert "'tickets' wanders and 'rain' does not" in turned.reason


def test_steady_series_may_be_regressed() -> None:
    two = frame()[["rain"]].assign(wind=frame(6)["rain"])
    found = pf.check(two, season=1, target="rain", progress=False).together
    assert found is not None
    assert found.verdict == "clear"
    assert "ordinary regression" in found.reason
    assert found.tests == ()


def test_known_lags_follow_the_horizon() -> None:
    assert "only lags of 9 months or more of 'fuel' are known" in finding(["tickets", "fuel"], horizon=9).reason
    assert "lags of 1 month or more" in finding(["tickets", "fuel"], horizon=1).reason
    assert finding(["tickets", "fuel"], horizon=9).measures["known_lags"] == "9 months or more"


def test_the_significance_moves_the_sentence_alone() -> None:
    strict, loose = finding(["tickets", "fuel"], significance=1e-6), finding(["tickets", "fuel"], significance=0.999)
    assert strict.tests == loose.tests
    assert "spurious" in strict.headline
    assert "cointegrated" in loose.headline


@pytest.mark.parametrize("call", [pf.check, lambda *a, **k: list(pf.stream(*a, **k))], ids=["check", "stream"])
def test_a_target_that_is_no_series(call) -> None:
    with pytest.raises(pf.CheckError, match="target='boats' is no series of this check, which has 'tickets', 'fuel'"):
        call(frame()[["tickets", "fuel"]], season=1, target="boats", progress=False)
    with pytest.raises(pf.CheckError, match="target='fuel' is no series"):
        call(frame(), season=1, only=["tickets", "rain"], target="fuel", progress=False)
    with pytest.raises(pf.CheckError, match="nothing can explain it"):
        call(frame()[["tickets"]], season=1, target="tickets", progress=False)


def test_series_that_could_not_be_checked() -> None:
    mixed = frame()[["tickets"]].assign(tide="high")
    found = pf.check(mixed, season=1, target="tickets", progress=False).together
    assert found is not None
    assert found.verdict == "infeasible"
    assert "None of the series" in found.reason
    found = pf.check(mixed, season=1, target="tide", progress=False).together
    assert found is not None
    assert found.verdict == "infeasible"
    assert "tide" in found.reason


def test_missing_values_and_other_spans() -> None:
    gaps = frame()[["tickets", "visitors"]]
    gaps.iloc[[10, 40], 0] = np.nan
    gaps.iloc[:30, 1] = np.nan
    found = pf.check(gaps, season=1, target="tickets", progress=False).together
    assert found is not None
    assert found.tests[0].nobs == 102


def test_it_is_shown_in_text_and_html() -> None:
    report = pf.check(frame()[["tickets", "fuel"]], season=1, target="tickets", progress=False)
    card = make_overview.overview(report)
    assert "May the other series explain 'tickets' as they are?" in " ".join(overview_text(card).split())
    assert "spurious regression threatens" in overview_html(card)
    assert list(report.overview.columns)[-1] == "note"


def test_the_magic_takes_a_target(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path))
    config = Config()
    config.HistoryManager.enabled = False
    InteractiveShell.clear_instance()
    shell = InteractiveShell.instance(config=config)
    shell.user_ns["monthly"] = frame()[["tickets", "fuel"]].rename(columns={"fuel": 2020})
    report = check_series(shell, "monthly --season 1 --target 2020 --only tickets,2020")
    assert report.together.question == "May the other series explain 2020 as they are?"
    with pytest.raises(UsageError, match="no series of this check"):
        check_series(shell, "monthly --target boats")
    shell.restore_sys_module_state()
    InteractiveShell.clear_instance()
