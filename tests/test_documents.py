"""What the documents say is what the package does: options, names, examples, files, versions."""

from __future__ import annotations

import inspect
import os
import re
import stat
import subprocess
import sys
import tomllib
import types
from collections.abc import Iterator
from importlib import metadata
from pathlib import Path
from typing import get_args

import numpy as np
import pandas as pd
import pytest
from IPython.core.interactiveshell import InteractiveShell
from traitlets.config import Config

import preflight_magic as pf
from preflight_magic.batch import check
from preflight_magic.command_line import OPTIONS
from preflight_magic.ladder import ladder
from preflight_magic.model import Calendar, Step, TimeSeries, Verdict
from preflight_magic.policy import Thresholds
from preflight_magic.rungs.contract import Context, Rung

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DEVELOPERS = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
DOCUMENTS = {"README.md": README, "DEVELOPERS.md": DEVELOPERS}


def blocks(document: str, language: str) -> list[str]:
    """Code blocks of one language."""
    return re.findall(rf"^```{language}\n(.*?)^```$", document, flags=re.MULTILINE | re.DOTALL)


def table(document: str, heading: str) -> list[list[str]]:
    """Rows of the table whose first column is headed so."""
    lines = document.splitlines()
    start = next(i for i, line in enumerate(lines) if line.startswith(f"| {heading} |"))
    rows = []
    for line in lines[start + 2 :]:
        if not line.startswith("|"):
            break
        rows.append([one.strip() for one in line.strip("|").split("|")])
    return rows


def _anchor(heading: str) -> str:
    """How a link names a heading."""
    return re.sub(r"[^\w\- ]", "", heading.lower()).replace(" ", "-")


def code_words(text: str) -> list[str]:
    return re.findall(r"`([^`\n]+)`", text)


# --------------------------------------------------------------------------------------------------- README
def test_the_readme_is_short_and_begins_with_the_job() -> None:
    assert len(README.splitlines()) < 250
    title, job, *_ = [part for part in README.split("\n\n") if part.strip()]
    assert title.startswith("# preflight_magic")
    assert len(job) > 300
    assert not job.startswith(("#", "```", "|", "!"))


def test_the_readme_has_every_option_as_the_magic_reads_it() -> None:
    told = {row[0].strip("`"): row[1].strip("`") for row in table(README, "option")}
    assert told == {option.name: option.form for option in OPTIONS}


@pytest.mark.parametrize("document", DOCUMENTS)
def test_no_document_names_an_option_that_does_not_exist(document: str) -> None:
    named = [word for word in code_words(DOCUMENTS[document]) if word.startswith("--")]
    lines = [line for line in DOCUMENTS[document].splitlines() if "%checkseries" in line]
    used = {found for text in [*named, *lines] for found in re.findall(r"--[a-z-]+", text)}
    assert used - {"--allow-root"} <= {option.name for option in OPTIONS}


def test_the_readme_has_every_parameter_of_check() -> None:
    told = [name for row in table(README, "parameter") for name in code_words(row[0])]
    assert sorted(told) == sorted(inspect.signature(check).parameters)


def test_the_readme_explains_every_verdict() -> None:
    assert [row[0].strip("`") for row in table(README, "verdict")] == list(get_args(Verdict))


def test_the_readme_has_every_rung_with_its_question_in_order() -> None:
    assert [row[:2] for row in table(README, "rung")] == [[rung.name, rung.question] for rung in ladder()]


def test_the_readme_names_every_step() -> None:
    told = next(line for line in README.splitlines() if line.startswith("A **step**"))
    assert code_words(told)[: len(get_args(Step))] == [one.__name__ for one in get_args(Step)]


def test_the_python_of_the_readme_runs(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    names: dict[str, object] = {}
    found = blocks(README, "python")
    assert found
    for source in found:
        exec(compile(source, "README.md", "exec"), names)
    assert (tmp_path / "ferry.html").stat().st_size > 10_000
    passengers = names["passengers"]
    assert isinstance(passengers, pf.SeriesReport)
    # What the comment beside this line says.
    assert f"'{passengers.verdict}', '{passengers.plan}'" in README


@pytest.fixture
def shell(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[InteractiveShell]:
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path))
    config = Config()
    config.HistoryManager.enabled = False
    InteractiveShell.clear_instance()
    made = InteractiveShell.instance(config=config)
    yield made
    made.restore_sys_module_state()
    InteractiveShell.clear_instance()


def test_the_first_cells_of_the_readme_run(shell: InteractiveShell) -> None:
    found = blocks(README, "ipython")
    assert len(found) == 2
    for source in found:
        shell.run_cell(source).raise_error()
    report = shell.user_ns["report"]
    assert report.names == ("passengers", "freight", "fuel_price")
    shell.run_cell("%seriescode report passengers").raise_error()
    assert shell.rl_next_input == report.code("passengers")


def test_the_commands_of_the_readme_are_one_line_and_name_what_exists() -> None:
    found = blocks(README, "bash")
    assert len(found) == 3
    extras = PROJECT["project"]["optional-dependencies"]
    for block in found:
        assert block.count("\n") == 1
        assert block.startswith("python3 -m venv .venv && ")
        (extra,) = re.findall(r'-e "\.\[(\w+)\]"', block)
        assert extra in extras
        assert all((ROOT / path).is_file() for path in re.findall(r"\S+\.ipynb", block))
    ignored = (ROOT / ".gitignore").read_text(encoding="utf-8").split()
    assert {".venv/", "build/"} <= set(ignored)


