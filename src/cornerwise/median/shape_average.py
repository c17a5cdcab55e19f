"""The shape of a construct's Q-V curve: several families fitted and averaged by what the data say of each.

A single family is either too stiff, which biases the median by up to tens of mV and unseen, because the
bias is the same in every cell, or too free, which scatters. Averaging by the Laplace approximation of the
marginal likelihood charges each family for exactly the freedom it used at these data and does better than
a count of its parameters, above all where the curve is cut off and the parameters are strongly correlated.

References
----------
Laplace approximation: Tierney L, Kadane JB (1986). J Am Stat Assoc 81, 82-86. (Cited from memory.)
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from ..units import thermal_voltage_mv
from .shape_fit import Cells, PooledFit, Prior, fit_shape
from .shapes import Family, FloatArray

_ROOM_KT_MV = thermal_voltage_mv(22.0)  # bounds need no exact temperature
_SHALLOWEST_E0, _STEEPEST_E0 = 0.8, 15.0
_MIDPOINT_SD = 5.0  # of a component, in widths kT/z of the single sigmoid
_SMALLEST_MIDPOINT_SD_MV = 40.0  # of a ladder's step, whose midpoints may stand in any order
_LOG_SLOPE_SD, _LOG_WEIGHT_SD, _LARGEST_LOG_WEIGHT = 0.8, 1.5, 5.0
_SLOPE_SD = 0.1  # of the mean slope of the baselines, over the measured span as a fraction of the charge
_SLOPE_SCATTER = (0.0, 0.01, 0.03, 0.1)  # of the cells' slopes around it, the same measure
_VARIANCE_FLOOR = 1e-26  # of cells scaled to 0..1: rounding, not noise
_QUANTILES = (0.05, 0.1, 0.2, 0.25, 0.35, 0.5, 0.65, 0.75, 0.8, 0.9, 0.95)

_NOISELESS = 1e-9  # variance below which data are computed, not measured, and a fit may take its time
_TOLERANCE = 1e-4  # of the sum of squares
_SETTLINGS = 12
_HOPELESS = 1.0  # log evidence by which a richer round must fall behind to end the search

SINGLE = Family(kind="parallel", components=1)
# Rounds of rising freedom after the single sigmoid.
ROUNDS = (
    (Family(kind="ladder", components=2), Family(kind="parallel", components=2)),
    (Family(kind="ladder", components=3), Family(kind="parallel", components=3)),
    (Family(kind="ladder", components=4),),
)


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class PooledShape:
    """All candidates fitted to one construct's cells, with their weights."""

    cells: Cells  # as they were weighted
    fits: tuple[PooledFit, ...]
    weights: FloatArray  # (n_fits,), sum 1
    variance: float  # of the noise of a point of weight 1, cells scaled to 0..1
    log_evidence: float  # of all candidates together; comparable between baselines of the same cells

    @property
    def best(self) -> PooledFit:
        """The candidate with the largest weight."""
        return self.fits[int(np.argmax(self.weights))]

    @property
    def median_mv(self) -> FloatArray:
        """Averaged median of each cell (mV), (n_cells,)."""
        return self._averaged(np.array([fit.median_mv for fit in self.fits]))

    @property
    def gain(self) -> FloatArray:
        """Averaged gain of each cell, (n_cells,)."""
        return self._averaged(np.array([fit.gain for fit in self.fits]))

    @property
    def offset(self) -> FloatArray:
        """Averaged low plateau of each cell, (n_cells,)."""
        return self._averaged(np.array([fit.offset for fit in self.fits]))

    @property
    def residual(self) -> FloatArray:
        """Data less the averaged fit, (n_cells, n_points)."""
        return self._averaged(np.array([fit.residual for fit in self.fits]))

    def q(self, v_mv: FloatArray, shift_mv: FloatArray) -> FloatArray:
        """Averaged curve of several cells.

        Parameters
        ----------
        v_mv : ndarray, shape (n_cells, n_points)
            Voltages (mV).
        shift_mv : ndarray, shape (n_fits, n_cells)
            Shift of each cell under each candidate (mV).
        """
        curves = [
            fit.family.q(v_mv - s[:, None], fit.theta) for fit, s in zip(self.fits, shift_mv, strict=True)
        ]
        return self._averaged(np.array(curves))

    @property
    def shifts_mv(self) -> FloatArray:
        """Shift of each cell under each candidate (mV), (n_fits, n_cells)."""
        return np.array([fit.shift_mv for fit in self.fits])

    @property
    def common_variance_mv2(self) -> float:
        """Variance (mV²) of the cells' mean median that the cells share: fitted shape and choice of shape."""
        means = np.array([fit.median_mv.mean() for fit in self.fits])
        within = np.array([self._shape_variance(fit) for fit in self.fits])
        between = (means - (self.weights * means).sum()) ** 2
        return float((self.weights * (within + between)).sum())

    @property
    def own_variance_mv2(self) -> FloatArray:
        """Variance (mV²) of each cell's median from its own noise at a given shape, (n_cells,)."""
        return self._averaged(np.array([self.variance / fit.shift_information for fit in self.fits]))

    def _shape_variance(self, fit: PooledFit) -> float:
        pull = fit.median_by_shape.mean(axis=1)
        return float(self.variance * (pull * np.linalg.solve(fit.information, pull)).sum())

    def _averaged(self, values: FloatArray) -> FloatArray:
        weights = self.weights.reshape((-1,) + (1,) * (values.ndim - 1))
        return np.asarray((weights * values).sum(axis=0), dtype=np.float64)


