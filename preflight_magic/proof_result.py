"""What a proof found: errors of forecasts from past origins, and a sentence for each step."""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import dataclass, field

import pandas as pd

from preflight_magic.model import Stamp


@dataclass(frozen=True)
class ProofRow:
    """Errors of one way to forecast.

    Attributes
    ----------
    forecast : str
        ``the plan``, ``without log``, ``no plan``, ``runner-up: ...``, ``naive``, ``seasonal naive``.
    mase, rmsse : float
        Mean absolute and root mean squared scaled error, over origins and steps; without unit.
    coverage : float
        Share of the values inside the 90 % interval.
    ratio : float
        MASE over that of the plan, at the origins where both could be computed.
    p_value : float
        Of the Diebold-Mariano test against the plan; NaN where there are too few origins.
    origins : int
        Origins where it could be computed.
    """

    forecast: str
    mase: float
    rmsse: float
    coverage: float
    ratio: float
    p_value: float
    origins: int


@dataclass(frozen=True)
class Proof:
    """Forecasts of a series from past origins. It decides nothing.

    Attributes
    ----------
    name : Hashable
        Of the series.
    horizon : int
        Steps ahead.
    origins : tuple of Stamp
        Last stamp of each training part.
    rows : tuple of ProofRow
        The plan first.
    by_origin : Mapping from forecast to tuple of float
        Mean absolute scaled error at each origin, NaN where it could not be computed.
    sentences : tuple of str
        One for each step, and one for the naive forecasts.
    problem : str or None
        Why nothing could be computed.
    """

    name: Hashable
    horizon: int
    origins: tuple[Stamp, ...] = ()
    rows: tuple[ProofRow, ...] = ()
    by_origin: Mapping[str, tuple[float, ...]] = field(default_factory=dict)
    sentences: tuple[str, ...] = ()
    problem: str | None = None

    @property
    def table(self) -> pd.DataFrame:
        """One row a forecast; columns MASE, RMSSE, coverage, ratio, p_value, origins."""
        columns = ["MASE", "RMSSE", "coverage", "ratio", "p_value", "origins"]
        rows = [(row.mase, row.rmsse, row.coverage, row.ratio, row.p_value, row.origins) for row in self.rows]
        index = pd.Index([row.forecast for row in self.rows], name="forecast", dtype="object")
        kinds = {name: "int64" if name == "origins" else "float64" for name in columns}
        return pd.DataFrame(rows, index=index, columns=columns).astype(kinds)

    @property
    def errors(self) -> pd.DataFrame:
        """Mean absolute scaled error, one row an origin and one column a forecast."""
        index = pd.Index(list(self.origins), name="origin")
        return pd.DataFrame({name: list(values) for name, values in self.by_origin.items()}, index=index)

    def __str__(self) -> str:
        return self.problem or "\n".join(self.sentences)

    def __repr__(self) -> str:
        if self.problem is not None:
            return f"<Proof of {self.name!r}: {self.problem}>"
        plan = self.rows[0]
        return (
            f"<Proof of {self.name!r}: {len(self.origins)} origins, {self.horizon} steps ahead, MASE of the plan "
            f"{plan.mase:.3g}>"
        )
