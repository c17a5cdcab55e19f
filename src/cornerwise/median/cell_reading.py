"""What reading one cell's Q-V curve gives."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..campaign import Curve
from ..flags import Flag
from .shapes import Family, FloatArray


@dataclass(frozen=True, kw_only=True, slots=True)
class FittedCurve:
    """Averaged smooth curve of one cell, enough to draw it."""

    families: tuple[Family, ...]
    weights: tuple[float, ...]  # of each family, sum 1
    parameters: tuple[tuple[float, ...], ...]  # of each family, midpoints relative to its origin
    origins_mv: tuple[float, ...]  # where each family's voltage 0 lies

    def q(self, v_mv: FloatArray) -> FloatArray:
        """Scaled charge, 0 to 1, at voltages (mV) of any shape."""
        v = np.asarray(v_mv, dtype=np.float64)
        curve = np.zeros(v.shape)
        for family, weight, theta, origin in zip(
            self.families, self.weights, self.parameters, self.origins_mv, strict=True
        ):
            curve += weight * family.q(v - origin, np.array(theta))
        return curve


@dataclass(frozen=True, kw_only=True, slots=True)
class CellReading:
    """What one cell's curve gave."""

    construct: str
    cell: str
    batch: str | None
    median_mv: float  # nan only when the curve could not be read at all; `reason` then says why
    midpoint_mv: float  # where the scaled curve crosses one half
    low_plateau: float  # in the curve's own charge unit
    high_plateau: float  # in the curve's own charge unit
    points: int
    plain_median_mv: float  # area between plateaus, no model; always reported beside the estimate
    truncation_mv: float = 0.0  # standard uncertainty the construct's cells share: shape and extrapolation
    own_uncertainty_mv: float = 0.0  # standard uncertainty from the cell's own noise at the given shape
    missing_low: float = 0.0  # estimated fraction of the charge below the measured range
    missing_high: float = 0.0  # estimated fraction of the charge above the measured range
    noise: float = 0.0  # standard deviation of a point as a fraction of the charge
    fit: FittedCurve | None = None  # None when the curve could not be read
    used: bool = True
    reason: str | None = None  # why it is not used
    flags: tuple[Flag, ...] = ()

    @property
    def subject(self) -> str:
        """Name of the cell in flags and messages."""
        return f"{self.construct}/{self.cell}"


def unreadable(curve: Curve, reason: str) -> CellReading:
    """Reading of a curve that gave nothing, with the reason."""
    nan = float("nan")
    return CellReading(
        construct=curve.construct,
        cell=curve.cell,
        batch=curve.batch,
        median_mv=nan,
        midpoint_mv=nan,
        low_plateau=nan,
        high_plateau=nan,
        points=len(curve.voltage_mv),
        plain_median_mv=nan,
        used=False,
        reason=reason,
    )
