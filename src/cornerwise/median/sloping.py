"""Plateaus that slope: a straight line under the curve, such as residual linear capacity leaves.

A slope adds to the charge at both ends and hides behind slow components: a free enough shape bends to it and
the median moves by several mV. So the construct is fitted a second time with a line of its own under every
cell, and the two explanations are weighed by their evidence.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .shape_average import PooledShape, pool_shape
from .shape_fit import Cells
from .shapes import FloatArray

EVIDENCE_LIMIT = 3.0  # difference of log evidence from which the line is believed, a factor of 20
_PLATEAU = 0.002  # fraction of the charge of the single sigmoid
_SCREEN = 3.0  # standard uncertainties of the mean slope that call for the second fit
_FEWEST = 4  # outermost points that count as plateau wherever the sigmoid is
_NO_PLATEAU = 0.05  # fraction of the single sigmoid's charge outside the range
_ROUNDS = 2  # a line takes the place of slow components, so that the richest shapes are not needed


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Slopes:
    """Straight lines under the cells' curves."""

    per_mv: FloatArray  # (n_cells,), cells scaled to 0..1
    added: FloatArray  # (n_cells,), over each cell's measured span as a fraction of its charge
    shift_mv: float  # by how much the mean median of the cells moves when the lines are taken off
    supported: bool  # whether the data call for them

    def off(self, cells: Cells) -> Cells:
        """Take the lines off, around voltage 0 of the common axis."""
        return replace(cells, y=cells.y - self.per_mv[:, None] * cells.v_mv)


def no_slopes(cells: Cells) -> Slopes:
    """Lines that are level."""
    none = np.zeros(len(cells.y))
    return Slopes(per_mv=none, added=none, shift_mv=0.0, supported=False)


def find_slopes(pooled: PooledShape) -> Slopes:
    """Weigh a line under every cell against none.

    Parameters
    ----------
    pooled : PooledShape
        The cells' shape without lines.

    Returns
    -------
    Slopes
        Level where the plateaus give no cause to look closer.
    """
    cells = pooled.cells
    if not _plateaus_reached(pooled) or not _suspicious(pooled):
        return no_slopes(cells)
    lined = pool_shape(replace(cells, baseline="line"), rounds=_ROUNDS)
    per_mv = sum(
        (weight * fit.slope for weight, fit in zip(lined.weights, lined.fits, strict=True)),
        start=np.zeros(len(cells.y)),
    )
    return Slopes(
        per_mv=per_mv,
        added=per_mv * np.ptp(cells.v_mv, axis=1) / lined.gain,
        shift_mv=float(lined.median_mv.mean() - pooled.median_mv.mean()),
        supported=lined.log_evidence - pooled.log_evidence > EVIDENCE_LIMIT,
    )


def _plateaus_reached(pooled: PooledShape) -> bool:
    """Whether the curves end on plateaus; elsewhere nothing tells a line from the rest of the rise.

    Judged by the single sigmoid: a richer shape bends to a line and takes it for a rise that goes on.
    """
    cells, single = pooled.cells, pooled.fits[0]
    last = (cells.weight > 0).sum(axis=1) - 1
    ends = np.stack([cells.v_mv[:, 0], cells.v_mv[np.arange(len(last)), last]], axis=1)
    q = single.family.q(ends - single.shift_mv[:, None], single.theta)
    return float(np.mean(q[:, 0] + 1.0 - q[:, 1])) < _NO_PLATEAU


def _suspicious(pooled: PooledShape) -> bool:
    """Whether points on the plateaus of the single sigmoid rise or fall, all cells taken together."""
    cells, single = pooled.cells, pooled.fits[0]
    q = single.family.q(cells.v_mv - single.shift_mv[:, None], single.theta)
    squares, product, power, free = 0.0, 0.0, 0.0, -1
    for below in (np.where(cells.weight > 0, q, 1.0), np.where(cells.weight > 0, 1.0 - q, 1.0)):
        outermost = np.sort(below, axis=1)[:, _FEWEST - 1 : _FEWEST]
        inside = below <= np.maximum(outermost, _PLATEAU)
        v, y = (_centred(x, inside) for x in (cells.v_mv, cells.y))
        squares += float((y * y).sum())
        product += float((v * y).sum())
        power += float((v * v).sum())
        free += int(inside.sum()) - len(inside)
    variance = max(squares - product**2 / power, 0.0) / free
    return product**2 > _SCREEN**2 * variance * power


def _centred(x: FloatArray, inside: np.ndarray) -> FloatArray:
    count = np.maximum(inside.sum(axis=1, keepdims=True), 1)
    return np.where(inside, x - np.where(inside, x, 0.0).sum(axis=1, keepdims=True) / count, 0.0)
