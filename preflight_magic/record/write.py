"""A report as the text of a record: JSON, a line a series."""

from __future__ import annotations

import json
from dataclasses import fields
from typing import TYPE_CHECKING, Any

from preflight_magic import __version__
from preflight_magic.model import CheckError, Finding, HypothesisTest
from preflight_magic.record.steps import plan_object, step_objects
from preflight_magic.record.tags import CannotTagError, encode, number

if TYPE_CHECKING:
    from preflight_magic.report import Report
    from preflight_magic.series_report import SeriesReport

FORMAT = "preflight_magic record"
VERSION = 1
"""Of the format; it rises when a reader of the old one would not understand the new one."""


def record_text(report: Report) -> str:
    """Text of a record: findings, plans, and a fingerprint of the data, not the data.

    Parameters
    ----------
    report : Report

    Raises
    ------
    CheckError
        For names or options that a record cannot hold.
    """
    head = {"format": FORMAT, "format_version": VERSION, "package_version": __version__, "options": _options(report)}
    lines = [_line(one) for one in report]
    # a line a series: what has changed is seen in any comparison of files
    return f'{_json(head)[:-1]},\n"series": [\n' + ",\n".join(lines) + "\n]}\n"


def _json(value: object) -> str:
    # pure ASCII, so that no name can break the encoding of the file
    return json.dumps(value, allow_nan=False, separators=(",", ":"))


def _options(report: Report) -> dict[str, Any]:
    told = {}
    for name, value in report.options.items():
        try:
            told[name] = encode(value)
        except CannotTagError as error:
            raise CheckError(f"The option {name} holds {error}, which a record cannot; give it as text.") from None
    return told


def _line(one: SeriesReport) -> str:
    try:
        name = encode(one.name)
    except CannotTagError as error:
        raise CheckError(
            f"column {one.name!r}: its name is {error}, which a record cannot hold; rename it to text."
        ) from None
    span, calendar, settings = one.span, one.source.calendar, one.settings
    return _json(
        {
            "name": name,
            "problem": one.problem,
            "verdict": one.verdict,
            "plan": plan_object(one.plan),
            "recommended": plan_object(one.recommended),
            "chosen": one.chosen,
            "span": {field.name: encode(getattr(span, field.name)) for field in fields(span)},
            "fingerprint": one.fingerprint,
            "calendar": None
            if calendar is None
            else {f.name: encode(getattr(calendar, f.name)) for f in fields(calendar)},
            "season": list(one.season),
            "settings": {
                "season": None if settings.season is None else list(settings.season),
                "horizon": settings.horizon,
                "significance": settings.thresholds.significance,
            },
            "alternatives": [
                {"words": words, "below": number(below), "steps": step_objects(steps)}
                for words, below, steps in one.alternatives
            ],
            "findings": [_finding(finding) for finding in one.findings.values()],
        }
    )


def _finding(finding: Finding) -> dict[str, Any]:
    return {
        "rung": finding.rung,
        "question": finding.question,
        "verdict": finding.verdict,
        "headline": finding.headline,
        "reason": finding.reason,
        "steps": step_objects(finding.steps),
        "measures": _known(finding.measures),
        "tests": [_test(test) for test in finding.tests],
    }


def _test(test: HypothesisTest) -> dict[str, Any]:
    return {
        "test": test.test,
        "null": test.null,
        "statistic": number(float(test.statistic)),
        "p_value": number(float(test.p_value)),
        "p_bound": test.p_bound,
        "nobs": int(test.nobs),
        "lags": None if test.lags is None else int(test.lags),
        "terms": test.terms,
        "critical_values": {level: number(float(value)) for level, value in test.critical_values.items()},
        "options": _known(test.options),
    }


def _known(values: Any) -> dict[str, Any]:
    """Values of the kinds that a record holds; a fitted model or an array is left out."""
    found = {}
    for key, value in values.items():
        try:
            found[str(key)] = encode(value)
        except CannotTagError:
            continue
    return found
