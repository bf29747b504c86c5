"""What is said of series that are meant to explain another."""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from typing import TYPE_CHECKING

from preflight_magic.model import Verdict
from preflight_magic.stamps import counted

if TYPE_CHECKING:
    from preflight_magic.kernels.cointegration import Johansen
    from preflight_magic.together import Pair


def told(
    target: Hashable, pairs: Sequence[Pair], relations: Johansen | None, significance: float, horizon: int, noun: str
) -> tuple[Verdict, str, str]:
    """Verdict, headline and reason.

    Parameters
    ----------
    target : Hashable
    pairs : sequence of Pair
    relations : Johansen or None
    significance : float
    horizon : int
        Steps ahead.
    noun : str
        A step of the calendar.
    """
    tied = [one for one in pairs if one.test is not None and one.test.p_value < significance]
    spurious = [one for one in pairs if one.wanders and one.target_wanders and one not in tied]
    unlike = [one for one in pairs if one.wanders != one.target_wanders]
    trends = [one for one in pairs if one.trends]
    # Where both wander and are not tied, or only one does, a regression of levels misleads.
    parts = [_spurious(target, one) for one in spurious] + [_tied(target, one) for one in tied]
    if relations is not None and (tied or spurious):
        parts.append(_relations(relations))
    parts += [_unlike(target, one) for one in unlike]
    if trends:
        parts.append(f"{_names(trends)} and {target!r} both follow a line: give the regression a trend of its own.")
    if not parts:
        parts.append(f"Neither {target!r} nor the others wander: an ordinary regression with ARMA errors may be used.")
    parts.append(_known(pairs, horizon, noun))
    if spurious:
        head = f"spurious regression threatens with {_names(spurious)}"
    elif unlike:
        head = f"{_names(unlike)} and {target!r} are not of one kind"
    elif tied:
        head = f"{_names(tied)} and {target!r} are cointegrated"
    else:
        head = "levels may be regressed"
    verdict: Verdict = "inconclusive" if spurious or unlike else "clear"
    return verdict, head, " ".join(parts)


def _spurious(target: Hashable, one: Pair) -> str:
    fit = f"a regression of levels has R squared {one.r_squared:.2f}"
    if one.r_squared > one.durbin_watson:
        fit += f", above its Durbin-Watson statistic of {one.durbin_watson:.2f}, the mark of a spurious one"
    p = "no test could be computed" if one.test is None else _p(one.test.p_value)
    why = p if one.test is None else f"a test does not reject that they are apart, {p}"
    return f"{one.name!r} and {target!r} both wander and are not tied ({why}; {fit}): difference both."


def _tied(target: Hashable, one: Pair) -> str:
    p = "" if one.test is None else f" ({_p(one.test.p_value)} against no cointegration)"
    return (
        f"{one.name!r} and {target!r} wander together{p}: do not difference both and lose the tie; keep the levels "
        "with an error correction, or regress levels with lagged changes."
    )


def _relations(found: Johansen) -> str:
    count, k = found.rank, len(found.statistics)
    if count == k:
        return "Johansen's trace tests find as many relations as series, as if none of them wandered."
    return f"Johansen's trace tests find {counted(count, 'relation')} among the {k} that wander."


def _unlike(target: Hashable, one: Pair) -> str:
    wanders, steady = (repr(one.name), repr(target)) if one.wanders else (repr(target), repr(one.name))
    return f"{wanders} wanders and {steady} does not, so neither level explains the other: difference {wanders} first."


def _known(pairs: Sequence[Pair], horizon: int, noun: str) -> str:
    which = repr(pairs[0].name) if len(pairs) == 1 else "the others"
    if horizon == 1:
        return f"At the forecast date {which} is known up to the {noun} before: use lags of 1 {noun} or more."
    return (
        f"At the forecast date only lags of {counted(horizon, noun)} or more of {which} are known for every step up to "
        f"{horizon} ahead; for shorter lags {which} must be forecast too, or be known beforehand as a timetable is."
    )


def _names(pairs: Sequence[Pair]) -> str:
    names = [repr(one.name) for one in pairs]
    if len(names) > 3:
        return f"{', '.join(names[:3])} and {len(names) - 3} more"
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"


def _p(value: float) -> str:
    return "p < 0.001" if value < 0.001 else f"p = {value:.3f}"
