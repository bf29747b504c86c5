"""Reports saved as records, loaded and joined with their data again."""

from __future__ import annotations

import json
import pickle
from html import escape
from typing import Any

import numpy as np
import pandas as pd
import pytest

import preflight_magic as pf
from preflight_magic.present import html, make_cards, make_overview, text
from preflight_magic.record.loaded import LoadedReport, LoadedSeries
from tests.small_table import BAD, small_table


@pytest.fixture(scope="module")
def report() -> pf.Report:
    return pf.check(small_table(bad=True), progress=False)


@pytest.fixture
def loaded(report: pf.Report, tmp_path) -> LoadedReport:
    report.save(tmp_path / "last.json")
    return pf.load(tmp_path / "last.json")


# -------------------------------------------------------------------------------------------------- round trip
def test_all_but_the_data_comes_back(report, loaded):
    assert loaded.names == report.names
    pd.testing.assert_frame_equal(loaded.overview, report.overview)
    for one, two in zip(report, loaded, strict=True):
        assert isinstance(two, pf.SeriesReport)
        for name in ("name", "verdict", "plan", "recommended", "answer", "alternatives", "problem", "season", "noun",
                     "span", "fingerprint", "horizon", "methods", "chosen"):  # fmt: skip
            assert getattr(one, name) == getattr(two, name), name
        assert list(one.findings) == list(two.findings)
        for a, b in zip(one.findings.values(), two.findings.values(), strict=True):
            told = ("rung", "question", "verdict", "headline", "reason", "steps")
            assert [getattr(a, name) for name in told] == [getattr(b, name) for name in told]
            # by their text, since NaN differs from itself
            assert repr(a.tests) == repr(b.tests)
            assert {key: repr(a.measures[key]) for key in b.measures} == {k: repr(v) for k, v in b.measures.items()}
            assert a.measures.keys() - b.measures.keys() <= {"fit", "moments"}


def test_a_record_saved_again_is_the_same(report, loaded, tmp_path):
    loaded.save(tmp_path / "again.json")
    assert (tmp_path / "again.json").read_bytes() == (tmp_path / "last.json").read_bytes()


def test_the_file_is_plain_json_with_versions_and_without_data(report, loaded, tmp_path):
    text = (tmp_path / "last.json").read_text(encoding="ascii")

    def constant(word):
        raise AssertionError(word)

    told = json.loads(text, parse_constant=constant)
    assert told["format_version"] == 1
    assert told["package_version"] == pf.__version__
    assert len(text.splitlines()) == len(report) + 3
    assert report["cargo"].series.iloc[7].__repr__().strip("np.float64()") not in text


def test_options_come_back(tmp_path):
    frame = small_table().to_timestamp()
    options = {"season": 3, "horizon": 2, "significance": 0.1, "exclude": [("1995", "1996")], "only": ["cargo", "crew"]}
    report = pf.check(frame, progress=False, **options)
    report.save(tmp_path / "a.json")
    loaded = pf.load(tmp_path / "a.json")
    assert loaded.options == {**options, "season": (3,), "exclude": (("1995", "1996"),), "only": ("cargo", "crew")}
    joined = loaded.attach(frame)
    assert joined.names == ("cargo", "crew")
    pd.testing.assert_frame_equal(joined.overview, report.overview)
    assert joined["cargo"].horizon == loaded["cargo"].horizon == 2


@pytest.mark.parametrize(
    "names",
    [
        [("a", 1), ("a", 2), ("b", 1)],
        [2019, 2020, 2021],
        [pd.Timestamp("2020-01-01"), pd.Timestamp("2020-02-01", tz="Europe/Oslo"), pd.Period("2020-03", "M")],
        ['"', "\n\u2028</script><b>", "__import__('os').system('false')"],
        [0.5, None, "\ud800"],
    ],
)
def test_names_of_any_kind_come_back(names: list[Any], tmp_path):
    frame = small_table()
    frame.columns = pd.Index(names, tupleize_cols=False, dtype=object)
    report = pf.check(frame, progress=False)
    report.save(tmp_path / "a.json")
    loaded = pf.load(tmp_path / "a.json")
    assert list(loaded.names) == names
    assert list(loaded.attach(frame).names) == names


