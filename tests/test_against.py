"""A report against an earlier one: which plans stand, what moved, since when; and one plan for a group."""

from __future__ import annotations

import math
import pickle

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.against import COLUMNS, PlansChanged, moved

BEFORE, NOW = 60, 90


def table(n: int = NOW) -> pd.DataFrame:
    """Calm: noise all along. Jump: noise whose level rises after 60 months. Walk: a random walk."""
    rng = np.random.default_rng(12)
    noise = rng.standard_normal((NOW, 3))
    index = pd.period_range("2015-01", periods=NOW, freq="M")
    jump = 50 + noise[:, 1] + 9.0 * (np.arange(NOW) >= 70)
    frame = pd.DataFrame({"calm": 20 + noise[:, 0], "jump": jump, "walk": 90 + np.cumsum(noise[:, 2])}, index=index)
    return frame.iloc[:n]


def checked(frame: pd.DataFrame, **options) -> pf.Report:
    return pf.check(frame, season=1, progress=False, **options)


@pytest.fixture(scope="module")
def earlier() -> pf.Report:
    return checked(table(BEFORE))


@pytest.fixture(scope="module")
def now() -> pf.Report:
    return checked(table())


@pytest.fixture(scope="module")
def changes(now, earlier) -> pd.DataFrame:
    return now.against(earlier)


# --------------------------------------------------------------------------------------------------- the table
def test_columns_and_rows(changes):
    assert list(changes.columns) == list(COLUMNS)
    assert changes.index.tolist() == ["calm", "jump", "walk"]
    assert changes.index.name == "series"
    assert changes["status"].tolist() == ["stands", "changed", "stands"]
    assert changes["data"].tolist() == ["longer"] * 3


def test_what_changed_is_told_with_its_date(changes):
    row = changes.loc["jump"]
    assert row["plan_before"] == "as given"
    assert row["plan_now"] == row["plan"] == "remove shift from 2020-11"
    assert row["odds"] > 1000
    assert row["verdict_before"] == "clear"
    assert row["verdict_now"] == "transform"
    # the level rises with the 71st month; it takes one or some months more to be sure
    assert pd.Period("2020-11") <= row["since"] <= pd.Period("2021-10")
    assert row["note"] == (
        f"The odds are over 1,000 to 1 for 'remove shift from 2020-11' against 'as given', since {row['since']}."
    )


def test_the_date_is_where_the_odds_pass_the_bound(changes, earlier):
    since = changes.loc["jump", "since"]
    n = table().index.get_loc(since)
    old = earlier["jump"].plan
    assert checked(table(n + 1))["jump"].odds_against(old) > 20
    assert checked(table(n))["jump"].odds_against(old) <= 20


def test_what_stands_has_no_date_and_its_own_plan(changes, earlier):
    for name in ("calm", "walk"):
        row = changes.loc[name]
        assert row["since"] is None
        assert row["odds"] <= 20
        assert row["plan"] == row["plan_before"] == str(earlier[name].plan)


def test_a_record_and_its_path_say_the_same(now, earlier, changes, tmp_path):
    earlier.save(tmp_path / "a.json")
    for given in (pf.load(tmp_path / "a.json"), tmp_path / "a.json", str(tmp_path / "a.json")):
        pd.testing.assert_frame_equal(now.against(given), changes)


def test_periods_and_dates_are_the_same_months(now, earlier, changes):
    dated = checked(table().to_timestamp())
    found = dated.against(earlier)
    assert found["status"].tolist() == changes["status"].tolist()
    assert found["data"].tolist() == ["longer"] * 3
    assert found.loc["jump", "since"] == changes.loc["jump", "since"].to_timestamp()
    # and the other way about, with a shift whose stamp has to be written anew
    kept = now.keeping(dated)
    assert (kept.changes["status"] == "stands").all()
    assert [one.plan for one in kept] == [one.plan for one in now]


def test_nothing_changes_against_itself(now):
    found = now.against(now)
    assert (found["status"] == "stands").all()
    assert (found["odds"] == 1.0).all()
    assert (found["data"] == "same").all()
    assert found["note"].eq("").all()
    assert moved(found) == ()


