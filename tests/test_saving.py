"""Reports written to files, whole or not at all."""

from __future__ import annotations

import stat

import pytest

import preflight_magic as pf
from preflight_magic import saving
from tests.small_table import small_table


@pytest.fixture(scope="module")
def report():
    return pf.check(small_table(bad=True), progress=False)


def test_code_is_saved(report, tmp_path):
    path = tmp_path / "plans.py"
    report.save(str(path))
    assert path.read_text(encoding="utf-8") == report.code()
    assert [one.name for one in tmp_path.iterdir()] == ["plans.py"]


def test_page_is_saved_self_contained(report, tmp_path):
    path = tmp_path / "report.html"
    report.save(path)
    page = path.read_text(encoding="utf-8")
    assert page.lower().lstrip().startswith("<!doctype html>")
    assert all(str(name) in page for name in report.names)
    assert 'src="http' not in page
    assert "<link" not in page


@pytest.mark.parametrize("name", ["report.xlsx", "report", "report.HTML.txt"])
def test_other_suffixes_are_refused_with_what_to_use(report, tmp_path, name):
    with pytest.raises(pf.CheckError, match=r"\.html") as caught:
        report.save(tmp_path / name)
    assert name in str(caught.value)
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("name", ["plans.py", "report.html", "record.json"])
def test_missing_folder_is_named(report, tmp_path, name):
    with pytest.raises(pf.CheckError, match="harbour"):
        report.save(tmp_path / "harbour" / name)


@pytest.mark.parametrize("name", ["plans.py", "record.json"])
@pytest.mark.parametrize("where", ["open", "fdopen", "fsync", "replace"])
def test_failure_leaves_the_old_file(report, tmp_path, monkeypatch, where, name):
    path = tmp_path / name
    path.write_text("old", encoding="utf-8")

    def fail(*given, **named):
        raise OSError("no space left")

    monkeypatch.setattr(saving.os, where, fail)
    with pytest.raises(OSError, match="no space left"):
        report.save(path)
    monkeypatch.undo()
    assert path.read_text(encoding="utf-8") == "old"
    assert [one.name for one in tmp_path.iterdir()] == [name]


def test_a_kill_leaves_the_old_file(report, tmp_path, monkeypatch):
    path = tmp_path / "record.json"
    path.write_text("old", encoding="utf-8")
    monkeypatch.setattr(saving.os, "fsync", lambda handle: (_ for _ in ()).throw(KeyboardInterrupt))
    with pytest.raises(KeyboardInterrupt):
        report.save(path)
    assert path.read_text(encoding="utf-8") == "old"


def test_permissions_and_links_stay(report, tmp_path):
    path, link = tmp_path / "record.json", tmp_path / "last.json"
    path.write_text("old", encoding="utf-8")
    path.chmod(0o640)
    link.symlink_to(path)
    report.save(link)
    assert link.is_symlink()
    assert stat.S_IMODE(path.stat().st_mode) == 0o640
    assert pf.load(path).names == report.names


def test_a_new_file_has_the_permissions_of_any_other(report, tmp_path):
    (tmp_path / "any").touch()
    report.save(tmp_path / "record.json")
    assert (tmp_path / "record.json").stat().st_mode == (tmp_path / "any").stat().st_mode


def test_old_file_is_replaced_with_the_same_line_ends(report, tmp_path):
    path = tmp_path / "plans.py"
    path.write_text("old", encoding="utf-8")
    report.save(path)
    assert b"\r" not in path.read_bytes()
    assert path.read_text(encoding="utf-8") == report.code()
