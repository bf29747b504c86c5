"""Numbers that are written as text: which code reads them."""

from __future__ import annotations

import re

import pandas as pd

_PLAIN = re.compile(r"\s*[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?\s*")
_THOUSANDS = re.compile(r"\s*[+-]?\d{1,3}([,' \u00a0\u202f]\d{3})*(\.\d+)?\s*")
_DECIMAL_COMMA = re.compile(r"\s*[+-]?\d+(,\d+)?\s*")
_PERCENT = re.compile(r"\s*[+-]?\d+(\.\d+)?\s*%\s*")
_UNIT = re.compile(r"\s*([€$£¥]|[A-Z]{3}|)\s*[+-]?(?:\d{1,3}(?:,\d{3})+|\d+)(?:\.\d+)?\s*([^\d\s.,+-]{0,8})\s*")
"""One number, and before it the sign or the three letters of a currency, or after it a unit."""


def reading(texts: pd.Series, code: str) -> str:
    """What to do about a column of text.

    Parameters
    ----------
    texts : Series of str, shape (n,)
        Without missing values.
    code : str
        Expression for the column.

    Returns
    -------
    str
        The end of a sentence, with code that turns the column into numbers where there is any.
    """
    forms = (
        (_PLAIN, code),
        (_THOUSANDS, f"{code}.str.replace(r'[^0-9.+-]', '', regex=True)"),
        (_DECIMAL_COMMA, f"{code}.str.replace(',', '.')"),
        (_PERCENT, f"{code}.str.rstrip('% ')"),
    )
    for form, source in forms:
        if all(form.fullmatch(str(one)) for one in texts):
            return f"convert it with `{code} = pd.to_numeric({source})`, or drop the column"
    parts = {match.groups() if (match := _UNIT.fullmatch(str(one))) else None for one in texts}
    if len(parts) == 1 and None not in parts:
        return f"convert it with `{code} = pd.to_numeric({forms[1][1]})`, or drop the column"
    if not any(_PLAIN.fullmatch(str(one)) for one in texts):
        return "drop the column, or pass it as `series` if it names the series"
    return f"convert it with `{code} = pd.to_numeric({code}, errors='coerce')`, which leaves out what is no number"