def test_a_name_that_json_cannot_hold_is_named(tmp_path):
    frame = small_table().rename(columns={"cargo": frozenset("ab")})
    with pytest.raises(pf.CheckError, match=r"frozenset.*rename it"):
        pf.check(frame, progress=False).save(tmp_path / "a.json")
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("freq", ["M", "Q", "W-WED", "D", "h"])
def test_every_kind_of_index(freq, tmp_path):
    index = pd.period_range("2020-01-01", periods=80, freq=freq)
    y = np.random.default_rng(5).standard_normal(80) + 6.0 * (np.arange(80) >= 40)
    for frame in (pd.DataFrame({"y": y}, index=index), pd.DataFrame({"y": y}, index=index.to_timestamp())):
        report = pf.check(frame, season=1, progress=False)
        assert any(isinstance(step, pf.RemoveShift) for step in report["y"].plan.steps)
        report.save(tmp_path / "a.json")
        loaded = pf.load(tmp_path / "a.json")
        assert loaded["y"].plan == report["y"].plan
        assert loaded.attach(frame)["y"].plan == report["y"].plan
        assert report["y"].code() in loaded["y"].code()


# -------------------------------------------------------------------------------------------- without the data
def test_everything_public_works_or_says_how_to_get_the_data(loaded):
    one = loaded["cargo"]
    for name in dir(pf.SeriesReport):
        if name.startswith("_"):
            continue
        message = message_of(one, name)
        assert message is None or ("'cargo'" in message and "attach(frame)" in message and message[-1] == "."), name


def message_of(one: pf.SeriesReport, name: str) -> str | None:
    """What a member says that cannot do its work; None where it can."""
    try:
        found = getattr(one, name)
        if callable(found) and name != "code":
            found(pf.Log())
    except pf.CheckError as error:
        return str(error)
    return None


def test_code_from_a_record_says_that_it_was_not_run(report, loaded):
    source = loaded["cargo"].code()
    assert source.startswith("# Written from a record")
    assert source.endswith(report["cargo"].code())
    assert loaded.code().startswith("# Written from a record")
    with pytest.raises(pf.CheckError, match="remarks"):
        loaded.code(BAD)


def test_loaded_reports_travel(loaded):
    copy = pickle.loads(pickle.dumps(loaded))
    pd.testing.assert_frame_equal(copy.overview, loaded.overview)
    assert isinstance(copy["cargo"], LoadedSeries)


def test_one_line_repr(loaded):
    assert repr(loaded).endswith("from a record without data>")
    assert "\n" not in repr(loaded) + repr(loaded["cargo"])


def test_a_loaded_report_shows_itself_without_its_data(report, loaded, tmp_path, capsys):
    loaded._ipython_display_()
    loaded["cargo"]._ipython_display_()
    out = capsys.readouterr().out
    assert "30 years, 1990 to 2019; the data are not in this record" in " ".join(out.split())
    loaded.save(tmp_path / "a.html")
    page = (tmp_path / "a.html").read_text(encoding="utf-8")
    for one in report:
        for finding in one.findings.values():
            assert escape(finding.headline[1:]) in page
    assert "which is a fault of this program" not in page


# ------------------------------------------------------------------------------------------------------ attach
def test_attached_report_is_the_one_that_was_saved(report, loaded):
    joined = loaded.attach(small_table(bad=True))
    pd.testing.assert_frame_equal(joined.overview, report.overview)
    assert joined["cargo"].code() == report["cargo"].code()
    pd.testing.assert_series_equal(joined["crew"].transformed, report["crew"].transformed)
    assert joined["fares"].leave_out is not None


def test_a_plan_chosen_by_hand_is_joined_as_it_was(tmp_path):
    report = pf.check(small_table(), progress=False)
    chosen = report["cargo"].put_in(pf.RemoveTrend()) if not report["cargo"].plan else report["cargo"].leave_out(0)
    changed = pf.Report([chosen, report["fares"]], report.options)
    changed.save(tmp_path / "a.json")
    loaded = pf.load(tmp_path / "a.json")
    assert loaded["cargo"].plan == chosen.plan != loaded["cargo"].recommended
    joined = loaded.attach(small_table())["cargo"]
    assert (joined.plan, joined.recommended, joined.answer) == (chosen.plan, chosen.recommended, chosen.answer)


def changed_table(kind: str) -> pd.DataFrame:
    frame = small_table(bad=True)
    if kind == "value":
        frame.iloc[9, 0] += 1e-9
    elif kind == "longer":
        frame = small_table(bad=True, n=31)
        frame.iloc[:30] = small_table(bad=True).to_numpy()
    elif kind == "shorter":
        frame = frame.iloc[:-1]
    elif kind == "later":
        frame = frame.iloc[1:]
    elif kind == "gone":
        frame = frame.drop(columns="cargo")
    else:
        frame["cargo"] = "text"
    return frame


