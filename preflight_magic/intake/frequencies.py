"""Which calendar a frequency of pandas stands for."""

from __future__ import annotations

import re

from preflight_magic.model import Calendar, CalendarKind

_YEARLY = Calendar("yearly", None, "year")
_QUARTERLY = Calendar("quarterly", None, "quarter", (4,))
_MONTHLY = Calendar("monthly", None, "month", (12,))
KINDS: dict[str, Calendar] = {
    **dict.fromkeys(("Y", "YS", "YE", "BYS", "BYE"), _YEARLY),
    **dict.fromkeys(("Q", "QS", "QE", "BQS", "BQE"), _QUARTERLY),
    **dict.fromkeys(("M", "MS", "ME", "BMS", "BME", "WOM", "LWOM"), _MONTHLY),
    "W": Calendar("weekly", None, "week", (52,)),
    "D": Calendar("daily", None, "day", (7,)),
    "B": Calendar("business daily", None, "business day", (5,)),
}
DAY_MINUTES = 24 * 60
KNOWN = "yearly, quarterly, monthly, weekly, daily, business daily or hourly"
"""The calendars known here, as sentences name them."""


def calendar_of(freq: str) -> Calendar | None:
    """Calendar of a pandas frequency such as ``QS-OCT`` or ``15min``; None for one that is not known here."""
    parts = re.fullmatch(r"(\d*)([A-Za-z]+)(-.*)?", freq)
    if parts is None:
        return None
    count = int(parts[1] or 1)
    known = KINDS.get(parts[2])
    if known is not None:
        return Calendar(known.kind, freq, known.noun, known.seasons) if count == 1 else None
    minutes = count * {"h": 60, "min": 1}.get(parts[2], 0)
    if not 0 < minutes < DAY_MINUTES or DAY_MINUTES % minutes:
        return None
    kind: CalendarKind = "minutely" if minutes % 60 else "hourly"
    size, unit = (minutes, "minute") if minutes % 60 else (minutes // 60, "hour")
    per_day = DAY_MINUTES // minutes
    return Calendar(kind, freq, unit if size == 1 else f"{size} {unit}s", (per_day, 7 * per_day))
