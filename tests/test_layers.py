"""Which part of the package may import what: the rules by which each part can be understood alone."""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1] / "preflight_magic"
LONGEST_FILE = 320
HEAVY = {"statsmodels", "matplotlib", "ipywidgets"}

NOUNS = {"model", "stamps"}
CHECKS = NOUNS | {"policy", "intake", "kernels", "rungs", "ladder", "plan", "present"}
REPORT = {"answer", "read_again", "overview", "generated", "saving", "series_report", "report", "progress", "batch"}
REPORT |= {"reference", "reference_mixture", "reference_parts", "root_intervals", "together", "together_words"}
REPORT |= {"proof", "proof_result", "proof_words"}
REPORT |= {"record", "against", "group", "standing", "series_facts"}
REPORT |= {"packing", "pooling", "overview_file", "triage", "estimate"}
SHARED = {"kernels.plan_likelihood", "kernels.restricted_likelihood"}
SHELL = {"command_line", "completion", "cell_value", "magic", "named"}

# Part: what it may import from the package, and from outside the standard library. Imports inside functions and those
# for annotations alone count too. An entry allows the module and everything below it.
LAYERS: dict[str, tuple[set[str], set[str]]] = {
    "model": (NOUNS, {"numpy", "pandas"}),
    "stamps": (NOUNS, {"numpy", "pandas"}),
    "policy": (NOUNS, {"numpy", "pandas"}),
    "kernels": ({"kernels", "model"}, {"numpy", "scipy", "statsmodels"}),
    "intake": (NOUNS | {"intake"}, {"numpy", "pandas"}),
    "plan": (NOUNS | {"plan"}, {"numpy", "pandas"}),
    # Rungs know their common contract and how shares of the evidence are told, never each other.
    "rungs": (
        NOUNS | {"kernels", "policy", "rungs.contract", "rungs.shares", "rungs.kinds", "rungs.root_notes"},
        {"numpy", "pandas"},
    ),
    "ladder": (NOUNS | {"policy", *SHARED, "rungs", "plan"}, {"numpy", "pandas"}),
    # Pillow comes with matplotlib, which draws through it.
    "present": (NOUNS | {"plan", "present"}, {"ipywidgets", "matplotlib", "numpy", "pandas", "IPython", "PIL"}),
    **dict.fromkeys(REPORT, (CHECKS | REPORT, {"numpy", "pandas"})),
    "demo": (NOUNS, {"numpy", "pandas"}),
    # The magics catch CheckError, hence the nouns.
    "magic": (NOUNS | SHELL | {"report", "batch", "intake", "policy", "record"}, {"IPython"}),
    "command_line": (NOUNS | SHELL | {"report", "batch", "intake", "policy"}, {"IPython"}),
    "named": (NOUNS | SHELL | {"report", "batch", "intake", "policy", "record"}, {"IPython"}),
    "completion": (NOUNS | SHELL | {"report", "batch", "intake", "policy"}, {"IPython"}),
    "cell_value": (NOUNS | SHELL | {"report", "batch", "intake", "policy"}, {"IPython"}),
    "__main__": (NOUNS | {"report", "batch", "intake", "policy", "record", "against", "present"}, {"pandas"}),
    "": (CHECKS | SHELL | {"demo"} | REPORT, set()),
}


def module_name(path: Path) -> str:
    """Dotted name below the package; empty for the package itself."""
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


FILES = sorted(ROOT.rglob("*.py"))
MODULES = {module_name(path) for path in FILES}


