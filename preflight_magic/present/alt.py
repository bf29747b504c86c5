"""What the pictures show, in numbers, for those who do not see them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np
import pandas as pd

from preflight_magic.present import words
from preflight_magic.present.measures import root_text

if TYPE_CHECKING:
    from preflight_magic.present.cards import HalvesPicture, OverviewRow, Picture, PlanRow, ProofCard, RootsPicture


def before_after_alt(picture: Picture) -> str:
    """Range of both series, and the largest autocorrelation before and after."""
    noun, before = picture.noun, picture.before
    ends = f"{words.stamp(before.index[0], noun)} to {words.stamp(before.index[-1], noun)}"
    parts = [f"Series as given, {words.count_of(len(before), noun)} from {ends}: {_range(before)}."]
    missing = int(before.isna().sum())
    if missing:
        parts.append(f"{words.count_of(missing, 'value')} missing.")
    if picture.after is not None:
        parts.append(
            f"After the plan ({picture.plan}), {words.count_of(len(picture.after), 'value')}: {_range(picture.after)}."
        )
    if len(picture.correlogram_before):
        parts.append(_correlograms(picture))
    return " ".join(parts)


def _range(series: pd.Series) -> str:
    values = series.dropna()
    low, high = words.number(float(values.min())), words.number(float(values.max()))
    return f"least {low}, greatest {high}, mean {words.number(float(values.mean()))}"


def _correlograms(picture: Picture) -> str:
    lags = len(picture.correlogram_before)
    text = f"Correlogram to lag {lags}: as given largest {_largest(picture.correlogram_before)}"
    if picture.correlogram_after is not None:
        outside = int(np.sum(np.abs(picture.correlogram_after) > picture.band))
        text += f"; after, largest {_largest(picture.correlogram_after)}, {outside} of {lags} lags outside the band"
    return text + (f" of \u00b1{words.number(picture.band, 2)}." if math.isfinite(picture.band) else ".")


def _largest(correlogram: np.ndarray) -> str:
    if not np.isfinite(correlogram).any():
        return words.NONE
    place = int(np.nanargmax(np.abs(correlogram)))
    return f"{words.number(float(correlogram[place]), 2)} at lag {place + 1}"


def roots_alt(picture: RootsPicture) -> str:
    """Number of AR and MA roots, and the largest of each with its uncertainty and cycle."""
    parts = [f"Inverse roots of {picture.order}."]
    for part in ("AR", "MA"):
        roots = [root for root in picture.roots if root.part == part]
        if not roots:
            parts.append(f"No {part} roots.")
            continue
        largest = max(roots, key=lambda root: root.modulus)
        told = root_text(largest, picture.noun).removeprefix(f"{part} ")
        parts.append(f"{words.count_of(len(roots), f'{part} root')}, largest modulus {told}.")
    return " ".join(parts)


def plans_alt(rows: Sequence[PlanRow]) -> str:
    """Odds against the plans that come next to the best."""
    told = [f"{row.text}, {row.odds}{' (shown)' if row.shown else ''}" for row in rows[:4]]
    more = f"; and {len(rows) - 4} more" if len(rows) > 4 else ""
    return f"Odds of the best plan against each of {len(rows)} plans: {'; '.join(told)}{more}."


def halves_alt(picture: HalvesPicture) -> str:
    """Each moment in the first and in the second half, and how far apart they lie."""
    told = [
        f"{name} {words.number(first)} and {words.number(second)}, {words.number(z, 2)} standard errors apart"
        for name, first, second, z in picture.moments
    ]
    since = words.stamp(picture.second_from, picture.noun)
    return f"First half and second half (from {since}) of the transformed series: {'; '.join(told)}."


def proof_alt(proof: ProofCard) -> str:
    """Error of each forecast, and its range over the origins."""
    told = []
    for row in proof.rows[:6]:
        seen = [one for one in row.at_origins if math.isfinite(one)]
        spread = f" ({words.number(min(seen))} to {words.number(max(seen))})" if seen else ""
        told.append(f"{row.forecast} {words.number(row.error)}{spread}")
    return f"Mean absolute scaled errors, {proof.origins}: {'; '.join(told)}."


def spark_alts(row: OverviewRow) -> tuple[str, str]:
    """Ranges of both small pictures of a row; the second is empty where there is none."""
    before = _spark_alt(row.values)
    after = "" if row.after is None else f"after the plan: {_spark_alt(row.after)}"
    return (f"{row.span}: {before}" if before != "no picture" else before), after


def _spark_alt(values: np.ndarray) -> str:
    values = values[np.isfinite(values)]
    if len(values) < 2:
        return "no picture"
    low, high = words.number(float(values.min())), words.number(float(values.max()))
    first, last = words.number(float(values[0])), words.number(float(values[-1]))
    return f"from {first} to {last}, between {low} and {high}"
