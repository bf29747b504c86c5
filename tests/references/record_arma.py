"""Estimates and likelihoods of statsmodels for tests/kernels, recorded once.

Run ``python tests/references/record_arma.py`` in the root of the project, after record_arma.R.
Writes arma_statsmodels.csv beside this file, in the form of arma_r.csv and for the same models.
"""

from __future__ import annotations

import csv
import platform
from collections.abc import Iterator
from pathlib import Path

import numpy as np
import scipy
import statsmodels
from scipy.optimize import minimize
from statsmodels.tsa.arima.model import ARIMA

HERE = Path(__file__).parent
Model = tuple[str, tuple[int, ...], tuple[int, ...], bool]
FIELDS = "referee,series,p,d,q,P,D,Q,period,mean,quantity,value"


def lines(name: str) -> list[str]:
    """A record without its comments."""
    return [one for one in (HERE / name).read_text(encoding="utf-8").splitlines() if not one.startswith("#")]


def series() -> dict[str, np.ndarray]:
    """The recorded series by name, and the one that is differenced before."""
    found: dict[str, list[float]] = {}
    for row in csv.DictReader(lines("arma_series.csv")):
        found.setdefault(row["series"], []).append(float(row["value"] or "nan"))
    values = {name: np.array(one) for name, one in found.items()}
    deaths = values["USAccDeaths"]
    values["USAccDeaths differenced"] = np.diff(deaths[12:] - deaths[:-12])
    return values


def models() -> list[Model]:
    """Series, order, seasonal order and mean of the models that are not differenced inside."""
    found: dict[Model, None] = {}
    for row in csv.DictReader(lines("arma_r.csv")):
        order, seasonal = (
            tuple(int(row[key]) for key in keys) for keys in (("p", "d", "q"), ("P", "D", "Q", "period"))
        )
        if order[1] == 0:
            found[row["series"], order, seasonal, row["mean"] == "1"] = None
    return list(found)


def rows(model: Model, values: np.ndarray) -> Iterator[tuple[str, float]]:
    """Quantity and value at the maximum of the likelihood."""
    _, order, (P, D, Q, period), mean = model
    seasonal = (P, D, Q, period) if P + Q else (0, 0, 0, 0)
    scale = float(np.nanstd(values))  # the search goes on in numbers of order one
    centre = float(np.nanmean(values)) if mean else 0.0
    exact = ARIMA((values - centre) / scale, order=order, seasonal_order=seasonal, trend="c" if mean else "n")
    rough = exact.fit()
    found = minimize(
        lambda free: -exact.loglike(free, transformed=False),
        exact.untransform_params(rough.params),
        method="Nelder-Mead",
        options={"xatol": 1e-9, "fatol": 1e-12, "maxiter": 20_000, "maxfev": 20_000},
    )
    params = dict(zip(exact.param_names, exact.transform_params(found.x), strict=True))
    for name, value in params.items():
        if ".S.L" in name:
            kind, lag = name.split(".S.L")
            yield f"s{kind}{int(lag) // period}", value
        elif ".L" in name:
            yield name.replace(".L", ""), value
    if mean:
        yield "intercept", params["const"] * scale + centre
    yield "variance", params["sigma2"] * scale**2
    yield "log likelihood", -found.fun - np.isfinite(values).sum() * np.log(scale)


def main() -> None:
    """Write the record."""
    out = [
        f"# statsmodels {statsmodels.__version__}, scipy {scipy.__version__}, numpy {np.__version__}, "
        f"Python {platform.python_version()}. Recorded by record_arma.py.",
        FIELDS,
    ]
    every = series()
    for model in models():
        name, order, seasonal, mean = model
        head = ["statsmodels ARIMA", name, *map(str, (*order, *seasonal, int(mean)))]
        out += [",".join([*head, quantity, f"{value:.17g}"]) for quantity, value in rows(model, every[name])]
    (HERE / "arma_statsmodels.csv").write_text("\n".join(out) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
