"""Least squares of one sigmoid to each of many curves at once.

The curves are fitted side by side, which takes no longer than a few of them one after the other, and apart:
what is found for one does not depend on the others. Height and baseline are linear and are solved for exactly
at every step (variable projection), so that only midpoint and slope are searched, by damped steps.

References
----------
Golub GH, Pereyra V (1973). SIAM J Numer Anal 10, 413-432; Marquardt DW (1963). J SIAM 11, 431-441. (Both
cited from memory for the methods' names.)
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from .shapes import FloatArray

_STEEPEST_EXPONENT = 60.0  # exp of it is far beyond the precision of a float and far below its overflow
_LARGEST_STEP = np.array([40.0, 1.5])  # of midpoint (mV) and logarithm of the slope
_MOST_STEPS = 100
_CONVERGED = 1e-14  # relative gain of the sum of squares
_STUCK = 1e6  # damping at which no step helps
_TINY = 1e-28


class Sigmoids(NamedTuple):
    """A sigmoid for each curve; every array has shape (n_curves,)."""

    midpoint_mv: FloatArray
    log_slope: FloatArray  # of kappa (1/mV)
    gain: FloatArray
    offset: FloatArray  # 0 where the baseline is held there
    sum_of_squares: FloatArray


class _Point(NamedTuple):
    """Everything at one point of the search."""

    step: FloatArray  # (c, n), the sigmoid, its mean taken off where the baseline is free
    gain: FloatArray  # (c,)
    mean: FloatArray  # (c,), what was taken off
    residual: FloatArray  # (c, n)
    gradient: FloatArray  # (2, c, n), by midpoint and by log slope
    cost: FloatArray  # (c,)


def fit_each(
    v_mv: FloatArray, y: FloatArray, start: FloatArray, slopes: FloatArray, *, baseline_is_zero: bool = False
) -> Sigmoids:
    """Fit a sigmoid to each curve.

    Parameters
    ----------
    v_mv : ndarray, shape (n_curves, n_points)
        Voltages (mV).
    y : ndarray, shape (n_curves, n_points)
        Charge, of each curve on its own scale.
    start : ndarray, shape (n_curves, 2)
        Midpoint (mV) and logarithm of the slope (1/mV) to start from.
    slopes : ndarray, shape (n_curves, 2)
        Smallest and largest logarithm of the slope.
    baseline_is_zero : bool, default False
        Hold the low plateau at 0 instead of fitting it.

    Returns
    -------
    Sigmoids
    """
    data = y if baseline_is_zero else y - y.mean(axis=1, keepdims=True)
    theta = np.stack([start[:, 0], np.clip(start[:, 1], *slopes.T)], axis=1)
    here = _evaluate(v_mv, data, theta, baseline_is_zero)
    damping = np.full(len(theta), 1e-2)
    searching = here.cost > _TINY
    for _ in range(_MOST_STEPS):
        if not searching.any():
            break
        moved = _moved(here, theta, damping, slopes)
        there = _evaluate(v_mv, data, moved, baseline_is_zero)
        better = searching & (there.cost <= here.cost)
        gain = here.cost - there.cost
        searching &= np.where(better, gain > _CONVERGED * here.cost, damping < _STUCK)
        theta = np.where(better[:, None], moved, theta)
        damping = np.where(better, np.maximum(damping * 0.1, 1e-10), damping * 6.0)
        here = _Point(*(_picked(better, new, old) for new, old in zip(there, here, strict=True)))
    offset = np.zeros(len(y)) if baseline_is_zero else y.mean(axis=1) - here.gain * here.mean
    return Sigmoids(theta[:, 0], theta[:, 1], here.gain, offset, here.cost)


def _picked(better: NDArray[np.bool_], new: FloatArray, old: FloatArray) -> FloatArray:
    """`new` for the curves that are better off with it; curves stand on the only axis or the last but one."""
    return np.where(better if new.ndim == 1 else better[:, None], new, old)


def _evaluate(v_mv: FloatArray, data: FloatArray, theta: FloatArray, baseline_is_zero: bool) -> _Point:
    kappa = np.exp(theta[:, 1])[:, None]
    x = kappa * (v_mv - theta[:, :1])
    step = 1.0 / (1.0 + np.exp(np.minimum(-x, _STEEPEST_EXPONENT)))
    rise = step * (1.0 - step)
    gradient = np.stack([-kappa * rise, x * rise])
    mean = np.zeros(len(step)) if baseline_is_zero else step.mean(axis=1)
    if not baseline_is_zero:
        gradient -= gradient.mean(axis=-1, keepdims=True)
    step = step - mean[:, None]
    length = (step * step).sum(axis=1) + _TINY  # a step outside the measured range has no height
    gain = (step * data).sum(axis=1) / length
    gradient -= ((gradient * step).sum(axis=-1) / length)[..., None] * step
    gradient *= gain[:, None]
    residual = data - gain[:, None] * step
    return _Point(step, gain, mean, residual, gradient, (residual * residual).sum(axis=1))


def _moved(here: _Point, theta: FloatArray, damping: FloatArray, slopes: FloatArray) -> FloatArray:
    """One damped step for each curve, slopes inside their bounds."""
    (mm, ms), (_, ss) = (here.gradient[:, None] * here.gradient).sum(axis=-1)
    pull_m, pull_s = (here.gradient * here.residual).sum(axis=-1)
    held = ((theta[:, 1] <= slopes[:, 0]) & (pull_s < 0)) | ((theta[:, 1] >= slopes[:, 1]) & (pull_s > 0))
    ms, pull_s = np.where(held, 0.0, ms), np.where(held, 0.0, pull_s)
    mm, ss = mm * (1.0 + damping) + _TINY, ss * (1.0 + damping) + _TINY
    determinant = mm * ss - ms * ms
    move = np.stack([ss * pull_m - ms * pull_s, mm * pull_s - ms * pull_m], axis=1) / determinant[:, None]
    moved: FloatArray = theta + np.minimum(np.maximum(move, -_LARGEST_STEP), _LARGEST_STEP)
    moved[:, 1] = np.minimum(np.maximum(moved[:, 1], slopes[:, 0]), slopes[:, 1])
    return moved
