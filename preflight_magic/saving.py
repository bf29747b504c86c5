"""Writing reports to files, whole or not at all."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

from preflight_magic.model import CheckError

if TYPE_CHECKING:
    from preflight_magic.report import Report


def save(report: Report, path: Path) -> None:
    """Write a report in the form that the suffix of the path names.

    Parameters
    ----------
    report : Report
    path : Path
        ``.html``: a page that opens offline; ``.py``: the code of all series.

    Raises
    ------
    CheckError
        For another suffix, or a folder that does not exist.
    """
    if path.suffix == ".html":
        from preflight_magic.present.html import page

        text = page(report)
    elif path.suffix == ".py":
        text = report.code()
    else:
        raise CheckError(f"A report cannot be saved as '{path.name}'; use a name that ends in .html or .py.")
    if not path.parent.is_dir():
        raise CheckError(f"The folder '{path.parent}' does not exist; make it first, or save somewhere else.")
    write_whole(path, text)


def write_whole(path: Path, text: str) -> None:
    """Write a text file beside its place and move it there, so that a failure leaves the old file."""
    handle, beside = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
    try:
        with os.fdopen(handle, "w", encoding="utf-8", newline="\n") as file:
            file.write(text)
        os.replace(beside, path)
    except BaseException:
        Path(beside).unlink(missing_ok=True)
        raise
