"""Estimates and likelihoods against recorded ones of R's arima and of statsmodels, both exact maximum likelihood.

The records name the versions; the series and their sources stand in tests/references/arma_series.csv.
"""

from dataclasses import dataclass

import numpy as np
import pytest

from preflight_magic.kernels.arma import ArmaFit, fit
from preflight_magic.kernels.arma_likelihood import evaluate, prepare
from preflight_magic.kernels.arma_parameters import Order
from tests.references.records import rows

EXACT = 1e-4
NAMES = ("ar", "ma", "sar", "sma")


@dataclass(frozen=True)
class Recorded:
    series: str
    order: Order
    differences: tuple[int, int]
    mean: bool
    quantities: dict[str, float]

    def __str__(self) -> str:
        return f"{self.series} {self.order}"

    @property
    def coefficients(self) -> list[float]:
        counts = (self.order.p, self.order.q, self.order.P, self.order.Q)
        return [self.quantities[name] for name in self.named(counts)]

    @property
    def errors(self) -> list[float]:
        counts = (self.order.p, self.order.q, self.order.P, self.order.Q)
        return [self.quantities[f"s.e. {name}"] for name in self.named(counts)]

    @staticmethod
    def named(counts: tuple[int, ...]) -> list[str]:
        return [f"{name}{k}" for name, count in zip(NAMES, counts, strict=True) for k in range(1, count + 1)]


def recorded(record: str) -> list[Recorded]:
    found: dict[tuple[object, ...], Recorded] = {}
    for row in rows(record):
        p, d, q, P, D, Q, period = (int(row[key]) for key in ("p", "d", "q", "P", "D", "Q", "period"))
        one = Recorded(row["series"], Order(p, q, P, Q, period), (d, D), row["mean"] == "1", {})
        key = (one.series, one.order, one.differences)
        found.setdefault(key, one).quantities[row["quantity"]] = float(row["value"])
    return list(found.values())


R, STATSMODELS = recorded("arma_r"), recorded("arma_statsmodels")


def sample_of(one: Recorded) -> tuple[np.ndarray, np.ndarray | None]:
    """The series as the model wants it, and the columns of its missing values."""
    name = one.series.removesuffix(" differenced")
    values = np.array([float(row["value"] or "nan") for row in rows("arma_series") if row["series"] == name])
    if one.differences == (1, 1) or name != one.series:
        values = np.diff(values[12:] - values[:-12])
    missing = np.flatnonzero(np.isnan(values))
    columns = np.eye(len(values))[:, missing] if missing.size else None
    return np.where(np.isnan(values), 0.0, values), columns


def fitted(one: Recorded) -> ArmaFit:
    values, columns = sample_of(one)
    found = fit(values, one.order, mean=one.mean, nuisance=columns)
    assert found is not None
    return found


def test_the_series_that_a_referee_must_see_are_all_there() -> None:
    for record in (R, STATSMODELS):
        seen = {one.series.removesuffix(" differenced") for one in record}
        assert seen == {"lh", "LakeHuron", "USAccDeaths", "presidents"}
    presidents = next(one for one in R if one.series == "presidents")
    columns = sample_of(presidents)[1]
    assert columns is not None
    assert columns.shape == (120, 6)  # the help page of the data set: six quarters missing


@pytest.mark.parametrize("one", [*R, *STATSMODELS], ids=str)
def test_estimates_and_likelihood(one: Recorded) -> None:
    found = fitted(one)
    # R starts the differences with a variance of 1e6 times that of the innovations instead of a diffuse law: that alone
    # moves its likelihood by 1e-3 from what it says itself of the series differenced before.
    bound = EXACT if one.differences == (0, 0) else 15.0 * EXACT
    np.testing.assert_allclose(found.coefficients, one.coefficients, atol=EXACT)
    assert found.log_likelihood == pytest.approx(one.quantities["log likelihood"], abs=bound)
    assert found.variance == pytest.approx(one.quantities["variance"], rel=EXACT)
    if one.mean:
        assert found.mean == pytest.approx(one.quantities["intercept"], abs=EXACT)


@pytest.mark.parametrize("one", R, ids=str)
def test_likelihood_away_from_the_maximum(one: Recorded) -> None:
    (quantity,) = (name for name in one.quantities if name.startswith("log likelihood at "))
    values, columns = sample_of(one)
    sample = prepare(values, mean=one.mean, nuisance=columns)
    assert sample is not None
    there = np.array([float(number) for number in quantity.removeprefix("log likelihood at ").split()])
    value = evaluate(sample, one.order, there)[0] - sample.count * np.log(sample.scale)
    bound = EXACT if one.differences == (0, 0) else 15.0 * EXACT
    assert value == pytest.approx(one.quantities[quantity], abs=bound)


@pytest.mark.parametrize("one", R, ids=str)
def test_standard_errors(one: Recorded) -> None:
    # R takes second differences of the likelihood with all parameters free, we those of the profile with a finer step.
    found = fitted(one)
    np.testing.assert_allclose(np.sqrt(found.covariance.diagonal()), one.errors, rtol=0.02)
    if one.mean:
        assert found.mean_error == pytest.approx(one.quantities["s.e. intercept"], rel=0.02)
