"""What users hold of a whole frame."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Iterator
from functools import cached_property
from pathlib import Path
from typing import Any

import pandas as pd

from preflight_magic.generated import proved_code
from preflight_magic.model import Finding
from preflight_magic.overview import row_of, table_of
from preflight_magic.saving import save
from preflight_magic.series_report import SeriesReport
from preflight_magic.triage import attention


class Report:
    """Reports of the series of a frame, in its order.

    Parameters
    ----------
    reports : iterable of SeriesReport
    target : Hashable, optional
        The series that the others are meant to explain.
    """

    def __init__(self, reports: Iterable[SeriesReport], target: Hashable | None = None) -> None:
        self._target = target
        self._reports = {one.name: one for one in reports}

    @property
    def names(self) -> tuple[Hashable, ...]:
        """Names of the series."""
        return tuple(self._reports)

    def __getitem__(self, name: Hashable) -> SeriesReport:
        try:
            return self._reports[name]
        except KeyError:
            raise KeyError(f"there is no series {name!r}; there are {', '.join(map(repr, self.names[:8]))}") from None

    def __iter__(self) -> Iterator[SeriesReport]:
        return iter(self._reports.values())

    def __len__(self) -> int:
        return len(self._reports)

    @cached_property
    def overview(self) -> pd.DataFrame:
        """One row a series; columns verdict, plan, log, power, trend, shift, season, D, d, period, n, missing, note."""
        return table_of((row_of(one) for one in self), self.names)

    def attention(self, earlier: Report | None = None, false_alarms: float = 0.05) -> pd.DataFrame:
        """List the series that need a person, those that need one most first.

        Parameters
        ----------
        earlier : Report, optional
            A report of the same series from before; plans that changed since are listed.
        false_alarms : float
            Share of the alarms of each test, over all series, that may be false (Benjamini and Hochberg 1995).

        Returns
        -------
        DataFrame
            Indexed by series. `why`: ``infeasible``, ``changed``, ``inconclusive``, ``contradicted`` (a test differs
            from the plan) or ``noted``, the first that holds; `reason`: a sentence for each that does.
        """
        return attention(self, earlier, false_alarms)

    @cached_property
    def together(self) -> Finding | None:
        """Whether the other series may explain the target, and which of their lags are known; None without one."""
        if self._target is None:
            return None
        from preflight_magic.together import examine_together

        every = list(self)
        return examine_together(every, self._target, every[0].significance)

    def code(self, names: Any = None) -> str:
        """Source that applies and undoes the plans of some series, or of all that could be checked.

        Parameters
        ----------
        names : iterable of names, or one name, optional
            A tuple that is itself a name is one name.

        Returns
        -------
        str
        """
        if names is None:
            chosen = [one for one in self if one.problem is None]
        elif isinstance(names, Hashable) and (names in self._reports or isinstance(names, str)):
            chosen = [self[names]]
        else:
            chosen = [self[name] for name in (names if isinstance(names, Iterable) else [names])]
        return proved_code(chosen)

    def save(self, path: str | Path) -> None:
        """Write the report: ``.html`` for a page that opens offline, ``.py`` for the code of all series."""
        save(self, Path(path))

    def __repr__(self) -> str:
        counts = pd.Series([one.verdict for one in self]).value_counts(sort=False)
        return f"<Report of {len(self)} series: {', '.join(f'{n} {verdict}' for verdict, n in counts.items())}>"

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show

        show(self)
