"""Statistics of the Python library arch for tests/kernels, recorded once.

Run ``python tests/references/record_unit_root.py`` in the root of the project, after record_unit_root.R; needs arch.
Writes unit_root_arch.csv beside this file.
"""

from __future__ import annotations

import platform
import warnings
from collections.abc import Iterator
from pathlib import Path

import arch
import numpy as np
import statsmodels
from arch.unitroot import ADF, DFGLS, KPSS, PhillipsPerron, ZivotAndrews
from arch.unitroot.unitroot import mackinnoncrit, za_critical_values

HERE = Path(__file__).parent


def series() -> dict[str, np.ndarray]:
    """The recorded series by name."""
    found: dict[str, list[float]] = {}
    for line in (HERE / "unit_root_series.csv").read_text(encoding="utf-8").splitlines():
        if not line.startswith(("#", "series,")):
            name, value = line.split(",")
            found.setdefault(name, []).append(float(value))
    return {name: np.array(values) for name, values in found.items()}


def rows(name: str, y: np.ndarray) -> Iterator[tuple[object, ...]]:
    """Referee, series, terms, rule, lags, statistic."""
    for terms in ("n", "c", "ct", "ctt"):
        for rule in ("aic", "bic"):
            one = ADF(y, trend=terms, method=rule)
            yield "ADF", name, terms, rule, one.lags, one.stat
        for lags in (0, 4, None):
            one = PhillipsPerron(y, trend=terms, lags=lags) if terms != "ctt" else None
            if one is not None:
                yield "PhillipsPerron", name, terms, "default" if lags is None else "given", one.lags, one.stat
    for terms in ("c", "ct"):
        for rule in ("aic", "bic"):
            one = DFGLS(y, trend=terms, method=rule)
            yield "DFGLS", name, terms, rule, one.lags, one.stat
        one = KPSS(y, trend=terms)
        yield "KPSS", name, terms, "auto", one.lags, one.stat
    for terms in ("c", "ct"):
        one = ZivotAndrews(y, trend=terms)
        yield "ZivotAndrews", name, terms, "aic", one.lags, one.stat


def critical() -> Iterator[tuple[object, ...]]:
    """Critical values: referee, terms, length, level, value; length inf for large samples."""
    for terms in ("c", "ct"):
        for nobs in (50, 100, 200, 500, np.inf):
            for level, value in zip(("1%", "5%", "10%"), mackinnoncrit(1, terms, nobs, "dfgls"), strict=True):
                yield "DFGLS", "", terms, level, nobs, value
    for terms in ("c", "ct", "t"):
        table = za_critical_values[terms]
        for level in (1, 5, 10):
            yield "ZivotAndrews", "", terms, f"{level}%", np.inf, np.interp(level, table[:, 0], table[:, 1])


def main() -> None:
    """Write the record."""
    warnings.simplefilter("ignore", DeprecationWarning)  # announces an earlier choice of bandwidth
    lines = [
        f"# arch {arch.__version__}, statsmodels {statsmodels.__version__}, numpy {np.__version__}, "
        f"Python {platform.python_version()}. Recorded by record_unit_root.py.",
        "referee,series,terms,rule,lags,statistic",
    ]
    for name, y in series().items():
        lines += [",".join([*map(str, row[:-1]), f"{row[-1]:.17g}"]) for row in rows(name, y)]
    lines += [",".join(["critical " + str(row[0]), *map(str, row[1:-1]), f"{row[-1]:.17g}"]) for row in critical()]
    (HERE / "unit_root_arch.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
