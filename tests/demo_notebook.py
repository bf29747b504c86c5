"""The demo notebook: run it afresh, and keep what reads well where no kernel runs.

``python -m tests.demo_notebook`` from the root of the project writes its outputs anew, and the cell of generated code.
"""

from __future__ import annotations

import os
from pathlib import Path

import nbformat
from nbclient import NotebookClient
from nbformat import NotebookNode

ROOT = Path(__file__).resolve().parents[1]
PATH = ROOT / "demo_notebooks" / "first_check.ipynb"
WIDGET = "application/vnd.jupyter.widget-view+json"


def stored() -> NotebookNode:
    """The notebook as it lies in the repository."""
    return nbformat.read(PATH, as_version=4)


def cell(notebook: NotebookNode, name: str) -> NotebookNode:
    """A cell by its id."""
    return next(one for one in notebook.cells if one.id == name)


def code() -> str:
    """What ``%seriescode report passengers`` puts into the notebook."""
    import preflight_magic as pf

    known = pf.demo.ferry_line().loc[:"2023"]  # type: ignore[misc]
    return pf.check(known, season=12, horizon=12, only="passengers", progress=False).code("passengers").strip()


def executed(notebook: NotebookNode) -> NotebookNode:
    """The notebook with outputs of a fresh kernel, which finds the package of this repository first."""
    search = os.pathsep.join(filter(None, [str(ROOT), os.environ.get("PYTHONPATH")]))
    client = NotebookClient(
        notebook, timeout=300, kernel_name="python3", store_widget_state=False,
        resources={"metadata": {"path": str(PATH.parent)}},
    )  # fmt: skip
    client.execute(env=os.environ | {"PYTHONPATH": search, "OPENBLAS_NUM_THREADS": "1"})
    return notebook


def tidied(notebook: NotebookNode) -> NotebookNode:
    """Without what says nothing to a reader: dead controls, progress, times of execution, the machine's Python."""
    for cell in notebook.cells:
        cell.metadata.pop("execution", None)
        if cell.cell_type == "code":
            cell.outputs = [
                one for one in cell.outputs if one.get("name") != "stderr" and WIDGET not in one.get("data", {})
            ]
    notebook.metadata = {
        "kernelspec": {"display_name": "Python 3", "language": "python", "name": "python3"},
        "language_info": {"file_extension": ".py", "mimetype": "text/x-python", "name": "python"},
    }
    return notebook


if __name__ == "__main__":
    found = stored()
    cell(found, "generated").source = code()
    nbformat.write(tidied(executed(found)), PATH)
