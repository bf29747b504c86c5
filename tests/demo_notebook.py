"""The demo notebooks: run them afresh, and keep what reads well where no kernel runs.

``python -m tests.demo_notebook`` from the root of the project writes the outputs of all anew, and the cells of
generated code; names of notebooks after it, such as ``many_routes``, limit it to those.
"""

from __future__ import annotations

import os
import re
import sys
import tempfile
from collections.abc import Callable, Iterable
from functools import cache
from pathlib import Path

import nbformat
from nbclient import NotebookClient
from nbformat import NotebookNode

ROOT = Path(__file__).resolve().parents[1]
FOLDER = ROOT / "demo_notebooks"
WIDGET = "application/vnd.jupyter.widget-view+json"


def code(form: str = "pandas") -> str:
    """Code of the plan of the passengers on the data that the notebooks know, as a cell has it."""
    import preflight_magic as pf

    known = pf.demo.ferry_line().loc[:"2023"]  # type: ignore[misc]
    report = pf.check(known, season=12, horizon=12, only="passengers", progress=False)
    return (report.code("passengers") if form == "pandas" else report["passengers"].code(form=form)).strip()


GENERATED: dict[str, Callable[[], str] | None] = {
    "first_check": code,
    "many_routes": None,
    "overruling": None,
    "next_month": lambda: code("model"),
}
"""The notebooks, in the order of reading, each with what its cell ``generated`` holds."""


def path(name: str) -> Path:
    """Where a notebook lies."""
    return FOLDER / f"{name}.ipynb"


def stored(name: str) -> NotebookNode:
    """A notebook as it lies in the repository."""
    return nbformat.read(path(name), as_version=4)


@cache
def fresh(name: str) -> NotebookNode:
    """A notebook with the outputs of a run, as it would be stored."""
    return tidied(executed(stored(name)))


def cell(notebook: NotebookNode, name: str) -> NotebookNode:
    """A cell by its id."""
    return next(one for one in notebook.cells if one.id == name)


def text(notebook: NotebookNode, name: str) -> str:
    """Everything a cell printed or showed as text."""
    return "\n".join(
        one.get("text", "") or one.get("data", {}).get("text/plain", "") for one in cell(notebook, name).outputs
    )


def html(notebook: NotebookNode, name: str) -> str:
    """Everything a cell showed as HTML."""
    return "\n".join(one.get("data", {}).get("text/html", "") for one in cell(notebook, name).outputs)


def executed(notebook: NotebookNode) -> NotebookNode:
    """The notebook with outputs of a fresh kernel, which finds the package of this repository first."""
    search = os.pathsep.join(filter(None, [str(ROOT), os.environ.get("PYTHONPATH")]))
    client = NotebookClient(
        notebook, timeout=300, kernel_name="python3", store_widget_state=False,
        resources={"metadata": {"path": str(FOLDER)}},
    )  # fmt: skip
    with tempfile.TemporaryDirectory() as home:
        own = {"PYTHONPATH": search, "OPENBLAS_NUM_THREADS": "1", "IPYTHONDIR": home, "COLUMNS": "80"}
        client.execute(env=os.environ | own)
    return notebook


def tidied(notebook: NotebookNode) -> NotebookNode:
    """Without what says nothing to a reader or differs from run to run.

    That is dead controls, progress, times of execution, the machine's Python, where printed text was cut in pieces, and
    the addresses of objects in the ids of cards.
    """
    addresses: dict[str, int] = {}
    for one in notebook.cells:
        one.metadata.pop("execution", None)
        if one.cell_type == "code":
            one.outputs = _joined(
                each for each in one.outputs if each.get("name") != "stderr" and WIDGET not in each.get("data", {})
            )
            for each in one.outputs:
                if "text/html" in each.get("data", {}):
                    each.data["text/html"] = _numbered(each.data["text/html"], addresses)
    notebook.metadata = {
        "kernelspec": {"display_name": "Python 3", "language": "python", "name": "python3"},
        "language_info": {"file_extension": ".py", "mimetype": "text/x-python", "name": "python"},
    }
    return notebook


def _joined(outputs: Iterable[NotebookNode]) -> list[NotebookNode]:
    """Printed text that follows printed text put together."""
    joined: list[NotebookNode] = []
    for one in outputs:
        if joined and one.output_type == joined[-1].output_type == "stream":
            joined[-1].text += one.text
        else:
            joined.append(one)
    return joined


def _numbered(source: str, addresses: dict[str, int]) -> str:
    """Ids that hold the address of an object, with its number in the notebook instead."""
    return re.sub(
        r"\bpfm-(\d{6,})\b", lambda found: f"pfm-{addresses.setdefault(found[1], len(addresses) + 1)}", source
    )


def build(name: str) -> None:
    """Run a notebook and write its outputs anew."""
    found, generated = stored(name), GENERATED[name]
    if generated is not None:
        cell(found, "generated").source = generated()
    nbformat.write(tidied(executed(found)), path(name))


if __name__ == "__main__":
    for wanted in sys.argv[1:] or GENERATED:
        build(wanted)
