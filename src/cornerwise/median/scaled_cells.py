"""One construct's curves on common axes: which can be read, in which order, scaled to 0..1."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ..campaign import Curve
from ..units import in_percent
from .plateaus import plain_median_mv, plain_plateaus
from .shape_fit import Cells
from .shapes import FloatArray

FEWEST_POINTS = 5
SMALLEST_RISE = 0.5  # difference of the plain plateaus as a fraction of the spread of the charges


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class ScaledCells:
    """Readable curves of a construct."""

    curves: tuple[Curve, ...]
    cells: Cells
    origin_mv: float  # subtracted from every voltage
    low: FloatArray  # (n_cells,), plain low plateau, subtracted from the charge
    height: FloatArray  # (n_cells,), plain plateau difference, divides the charge


def canonical(curve: Curve) -> tuple[str, str, bytes, bytes]:
    """Sort key that depends on nothing but the cell itself, so that the order of rows changes no digit."""
    return curve.cell, curve.batch or "", curve.voltage_mv.tobytes(), curve.charge.tobytes()


def why_unreadable(curve: Curve) -> str | None:
    """Reason why nothing can be read from a curve, None when something can."""
    v, q = curve.voltage_mv, curve.charge
    if len(v) < FEWEST_POINTS:
        return f"the curve has {len(v)} points, fewer than {FEWEST_POINTS}"
    if not (np.isfinite(v).all() and np.isfinite(q).all()):
        return "a voltage or a charge is not a finite number"
    if not (np.diff(v) > 0).all():
        return "the voltages do not rise from point to point"
    low, high = plain_plateaus(q)
    rise, spread = abs(high - low), float(np.ptp(q))
    if rise > 0.0 and rise >= SMALLEST_RISE * spread:
        return None
    share = rise / spread if spread > 0.0 else 0.0
    return (
        f"no rise: the two ends differ by {in_percent(share)} of the spread of the charges, less than "
        "half; record "
        "the whole rise with both plateaus"
    )


def scale(curves: Sequence[Curve]) -> ScaledCells:
    """Charges 0 to 1 by their plain plateaus, voltages around the middle of all curves.

    Parameters
    ----------
    curves : sequence of Curve
        Readable curves.

    Returns
    -------
    ScaledCells
        Padded to the longest curve with points of weight 0.
    """
    width = max(len(curve.voltage_mv) for curve in curves)
    plateaus = np.array([plain_plateaus(curve.charge) for curve in curves])
    low, height = plateaus[:, 0], plateaus[:, 1] - plateaus[:, 0]
    v = np.array([_padded(curve.voltage_mv, width) for curve in curves])
    charge = np.array([_padded(curve.charge, width) for curve in curves])
    weight = np.array([np.arange(width) < len(curve.voltage_mv) for curve in curves]).astype(np.float64)
    origin = float(np.mean([plain_median_mv(curve.voltage_mv, curve.charge) for curve in curves]))
    cells = Cells(v - origin, (charge - low[:, None]) / height[:, None], weight)
    return ScaledCells(curves=tuple(curves), cells=cells, origin_mv=origin, low=low, height=height)


def _padded(values: FloatArray, width: int) -> FloatArray:
    return np.pad(values, (0, width - len(values)), mode="edge")
