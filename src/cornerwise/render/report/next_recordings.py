"""What to record next, as the report shows it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ...result import InteractionRow, NextStepRow, Result
from ...units import in_percent
from ..planning import shares_words
from ..rounding import decimals_for, number
from .views import CycleView


@dataclass(frozen=True, kw_only=True, slots=True)
class NextView:
    """One unresolved cycle and what would settle it, as text."""

    anchor: str
    row: NextStepRow
    now: str
    wanted: str
    next: str
    after: str
    further: str
    which: str


def next_views(result: Result, cycles: Sequence[CycleView]) -> list[NextView]:
    """Every unresolved cycle, the one that takes the fewest cells first.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    cycles : sequence of CycleView
        For the places that the names lead to.
    """
    anchors = {one.row.cycle: one.anchor for one in cycles}
    rows = sorted(result.next_steps, key=lambda row: (row.further is None, row.further or 0))
    return [_view(row, anchors[row.cycle], result.settings.confidence) for row in rows]


def _view(row: NextStepRow, anchor: str, confidence: float) -> NextView:
    decimals = decimals_for(row.half_width, 3)
    adjusted = row.half_width is not None and row.confidence > confidence
    level = f" (at {in_percent(row.confidence, 1)})" if adjusted else ""
    which = shares_words(row.shares)
    if row.limit is not None:
        which = f"held back by {row.limit}: {row.remedy}"
    return NextView(
        anchor=anchor,
        row=row,
        now=number(row.half_width, decimals) + level,
        wanted=number(row.half_width_wanted, decimals),
        next="" if row.limit is not None else f"{row.next_construct}, {row.next_kind}",
        after="" if row.limit is not None else number(row.half_width_after_next, decimals),
        further="no number" if row.further is None else str(row.further),
        which=which,
    )


def next_charges(cycles: Sequence[CycleView]) -> list[tuple[str, str, str]]:
    """Anchor, cycle and what would settle its shortcut, for those that charges leave open."""
    found = [(one.anchor, one.row.cycle, _charges(one.row)) for one in cycles]
    return [one for one in found if one[2]]


def _charges(row: InteractionRow) -> str:
    assumed = [one.construct for one in row.corner_charges if one.verdict == "assumed"]
    if row.shortcut_verdict == "untested" and assumed:
        return f"measure the total charge of {', '.join(assumed)}, which is assumed"
    open_ones = [one.construct for one in row.corner_charges if one.verdict == "unresolved"]
    if row.shortcut_verdict == "unresolved" and open_ones and row.charge_cells_needed is not None:
        return (
            f"{row.charge_cells_needed} charge values on the wild type and on each of {', '.join(open_ones)} "
            "for a verdict, if ratios and scatter come out the same"
        )
    return ""
