"""Whether what a person reads is a sentence."""

from __future__ import annotations

import re


def assert_reads_well(text: str, *, whole: bool = True) -> None:
    """A text of whole sentences, or with ``whole=False`` a few words; no number that is none, no stray signs."""
    assert text == text.strip()
    assert text
    assert not re.search(r"(?i:\bnan\b|\binf\b)|\bNone\b|<NA>|<NaT>|NaT|\{|\}|  |\.\.| [.,:;]", text), text
    if whole:
        assert text[-1] == ".", text
        assert text[0] == text[0].upper(), text
        # A small letter after a full stop, where the stop is not that of a number.
        assert not re.search(r"[.] [a-z]", text), text
