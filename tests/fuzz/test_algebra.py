"""Random plans on random series: what is done is undone, and the code does what the plan does."""

from __future__ import annotations

import os

import numpy as np
import pandas as pd
import pytest
from hypothesis import HealthCheck, example, given, settings

import preflight_magic as pf
from preflight_magic.plan.emit import emit
from preflight_magic.plan.prove import prove
from tests.fuzz.plans import Trial, trials

CASES = int(os.environ.get("PREFLIGHT_CASES", "20000"))
QUICK = settings(
    max_examples=20, deadline=None, database=None, derandomize=True, suppress_health_check=list(HealthCheck)
)
LONG = settings(QUICK, max_examples=CASES, derandomize=False, print_blob=True)


def law(trial: Trial) -> None:
    y, plan, h = trial.series(), trial.plan(), trial.horizon
    history = y[:-h]
    forecast = plan.apply(y, history=history)[-h:]
    back = plan.back_transform(forecast, history)
    np.testing.assert_allclose(back.to_numpy(), y[-h:].to_numpy(), rtol=1e-8, atol=0)
    assert back.index.equals(y.index[-h:])
    prove(plan, emit({"cargo": (plan, {})}, {"cargo": y.index}), y, h)


def repaired(trial: Trial) -> None:
    """Rows out of order, repeated or left out are mended before anything is estimated."""
    y, plan = trial.series(), trial.plan()
    messy = y
    if "merge" in trial.repairs:
        messy = pd.concat([messy, messy[3:5]])
    if "sort" in trial.repairs:
        messy = messy.sample(frac=1.0, random_state=trial.seed % 2**32)
    else:
        messy = messy.sort_index(kind="stable")
    if "calendar" in trial.repairs and trial.gaps:
        messy = messy[messy.notna() | (messy.index == y.index[0])]
    expected = plan.apply(y)
    pd.testing.assert_series_equal(plan.apply(messy), expected, check_freq=False, rtol=1e-9, atol=1e-12)


@given(trials())
@QUICK
def test_what_is_done_is_undone_and_the_code_does_it_too(trial):
    law(trial)


@given(trials())
@settings(QUICK, max_examples=15)
def test_repairs_give_the_regular_series(trial):
    repaired(trial)


@pytest.mark.nightly
@given(trials())
@LONG
def test_many_plans(trial):
    law(trial)
    repaired(trial)


# ---------------------------------------------------------------------------------------------- names that want to act
def hostile(path):
    """Names that leave a file behind if any part of them is ever run."""
    act = f"open({str(path)!r}, 'w')"
    return [
        act,
        f"'+str({act})+'",
        f'"+str({act})+"',
        f'"""\n{act}\n"""',
        f"'''\n{act}\n'''",
        f"\\\n{act}",
        f"\\'\n{act}\n#",
        f"x\n{act}\n",
        f"x\r{act}",
        f"x\x0c{act}",
        f"x\u2028{act}\u2029{act}",
        f"x\x85{act}",
        f"{{{act}}}",
        f"# coding: utf-7\n{act}",
        f"__import__('builtins').{act}",
        f"%s' % {act}",
        f"\x00{act}",
        f"): 0}}\n{act}\n{{('",
        f"\u202e{act}",
        (act, f"'\n{act}\n'"),
    ]


def test_hostile_names_run_and_do_nothing_but_their_job(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    harm = tmp_path / "harm"
    names = hostile(harm)
    index = pd.period_range("2010-01", periods=40, freq="M")
    values = 50 + np.cumsum(np.random.default_rng(3).standard_normal((40, 1)), axis=0)
    frame = pd.DataFrame(np.repeat(values, len(names), axis=1), index=index)
    frame.columns = pd.Index(names, tupleize_cols=False)
    report = pf.check(frame, season=1, progress=False)
    for source in (report.code(), *(report[name].code() for name in names)):
        space: dict = {}
        exec(compile(source, "generated.py", "exec"), space)
        prepare, restore = space["PLANS"][names[0]] if "PLANS" in space else (space["prepare"], space["restore"])
        plan = report[names[0]].plan
        y = frame[names[0]]
        pd.testing.assert_series_equal(prepare(y), plan.apply(y), check_names=False, rtol=1e-9)
        back = restore(prepare(y, y[:-4])[-4:], y[:-4])
        np.testing.assert_allclose(back, y[-4:], rtol=1e-8)
    report.save(tmp_path / "code.py")
    exec(compile((tmp_path / "code.py").read_text(encoding="utf-8"), "code.py", "exec"), {})
    report.save(tmp_path / "page.html")
    assert sorted(one.name for one in tmp_path.iterdir()) == ["code.py", "page.html"]


@given(trials())
@settings(QUICK, max_examples=5)
@example(Trial("numbers", 80, 1, 1.0, (pf.Logit(-1.0, 2.0e3),), (), False, 5))
def test_bounds_far_beyond_the_values_do_not_fail_the_proof(trial):
    y = trial.series() * 1e-12
    plan = pf.Plan(trial.plan().repairs, (pf.Logit(-1.0, 2.0), pf.Difference(1)))
    prove(plan, emit({"cargo": (plan, {})}, {"cargo": y.index}), y, 4)