@pytest.mark.parametrize(
    ("kind", "told"),
    [
        ("value", "its values are not those of the record"),
        ("longer", "31 steps where the record has 30; .* report.against"),
        ("shorter", "29 steps from 1990 where the record has 30 from 1990"),
        ("later", "29 steps from 1991 where"),
        ("gone", "no column 'cargo'"),
        ("text", "cannot be checked"),
    ],
)
def test_other_data_are_refused_by_name(loaded, kind, told):
    with pytest.raises(pf.CheckError, match=told) as caught:
        loaded.attach(changed_table(kind))
    assert "'cargo'" in str(caught.value)
    assert "\n" not in str(caught.value)


# ------------------------------------------------------------------------------------------------------ damage
def text_of(report: pf.Report, tmp_path) -> str:
    report.save(tmp_path / "a.json")
    return (tmp_path / "a.json").read_text(encoding="utf-8")


def refused(tmp_path, data: bytes | str) -> str:
    path = tmp_path / "damaged.json"
    path.write_bytes(data if isinstance(data, bytes) else data.encode())
    with pytest.raises(pf.CheckError) as caught:
        pf.load(path)
    message = str(caught.value)
    assert "damaged.json" in message
    assert "\n" not in message
    assert message.endswith(".")
    assert len(message) < 400
    return message


@pytest.mark.parametrize(
    ("data", "told"),
    [
        (b"", "not JSON"),
        (b"\x80\x04\x95.", "not text in UTF-8"),
        (b"<html>", "not JSON"),
        (b"{} {}", "extra data"),
        (b"[1, 2]", "no record"),
        (b'{"a": 1}', "no record"),
        (b"[" * 200_000 + b"]" * 200_000, "nested too deeply"),
        (b'{"a": NaN}', "NaN stands where a number is needed"),
        (b'{"a": 1e999}', "too large"),
        (b'{"a": ' + b"9" * 5000 + b"}", "too large"),
        (b'{"a": 1, "a": 2}', "key twice"),
        (b'{"format": "preflight_magic record"}', "no version"),
        (b'{"format": "preflight_magic record", "format_version": 7, "package_version": "9.9.9"}',
         "version 7, written by preflight_magic 9.9.9; .* reads version 1"),
        (b'{"format": "preflight_magic record", "format_version": true}', "is of"),
    ],
)  # fmt: skip
def test_what_is_no_record_is_told_apart(tmp_path, data, told):
    import re

    assert re.search(told, refused(tmp_path, data))


def test_too_large_a_file_is_refused_unread(tmp_path, monkeypatch):
    from preflight_magic.record import read

    monkeypatch.setattr(read, "LARGEST", 1000)
    assert "more than 1,000 bytes" in refused(tmp_path, b" " * 1001)


def test_an_absent_file_is_an_os_error(tmp_path):
    with pytest.raises(FileNotFoundError):
        pf.load(tmp_path / "none.json")


def change(text: str, path: str, value: object) -> str:
    told = json.loads(text)
    place: Any = told
    *parts, last = path.split(".")
    for part in parts:
        place = place[int(part)] if isinstance(place, list) else place[part]
    key: Any = int(last) if isinstance(place, list) else last
    if value is ...:
        del place[key]
    else:
        place[key] = value
    return json.dumps(told)


