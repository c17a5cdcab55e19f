"""Median voltage of charge-voltage (Q-V) curves."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .campaign import Curve
from .flags import Flag


@dataclass(frozen=True, kw_only=True, slots=True)
class CellReading:
    """What one cell's curve gave."""

    construct: str
    cell: str
    batch: str | None
    median_mv: float
    midpoint_mv: float  # where the scaled curve crosses one half
    low_plateau: float  # in the curve's own charge unit
    high_plateau: float  # in the curve's own charge unit
    points: int
    plain_median_mv: float  # area between plateaus, no model; always reported beside the estimate
    truncation_mv: float = 0.0  # standard uncertainty of the median from charge outside the range
    used: bool = True
    reason: str | None = None  # why it is not used
    flags: tuple[Flag, ...] = ()


def read_construct(curves: Sequence[Curve]) -> tuple[CellReading, ...]:
    """Estimate the median voltage of every cell of one construct; see the module's notes."""
    return tuple(_plain_reading(curve) for curve in curves)


def _plain_reading(curve: Curve) -> CellReading:
    v, q = curve.voltage_mv, curve.charge
    low, high = float(np.mean(q[:3])), float(np.mean(q[-3:]))
    scaled = (q - low) / (high - low)
    median = float(v[-1] - np.trapezoid(scaled, v))
    midpoint = float(np.interp(0.5, np.maximum.accumulate(scaled), v))
    return CellReading(
        construct=curve.construct, cell=curve.cell, batch=curve.batch, median_mv=median,
        midpoint_mv=midpoint, low_plateau=low, high_plateau=high, points=len(v), plain_median_mv=median,
    )  # fmt: skip
