"""The check from a script: ``python -m preflight_magic ferry.csv --against last.json --save last.json``."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Hashable, Iterable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

from preflight_magic import __version__
from preflight_magic.model import CheckError

if TYPE_CHECKING:
    import pandas as pd

    from preflight_magic.report import Report

SAME, WRONG, CHANGED = 0, 2, 3
"""Exit statuses: nothing changed, input that cannot be used, something changed. 1 is Python's own for a fault."""

_ABOUT = """\
Check the series of a table before forecasting, compare with an earlier check, and keep a record.

Exit status: 0 where nothing changed or nothing was compared; 3 where a plan changed or a series is new, gone or
infeasible now; 2 where the input cannot be used.
"""


class _Parser(argparse.ArgumentParser):
    """Says in one sentence what is wrong."""

    def error(self, message: str) -> NoReturn:
        raise CheckError(f"{message}; see {self.prog} --help.")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the check.

    Parameters
    ----------
    arguments : sequence of str, optional
        By default those of the command line.

    Returns
    -------
    int
        Exit status.
    """
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # a terminal without the shapes of the verdicts shows question marks
    try:
        return _run(_parser().parse_args(arguments))
    except (CheckError, OSError) as error:
        print(f"preflight_magic: {_sentence(error)}", file=sys.stderr)
        return WRONG


def _run(given: argparse.Namespace) -> int:
    from preflight_magic.against import moved
    from preflight_magic.batch import check
    from preflight_magic.intake.files import read_table
    from preflight_magic.record.read import load

    for path in given.save:
        if path.suffix not in (".html", ".json", ".py"):
            raise CheckError(f"--save {path.name} is no kind of report; use a name that ends in .html, .json or .py.")
    earlier = None if given.against is None else load(given.against)
    frame = read_table(given.table, time=given.time, long=given.series is not None)
    names = frame[given.series].unique() if given.series in frame.columns else frame.columns
    report = check(
        frame,
        season=given.season,
        horizon=given.horizon,
        time=given.time if given.series is not None else None,
        series=given.series,
        value=given.value,
        significance=given.significance,
        only=_labels(given.only, names),
        exclude=_spans(given.exclude, frame),
        progress=False if given.quiet else None,
    )
    if earlier is not None:
        report = report.keeping(earlier, odds=given.odds)
    for path in given.save:
        report.save(path)
    if not given.quiet:
        print(_text(report))
    return CHANGED if report.changes is not None and moved(report.changes) else SAME


def _text(report: Report) -> str:
    from preflight_magic.present.against import changes_text
    from preflight_magic.present.make_overview import overview
    from preflight_magic.present.text import overview_text

    shown = overview_text(overview(report))
    return shown if report.changes is None else f"{shown}\n\n{changes_text(report.changes)}"


def _labels(texts: Sequence[str], known: Iterable[Hashable]) -> list[Hashable] | None:
    """Names as the table has them: numbers are typed as text."""
    labels = {str(label): label for label in known}
    return [labels.get(text, text) for text in texts] or None


def _spans(spans: Sequence[tuple[str, str]], frame: pd.DataFrame) -> list[tuple[object, object]] | None:
    """Ends of spans, as numbers where the rows are numbered."""
    numbered = frame.index.dtype.kind in "iu" and all(end.lstrip("-").isdigit() for span in spans for end in span)
    return [(int(start), int(end)) if numbered else (start, end) for start, end in spans] or None


def _sentence(error: Exception) -> str:
    from preflight_magic.intake.remedies import as_options

    if isinstance(error, OSError) and error.filename is not None:
        return f"'{error.filename}': {(error.strerror or 'it cannot be used').lower()}; check the path."
    return as_options(" ".join(str(error).split()))


# ---------------------------------------------------------------------------------------------------- options
def _parser() -> argparse.ArgumentParser:
    parser = _Parser(
        "python -m preflight_magic", description=_ABOUT, allow_abbrev=False,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )  # fmt: skip
    add = parser.add_argument
    add("table", type=Path, help="CSV or Parquet file; without --time the first column of a CSV file holds the dates")
    add("--against", type=Path, metavar="FILE", help="record of an earlier check: plans that stand are kept")
    add("--save", type=Path, metavar="FILE", action="append", default=[],
        help="write .json (record), .html (page) or .py (code); may be repeated")  # fmt: skip
    add("--time", metavar="COLUMN", help="column with the dates")
    add("--series", metavar="COLUMN", help="column with the name of the series, in a long table")
    add("--value", metavar="COLUMN", help="column with the values, in a long table")
    add("--season", metavar="N[,N]", type=_season, help="observations per cycle; 1 for none")
    add("--horizon", metavar="N", type=int, help="steps ahead that you want to forecast")
    add("--significance", metavar="SHARE", type=float, default=0.05, help="size of the tests shown")
    add("--only", metavar="NAME", action="append", default=[], help="series to check; may be repeated")
    add("--exclude", metavar="START..END", type=_span, action="append", default=[],
        help="special span, treated as missing; may be repeated")  # fmt: skip
    add("--odds", metavar="N", type=float, default=20.0,
        help="odds against an earlier plan from which it changes (default 20)")  # fmt: skip
    add("--quiet", action="store_true", help="print nothing")
    add("--version", action="version", version=f"preflight_magic {__version__}")
    return parser


def _season(text: str) -> int | tuple[int, ...]:
    try:
        found = tuple(int(part) for part in text.split(","))
    except ValueError:
        raise argparse.ArgumentTypeError(f"{text!r} is not a whole number or a list such as 24,168") from None
    return found if len(found) > 1 else found[0]


def _span(text: str) -> tuple[str, str]:
    start, dots, end = (part.strip() for part in text.partition(".."))
    if not start or (dots and not end):
        raise argparse.ArgumentTypeError(f"{text!r} is not a span such as 2020-03..2020-06")
    return start, end or start


if __name__ == "__main__":
    sys.exit(main())
