"""Plateaus of a Q-V curve without a model: levels, the plain area, and a slope that should not be there."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from .shapes import FloatArray

_PLATEAU_POINTS = 3
_FEWEST_FOR_SLOPE = 4  # points on each plateau
_ON_PLATEAU = 0.01  # of the single sigmoid
_SMALLER_SHARE = 0.3  # what each plateau's own slope must reach of the common one


class PlateauSlope(NamedTuple):
    """Common slope of both plateaus, in the unit of the charge per mV."""

    slope: float
    std_uncertainty: float


def plain_plateaus(charge: FloatArray) -> tuple[float, float]:
    """Means of the first and of the last three points (fewer on curves shorter than nine points).

    Parameters
    ----------
    charge : ndarray, shape (n_points,)
        Charges in rising voltage, any unit.

    Returns
    -------
    tuple of float
        Low and high plateau, same unit.
    """
    count = max(min(_PLATEAU_POINTS, len(charge) // 3), 1)
    return float(charge[:count].mean()), float(charge[-count:].mean())


def plain_median_mv(v_mv: FloatArray, charge: FloatArray) -> float:
    """Median voltage from the area between the plain plateaus by the trapezoid rule (mV), no model.

    Parameters
    ----------
    v_mv, charge : ndarray, shape (n_points,)
        Voltages (mV, rising) and charges (any unit).

    Returns
    -------
    float
        nan where the two plateaus are the same.
    """
    low, high = plain_plateaus(charge)
    if high == low:
        return float("nan")
    return float(v_mv[-1] - np.trapezoid((charge - low) / (high - low), v_mv))


def plain_uncertainty_mv(v_mv: FloatArray, median_mv: float, noise: float) -> float:
    """Standard uncertainty of `plain_median_mv` (mV) from noise of the points.

    Parameters
    ----------
    v_mv : ndarray, shape (n_points,)
        Voltages (mV, rising).
    median_mv : float
        Median voltage (mV).
    noise : float
        Standard deviation of a point as a fraction of the charge.
    """
    count = max(min(_PLATEAU_POINTS, len(v_mv) // 3), 1)
    plateaus = ((v_mv[-1] - median_mv) ** 2 + (v_mv[0] - median_mv) ** 2) / count
    steps = np.diff(v_mv)
    return noise * float(np.sqrt(plateaus + (steps**2).sum()))


def plateau_slope(v_mv: FloatArray, charge: FloatArray, q_single: FloatArray) -> PlateauSlope | None:
    """Slope that both plateaus share, which a residual linear capacity leaves.

    Parameters
    ----------
    v_mv, charge : ndarray, shape (n_points,)
        Voltages (mV) and charges (any unit).
    q_single : ndarray, shape (n_points,)
        A single sigmoid fitted to the curve: points below 0.01 and above 0.99 count as plateau.

    Returns
    -------
    PlateauSlope or None
        None when a plateau has fewer than four points or when the two do not slope alike, as where only
        one of them is the tail of a slow component.
    """
    ends = [q_single < _ON_PLATEAU, q_single > 1.0 - _ON_PLATEAU]
    if min(end.sum() for end in ends) < _FEWEST_FOR_SLOPE:
        return None
    x = np.concatenate([v_mv[end] - v_mv[end].mean() for end in ends])
    y = np.concatenate([charge[end] - charge[end].mean() for end in ends])
    slope = float((x * y).sum() / (x * x).sum())
    first = int(ends[0].sum())
    own = [
        float((x[part] * y[part]).sum() / (x[part] ** 2).sum()) for part in (slice(first), slice(first, None))
    ]
    if min(piece * np.sign(slope) for piece in own) < _SMALLER_SHARE * abs(slope):
        return None
    variance = float(((y - slope * x) ** 2).sum()) / (len(x) - 3)
    return PlateauSlope(slope, float(np.sqrt(variance / (x * x).sum())))
