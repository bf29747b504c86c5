"""Rung 1: the calendar of the series and its seasonal period."""

from __future__ import annotations

from preflight_magic.model import (
    Evidence,
    FillGaps,
    Judgement,
    MergeDuplicates,
    ReadDates,
    RegularCalendar,
    Repair,
    Sort,
    TimeSeries,
)
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung
from preflight_magic.stamps import stamp_text

METHOD = (
    "The stamps have to be sorted, unique and regular, so that one step always means the same. The seasonal period is "
    "the one that was asked for, or else that of the calendar: 12 for months, 4 for quarters, 52 for weeks, 7 for "
    "days, 5 for business days, 24 and 168 for hours, as far as the series is long enough to show it."
)


_DONE: dict[type[Repair], str] = {
    ReadDates: "the stamps were read as dates",
    Sort: "the rows were sorted",
    MergeDuplicates: "repeated rows were made one",
    RegularCalendar: "missing stamps were put in",
}


def examine(series: TimeSeries, context: Context) -> Evidence:
    """Describe the calendar, the span and the season.

    Parameters
    ----------
    series : TimeSeries
    context : Context
        Only `settings.season` is read: whether the season was asked for.

    Returns
    -------
    Evidence
        Measures `kind`, `freq`, `start`, `end` (text), `n` (steps from first to last), `season`, `season_asked`,
        `repairs` (text) and `notes`.
    """
    if series.calendar is None:
        return Evidence(problem=series.problem or "the series has no calendar.")
    kind, index = series.calendar.kind, series.values.index
    measures: dict[str, object] = {
        "kind": kind,
        "freq": series.calendar.freq,
        "n": len(index),
        "season": series.season,
        "season_asked": context.settings.season is not None,
        "repairs": tuple(_text(repair) for repair in series.repairs),
        "notes": series.notes,
    }
    if len(index):
        measures |= {"start": stamp_text(index[0], kind), "end": stamp_text(index[-1], kind)}
    return Evidence(measures)


def _text(repair: Repair) -> str:
    match repair:
        case FillGaps(period=period):
            return f"fill gaps along the mean pattern of {period}" if period > 1 else "fill gaps"
        case _:
            return _DONE[type(repair)]


def judge(evidence: Evidence, thresholds: Thresholds) -> Judgement:
    """Say what the calendar is; a series without one is infeasible."""
    if evidence.problem is not None:
        return Judgement("infeasible", "no regular calendar", evidence.problem)
    found = evidence.measures
    kind = "numbered steps" if found["kind"] == "counter" else str(found["kind"])
    if "start" not in found:
        return Judgement("clear", kind, f"The index is regular ({kind}).")
    season = found["season"]
    assert isinstance(season, tuple)
    told = "no season" if season == (1,) else "season " + " and ".join(str(period) for period in season)
    headline = f"{kind}, {found['start']} to {found['end']}, {found['n']} values, {told}"
    notes = found["notes"]
    assert isinstance(notes, tuple)
    if notes:
        reason = notes[0]
    elif season == (1,):
        reason = "No season was asked for." if found["season_asked"] else "This calendar has no season of its own."
    else:
        whence = "asked for" if found["season_asked"] else "of the calendar"
        reason = f"The seasonal period is the one {whence}."
        if len(season) > 1:
            reason = f"The seasonal periods are those {whence}."
    repairs = found["repairs"]
    assert isinstance(repairs, tuple)
    done = [told for told in repairs if told in _DONE.values()]
    regular = "The index is sorted, unique and regular."
    if done:
        regular = f"The index had to be made regular: {', '.join(done)}."
    return Judgement("clear", headline, f"{regular} {_sentence(reason)}")


def _sentence(text: str) -> str:
    return text[:1].upper() + text[1:]


RUNG = Rung(
    name="time index",
    question="Is the time index regular, and which season does its calendar have?",
    after=(),
    method=METHOD,
    sources=(),
    examine=examine,
    judge=judge,
)
