"""A report against an earlier one: which plans still stand on the data of today, what moved, and since when."""

from __future__ import annotations

import math
from collections.abc import Hashable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pandas as pd

from preflight_magic.model import CheckError, Stamp
from preflight_magic.plan.plan import Plan
from preflight_magic.record.fingerprint import Span, fingerprint, position_of, steps_on
from preflight_magic.stamps import stamp_text
from preflight_magic.standing import fails_since

if TYPE_CHECKING:
    from preflight_magic.report import Report
    from preflight_magic.series_report import SeriesReport

CLEAR = 20.0
"""Odds from which evidence against an old plan counts as clear. Kass and Raftery (1995), Bayes factors, Journal of the
American Statistical Association 90, 773-795, call 20 to 150 to 1 "strong"."""
MOVED = ("changed", "infeasible", "new", "gone")
"""Statuses of series in which something changed."""
COLUMNS = (
    "status", "plan", "plan_before", "plan_now", "odds", "since", "verdict_before", "verdict_now", "data", "note",
)  # fmt: skip


class PlansChanged(CheckError):  # noqa: N818
    """Raised on request where plans changed; `changes` is the table, `names` are the series."""

    def __init__(self, message: str, names: tuple[Hashable, ...] = (), changes: pd.DataFrame | None = None) -> None:
        super().__init__(message)
        self.names, self.changes = names, changes

    def __reduce__(self) -> tuple[Any, ...]:
        return type(self), (str(self), self.names, self.changes)


# ------------------------------------------------------------------------------------------------- the table
def changes_of(now: Report, earlier: Report, odds: float = CLEAR) -> pd.DataFrame:
    """Table of what changed, a row a series: those of today in their order, then those that are gone.

    Parameters
    ----------
    now : Report
        With data.
    earlier : Report
        With data or from a record.
    odds : float
        An old plan stands while the odds against it are no longer than this.

    Returns
    -------
    DataFrame
        The columns `COLUMNS`.

    Raises
    ------
    CheckError
        Where `now` has no data, or `odds` is no number of at least one.
    """
    if not (isinstance(odds, int | float) and odds >= 1.0):
        raise CheckError(f"odds is {odds!r}; give a number of at least 1, such as 20.")
    bare = next((one for one in now if not one.has_data), None)
    if bare is not None:
        raise CheckError(
            f"column {bare.name!r} comes from a record, which holds no data to compare; join them first with "
            "report.attach(frame)."
        )
    known = set(earlier.names)
    rows = [_row(one, earlier[one.name], odds) if one.name in known else _new(one) for one in now]
    here = set(now.names)
    # what was not asked for is not gone
    lost = [] if "only" in now.options else [name for name in earlier.names if name not in here]
    rows += [_gone(earlier[name]) for name in lost]
    index = pd.Index([*now.names, *lost], name="series", tupleize_cols=False)
    # column by column, so that pandas guesses no type from the stamps
    kinds = dict.fromkeys(COLUMNS, "string") | {"odds": "Float64", "since": "object"}
    return pd.DataFrame({key: pd.Series([row.get(key) for row in rows], index, kind) for key, kind in kinds.items()})


def moved(changes: pd.DataFrame) -> tuple[Hashable, ...]:
    """Names of the series in which something changed."""
    return tuple(changes.index[changes["status"].isin(MOVED)].tolist())


def refuse_changes(changes: pd.DataFrame) -> None:
    """Raise PlansChanged where something changed."""
    names = moved(changes)
    if not names:
        return
    told = [f"{name!r} {changes['status'].iloc[changes.index.get_loc(name)]}" for name in names[:3]]
    more = f" and {len(names) - 3} more" if len(names) > 3 else ""
    raise PlansChanged(
        f"{len(names)} of {len(changes)} series changed: {', '.join(told)}{more}; look at report.against(earlier).",
        names,
        changes,
    )


def kept_plans(now: Report, earlier: Report, changes: pd.DataFrame) -> list[SeriesReport]:
    """Series of today, each under its earlier plan where that stands.

    Parameters
    ----------
    now, earlier : Report
    changes : DataFrame
        From `changes_of`.
    """
    known = set(earlier.names)
    return [
        _kept(one, earlier[one.name], plan) if one.name in known else one
        for one, plan in zip(now, changes["plan"], strict=False)
    ]


def _kept(now: SeriesReport, before: SeriesReport, plan: object) -> SeriesReport:
    if now.problem is not None or before.problem is not None:
        return now
    if plan != str(before.plan):
        return now if now.plan == now.recommended else now.with_plan(now.recommended.steps)
    steps = steps_on(before.plan.steps, now.index)
    if now.plan.steps == steps and before.chosen != "group":
        return now
    return now.with_plan(steps, "kept" if before.chosen == "recommended" else before.chosen)


