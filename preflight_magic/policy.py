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

    # -- spread
    # Fall of -2 log-likelihood (Jacobian included) from which a log is taken: it changes what the forecast minimises,
    # so it needs evidence. Just above the 1% point of chi-squared(1), 6.63; by simulation.
    log_margin: float = 7.0

    # -- shift and trend
    # Absolute t-value of a level shift at its best date; the date is searched, so the bound is far above the usual 2.
    # By simulation.
    shift_t: float = 5.0
    # Size of the trend test that holds with or without a unit root. Harvey, Leybourne and Taylor (2007).
    trend_significance: float = 0.05

    # -- season
    # p-value below which a season is there. Strict, since a false season costs a difference. By simulation.
    season_p: float = 0.001
    # Log-likelihood by which the leading treatment of the season must lead the other. By simulation.
    pattern_margin: float = 2.0

    # -- all comparisons of plans
    # Log-likelihood below which two plans are too even to call. Common practice: half of the 5% point of
    # chi-squared(1), 3.84, is 1.92.
    tie_margin: float = 2.0

    # -- roots
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
    repair : bool or tuple of str
        Which repairs are allowed: all, none, or those named.
    """

    season: tuple[int, ...] | None = None
    horizon: int | None = None
    thresholds: Thresholds = field(default_factory=Thresholds)
    exclude: tuple[Span, ...] = ()
    repair: bool | tuple[str, ...] = True
