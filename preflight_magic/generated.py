"""Generated code of checked series, run and compared with their plans before anyone sees it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from preflight_magic.model import CheckError
from preflight_magic.plan.emit import emit
from preflight_magic.plan.prove import prove

if TYPE_CHECKING:
    from preflight_magic.series_report import SeriesReport

UNPROVED = """\
# Written from a record, which holds no data: this code was not run against the plan.
# report.attach(frame).code() runs it first.

"""


def proved_code(reports: Sequence[SeriesReport]) -> str:
    """Source that applies and undoes the plans of some series; its head says so where a record gave no data to run it.

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
    source = emit(plans, {one.name: one.index for one in reports})
    for one in reports:
        if one.has_data:
            prove(one.plan, source, one.series, one.horizon)
    return source if all(one.has_data for one in reports) else UNPROVED + source


def _reasons(report: SeriesReport) -> dict[Any, str]:
    """Why each step of the plan is there, in the words of the finding that proposes it."""
    said: dict[Any, str] = {}
    for finding in report.findings.values():
        for step in finding.steps:
            said.setdefault(step, finding.reason.split(". ")[0].rstrip(".") + ".")
    for step in report.plan.steps:
        said.setdefault(step, "Put in by hand.")
    return said
