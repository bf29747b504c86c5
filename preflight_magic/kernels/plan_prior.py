"""What the comparison of plans believes before the data."""

from __future__ import annotations

from dataclasses import dataclass

_SHORT, _LONG_ENOUGH = 30, 48
"""Values up to which, and from which on, a series is taken for a short one in the prior of a difference."""


@dataclass(frozen=True)
class PlanPrior:
    """What is believed before the data, and the two margins outside the comparison. Natural logarithms.

    Attributes
    ----------
    log_margin : float
        Fall of -2 log likelihood from which a log is taken.
    season_p : float
        Standardised p-value below which a season is there.
    trend, shift : float
        Log odds against a trend, and against a shift besides the number of its dates.
    difference, second, wandering, both : float
        Log odds against a first difference, a second one on top of it, a seasonal difference alone where there is a
        season, and a seasonal with an ordinary one.
    short : float
        What is taken off the log odds against a first difference in a series of at most 30 values; less in longer
        ones, and nothing from 48 on.
    slope : float
        Scale of the prior of the slope a step, in units of the spread of the first differences.
    outlier_bound : float
        Absolute t-value from which one value stands alone and is left out.
    """

    log_margin: float
    season_p: float
    trend: float
    shift: float
    difference: float
    second: float
    wandering: float
    both: float
    short: float
    slope: float
    outlier_bound: float

    def of_differences(self, d: int, D: int, count: int) -> float:
        """Log odds against d ordinary and D seasonal differences of a series of so many values."""
        if D:
            return self.both if d else self.wandering
        shortness = min(max((_LONG_ENOUGH - count) / (_LONG_ENOUGH - _SHORT), 0.0), 1.0)
        return (self.difference - self.short * shortness) * (d > 0) + self.second * (d > 1)
