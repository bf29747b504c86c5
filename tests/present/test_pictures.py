"""Pictures are PNG of the expected size, told in numbers beside them, and cheap."""

import os
import struct
import subprocess
import sys
import time
import zlib
from dataclasses import replace
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from preflight_magic.model import Difference, Log, RemoveShift, Root
from preflight_magic.plan.plan import Plan
from preflight_magic.present import make_cards, make_overview
from preflight_magic.present.alt import before_after_alt, halves_alt, plans_alt, proof_alt, roots_alt, spark_alts
from preflight_magic.present.cards import Picture, RootsPicture
from preflight_magic.present.figures import before_after
from preflight_magic.present.halves_figure import halves_picture
from preflight_magic.present.make_proof import hold_out, proof_card
from preflight_magic.present.plans_figure import plans_strip
from preflight_magic.present.proof_figure import errors_strip
from preflight_magic.present.proof_html import proof_html
from preflight_magic.present.roots_figure import roots_strip
from preflight_magic.present.sparks import spark
from tests.present.fakes import FakeReport, FakeSeries, roots, values


def size(png: bytes) -> tuple[int, int]:
    assert png.startswith(b"\x89PNG\r\n\x1a\n")
    return struct.unpack(">II", png[16:24])


def dots(png: bytes) -> np.ndarray:
    """Ink of a picture: opacity of each dot, in [0, 255]."""
    import io

    from PIL import Image

    with Image.open(io.BytesIO(png)) as image:
        assert image.mode == "LA"
        return np.asarray(image)[..., 1]


@pytest.fixture
def picture() -> Picture:
    made = make_cards.card(FakeSeries()).picture
    assert made is not None
    return made


@pytest.fixture
def strip() -> RootsPicture:
    made = make_cards.card(FakeSeries()).roots
    assert made is not None
    return made


def test_first_picture(picture: Picture) -> None:
    png = before_after(picture)
    assert size(png) == (1065, 432)
    ink = dots(png)
    assert ink[:3].max() == 0, "nothing touches the upper edge"
    assert (ink == 0).mean() > 0.8, "the background is transparent"
    assert (ink[:, 720:] > 0).any(), "the correlogram stands at the right"


def test_picture_without_steps_has_one_panel() -> None:
    picture = make_cards.card(FakeSeries(plan=Plan(), recommended=Plan())).picture
    assert picture is not None
    assert picture.after is None
    assert size(before_after(picture)) == (1065, 316)


def test_picture_of_a_series_that_cannot_be_checked() -> None:
    view = FakeSeries(problem="Column 'passengers' is constant.", verdict="infeasible", plan=Plan(), recommended=Plan())
    picture = make_cards.card(view).picture
    assert picture is not None
    assert size(before_after(picture)) == (1065, 316)
    assert before_after_alt(picture).startswith("Series as given, 120 months")


@pytest.mark.parametrize(
    "series",
    [
        pd.Series([5.0] * 30, index=pd.RangeIndex(30)),
        pd.Series([1.0, np.nan, 3.0, np.nan, 5.0] * 8, index=pd.date_range("2020-01-01", periods=40, freq="D")),
        pd.Series([1e300, -1e300] * 10, index=pd.period_range("1700", periods=20, freq="Y")),
    ],
)
def test_odd_series_can_be_drawn(series: pd.Series) -> None:
    empty = np.empty(0)
    assert size(before_after(Picture(series, None, empty, None, np.nan, 1, (), "step", ""))) == (1065, 316)


def test_shift_is_marked(picture: Picture) -> None:
    marked = replace(picture, shifts=(picture.before.index[60],))
    assert not np.array_equal(dots(before_after(picture)), dots(before_after(marked)))


def test_roots_strip(strip: RootsPicture) -> None:
    png = roots_strip(strip)
    assert size(png) == (1065, 273)
    fewer = roots_strip(replace(strip, roots=strip.roots[:1]))
    assert (dots(png) > 0).sum() > (dots(fewer) > 0).sum()


@pytest.mark.parametrize(
    "many", [(), (Root("AR", 1.3, np.inf, 0.1),), (Root("MA", 0.2, 365.25, np.inf), Root("AR", np.nan, 2.0, np.nan))]
)
def test_any_roots_can_be_drawn(strip: RootsPicture, many: tuple[Root, ...]) -> None:
    assert size(roots_strip(replace(strip, roots=many))) == (1065, 273)


def test_alt_texts_tell_the_numbers(picture: Picture, strip: RootsPicture) -> None:
    told = before_after_alt(picture)
    assert "120 months from 2014-05 to 2024-04" in told
    assert "2 values missing" in told
    least, greatest = values().min(), values().max()
    assert f"least {least:,.0f}, greatest {greatest:,.0f}" in told
    assert f"as given largest {picture.correlogram_before[0]:.2f} at lag 1" in told
    assert picture.correlogram_after is not None
    outside = int((np.abs(picture.correlogram_after) > picture.band).sum())
    assert f"{outside} of 25 lags outside the band of ±0.2" in told
    assert roots_alt(strip) == (
        "Inverse roots of ARMA(1,1)(0,1) at 12. 2 AR roots, largest modulus 0.8 ± 0.14, a cycle of 5.3 months. "
        "8 MA roots, largest modulus 0.95 ± 0.04, no cycle."
    )