def imports(tree: ast.AST, module: str, is_package: bool, modules: set[str]) -> Iterator[str]:
    """Full dotted names of everything that a module imports, wherever in it."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            source = node.module or ""
            if node.level:
                here = f"preflight_magic.{module}".rstrip(".").split(".")
                source = ".".join(here[: len(here) - node.level + is_package] + ([source] if source else []))
            for alias in node.names:
                name = f"{source}.{alias.name}"
                below = name.removeprefix("preflight_magic.")
                is_module = source.split(".")[0] != "preflight_magic" or below in modules
                yield name if is_module or source == "preflight_magic" else source
        elif isinstance(node, ast.Call) and ast.unparse(node.func).split(".")[-1] in ("import_module", "__import__"):
            yield from (str(one.value) for one in node.args[:1] if isinstance(one, ast.Constant))


def within(name: str, allowed: set[str]) -> bool:
    """Whether a dotted name is one of those allowed or stands below one."""
    return any(name == one or name.startswith(f"{one}.") for one in allowed)


def violations(source: str, module: str, is_package: bool = False, modules: set[str] = MODULES) -> list[str]:
    """Imports of a module that its layer does not allow."""
    layer = module.split(".")[0]
    if layer not in LAYERS:
        return [f"{module} has no row in the table of layers"]
    ours, outside = LAYERS[layer]
    found = []
    for name in imports(ast.parse(source), module, is_package, modules):
        top, _, below = name.partition(".")
        if top == "preflight_magic":
            allowed = below == "__version__" or within(below, ours)
        else:
            allowed = top in sys.stdlib_module_names or within(name, outside)
        if not allowed:
            found.append(f"{module or 'preflight_magic'} imports {name}")
    return found


@pytest.mark.parametrize("path", FILES, ids=module_name)
def test_imports_stay_within_their_layer(path: Path) -> None:
    assert violations(path.read_text(encoding="utf-8"), module_name(path), path.name == "__init__.py") == []


@pytest.mark.parametrize(
    ("module", "source"),
    [
        ("rungs.season", "from preflight_magic.rungs import spread"),
        ("rungs.season", "from preflight_magic.rungs.spread import RUNG"),
        ("rungs.season", "from .spread import RUNG"),
        ("rungs.season", "from . import spread"),
        ("rungs.season", "import preflight_magic.plan"),
        ("rungs.season", "import scipy.stats"),
        ("kernels.arma", "def fit():\n    import pandas"),
        ("kernels.arma", "def fit():\n    from preflight_magic import policy"),
        ("kernels.arma", "from typing import TYPE_CHECKING\nif TYPE_CHECKING:\n    import pandas as pd"),
        ("kernels.arma", "from importlib import import_module\nimport_module('pandas')"),
        ("kernels.arma", "from preflight_magic import check"),
        ("model", "from .plan.plan import Plan"),
        ("model", "from . import policy"),
        ("present.cards", "from ..report import Report"),
        ("magic", "import pandas"),
        ("ladder", "from preflight_magic.kernels import unit_root"),
        ("surprise", "x = 1"),
    ],
)
def test_a_forbidden_import_is_seen(module: str, source: str) -> None:
    modules = MODULES | {"rungs.spread", "policy", "plan.plan", "report", "kernels.unit_root"}
    assert len(violations(source, module, modules=modules)) == 1


@pytest.mark.parametrize(
    ("module", "source"),
    [
        ("rungs.season", "from preflight_magic.rungs.contract import Rung\nfrom preflight_magic.kernels import arma"),
        ("rungs.season", "from .contract import Rung\nfrom ..model import Series\nimport numpy as np, math"),
        ("kernels.arma", "from scipy.linalg.lapack import dpbtrf\nfrom .least_squares import triangle"),
        ("present.cards", "from IPython.display import display\nfrom IPython import display\nfrom .text import lines"),
        ("ladder", "from preflight_magic.kernels import plan_likelihood\nfrom preflight_magic import rungs"),
        ("plan.record", "from preflight_magic import __version__"),
    ],
)
def test_an_allowed_import_is_not_held_against_it(module: str, source: str) -> None:
    modules = MODULES | {"rungs.contract", "kernels.arma", "kernels.plan_likelihood", "rungs", "present.text"}
    assert violations(source, module, modules=modules) == []


@pytest.mark.parametrize("path", FILES, ids=module_name)
def test_files_stay_short(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= LONGEST_FILE


def top_level_imports(tree: ast.Module) -> set[str]:
    """First parts of the names imported when the module is, not for annotations alone."""
    found: set[str] = set()
    waiting: list[ast.stmt] = list(tree.body)
    while waiting:
        node = waiting.pop()
        if isinstance(node, ast.Import):
            found |= {alias.name.split(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and not node.level:
            found.add((node.module or "").split(".")[0])
        elif isinstance(node, ast.If) and "TYPE_CHECKING" not in ast.unparse(node.test):
            waiting += node.body + node.orelse
        elif isinstance(node, ast.Try | ast.With | ast.ClassDef):
            waiting += node.body
    return found


@pytest.mark.parametrize("path", FILES, ids=module_name)
def test_heavy_packages_wait_until_they_are_needed(path: Path) -> None:
    assert top_level_imports(ast.parse(path.read_text(encoding="utf-8"))) & HEAVY == set()


def test_importing_the_package_is_light() -> None:
    code = "import sys, preflight_magic; print(*{name.split('.')[0] for name in sys.modules})"
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT.parent, capture_output=True, text=True, check=True)
    loaded = set(done.stdout.split())
    assert "preflight_magic" in loaded
    assert loaded & (HEAVY | {"IPython"}) == set()
