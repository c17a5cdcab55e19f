"""Intervals and tests on estimates with a standard uncertainty and degrees of freedom."""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy import special

FloatArray = NDArray[np.float64]
Adjustment = Literal["holm", "benjamini-hochberg"]

# A percentile is read off the draws only where at least this many of them lie beyond it.
_DRAWS_BEYOND = 10


class Interval(NamedTuple):
    """Lower and upper limit."""

    low: float
    high: float

    def excludes(self, value: float) -> bool:
        """Whether `value` lies outside; False when the interval is not available."""
        return value < self.low or value > self.high

    def inside(self, low: float, high: float) -> bool:
        """Whether the whole interval lies strictly between `low` and `high`."""
        return low < self.low and self.high < high

    def outside(self, low: float, high: float) -> bool:
        """Whether the whole interval lies beyond `low` or beyond `high`."""
        return self.high < low or self.low > high


def t_quantile(level: float, dof: float) -> float:
    """Quantile of Student's t; the normal quantile for infinite `dof`, NaN for none."""
    if math.isinf(dof):
        return float(special.ndtri(level))
    return float(special.stdtrit(dof, level)) if dof > 0 else math.nan


def welch_satterthwaite(variances: Sequence[float], dofs: Sequence[float]) -> float:
    """Effective degrees of freedom of a sum of independent variance contributions.

    Parameters
    ----------
    variances : sequence of float, shape (n_sources,)
        Squared standard uncertainties, each already times its squared sensitivity.
    dofs : sequence of float, shape (n_sources,)
        Degrees of freedom of each; ``inf`` for a contribution known without doubt.

    Returns
    -------
    float
        ``(sum v)**2 / sum(v**2 / dof)``; ``inf`` when no finite contribution remains, NaN when a
        contribution is not available.

    References
    ----------
    JCGM 100:2008 (GUM), annex G.4.

    Examples
    --------
    >>> round(welch_satterthwaite([0.25**2, 0.57**2, 0.82**2], [9, 4, 14]), 3)
    18.999
    """
    total = math.fsum(variances)
    known = [(v, nu) for v, nu in zip(variances, dofs, strict=True) if v != 0]
    if math.isnan(total) or not all(nu > 0 for _, nu in known):
        return math.nan
    spread = math.fsum(v * v / nu for v, nu in known)
    return total * total / spread if spread > 0 else math.inf


def t_interval(value: float, std_uncertainty: float, dof: float, confidence: float) -> Interval:
    """Two-sided Student t interval; NaN limits when the uncertainty is not available."""
    half = t_quantile(0.5 + confidence / 2, dof) * std_uncertainty
    return Interval(value - half, value + half)


def t_p_value(value: float, std_uncertainty: float, dof: float) -> float:
    """Two-sided p value of `value` against 0; NaN when the uncertainty is not available."""
    if std_uncertainty == 0:
        return 1.0 if value == 0 else 0.0
    t = -abs(value / std_uncertainty)
    if math.isinf(dof):
        return float(2 * special.ndtr(t))
    return float(2 * special.stdtr(dof, t)) if dof > 0 else math.nan


def ratio_interval(ratio: float, relative_uncertainty: float, dof: float, confidence: float) -> Interval:
    """Student t interval of a positive ratio, symmetric on the log scale.

    Parameters
    ----------
    ratio : float
        Ratio of two means, positive.
    relative_uncertainty : float
        Standard uncertainty of the ratio's logarithm.
    dof : float
        Welch-Satterthwaite degrees of freedom of that uncertainty.
    confidence : float
        Level, between 0 and 1.

    Returns
    -------
    Interval
        The same two facts ("a is r times b", "b is 1/r times a") get the same verdict, which an interval
        symmetric on the plain scale does not promise.
    """
    low, high = t_interval(math.log(ratio), relative_uncertainty, dof, confidence)
    return Interval(math.exp(low), math.exp(high))


def expanded_percentile_interval(
    estimate: float, draws: FloatArray, dof: float, confidence: float
) -> Interval:
    """Bootstrap percentiles read at levels widened to Student's t.

    Parameters
    ----------
    estimate : float
        The estimate from the data.
    draws : ndarray, shape (n_replicates,)
        Bootstrap replicates whose deviations already carry the factor sqrt(n / (n - 1)).
    dof : float
        Welch-Satterthwaite degrees of freedom of the estimate.
    confidence : float
        Level, between 0 and 1.

    Returns
    -------
    Interval
        NaN limits when `dof` is not available.

    Notes
    -----
    With t the Student quantile, the lower limit is the percentile at Phi(-t) and the upper one that at
    Phi(t), Phi being the normal distribution: the expanded percentile interval of T. Hesterberg, "What
    Teachers Should Know About the Bootstrap", The American Statistician 69 (2015) 371-386 (attribution
    from memory). Where fewer than ten replicates lie beyond such a level, the percentile with ten beyond
    it is read and its distance from the estimate is stretched by the ratio of the normal quantiles.
    """
    wanted = t_quantile(0.5 + confidence / 2, dof)
    if math.isnan(wanted):
        return Interval(math.nan, math.nan)
    readable = -float(special.ndtri(min(0.25, _DRAWS_BEYOND / len(draws))))
    z = min(wanted, readable)
    low, high = np.quantile(draws, [special.ndtr(-z), special.ndtr(z)])
    stretch = wanted / z
    return Interval(estimate + (low - estimate) * stretch, estimate + (high - estimate) * stretch)


def adjusted_p_values(p_values: Sequence[float], method: Adjustment = "holm") -> list[float]:
    """Adjust p values for looking at many interactions.

    Parameters
    ----------
    p_values : sequence of float, shape (n_cycles,)
        NaN where none is available; these are not counted as tests.
    method : {"holm", "benjamini-hochberg"}
        Holm's step-down (family-wise error) or Benjamini and Hochberg's step-up (false discovery rate).

    Returns
    -------
    list of float
        In the order given; NaN stays NaN.

    References
    ----------
    S. Holm, Scand. J. Stat. 6 (1979) 65-70; Y. Benjamini and Y. Hochberg, J. R. Stat. Soc. B 57 (1995)
    289-300.
    """
    p = np.asarray(p_values, dtype=float)
    available = np.flatnonzero(np.isfinite(p))
    rising = available[np.argsort(p[available], kind="stable")]
    n = len(rising)
    adjusted = np.full(len(p), np.nan)
    if method == "holm":  # the smallest times n, the next times n - 1, ...; none below the one before
        adjusted[rising] = np.maximum.accumulate(p[rising] * np.arange(n, 0, -1))
    else:  # the largest as it is, the next times n / (n - 1), ...; none above the one after
        raised = p[rising] * n / np.arange(1, n + 1)
        adjusted[rising] = np.minimum.accumulate(raised[::-1])[::-1]
    return [float(value) for value in np.minimum(adjusted, 1.0)]
