"""Which further recordings: the best use of a fixed number of them, and the fewest that reach a goal."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from .board import Board

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

Criterion = Literal["mean", "largest"]

# The mean of this power of the half-widths stands in for the largest of them: it has a slope everywhere.
_POWER_FOR_LARGEST = 40
_MOST_SWAPS = 200
_SWAPS_TRIED = 24
_ROUNDING = 1e-9
_TIGHTER = 0.97  # by this a plain target is made stricter when the true one was not reached


def _weigh(half_widths: FloatArray, now: FloatArray, criterion: Criterion) -> FloatArray:
    """What counts of half-widths; `now` only sets the scale."""
    if criterion == "mean":
        return half_widths
    weighed: FloatArray = (half_widths / now.max()) ** _POWER_FOR_LARGEST
    return weighed


def value_of(half_widths: FloatArray, criterion: Criterion) -> float:
    """The criterion itself."""
    return float(np.mean(half_widths) if criterion == "mean" else np.max(half_widths))


def first_best(gain: FloatArray) -> int:
    """Place of the smallest number, of the first of those that rounding alone tells apart."""
    least = float(np.min(gain))
    return int(np.flatnonzero(gain <= least + _ROUNDING * abs(least))[0])


def change(board: Board, totals: IntArray, criterion: Criterion, sign: int = 1) -> FloatArray:
    """Change of the criterion with one step more or less of each kind, shape (n_recordings,)."""
    now = board.plain(totals)
    after = board.after_one(totals, sign)
    difference = _weigh(after, now, criterion) - _weigh(now, now, criterion)[:, np.newaxis]
    return board.collect(difference)


def spend(board: Board, start: IntArray, recordings: int, criterion: Criterion) -> IntArray:
    """Best use of a number of further cells.

    Parameters
    ----------
    board : Board
        The estimates.
    start : ndarray, shape (n_recordings,)
        Cells to start from; none of them is given up.
    recordings : int
        Further cells. Where they come in batches the last ones may not suffice for one and are left over.
    criterion : {"mean", "largest"}
        Of the half-widths, made as small as can be.

    Returns
    -------
    ndarray, shape (n_recordings,)
        Totals.

    Notes
    -----
    Cell by cell to where it lowers the criterion most, then exchanges of one cell for another as long as
    they help. For the sum of convex functions of one number each the first step alone is exact (B. Fox,
    Management Science 13 (1966) 210-216, from memory); degrees of freedom bend that a little, and
    tests/test_planning_search.py compares with every possible split.
    """
    totals, left = start.copy(), recordings
    while (board.step <= left).any():
        gain = np.where(board.step <= left, change(board, totals, criterion, 1) / board.step, np.inf)
        best = first_best(gain)
        totals[best] += board.step[best]
        left -= int(board.step[best])
    return _exchanged(board, totals, start, criterion)


def _exchanged(board: Board, totals: IntArray, start: IntArray, criterion: Criterion) -> IntArray:
    """Totals after every exchange of one step for another that helps."""
    best = _objective(board, totals, criterion)
    for _ in range(_MOST_SWAPS):
        trials = [_exchange(board, totals, *pair) for pair in _exchanges(board, totals, start, criterion)]
        values = [_objective(board, trial, criterion) for trial in trials]
        if not trials or min(values) >= best * (1 - 1e-12):
            break
        best = min(values)
        totals = trials[values.index(best)]
    return totals


def _objective(board: Board, totals: IntArray, criterion: Criterion) -> float:
    half_widths = board.plain(totals)
    return float(np.mean(half_widths if criterion == "mean" else half_widths**_POWER_FOR_LARGEST))


def _exchanges(
    board: Board, totals: IntArray, start: IntArray, criterion: Criterion
) -> list[tuple[int, int]]:
    """Pairs of what to record less and more of, the most promising first."""
    gain = change(board, totals, criterion, 1)
    loss = np.where(totals - board.step >= start, change(board, totals, criterion, -1), np.inf)
    worth = loss[:, np.newaxis] + gain[np.newaxis]
    worth[board.step[:, np.newaxis] != board.step[np.newaxis]] = np.inf
    np.fill_diagonal(worth, np.inf)
    order = np.argsort(worth, axis=None, kind="stable")[:_SWAPS_TRIED]
    return [
        (int(less), int(more))
        for less, more in zip(*np.unravel_index(order, worth.shape), strict=True)
        if np.isfinite(worth[less, more])
    ]


def _exchange(board: Board, totals: IntArray, less: int, more: int) -> IntArray:
    trial = totals.copy()
    trial[less] -= board.step[less]
    trial[more] += board.step[more]
    return trial


def equal_shares(board: Board, start: IntArray, recordings: int) -> IntArray:
    """The same number of further cells of every kind, what is left over to the first ones."""
    totals, left = start.copy(), recordings
    while (board.step <= left).any():
        for place, step in enumerate(board.step):
            if step <= left:
                totals[place] += step
                left -= int(step)
    return totals


class _Trail:
    """Totals after 0, 1, 2, ... steps, each taken where it lowers the half-width most."""

    def __init__(self, board: Board, start: IntArray) -> None:
        self._board = board
        self._totals = [start]

    def __getitem__(self, steps: int) -> IntArray:
        while len(self._totals) <= steps:
            totals = self._totals[-1].copy()
            gain = change(self._board, totals, "mean", 1) / self._board.step
            best = first_best(gain)
            totals[best] += self._board.step[best]
            self._totals.append(totals)
        return self._totals[steps]

    def cost(self, steps: int) -> int:
        """Cells of so many steps."""
        return int(np.sum(self[steps] - self._totals[0]))


def fewest(board: Board, start: IntArray, reached: Callable[[IntArray], bool], most: int) -> IntArray | None:
    """Fewest further cells for one estimate.

    Parameters
    ----------
    board : Board
        One estimate.
    start : ndarray, shape (n_recordings,)
        Cells to start from.
    reached : callable
        Whether totals do; more cells never undo it.
    most : int
        Further cells that may be asked for.

    Returns
    -------
    ndarray or None
        Totals; None where even `most` would not do.
    """
    if reached(start):
        return start
    trail, low, high = _Trail(board, start), 0, 1
    while not reached(trail[high]):
        if trail.cost(high) >= most:
            return None
        low, high = high, 2 * high
    while high - low > 1:
        middle = (low + high) // 2
        low, high = (low, middle) if reached(trail[middle]) else (middle, high)
    if trail.cost(high) > most:
        return None
    # One step less may do when it is spent a little differently from the trail.
    for pair in _exchanges(board, trail[low], start, "mean"):
        trial = _exchange(board, trail[low], *pair)
        if reached(trial):
            return trial
    return trail[high]


def fewest_for_all(
    board: Board,
    start: IntArray,
    targets: FloatArray,
    reached: Callable[[int, IntArray], bool],
    most: int,
) -> IntArray | None:
    """Few further cells with which every estimate reaches its goal.

    Parameters
    ----------
    board : Board
        The estimates.
    start : ndarray, shape (n_recordings,)
        Cells to start from.
    targets : ndarray, shape (n_estimates,)
        Plain half-widths that reach the goals by and large.
    reached : callable
        Whether one estimate does with totals.
    most : int
        Further cells that may be asked for.

    Returns
    -------
    ndarray or None
        Totals; None where even `most` would not do.

    Notes
    -----
    Cell by cell to where the sum of what the estimates fall short, as fractions of their targets, shrinks
    most; then every cell that no goal needs is given back, those least missed first.
    """
    totals, strict = start.copy(), targets.copy()
    short = [row for row in range(len(strict)) if not reached(row, totals)]
    while short:
        narrower = _narrowed(board, totals, strict, short, most - int(np.sum(totals - start)))
        if narrower is None:
            return None
        totals = narrower
        short = [row for row in short if not reached(row, totals)]
        strict[short] = np.minimum(strict, board.plain(totals))[short] * _TIGHTER
    return _given_back(board, totals, start, reached)


def _narrowed(
    board: Board, totals: IntArray, targets: FloatArray, rows: Sequence[int], most: int
) -> IntArray | None:
    """Totals with which the plain half-widths of these rows come down to their targets."""
    totals, left = totals.copy(), most
    goals = np.full(len(targets), np.inf)
    goals[rows] = targets[rows]
    while True:
        now = board.plain(totals)
        if (now <= goals).all():
            return totals
        missing = np.maximum(now / goals - 1, 0.0)
        after = np.maximum(board.after_one(totals) / goals[:, np.newaxis] - 1, 0.0)
        gain = board.collect(after - missing[:, np.newaxis]) / board.step
        best = first_best(gain)
        totals[best] += board.step[best]
        left -= int(board.step[best])
        if left < 0:
            return None


def _given_back(
    board: Board, totals: IntArray, start: IntArray, reached: Callable[[int, IntArray], bool]
) -> IntArray:
    """Totals without the cells that no goal needs."""
    totals = totals.copy()
    for place in np.argsort(change(board, totals, "mean", -1) / board.step, kind="stable"):
        step = board.step[place]
        while totals[place] - step >= start[place]:
            totals[place] -= step
            if not all(reached(row, totals) for row in board.rows_with(int(place))):
                totals[place] += step
                break
    return totals
