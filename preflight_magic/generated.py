"""Generated code of checked series, run and compared with their plans before anyone sees it."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, cast

from preflight_magic.model import CheckError, MergeDuplicates, ReadDates, RegularCalendar, Sort
from preflight_magic.plan.emit import emit
from preflight_magic.plan.emit_features import emit_features
from preflight_magic.plan.emit_model import Orders, emit_model
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps
from preflight_magic.plan.prove import prove

if TYPE_CHECKING:
    from preflight_magic.kernels.arma import ArmaFit
    from preflight_magic.series_report import SeriesReport

UNPROVED = """\
# Written from a record, which holds no data: this code was not run against the plan.
# report.attach(frame).code() runs it first.

"""


_WHY: dict[type, str] = {
    ReadDates: "The stamps were text or objects.",
    Sort: "The rows were out of order.",
    MergeDuplicates: "Some stamps had more than one row, with the same value.",
    RegularCalendar: "Some stamps had no row; they get one without a value.",
}


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


def code_of(report: SeriesReport, form: str) -> str:
    """Source of one plan in one of three forms.

    Parameters
    ----------
    report : SeriesReport
    form : str
        ``pandas``, ``model`` or ``features``.

    Returns
    -------
    str

    Raises
    ------
    CheckError
        For another form, or a series that has none.
    """
    match form:
        case "pandas":
            return proved_code([report])
        case "model":
            return model_code(report)
        case "features":
            return features_code(report)
        case _:
            raise CheckError(f"There is no code of the form {form!r}; use 'pandas', 'model' or 'features'.")


def model_code(report: SeriesReport) -> str:
    """Source that hands the plan of one series to statsmodels.

    Parameters
    ----------
    report : SeriesReport

    Returns
    -------
    str

    Raises
    ------
    CheckError
        When the series could not be checked, or one model cannot hold its plan.
    EmitError
        When what is done outside the model is not what the plan does: a fault of this package.
    """
    if report.problem is not None:
        raise CheckError(report.problem)
    fit = cast("ArmaFit | None", report.findings["roots"].measures.get("fit"))
    if fit is None:
        raise CheckError(
            f"column {report.name!r}: what the plan '{report.plan}' leaves has no ARMA model; use form='pandas', or "
            "give a longer series."
        )
    order = fit.order
    orders = Orders(order.p, order.q, order.P, order.Q, order.period)
    source = emit_model(report.name, report.plan, _reasons(report), report.series.index, orders)
    prove(Plan((), point_steps(report.plan.steps)), source, report.series, report.horizon)
    return source


def features_code(report: SeriesReport) -> str:
    """Source that makes columns for a learner from one series, as its plan says.

    Parameters
    ----------
    report : SeriesReport

    Returns
    -------
    str

    Raises
    ------
    CheckError
        When the series could not be checked.
    EmitError
        When the way to the scale of the learner and back is not that of the plan: a fault of this package.
    """
    if report.problem is not None:
        raise CheckError(report.problem)
    plan, series = report.plan, report.series
    source = emit_features(report.name, plan, _reasons(report), series.index, report.season[0], report.horizon)
    prove(Plan((), point_steps(plan.steps)), source, series, report.horizon)
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
