"""`%%checkseries`, `%checkseries` and `%seriescode`: find the frame, call the plain functions, hand back the report."""

from __future__ import annotations

from collections.abc import Hashable
from typing import Any

from IPython.core.error import UsageError
from IPython.core.magic import no_var_expand
from IPython.display import display

from preflight_magic.cell_value import Shell, value_of_cell, value_of_line
from preflight_magic.command_line import (
    OPTIONS,
    Line,
    did_you_mean,
    is_report,
    label_of,
    read_line,
    split_outside,
    unquoted,
)
from preflight_magic.completion import IDENTIFIER, matcher
from preflight_magic.intake.remedies import as_options
from preflight_magic.model import CheckError
from preflight_magic.named import earlier_of, executor_of, one_line

_CHECK_HELP = """Check series before forecasting: which transforms, why, and the code that applies and undoes them.

    %%checkseries [options]          the value of the cell's last expression is the frame
    %checkseries EXPRESSION [options]

The frame is a DataFrame with a column a series, a long table with --series and --value, or a Series. The report is
shown and returned, so that `_` holds it.

Options, each written out in full; a name with spaces stands in quotes:

{options}

Examples:

    %%checkseries --season 12 --horizon 12 --into report
    monthly = pd.read_csv("ferry.csv", parse_dates=["month"], index_col="month")
    monthly[["passengers", "freight"]]

    %checkseries monthly --only passengers,"crew overtime" --exclude 2020-03..2020-06

    %checkseries monthly --against last_month.json --into report
    report.save("last_month.json")

With --against the plans of the earlier report are kept where they stand, and what changed is shown below the overview.
"""
_CODE_HELP = """Put the code of a report in a new cell below.

    %seriescode REPORT [SERIES ...]  all series, or those named; a name with spaces stands in quotes

Example:

    %seriescode report passengers
"""


def load(shell: Shell) -> None:
    """Register the magics and the completion of their options."""
    unload(shell)

    # Nothing in the line is expanded: it holds a Python expression, whose braces and dollar signs are its own.
    @no_var_expand
    def checkseries(line: str, cell: str | None = None) -> Any:
        __tracebackhide__ = True
        return check_series(shell, line, cell)

    @no_var_expand
    def seriescode(line: str) -> None:
        __tracebackhide__ = True
        series_code(shell, line)

    width = max(len(f"{option.name} {option.form}") for option in OPTIONS)
    rows = [f"    {f'{option.name} {option.form}':<{width}}  {option.about}" for option in OPTIONS]
    checkseries.__doc__ = _CHECK_HELP.format(options="\n".join(rows))
    seriescode.__doc__ = _CODE_HELP
    shell.register_magic_function(checkseries, "line_cell", "checkseries")
    shell.register_magic_function(seriescode, "line", "seriescode")
    if shell.Completer is not None:
        shell.Completer.custom_matchers.append(matcher(shell))


def unload(shell: Shell) -> None:
    """Leave the shell as it was before `load`; does nothing where nothing is loaded."""
    manager = shell.magics_manager
    for name in ("checkseries", "seriescode"):
        for kind in ("line", "cell"):
            manager.magics[kind].pop(name, None)
        if name in vars(manager.user_magics):
            delattr(manager.user_magics, name)
    if shell.Completer is not None:
        kept = [one for one in shell.Completer.custom_matchers if getattr(one, "matcher_identifier", "") != IDENTIFIER]
        shell.Completer.custom_matchers[:] = kept


