"""What a cell's own shape adds to its median once the construct's shape has been taken off.

Pooling assumes one shape. Where the cells of a construct truly differ in shape the shift alone misreads
their medians, and the scatter between cells, from which every later uncertainty is taken, would come out
wrong. Here each cell may depart from the common shape in every parameter, by an amount whose standard
deviation the construct's own cells decide (empirical Bayes on a grid): nought where the residuals are noise,
in full where they are not.
"""

from __future__ import annotations

import numpy as np

from .shape_average import PooledShape
from .shapes import Family, FloatArray

_UNIT_MIDPOINT_MV = 4.0
_UNIT_LOG_SLOPE = 0.15
_UNIT_LOG_WEIGHT = 0.3
_AMOUNTS = np.array([0.0, 0.125, 0.25, 0.5, 1.0, 2.0, 4.0])  # in the units above
_BELIEF = np.array([0.5] + [0.5 / 6.0] * 6)  # before seeing the residuals: as likely none as any
_FEWEST_FREE = 5


def own_departure_mv(pooled: PooledShape) -> FloatArray:
    """Correction of each cell's median for its own shape.

    Parameters
    ----------
    pooled : PooledShape
        The cells' common shape; departures are those of its best candidate.

    Returns
    -------
    ndarray, shape (n_cells,)
        To be added to the medians (mV); all 0 for a single cell or when there are too few points to tell.
    """
    cells, fit = pooled.cells, pooled.best
    count = len(cells.y)
    free = cells.points - count * (3 + fit.family.parameters)
    if count < 2 or free < _FEWEST_FREE:
        return np.zeros(count)
    root = np.sqrt(cells.weight)
    unit = _units(fit.family)
    u, s, vt = np.linalg.svd(root[..., None] * fit.departure * unit, full_matrices=False)
    score = (u * (root * fit.residual)[..., None]).sum(axis=1)  # (n_cells, n_directions)
    noise = max((fit.sum_of_squares - float((score**2).sum())) / free, 1e-30)
    kept = _kept(s**2 / noise, score**2 / noise * count / (count - 1))
    along = np.where(s > 1e-12 * s.max(), kept * score / np.maximum(s, 1e-300), 0.0)
    own = unit * (vt * along[..., None]).sum(axis=1)  # (n_cells, n_parameters)
    return np.asarray((fit.median_by_shape.T * own).sum(axis=1), dtype=np.float64)


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
