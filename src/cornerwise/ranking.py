"""Many interactions side by side: ranks to be trusted, and what the strongest are likely to be worth."""

from __future__ import annotations

import math
from collections.abc import Hashable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import special
from scipy.sparse import csr_array

from .intervals import t_quantile

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]
Replicates = NDArray[np.float64] | NDArray[np.float32]

_PAIRS_AT_ONCE = 2_000_000  # comparisons held in memory
_STEP_DOWN_UP_TO = 2000  # estimates; each step needs its own p values
_VALUES_AT_ONCE = 4_000_000  # replicates held in memory
FEWEST_TO_SHRINK = 4  # estimates; fewer say too little of their own scatter
_SIGNS = (-1.0, 1.0)  # of the difference and of the sum


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Estimates:
    """Estimates with what is needed to compare each with each."""

    values: FloatArray  # (n,)
    std_uncertainties: FloatArray  # (n,), finite
    dofs: FloatArray  # (n,), inf allowed
    footprints: Sequence[Mapping[Hashable, FloatArray]]  # errors by source; products sum to covariances


def strength_ranks(strengths: Sequence[float]) -> list[int]:
    """Rank by size, 1 for the largest; ties keep the order given."""
    order = np.argsort(-np.asarray(strengths, dtype=float), kind="stable")
    ranks = np.empty(len(order), dtype=int)
    ranks[order] = np.arange(1, len(order) + 1)
    return [int(rank) for rank in ranks]


