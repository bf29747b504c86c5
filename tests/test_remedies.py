"""Parameters of the check in a sentence, as a person types them."""

import pytest

from preflight_magic.intake.remedies import as_options


@pytest.mark.parametrize(
    ("sentence", "told"),
    [
        ("column 'month' holds the dates; pass time='month'.", "column 'month' holds the dates; pass --time month."),
        ("pass time='month of sailing'.", "pass --time 'month of sailing'."),
        ("give season=12 for months, or season=1 for none.", "give --season 12 for months, or --season 1 for none."),
        ("column 'season=12' is `pd.melt(frame, value='x')`", "column 'season=12' is `pd.melt(frame, value='x')`"),
        ("significance=0.5 is given.", "--significance 0.5 is given."),
    ],
)
def test_parameters_become_options(sentence: str, told: str) -> None:
    assert as_options(sentence) == told
