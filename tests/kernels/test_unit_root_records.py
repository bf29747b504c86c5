"""ADF and KPSS against recorded statistics of R and of arch, on five open series."""

import pytest

from preflight_magic.kernels.unit_root import adf, kpss
from tests.references.records import of, unit_root_series

SERIES = unit_root_series()


def named(row: dict[str, str]) -> str:
    return " ".join(row[key] for key in ("series", "terms", "lags"))


@pytest.mark.parametrize("row", of("unit_root_r", "urca::ur.df"), ids=named)
def test_adf_is_that_of_urca(row: dict[str, str]) -> None:
    found = adf(SERIES[row["series"]], row["terms"], lags=int(row["lags"]))
    assert found is not None
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_r", "tseries::adf.test"), ids=named)
def test_adf_is_that_of_tseries(row: dict[str, str]) -> None:
    found = adf(SERIES[row["series"]], "ct", lags=int(row["lags"]))
    assert found is not None
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_arch", "ADF"), ids=lambda row: f"{named(row)} {row['rule']}")
def test_adf_search_is_that_of_arch(row: dict[str, str]) -> None:
    found = adf(SERIES[row["series"]], row["terms"], criterion=row["rule"].upper())
    assert found is not None
    assert found.lags == int(row["lags"])
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_r", "urca::ur.kpss"), ids=named)
def test_kpss_is_that_of_urca(row: dict[str, str]) -> None:
    found = kpss(SERIES[row["series"]], row["terms"], int(row["lags"]))
    assert found is not None
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_r", "tseries::kpss.test"), ids=named)
def test_kpss_is_that_of_tseries(row: dict[str, str]) -> None:
    found = kpss(SERIES[row["series"]], row["terms"], int(row["lags"]))
    assert found is not None
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)


@pytest.mark.parametrize("row", of("unit_root_arch", "KPSS"), ids=named)
def test_kpss_bandwidth_is_that_of_arch(row: dict[str, str]) -> None:
    found = kpss(SERIES[row["series"]], row["terms"])
    assert found is not None
    assert found.bandwidth == int(row["lags"])
    assert found.statistic == pytest.approx(float(row["statistic"]), rel=1e-6)
