"""What users hold of a whole frame."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Iterator, Mapping
from functools import cached_property
from pathlib import Path
from typing import Any

import pandas as pd

from preflight_magic.against import CLEAR, changes_of, kept_plans, refuse_changes, report_of
from preflight_magic.generated import proved_code
from preflight_magic.group import group_of, shared_steps
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
    options : Mapping, optional
        Options of the check that a record keeps, to read the same data again.
    changes : DataFrame, optional
        What changed since an earlier report whose plans were kept where they stand.
    """

    def __init__(
        self,
        reports: Iterable[SeriesReport],
        options: Mapping[str, object] | None = None,
        changes: pd.DataFrame | None = None,
    ) -> None:
        self._reports = {one.name: one for one in reports}
        self._options = dict(options or {})
        self.changes = changes

    @property
    def names(self) -> tuple[Hashable, ...]:
        """Names of the series."""
        return tuple(self._reports)

    @property
    def options(self) -> Mapping[str, object]:
        """Options of the check that differ from their defaults, without those that only say how it runs."""
        return dict(self._options)

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
        target: Any = self._options.get("target")
        if target not in self._reports:
            # also where the check was interrupted before it
            return None
        from preflight_magic.together import examine_together

        every = list(self)
        return examine_together(every, target, every[0].significance)

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
        """Write the report, whole or not at all.

        Parameters
        ----------
        path : str or Path
            ``.html`` for a page that opens offline, ``.json`` for a record that `preflight_magic.load` reads, ``.py``
            for the code of all series.

        Raises
        ------
        CheckError
            For another suffix, or a folder that does not exist.
        """
        save(self, Path(path))

    def against(self, earlier: Report | str | Path, *, odds: float = CLEAR, strict: bool = False) -> pd.DataFrame:
        """Compare with an earlier report: which of its plans still stand on these data, what moved, and since when.

        A plan stands while the odds of the best plan against it are no longer than `odds`, so that plans do not go to
        and fro with each new value.

        Parameters
        ----------
        earlier : Report, or the path of a record
        odds : float
            Odds from which the evidence against an old plan is clear.
        strict : bool
            Raise `PlansChanged` where something changed.

        Returns
        -------
        DataFrame
            A row a series: ``status`` (``stands``, ``changed``, ``new``, ``gone``, ``infeasible``), ``plan`` (the
            one to use: the earlier one while it stands), ``plan_before``, ``plan_now`` (recommended on these data
            alone), ``odds`` (of that against the earlier one), ``since`` (first stamp with whose value the earlier
            plan no longer stands), ``verdict_before``, ``verdict_now``, ``data`` (``same``, ``longer``, ``revised``,
            ``shorter``, ``other span``) and ``note``.

        Raises
        ------
        CheckError
            Where this report comes from a record and has no data.
        PlansChanged
            A CheckError, only with `strict`.
        """
        changes = changes_of(self, report_of(earlier), odds)
        if strict:
            refuse_changes(changes)
        return changes

    def keeping(self, earlier: Report | str | Path, *, odds: float = CLEAR) -> Report:
        """These data under the plans of an earlier report, as far as they stand.

        Parameters
        ----------
        earlier : Report, or the path of a record
        odds : float
            As for `against`.

        Returns
        -------
        Report
            With the table of `against` as its `changes`.
        """
        before = report_of(earlier)
        changes = changes_of(self, before, odds)
        return Report(kept_plans(self, before, changes), self._options, changes)

    def one_plan(self, names: Iterable[Hashable] | None = None) -> Report:
        """Examine a group of like series under one plan: the one with the largest evidence summed over them.

        Parameters
        ----------
        names : iterable of names, optional
            The group; by default all series that could be checked.

        Returns
        -------
        Report
            The others stay as they are.

        Raises
        ------
        CheckError
            Where no plan is possible for all, or a series has no data.
        """
        members = group_of(self, names)
        steps = shared_steps(members)
        shared = {one.name: one.with_plan(steps, "group") for one in members}
        return Report((shared.get(one.name, one) for one in self), self._options)

    def __repr__(self) -> str:
        counts = pd.Series([one.verdict for one in self]).value_counts(sort=False)
        return f"<Report of {len(self)} series: {', '.join(f'{n} {verdict}' for verdict, n in counts.items())}>"

    def _shown(self) -> Report:
        """What cards are made of."""
        return self

    def _ipython_display_(self) -> None:
        from preflight_magic.present.widgets import show, show_changes

        show(self._shown())
        if self.changes is not None:
            show_changes(self.changes)