def test_small_pictures() -> None:
    rng = np.random.default_rng(5)
    many = [values().to_numpy(), np.full(9, 2.0), np.array([np.nan, 1.0]), rng.normal(size=9000)]
    made = [spark(one) for one in many]
    assert [size(png) for png in made] == [(180, 42)] * 4
    inked = [(dots(png) > 0).sum() for png in made]
    assert inked[0] > 200
    assert inked[1] > 100
    assert inked[2] == 0
    row = make_overview.overview(FakeReport(FakeSeries())).rows[0]
    before, after = spark_alts(row)
    assert before.startswith("120 months, 2014-05 to 2024-04, 2 missing: from ")
    assert after.startswith("after the plan: from ")
    assert spark_alts(replace(row, after=None)) == (before, "")


def test_small_picture_rises_where_the_series_does() -> None:
    inked = dots(spark(np.arange(50.0))) > 60
    rows = [int(np.flatnonzero(inked[:, x]).mean()) for x in (5, 90, 175)]
    assert rows[0] > rows[1] > rows[2]
    gap = np.r_[np.arange(20.0), np.full(10, np.nan), np.arange(20.0)]
    assert not (dots(spark(gap)) > 0)[:, 80:100].any()


def test_plans_are_drawn_by_their_odds() -> None:
    rows = make_cards.card(FakeSeries()).plans
    png = plans_strip(rows)
    assert size(png)[0] == 1065
    assert size(plans_strip(rows * 5))[1] == size(plans_strip(rows * 9))[1], "no more than eight are drawn"
    assert plans_alt(rows) == (
        "Odds of the best plan against each of 3 plans: log, difference 12, difference 1, best (shown); "
        "log, difference 12, 4.1 to 1; log, remove pattern 12, difference 1, over 1,000 to 1."
    )


def test_errors_from_the_past_are_drawn_and_told() -> None:
    proof = proof_card(FakeSeries())
    assert proof.origins == "4 origins from 2021-04 to 2022-10, 12 months ahead"
    assert [(row.ratio, row.coverage, row.p) for row in proof.rows] == [
        ("1", "91\u00a0%", "–"),
        ("1.38", "86\u00a0%", "< 0.001"),
    ]
    assert size(errors_strip(proof))[0] == 1065
    unknown = replace(proof.rows[0], error=np.nan, at_origins=())
    assert size(errors_strip(replace(proof, rows=(unknown,))))[0] == 1065
    assert proof_alt(proof) == (
        "Mean absolute scaled errors, 4 origins from 2021-04 to 2022-10, 12 months ahead: "
        "the plan 0.8 (0.7 to 1); seasonal naive 1.1 (1 to 1.3)."
    )
    failed = replace(proof, rows=(), problem="Too short.")
    assert "Too short." in proof_html(failed)
    assert hold_out(proof, failed) == ()


def test_halves_are_drawn_and_told() -> None:
    halves = make_cards.card(FakeSeries()).halves
    assert halves is not None
    assert size(halves_picture(halves)) == (1065, 288)
    far = replace(halves, moments=(("mean", 1.0, 2.0, 40.0), ("variance", 1.0, 1.0, np.nan)))
    assert size(halves_picture(far)) == (1065, 288)
    assert halves_alt(halves) == (
        "First half and second half (from 2019-11) of the transformed series: mean 0.012 and 0.009, "
        "−0.41 standard errors apart; variance 0.0021 and 0.0052, 3.4 standard errors apart."
    )


def test_first_picture_is_fast(picture: Picture) -> None:
    before_after(picture)
    took = []
    for _ in range(5):
        start = time.process_time()  # of the processor, which other work on the machine does not change
        before_after(picture)
        took.append(time.process_time() - start)
    assert min(took) < 0.15


def test_pyplot_is_not_loaded() -> None:
    code = (
        "import sys; from fakes import FakeSeries; from preflight_magic.present import html, make_cards; "
        "assert 'matplotlib' not in sys.modules; html.card_html(make_cards.card(FakeSeries())); "
        "assert 'matplotlib.figure' in sys.modules; assert 'matplotlib.pyplot' not in sys.modules"
    )
    here = Path(__file__).parent
    paths = os.environ | {"PYTHONPATH": os.pathsep.join([str(here), str(here.parents[1])])}
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False, env=paths)
    assert done.returncode == 0, done.stderr


def test_png_is_whole(picture: Picture) -> None:
    png = before_after(picture)
    assert png.endswith(b"IEND" + struct.pack(">I", zlib.crc32(b"IEND")))


def test_shift_step_is_found_in_the_plan() -> None:
    at = values().index[60]
    view = FakeSeries(plan=Plan((), (Log(), Difference(1), RemoveShift(at))))
    picture = make_cards.card(view).picture
    assert picture is not None
    assert picture.shifts == (at,)
    assert len(roots()) == 10
