"""Simulate a few cells of each table again, with another seed and few replications."""

from collections.abc import Callable

import numpy as np
import pytest

from preflight_magic.kernels.phillips_perron import table_lags
from preflight_magic.kernels.response_surfaces import lower_tail
from preflight_magic.kernels.tables import read
from tests.simulation import (
    df_gls_table,
    phillips_perron_table,
    surfaces,
    union_of_rejections_table,
    zivot_andrews_table,
)

REPLICATIONS = 3000
SAMPLE = [
    *(("df_gls", terms, n, lags) for terms in ("c", "ct") for n, lags in ((30, 0), (30, 6), (60, 3), (120, 10))),
    *(("zivot_andrews", model, n, 0) for model in ("level", "trend", "both") for n in (24, 60, 130)),
    *(("union_of_rejections", "four tests", n, 0) for n in (30, 130)),
    *(("phillips_perron", terms, n, width) for terms in phillips_perron_table.TERMS for n, width in ((30, 4), (90, 0))),
    *(("phillips_perron", f"{terms} automatic", n, 0) for terms in phillips_perron_table.TERMS for n in (30, 130)),
]
DRAW: dict[str, Callable[[str, int, int, int, int], np.ndarray]] = {
    "df_gls": df_gls_table.draw,
    "zivot_andrews": zivot_andrews_table.draw,
    "union_of_rejections": union_of_rejections_table.draw,
    "phillips_perron": phillips_perron_table.draw,
}


@pytest.mark.parametrize(("table", "case", "n", "lags"), SAMPLE)
def test_a_cell_simulated_again_has_uniform_p_values(table: str, case: str, n: int, lags: int) -> None:
    found = DRAW[table](case, n, lags, REPLICATIONS, 4711)
    place = table_lags(lags, n) if table == "phillips_perron" else lags
    p_values = np.array([lower_tail(float(one), table, case, n, place)[0] for one in found])
    for level in (0.01, 0.05, 0.1, 0.25, 0.5, 0.75, 0.95):
        error = np.sqrt(level * (1.0 - level) / REPLICATIONS)
        # Beside Monte Carlo error a surface may be wrong by a twentieth of the level in a short series.
        assert abs(np.mean(p_values <= level) - level) < 3.5 * error + 0.05 * min(level, 1.0 - level)


@pytest.mark.parametrize("table", sorted(DRAW))
def test_header_says_how_to_make_the_table_again(table: str) -> None:
    header = [
        line
        for line in (surfaces.TABLES / f"{table}.csv").read_text(encoding="utf-8").splitlines()
        if line.startswith("#")
    ]
    told = " ".join(header)
    assert f"Seed {surfaces.SEED}, {surfaces.REPLICATIONS} replications" in told
    assert f"python -m tests.simulation.{table}_table" in told
    rows = read(table)
    for case in {row["case"] for row in rows}:
        assert tuple(float(row["level"]) for row in rows if row["case"] == case) == surfaces.LEVELS


def test_the_sample_is_one_of_each_case() -> None:
    for table in DRAW:
        assert {case for name, case, _, _ in SAMPLE if name == table} == {row["case"] for row in read(table)}


def test_generators_agree_with_the_package() -> None:
    """The statistics that the tables are made of are those that the package computes."""
    from preflight_magic.kernels.df_gls import df_gls
    from preflight_magic.kernels.phillips_perron import phillips_perron
    from preflight_magic.kernels.union_of_rejections import union_of_rejections
    from preflight_magic.kernels.zivot_andrews import zivot_andrews

    seed, n = 5, 40
    walks = np.concatenate(list(surfaces.random_walks(n, 6, seed)))
    for terms in ("c", "ct"):
        for lags in (0, 4):
            ours = [df_gls(y, terms, lags=lags) for y in walks]
            drawn = df_gls_table.draw(terms, n, lags, 6, seed)
            np.testing.assert_allclose([one.statistic for one in ours if one], drawn, rtol=1e-8)
    for model in ("level", "trend", "both"):
        broken = [zivot_andrews(y, model, lags=0) for y in walks]
        drawn = zivot_andrews_table.draw(model, n, 0, 6, seed)
        np.testing.assert_allclose([one.statistic for one in broken if one], drawn, rtol=1e-8)
    for terms in ("n", "c", "ct", "ctt"):
        for case, width in ((terms, 3), (f"{terms} automatic", "newey-west")):
            corrected = [phillips_perron(y, terms, width) for y in walks]
            drawn = phillips_perron_table.draw(case, n, 3, 6, seed)
            np.testing.assert_allclose([one.statistic for one in corrected if one], drawn, rtol=1e-8)
    union = [union_of_rejections(y, lags=0) for y in walks]
    drawn = union_of_rejections_table.draw("four tests", n, 0, 6, seed)
    np.testing.assert_allclose([-one.statistic for one in union if one], drawn, rtol=1e-8)


@pytest.mark.parametrize(("columns", "published"), [((0, 1), 1.095), ((1, 3), 1.058)])
def test_unions_of_two_need_the_published_stretch(columns: tuple[int, int], published: float) -> None:
    # Harvey, Leybourne and Taylor (2009), Econometric Theory 25: at 5 % the critical values of DF-GLS with and without
    # a line are stretched by 1.095, those of DF-GLS and ADF with a line by 1.058 (large samples; from memory).
    largest = union_of_rejections_table.draw_ratios(500, 10_000, 3)[:, columns].max(axis=1)
    rejected = np.mean(largest > published)
    assert abs(rejected - 0.05) < 3.0 * np.sqrt(0.0475 / 10_000)
