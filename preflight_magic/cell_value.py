"""The table that a line or a cell gives, run in the person's namespace."""

from __future__ import annotations

import ast
import inspect
from collections.abc import Sequence
from itertools import takewhile
from types import CodeType
from typing import Any

from IPython.core.displayhook import DisplayHook
from IPython.core.error import UsageError

from preflight_magic.command_line import did_you_mean, is_frame

Shell = Any
"""An InteractiveShell; most of its methods carry no types."""


def value_of_line(shell: Shell, expression: str) -> object:
    """Value of an expression in the person's namespace, which has to be a table; else a UsageError."""
    __tracebackhide__ = True
    if not expression:
        raise UsageError("name a frame; write %checkseries FRAME, or %%checkseries above a cell that ends with one.")
    filename = _source_name(shell, expression)
    try:
        code = compile(expression, filename, "eval", shell.compile.flags)
    except SyntaxError as error:
        raise UsageError(f"{expression} is not a Python expression: {error.msg}.") from None
    try:
        value = eval(code, shell.user_ns)
    except NameError as error:
        # A name missing in the line itself is a slip of the hand; inside a function it deserves its traceback.
        here = error.__traceback__
        if here and here.tb_next and here.tb_next.tb_next:
            raise
        frames = [name for name, one in shell.user_ns.items() if is_frame(one) and not name.startswith("_")]
        raise UsageError(f"there is no variable {error.name}; {_frames_known(str(error.name), frames)}") from None
    return _frame(value, f"{expression} is")


def _frames_known(name: str, frames: Sequence[str]) -> str:
    return did_you_mean(name, frames) if frames else "no variable holds a DataFrame or Series yet."


def value_of_cell(shell: Shell, cell: str, expression: str) -> tuple[bool, object]:
    """Run the cell in the person's namespace; whether a semicolon ends it, and the value of its last expression."""
    __tracebackhide__ = True
    if expression:
        raise UsageError(
            f"{expression} is no option; under %%checkseries the frame is the last expression of the cell."
        )
    if not cell.strip():
        raise UsageError("the cell is empty; its last expression gives the frame, or write %checkseries FRAME.")
    # Empty lines stand for the line of the magic and for those that the transformation drops, so that line numbers are
    # those that the person sees.
    dropped = len(list(takewhile(lambda text: not text.strip(), cell.splitlines())))
    source = "\n" * (1 + dropped) + shell.transform_cell(cell)
    filename = _source_name(shell, source)
    tree = shell.transform_ast(ast.parse(source, filename))
    last = tree.body[-1] if tree.body else None
    if not isinstance(last, ast.Expr):
        raise UsageError(
            "the cell does not end with an expression; write the DataFrame or Series to check on its last line."
        )
    statements = _compiled(shell, ast.Module(tree.body[:-1], tree.type_ignores), filename)
    ending = _compiled(shell, ast.Expression(last.value), filename)
    exec(statements, shell.user_ns)
    value = eval(ending, shell.user_ns)
    semicolon_at_end: Any = DisplayHook.semicolon_at_end_of_expression
    return bool(semicolon_at_end(source)), _frame(value, "the last expression of the cell is")


def _source_name(shell: Shell, source: str) -> str:
    """Keep source for tracebacks, numbered like the output of the cell: releases of IPython count on at other times."""
    return str(shell.compile.cache(source, shell.displayhook.prompt_count))


def _compiled(shell: Shell, tree: ast.Module | ast.Expression, filename: str) -> CodeType:
    mode = "exec" if isinstance(tree, ast.Module) else "eval"
    flags = shell.compile.flags | ast.PyCF_ALLOW_TOP_LEVEL_AWAIT
    code: CodeType = compile(tree, filename, mode, flags)
    if code.co_flags & inspect.CO_COROUTINE:
        raise UsageError("a %%checkseries cell cannot await; await in a cell above and use its result here.")
    return code


def _frame(value: object, subject: str) -> object:
    if not is_frame(value):
        seen = "None" if value is None else f"a {type(value).__name__}"
        raise UsageError(f"{subject} {seen}, not a DataFrame or Series.")
    return value