# ----------------------------------------------------------------------------------------------- both documents
@pytest.mark.parametrize("document", DOCUMENTS)
def test_links_lead_somewhere(document: str) -> None:
    links = re.findall(r"\]\(([^)\s]+)\)", DOCUMENTS[document])
    assert links
    for link in links:
        path, _, anchor = link.partition("#")
        target = ROOT / (path or document)
        assert target.exists(), link
        if anchor:
            headings = re.findall(r"^#+ (.+)$", target.read_text(encoding="utf-8"), flags=re.MULTILINE)
            assert anchor in [_anchor(one) for one in headings], link


@pytest.mark.parametrize("path", sorted((ROOT / "demo_notebooks").glob("*.ipynb")), ids=lambda path: path.stem)
def test_links_of_the_notebooks_lead_somewhere(path: Path) -> None:
    links = re.findall(r"\]\(([^)\s]+)\)", path.read_text(encoding="utf-8"))
    assert links
    for link in links:
        name, _, anchor = link.partition("#")
        assert (path.parent / name).exists(), link
        headings = re.findall(r"^#+ (.+)$", README, flags=re.MULTILINE)
        assert not anchor or (name == "../README.md" and anchor in [_anchor(one) for one in headings]), link


@pytest.mark.parametrize("document", DOCUMENTS)
def test_paths_exist(document: str) -> None:
    written = [word for word in code_words(DOCUMENTS[document]) if re.fullmatch(r"\.?[\w.]+(/[\w.]*)+", word)]
    made = {"build/first_check.html"}
    places = (ROOT, ROOT / "preflight_magic")
    assert [word for word in written if word not in made and not any((one / word).exists() for one in places)] == []


# ------------------------------------------------------------------------------------------------ DEVELOPERS
def test_the_map_has_every_part_of_the_package() -> None:
    told = {word.rstrip("/") for row in table(DEVELOPERS, "part") for word in code_words(row[0])}
    parts = {path.name for path in (ROOT / "preflight_magic").iterdir() if path.suffix == ".py" or path.is_dir()}
    assert parts - {"__init__.py", "__pycache__"} <= told
    assert told <= parts | {"kernels/tables"}


def test_every_runtime_dependency_is_justified() -> None:
    needed = [re.match(r"[\w-]+", one).group() for one in PROJECT["project"]["dependencies"]]  # type: ignore[union-attr]
    assert sorted(row[0] for row in table(DEVELOPERS, "package")) == sorted(needed)


def test_every_benchmark_is_described() -> None:
    told = {Path(word).name for row in table(DEVELOPERS, "script") for word in re.findall(r"\]\(([^)]+)\)", row[0])}
    assert told == {path.name for path in (ROOT / "tests" / "bench").glob("*.py")}


def example_rung() -> Rung:
    (source,) = blocks(DEVELOPERS, "python")
    module = types.ModuleType("newest_value")
    exec(compile(source, "DEVELOPERS.md", "exec"), vars(module))
    rung = module.RUNG
    assert isinstance(rung, Rung)
    return rung


@pytest.mark.parametrize(("last", "verdict"), [(0.5, "clear"), (40.0, "inconclusive")])
def test_the_example_of_a_rung_works(last: float, verdict: str) -> None:
    values = np.random.default_rng(7).standard_normal(60)
    values[-1] = last
    series = pd.Series(values, index=pd.period_range("2020-01", periods=60, freq="M"))
    rung = example_rung()
    evidence = rung.examine(TimeSeries("one", series, Calendar("monthly", "M", "month")), Context(transformed=series))
    assert rung.judge(evidence, Thresholds()).verdict == verdict
    assert set(rung.after) <= {one.name for one in ladder()}


# --------------------------------------------------------------------------------------------------- project
def test_the_version_stands_once() -> None:
    assert re.fullmatch(r"\d+\.\d+\.\d+", pf.__version__)
    assert "version" in PROJECT["project"]["dynamic"]
    assert "version" not in PROJECT["project"]
    source = (ROOT / PROJECT["tool"]["hatch"]["version"]["path"]).read_text(encoding="utf-8")
    assert f'__version__ = "{pf.__version__}"' in source


def test_the_installed_version_is_that_of_the_source() -> None:
    try:
        installed = metadata.version("preflight_magic")
    except metadata.PackageNotFoundError:
        pytest.skip('to enable: pip install -e ".[test]"')
    assert installed == pf.__version__


def test_the_script_of_all_checks_can_be_run() -> None:
    path = ROOT / ".ci" / "run"
    assert path.stat().st_mode & stat.S_IXUSR
    assert path.read_text(encoding="utf-8").startswith("#!/usr/bin/env bash\n")
    subprocess.run(["bash", "-n", str(path)], check=True)


def test_the_package_works_without_what_only_developers_need(tmp_path: Path) -> None:
    """A check, its page and its code, with every package hidden that the runtime dependencies do not bring."""
    code = (
        "import sys\n"
        "for name in ('jupyterlab', 'nbconvert', 'nbclient', 'pytest', 'arch', 'polars', 'pyarrow', 'playwright'):\n"
        "    sys.modules[name] = None\n"
        "import preflight_magic as pf\n"
        "report = pf.check(pf.demo.ferry_line()[['freight']], progress=False)\n"
        "report.save('freight.html')\n"
        "print(report['freight'].plan)\n"
    )
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    done = subprocess.run([sys.executable, "-c", code], cwd=tmp_path, env=environment, capture_output=True, text=True)
    assert done.returncode == 0, done.stderr
    assert done.stdout.strip() == "remove shift from 2019-04"
    assert (tmp_path / "freight.html").stat().st_size > 10_000
