"""Charge that moves outside the measured voltages: how much, what it does to the median, when to refuse."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..units import in_percent
from .shape_average import PooledShape
from .shapes import FloatArray

REFUSED_MISSING = 0.15  # fraction of the charge outside the range, of the construct's mean curve
REFUSED_OWN_MISSING = 0.30  # the same of the cell's own, shifted curve
# Relative standard uncertainty of an extrapolated area: 3 where the curve just begins to look unfinished, 1
# where 16 % of the charge is missing. Set by simulation of cut curves, where a slow tail goes unseen.
LARGEST_DOUBT = 3.0
DOUBT_AT_ONE = 0.4  # times the square root of the missing fraction
_TAIL_MV = 200.0  # how far beyond the range the averaged curve is followed
_TAIL_POINTS = 101


@dataclass(frozen=True, kw_only=True, slots=True)
class Missing:
    """Charge outside one cell's range, as fractions of its total."""

    low: float
    high: float
    typical: float  # both ends, of the construct's mean curve: depends on the range, not on the cell's shift
    doubt_low_mv: (
        float  # standard uncertainty of what the charge below contributes to the mean curve's median
    )
    doubt_high_mv: float  # and from that above

    @property
    def doubt_mv(self) -> float:
        """Both ends together."""
        return float(np.hypot(self.doubt_low_mv, self.doubt_high_mv))

    @property
    def reason(self) -> str | None:
        """Why the cell must be refused, if it must."""
        # A limit on the cell's own curve alone would drop the cells shifted one way and bias the mean.
        own = self.low + self.high
        if self.typical <= REFUSED_MISSING and own <= REFUSED_OWN_MISSING:
            return None
        return (
            f"an estimated {in_percent(max(self.typical, own))} of the charge moves outside the "
            "measured voltages; "
            "the median cannot be told from the rest: record a wider range"
        )


def missing_charge(pooled: PooledShape) -> list[Missing]:
    """Missing charge of every cell, from the averaged shape."""
    cells = pooled.cells
    last = (cells.weight > 0).sum(axis=1) - 1
    ends = np.stack([cells.v_mv[:, 0], cells.v_mv[np.arange(len(last)), last]], axis=1)
    outside = {span: _outside(pooled, *span) for span in {(float(a), float(b)) for a, b in ends}}
    found = []
    for (low, high), (left, right) in zip(pooled.q(ends, pooled.shifts_mv), ends, strict=True):
        typical, doubt_low, doubt_high = outside[float(left), float(right)]
        found.append(
            Missing(
                low=float(low),
                high=float(1.0 - high),
                typical=typical,
                doubt_low_mv=doubt_low,
                doubt_high_mv=doubt_high,
            )
        )
    return found


def _outside(pooled: PooledShape, left: float, right: float) -> tuple[float, float, float]:
    """Fraction of the mean curve's charge outside a range, and the doubt each end leaves (mV)."""
    median, noise = float(pooled.median_mv.mean()), float(np.sqrt(pooled.variance))
    tail = np.linspace(0.0, _TAIL_MV, _TAIL_POINTS)
    below, above = _mean_curve(pooled, left - tail), 1.0 - _mean_curve(pooled, right + tail)
    area_low = below[0] * abs(median - left) + np.trapezoid(below, tail)
    area_high = above[0] * abs(right - median) + np.trapezoid(above, tail)
    doubt_low = float(_doubt(below[0], area_low, noise))
    doubt_high = float(_doubt(above[0], area_high, noise))
    return float(below[0] + above[0]), doubt_low, doubt_high


def _mean_curve(pooled: PooledShape, v_mv: FloatArray) -> FloatArray:
    curve: FloatArray = pooled.q(v_mv[None], pooled.shifts_mv.mean(axis=1, keepdims=True))[0]
    return curve


def _doubt(fraction: float, area_mv: float, noise: float) -> float:
    """Standard uncertainty of an extrapolated area; up to twice as large where noise hides the tail."""
    fraction = max(fraction, 1e-30)
    relative = min(LARGEST_DOUBT, float(DOUBT_AT_ONE / np.sqrt(fraction)))
    return area_mv * relative * (1.0 + noise / (noise + fraction))


def truncation_mv(pooled: PooledShape, missing: list[Missing], *, slope_shift_mv: float) -> float:
    """Standard uncertainty of the construct's median that its cells share (mV).

    The uncertainty of the shape and of the choice of family, and the doubt about what has to be extrapolated:
    families that level off soon after the last point can all be wrong together, which their spread does not
    show. `slope_shift_mv` is what taking sloping plateaus off would do, where that was not asked for.
    """
    doubts = [m.doubt_mv for m in missing if m.reason is None]
    doubt = float(np.mean(doubts)) if doubts else 0.0
    return float(np.sqrt(pooled.common_variance_mv2 + doubt**2 + slope_shift_mv**2))