@pytest.mark.parametrize(
    ("path", "value", "told"),
    [
        ("series.0.plan", ..., "series[0] has no 'plan'"),
        ("series.0.more", 1, "series[0] has 'more', which is not known"),
        ("series.0", [], "series[0] is not an object"),
        ("series", {}, "series is not a list"),
        ("series", [], "series is empty"),
        ("series.0.name", [1], "series[0].name cannot be a name"),
        ("series.0.name", "fares", "the name 'fares', which another series has too"),
        ("series.0.verdict", "fine", "series[0].verdict is 'fine', not one of"),
        ("series.0.verdict", "infeasible", "does not follow from the findings"),
        ("series.0.chosen", "kept", "does not follow from the plans"),
        ("series.0.plan.steps", [{"step": "Eval", "code": "1"}], "is 'Eval', not one of PerDay"),
        ("series.0.plan.steps", [{"step": "Difference", "lag": 0}], "lag is not a whole number of at least 1"),
        ("series.0.plan.steps", [{"step": "Difference", "lag": True}], "lag is not a whole number"),
        ("series.0.plan.steps", [{"step": "Difference"}], "has no 'lag'"),
        ("series.0.plan.steps", [{"step": "Log"}, {"step": "Power", "exponent": 2, "offset": 0}], "one of Log, Power"),
        ("series.0.plan.steps", [{"step": "PerDay", "unit": "eval"}], "unit is 'eval'"),
        ("series.0.plan.steps", [{"step": "RemoveShift", "at": "2020"}], "no stamp"),
        ("series.0.plan.steps", [{"step": "RemoveShift", "at": {"period": 1, "freq": "!"}}], "frequency"),
        ("series.0.span.n", -1, "span.n is not a whole number"),
        ("series.0.span.n", 0, "span does not agree with itself"),
        ("series.0.season", [], "season is empty"),
        ("series.0.calendar.freq", "1;2", "no frequency"),
        ("series.0.settings.significance", 7, "is 7, not between 0 and 1"),
        ("series.0.alternatives.0.below", "x", "below is not a number"),
        ("series.0.findings.0.tests", 5, "tests is not a list"),
        ("series.0.findings.0.rung", "values", "another finding"),
        ("series.0.findings.0.rung", "x", "lack time index or values"),
        ("series.0.findings.0.measures", {"shares": 3}, "not a share for each answer"),
        ("series.0.findings.0.measures", {"roots": 3}, "not a row of roots"),
        ("options", {"pool": 3}, "no option of a check"),
        ("options", 3, "options is not an object"),
    ],
)
def test_each_kind_of_damage_is_told_with_its_place(report, tmp_path, path, value, told):
    assert told in refused(tmp_path, change(text_of(report, tmp_path), path, value))


HOSTILE = (
    "<script>alert(1)</script>", "__import__('os').system('touch owned')", "\x00\n\r", "\ud800", "a" * 5000, "{x!r}",
    -1, 0, 2**62, 1e308, None, True, [], {}, [[[[]]]], {"tuple": []}, {"float": "nan"}, {"period": 5, "freq": "D"},
)  # fmt: skip


def mutated(told: Any, rng: np.random.Generator) -> None:
    """Change one place of a record: another value, a key less, a value twice, two values exchanged."""
    places: list[tuple[Any, Any]] = []
    waiting = [told]
    while waiting:
        one = waiting.pop()
        keys = list(one) if isinstance(one, dict) else range(len(one))
        places += [(one, key) for key in keys]
        waiting += [one[key] for key in keys if isinstance(one[key], dict | list)]
    box, key = places[rng.integers(len(places))]
    kind = rng.integers(4)
    if kind == 0:
        del box[key]
    elif kind == 1:
        other, name = places[rng.integers(len(places))]
        box[key] = json.loads(json.dumps(other[name]))
    else:
        box[key] = HOSTILE[rng.integers(len(HOSTILE))]


def used(loaded: LoadedReport) -> None:
    """Everything that shows a loaded report."""
    repr(loaded)
    assert len(loaded.overview) == len(loaded)
    shown = loaded._shown()
    page = html.page(shown)
    assert "<script>alert(1)" not in page
    text.overview_text(make_overview.overview(shown))
    for one in shown:
        text.card_text(make_cards.card(one))
    for one in loaded:
        for ask in (lambda one=one: one.answer, one.code, lambda one=one: repr(one), lambda one=one: one.horizon):
            try:
                ask()
            except pf.CheckError:
                continue


def test_random_damage_gives_check_errors_and_nothing_else(report, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    record = text_of(report, tmp_path)
    refusals, seed = 0, 4711
    rng = np.random.default_rng(seed)
    for _ in range(100):
        told = json.loads(record)
        for _ in range(rng.integers(1, 4)):
            mutated(told, rng)
        (tmp_path / "b.json").write_text(json.dumps(told), encoding="utf-8")
        try:
            used(pf.load(tmp_path / "b.json"))
        except pf.CheckError:
            refusals += 1
    assert refusals > 30
    assert not (tmp_path / "owned").exists()


def test_a_record_cut_or_with_flipped_bytes_is_refused_or_read(report, tmp_path):
    data = bytearray(text_of(report, tmp_path).encode())
    rng = np.random.default_rng(99)
    for i in range(80):
        damaged = bytearray(data[: rng.integers(len(data))] if i % 2 else data)
        for at in rng.integers(len(damaged), size=3) if i % 2 == 0 else ():
            damaged[at] = rng.integers(256)
        (tmp_path / "b.json").write_bytes(damaged)
        try:
            used(pf.load(tmp_path / "b.json"))
        except pf.CheckError as error:
            assert "\n" not in str(error)  # noqa: PT017
        else:
            assert i % 2 == 0
