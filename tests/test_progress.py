"""How far long work has come."""

from __future__ import annotations

import pytest

from preflight_magic import progress as telling
from preflight_magic.progress import Tally, duration, follow


@pytest.fixture
def clock(monkeypatch):
    """Time that passes only when told."""

    class Clock:
        now = 100.0

    monkeypatch.setattr(telling, "monotonic", lambda: Clock.now)
    return Clock


def work(clock, count, seconds):
    for item in range(count):
        clock.now += seconds
        yield item


def test_items_are_handed_on_in_order(clock):
    for progress in (None, True, False, lambda done, total: None):
        assert list(follow(work(clock, 4, 1.0), 4, progress)) == [0, 1, 2, 3]


def test_callable_is_told_of_every_item(clock):
    told = []
    for item in follow(work(clock, 3, 1.0), 3, lambda *given: told.append(given)):
        # Each item is done before it is handed on.
        assert told[-1] == (item + 1, 3)
    assert told == [(1, 3), (2, 3), (3, 3)]


def test_false_shows_nothing(clock, capsys):
    list(follow(work(clock, 50, 10.0), 50, False))
    assert capsys.readouterr() == ("", "")


def test_short_work_shows_nothing_unasked(clock, capsys):
    list(follow(work(clock, 20, 0.1), 20, None))
    assert capsys.readouterr() == ("", "")


def test_long_work_is_shown_unasked(clock, capsys):
    list(follow(work(clock, 20, 1.0), 20, None))
    shown = capsys.readouterr()
    assert shown.out == ""
    assert "\r1 of 20 series checked, 19 s left" in shown.err
    assert "\r20 of 20 series checked, 0 s left" in shown.err
    assert shown.err.endswith("\n")


def test_short_work_is_shown_when_asked(clock, capsys):
    list(follow(work(clock, 2, 0.5), 2, True))
    assert "2 of 2 series checked" in capsys.readouterr().err


def test_pace_is_that_of_the_work_and_not_of_what_is_handed_on(clock, capsys):
    tally = Tally(wanted=60)

    def from_a_pool():
        # The first forty come from a cache; of the others half are done when the first is handed on.
        yield from range(40)
        clock.now += 30.0
        tally.finished = 30
        yield from range(60)

    list(follow(from_a_pool(), 100, None, tally))
    first = capsys.readouterr().err.split("\r")[1]
    assert first.strip() == "41 of 100 series checked, 30 s left"


@pytest.mark.parametrize(
    ("seconds", "told"), [(0.2, "0 s"), (99.4, "99 s"), (99.6, "2 min"), (3600.0, "60 min"), (12000.0, "3 h 20 min")]
)
def test_time_is_told_briefly(seconds, told):
    assert duration(seconds) == told


def test_line_is_not_written_too_often(clock, capsys):
    list(follow(work(clock, 1000, 0.01), 1000, True))
    assert capsys.readouterr().err.count("\r") < 80


def test_line_is_ended_when_work_fails(clock, capsys):
    def failing():
        yield from work(clock, 3, 5.0)
        raise RuntimeError("stopped")

    with pytest.raises(RuntimeError, match="stopped"):
        list(follow(failing(), 30, True))
    assert capsys.readouterr().err.endswith("\n")


def test_nothing_to_do(capsys):
    assert list(follow([], 0, True)) == []
    assert capsys.readouterr().err == ""