def test_new_gone_and_infeasible(now):
    before = checked(table(BEFORE).rename(columns={"calm": "ebb"}).assign(walk="text"))
    after = checked(table().assign(jump="text"))
    found = after.against(before)
    assert found["status"].to_dict() == {"calm": "new", "jump": "infeasible", "walk": "new", "ebb": "gone"}
    assert found.loc["ebb", ["plan", "plan_now", "verdict_now"]].isna().all()
    assert "text" in found.loc["jump", "note"]
    assert moved(found) == ("calm", "jump", "walk", "ebb")
    assert checked(table(), only="calm").against(now)["status"].tolist() == ["stands"]


@pytest.mark.parametrize(
    ("change", "told"),
    [
        (lambda frame: frame.iloc[: BEFORE - 5], "shorter"),
        (lambda frame: frame.iloc[5:], "other span"),
        (lambda frame: frame.add(np.where(np.arange(NOW) == 3, 1e-6, 0.0), axis=0), "revised"),
        (lambda frame: frame.iloc[:BEFORE], "same"),
    ],
)
def test_how_the_data_are_to_those_before(earlier, change, told):
    found = checked(change(table())).against(earlier)
    assert found.loc["calm", "data"] == told
    assert ("revised" in found.loc["calm", "note"]) == (told == "revised")


# ------------------------------------------------------------------------------------------------- plans kept
def test_leaning_is_not_changing(now):
    """A plan that the data only lean away from is kept, and its report says so."""
    one = now["walk"]
    words, log_odds, steps = one.alternatives[1]
    before = pf.Report([one.with_plan(steps, "kept")])
    bound = 2 * math.exp(log_odds)
    found = now.against(before, odds=bound).loc["walk"]
    assert (found["status"], found["plan"], found["plan_now"]) == ("stands", words, str(one.recommended))
    assert found["odds"] == pytest.approx(math.exp(log_odds))
    assert "lean to" in found["note"]
    kept = now.keeping(before, odds=bound)["walk"]
    assert (kept.plan.steps, kept.chosen) == (steps, "kept")
    assert kept.answer.startswith(f"The earlier plan '{words}' is kept")
    assert now.against(before, odds=bound / 4).loc["walk", "status"] == "changed"
    assert now.keeping(before, odds=bound / 4)["walk"].plan == one.recommended


def test_plans_kept_stay_kept_through_a_record(now, tmp_path):
    one = now["walk"]
    before = pf.Report([one.with_plan(one.alternatives[1][2], "kept")])
    kept = now.keeping(before, odds=1e9)
    kept.save(tmp_path / "a.json")
    loaded = pf.load(tmp_path / "a.json")
    assert loaded["walk"].plan == before["walk"].plan
    assert loaded["walk"].answer == kept["walk"].answer
    assert now.against(loaded, odds=1e9).loc["walk", "plan"] == str(before["walk"].plan)
    copy = pickle.loads(pickle.dumps(kept))
    pd.testing.assert_frame_equal(copy.changes, kept.changes)


def test_a_plan_chosen_by_hand_is_never_moved(now):
    mine = now["jump"].leave_out(0).put_in(pf.Power(0.5))
    before = pf.Report([mine, now["calm"]])
    row = now.against(before).loc["jump"]
    assert (row["status"], row["plan"]) == ("stands", "power 0.5")
    assert "a person's choice and stays" in row["note"]
    kept = now.keeping(before)["jump"]
    assert (kept.plan, kept.chosen) == (mine.plan, "person")


def test_a_plan_that_the_data_do_not_allow_any_more_is_given_up():
    frame = np.exp(table() / 40)
    before = checked(frame.iloc[:BEFORE])["walk"].with_plan((pf.Log(), pf.Difference(1)), "person")
    frame.iloc[-1, 2] = -1.0
    after = checked(frame)
    report = after.keeping(pf.Report([before]))
    assert report.changes.loc["walk", "plan"] == str(report["walk"].plan) == str(after["walk"].recommended)


