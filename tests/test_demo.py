"""The ferry line is the same for everybody and is what its docstring says."""

import warnings

import numpy as np
import pandas as pd
import pytest
import statsmodels.api as sm
from statsmodels.tsa.statespace.sarimax import SARIMAX
from statsmodels.tsa.stattools import adfuller

from preflight_magic.demo import NEW_BERTH, UNITS, ferry_line

FRAME = ferry_line()


def unit_root_p(y):
    """p-value of the ADF test with a constant."""
    with warnings.catch_warnings():
        # The library announces another return type.
        warnings.simplefilter("ignore", FutureWarning)
        return adfuller(y, autolag="BIC")[1]


def dummies(n):
    return np.eye(12)[np.arange(n) % 12][:, 1:]


def test_its_shape_and_units():
    assert FRAME.shape == (144, 5)
    assert isinstance(FRAME.index, pd.PeriodIndex)
    assert (FRAME.index.freqstr, str(FRAME.index[0]), str(FRAME.index[-1])) == ("M", "2013-01", "2024-12")
    assert list(FRAME) == list(UNITS) == list(FRAME.attrs["units"])
    assert not FRAME.isna().any().any()
    assert (FRAME > 0).all().all()
    assert FRAME["passengers"].dtype.kind == "i"


def test_the_same_seed_gives_the_same_numbers_and_more_months_continue_them():
    pd.testing.assert_frame_equal(ferry_line(), FRAME)
    pd.testing.assert_frame_equal(ferry_line(months=200)[:144], FRAME)
    assert not ferry_line(seed=1).equals(FRAME)
    assert len(ferry_line(months=0)) == 0


def test_passengers_grow_in_proportion_with_a_season_that_wanders():
    y = FRAME["passengers"].to_numpy(dtype=float)
    years = y.reshape(12, 12)
    assert years[-1].sum() > 2 * years[0].sum()
    # The spread within a year follows its mean, year by year.
    assert np.corrcoef(np.log(years.mean(axis=1)), np.log(years.std(axis=1)))[0, 1] > 0.9
    model = SARIMAX(np.log(y), order=(0, 1, 1), seasonal_order=(0, 1, 1, 12), enforce_invertibility=False)
    found = model.fit(disp=False)
    assert found.params[0] == pytest.approx(-0.4, abs=0.2)
    assert found.params[1] == pytest.approx(-0.3, abs=0.2)
    fixed = model.loglike([found.params[0], -0.9999, found.params[2]])
    assert found.llf - fixed > 10


def test_freight_has_one_step_and_nothing_else():
    y, n = FRAME["freight"].to_numpy(), len(FRAME)
    step = np.asarray(FRAME.index >= pd.Period(NEW_BERTH, "M"), dtype=float)
    found = sm.OLS(y, np.column_stack([np.ones(n), step, np.arange(n)])).fit()
    assert found.tvalues[1] > 10
    assert abs(found.tvalues[2]) < 2
    assert unit_root_p(y - step * found.params[1]) < 0.001


def test_the_fuel_price_is_a_random_walk():
    y = FRAME["fuel_price"].to_numpy()
    assert unit_root_p(y) > 0.3
    moves = np.diff(y)
    assert unit_root_p(moves) < 0.001
    assert abs(moves.mean() / moves.std() * np.sqrt(len(moves))) < 2


def test_crew_overtime_is_stationary_with_a_cycle():
    y = FRAME["crew_overtime"].to_numpy()
    assert unit_root_p(y) < 0.001
    phi = sm.tsa.AutoReg(y, 2).fit().params[1:]
    root = np.roots([1.0, *-phi])[0]
    # Modulus 0.8 and nine months are what the recursion was given.
    assert abs(root) == pytest.approx(0.8, abs=0.1)
    assert 2 * np.pi / abs(np.angle(root)) == pytest.approx(9.0, abs=1.0)


def test_berth_power_has_the_same_pattern_every_year():
    y, n = FRAME["berth_power"].to_numpy(), len(FRAME)
    with_pattern = sm.OLS(y, np.column_stack([np.ones(n), np.arange(n), dummies(n)])).fit()
    assert with_pattern.compare_f_test(sm.OLS(y, np.column_stack([np.ones(n), np.arange(n)])).fit())[1] < 1e-20
    assert abs(with_pattern.tvalues[1]) < 2
    model = SARIMAX(y, order=(0, 0, 0), seasonal_order=(0, 1, 1, 12), trend="c", enforce_invertibility=False)
    # A seasonal moving average at -1 is a fixed pattern.
    assert model.fit(disp=False).params[1] == pytest.approx(-1.0, abs=0.02)