def pool_shape(cells: Cells, *, rounds: int = len(ROUNDS)) -> PooledShape:
    """Fit the single sigmoid and richer candidates, and weight them.

    Parameters
    ----------
    cells : Cells
        Curves of one construct, scaled to about 0..1 and rising.
    rounds : int, default all
        How many of the rounds of richer candidates to try; they end by themselves where the points do not
        suffice or where a round falls hopelessly behind the one before.

    Returns
    -------
    PooledShape
    """
    quantiles, shift = _quantiles(cells)
    first = _fit_single(cells, quantiles, shift)
    variance = _variance(cells, first)
    fits = [first]
    for candidates in ROUNDS[:rounds]:
        begin = len(fits)
        for family in candidates:
            if _free(cells, family) >= 1:
                fit = _fit_settled(cells, family, first, quantiles, shift, variance)
                fits.append(fit)
                variance = min(variance, _variance(cells, fit))
        scores = np.array([_log_evidence(cells, fit, first, variance) for fit in fits])
        if len(fits) == begin or scores[begin:].max() < scores[:begin].max() - _HOPELESS:
            break
    return _weighted(cells, fits, variance)


def _weighted(cells: Cells, fits: list[PooledFit], variance: float) -> PooledShape:
    scores = np.array([_log_evidence(cells, fit, fits[0], variance) for fit in fits])
    weights = np.exp(scores - scores.max())
    return PooledShape(
        cells=cells,
        fits=tuple(fits),
        weights=weights / weights.sum(),
        variance=variance,
        log_evidence=float(scores.max() + np.log(weights.sum())),
    )


def _free(cells: Cells, family: Family) -> int:
    """Degrees of freedom left over; the common midpoint and one shift are the same parameter."""
    return cells.points - 3 * len(cells.y) - family.parameters + 1


def _variance(cells: Cells, fit: PooledFit) -> float:
    return max(fit.sum_of_squares / max(_free(cells, fit.family), 1), _VARIANCE_FLOOR)


def _quantiles(cells: Cells) -> tuple[Mapping[float, float], FloatArray]:
    """Voltages where the mean curve has moved a given fraction, and each cell's shift from the mean."""
    levels = np.array(_QUANTILES)
    crossings = np.empty((len(cells.y), len(levels)))
    for i, (v, y, w) in enumerate(zip(cells.v_mv, cells.y, cells.weight, strict=True)):
        rising = np.maximum.accumulate(y[w > 0])
        crossings[i] = np.interp(levels, rising, v[w > 0])
    middle = crossings[:, _QUANTILES.index(0.5)]
    shift = middle - middle.mean()
    mean = (crossings - shift[:, None]).mean(axis=0)
    return dict(zip(_QUANTILES, mean.tolist(), strict=True)), shift