# ---------------------------------------------------------------------------------------------- one series
def _row(now: SeriesReport, before: SeriesReport, margin: float) -> dict[str, object]:
    data = _data(before.span, before.fingerprint, now)
    row: dict[str, object] = {
        "verdict_before": before.verdict,
        "verdict_now": now.verdict,
        "plan_before": None if before.problem else str(before.plan),
        "plan_now": None if now.problem else str(now.recommended),
        "data": data,
    }
    if now.problem is not None:
        return row | {"status": "stands" if before.problem else "infeasible", "note": now.problem}
    if before.problem is not None:
        return row | {"status": "new", "plan": str(now.plan), "note": "It could not be checked before."}
    own = _is_own_choice(before)
    old = before.recommended if own else before.plan
    odds = now.odds_against(old)
    stands = odds <= margin
    row |= {"status": "stands" if stands else "changed", "odds": None if math.isnan(odds) else odds}
    possible = own and not math.isinf(now.odds_against(before.plan))
    row["plan"] = str(before.plan if possible else old if stands else now.recommended)
    since = None if stands else _since(now, before, old, margin)
    row["since"] = since
    notes = [_lean(now, old, odds, margin)] if stands else [_against(now, old, odds, since)]
    if possible:
        whose = "a person's choice" if before.chosen == "person" else "the plan of a group"
        notes.append(f"The plan {str(before.plan)!r} is {whose} and stays.")
    if data == "revised":
        notes.append("Values of the earlier span were revised.")
    return row | {"note": " ".join(note for note in notes if note)}


def _is_own_choice(one: SeriesReport) -> bool:
    """Whether a plan was chosen by hand, so that no evidence moves it."""
    return one.chosen in ("person", "group")


def _new(now: SeriesReport) -> dict[str, object]:
    told: dict[str, object] = {} if now.problem else {"plan": str(now.plan), "plan_now": str(now.recommended)}
    return told | {"status": "new", "verdict_now": now.verdict, "note": "The earlier report does not have it."}


def _gone(before: SeriesReport) -> dict[str, object]:
    told: dict[str, object] = {} if before.problem else {"plan_before": str(before.plan)}
    return told | {"status": "gone", "verdict_before": before.verdict, "note": "The table does not have it any more."}


def _lean(now: SeriesReport, old: Plan, odds: float, margin: float) -> str:
    if odds <= 1.0 or old.steps == now.recommended.steps:
        return ""
    best = str(now.recommended)
    if best == str(old):
        return ""
    return f"The data now lean to {best!r} at {_to_one(odds)}; up to {margin:g} to 1 the earlier plan is kept."


def _against(now: SeriesReport, old: Plan, odds: float, since: Stamp | None) -> str:
    best = str(now.recommended)
    if math.isnan(odds):
        told = f"{str(old)!r} is not among the plans compared; {best!r} is recommended"
    elif math.isinf(odds):
        told = f"{str(old)!r} cannot be on these data; {best!r} is recommended"
    else:
        told = f"The odds are {_to_one(odds)} for {best!r} against {str(old)!r}"
    kind = now.source.calendar.kind if now.source.calendar else None
    return f"{told}{'' if since is None else f', since {stamp_text(since, kind)}'}."


def _to_one(odds: float) -> str:
    return "over 1,000 to 1" if odds > 1000.0 else f"{odds:.2g} to 1" if odds < 100.0 else f"{odds:.0f} to 1"


def _since(now: SeriesReport, before: SeriesReport, old: Plan, margin: float) -> Stamp | None:
    """First stamp with whose value the old plan no longer stands; None where it does not even on the earlier span."""
    last = None if before.span.last is None else position_of(before.span.last, now.index)
    if last is None or last + 1 >= now.span.n:
        return None
    return fails_since(now.source, now.settings, old, last + 1, math.log(margin))


def _data(then: Span, digest: str, now: SeriesReport) -> str | None:
    """How the data of today are to those of the earlier report, in a word or two."""
    if then.first is None or then.last is None or now.problem is not None:
        return None
    first, last = position_of(then.first, now.index), position_of(then.last, now.index)
    if first is None or last is None:
        return "shorter" if first is not None else "other span"
    if fingerprint(now.series.iloc[first : last + 1]) != digest:
        return "revised"
    return "same" if last - first + 1 == now.span.n else "longer"


def report_of(earlier: Any) -> Report:
    """Earlier report as it was given: itself, or the path of its record."""
    from preflight_magic.report import Report

    if isinstance(earlier, Report):
        return earlier
    if isinstance(earlier, str | Path):
        from preflight_magic.record.read import load

        return load(earlier)
    seen = f"a {type(earlier).__name__}"
    raise CheckError(f"earlier is {seen}, not a report; give a report, or the path of a record that it saved.")
