"""For every cycle that is not settled, the recording that helps most and how many would settle it.

Half-widths here are plain ones: what `couple` would print with more cells if the estimate and every scatter
came out as they did. `plan` says what to expect of chance.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ..campaign import Settings
from ..energies import EnergyBook
from ..interactions import interact
from ..intervals import t_quantile
from ..mutations import Cycle
from ..plan_rows import NextStepRow, SettledAs
from ..rows import InteractionRow
from ..tables import available
from .board import Board
from .needs import MOST_CELLS, shares_beyond
from .pooling import Scatters, pooled_scatters
from .prospects import Prospect, prospect
from .search import change, first_best

IntArray = NDArray[np.int64]

_HALVINGS = 16  # of the interval in which the size of a plan is looked for


@dataclass(frozen=True, kw_only=True, slots=True)
class _Way:
    """One way to settle a cycle: an interval that is narrow enough."""

    settled_as: SettledAs
    confidence: float
    half_width: float


def _ways(row: InteractionRow, value: float, settings: Settings, cycles: int) -> list[_Way]:
    """A verdict is due once 0 is excluded, or the whole interval lies inside the threshold."""
    size = abs(value)
    ways = [
        _Way(settled_as="detected", confidence=_adjusted_level(row, settings, cycles), half_width=size),
        _Way(
            settled_as="uncoupled",
            confidence=settings.confidence,
            half_width=settings.energy_threshold - size,
        ),
    ]
    return [way for way in ways if way.half_width > 0]


def _adjusted_level(row: InteractionRow, settings: Settings, cycles: int) -> float:
    """Level at which an interval that excludes 0 has an adjusted p value that is small enough."""
    p, adjusted = row.p_value, row.p_adjusted
    times = float(cycles) if p is None or adjusted is None or adjusted >= 1 else max(1.0, adjusted / p)
    return 1 - (1 - settings.confidence) / times


def next_steps(
    rows: Sequence[InteractionRow], cycles: Sequence[Cycle], book: EnergyBook, settings: Settings
) -> list[NextStepRow]:
    """What would settle every unresolved cycle.

    Parameters
    ----------
    rows : sequence of InteractionRow
        Verdicts of all cycles.
    cycles : sequence of Cycle
        The same cycles.
    book : EnergyBook
        Energies of the campaign.
    settings : Settings
        Confidence and threshold.

    Returns
    -------
    list of NextStepRow
        One for each cycle with the verdict ``unresolved``, in the order given.
    """
    scatters = pooled_scatters(book.ledger)
    by_name: Mapping[str, Cycle] = {cycle.name: cycle for cycle in cycles}
    open_rows = [row for row in rows if row.interaction_verdict == "unresolved"]
    found = [_next_step(row, by_name[row.cycle], book, settings, scatters, len(rows)) for row in open_rows]
    return [one for one in found if one is not None]


def _next_step(
    row: InteractionRow, cycle: Cycle, book: EnergyBook, settings: Settings, scatters: Scatters, cycles: int
) -> NextStepRow | None:
    interaction = interact(cycle, book, settings.wild_type)
    one = prospect(row.cycle, interaction.energy, interaction.ledger, scatters, book.sloping)
    if one.unknown or not math.isfinite(one.value) or not one.terms:
        return None
    ways = _ways(row, one.value, settings, cycles)
    boards = [Board([one], [way.confidence]) for way in ways]
    nearest = max(
        range(len(ways)), key=lambda i: ways[i].half_width / _plain(boards[i], boards[i].kept), default=None
    )
    return None if nearest is None else _row(row, one, ways[nearest], boards[nearest])


def _plain(board: Board, totals: IntArray) -> float:
    return float(board.plain(totals)[0])


def _row(row: InteractionRow, one: Prospect, way: _Way, board: Board) -> NextStepRow:
    place = first_best(change(board, board.kept, "mean") / board.step)
    after = board.kept.copy()
    after[place] += board.step[place]
    lent = any(term.lent for term in one.terms)
    totals = _fewest(board, way.half_width, one)
    fixed = one.fixed if totals is None else ()
    largest = max(fixed, key=lambda part: part.variance, default=None)
    return NextStepRow(
        cycle=row.cycle,
        settled_as=way.settled_as,
        confidence=way.confidence,
        half_width=None if lent else available(_plain(board, board.kept)),
        half_width_wanted=way.half_width,
        next_construct=board.recordings[place].construct,
        next_kind=board.recordings[place].kind,
        half_width_after_next=None if lent else available(_plain(board, after)),
        further=None if totals is None else int(np.sum(totals - board.kept)),
        shares=() if totals is None else shares_beyond(board, totals),
        limit=None if largest is None else largest.name,
        remedy=None if largest is None else largest.remedy,
        energy_unit=row.energy_unit,
    )


def _fewest(board: Board, wanted: float, one: Prospect) -> IntArray | None:
    """Totals that bring the plain half-width down to what is wanted; None where they would be too many.

    A size of plan in proportion to the scatters is found by halving, a little too small, and the last cells
    go one by one to where they help most.
    """
    if _plain(board, board.kept) <= wanted:
        return board.kept
    level = 0.5 + board.confidence[0] / 2
    if t_quantile(level, math.inf) * one.floor >= wanted:
        return None
    low, high = 0.0, MOST_CELLS / max(term.sd for term in one.terms)
    for _ in range(_HALVINGS):
        middle = (low + high) / 2
        low, high = (middle, high) if _plain(board, board.in_proportion(middle)) > wanted else (low, middle)
    totals = board.in_proportion(low)
    while _plain(board, totals) > wanted:
        place = first_best(change(board, totals, "mean") / board.step)
        totals[place] += board.step[place]
        if int(np.sum(totals - board.kept)) > MOST_CELLS:
            return None
    return totals
