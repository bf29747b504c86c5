"""Writing reports to files, whole or not at all."""

from __future__ import annotations

import os
import secrets
import stat
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
        ``.html``: a page that opens offline; ``.json``: a record; ``.py``: the code of all series.

    Raises
    ------
    CheckError
        For another suffix, or a folder that does not exist.
    """
    if path.suffix == ".html":
        from preflight_magic.present.html import page

        text = page(report._shown())
    elif path.suffix == ".py":
        text = report.code()
    elif path.suffix == ".json":
        from preflight_magic.record.write import record_text

        text = record_text(report)
    else:
        raise CheckError(f"A report cannot be saved as '{path.name}'; use a name that ends in .html, .json or .py.")
    if not path.parent.is_dir():
        raise CheckError(f"The folder '{path.parent}' does not exist; make it first, or save somewhere else.")
    write_whole(path, text)


def write_whole(path: Path, text: str) -> None:
    """Write a text file beside its place and move it there, so that a failure leaves the old file.

    The new file has the permissions of the old one, or those that a new file of this process has.
    """
    path = Path(os.path.realpath(path))
    mode = stat.S_IMODE(path.stat().st_mode) if path.is_file() else None
    beside = path.parent / f".preflight-{secrets.token_hex(8)}"
    try:
        handle = os.open(beside, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o666 if mode is None else 0o600)
        try:
            file = os.fdopen(handle, "w", encoding="utf-8", errors="replace", newline="\n")
        except BaseException:
            os.close(handle)
            raise
        with file:
            file.write(text)
            file.flush()
            os.fsync(handle)
        if mode is not None:
            beside.chmod(mode)
        os.replace(beside, path)
    except BaseException:
        beside.unlink(missing_ok=True)
        raise