def rank_intervals(estimates: Estimates, confidence: float) -> list[tuple[int, int]]:
    """Lowest and highest rank by absolute size that the data allow each estimate.

    Parameters
    ----------
    estimates : Estimates
        All that are ranked.
    confidence : float
        Probability that one estimate's limits hold the rank of its true size; where true sizes are equal,
        all ranks they share.

    Returns
    -------
    list of (int, int)
        1 plus the number shown to be stronger, and the number of all less those shown to be weaker.

    Notes
    -----
    One of two is shown to be stronger when both the difference a - b and the sum a + b of the two signed
    values exclude 0: their product a**2 - b**2 then has a known sign. Each estimate is compared with the
    n - 1 others by Holm's step-down (up to 2000 estimates; Bonferroni's inequality alone beyond), with the
    covariance that shared constructs give the two. Percentiles of bootstrap ranks do not keep their level:
    among equals they are far too narrow.

    The degrees of freedom of a difference or a sum are ``V**2 / (V_a**2 / nu_a + V_b**2 / nu_b)``, which is
    Welch-Satterthwaite's where the two share nothing and smaller where what they share cancels; where what
    they share adds up they are at most the smaller of the two.
    """
    n = len(estimates.values)
    if n == 1:
        return [(1, 1)]
    stronger, weaker = np.zeros(n, dtype=int), np.zeros(n, dtype=int)
    matrix, comparison = _sparse(estimates.footprints), _Comparison(estimates, confidence)
    step = max(1, _PAIRS_AT_ONCE // n)
    size = np.abs(estimates.values)
    for start in range(0, n, step):
        rows = slice(start, min(start + step, n))
        shown = comparison.shown(rows, (matrix[rows] @ matrix.T).toarray())
        larger = size[np.newaxis, :] > size[rows, np.newaxis]
        stronger[rows] = np.sum(shown & larger, axis=1)
        weaker[rows] = np.sum(shown & ~larger, axis=1)
    return [(int(1 + up), int(n - down)) for up, down in zip(stronger, weaker, strict=True)]


def _quantile_table(level: float) -> tuple[FloatArray, FloatArray]:
    """Student's t quantile at `level` against 1 / dof; convex, so interpolation errs on the safe side."""
    inverse: FloatArray = np.concatenate([[0.0], np.geomspace(1e-4, 2.0, 400)])
    quantiles: FloatArray = np.array([t_quantile(level, 1 / x if x > 0 else math.inf) for x in inverse])
    return inverse, quantiles


def _sparse(footprints: Sequence[Mapping[Hashable, FloatArray]]) -> csr_array:
    """Rows of all footprints, a column for every error they name."""
    offsets: dict[Hashable, int] = {}
    width = 0
    for footprint in footprints:
        for key, errors in footprint.items():
            if key not in offsets:
                offsets[key] = width
                width += len(errors)
    named = [(offsets[key], errors) for one in footprints for key, errors in one.items()]
    columns = np.concatenate([offset + np.arange(len(errors)) for offset, errors in named])
    data = np.concatenate([errors for _, errors in named])
    lengths = [sum(map(len, one.values())) for one in footprints]
    bounds = np.concatenate([[0], np.cumsum(lengths)])
    return csr_array((data, columns, bounds), shape=(len(footprints), max(width, 1)))


class _Comparison:
    """Tests of each estimate's absolute size against all others'."""

    def __init__(self, estimates: Estimates, confidence: float) -> None:
        self._values, self._dofs = estimates.values, estimates.dofs
        self._variances = estimates.std_uncertainties**2
        self._doubt = np.where(self._variances > 0, self._variances**2 / estimates.dofs, 0.0)
        self._alpha = 1 - confidence
        self._others = len(self._values) - 1
        self._at_once = _quantile_table(1 - self._alpha / self._others / 2)
        self._alone = _quantile_table(1 - self._alpha / 2)

    def shown(self, rows: slice, covariance: FloatArray) -> BoolArray:
        """Whether each of `rows` is shown to differ in absolute size from each of all."""
        step_down = self._others <= _STEP_DOWN_UP_TO
        spreads = [self._spread(rows, sign * covariance) for sign in _SIGNS]
        # No t quantile is smaller than the normal one: most pairs need no more than this.
        least = (self._alone if step_down else self._at_once)[1][0] ** 2
        away: list[BoolArray] = [
            self._combined(rows, sign) ** 2 > least * spread
            for sign, spread in zip(_SIGNS, spreads, strict=True)
        ]
        sure = away[0] & away[1]
        own, other = np.nonzero(sure)
        places = (own + rows.start, other)
        tests = [
            self._test(*places, sign, spread[sure], covariance[sure])
            for sign, spread in zip(_SIGNS, spreads, strict=True)
        ]
        at_once = np.logical_and.reduce([t > np.interp(nu, *self._at_once) for t, nu in tests])
        sure[sure] = at_once
        if step_down:
            alone = np.logical_and.reduce([t > np.interp(nu, *self._alone) for t, nu in tests])
            between = np.flatnonzero(alone & ~at_once)
            p = np.max([_two_sided(t[between], nu[between]) for t, nu in tests], axis=0)
            bounds = np.searchsorted(own[between], np.arange(len(sure) + 1))
            for row in np.flatnonzero(np.diff(bounds)):
                here = slice(bounds[row], bounds[row + 1])
                self._step_down(sure[row], other[between][here], p[here])
        return sure

    def _spread(self, rows: slice, signed_covariance: FloatArray) -> FloatArray:
        """Variance of difference or sum."""
        spread = self._variances[rows, np.newaxis] + self._variances + 2 * signed_covariance
        return np.maximum(spread, 0.0, out=spread)

    def _combined(self, rows: slice, sign: float) -> FloatArray:
        combined: FloatArray = self._values[rows, np.newaxis] + sign * self._values
        return combined

    def _test(
        self, a: IntArray, b: IntArray, sign: float, spread: FloatArray, covariance: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Absolute t of difference or sum of each of `a` with each of `b`, and 1 / degrees of freedom."""
        doubt = self._doubt[a] + self._doubt[b]
        with np.errstate(divide="ignore", invalid="ignore"):
            t = np.abs(self._values[a] + sign * self._values[b]) / np.sqrt(spread)
            inverse = np.where(doubt > 0, doubt / spread**2, 0.0)
        smaller = np.minimum(self._dofs[a], self._dofs[b])
        return t, np.where(sign * covariance > 0, np.maximum(inverse, 1 / smaller), inverse)

    def _step_down(self, sure: BoolArray, chosen: IntArray, p: FloatArray) -> None:
        """Go on from those that are sure with one test less for each that is shown."""
        done = int(sure.sum())
        for place in np.argsort(p, kind="stable"):
            if p[place] > self._alpha / (self._others - done):
                return
            sure[chosen[place]] = True
            done += 1


def _two_sided(t: FloatArray, inverse_dof: FloatArray) -> FloatArray:
    """Two-sided p values of absolute t values."""
    dof = 1 / np.maximum(inverse_dof, 1e-12)
    p: FloatArray = 2 * special.stdtr(dof, -t)
    return p


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Shrunken:
    """Estimates drawn towards 0 by as much as chance is likely to have pushed them out."""

    values: FloatArray  # (n,)
    std_uncertainties: FloatArray  # (n,)


def shrink(values: FloatArray, std_uncertainties: FloatArray) -> Shrunken:
    """Empirical Bayes estimates for interactions scattered about 0.

    Parameters
    ----------
    values : ndarray, shape (n,)
        Estimates.
    std_uncertainties : ndarray, shape (n,)
        Theirs.

    Returns
    -------
    Shrunken
        The same as given for fewer than 4 estimates, which say too little of their own scatter.

    Notes
    -----
    True values are taken to be normal about 0 with variance A; A solves ``sum y**2 / (u**2 + A) = n``, or is
    0. Each estimate is multiplied by 1 - B with ``B = (n - 2) / n * u**2 / (u**2 + A)``, which for equal
    uncertainties is the estimator of James and Stein; its squared uncertainty is ``u**2 (1 - B)`` plus the
    part from not knowing A, ``2 / (n - 2) * B**2 * y**2``, times the mean of u**2 + A over its own. C. N.
    Morris, "Parametric Empirical Bayes Inference", J. Am. Stat. Assoc. 78 (1983) 47-55 (from memory).
    """
    n = len(values)
    if n < FEWEST_TO_SHRINK:
        return Shrunken(values=values, std_uncertainties=std_uncertainties)
    squared = std_uncertainties**2
    scatter = _scatter_of_truth(values, squared)
    with np.errstate(divide="ignore", invalid="ignore"):
        noise = np.where(squared > 0, squared / (squared + scatter), 0.0)
        weight = np.where(squared > 0, (np.mean(squared) + scatter) / (squared + scatter), 0.0)
    b = (n - 2) / n * noise
    variance = squared * (1 - b) + 2 / (n - 2) * b**2 * values**2 * weight
    return Shrunken(values=(1 - b) * values, std_uncertainties=np.sqrt(variance))


def _scatter_of_truth(values: FloatArray, squared: FloatArray) -> float:
    """Variance A of the true values about 0, by halving the interval it lies in."""

    def excess(a: float) -> float:
        return math.fsum(y * y / (v + a) if v + a > 0 else 0.0 for y, v in zip(values, squared, strict=True))

    low, high = 0.0, float(np.max(values**2))
    if high == 0 or (np.all(squared > 0) and excess(0.0) <= len(values)):
        return 0.0
    for _ in range(100):
        middle = (low + high) / 2
        low, high = (middle, high) if excess(middle) > len(values) else (low, middle)
    return high


def first_probabilities(
    centres: FloatArray, deviations: Replicates, scale: FloatArray, first: int
) -> FloatArray:
    """Probability that each of several numbers is among the `first` largest by absolute size.

    Parameters
    ----------
    centres : ndarray, shape (n,)
        Where each is likely to be.
    deviations : ndarray, shape (n, n_replicates)
        Joint replicates of the errors.
    scale : ndarray, shape (n,)
        What each row of `deviations` is multiplied with.
    first : int
        How many count as the first.

    Returns
    -------
    ndarray, shape (n,)
    """
    n, replicates = deviations.shape
    if first >= n:
        return np.ones(n)
    counts = np.zeros(n)
    step = max(1, _VALUES_AT_ONCE // n)
    for start in range(0, replicates, step):
        some = np.ascontiguousarray(deviations[:, start : start + step].T, dtype=float)
        sizes = np.abs(centres + scale * some)
        limit = np.partition(sizes, n - first, axis=1)[:, n - first]
        counts += np.sum(sizes >= limit[:, np.newaxis], axis=0)
    probabilities: FloatArray = counts / replicates
    return probabilities


def simultaneous_quantile(deviations: Replicates, std_uncertainties: FloatArray, confidence: float) -> float:
    """Normal quantile that the largest of all standardised errors stays below with this probability.

    Parameters
    ----------
    deviations : ndarray, shape (n, n_replicates)
        Joint replicates of the errors, with these standard uncertainties.
    std_uncertainties : ndarray, shape (n,)
        Those that are 0 have no part in it.
    confidence : float
        Level, between 0 and 1.

    Returns
    -------
    float
        To be turned into a t quantile at the same level for each estimate's degrees of freedom.
    """
    known = std_uncertainties > 0
    if not known.any():
        return t_quantile(0.5 + confidence / 2, math.inf)
    largest = np.zeros(deviations.shape[1])
    for errors, u in zip(deviations[known], std_uncertainties[known], strict=True):
        np.maximum(largest, np.abs(errors) / u, out=largest)
    single = t_quantile(0.5 + confidence / 2, math.inf)
    return max(single, float(np.quantile(largest, confidence)))
