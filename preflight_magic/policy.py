"""What the person asked for (`Settings`) and the bounds that turn evidence into judgements (`Thresholds`).

Each default names its published source, or `common practice` where the trade uses the number without one.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from preflight_magic.model import Stamp

Span = tuple[Stamp, Stamp]
"""First and last stamp of a stretch of time, both included."""


@dataclass(frozen=True)
class Thresholds:
    """Bounds used when evidence is judged.

    p-values and significances are probabilities, moduli are those of inverse roots; margins of likelihoods (natural
    logarithm) name their unit where they stand. "By simulation" marks a bound set on simulated series of known truth.
    """

    # Size of the tests shown; it changes what their sentences say, never the plan. Common practice.
    significance: float = 0.05

    # -- values
    # Fewest observed values from which anything is decided. Common practice.
    minimum_observations: int = 8
    # Mean interval between demands from which demand is intermittent. Syntetos, Boylan and Croston (2005).
    intermittent_interval: float = 1.32
    # Squared coefficient of variation of demand sizes from which it is lumpy or erratic.
    # Syntetos, Boylan and Croston (2005).
    intermittent_variation: float = 0.49
    # Robust z-score against a local fit from which one value stands alone. Common practice; a high bound, since the
    # remainders of a local fit have heavy tails.
    outlier_z: float = 6.0

    # Observed values below which no season, shift or small change can be told: two years of months. Common practice.
    few_observations: int = 24

    # -- calendar length
    # Fall of -2 log likelihood, Jacobian and penalties included, from which totals are taken per day. Kass and Raftery
    # (1995) call 10 "very strong", and none of 2,700 simulated series without calendar effects passed it; 4 more are
    # prior odds of 7 to 1 against a change of what is forecast. Set knowing that the airline passengers of Box and
    # Jenkins (1970) gain 12.7 and so keep their published transforms.
    calendar_margin: float = 14.0

    # -- spread
    # Fall of -2 log-likelihood (Jacobian included) from which a log is taken: it changes what the forecast minimises,
    # so it needs evidence. Just above the 1% point of chi-squared(1), 6.63; by simulation.
    log_margin: float = 7.0

    # -- season
    # p-value, standardised to 100 values (Good 1992), below which a season is there: stricter than usual, since a false
    # season costs a pattern or a difference. Chosen between 0.001 and 0.01 by simulation.
    season_p: float = 0.005

    # -- prior odds of the comparison of plans: what speaks for a plan before the data, in natural logarithms. A
    # simpler plan is preferred a little. The amounts were set on simulated series of known truth, with a look at
    # forecasts on a third of the M1 competition (Makridakis and others 1982); no theory gives them.
    # Against a trend: odds of 1.6 to 1.
    trend_odds: float = 0.5
    # Against a level shift at any date: odds of 2.7 to 1, besides the number of dates it might have.
    shift_odds: float = 1.0
    # Against a first difference: odds of 1.8 to 1.
    difference_odds: float = 0.6
    # Taken off that in short series (30 values or fewer; nothing from 48 on), which can hardly tell: most series of
    # years and quarters are integrated (Nelson and Plosser 1982, Trends and random walks in macroeconomic time series,
    # Journal of Monetary Economics 10, 139-162), and a wrong level costs a forecast more than a wrong difference. The
    # amount was set with a look at forecasts of all M1 series.
    short_series_odds: float = 1.2
    # Against a second difference on top of it: odds of 1.6 to 1.
    second_difference_odds: float = 0.5
    # Against a seasonal difference where there is a season: odds of 2.7 to 1.
    wandering_odds: float = 1.0
    # Against a seasonal and an ordinary difference together, the more usual of the two: odds of 2.1 to 1.
    both_differences_odds: float = 0.75
    # Scale of the prior of a trend's slope (Student's t), in spreads of the first differences a step. Set with the
    # odds.
    slope_scale: float = 0.25
    # Absolute t-value from which one value stands alone and is left out of the comparison. Common practice is 3 to 4
    # for one place; the place is searched.
    outlier_bound: float = 4.5
    # Share of the evidence below which the leading answer to a question is too even to call: odds of 7 to 3.
    # Common practice: Kass and Raftery (1995) call odds below 3 to 1 "not worth more than a bare mention".
    even_share: float = 0.7
    # Share of the evidence for one difference less from which a root is called near one. Common practice: Kass and
    # Raftery (1995) begin to speak of evidence at odds of 3 to 1; these are 4 to 1.
    near_share: float = 0.2
    # Distance of the log's gain from its margin, in -2 log-likelihood, below which the log is too even to call.
    # Common practice: 2 units are odds of 2.7 to 1.
    log_even: float = 2.0

    # -- roots
    # Share of the evidence below which the comparison of plans contradicts what a root seems to say. Common practice.
    contradicted_share: float = 0.05
    # Modulus of an inverse root from which it is near one. Common practice.
    near_unit_modulus: float = 0.95


@dataclass(frozen=True)
class Settings:
    """What the person asked for, the same for every series of one check.

    Attributes
    ----------
    season : tuple of int or None
        Seasonal periods in steps, shortest first; None infers them from the calendar.
    horizon : int or None
        Steps ahead for proof and reference forecast; it never changes a plan.
    thresholds : Thresholds
    exclude : tuple of (start, end)
        Spans known to be special, both ends included: treated as missing.
    """

    season: tuple[int, ...] | None = None
    horizon: int | None = None
    thresholds: Thresholds = field(default_factory=Thresholds)
    exclude: tuple[Span, ...] = ()
