"""The single sigmoid of the older literature: midpoint, slope charge and the energy that goes with them.

q = 1/(1 + exp(-z (V - V_half)/kT)) fitted to every cell by itself. It is exact for two states only. For any
other scheme the slope charge z is smaller than the total charge, the midpoint is not the median, and z
times midpoint is not the activation energy; it is given so that a user can see by how much.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ..campaign import Curve
from ..units import thermal_voltage_mv
from .each_sigmoid import fit_each
from .plateaus import plain_median_mv, plain_plateaus
from .scaled_cells import canonical, why_unreadable
from .shape_average import single_starts


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


def sigmoids_of_cells(
    curves: Sequence[Curve], *, temperature_c: float, low_plateau_is_zero: bool = False
) -> tuple[CellSigmoid, ...]:
    """Fit a single sigmoid to each of several readable curves by least squares.

    Parameters
    ----------
    curves : sequence of Curve
        Q-V curves of cells; what is found for one does not depend on the others.
    temperature_c : float
        Temperature (degrees Celsius), which turns the slope into a charge.
    low_plateau_is_zero : bool, default False
        Fit with the low plateau held at a charge of 0 instead of free.

    Returns
    -------
    tuple of CellSigmoid
        In the order of `curves`.

    Raises
    ------
    ValueError
        If nothing can be read from a curve; the message says why.
    """
    for curve in curves:
        if (reason := why_unreadable(curve)) is not None:
            raise ValueError(f"{curve.construct}/{curve.cell}: {reason}")
    by_length: dict[int, list[int]] = defaultdict(list)
    for place, curve in enumerate(curves):
        by_length[len(curve.voltage_mv)].append(place)
    found: dict[int, CellSigmoid] = {}
    for places in by_length.values():
        alike = [curves[place] for place in places]
        found.update(zip(places, _fitted(alike, temperature_c, low_plateau_is_zero), strict=True))
    return tuple(found[place] for place in range(len(curves)))


def _fitted(curves: Sequence[Curve], temperature_c: float, low_plateau_is_zero: bool) -> list[CellSigmoid]:
    """Sigmoids of curves with equally many points."""
    v = np.array([curve.voltage_mv for curve in curves])
    charge = np.array([curve.charge for curve in curves])
    origin = np.array([plain_median_mv(curve.voltage_mv, curve.charge) for curve in curves])
    plateaus = np.array([plain_plateaus(curve.charge) for curve in curves])
    low, height = plateaus[:, 0], plateaus[:, 1] - plateaus[:, 0]
    relative, y = v - origin[:, None], (charge - low[:, None]) / height[:, None]
    start, slopes = single_starts(relative, y)
    if low_plateau_is_zero:
        y, low = charge / height[:, None], np.zeros(len(curves))
    fit = fit_each(relative, y, start, slopes, baseline_is_zero=low_plateau_is_zero)
    plateau = low + fit.offset * height
    with np.errstate(over="ignore"):  # of charges beyond 1e150 of their unit
        squares = fit.sum_of_squares * height**2
    return [
        CellSigmoid(
            construct=curve.construct,
            cell=curve.cell,
            midpoint_mv=float(fit.midpoint_mv[i] + origin[i]),
            slope_charge_e0=float(np.exp(fit.log_slope[i])) * thermal_voltage_mv(temperature_c),
            low_plateau=float(plateau[i]),
            high_plateau=float(plateau[i] + fit.gain[i] * height[i]),
            residual_sum_of_squares=float(squares[i]),
        )
        for i, curve in enumerate(curves)
    ]


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
    cells = sigmoids_of_cells(readable, temperature_c=temperature_c)
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
