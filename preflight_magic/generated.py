"""Generated code of checked series, run and compared with their plans before anyone sees it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from preflight_magic.model import CheckError, MergeDuplicates, ReadDates, RegularCalendar, Sort
from preflight_magic.plan.emit import emit
from preflight_magic.plan.prove import prove

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport


_WHY: dict[type, str] = {
    ReadDates: "The stamps were text or objects.",
    Sort: "The rows were out of order.",
    MergeDuplicates: "Some stamps had more than one row, with the same value.",
    RegularCalendar: "Some stamps had no row; they get one without a value.",
}


def proved_code(reports: Sequence[SeriesReport]) -> str:
    """Source that applies and undoes the plans of some series.

    Parameters
    ----------
    reports : sequence of SeriesReport

    Returns
    -------
    str

    Raises
    ------
    CheckError
        When one of the series could not be checked.
    EmitError
        When the code does not do what the plans do: a fault of this package.
    """
    for one in reports:
        if one.problem is not None:
            raise CheckError(one.problem)
    plans = {one.name: (one.plan, _reasons(one)) for one in reports}
    source = emit(plans, {one.name: one.series.index for one in reports})
    for one in reports:
        prove(one.plan, source, one.series, one.horizon)
    return source


def _reasons(report: SeriesReport) -> dict[Any, str]:
    """Why each step of the plan is there, in the words of the finding that proposes it."""
    said: dict[Any, str] = {one: _WHY[type(one)] for one in report.plan.repairs if type(one) in _WHY}
    for finding in report.findings.values():
        for step in finding.steps:
            said.setdefault(step, finding.reason.split(". ")[0].rstrip(".") + ".")
    for step in report.plan.steps:
        said.setdefault(step, "Put in by hand.")
    return said