def single_starts(v_mv: FloatArray, y: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Where the search for the single sigmoid of each cell begins, and how steep it may be.

    Parameters
    ----------
    v_mv, y : ndarray, shape (n_cells, n_points)
        Voltages (mV) and charges, each cell scaled to about 0..1 and rising.

    Returns
    -------
    start : ndarray, shape (n_cells, 2)
        Midpoint (mV) and logarithm of the slope (1/mV).
    slopes : ndarray, shape (n_cells, 2)
        Smallest and largest logarithm of the slope.
    """
    rising = np.maximum.accumulate(y, axis=1)
    quartiles = np.array([np.interp((0.25, 0.5, 0.75), q, v) for q, v in zip(rising, v_mv, strict=True)])
    start = np.stack([quartiles[:, 1], _log_slope(quartiles[:, 2] - quartiles[:, 0])], axis=1)
    finest = np.median(np.diff(v_mv, axis=1), axis=1)
    steepest = np.maximum(np.log(_STEEPEST_E0 / _ROOM_KT_MV), -np.log(finest))
    return start, np.stack([np.full(len(y), np.log(_SHALLOWEST_E0 / _ROOM_KT_MV)), steepest], axis=1)


def _fit_single(cells: Cells, quantiles: Mapping[float, float], shift: FloatArray) -> PooledFit:
    low, high = _bounds(cells, SINGLE)
    flat = Prior(mean=np.zeros(2), sd=np.full(2, 1e6), low=low, high=high, variance=_VARIANCE_FLOOR)
    start = np.array([[quantiles[0.5], _log_slope(np.array(quantiles[0.75] - quantiles[0.25]))]])
    return fit_shape(cells, SINGLE, start, shift, flat, tolerance=_TOLERANCE)


def _fit_settled(
    cells: Cells,
    family: Family,
    single: PooledFit,
    quantiles: Mapping[float, float],
    shift: FloatArray,
    variance: float,
) -> PooledFit:
    """Fit, and again while the fit shows that the prior was weighted with too much noise."""
    starts = _starts(family, quantiles)
    for _ in range(_SETTLINGS):
        prior = _prior(cells, family, single, variance)
        tolerance = _TOLERANCE if variance > _NOISELESS else _TOLERANCE**2
        fit = fit_shape(cells, family, starts, shift, prior, tolerance=tolerance)
        found = _variance(cells, fit)
        if found > 0.25 * variance:
            break
        variance, starts, shift = found, fit.theta[None], fit.shift_mv
    return fit


def _log_slope(between_quartiles_mv: FloatArray) -> FloatArray:
    """Logarithm of kappa of the sigmoid with the same distance between its quartiles."""
    return np.asarray(np.log(2.0 * np.log(3.0) / np.maximum(between_quartiles_mv, 1e-3)), dtype=np.float64)


def _bounds(cells: Cells, family: Family) -> tuple[FloatArray, FloatArray]:
    """Midpoints inside the measured range, slopes between 0.8 and 15 e0 (steeper where steps are fine)."""
    measured = cells.v_mv[cells.weight > 0]
    low, high = measured.min(), measured.max()
    steps = np.diff(cells.v_mv, axis=1)
    finest = float(np.median(steps[steps > 0])) if (steps > 0).any() else 1.0
    steepest = max(np.log(_STEEPEST_E0 / _ROOM_KT_MV), -np.log(finest))
    shallowest = np.log(_SHALLOWEST_E0 / _ROOM_KT_MV)
    k = family.components
    if family.kind == "parallel":
        extra = [_LARGEST_LOG_WEIGHT] * (k - 1)
        lows = [low] * k + [shallowest] * k + [-x for x in extra]
        return np.array(lows), np.array([high] * k + [steepest] * k + extra)
    # A ladder's steps may stand in any order and each may move less than the whole, so both bounds are wider.
    margin = 0.3 * (high - low)
    lows = [low - margin] * k + [shallowest - np.log(2.0)] * k
    return np.array(lows), np.array([high + margin] * k + [steepest] * k)


def _prior(cells: Cells, family: Family, single: PooledFit, variance: float) -> Prior:
    low, high = _bounds(cells, family)
    mean, sd = _prior_moments(family, single)
    return Prior(mean=mean, sd=sd, low=low, high=high, variance=variance)


def _prior_moments(family: Family, single: PooledFit) -> tuple[FloatArray, FloatArray]:
    """Weak prior around the single sigmoid."""
    k, (midpoint, log_slope) = family.components, single.theta
    spread = _MIDPOINT_SD * float(np.exp(-log_slope))
    if family.kind == "ladder":
        spread = max(spread, _SMALLEST_MIDPOINT_SD_MV)
        return np.array([midpoint] * k + [log_slope] * k), np.array([spread] * k + [_LOG_SLOPE_SD] * k)
    steeper = log_slope + 0.5 if k > 1 else log_slope  # parts are steeper than their sum
    mean = [midpoint] * k + [steeper] * k + [0.0] * (k - 1)
    return np.array(mean), np.array([spread] * k + [_LOG_SLOPE_SD] * k + [_LOG_WEIGHT_SD] * (k - 1))


def _starts(family: Family, at: Mapping[float, float]) -> FloatArray:
    """Starting points: steps spread evenly, bunched, or one of them apart from the rest."""
    s = float(_log_slope(np.array(at[0.75] - at[0.25])))
    steep = s + 0.4
    table: dict[tuple[str, int], list[list[float]]] = {
        ("parallel", 2): [
            [at[0.25], at[0.75], steep, steep, 0.0],
            [at[0.35], at[0.9], steep, s, 1.7],
            [at[0.1], at[0.65], s, steep, -1.7],
        ],
        ("parallel", 3): [
            [at[0.2], at[0.5], at[0.8], steep, steep, steep, 0.0, 0.0],
            [at[0.1], at[0.5], at[0.9], s, steep, s, -1.0, 1.0],
        ],
        ("ladder", 2): [
            [at[0.25], at[0.75], s, s],
            [at[0.5], at[0.5], s - 0.7, s - 0.7],
            [at[0.35], at[0.9], steep, s - 0.5],
            [at[0.1], at[0.65], s - 0.5, steep],
        ],
        ("ladder", 3): [
            [at[0.2], at[0.5], at[0.8], s, s, s],
            [at[0.5], at[0.5], at[0.5], s - 1.0, s - 1.0, s - 1.0],
            [at[0.35], at[0.35], at[0.9], s - 0.5, s - 0.5, s - 0.5],
            [at[0.1], at[0.65], at[0.65], s - 0.5, s - 0.5, s - 0.5],
        ],
        ("ladder", 4): [
            [at[0.1], at[0.35], at[0.65], at[0.9], s, s, s, s],
            [at[0.25], at[0.25], at[0.25], at[0.9], s - 0.5, s - 0.5, s - 0.5, s - 0.5],
            [at[0.5], at[0.5], at[0.5], at[0.5], s - 1.2, s - 1.2, s - 1.2, s - 1.2],
        ],
    }
    return np.array(table[family.kind, family.components])


def _log_evidence(cells: Cells, fit: PooledFit, single: PooledFit, variance: float) -> float:
    """Laplace approximation of the marginal likelihood, the noise integrated out."""
    mean, sd = _prior_moments(fit.family, single)
    free = max(cells.points - 3 * len(cells.y), 1)
    misfit = max(fit.sum_of_squares / cells.points, _VARIANCE_FLOOR)
    scaled = fit.information / variance * np.outer(sd, sd)
    _, log_volume = np.linalg.slogdet(scaled)
    distance = float((((fit.theta - mean) / sd) ** 2).sum())
    slopes = _slope_evidence(cells, fit, variance) if cells.baseline == "line" else 0.0
    return slopes - 0.5 * (free * float(np.log(misfit)) + distance + float(log_volume))


def _slope_evidence(cells: Cells, fit: PooledFit, variance: float) -> float:
    """What the lines under the cells cost: their slopes scatter around a mean that the cells share.

    Slopes of independent sizes would cost so much that a slow component common to all cells, which is the
    wrong answer, would always come cheaper.
    """
    span = np.ptp(cells.v_mv, axis=1) / np.maximum(np.abs(fit.gain), _VARIANCE_FLOOR)
    added = fit.slope * span  # fraction of the charge over the measured span
    error = variance * span**2 / np.maximum(fit.slope_information, _VARIANCE_FLOOR)
    scores = []
    for scatter in _SLOPE_SCATTER:
        total = error + scatter**2
        weight = 1.0 / total
        shared = 1.0 + _SLOPE_SD**2 * float(weight.sum())
        power = float((weight * added**2).sum())
        power -= _SLOPE_SD**2 * float((weight * added).sum()) ** 2 / shared
        scores.append(-0.5 * (float(np.log(total / error).sum()) + float(np.log(shared)) + power))
    return float(np.logaddexp.reduce(scores) - np.log(len(scores)))
