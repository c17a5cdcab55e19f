"""Evenly spread points at which expectations over chance are taken: the same ones each time, no stream."""

from __future__ import annotations

from functools import lru_cache

import numpy as np
from numpy.typing import NDArray
from scipy import special

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.int64]

# Prime numbers of points, each with the multiplier of its lattice: powers of the multiplier, modulo the
# number, give the dimensions. Of all multipliers these leave the least correlation between any two of 32
# dimensions, of the places and of their squares.
_MULTIPLIERS = {509: 27, 2039: 1487}
MANY, FEW = 2039, 509

_TABLE = np.linspace(0.0, 1.0, 4097)  # of 1 / dof
_WORTH_A_TABLE = 200  # quantiles at once; fewer are sooner computed than the table of a level


def _order(points: int, dimension: int) -> IntArray:
    """Place of every point along one dimension: a permutation."""
    factor = pow(_MULTIPLIERS[points], dimension, points)
    order: IntArray = (np.arange(points, dtype=np.int64) * factor) % points
    return order


@lru_cache(maxsize=4096)
def chi_square_levels(dof: float, points: int) -> FloatArray:
    """Chi-square over its degrees of freedom at the middles of `points` equally likely parts, rising."""
    middles = (np.arange(points) + 0.5) / points
    levels: FloatArray = np.asarray(special.gammaincinv(dof / 2, middles), dtype=np.float64) * (2 / dof)
    return levels


def mean_squares(dof: float, dimension: int, points: int) -> FloatArray:
    """Chi-square over its degrees of freedom at `points` points, rank by rank spread evenly.

    Parameters
    ----------
    dof : float
        Degrees of freedom, above 0; ``inf`` gives ones.
    dimension : int
        Points of different dimensions are spread evenly against each other (a rank-1 lattice: N. M.
        Korobov, 1959; from memory).
    points : int
        509 or 2039.

    Returns
    -------
    ndarray, shape (points,)
    """
    if np.isinf(dof):
        return np.ones(points)
    return chi_square_levels(dof, points)[_order(points, dimension)]


@lru_cache(maxsize=64)
def _log_t_table(level: float) -> FloatArray:
    with np.errstate(divide="ignore"):
        table: FloatArray = np.log(_each(level, 1 / _TABLE))
    return table


def _each(level: float, dofs: FloatArray) -> FloatArray:
    """Quantiles of Student's t, each by itself."""
    limited = ~np.isposinf(dofs)
    found = np.full(dofs.shape, special.ndtri(level))
    found[limited] = special.stdtrit(dofs[limited], level)
    return found


def t_quantiles(level: float, dofs: FloatArray) -> FloatArray:
    """Quantiles of Student's t; many at once come from a table of their logarithms.

    The table is right to 1e-6 of the quantile for 1 degree of freedom and above; below it each is computed.
    """
    if dofs.size < _WORTH_A_TABLE:
        return _each(level, dofs)
    found: FloatArray = np.exp(np.interp(1 / np.maximum(dofs, 1.0), _TABLE, _log_t_table(level)))
    few = dofs < 1
    return np.where(few, _each(level, np.where(few, dofs, 1.0)), found) if few.any() else found
