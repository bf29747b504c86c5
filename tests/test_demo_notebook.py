"""The demo notebooks run, and what is stored of each is what a run gives."""

from __future__ import annotations

import json
import re
from typing import Any

import nbformat
import pytest
from nbformat import NotebookNode

from tests import demo_notebook
from tests.demo_notebook import FOLDER, GENERATED, cell, text

MANY = pytest.param("many_routes", marks=pytest.mark.slow)
NAMES = [MANY if name == "many_routes" else name for name in GENERATED]
CARDS = {"check", "card"}
"""Cells of first_check and overruling whose text is that of a whole card: long, and with digits that say little."""


def words(notebook: NotebookNode, name: str) -> str:
    """What a cell told, without spaces and numbers: a last digit may differ between releases of numpy."""
    return " ".join(re.sub(r"\d+(\.\d+)?", "#", text(notebook, name)).split())


def source_masked(source: str) -> str:
    return re.sub(r"\d+(\.\d+)?", "#", source)


def without_pictures(name: str) -> str:
    """The file of a notebook, as text."""
    return re.sub(r"base64,[\w+/=]+", "", demo_notebook.path(name).read_text(encoding="utf-8"))


def test_every_notebook_has_its_builder() -> None:
    assert {path.stem for path in FOLDER.glob("*.ipynb")} == set(GENERATED)


@pytest.mark.parametrize("name", NAMES)
def test_nothing_goes_wrong_unseen(name: str) -> None:
    fresh = demo_notebook.fresh(name)
    outputs = [one for part in fresh.cells if part.cell_type == "code" for one in part.outputs]
    assert outputs
    assert {one.output_type for one in outputs} <= {"stream", "display_data", "execute_result"}
    assert "Warning" not in json.dumps(fresh)


@pytest.mark.parametrize("name", NAMES)
def test_the_stored_outputs_are_those_of_a_run(name: str) -> None:
    stored, fresh = demo_notebook.stored(name), demo_notebook.fresh(name)
    told = [one.id for one in stored.cells if one.cell_type == "code" and one.id not in CARDS]
    assert {one: words(stored, one) for one in told} == {one: words(fresh, one) for one in told}


@pytest.mark.parametrize("name", [name for name, generated in GENERATED.items() if generated])
def test_the_code_in_the_notebook_is_the_code_of_the_report(name: str) -> None:
    generated = GENERATED[name]
    assert generated is not None
    assert source_masked(cell(demo_notebook.stored(name), "generated").source) == source_masked(generated())


@pytest.mark.parametrize("name", NAMES)
def test_a_run_leaves_no_file_beside_the_notebook(name: str) -> None:
    demo_notebook.fresh(name)
    there = {path.name for path in FOLDER.iterdir()} - {".ipynb_checkpoints"}
    assert there == {"pictures", *(f"{one}.ipynb" for one in GENERATED)}


@pytest.mark.parametrize("name", GENERATED)
def test_the_stored_notebook_is_small_and_has_no_leftovers(name: str) -> None:
    path = demo_notebook.path(name)
    assert path.stat().st_size < 250_000
    told: dict[str, Any] = json.loads(path.read_text(encoding="utf-8"))
    assert demo_notebook.WIDGET not in json.dumps(told)
    assert "execution" not in {key for one in told["cells"] for key in one["metadata"]}
    assert set(told["metadata"]) == {"kernelspec", "language_info"}
    counts = [one["execution_count"] for one in told["cells"] if one["cell_type"] == "code"]
    assert counts == list(range(1, len(counts) + 1))


@pytest.mark.parametrize("name", GENERATED)
def test_the_stored_notebook_tells_nothing_of_the_machine(name: str) -> None:
    found = without_pictures(name)
    assert re.findall(r"(?<![\w<])/(?:home|opt|root|tmp|usr|var|work|Users)/\S*|[A-Z]:\\\\\S*", found) == []
    assert re.findall(r"0x[0-9a-f]{6,}|\bpfm-\d{6,}", found) == []
    assert re.findall(r"\d ?(?:ms|µs|seconds)\b|Wall time", found) == []


def test_printed_text_is_one_piece_and_cards_are_numbered() -> None:
    stream = {"output_type": "stream", "name": "stdout"}
    page = '<b id="pfm-140127305-x"></b><b id="pfm-990127305-x"></b><b id="pfm-140127305-y"></b>'
    outputs = [stream | {"text": "one\n"}, {"output_type": "stream", "name": "stderr", "text": "50 %"}]
    outputs += [
        stream | {"text": "two\n"},
        {"output_type": "display_data", "metadata": {}, "data": {"text/html": page}},
    ]
    part = {"cell_type": "code", "id": "a", "metadata": {"execution": {}}, "source": "", "outputs": outputs}
    raw = {"cells": [part], "metadata": {}, "nbformat": 4, "nbformat_minor": 5}
    tidy = demo_notebook.tidied(nbformat.from_dict(raw)).cells[0]
    assert tidy.outputs[0].text == "one\ntwo\n"
    assert re.findall(r'"([^"]+)"', tidy.outputs[1].data["text/html"]) == ["pfm-1-x", "pfm-2-x", "pfm-1-y"]
    assert len(tidy.outputs) == 2
    assert not tidy.metadata
