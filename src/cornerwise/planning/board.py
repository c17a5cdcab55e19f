"""Many estimates at once, in arrays: what one more cell of each kind would be worth to all of them."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from .points import t_quantiles
from .prospects import Prospect, Recording, kept_cells, recordings_of, steps

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

_FEWEST_DOF = 0.5


class Board:
    """Half-widths of several estimates as functions of the cells of each kind.

    Parameters
    ----------
    prospects : sequence of Prospect
        The estimates, every scatter known.
    confidence : sequence of float
        Level of the interval of each.

    Notes
    -----
    A *plain* half-width takes every scatter to come out as it was seen: Student's quantile at the
    Welch-Satterthwaite degrees of freedom times the standard uncertainty. It is within a few per cent of the
    expected one and ranks further recordings alike; what is told of a plan is computed by `outlook`.
    """

    def __init__(self, prospects: Sequence[Prospect], confidence: Sequence[float]) -> None:
        self.prospects = tuple(prospects)
        self.recordings: tuple[Recording, ...] = recordings_of(prospects)
        kept, together = kept_cells(prospects), steps(prospects)
        self.kept: IntArray = np.array([kept[one] for one in self.recordings], dtype=np.int64)
        self.step: IntArray = np.array([together[one] for one in self.recordings], dtype=np.int64)
        self.least: IntArray = self._least()
        shape = (len(self.prospects), max((len(one.terms) for one in prospects), default=0))
        place = {one: number for number, one in enumerate(self.recordings)}
        self._place: IntArray = np.zeros(shape, dtype=np.int64)
        self._squares, self._kept = np.zeros(shape), np.ones(shape)
        self._dof, self._each = np.ones(shape), np.zeros(shape)
        for row, one in enumerate(self.prospects):
            for column, term in enumerate(one.terms):
                at = row, column
                self._place[at], self._squares[at] = place[term.recording], term.sd**2
                self._kept[at], self._dof[at], self._each[at] = term.kept, term.kept_dof, term.dof_each
        self._real = self._squares > 0
        fixed = [one.fixed for one in self.prospects]
        self._fixed: FloatArray = np.array([sum(part.variance for part in parts) for parts in fixed])
        self._fixed_spread: FloatArray = np.array(
            [sum(part.variance**2 / part.dof for part in parts) for parts in fixed]
        )
        self.confidence = tuple(confidence)
        self._levels = [0.5 + level / 2 for level in confidence]

    def _least(self) -> IntArray:
        least: dict[Recording, int] = {}
        for one in self.prospects:
            for term in one.terms:
                least[term.recording] = max(term.least, least.get(term.recording, 0))
        return np.array([least[one] for one in self.recordings], dtype=np.int64)

    def _parts(self, totals: IntArray) -> tuple[FloatArray, FloatArray]:
        """Squared standard uncertainty of each term, and its square over its degrees of freedom."""
        n = totals[self._place]
        dof = np.maximum(self._dof + (n - self._kept) * self._each, _FEWEST_DOF)
        variances = self._squares / n
        return variances, variances**2 / dof

    def _half_widths(self, variances: FloatArray, spreads: FloatArray) -> FloatArray:
        """From squared standard uncertainties and their spreads, shape (n_estimates, ...)."""
        with np.errstate(divide="ignore", invalid="ignore"):
            dof = np.where(spreads > 0, variances**2 / spreads, np.inf)
        found = np.empty_like(variances)
        for level in set(self._levels):
            own = [one == level for one in self._levels]
            found[own] = t_quantiles(level, dof[own])
        return found * np.sqrt(variances)

    def plain(self, totals: IntArray) -> FloatArray:
        """Plain half-widths with so many cells of each kind, shape (n_estimates,)."""
        variances, spreads = self._parts(totals)
        return self._half_widths(
            np.sum(variances, axis=1) + self._fixed, np.sum(spreads, axis=1) + self._fixed_spread
        )

    def after_one(self, totals: IntArray, sign: int = 1) -> FloatArray:
        """Plain half-widths after one more step of each term alone, shape (n_estimates, n_terms).

        Terms that an estimate has not got leave it as it is. `sign` -1 takes a step away instead.
        """
        variances, spreads = self._parts(totals)
        changed, changed_spreads = self._parts(np.maximum(totals + sign * self.step, 1))
        return self._half_widths(
            (np.sum(variances, axis=1) + self._fixed)[:, np.newaxis] + changed - variances,
            (np.sum(spreads, axis=1) + self._fixed_spread)[:, np.newaxis] + changed_spreads - spreads,
        )

    def collect(self, per_term: FloatArray) -> FloatArray:
        """Sum of a number of every term by what is recorded, shape (n_recordings,)."""
        real = self._real
        sums: FloatArray = np.zeros(len(self.recordings))
        np.add.at(sums, self._place[real], per_term[real])
        return sums

    def rows_with(self, recording: int) -> list[int]:
        """Estimates that depend on one kind of recording."""
        has = np.any((self._place == recording) & self._real, axis=1)
        return [int(row) for row in np.flatnonzero(has)]

    def in_proportion(self, scale: float) -> IntArray:
        """Cells in proportion to the largest scatter that each kind brings, none of those there given up."""
        largest: FloatArray = np.zeros(len(self.recordings))
        np.maximum.at(largest, self._place, np.sqrt(self._squares))
        return np.maximum(self.kept, np.floor(scale * largest).astype(np.int64))

    def totals(self, cells: Mapping[Recording, int]) -> IntArray:
        """Cells of each kind in the order of `recordings`."""
        return np.array([cells[one] for one in self.recordings], dtype=np.int64)

    def named(self, totals: IntArray) -> dict[Recording, int]:
        """Cells by what is recorded."""
        return {one: int(cells) for one, cells in zip(self.recordings, totals, strict=True)}
