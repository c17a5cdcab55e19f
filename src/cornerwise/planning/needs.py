"""The fewest further cells that reach a goal, for each estimate and for all of them at once."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from ..plan_rows import GoalKind, NeedRow, Share
from ..tables import available
from .board import Board
from .goals import Goal, Judged, NarrowEnough, StrongEnough, Sureness, reached, score, within_reach
from .prospects import Prospect, Recording
from .search import fewest, fewest_for_all

IntArray = NDArray[np.int64]

MOST_CELLS = 1000  # further ones for one estimate
_MOST_FOR_ALL = 20_000
ALL = "all"


@dataclass(frozen=True, kw_only=True, slots=True)
class Aim:
    """One estimate with the goal it shall reach."""

    prospect: Prospect
    goal: Goal

    def reached(self, board: Board, totals: IntArray, sureness: Sureness = "as seen") -> bool:
        """Whether totals do."""
        return reached(self.goal, self.prospect, board.named(totals), sureness)


def _kind(goal: Goal) -> GoalKind:
    if isinstance(goal, NarrowEnough):
        return "half-width"
    if isinstance(goal, Judged):
        return "charge equal" if goal.verdict == "equal" else "charge changed"
    assert isinstance(goal, StrongEnough)
    return "power"


def _wanted(goal: Goal) -> float:
    return abs(goal.need)


def shares_beyond(board: Board, totals: IntArray) -> tuple[Share, ...]:
    """Cells of each kind beyond those there are, most first."""
    further = [
        Share(construct=one.construct, kind=one.kind, cells=int(cells))
        for one, cells in zip(board.recordings, totals - board.kept, strict=True)
        if cells > 0
    ]
    return tuple(sorted(further, key=lambda share: -share.cells))


def _why_not(aim: Aim) -> str:
    """Why no number of cells would do."""
    prospect, goal = aim.prospect, aim.goal
    if prospect.unknown:
        which = prospect.unknown[0]
        return f"{which.construct} has fewer than two cells with {which.kind}, so its scatter is unknown"
    if isinstance(goal, Judged) and goal.half_width(prospect.value) <= 0:
        return (
            "the charge that is taken to be the true one lies outside the margin"
            if goal.verdict == "equal"
            else "the charge that is taken to be the true one equals the wild type's"
        )
    if not prospect.fixed:
        return "no number of cells would do"
    largest = max(prospect.fixed, key=lambda part: part.variance)
    return f"no number of cells makes this part smaller: {largest.name}; {largest.remedy}"


def _fewest(aim: Aim, board: Board, start: IntArray, sureness: Sureness) -> IntArray | None:
    return fewest(board, start, lambda totals: aim.reached(board, totals, sureness), MOST_CELLS)


def _nothing(aim: Aim, reason: str) -> NeedRow:
    return NeedRow(
        subject=aim.prospect.name,
        goal=_kind(aim.goal),
        wanted=_wanted(aim.goal),
        further=None,
        further_low=None,
        further_high=None,
        expected=None,
        shares=(),
        reason=reason,
    )


def _further(board: Board, totals: IntArray | None) -> int | None:
    return None if totals is None else int(np.sum(totals - board.kept))


def need(aim: Aim, starts: Mapping[Recording, int]) -> NeedRow:
    """Fewest further cells for one estimate.

    Parameters
    ----------
    aim : Aim
        The estimate and its goal.
    starts : mapping of Recording to int
        Cells to start from.
    """
    if not within_reach(aim.goal, aim.prospect):
        return _nothing(aim, _why_not(aim))
    board = Board([aim.prospect], [aim.goal.confidence])
    start = board.totals(starts)
    found = _fewest(aim, board, start, "as seen")
    if found is None:
        return _nothing(aim, f"more than {MOST_CELLS} further cells")
    low, high = (_further(board, _fewest(aim, board, start, sure)) for sure in _SURENESS)
    further = int(np.sum(found - board.kept))
    return NeedRow(
        subject=aim.prospect.name,
        goal=_kind(aim.goal),
        wanted=_wanted(aim.goal),
        further=further,
        further_low=None if low is None else min(low, further),
        further_high=None if high is None else max(high, further),
        expected=available(abs(score(aim.goal, aim.prospect, board.named(found)))),
        shares=shares_beyond(board, found),
        reason=None,
    )


_SURENESS: tuple[Sureness, Sureness] = ("lucky", "sure")


def need_of_all(aims: Sequence[Aim], starts: Mapping[Recording, int]) -> NeedRow | None:
    """Few further cells with which all estimates reach their goals, those left out that cannot.

    Parameters
    ----------
    aims : sequence of Aim
        Estimates with goals of one kind.
    starts : mapping of Recording to int
        Cells to start from.

    Returns
    -------
    NeedRow or None
        None where fewer than two estimates can reach their goal.
    """
    possible = [aim for aim in aims if within_reach(aim.goal, aim.prospect)]
    if len(possible) < 2:
        return None
    board = Board([aim.prospect for aim in possible], [aim.goal.confidence for aim in possible])
    start = board.totals(starts)
    targets = np.array([aim.goal.half_width(aim.prospect.value) for aim in possible])
    found = fewest_for_all(
        board, start, targets, lambda row, totals: possible[row].reached(board, totals), _MOST_FOR_ALL
    )
    left_out = [aim.prospect.name for aim in aims if aim not in possible]
    reason = f"without {', '.join(left_out)}" if left_out else None
    if found is None:
        return None
    scores = [score(aim.goal, aim.prospect, board.named(found)) for aim in possible]
    return NeedRow(
        subject=ALL,
        goal=_kind(possible[0].goal),
        wanted=_wanted(possible[0].goal),
        further=_further(board, found),
        further_low=None,
        further_high=None,
        expected=available(abs(min(scores))),
        shares=shares_beyond(board, found),
        reason=reason,
    )
