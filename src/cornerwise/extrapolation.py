"""Charge that moves outside the measured voltages: how much, what it does to the median, when to refuse."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .shape_average import PooledShape
from .shape_fit import Cells

REFUSED_MISSING = 0.15  # fraction of the charge outside the range, of the construct's mean curve
REFUSED_OWN_MISSING = 0.30  # the same of the cell's own, shifted curve
EXTRAPOLATION_DOUBT = 0.3  # relative standard uncertainty of extrapolated area beyond what the fits say


@dataclass(frozen=True, kw_only=True, slots=True)
class Missing:
    """Fractions of the charge outside one cell's range."""

    low: float
    high: float
    typical_low: float  # of the construct's mean curve: depends on the range alone, not on the cell's shift
    typical_high: float

    @property
    def reason(self) -> str | None:
        """Why the cell must be refused, if it must."""
        # A limit on the cell's own curve alone would drop the cells shifted one way and bias the mean.
        typical, own = self.typical_low + self.typical_high, self.low + self.high
        if typical <= REFUSED_MISSING and own <= REFUSED_OWN_MISSING:
            return None
        return (
            f"an estimated {max(typical, own):.0%} of the charge moves outside the measured voltages; the "
            "median cannot be told from the rest: record a wider range"
        )


def missing_charge(cells: Cells, pooled: PooledShape) -> list[Missing]:
    """Missing charge of every cell, from the averaged shape."""
    last = (cells.weight > 0).sum(axis=1) - 1
    ends = np.stack([cells.v_mv[:, 0], cells.v_mv[np.arange(len(last)), last]], axis=1)
    shifts = pooled.shifts_mv
    own = pooled.q(ends, shifts)
    typical = pooled.q(ends, np.broadcast_to(shifts.mean(axis=1, keepdims=True), shifts.shape))
    return [
        Missing(
            low=float(a[0]), high=float(1.0 - a[1]), typical_low=float(b[0]), typical_high=float(1.0 - b[1])
        )
        for a, b in zip(own, typical, strict=True)
    ]


def truncation_mv(cells: Cells, pooled: PooledShape, missing: list[Missing]) -> float:
    """Standard uncertainty of the construct's median that its cells share (mV).

    The uncertainty of the shape and of the choice of family, and a fixed share of the area that has to be
    extrapolated: charge outside the range times the distance of the range's end from the median. Families
    that level off soon after the last point can all be wrong together, which their spread does not show.
    """
    median = float(pooled.median_mv.mean())
    last = (cells.weight > 0).sum(axis=1) - 1
    areas = [
        abs(m.typical_low * (median - v[0])) + abs(m.typical_high * (v[end] - median))
        for m, v, end in zip(missing, cells.v_mv, last, strict=True)
        if m.reason is None
    ]
    doubt = EXTRAPOLATION_DOUBT * float(np.mean(areas)) if areas else 0.0
    return float(np.sqrt(pooled.common_variance_mv2 + doubt**2))
