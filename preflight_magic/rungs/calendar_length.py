"""Rung 3: do totals follow the number of days?"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Literal, cast

import numpy as np

from preflight_magic.kernels.calendar_length import calendar_gain
from preflight_magic.model import Evidence, Judgement, PerDay, TimeSeries
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.stamps import days_of

_YEAR = {"monthly": 12, "quarterly": 4}
"""Steps a year of the calendars whose steps differ in length."""
_SHORTEST = 3
"""Years of observed values from which days are looked for: a leap year is seldom missing. Common practice."""
_UNITS: tuple[Literal["days", "workdays"], ...] = ("days", "workdays")

METHOD = (
    "A month has 28 to 31 days and 20 to 23 workdays, so totals that follow them show a saw-tooth that no model of the "
    "season needs to learn. The totals, and the totals per day and per workday (Monday to Friday, no holidays), are "
    "each described by a line, lags and a seasonal pattern (none, a smooth one or a free one, in levels or "
    "logarithms), and their likelihoods are compared with the Jacobian of the division. Beside a free pattern only "
    "leap years and the changing number of workdays speak. Values per day are proposed on clear evidence alone; all "
    "later rungs then see the values per day."
)


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Gain of values per day and per workday.

    Parameters
    ----------
    series : TimeSeries
    context : Context

    Returns
    -------
    Evidence
        Measures `per_days` and `per_workdays` (fall of -2 log likelihood, penalties included), `unit` (the better of
        both) and `pattern` (``none``, ``smooth`` or ``free``: the pattern in the better description); `unasked` where
        the question does not arise.
    """
    values = series.values.to_numpy(dtype=np.float64)
    kind = series.calendar.kind if series.calendar else None
    year = _YEAR.get(kind or "")
    if year is None:
        return Evidence({"unasked": "Only monthly and quarterly totals are asked whether they follow their days."})
    noun = "months" if year == 12 else "quarters"
    seen = values[np.isfinite(values)]
    if len(seen) < _SHORTEST * year:
        return Evidence({"unasked": f"With {len(seen)} {noun} nothing is said about days; three years are needed."})
    if not (seen > 0.0).all():
        return Evidence({"unasked": "Not all values are positive, so these are no totals to be divided by days."})
    days, workdays = (days_of(series.values.index, unit) for unit in _UNITS)
    counted = None if days is None or workdays is None else {"days": days, "workdays": workdays}
    gain = None if counted is None else calendar_gain(values, counted, year)
    if gain is None:
        return Evidence({"unasked": "There are too few values beside each other to tell whether they follow days."})
    return Evidence(
        {
            **{f"per_{unit}": value for unit, value in gain.gains.items()},
            "unit": gain.best,
            "pattern": "none" if gain.waves == 0 else "free" if gain.waves == year // 2 else "smooth",
        }
    )


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Values per day where their gain passes the margin."""
    if evidence.problem is not None:
        return Judgement("clear", "not examined", evidence.problem[:1].upper() + evidence.problem[1:])
    found = evidence.measures
    if "unasked" in found:
        return Judgement("clear", "as given", str(found["unasked"]))
    unit = cast("Literal['days', 'workdays']", found["unit"])
    gain, margin = cast(float, found[f"per_{unit}"]), thresholds.calendar_margin
    day = unit[:-1]
    if gain > margin:
        other = next(one for one in _UNITS if one != unit)
        reason = (
            f"Values per {day} lower -2 log likelihood by {gain:.1f}, Jacobian and penalties included; more than "
            f"{margin:g} speaks for them{_beside(found, other)}. All that follows is decided on values per {day}."
        )
        return Judgement("transform", f"the totals follow their {unit}", reason, (PerDay(unit),))
    told = f"{'lower' if gain >= 0.0 else 'raise'} -2 log likelihood by {abs(gain):.1f}"
    told += f", Jacobian and penalties included; a fall of more than {margin:g} would speak for them."
    return Judgement("clear", "the values do not follow their days", f"Values per {day} {told}")


def _beside(found: Mapping[str, object], other: str) -> str:
    return f", and per {other[:-1]} the gain is {found[f'per_{other}']:.1f}"


RUNG = Rung(
    name="calendar length",
    question="Do the values follow the number of days or workdays?",
    after=("values",),
    method=METHOD,
    sources=(
        "Cleveland and Devlin (1982), Calendar effects in monthly time series: modeling and adjustment, Journal of the "
        "American Statistical Association 77, 520-528",
        "Box and Cox (1964), An analysis of transformations, Journal of the Royal Statistical Society B 26, 211-252",
        "Kass and Raftery (1995), Bayes factors, Journal of the American Statistical Association 90, 773-795",
    ),
    examine=examine,
    judge=judge,
)
