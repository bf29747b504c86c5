"""The measures of a rung as labels and values, fit to be read."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Iterator, Mapping, Sequence
from typing import cast

import numpy as np
import pandas as pd

from preflight_magic.model import Root
from preflight_magic.present import words

LABELS: Mapping[str, str] = {
    "n": "observations",
    "kind": "calendar",
    "freq": "pandas frequency",
    "season_asked": "season given by the person",
    "asked": "season asked about",
    "presence_p": "p-value of a season",
    "presence_standardised": "p-value of a season, standardised to 100 values",
    "year": "steps a year",
    "year_standardised": "p-value of a yearly cycle, standardised to 100 values",
    "shift_f": "largest F of a level shift",
    "shift_t": "t of the level shift",
    "trend_t": "t of the trend",
    "differences": "differences, ordinary and seasonal",
    "d_shares": "evidence by number of differences",
    "season_shares": "evidence by kind of season",
    "shift_shares": "evidence for a level shift",
    "trend_shares": "evidence for a trend",
    "unit_interval": "all values between 0 and 1",
    "demand_interval": "mean interval between demands",
    "demand_variation": "squared coefficient of variation of demands",
    "psi_sum": "sum of absolute psi weights",
    "variance_implied": "variance the model implies",
    "variance_sample": "variance of the sample",
    "half_life": "half-life",
    "log_gain": "fall of \u22122 log likelihood with the log",
    "per_days": "fall of \u22122 log likelihood, values per day",
    "per_workdays": "fall of \u22122 log likelihood, values per workday",
    "unit": "better of the two",
    "pattern": "seasonal pattern beside it",
    "ma_at_one": "fall of log likelihood with the MA root at one",
    "seasonal_ma_at_one": "fall of log likelihood with the seasonal MA root at one",
    "share_more": "evidence for more differences than taken",
    "share_less": "evidence for fewer differences than taken",
    "share_fixed": "evidence for a fixed season or none",
    "share_wandering": "evidence for a wandering season",
    "smallest": "smallest value",
    "box_cox": "Box-Cox exponent",
    "box_cox_lower": "its lower bound",
    "box_cox_upper": "its upper bound",
    "guerrero": "Guerrero's exponent",
    "shift_first": "earliest date of the shift",
    "shift_last": "latest date of the shift",
    "shift_size": "size of the shift",
    "corner": "where the slope changes most",
    "corner_t": "t of the change of slope",
    "hegy_by_cycle": "p-values of HEGY by cycle",
    "canova_hansen_by_cycle": "p-values of Canova-Hansen by cycle",
}
"""Labels of measures that cannot be read from their key."""

_ANSWERS: Mapping[str, Mapping[str, str]] = {
    "season_shares": {"difference": "wandering", "fixed": "fixed pattern"},
    "trend_shares": {"second": "second difference"},
}
"""Names of answers that cannot be read without their question."""

_HIDDEN = frozenset({"shift_text"})
_TOLD = (
    str, bool, int, float, np.bool_, np.number, pd.Period, pd.Timestamp, dt.date, Mapping, np.ndarray, pd.Series,
    pd.Index, Sequence, frozenset, set,
)  # fmt: skip


def measure_rows(measures: Mapping[str, object], noun: str) -> Iterator[tuple[str, str]]:
    """Label and value of each measure; what is empty or no plain value is left out.

    Parameters
    ----------
    measures : Mapping
        Of a finding. Keys that end in ``_p`` are p-values, those with ``share`` or ``shares`` are shares.
    noun : str
        A step of the calendar.
    """
    for key, value in measures.items():
        if key in _HIDDEN or not isinstance(value, _TOLD):
            continue
        if isinstance(value, tuple | list) and value and all(isinstance(item, Root) for item in value):
            yield from root_rows(cast("Sequence[Root]", value), noun)
            continue
        told = _value(key, value, noun)
        if told not in ("", words.NONE):
            yield label(key), told


def label(key: str) -> str:
    """Label of a measure."""
    return LABELS.get(key, words.label_text(key))


def _value(key: str, value: object, noun: str) -> str:
    number = isinstance(value, float | int | np.number) and not isinstance(value, bool)
    if key.endswith(("_p", "_standardised")) and number:
        return words.p_value(float(cast(float, value)))
    if key.endswith("share") and number:
        return share(float(cast(float, value)))
    if key.startswith("share_") and number:
        return rough_share(float(cast(float, value)))
    if key.endswith("shares") and isinstance(value, Mapping):
        answers = _ANSWERS.get(key, {})
        told = ((words.plain(answers.get(str(name), str(name))), float(part)) for name, part in value.items())
        return ", ".join(f"{name}: {rough_share(part)}" for name, part in told)
    if key == "half_life" and number:
        return f"{words.number(float(cast(float, value)))} {words.plural(noun, float(cast(float, value)))}"
    return words.value_text(value, noun)


def share(value: float) -> str:
    """Share as percent: ``2.5 %``."""
    return words.NONE if math.isnan(value) else f"{words.number(100 * value, 2)} %"


def rough_share(value: float) -> str:
    """Share as whole percent, never nothing and never all: ``under 1 %``, ``74 %``, ``over 99 %``."""
    if math.isnan(value):
        return words.NONE
    if value < 0.01:
        return "under 1 %"
    return "over 99 %" if value > 0.99 else f"{100 * value:.0f} %"


def root_rows(roots: Sequence[Root], noun: str) -> Iterator[tuple[str, str]]:
    """One row a root; the roots of a seasonal polynomial share a row, since they share their modulus."""
    groups: dict[tuple[str, str], list[Root]] = {}
    for root in roots:
        place = f"{root.modulus:.6f}" if root.seasonal else repr(root)
        groups.setdefault((root.part, place), []).append(root)
    for (part, _), group in groups.items():
        if len(group) == 1:
            yield f"{part} root", root_text(group[0], noun).removeprefix(f"{part} ")
        else:
            one = root_text(group[0], noun).removeprefix(f"{part} ").split(",")[0]
            yield f"{part} seasonal roots", f"{one}, {len(group)} roots at the seasonal frequencies"


def root_text(root: Root, noun: str) -> str:
    """One inverse root: part, modulus with its uncertainty, and cycle."""
    spread = "" if math.isnan(root.standard_error) else f" \u00b1 {words.number(2 * root.standard_error, 2)}"
    cycle = "no cycle" if math.isinf(root.period) else f"a cycle of {words.number(root.period)} {words.plural(noun)}"
    return f"{root.part} {words.number(root.modulus)}{spread}, {cycle}"
