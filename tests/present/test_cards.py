"""What cards hold."""

from dataclasses import replace

import pandas as pd

from preflight_magic.model import CheckError, Difference, FillGaps, Log, RemoveTrend
from preflight_magic.plan.plan import Plan
from preflight_magic.present import make_cards
from tests.present.fakes import FakeSeries


def test_card_of_a_series() -> None:
    card = make_cards.card(FakeSeries())
    assert card.span == "120 months, 2014-05 to 2024-04, 2 missing"
    assert [mark.text for mark in card.steps] == ["log", "difference 12", "difference 1"]
    assert card.changes == ()
    assert card.yours == ""
    assert [rung.position for rung in card.rungs] == list(range(1, 11))
    assert card.rungs[3].steps == ("log",)
    assert card.rungs[6].tests[1].p == "at most 0.010"
    assert card.picture is not None
    assert card.picture.period == 12
    assert len(card.picture.correlogram_before) == 25
    assert card.roots is not None
    assert ("half-life", "1.45 months") in card.roots.notes
    assert [row.odds for row in card.plans] == ["best", "4.1 to 1", "over 1,000 to 1"]
    assert [row.shown for row in card.plans] == [True, False, False]
    assert card.codes == (), "code is made when it is shown"
    pandas, model = make_cards.with_code(card, FakeSeries()).codes
    assert pandas.source.startswith("import numpy")
    assert "model" in model.title
    assert model.problem is None
    assert card.halves is not None
    assert card.halves.moments[1] == ("variance", 0.0021, 0.0052, 3.4)


def test_roots_of_one_seasonal_polynomial_share_a_row() -> None:
    card = make_cards.card(FakeSeries())
    assert card.rungs[7].measures[:4] == (
        ("AR root", "0.62 ± 0.22, no cycle"),
        ("AR root", "0.8 ± 0.14, a cycle of 5.3 months"),
        ("MA root", "0.41, a cycle of 2 months"),
        ("MA seasonal roots", "0.95 ± 0.04, 7 roots at the seasonal frequencies"),
    )


def test_switched_steps_are_told_from_the_recommendation() -> None:
    view = FakeSeries()
    marks = make_cards.card(view.leave_out(Difference(12))).steps
    assert [(m.text, m.state) for m in marks] == [
        ("log", "kept"),
        ("difference 12", "left out"),
        ("difference 1", "kept"),
    ]
    marks = make_cards.card(view.put_in(Difference(1)).put_in(RemoveTrend())).steps
    assert [(m.text, m.state) for m in marks] == [
        ("log", "kept"),
        ("difference 12", "kept"),
        ("difference 1", "kept"),
        ("difference 1", "put in"),
        ("remove trend", "put in"),
    ]


def test_step_put_in_before_the_others_stands_before_them() -> None:
    view = FakeSeries(plan=Plan((), (Log(), Difference(1))), recommended=Plan((), (Difference(1),)))
    assert [(m.text, m.state) for m in make_cards.card(view).steps] == [("log", "put in"), ("difference 1", "kept")]


def test_changed_findings_say_what_they_were() -> None:
    view = FakeSeries()
    card = make_cards.card(view.leave_out(Log()), view)
    assert card.rungs[3].before == "◆ transform: Take logs"
    assert [rung.position for rung in card.rungs if rung.before] == [4]
    assert ("verdict on spread", "◆ transform: Take logs", "○ clear: Nothing to do") in [
        (one.what, one.before, one.after) for one in card.changes
    ]


def test_what_a_choice_changed() -> None:
    view = FakeSeries()
    card = make_cards.card(view.leave_out(Difference(12)), view, "You left out 2020-03.")
    assert card.yours == "You left out 2020-03."
    told = {one.what: (one.before, one.after) for one in card.changes}
    assert told["plan"] == ("log, difference 12, difference 1", "log, difference 1")
    assert told["odds of the best plan against it"] == ("best", "not compared")
    assert told["correlation left in the residuals, smallest p-value of Ljung-Box"] == ("0.430", "< 0.001")
    assert told["verdict on residuals"] == ("○ clear: Nothing to do", "◐ inconclusive: correlation left")
    before, after = told["lags of the correlogram outside the band"]
    assert before.endswith(" of 24")
    assert int(after.split()[0]) > int(before.split()[0])
    assert make_cards.card(view, view).changes == ()


def test_repairs_are_told() -> None:
    card = make_cards.card(
        FakeSeries(plan=Plan((FillGaps(12),), (Log(),)), recommended=Plan((FillGaps(12),), (Log(),)))
    )
    assert [mark.text for mark in card.repairs] == ["fill gaps 12"]


def test_infeasible_series_has_a_reason_and_no_code() -> None:
    view = FakeSeries(problem="Column 'passengers' is constant.", verdict="infeasible", plan=Plan(), recommended=Plan())
    card = make_cards.card(view)
    assert card.problem == "Column 'passengers' is constant."
    assert make_cards.with_code(card, view).codes == ()
    assert card.rungs == ()
    assert card.picture is not None
    assert card.picture.correlogram_after is None
    empty = replace(view, series=pd.Series([], dtype=float, index=pd.RangeIndex(0)))
    assert make_cards.card(empty).picture is None
    assert make_cards.card(empty).span == "no values"


def test_code_that_cannot_be_proved_is_shown_as_a_fault() -> None:
    view = FakeSeries(failing={"code": RuntimeError("differs at 2020-03")})
    form = make_cards.with_code(make_cards.card(view), view).codes[0]
    assert form.source == ""
    assert form.problem == "The code could not be proved, which is a fault of this program: differs at 2020-03"


def test_a_plan_that_a_form_cannot_hold_says_so() -> None:
    view = FakeSeries(failing={"code": CheckError("no model holds this; use the pandas code.")})
    form = make_cards.with_code(make_cards.card(view), view).codes[1]
    assert form.problem == "No model holds this; use the pandas code."
