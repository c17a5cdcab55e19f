"""How cells scatter about the truth."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from .model import Scatter

_GAMMA_SHAPE = 4.0  # skewness 1
_T_DOF = 5


def standard_deviates(
    scatter: Scatter, rng: np.random.Generator, size: int | tuple[int, ...]
) -> NDArray[np.float64]:
    """Numbers of mean 0 and standard deviation 1.

    Parameters
    ----------
    scatter : {"normal", "skewed", "heavy-tailed"}
        Normal; gamma of shape 4, whose skewness is 1; Student's t with 5 degrees of freedom.
    rng : numpy.random.Generator
        Where they come from.
    size : int or tuple of int
        Shape of the result.
    """
    if scatter == "normal":
        return rng.standard_normal(size)
    if scatter == "skewed":
        return (rng.gamma(_GAMMA_SHAPE, size=size) - _GAMMA_SHAPE) / math.sqrt(_GAMMA_SHAPE)
    return rng.standard_t(_T_DOF, size=size) / math.sqrt(_T_DOF / (_T_DOF - 2))
