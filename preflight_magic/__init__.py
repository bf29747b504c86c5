"""Check series before forecasting: which transforms, why, and the pandas code that applies and undoes them.

Examples
--------
>>> import preflight_magic as pf
>>> report = pf.check(pf.demo.ferry_line(), only="fuel_price", progress=False)
>>> str(report["fuel_price"].plan)
'difference 1'
"""

from __future__ import annotations

import importlib
import sys
from typing import TYPE_CHECKING, Any

from preflight_magic.model import CheckError

if TYPE_CHECKING:
    from preflight_magic import demo
    from preflight_magic.against import PlansChanged
    from preflight_magic.batch import Interrupted, check, stream
    from preflight_magic.estimate import time_needed
    from preflight_magic.overview_file import write_overview
    from preflight_magic.plan.plan import Plan
    from preflight_magic.record.read import load
    from preflight_magic.report import Report
    from preflight_magic.series_report import SeriesReport

__version__ = "0.1.0"
__all__ = [
    "CheckError",
    "Interrupted",
    "Plan",
    "PlansChanged",
    "Report",
    "SeriesReport",
    "check",
    "demo",
    "load",
    "stream",
    "time_needed",
    "write_overview",
]

# Found when first asked for, so that loading the extension costs next to nothing.
_HOMES = {
    "Interrupted": "preflight_magic.batch",
    "check": "preflight_magic.batch",
    "stream": "preflight_magic.batch",
    "load": "preflight_magic.record.read",
    "PlansChanged": "preflight_magic.against",
    "time_needed": "preflight_magic.estimate",
    "write_overview": "preflight_magic.overview_file",
    "Plan": "preflight_magic.plan.plan",
    "Report": "preflight_magic.report",
    "SeriesReport": "preflight_magic.series_report",
}
_STEPS = ("PerDay", "Log", "Power", "Logit", "Difference", "RemoveTrend", "RemoveShift", "RemovePattern")
_REPAIRS = ("ReadDates", "Sort", "MergeDuplicates", "RegularCalendar", "FillGaps")


def __getattr__(name: str) -> Any:
    if name in _HOMES:
        return getattr(importlib.import_module(_HOMES[name]), name)
    if name in _STEPS + _REPAIRS:
        return getattr(importlib.import_module("preflight_magic.model"), name)
    if name == "demo":
        return importlib.import_module("preflight_magic.demo")
    raise AttributeError(f"module 'preflight_magic' has no attribute {name!r}")


def load_ipython_extension(shell: Any) -> None:
    """Register the magics; called by ``%load_ext preflight_magic``."""
    from preflight_magic.magic import load

    load(shell)


def unload_ipython_extension(shell: Any) -> None:
    """Take the magics away again; called by ``%unload_ext preflight_magic``."""
    from preflight_magic.magic import unload

    unload(shell)
    cards = sys.modules.get("preflight_magic.present.registry")
    if cards is not None:
        cards.close_all()
