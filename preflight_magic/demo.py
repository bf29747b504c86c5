"""Invented data to try things on: a small island ferry line."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pandas as pd

Floats = npt.NDArray[np.float64]

START = "2013-01"
"""First month of the ferry line."""
NEW_BERTH = "2019-04"
"""First month in which the second berth takes lorries, so that more freight is carried."""
UNITS = {
    "passengers": "persons a month",
    "freight": "tonnes a month",
    "fuel_price": "currency units a litre, mean of the month",
    "crew_overtime": "hours a month",
    "berth_power": "megawatt hours a month",
}


def ferry_line(seed: int = 197, months: int = 144) -> pd.DataFrame:
    """Make up the monthly books of an island ferry line.

    Parameters
    ----------
    seed : int
        The same seed gives the same numbers; more months continue the same series.
    months : int
        Number of months from 2013-01 on.

    Returns
    -------
    pandas.DataFrame, shape (months, 5)
        Indexed by month (periods). The units are in ``attrs["units"]``:

        - ``passengers``, persons a month: grows, and its summer peak grows with it and changes its shape from year
          to year.
        - ``freight``, tonnes a month: steady, but higher since the new berth of 2019-04.
        - ``fuel_price``, currency units a litre: wanders.
        - ``crew_overtime``, hours a month: swings around its mean every nine months or so.
        - ``berth_power``, megawatt hours a month: the same winter peak every year.

    Raises
    ------
    ValueError
        Where `months` is negative.
    """
    month = pd.period_range(START, periods=months, freq="M", name="month")
    # One generator a column, so that neither a longer table nor a further column changes the others.
    noise = [np.random.default_rng([seed, column]).standard_normal(months + 50) for column in range(5)]
    frame = pd.DataFrame(
        {
            "passengers": _passengers(noise[0], months),
            "freight": _freight(noise[1], month),
            "fuel_price": _fuel_price(noise[2], months),
            "crew_overtime": _crew_overtime(noise[3], months),
            "berth_power": _berth_power(noise[4], month),
        },
        index=month,
    )
    frame.attrs["units"] = dict(UNITS)
    return frame


def _passengers(noise: Floats, months: int) -> npt.NDArray[np.int64]:
    """Airline model of Box and Jenkins in the logs, with a peak in July and August."""
    summer = np.array([-0.55, -0.50, -0.25, 0.05, 0.20, 0.45, 0.75, 0.80, 0.25, 0.0, -0.45, -0.35])
    level = 9.2 + 0.008 * np.arange(13) + np.append(summer, summer[0])
    y = np.zeros(months + 13)
    y[:13] = level
    e = 0.03 * noise
    # (1 - B)(1 - B^12) y = (1 - 0.4 B)(1 - 0.3 B^12) e
    for t in range(13, months + 13):
        y[t] = y[t - 1] + y[t - 12] - y[t - 13] + e[t] - 0.4 * e[t - 1] - 0.3 * e[t - 12] + 0.12 * e[t - 13]
    # The year before the first is dropped: it holds the start of the recursion.
    return np.rint(np.exp(y[12 : months + 12])).astype(np.int64)


def _freight(noise: Floats, month: pd.PeriodIndex) -> Floats:
    """Autoregression of order one around a level that rises once."""
    rise = np.where(month >= pd.Period(NEW_BERTH, "M"), 1150.0, 0.0)
    return np.asarray(np.round(4200.0 + rise + 210.0 * _autoregression(noise, (0.35,))[: len(month)], 0))


def _fuel_price(noise: Floats, months: int) -> Floats:
    """Random walk without drift."""
    return np.asarray(np.round(1.1 + 0.025 * np.cumsum(noise[:months]), 3))


def _crew_overtime(noise: Floats, months: int) -> Floats:
    """Autoregression of order two with a damped cycle of nine months, modulus 0.8."""
    cycle = (2 * 0.8 * np.cos(2 * np.pi / 9), -(0.8**2))
    return np.asarray(np.round(340.0 + 28.0 * _autoregression(noise, cycle)[:months], 1))


def _berth_power(noise: Floats, month: pd.PeriodIndex) -> Floats:
    """Fixed pattern, heating and light in winter, and independent noise."""
    winter = np.array([62.0, 55.0, 31.0, 4.0, -22.0, -39.0, -48.0, -45.0, -30.0, -8.0, 16.0, 24.0])
    pattern = winter[month.month.to_numpy() - 1]
    return np.asarray(np.round(230.0 + pattern + 11.0 * noise[: len(month)], 1))


def _autoregression(noise: Floats, coefficients: tuple[float, ...]) -> Floats:
    """Autoregressive series with unit innovations, the first 50 values dropped."""
    y = np.zeros(len(noise))
    for t in range(len(noise)):
        past = sum(phi * y[t - lag] for lag, phi in enumerate(coefficients, 1) if t >= lag)
        y[t] = past + noise[t]
    return y[50:]
