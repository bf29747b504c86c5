"""A kernel that lives long: cells run again and again leave nothing behind, and the extension leaves no trace."""

from __future__ import annotations

import json
from collections.abc import Iterator
from itertools import pairwise
from typing import Any

import pytest
from jupyter_client.blocking import BlockingKernelClient
from jupyter_client.manager import KernelManager

SETUP = """
import ctypes, gc, json, os, threading
%load_ext preflight_magic
from tests.small_table import small_table
table = small_table()
from ipywidgets.widgets import widget
def alive():
    found = getattr(widget, "_instances", None)
    return len(found if found is not None else widget.Widget.widgets)
def counts():
    # The shell itself keeps every value it has shown, and from IPython 9 on everything that was displayed.
    getattr(get_ipython().history_manager, "outputs", {}).clear()
    for name in [name for name in get_ipython().user_ns if name.strip("_").isdigit() or not name.strip("_")]:
        get_ipython().user_ns[name] = None
        get_ipython().user_ns_hidden.pop(name, None)
    Out.clear()
    gc.collect()
    comms = len(get_ipython().kernel.comm_manager.comms)
    files = len(os.listdir("/proc/self/fd")) if os.path.isdir("/proc/self/fd") else 0
    return {"widgets": alive(), "comms": comms, "files": files, "threads": threading.active_count(),
            "objects": len(gc.get_objects()), "kilobytes": resident()}
def resident():
    # What is free already is given back first, where the C library knows how.
    try:
        ctypes.CDLL(None).malloc_trim(0)
    except (AttributeError, OSError):
        pass
    with open("/proc/self/statm") as file:
        return int(file.read().split()[1]) * os.sysconf("SC_PAGE_SIZE") // 1024
"""
CELL = "%checkseries table --only cargo,fares --into report"
LEAN = "print(json.dumps(counts()))"


class Kernel:
    """A kernel of its own process, and what its cells print."""

    def __init__(self, client: BlockingKernelClient) -> None:
        self.client = client

    def run(self, code: str, cell: str = "") -> str:
        """Run code as the cell with this identity; the text it printed."""
        content = {"code": code, "silent": False, "store_history": True, "user_expressions": {}, "allow_stdin": False,
                   "stop_on_error": True}  # fmt: skip
        message = self.client.session.msg("execute_request", content)
        message["metadata"] = {"cellId": cell} if cell else {}
        self.client.shell_channel.send(message)
        printed = []
        while True:
            answer: dict[str, Any] = self.client.get_iopub_msg(timeout=120)
            if answer["parent_header"].get("msg_id") != message["header"]["msg_id"]:
                continue
            kind, told = answer["msg_type"], answer["content"]
            if kind == "error":
                raise AssertionError("\n".join(told["traceback"]))
            if kind == "stream" and told["name"] == "stdout":
                printed.append(told["text"])
            if kind == "status" and told["execution_state"] == "idle":
                return "".join(printed)


@pytest.fixture
def kernel(tmp_path, monkeypatch) -> Iterator[Kernel]:
    monkeypatch.setenv("IPYTHONDIR", str(tmp_path))
    manager = KernelManager()
    manager.start_kernel()
    client = manager.client()
    client.start_channels()
    try:
        client.wait_for_ready(timeout=120)
        yield Kernel(client)
    finally:
        client.stop_channels()
        manager.shutdown_kernel(now=True)


def grown(kernel: Kernel, reruns: int) -> list[dict[str, int]]:
    """Counts after five runs of a cell, after `reruns` more, and after as many again."""
    kernel.run(SETUP)
    for _ in range(5):
        kernel.run(CELL, "cell-1")
    found = [json.loads(kernel.run(LEAN))]
    for _ in range(2):
        for run in range(reruns):
            kernel.run(CELL, "cell-1")
            if run % 10 == 0:  # what the shell keeps would only be in the way
                kernel.run(LEAN)
        found.append(json.loads(kernel.run(LEAN)))
    return found


def assert_nothing_piles_up(kernel: Kernel, reruns: int) -> None:
    found = grown(kernel, reruns)
    print(*found)
    first, _, last = found
    for what in ("widgets", "comms", "threads"):
        assert last[what] == first[what], (what, *found)
    assert last["files"] <= first["files"] + 1, found
    # What is made once, such as weak references, falls into one of the two stretches; what piles up, into both.
    smaller = {what: min(b[what] - a[what] for a, b in pairwise(found)) for what in first}
    # What a shell itself keeps of a cell (its source and its history) is a few objects.
    assert smaller["objects"] < 10 * reruns + 50, found
    assert smaller["kilobytes"] < 20 * reruns + 2_000, found


@pytest.mark.slow
def test_a_cell_run_again_leaves_nothing(kernel):
    assert_nothing_piles_up(kernel, 12)


@pytest.mark.nightly
def test_a_cell_run_two_hundred_times_leaves_nothing(kernel):
    assert_nothing_piles_up(kernel, 100)


# A library made with pybind11, such as those that matplotlib draws with, leaves a name among the builtins when it is
# first imported, and it is never taken away again.
LOADED = """
shell = get_ipython()
def state():
    import builtins, sys
    return json.dumps({
        "line": sorted(shell.magics_manager.magics["line"]), "cell": sorted(shell.magics_manager.magics["cell"]),
        "matchers": len(shell.Completer.custom_matchers), "names": sorted(n for n in shell.user_ns if n[0] != "_"),
        "transformers": len(shell.input_transformers_cleanup) + len(shell.input_transformers_post),
        "ast": len(shell.ast_transformers),
        "builtins": sorted(n for n in vars(builtins) if n != "_" and not n.startswith("__pybind11")),
        "callbacks": {name: len(one) for name, one in shell.events.callbacks.items()},
        "displays": sorted(str(one) for f in shell.display_formatter.formatters.values() for one in f.type_printers),
        "hook": str(sys.excepthook), "widgets": alive(), "comms": len(shell.kernel.comm_manager.comms),
    })
"""


def test_loading_twice_and_unloading_leave_the_shell_as_found(kernel):
    kernel.run(SETUP.replace("%load_ext preflight_magic\n", ""))
    kernel.run(LOADED)
    kernel.run("report = None")
    before = json.loads(kernel.run("print(state())"))
    kernel.run("%load_ext preflight_magic")
    kernel.run(CELL, "cell-1")
    kernel.run("%reload_ext preflight_magic")
    kernel.run("%reload_ext preflight_magic")
    kernel.run(CELL, "cell-1")
    loaded = json.loads(kernel.run("print(state())"))
    assert set(loaded["line"]) - set(before["line"]) == {"checkseries", "seriescode"}
    assert loaded["matchers"] == before["matchers"] + 1
    kernel.run("%unload_ext preflight_magic")
    assert json.loads(kernel.run("print(state())")) == before
