"""Steps and repairs as JSON objects, and back: each by its name and its fields."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import fields
from functools import cache
from typing import Any, Literal, get_args, get_origin, get_type_hints

import pandas as pd

from preflight_magic.model import CheckError, Repair, Step
from preflight_magic.plan.plan import Plan
from preflight_magic.record.node import Node
from preflight_magic.record.tags import encode

_STEPS: dict[str, type] = {one.__name__: one for one in get_args(Step)}
_REPAIRS: dict[str, type] = {one.__name__: one for one in get_args(Repair)}


def plan_object(plan: Plan) -> dict[str, Any]:
    """Plan as JSON; `words` are for people and are not read."""
    return {"words": str(plan), "repairs": _objects(plan.repairs, "repair"), "steps": step_objects(plan.steps)}


def step_objects(steps: Iterable[Step]) -> list[dict[str, Any]]:
    """Steps as JSON."""
    return _objects(steps, "step")


def _objects(parts: Iterable[Step | Repair], kind: str) -> list[dict[str, Any]]:
    return [
        {kind: type(one).__name__, **{field.name: encode(getattr(one, field.name)) for field in fields(one)}}
        for one in parts
    ]


def read_plan(node: Node) -> Plan:
    """Plan of a record.

    Raises
    ------
    CheckError
        For a step that is not known, or steps that cannot stand together.
    """
    found = node.fields(("words", "repairs", "steps"))
    found["words"].text()
    repairs = tuple(_read(one, "repair", _REPAIRS) for one in found["repairs"].items())
    return _plan(node, repairs, tuple(_read(one, "step", _STEPS) for one in found["steps"].items()))


def read_steps(node: Node) -> tuple[Step, ...]:
    """Steps of a record, in their order."""
    return tuple(_plan(node, (), (_read(one, "step", _STEPS),)).steps[0] for one in node.items())


def _plan(node: Node, repairs: tuple[Repair, ...], steps: tuple[Step, ...]) -> Plan:
    try:
        return Plan(repairs, steps)
    except CheckError as error:
        raise node.refuse(f"cannot be ({str(error).rstrip('.')})") from None


def _read(node: Node, kind: str, known: dict[str, type]) -> Any:
    name = next((one for key, one in node.entries() if key == kind), None)
    if name is None:
        raise node.refuse(f"has no '{kind}'")
    made = known[name.one_of(known)]
    hints = _hints(made)
    found = node.fields((kind, *hints))
    return made(**{key: _field(found[key], hint) for key, hint in hints.items()})


@cache
def _hints(made: type) -> dict[str, Any]:
    return get_type_hints(made)


def _field(node: Node, hint: Any) -> object:
    """Value of a field of a step, of the kind that the step declares."""
    if get_origin(hint) is Literal:
        return node.one_of(get_args(hint))
    if hint is int:
        return node.whole(1)
    if hint is float:
        return node.number()
    if hint == (str | None):
        return node.text_or_none()
    found = node.plain()
    if isinstance(found, bool) or not isinstance(found, pd.Period | pd.Timestamp | int):
        raise node.refuse("is no stamp of a time index")
    return found
