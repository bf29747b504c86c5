"""What HEGY and Canova-Hansen say of a season, as a finding shows it, each with all that another library needs."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from preflight_magic.kernels.canova_hansen import canova_hansen
from preflight_magic.kernels.least_squares import FloatArray
from preflight_magic.kernels.seasonal_unit_root import hegy
from preflight_magic.kernels.seasonal_unit_root_surfaces import hegy_critical_values
from preflight_magic.model import HypothesisTest

LONGEST_PERIOD = 60
"""Longest period that is tested: the regressions grow with its square, and such periods have few cycles."""
_MOST_CYCLES = 12  # frequencies that are listed one by one


@dataclass(frozen=True)
class SeasonalEvidence:
    """The joint tests, and the p-value of each at every seasonal frequency by the length of its cycle in steps."""

    tests: tuple[HypothesisTest, ...] = ()
    hegy: dict[str, float] = field(default_factory=dict)
    canova_hansen: dict[str, float] = field(default_factory=dict)


def seasonal_evidence(y: FloatArray, period: int, differences: int, series: str) -> SeasonalEvidence:
    """HEGY of a series and Canova-Hansen of the same after its ordinary differences.

    Parameters
    ----------
    y : ndarray, shape (n,)
        No missing values.
    period : int
        At least 2.
    differences : int
        Ordinary differences that leave no unit root at frequency zero, which Canova-Hansen asks for.
    series : str
        What `y` is, for example ``"log"``.

    Returns
    -------
    SeasonalEvidence
        Without the tests that the series cannot carry.
    """
    if period > LONGEST_PERIOD:
        return SeasonalEvidence()
    tests: list[HypothesisTest] = []
    roots = hegy(y, period, "ct", criterion="MAIC")  # the others reject true unit roots more often
    if roots is not None:
        tests.append(
            HypothesisTest(
                test="HEGY",
                null="a unit root at every seasonal frequency",
                statistic=roots.seasonal.statistic,
                p_value=roots.seasonal.p_value,
                p_bound=roots.seasonal.p_bound,
                nobs=roots.nobs,
                lags=roots.lags,
                terms="ct",
                critical_values=hegy_critical_values("seasonal", "ctD", period, y.size, roots.lags),
                options={
                    "series": series,
                    "period": period,
                    "statistic": "joint F of the seasonal frequencies",
                    "seasonal terms": "dummies",
                    "lag choice": "modified AIC",
                },
            )
        )
    changes: FloatArray = np.diff(y, differences)
    stability = canova_hansen(changes, period, "c" if differences else "ct", lagged=True)
    if stability is not None:
        tests.append(
            HypothesisTest(
                test="Canova-Hansen",
                null="a fixed seasonal pattern",
                statistic=stability.statistic,
                p_value=stability.p_value,
                p_bound="exact",
                nobs=stability.nobs,
                lags=stability.bandwidth,
                terms=stability.terms,
                options={
                    "series": series + ("", ", differenced once", ", differenced twice")[differences],
                    "period": period,
                    "statistic": "joint over the seasonal frequencies",
                    "seasonal terms": "waves",
                    "other regressors": "the series one step before",
                    "kernel": "Bartlett",
                    "bandwidth": "Andrews",
                },
            )
        )
    listed = period // 2 <= _MOST_CYCLES
    by_root = {f"{one.cycle:.4g}": one.p_value for one in roots.roots[1:]} if roots and listed else {}
    by_wave = {f"{one.cycle:.4g}": one.p_value for one in stability.frequencies} if stability and listed else {}
    return SeasonalEvidence(tuple(tests), by_root, by_wave)
