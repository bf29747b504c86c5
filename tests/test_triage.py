"""Which series need a person, the most urgent first."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest

import preflight_magic as pf
from preflight_magic.kernels.halves import Moment
from preflight_magic.model import Difference, Finding, HypothesisTest, Log, RemoveShift, RemoveTrend
from preflight_magic.plan.plan import Plan
from preflight_magic.triage import attention
from tests.small_table import BAD, small_table


def made_test(name: str, p: float, terms: str = "ct", bound: str = "exact", series: str = "as given") -> HypothesisTest:
    return HypothesisTest(name, "", 0.0, p, bound, 99, 1, terms, options={"series": series})


def one(name, *, plan=(), verdicts=None, tests=None, problem=None, alternatives=(), measures=None, heads=None):
    verdicts, tests, measures = verdicts or {}, tests or {}, measures or {}
    rungs = ("values", "spread", "shift and trend", "season", "unit root", "roots", "halves", "residuals")
    findings = {
        rung: Finding(
            rung,
            "",
            verdicts.get(rung, "clear"),
            (heads or {}).get(rung, f"head of {rung}"),
            "",
            tuple(tests.get(rung, ())),
            measures.get(rung, {}),
        )
        for rung in rungs
    }
    return SimpleNamespace(
        name=name, plan=Plan((), plan), findings=findings, problem=problem, alternatives=alternatives
    )


class Book(dict):
    @property
    def names(self):
        return tuple(self)


# --------------------------------------------------------------------------------------------------- order and words
def test_most_urgent_first_and_in_the_order_of_the_table():
    reports = [
        one("a"),
        one("b", verdicts={"roots": "inconclusive"}),
        one("c", verdicts={"season": "inconclusive"}),
        one("d", tests={"unit root": [made_test("KPSS", 1e-5)]}),
        one("e", problem="column 'e': text."),
        one("f", plan=(Log(),)),
        one("g", verdicts={"season": "inconclusive"}),
    ]
    earlier = Book(f=one("f"), a=one("a"), x=one("x"))
    found = attention(reports, earlier)
    assert found.index.tolist() == ["e", "f", "c", "g", "d", "b"]
    assert found["why"].tolist() == ["infeasible", "changed", "inconclusive", "inconclusive", "contradicted", "noted"]
    assert found.loc["e", "reason"] == "column 'e': text."
    assert found.loc["f", "reason"] == "It was 'as given' and is 'log'."
    assert found.loc["b", "reason"] == "roots: head of roots."


def test_reasons_are_gathered():
    report = one(
        "a",
        plan=(RemoveTrend(),),
        verdicts={"unit root": "inconclusive", "roots": "inconclusive"},
        alternatives=(("remove trend", 0.0, ()), ("difference 1", np.log(1.4), ())),
    )
    found = attention([report])
    assert found["why"].tolist() == ["inconclusive"]
    assert found.loc["a", "reason"] == (
        "Too even to call: unit root; beside 'remove trend' stands 'difference 1', at odds of 1.4 to 1. "
        "roots: head of roots."
    )


@pytest.mark.parametrize(("doubt", "below"), [("spread", 0.1), ("season", 4.0)])
def test_plan_that_is_far_behind_or_beside_the_question_is_not_told(doubt, below):
    others = (("as given", 0.0, ()), ("difference 1", below, ()))
    found = attention([one("a", verdicts={doubt: "inconclusive"}, alternatives=others)])
    assert found.loc["a", "reason"] == f"Too even to call: {doubt}."


def test_series_that_became_infeasible_is_told_both_ways():
    found = attention([one("a", problem="column 'a': text.")], Book(a=one("a", plan=(Log(),))))
    assert found["why"].tolist() == ["infeasible"]
    assert found.loc["a", "reason"] == "column 'a': text. It was 'log' and is infeasible."


def test_nothing_to_look_at():
    found = attention([one("a"), one("b")])
    assert found.empty
    assert list(found.columns) == ["why", "reason"]


# -------------------------------------------------------------------------------------------------------- many tests
def correlated(name, p):
    boxes = [made_test("Ljung-Box", p, "c"), made_test("Ljung-Box", 0.9, "c")]
    verdict = "inconclusive" if 2 * p < 0.05 else "clear"
    return one(name, tests={"residuals": boxes}, verdicts={"residuals": verdict})


def test_false_alarms_are_held_over_many_series():
    # 100 true null hypotheses: some p-values are small by chance, and none is an alarm.
    p_values = (np.arange(100) + 0.5) / 100
    reports = [correlated(str(i), p) for i, p in enumerate(p_values)]
    assert sum(one.findings["residuals"].verdict == "inconclusive" for one in reports) == 2
    assert attention(reports).empty
    found = attention([*reports, correlated("left", 1e-5)])
    assert found.index.tolist() == ["left"]
    assert found.loc["left", "reason"] == (
        "Correlation is left after the plan and an ARMA model (p < 0.0001; held over 101 series, Benjamini and "
        "Hochberg 1995)."
    )


def test_one_series_alone_is_judged_by_its_own_test():
    assert attention([correlated("a", 0.02)]).loc["a", "reason"].endswith("ARMA model (p 0.0400).")
    assert attention([correlated("a", 0.02)], false_alarms=0.01).empty


def test_portmanteau_with_exact_moments_goes_before_ljung_box():
    tests = [made_test("Ljung-Box", 1e-9, "c"), made_test("portmanteau, exact moments", 0.4, "c")]
    assert attention([one("a", tests={"residuals": tests})]).empty


def test_tests_that_contradict_the_plan():
    kpss, adf = made_test("KPSS", 0.001), made_test("ADF", 0.001)
    both = {"unit root": [kpss, adf, made_test("ADF", 1e-9, series="as given, differenced once")]}
    level, changes = one("level", tests=both), one("changes", tests=both, plan=(Difference(1),))
    found = attention([level, changes])
    assert (
        found.loc["level", "reason"]
        == "KPSS rejects stationarity, and the plan takes no ordinary difference (p 0.0010)."
    )
    assert found.loc["changes", "reason"].startswith(
        "ADF rejects a unit root, and the plan takes an ordinary difference"
    )


def test_a_shift_explains_why_stationarity_is_rejected():
    rejects = {"unit root": [made_test("KPSS", 1e-9)]}
    found = attention([one("jump", plan=(RemoveShift(40),), tests=rejects), one("walk", tests=rejects)])
    assert list(found.index) == ["walk"]


def test_values_that_stand_alone_are_noted():
    stamps = ("2020-03", "2020-05", "2021-01", "2021-02", "2021-03")
    found = attention([one("freight", measures={"values": {"outliers_at": stamps}}), one("fuel")])
    assert list(found.why) == ["noted"]
    assert found.loc["freight", "reason"] == "Values that stand alone: 2020-03, 2020-05, 2021-01 and 2 more."


def test_a_bound_from_below_rejects_nothing():
    tests = {"unit root": [made_test("KPSS", 0.01, bound="at least")]}
    assert attention([one("a", tests=tests)]).empty


def test_halves_and_the_arch_test_are_families_too():
    moments = {"halves": {"moments": (Moment("mean", 1.0, 2.0, 4.5), Moment("variance", 1.0, 1.0, 0.1))}}
    report = one("a", measures=moments, tests={"residuals": [made_test("ARCH-LM", 0.0002, "c")]})
    text = attention([report]).loc["a", "reason"]
    # Two moments are compared: twice P(|Z| > 4.5) = 6.795e-6 (tables of the normal distribution).
    assert (
        text == "The spread of the innovations changes (p 0.0002). The two halves differ after the plan (p < 0.0001)."
    )


def test_rung_of_tests_that_was_not_examined_is_noted():
    heads = {"residuals": "not examined"}
    found = attention([one("a", verdicts={"residuals": "inconclusive"}, heads=heads)])
    assert found.loc["a", "reason"] == "residuals: not examined."


# -------------------------------------------------------------------------------------------------------- a real report
def test_attention_of_a_report():
    report = pf.check(small_table(bad=True), progress=False)
    found = report.attention()
    assert found.index[0] == BAD
    assert found["why"].iloc[0] == "infeasible"
    assert set(found.index) <= set(report.names)
    changed = pf.Report([report["cargo"].put_in(pf.Log()), report["fares"], report["crew"]])
    again = changed.attention(earlier=report)
    assert again.loc["cargo", "why"] == "changed"
    assert f"It was '{report['cargo'].plan}' and is" in again.loc["cargo", "reason"]


@pytest.mark.parametrize("share", [0.0, 1.0, -1, float("nan")])
def test_share_that_is_none(share):
    with pytest.raises(pf.CheckError, match="false_alarms is"):
        attention([], false_alarms=share)