def test_strict_raises_and_names_the_series(now, earlier):
    with pytest.raises(PlansChanged, match=r"1 of 3 series changed: 'jump' changed") as caught:
        now.against(earlier, strict=True)
    assert caught.value.names == ("jump",)
    assert isinstance(caught.value, pf.CheckError)
    assert pickle.loads(pickle.dumps(caught.value)).names == ("jump",)
    assert len(now.against(now, strict=True)) == 3


@pytest.mark.parametrize(
    ("given", "told"), [(3, "earlier is a int"), (None, "NoneType"), (pd.DataFrame(), "earlier is a DataFrame")]
)
def test_what_is_no_report_is_refused(now, given, told):
    with pytest.raises(pf.CheckError, match=told):
        now.against(given)


@pytest.mark.parametrize("odds", [0.5, "20", math.nan])
def test_odds_below_one_are_refused(now, odds):
    with pytest.raises(pf.CheckError, match="odds is"):
        now.against(now, odds=odds)


def test_a_record_without_data_cannot_be_compared(now, tmp_path):
    now.save(tmp_path / "a.json")
    with pytest.raises(pf.CheckError, match=r"'calm' comes from a record.*attach"):
        pf.load(tmp_path / "a.json").against(now)


# ------------------------------------------------------------------------------------------ odds against a plan
def test_odds_of_plans_compared_are_those_told(now):
    for one in now:
        for _, log_odds, steps in one.alternatives:
            assert one.odds_against(pf.Plan((), steps)) == pytest.approx(math.exp(log_odds), rel=1e-9)
        assert one.odds_against(one.recommended) == 1.0


def test_odds_against_a_log_are_those_of_its_margin():
    report = pf.check(pf.demo.ferry_line(months=96)[["passengers", "freight"]], progress=False)
    one = report["passengers"]
    without = one.odds_against(pf.Plan((), one.recommended.steps[1:]))
    gain = one.findings["spread"].measures["log_gain"]
    assert without >= math.exp((gain - 7.0) / 2)  # the margin of the policy
    assert report["freight"].odds_against(pf.Plan((), (pf.Log(), *report["freight"].recommended.steps))) > 1.0


def test_a_shift_that_moves_by_two_months_is_the_same(now):
    at = now["jump"].recommended.steps[0].at
    assert now["jump"].odds_against(pf.Plan((), (pf.RemoveShift(at + 2),))) == 1.0
    assert math.isnan(now["jump"].odds_against(pf.Plan((), (pf.RemoveShift(at + 12),))))


def test_plans_that_are_not_compared_have_no_odds(now):
    assert math.isnan(now["calm"].odds_against(pf.Plan((), (pf.Power(0.5),))))
    assert math.isinf(now["walk"].odds_against(pf.Plan((), (pf.Logit(0.0, 1.0),))))


# ------------------------------------------------------------------------------------------------------- group
def test_one_plan_for_a_group_is_that_of_their_summed_evidence():
    rng = np.random.default_rng(3)
    index = pd.period_range("2015-01", periods=30, freq="M")
    walks = pd.DataFrame(100 + np.cumsum(rng.standard_normal((30, 6)), axis=0), index=index, columns=list("abcdef"))
    report = checked(walks)
    assert len({str(one.plan) for one in report}) > 1
    shared = report.one_plan()
    assert {str(one.plan) for one in shared} == {"difference 1"}
    assert {one.chosen for one in shared} == {"group"}
    odd = next(one for one in shared if one.plan != one.recommended)
    assert odd.answer.startswith("The plan of the group is 'difference 1'")
    some = report.one_plan(["a", "b"])
    assert [one.chosen for one in some][2:] == ["recommended"] * 4
    # and it stays the plan of the group
    again = report.keeping(shared)
    assert {(str(one.plan), one.chosen) for one in again} == {("difference 1", "group")}


def test_a_group_that_cannot_be_one_is_refused(now):
    with pytest.raises(pf.CheckError, match="two or more"):
        now.one_plan(["calm"])
    with pytest.raises(pf.CheckError, match="list of two or more"):
        now.one_plan("calm")
    with pytest.raises(KeyError, match="tides"):
        now.one_plan(["calm", "tides"])
