"""A plan as a person reads it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import IO

from rich.console import Console
from rich.table import Table as Grid
from rich.text import Text

from ..plan_rows import NeedRow, OutlookRow, Share
from ..planning.plan import Plan
from .legend import percent
from .ordering import grouped
from .rounding import decimals_for, number
from .terminal import screen_on

_DIGITS = 2  # significant, of a half-width


def print_plan(plan: Plan, stream: IO[str]) -> None:
    """Half-widths, power, cells needed and the best split.

    Parameters
    ----------
    plan : Plan
        What `cornerwise.plan` returned.
    stream : text stream
        At a terminal the tables are fitted to its width; elsewhere the text is plain and never cut.
    """
    with screen_on(stream) as screen:
        screen.print(Text(plan.title, style="bold"))
        _show_outlooks(plan, screen)
        for heading, rows in _by_goal(plan):
            _show_grid(screen, heading, _need_grid(rows))
        _show_split(plan, screen)
        screen.print()
        for line in (*legend(plan), *(f"Note: {note}" for note in plan.notes)):
            screen.print(Text(line))


def _plain_grid(headers: Iterable[str], words: Sequence[str]) -> Grid:
    """Table without rules; the columns in `words` hold words, the others numbers."""
    grid = Grid(box=None, padding=(0, 1, 0, 0), pad_edge=False, header_style="bold")
    for header in headers:
        grid.add_column(Text(header), justify="left" if header in words else "right", overflow="fold")
    return grid


def range_words(expected: float | None, low: float | None, high: float | None, decimals: int | None) -> str:
    """A number with its likely range, where that is one: ``0.51 (0.49-0.55)``."""
    if expected is None or low is None or high is None:
        return "" if expected is None else number(expected, decimals)
    limits = number(low, decimals), number(high, decimals)
    text = number(expected, decimals)
    return text if limits == (text, text) else f"{text} ({limits[0]}-{limits[1]})"


def half_width_words(row: OutlookRow) -> str:
    """Half-width with its range."""
    decimals = decimals_for(row.half_width, _DIGITS)
    return range_words(row.half_width, row.half_width_low, row.half_width_high, decimals)


def power_words(row: OutlookRow) -> str:
    """Power in per cent with its range."""
    expected, low, high = (
        None if one is None else 100 * one for one in (row.power, row.power_low, row.power_high)
    )
    return range_words(expected, low, high, decimals=0)


def _show_outlooks(plan: Plan, screen: Console) -> None:
    now = any(row.cells_each is None for row in plan.outlooks)
    shown: list[int | None] = [None, *plan.cells] if now else [*plan.cells]
    headers = ["cycle", *("now" if cells is None else f"{cells} cells each" for cells in shown)]
    rows = {(row.cycle, row.cells_each): row for row in plan.outlooks}
    cycles = dict.fromkeys(row.cycle for row in plan.outlooks)
    width = f"Half-width of the {percent(plan.confidence)} interval, {_unit(plan)}"
    power = f"Power against {plan.true_interaction:.3g} {plan.energy_unit}, %"
    for heading, below, words in (
        (width, "", half_width_words),
        (power, power_sentence(plan), power_words),
    ):
        grid = _plain_grid(headers, ("cycle",))
        for cycle in cycles:
            grid.add_row(*map(Text, (cycle, *(words(rows[cycle, cells]) for cells in shown))))
        _show_grid(screen, heading, grid, below)


def power_sentence(plan: Plan) -> str:
    """What power counts, and what it leaves out."""
    cycles = plan.adjusted_for
    adjusted = f"; the verdicts also need the p value adjusted for {cycles} cycles" if cycles > 1 else ""
    return f"power: that the {percent(plan.confidence)} interval of this cycle alone excludes 0{adjusted}"


def _show_grid(screen: Console, heading: str, grid: Grid, below: str = "") -> None:
    screen.print()
    screen.print(Text(heading, style="bold"))
    if below:
        screen.print(Text(below))
    screen.print(grid)


def _unit(plan: Plan) -> str:
    return f"{plan.energy_unit} per channel"


def goal_words(row: NeedRow, plan: Plan) -> str:
    """What a number of cells is needed for."""
    if row.goal == "half-width":
        return f"a half-width of {row.wanted:.3g} {plan.energy_unit}"
    if row.goal == "power":
        alone = " (p not adjusted)" if plan.adjusted_for > 1 else ""
        truth = f"{plan.true_interaction:.3g} {plan.energy_unit}"
        return f"a power of {percent(row.wanted)} against {truth}{alone}"
    return (
        f"the verdict {row.goal.removeprefix('charge ')} on a charge with {percent(row.wanted)} probability"
    )


def _by_goal(plan: Plan) -> list[tuple[str, list[NeedRow]]]:
    goals: dict[str, list[NeedRow]] = {}
    for row in plan.needs:
        goals.setdefault(f"Fewest further cells for {goal_words(row, plan)}", []).append(row)
    return list(goals.items())


def further_words(row: NeedRow) -> str:
    """Number of further cells with its range."""
    if row.further is None:
        return "-"
    if row.further_low is None and row.further_high is None:
        return str(row.further)
    low = row.further if row.further_low is None else row.further_low
    if low == row.further == row.further_high:
        return str(row.further)
    high = "more" if row.further_high is None else str(row.further_high)
    return f"{row.further} ({low}-{high})"


def shares_words(shares: Sequence[Share]) -> str:
    """Which cells by kind, most first: ``curves: 5 WT, 3 A; charges: 2 WT``."""
    by_kind = grouped((share.kind, f"{share.cells} {share.construct}") for share in shares)
    return "; ".join(f"{kind}: {', '.join(cells)}" for kind, cells in by_kind.items())


def _need_grid(rows: Sequence[NeedRow]) -> Grid:
    grid = _plain_grid(("for", "cells", "which"), ("for", "which"))
    for row in rows:
        which = "; ".join(filter(None, (shares_words(row.shares), row.reason)))
        subject = "all at once" if row.subject == "all" else row.subject
        grid.add_row(*map(Text, (subject, further_words(row), which or "none are needed")))
    return grid


def _show_split(plan: Plan, screen: Console) -> None:
    if plan.split is None:
        return
    split = plan.split
    grid = _plain_grid(("construct", "kind", "now", "further", "cycles"), ("construct", "kind"))
    rows = [row for row in plan.splits if row.further]
    for row in sorted(rows, key=lambda row: -row.further):
        numbers = map(str, (row.cells_now, row.further, row.cycles))
        grid.add_row(*map(Text, (row.construct, row.kind, *numbers)))
    _show_grid(screen, f"Best split of {split.recordings} recordings", grid)
    rest = len(plan.splits) - len(rows)
    if rest:
        screen.print(Text(f"none of the other {rest}"))
    screen.print(Text(split_sentence(plan)))


def split_sentence(plan: Plan) -> str:
    """What the best split earns."""
    split = plan.split
    assert split is not None
    decimals = decimals_for(split.best, 3)
    before = "" if split.before is None else f"{number(split.before, decimals)} now, "
    return (
        f"{split.criterion} half-width: {before}{number(split.best, decimals)} with this split, "
        f"{number(split.equal, decimals)} with the same number of every kind ({_unit(plan)})"
    )


def legend(plan: Plan) -> list[str]:
    """What the numbers mean."""
    lines = [
        "in parentheses: what 8 of 10 outcomes lie between, the scatters being as uncertain as the cells "
        "they are known from leave them",
        "cells each: curves and charges of every construct brought to that number, those with more keep them",
    ]
    if any(row.further is not None for row in plan.needs):
        lines.append(
            "fewest cells: on average, if every scatter is what it seems; in parentheses with luck (1 in 10) "
            "and to be sure (9 in 10)"
        )
    return lines