def check_series(shell: Shell, line: str, cell: str | None = None) -> Any:
    """Check the frame that a line or a cell gives.

    Parameters
    ----------
    shell : InteractiveShell
    line : str
        What follows the name of the magic.
    cell : str, optional
        Body of the cell, None for the line magic.

    Returns
    -------
    Report or None
        None with ``--quiet`` or where a semicolon ends the expression.

    Raises
    ------
    UsageError
        One sentence that says what to change.
    KeyboardInterrupt
        After an interrupt from the keyboard; the series that are done are shown and kept.
    """
    __tracebackhide__ = True
    given = read_line(line)
    quiet = "--quiet" in given.options
    pool = executor_of(shell.user_ns, given)
    earlier = earlier_of(shell.user_ns, given)
    if cell is None:
        silent = given.expression.endswith(";")
        frame = value_of_line(shell, given.expression.rstrip("; "))
    else:
        silent, frame = value_of_cell(shell, cell, given.expression)
    options = _options(given, frame)
    if pool is not None:
        options["pool"] = pool
    if quiet:
        options["progress"] = False

    from preflight_magic.batch import check

    into = given.options.get("--into")
    try:
        report = check(frame, **options)
        if earlier is not None:
            report = report.keeping(earlier)
    except CheckError as error:
        raise UsageError(as_options(one_line(error))) from None
    except KeyboardInterrupt as stop:
        # What is finished is shown and kept; the interrupt still ends the cell, and "run all" with it.
        finished = getattr(stop, "report", ())
        if into is not None and finished:
            shell.user_ns[str(into)] = finished
        if finished and not (quiet or silent):
            display(finished)  # type: ignore[no-untyped-call]
        raise
    if into is not None:
        shell.user_ns[str(into)] = report
    return None if quiet or silent else report


def series_code(shell: Shell, line: str) -> None:
    """Put the code of a report in the next input.

    Parameters
    ----------
    shell : InteractiveShell
    line : str
        Name of a variable with a report, then names of series.

    Raises
    ------
    UsageError
        One sentence that says what to change.
    """
    __tracebackhide__ = True
    name, *series = [unquoted(word) for word in split_outside(line, " \t\n,")] or [""]
    reports = [known for known, value in shell.user_ns.items() if is_report(value) and not known.startswith("_")]
    if not name:
        raise UsageError("name a report; write %seriescode REPORT, or %seriescode REPORT SERIES.")
    if name not in shell.user_ns:
        near = f"; {did_you_mean(name, reports)}" if reports else "; make one with %checkseries FRAME --into NAME."
        raise UsageError(f"there is no variable {name}{near}")
    report: Any = shell.user_ns[name]
    if not is_report(report):
        raise UsageError(f"{name} is a {type(report).__name__}, not a report; make one with --into NAME.")
    labels: list[Hashable] = [label_of(one, tuple(report.names)) for one in series]
    for label in labels:
        if label not in report.names:
            raise UsageError(f"{name} has no series {label!s}; {did_you_mean(str(label), report.names)}")
    try:
        code = report.code(labels) if labels else report.code()
    except CheckError as error:
        raise UsageError(one_line(error)) from None
    shell.set_next_input(code)


# --------------------------------------------------------------------------------------------- options of the check
def _options(given: Line, frame: Any) -> dict[str, Any]:
    """Arguments of the check: those that were given, names of columns as the frame has them."""
    columns = tuple(getattr(frame, "columns", ()))
    kept = [option.name for option in OPTIONS if option.name not in ("--into", "--pool", "--against", "--quiet")]
    options: dict[str, Any] = {name.removeprefix("--"): given.options[name] for name in kept if name in given.options}
    for key in ("time", "series", "value"):
        if key in options:
            options[key] = label_of(options[key], columns)
    names = tuple(frame[options["series"]].unique()) if options.get("series") in columns else columns
    if "only" in options:
        options["only"] = [label_of(name, names) for name in options["only"]]
    if "target" in options:
        options["target"] = label_of(options["target"], names)
    if "exclude" in options:
        stamps = frame[options["time"]] if options.get("time") in columns else getattr(frame, "index", None)
        options["exclude"] = [_span(span, stamps) for span in options["exclude"]]
    return options


def _span(span: tuple[str, str], stamps: Any) -> tuple[str, str] | tuple[int, int]:
    """Ends of a span, as numbers where the rows are numbered."""
    if getattr(getattr(stamps, "dtype", None), "kind", "") in ("i", "u"):
        try:
            return int(span[0]), int(span[1])
        except ValueError:
            pass
    return span
