"""Sources of the small functions that generated code leans on; each is written out only where it is needed."""

from __future__ import annotations

FILL_GAPS = '''\
def fill_gaps(x, history, period):
    """Fill gaps on a straight line, after taking out the mean pattern of the history."""
    known = history.reindex(x.index)
    pattern = 0.0
    if history.count() >= 2 * period:
        smooth = known.interpolate(limit_area="inside").rolling(period, center=True).mean()
        if period % 2 == 0:
            smooth = smooth.rolling(2).mean().shift(-1)
        position = np.arange(len(x)) % period
        means = (known - smooth).groupby(position).mean()
        pattern = means.fillna(means.mean()).to_numpy()[position]
    # The history is filled from itself alone; fills stay within the range of the observed values.
    inside = (known - pattern).interpolate(limit_area="inside") + pattern
    x = x.fillna(inside.clip(known.min(), known.max()))
    later = (x - pattern).interpolate(limit_area="inside") + pattern
    return x.fillna(later.clip(x.min(), x.max()))
'''

PERIOD_BOUNDS = '''\
def period_bounds(index):
    """First day of the period of each stamp, and first day after it."""
    stamps = index.to_timestamp() if isinstance(index, pd.PeriodIndex) else index.tz_localize(None)
    first = np.asarray(stamps.year * 12 + stamps.month, dtype="int64") - 1 - 1970 * 12
    months = first[1] - first[0]
    if (stamps.day > 15).all():  # stamps that close their period
        first = first - months + 1
    return [m.astype("datetime64[M]").astype("datetime64[D]") for m in (first, first + months)]
'''

DAYS = '''\
def days(index):
    """Days in the period of each stamp."""
    start, end = period_bounds(index)
    return pd.Series((end - start).astype(float), index=index)
'''

WORKDAYS = '''\
def workdays(index):
    """Days from Monday to Friday in the period of each stamp."""
    return pd.Series(np.busday_count(*period_bounds(index)), index=index)
'''

UNDO_DIFFERENCE = '''\
def undo_difference(x, past, lag):
    """Add to each value the one lag steps before it; past holds the values before x."""
    x = pd.concat([past.iloc[-lag:], x])
    for i in range(lag, len(x)):
        x.iloc[i] += x.iloc[i - lag]
    return x.iloc[lag:]
'''

MEAN_OF = '''\
def mean_of(level, x, variance):
    """Mean of level(x + error) for a normal error of this variance, by the trapezoidal rule."""
    error = np.linspace(-8, 8, 129)
    weight = np.exp(-(error**2) / 2)
    weight = weight / weight.sum()
    return sum(w * level(x + e * np.sqrt(variance)) for e, w in zip(error, weight))
'''

# A negative power sends values beyond its range to infinity; the mean is taken over the others.
MEAN_OF_FINITE = '''\
def mean_of(level, x, variance):
    """Mean of level(x + error) where finite, for a normal error of this variance."""
    error = np.linspace(-8, 8, 129)
    weight = np.exp(-(error**2) / 2)
    values = pd.DataFrame({e: level(x + e * np.sqrt(variance)) for e in error})
    finite = np.isfinite(values)
    return values.where(finite, 0.0) @ weight / (finite.astype(float) @ weight)
'''
