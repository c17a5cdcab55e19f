"""What the residuals of the common shape add to each cell's median.

Pooling assumes one shape. Where the cells of a construct truly differ in shape the shift alone misreads
their medians, and the scatter between cells, from which every later uncertainty is taken, would come out
wrong. So each cell may depart from the common shape in every parameter, by an amount whose standard
deviation the construct's own cells decide (empirical Bayes on a grid): nought where the residuals are noise,
in full where they are not.

What is then left over is noise, unless the noise is smaller than the misfit of every family. Residuals that
run smoothly from point to point show that case, and their area between the plateaus is added back.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .plateaus import plain_plateaus
from .shape_average import PooledShape
from .shapes import Family, FloatArray

_UNIT_MIDPOINT_MV = 4.0
_UNIT_LOG_SLOPE = 0.15
_UNIT_LOG_WEIGHT = 0.3
_AMOUNTS = np.array([0.0, 0.125, 0.25, 0.5, 1.0, 2.0, 4.0])  # in the units above
_BELIEF = np.array([0.5] + [0.5 / 6.0] * 6)  # before seeing the residuals: as likely none as any
_FEWEST_FREE = 5
# Share of the residuals' variance that runs on from point to point: noise alone gives about 0, and up to the
# first limit once in a thousand curves of 30 points; above the second the residuals are taken in full.
_NOISE_LIKE, _SMOOTH = 0.8, 0.95
_FEWEST_FOR_SMOOTHNESS = 10
_TINY = 1e-30


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Departures:
    """How the cells depart from their common shape."""

    own_mv: FloatArray  # (n_cells,), to be added to the medians for the cells' own shapes
    left: FloatArray  # (n_cells, n_points), residuals after that


def own_departures(pooled: PooledShape) -> Departures:
    """Each cell's own shape, as far as its residuals show one.

    Parameters
    ----------
    pooled : PooledShape
        The cells' common shape; departures are those of its best candidate.

    Returns
    -------
    Departures
        All 0 for a single cell, whose shape is the common one, or when there are too few points to tell.
    """
    cells, fit = pooled.cells, pooled.best
    count = len(cells.y)
    if count < 2 or cells.points - count * (3 + fit.family.parameters) < _FEWEST_FREE:
        return Departures(own_mv=np.zeros(count), left=fit.residual)
    root = np.sqrt(cells.weight)
    unit = _units(fit.family)
    u, s, vt = np.linalg.svd(root[..., None] * fit.departure * unit, full_matrices=False)
    live = s > 1e-8 * s.max()  # the others are rounding: a common shift of all midpoints changes nothing
    score = np.where(live, (u * (root * fit.residual)[..., None]).sum(axis=1), 0.0)  # (n_cells, n_directions)
    free = cells.points - 3 * count - int(live.sum())
    noise = max((fit.sum_of_squares - float((score**2).sum())) / free, _TINY)
    kept = _kept(s**2 / noise, score**2 / noise * count / (count - 1))
    along = np.where(live, kept * score / np.maximum(s, _TINY), 0.0)
    own = unit * (vt * along[..., None]).sum(axis=1)  # (n_cells, n_parameters)
    return Departures(
        own_mv=(fit.median_by_shape.T * own).sum(axis=1),
        left=fit.residual - (fit.departure * own[:, None]).sum(axis=-1),
    )


def smooth_leftover_mv(pooled: PooledShape, left: FloatArray) -> FloatArray:
    """Area that no family could follow, as a correction of each cell's median.

    Parameters
    ----------
    pooled : PooledShape
        The cells' common shape.
    left : ndarray, shape (n_cells, n_points)
        Residuals after the cells' own departures.

    Returns
    -------
    ndarray, shape (n_cells,)
        To be added to the medians (mV); all 0 unless the residuals of all cells together are smooth.
    """
    cells, fit = pooled.cells, pooled.best
    rough, total = 0.0, 0.0
    for r, w in zip(left, cells.weight, strict=True):
        inside = r[w > 0]
        if len(inside) < _FEWEST_FOR_SMOOTHNESS:
            return np.zeros(len(left))
        rough += float((np.diff(inside, 4) ** 2).mean()) / 70.0  # the variance of white noise
        total += float((inside**2).mean())
    smooth = 1.0 - rough / total if total > 0.0 else 0.0
    believed = float(np.clip((smooth - _NOISE_LIKE) / (_SMOOTH - _NOISE_LIKE), 0.0, 1.0))
    if believed == 0.0:
        return np.zeros(len(left))
    areas = [
        _area_mv(v[w > 0], r[w > 0] / gain, ((y - r - offset) / gain)[w > 0])
        for v, y, w, r, gain, offset in zip(
            cells.v_mv, cells.y, cells.weight, left, fit.gain, fit.offset, strict=True
        )
    ]
    return -believed * np.array(areas)


def _area_mv(v: FloatArray, left: FloatArray, q: FloatArray) -> float:
    """Area the residuals add to a curve when both are anchored at the residuals' own plateaus."""
    low, high = plain_plateaus(left)
    return float(np.trapezoid((q + left - low) / (1.0 + high - low) - q, v))


def _units(family: Family) -> FloatArray:
    k = family.components
    rest = family.parameters - 2 * k
    return np.array([_UNIT_MIDPOINT_MV] * k + [_UNIT_LOG_SLOPE] * k + [_UNIT_LOG_WEIGHT] * rest)


def _kept(signal: FloatArray, power: FloatArray) -> FloatArray:
    """Fraction of each direction's residual taken for the cell's own, averaged over the amounts.

    `signal` is the variance a unit amount would give in units of the noise, `power` what was found.
    """
    gain = _AMOUNTS[:, None, None] ** 2 * signal  # (n_amounts, n_cells, n_directions)
    log_likelihood = -0.5 * (np.log1p(gain) + power / (1.0 + gain)).sum(axis=(1, 2))
    belief = _BELIEF * np.exp(log_likelihood - log_likelihood.max())
    belief /= belief.sum()
    return np.asarray((belief[:, None, None] * gain / (1.0 + gain)).sum(axis=0), dtype=np.float64)
