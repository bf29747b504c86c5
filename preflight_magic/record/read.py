"""The text of a record, trusted in nothing, back to a report without data."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import Any, NoReturn, cast, get_args

from preflight_magic import __version__
from preflight_magic.ladder import READING, Climb
from preflight_magic.model import Calendar, CalendarKind, CheckError, Finding, HypothesisTest, Stamp, Step, Verdict
from preflight_magic.policy import Settings, Thresholds
from preflight_magic.record.fingerprint import Span
from preflight_magic.record.loaded import LoadedReport, LoadedSeries
from preflight_magic.record.node import Node
from preflight_magic.record.steps import read_plan, read_steps
from preflight_magic.record.tags import FREQUENCY
from preflight_magic.record.write import FORMAT, VERSION

LARGEST = 400_000_000
"""Bytes; ten thousand series take less than half of it."""
OPTIONS = ("season", "horizon", "time", "series", "value", "significance", "only", "exclude", "repair", "target")
"""Options of a check that a record may hold."""
_VERDICTS = get_args(Verdict)
_FIELDS = (
    "name", "problem", "verdict", "plan", "recommended", "chosen", "span", "fingerprint", "calendar", "season",
    "settings", "alternatives", "findings",
)  # fmt: skip


def load(path: str | Path) -> LoadedReport:
    """Read a record that ``report.save("name.json")`` wrote.

    Parameters
    ----------
    path : str or Path

    Returns
    -------
    LoadedReport
        Findings and plans; `attach` joins the data again.

    Raises
    ------
    CheckError
        For a file that is no record, is damaged, is too large, or is of a version that is not known.
    OSError
        For a file that cannot be read.
    """
    path = Path(path)
    with path.open("rb") as file:
        data = file.read(LARGEST + 1)
    if len(data) > LARGEST:
        raise CheckError(
            f"The record '{path.name}' has more than {LARGEST:,} bytes, which no record has; name the file that "
            "report.save wrote."
        )
    return read_text(data, path.name)


def read_text(data: bytes, file: str) -> LoadedReport:
    """Read the bytes of a record; `file` is what sentences call it."""
    told = _parsed(data, file)
    if not isinstance(told, dict) or told.get("format") != FORMAT:
        raise CheckError(f"'{file}' is JSON, but no record of preflight_magic; name a file that report.save wrote.")
    _check_version(told, file)
    top = Node(told, file).fields(("format", "format_version", "package_version", "options", "series"))
    options = {key: node.plain() for key, node in top["options"].entries()}
    unknown = [key for key in options if key not in OPTIONS]
    if unknown:
        raise top["options"].refuse(f"holds {unknown[0][:40]!r}, which is no option of a check")
    found: dict[object, LoadedSeries] = {}
    for node in top["series"].items():
        one = _series(node)
        if one.name in found:
            raise node.refuse(f"has the name {str(one.name)[:40]!r}, which another series has too")
        found[one.name] = one
    if not found:
        raise top["series"].refuse("is empty")
    return LoadedReport(found.values(), options, top["package_version"].text())


def _parsed(data: bytes, file: str) -> Any:
    try:
        return json.loads(
            data.decode("utf-8-sig"),
            object_pairs_hook=_object,
            parse_constant=_constant,
            parse_int=_whole,
            parse_float=_number,
        )
    except RecursionError:
        why = "it is nested too deeply"
    except UnicodeDecodeError:
        why = "it is not text in UTF-8"
    except json.JSONDecodeError as error:
        why = f"{error.msg.lower()} in line {error.lineno}, column {error.colno}"
    except ValueError as error:
        why = str(error)
    raise CheckError(f"'{file}' is not JSON that a record can hold: {why}; name a file that report.save wrote.")


def _object(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) < len(pairs):
        raise ValueError("an object has a key twice")
    return found


def _constant(word: str) -> NoReturn:
    raise ValueError(f"{word} stands where a number is needed")


def _whole(text: str) -> int:
    if len(text) > 20 or abs(int(text)) >= 2**63:
        raise ValueError("a whole number is too large")
    return int(text)


def _number(text: str) -> float:
    found = float(text)
    if not math.isfinite(found):
        raise ValueError("a number is too large")
    return found


def _check_version(told: Mapping[str, object], file: str) -> None:
    version, package = told.get("format_version"), told.get("package_version")
    if isinstance(version, int) and not isinstance(version, bool) and version == VERSION:
        return
    writer = f"preflight_magic {package[:20]}" if isinstance(package, str) else "another program"
    seen = f"version {version}" if isinstance(version, int) else "no version that can be read"
    raise CheckError(
        f"The record '{file}' is of {seen}, written by {writer}; preflight_magic {__version__} reads version "
        f"{VERSION}: check the data again and save, or use the version that wrote it."
    )


# ------------------------------------------------------------------------------------------------- one series
def _series(node: Node) -> LoadedSeries:
    at = node.fields(_FIELDS)
    problem = at["problem"].text_or_none()
    findings = _findings(at["findings"])
    climb = Climb(findings, None, read_plan(at["recommended"]), read_plan(at["plan"]), None)
    if any(name not in findings for name in READING):
        raise at["findings"].refuse(f"lack {' or '.join(READING)}")
    if at["verdict"].one_of(_VERDICTS) != climb.verdict or (problem is not None and climb.verdict != "infeasible"):
        raise at["verdict"].refuse(f"is {at['verdict'].text()}, which does not follow from the findings")
    chosen = at["chosen"].one_of(("recommended", "person", "kept", "group"))
    if chosen != "group" and (chosen == "recommended") != (climb.plan == climb.recommended):
        raise at["chosen"].refuse(f"is {chosen!r}, which does not follow from the plans")
    return LoadedSeries(
        name=at["name"].label(),
        problem=problem,
        found=climb,
        chosen=cast(Any, chosen),
        span=_span(at["span"]),
        fingerprint=at["fingerprint"].text(),
        calendar=_calendar(at["calendar"]),
        season=_periods(at["season"]),
        settings=_settings(at["settings"]),
        alternatives=tuple(_alternative(one) for one in at["alternatives"].items()),
    )


def _span(node: Node) -> Span:
    at = node.fields(("first", "last", "n", "missing"))
    first, last = _stamp(at["first"]), _stamp(at["last"])
    n, missing = at["n"].whole(), at["missing"].whole()
    if (first is None) != (n == 0) or (last is None) != (n == 0) or missing > n:
        raise node.refuse("does not agree with itself")
    return Span(first, last, n, missing)


def _stamp(node: Node) -> Stamp | None:
    found = node.plain()
    if found is None or (isinstance(found, Stamp) and not isinstance(found, bool)):
        return found
    raise node.refuse("is no stamp of a time index")


def _calendar(node: Node) -> Calendar | None:
    if node.value is None:
        return None
    at = node.fields(("kind", "freq", "noun", "seasons"))
    seasons = at["seasons"].plain()
    if not isinstance(seasons, tuple) or any(type(one) is not int or one < 1 for one in seasons):
        raise at["seasons"].refuse("is not a row of whole numbers")
    kind = cast(CalendarKind, at["kind"].one_of(get_args(CalendarKind)))
    freq = at["freq"].text_or_none()
    if freq is not None and not FREQUENCY.fullmatch(freq):
        raise at["freq"].refuse("is no frequency of a time index")
    return Calendar(kind, freq, at["noun"].text(), seasons)


def _periods(node: Node) -> tuple[int, ...]:
    found = tuple(one.whole(1) for one in node.items())
    if not found:
        raise node.refuse("is empty")
    return found


def _settings(node: Node) -> Settings:
    at = node.fields(("season", "horizon", "significance"))
    return Settings(
        season=None if at["season"].value is None else _periods(at["season"]),
        horizon=None if at["horizon"].value is None else at["horizon"].whole(1),
        thresholds=Thresholds(significance=at["significance"].number(0.0, 1.0)),
    )


def _alternative(node: Node) -> tuple[str, float, tuple[Step, ...]]:
    at = node.fields(("words", "below", "steps"))
    return at["words"].text(), at["below"].number(0.0), read_steps(at["steps"])


# --------------------------------------------------------------------------------------------------- findings
def _findings(node: Node) -> dict[str, Finding]:
    found: dict[str, Finding] = {}
    for one in node.items():
        finding = _finding(one)
        if finding.rung in found:
            raise one.refuse(f"is of the rung {finding.rung[:40]!r}, which another finding is of too")
        found[finding.rung] = finding
    return found


def _finding(node: Node) -> Finding:
    at = node.fields(("rung", "question", "verdict", "headline", "reason", "steps", "measures", "tests"))
    return Finding(
        rung=at["rung"].text(),
        question=at["question"].text(),
        verdict=cast(Verdict, at["verdict"].one_of(_VERDICTS)),
        headline=at["headline"].text(),
        reason=at["reason"].text(),
        tests=tuple(_test(one) for one in at["tests"].items()),
        measures={key: _measure(key, one) for key, one in at["measures"].entries()},
        steps=read_steps(at["steps"]),
    )


def _measure(key: str, node: Node) -> object:
    """Measure of a finding; what its name promises about its kind has to hold, since cards rely on it."""
    found = node.plain()
    if key.endswith("shares"):
        if not isinstance(found, dict) or any(type(one) not in (int, float) for one in found.values()):
            raise node.refuse("is not a share for each answer")
    elif key == "roots" and not (isinstance(found, tuple) and all(type(one).__name__ == "Root" for one in found)):
        raise node.refuse("is not a row of roots")
    return found


def _test(node: Node) -> HypothesisTest:
    at = node.fields(
        ("test", "null", "statistic", "p_value", "p_bound", "nobs", "lags", "terms", "critical_values", "options")
    )
    return HypothesisTest(
        test=at["test"].text(),
        null=at["null"].text(),
        statistic=at["statistic"].number(),
        p_value=at["p_value"].number(0.0, 1.0),
        p_bound=cast(Any, at["p_bound"].one_of(("exact", "at most", "at least"))),
        nobs=at["nobs"].whole(),
        lags=None if at["lags"].value is None else at["lags"].whole(),
        terms=cast(Any, at["terms"].one_of(("n", "c", "ct", "ctt"))),
        critical_values={key: one.number() for key, one in at["critical_values"].entries()},
        options={key: one.plain() for key, one in at["options"].entries()},
    )
