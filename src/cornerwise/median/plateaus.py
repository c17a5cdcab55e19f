"""Plateaus and area of a Q-V curve without a model."""

from __future__ import annotations

import numpy as np

from .shapes import FloatArray

_PLATEAU_POINTS = 3


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
