from __future__ import annotations

import pytest
from IPython.core.error import UsageError

from preflight_magic.command_line import did_you_mean, label_of, listed, open_word, read_line, split_outside


@pytest.mark.parametrize(
    ("line", "words"),
    [
        ("--sea 12", "there is no option --sea; did you mean --season?"),
        ("-season 12", "there is no option -season; did you mean --season?"),
        ("--colour red", "there is no option --colour; %checkseries? shows them all."),
        ("--season", "--season needs a value; write --season N[,N]."),
        ("--season --quiet", "--season needs a value"),
        ("--season twelve", "--season twelve is not a whole number or a list"),
        ("--season 12,x", "--season 12,x is not a whole number or a list"),
        ("--horizon 1.5", "--horizon 1.5 is not a whole number; write --horizon N."),
        ("--horizon 6 --horizon 7", "--horizon is given twice"),
        ("--significance much", "--significance much is not a number such as 0.05"),
        ("--significance 5", "--significance 5 is not between 0 and 1"),
        ("--exclude ..2020", "--exclude ..2020 is not a span such as 2020-03..2020-06"),
        ("--exclude 2020-03..", "is not a span"),
        ("--only ''", "--only needs a value"),
        ("--time ''", "--time needs a value"),
        ("--only \"crew overtime", "a quote \" is not closed"),
        ("--quiet=yes", "--quiet takes no value."),
        ("--into 2nd", "--into 2nd is not a name that a variable can have"),
        ("--into class", "--into class is not a name that a variable can have"),
    ],
)  # fmt: skip
def test_bad_option_gets_one_sentence(line: str, words: str) -> None:
    with pytest.raises(UsageError) as caught:
        read_line(f"monthly {line}")
    message = str(caught.value)
    assert words in message
    assert "\n" not in message
    assert message.endswith((".", "?"))


def test_words_in_brackets_and_quotes_stay_together() -> None:
    line = read_line('f(a, "x --only y")[ 1 ] --only a --quiet + {"b": 2}')
    assert line.expression == 'f(a, "x --only y")[ 1 ] + {"b": 2}'
    assert line.options == {"--only": ["a"], "--quiet": True}


def test_list_items_lose_their_quotes() -> None:
    assert listed("a, 'b, c' ,\"d\",,") == ["a", "b, c", "d"]


def test_escaped_quote_does_not_end_its_word() -> None:
    assert split_outside(r'f("a \" b") c', " ") == [r'f("a \" b")', "c"]


@pytest.mark.parametrize(
    ("text", "word"),
    [("", ""), ("a b", "b"), ("a ", ""), ("a,b", "b"), ('a "b c', '"b c'), ('"a" b', "b"), ("f(a, b", "f(a, b")],
)
def test_open_word_is_what_is_being_typed(text: str, word: str) -> None:
    assert open_word(text) == word


def test_suggestions_are_the_likeliest() -> None:
    assert did_you_mean("pas", ["freight", "passengers", "passes"]) == "did you mean passengers or passes?"
    assert did_you_mean("pasengers", ["freight", "passengers"]) == "did you mean passengers?"
    assert did_you_mean("zebra", ["a"]) == "there is a."
    assert did_you_mean("zebra", range(9)) == "there are 0, 1, 2, 3 and 5 more."
    assert did_you_mean("zebra", []) == "there are none."


def test_label_is_the_one_that_is_written_so() -> None:
    assert label_of("2020", (2019, 2020)) == 2020
    assert label_of("2020", ("2020", 2020)) == "2020"
    assert label_of("2021", (2019, 2020)) == "2021"
