"""The single sigmoid of the older literature: midpoint, slope charge and the energy that goes with them.

q = 1/(1 + exp(-z (V - V_half)/kT)) fitted to every cell by itself. It is exact for two states only. For any
other scheme the slope charge z is smaller than the total charge, the midpoint is not the median, and z
times midpoint is not the activation energy; it is given so that a user can see by how much.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ..campaign import Curve
from ..units import thermal_voltage_mv
from .scaled_cells import canonical, scale, why_unreadable
from .shape_average import fit_single


@dataclass(frozen=True, kw_only=True, slots=True)
class CellSigmoid:
    """Single sigmoid of one cell."""

    construct: str
    cell: str
    midpoint_mv: float
    slope_charge_e0: float
    low_plateau: float  # in the curve's own charge unit
    high_plateau: float  # in the curve's own charge unit
    residual_sum_of_squares: float  # in the square of the curve's own charge unit

    @property
    def energy_mev(self) -> float:
        """Slope charge times midpoint (meV per channel)."""
        return self.slope_charge_e0 * self.midpoint_mv


@dataclass(frozen=True, kw_only=True, slots=True)
class SingleSigmoid:
    """Single sigmoids of a construct: means over its cells with their standard errors."""

    cells: tuple[CellSigmoid, ...]  # in canonical order
    midpoint_mv: float
    midpoint_sem_mv: float | None  # None for one cell
    slope_charge_e0: float
    slope_charge_sem_e0: float | None
    energy_mev: float  # mean of the cells' energies
    energy_sem_mev: float | None


def sigmoid_of_cell(curve: Curve, *, temperature_c: float, low_plateau_is_zero: bool = False) -> CellSigmoid:
    """Fit a single sigmoid to one readable curve by least squares.

    Parameters
    ----------
    curve : Curve
        One cell's Q-V curve.
    temperature_c : float
        Temperature (degrees Celsius), which turns the slope into a charge.
    low_plateau_is_zero : bool, default False
        Fit with the low plateau held at a charge of 0 instead of free.

    Returns
    -------
    CellSigmoid

    Raises
    ------
    ValueError
        If nothing can be read from the curve; the message says why.
    """
    reason = why_unreadable(curve)
    if reason is not None:
        raise ValueError(f"{curve.construct}/{curve.cell}: {reason}")
    scaled = scale([curve])
    low, height = float(scaled.low[0]), float(scaled.height[0])
    cells = scaled.cells
    if low_plateau_is_zero:
        cells = replace(cells, y=cells.y + low / height, baseline="zero")
        low = 0.0
    fit = fit_single(cells)
    low += float(fit.offset[0]) * height
    midpoint, log_slope = fit.theta
    return CellSigmoid(
        construct=curve.construct,
        cell=curve.cell,
        midpoint_mv=float(midpoint + fit.shift_mv[0]) + scaled.origin_mv,
        slope_charge_e0=float(np.exp(log_slope)) * thermal_voltage_mv(temperature_c),
        low_plateau=low,
        high_plateau=low + float(fit.gain[0]) * height,
        residual_sum_of_squares=fit.sum_of_squares * height**2,
    )


def single_sigmoid(curves: Sequence[Curve], *, temperature_c: float) -> SingleSigmoid | None:
    """Single sigmoids of one construct's cells and their means.

    Parameters
    ----------
    curves : sequence of Curve
        The construct's cells; those that cannot be read are left out, as `read_construct` reports.
    temperature_c : float
        Temperature (degrees Celsius).

    Returns
    -------
    SingleSigmoid or None
        None when no curve can be read.
    """
    readable = [curve for curve in sorted(curves, key=canonical) if why_unreadable(curve) is None]
    if not readable:
        return None
    cells = tuple(sigmoid_of_cell(curve, temperature_c=temperature_c) for curve in readable)
    midpoint, midpoint_sem = _mean([cell.midpoint_mv for cell in cells])
    charge, charge_sem = _mean([cell.slope_charge_e0 for cell in cells])
    energy, energy_sem = _mean([cell.energy_mev for cell in cells])
    return SingleSigmoid(
        cells=cells,
        midpoint_mv=midpoint,
        midpoint_sem_mv=midpoint_sem,
        slope_charge_e0=charge,
        slope_charge_sem_e0=charge_sem,
        energy_mev=energy,
        energy_sem_mev=energy_sem,
    )


def _mean(values: list[float]) -> tuple[float, float | None]:
    if len(values) < 2:
        return values[0], None
    return float(np.mean(values)), float(np.std(values, ddof=1) / np.sqrt(len(values)))
