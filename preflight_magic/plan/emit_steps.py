"""The two functions of one plan as lines of pandas source."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import assert_never

from preflight_magic.model import (
    Difference,
    FillGaps,
    Log,
    Logit,
    MergeDuplicates,
    PerDay,
    Power,
    ReadDates,
    RegularCalendar,
    RemovePattern,
    RemoveShift,
    RemoveTrend,
    Repair,
    Sort,
    Step,
)
from preflight_magic.plan.emit_points import backward, forward
from preflight_magic.plan.fixed_part import Regressors, lags_of, regressors
from preflight_magic.plan.literals import WIDTH, comment, one_line, stamp_literal
from preflight_magic.plan.plan import Plan
from preflight_magic.plan.points import point_steps
from preflight_magic.plan.words import describe

Reasons = Mapping[Step | Repair, str]
"""Why each step or repair is in the plan: one sentence each; a step without one is only named."""


@dataclass(frozen=True)
class Draft:
    """One plan to be written as code; `monthly` says that its series have a monthly index, `suffix` ends the names."""

    plan: Plan
    why: Mapping[Step | Repair, tuple[str, ...]]
    monthly: bool
    suffix: str = ""

    @property
    def columns(self) -> Regressors:
        """What the least squares of the Remove steps estimates."""
        return regressors(self.plan.steps)

    @property
    def fitted(self) -> bool:
        """Whether a least squares is needed; a constant alone is a mean."""
        columns = self.columns
        return columns.trend or bool(columns.shifts) or bool(columns.patterns)

    @property
    def fills(self) -> tuple[FillGaps, ...]:
        """Repairs of the values; the others are those of the index."""
        return tuple(repair for repair in self.plan.repairs if isinstance(repair, FillGaps))

    @property
    def irregular(self) -> bool:
        """Whether the rows have to be made regular first."""
        return len(self.plan.repairs) > len(self.fills)

    @property
    def counted(self) -> bool:
        """Whether days are counted by a function of its own; pandas counts those of a month."""
        return any(isinstance(s, PerDay) and not (self.monthly and s.unit == "days") for s in self.plan.steps)

    @property
    def joined(self) -> bool:
        """Whether preparing a series needs the values before it."""
        return bool(self.fills or self.columns or lags_of(self.plan.steps) or self.counted)


def prepare_lines(draft: Draft) -> list[str]:
    """Source of the function that applies the plan."""
    plan, lags = draft.plan, lags_of(draft.plan.steps)
    text = "Transform y for a model; history, y itself by default, is what is known."
    lines = [f"def prepare{draft.suffix}(y, history=None):", f'    """{text}"""']
    if draft.irregular:
        lines += [f"    y = regular{draft.suffix}(y)"]
        lines += [f"    history = y if history is None else regular{draft.suffix}(history)"] if draft.joined else []
    if draft.joined:
        start = "history" if draft.irregular else "(y if history is None else history)"
        lines += [
            f"    history = {start}.astype(float)",
            "    # What lies before y comes from the history.",
            "    x = history.reindex(history.index.union(y.index))",
            "    x.loc[y.index] = y.astype(float)",
        ]
    else:
        lines += ["    x = y.astype(float)"]
    for repair in draft.fills:
        lines += [*_why(draft, repair), f"    x = {_fill('x', 'history', repair)}"]
    for step in plan.steps:
        lines += _why(draft, step)
        match step:
            case PerDay() | Log() | Power() | Logit():
                lines += [f"    x = {forward(step, draft.counted).format(x='x')}"]
            case Difference(lag=lag):
                lines += [f"    x = x{_diff((lag,))}"]
            case RemoveTrend() | RemoveShift() | RemovePattern():
                lines += _already(step, lags)
            case _:
                assert_never(step)
    if draft.columns:
        lines += _chain("known", "history", draft, lags)
        part = f"fixed_part{draft.suffix}(known.reindex(x.index))" if draft.fitted else "known.mean()"
        lines += [f"    x = x - {part}"]
    return _returned(lines, "x.loc[y.index]" if draft.joined else "x")


def restore_lines(draft: Draft) -> list[str]:
    """Source of the function that undoes the plan."""
    plan, lags = draft.plan, lags_of(draft.plan.steps)
    bends = any(isinstance(step, Log | Power | Logit) for step in plan.steps)
    text = "median, or mean with its error variance" if bends else "the variance changes nothing"
    text = f"Undo prepare on a forecast that follows history: {text}."
    lines = [f"def restore{draft.suffix}(forecast, history, variance=None):", f'    """{text}"""']
    lines += [f"    history = regular{draft.suffix}(history)"] if draft.irregular else []
    lines += ["    x = forecast.astype(float)"]
    if lags or draft.columns:
        lines += _chain("past", "history[history.index < forecast.index[0]].astype(float)", draft, ())
    if draft.columns:
        known = f"past{_diff(lags)}"
        if draft.fitted:
            lines += ["    timeline = past.index.union(x.index)"]
            lines += [f"    x = x + fixed_part{draft.suffix}({known}.reindex(timeline)).loc[x.index]"]
        else:
            lines += [f"    x = x + {known}.mean()"]
    for position in reversed(range(len(lags))):
        past = f"past{_diff(lags[:position])}"
        if lags[position] == 1:
            lines += [f"    x = x.cumsum(skipna=False) + {past}.iloc[-1]"]
        else:
            lines += [f"    x = undo_difference(x, {past}, {lags[position]})"]
    for step in reversed(point_steps(plan.steps)):
        lines += backward(step, draft.counted)
    return _returned(lines, "x")


def regular_lines(draft: Draft) -> list[str]:
    """Source of the function that makes the rows regular."""
    lines = [f"def regular{draft.suffix}(y):", '    """Put the rows in order, one for every stamp of the calendar."""']
    for repair in draft.plan.repairs:
        lines += _why(draft, repair) if not isinstance(repair, FillGaps) else []
        match repair:
            case ReadDates():
                lines += ['    y = y.set_axis(pd.to_datetime(y.index, format="ISO8601"))']
            case Sort():
                lines += ["    y = y.sort_index()"]
            case MergeDuplicates():
                lines += ["    y = y.groupby(level=0).first()"]
            case RegularCalendar(freq=freq, kind=kind):
                lines += [f"    y = {_complete(freq, kind)}"]
            case FillGaps():
                pass
            case _:
                assert_never(repair)
    last = lines.pop().removeprefix("    y = ")
    return [*lines, f"    return {last}"]


def _complete(freq: str | None, kind: str) -> str:
    if kind == "numbers":
        return "y.reindex(range(y.index[0], y.index[-1] + 1))"
    if kind == "periods":
        return f'y.reindex(pd.period_range(y.index[0], y.index[-1], freq="{freq}"))'
    return f'y.asfreq("{freq}")'


def fixed_part_lines(draft: Draft) -> list[str]:
    """Source of the least squares that estimates what the Remove steps take out."""
    columns, lags = draft.columns, lags_of(draft.plan.steps)
    names = ["trend"] * columns.trend + ["shift"] * bool(columns.shifts) + ["pattern"] * bool(columns.patterns)
    what = " and ".join([", ".join(names[:-1]), names[-1]] if len(names) > 1 else names).capitalize()
    together = " together" if len(names) > 1 else ""
    lines = [
        f"def fixed_part{draft.suffix}(known):",
        f'    """{what} at every stamp, fitted{together} to the values that are known."""',
        "    t = np.arange(len(known))",
    ]
    entries = ["np.ones(len(t))"] if columns.constant and not lags else []
    if columns.trend:
        entries.append("t / len(t)")
    entries += [f"1.0 * (known.index >= {stamp_literal(at)})" for at in columns.shifts]
    for position, period in enumerate(columns.patterns):
        name = "season" if position == 0 else f"season_{position + 1}"
        lines += [f"    {name} = np.eye({period})[t % {period}]"]
        entries.append(f"{name}[:, :-1] - {name}[:, -1:]")
    lines += _matrix(entries)
    if lags:
        lines += ["    # Differenced like the series.", f"    X = pd.DataFrame(X){_diff(lags)}.to_numpy()"]
    if lags and columns.constant:
        lines += ["    X = np.column_stack([np.ones(len(t)), X])"]
    return [
        *lines,
        "    rows = known.notna().to_numpy()",
        "    effects = np.linalg.lstsq(X[rows], known.to_numpy()[rows], rcond=None)[0]",
        "    return pd.Series(X @ effects, index=known.index)",
    ]


def _matrix(entries: list[str]) -> list[str]:
    """Line or lines that put the columns together."""
    if len(entries) == 1:
        return [f"    X = {entries[0]}"]
    line = f"    X = np.column_stack([{', '.join(entries)}])"
    if len(line) <= WIDTH:
        return [line]
    return [
        "    X = np.column_stack(",
        "        [",
        *(f"            {entry}," for entry in entries),
        "        ]",
        "    )",
    ]


def _returned(lines: list[str], value: str) -> list[str]:
    """Lines with the return added, straight from the last assignment where that is all it returns."""
    start = "    x = "
    if value == "x" and lines[-1].startswith(start):
        return [*lines[:-1], f"    return {lines[-1].removeprefix(start)}"]
    return [*lines, f"    return {value}"]


def _why(draft: Draft, step: Step | Repair) -> list[str]:
    """Comment that names a step and says why; where series that share the plan differ, the first ones by name."""
    name = describe(step)
    reasons = [one_line(reason) for reason in draft.why.get(step, ()) if one_line(reason)]
    name = name[0].upper() + name[1:]
    if not reasons:
        return comment(f"{name}.", 4)
    if len(reasons) == 1:
        return comment(f"{name}: {reasons[0]}", 4)
    return [line for text in (f"{name}:", *reasons) for line in comment(text, 4)]


def _already(step: Step, lags: tuple[int, ...]) -> list[str]:
    match step:
        case RemoveTrend() if len(lags) == 1:
            return comment("After one difference the trend is the mean of what is left.", 4)
        case RemoveTrend() if lags:
            return comment("Two differences have taken the trend out already.", 4)
        case RemovePattern(period=period) if any(lag % period == 0 for lag in lags):
            return comment("The seasonal difference has taken the pattern out already.", 4)
        case _:
            return []


def _fill(x: str, history: str, repair: FillGaps) -> str:
    if repair.period == 1:
        return f'{x}.interpolate(limit_area="inside")'
    return f"fill_gaps({x}, {history}, {int(repair.period)})"


def _diff(lags: tuple[int, ...]) -> str:
    return "".join(".diff()" if lag == 1 else f".diff({lag})" for lag in lags)


def _chain(name: str, start: str, draft: Draft, lags: tuple[int, ...]) -> list[str]:
    """Lines that set `name` to the values of `start` after repairs, point steps and these differences.

    Steps that mention the value once are written into one expression as long as it is short.
    """
    templates = [_fill("{x}", "{x}", repair) for repair in draft.fills]
    templates += [forward(step, draft.counted) for step in point_steps(draft.plan.steps)]
    templates += [f"{{x}}{_diff(lags)}"] if lags else []
    lines: list[str] = []
    value, atom = start, True
    for template in templates:
        whole = template.format(x=value)
        repeated = template.count("{x}") > 1 and not value.isidentifier()
        if value != name and (repeated or not atom or len(whole) > 80):
            lines += [f"    {name} = {value}"]
            whole = template.format(x=name)
        value = whole
        atom = template.endswith(")") and not template.startswith(("{x} /", "("))
    return [*lines, f"    {name} = {value}"]
