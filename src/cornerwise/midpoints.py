"""What the older literature quotes beside the median-based energy: midpoints and single-sigmoid numbers."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from .campaign import Settings
from .energies import Energy, EnergyBook
from .flags import Flag
from .measurements import Measurement
from .median import single_sigmoid


@dataclass(frozen=True, kw_only=True, slots=True)
class Midpoints:
    """Midpoint-based numbers of one construct; NaN without curves. Energies in the campaign's unit."""

    midpoint_mv: float = math.nan  # mean over cells of the voltage where q = 0.5
    midpoint_energy: float = math.nan  # total charge times that, at the reference voltage
    sigmoid_midpoint_mv: float = math.nan  # of one sigmoid fitted to each cell, mean
    slope_charge_e0: float = math.nan  # its apparent charge, kT over its slope
    sigmoid_energy: float = math.nan  # that charge times that midpoint, at the reference voltage


def midpoints(
    measurement: Measurement, energy: Energy, book: EnergyBook, settings: Settings
) -> tuple[Midpoints, tuple[Flag, ...]]:
    """Midpoint-based numbers of one construct, and a flag where they mislead.

    Parameters
    ----------
    measurement : Measurement
        The construct.
    energy : Energy
        Its charge and median voltage.
    book : EnergyBook
        For the energy of one charge and one millivolt.
    settings : Settings
        Temperature, reference voltage and tolerance.

    Returns
    -------
    Midpoints, tuple of Flag
        ``midpoint-misleads`` when the energy from the midpoint differs from that of the median, with the
        same charge, by more than the shortcut's tolerance.
    """
    used = {reading.cell: reading for reading in measurement.cells if reading.used}
    curves = [curve for curve in measurement.construct.curves if curve.cell in used]
    sigmoid = single_sigmoid(curves, temperature_c=settings.temperature_c) if curves else None
    if sigmoid is None:
        return Midpoints(), ()
    midpoint = float(np.mean([reading.midpoint_mv for reading in used.values()]))
    reference, per, charge = settings.reference_voltage_mv, book.per_e0_mv, energy.charge.value
    found = Midpoints(
        midpoint_mv=midpoint,
        midpoint_energy=per * charge * (midpoint - reference),
        sigmoid_midpoint_mv=sigmoid.midpoint_mv,
        slope_charge_e0=sigmoid.slope_charge_e0,
        sigmoid_energy=per * sigmoid.slope_charge_e0 * (sigmoid.midpoint_mv - reference),
    )
    return found, _misleads(measurement.label, found, energy, per, settings)


def _misleads(
    label: str, found: Midpoints, energy: Energy, per_e0_mv: float, settings: Settings
) -> tuple[Flag, ...]:
    shift = found.midpoint_mv - energy.median.value
    difference = per_e0_mv * energy.charge.value * shift
    limit = settings.energy_tolerance
    if not abs(difference) > limit:
        return ()
    message = misleading_midpoint(label, shift, difference, limit, settings.energy_unit)
    return (
        Flag(
            code="midpoint-misleads",
            subject=label,
            construct=label,
            message=message,
            value=difference,
            limit=limit,
        ),
    )


def misleading_midpoint(label: str, shift_mv: float, difference: float, limit: float, unit: str) -> str:
    """Sentence of the flag ``midpoint-misleads``.

    Parameters
    ----------
    label : str
        The construct.
    shift_mv : float
        Midpoint less median voltage, mV.
    difference, limit : float
        What the shift is worth as an energy, and the tolerance, in `unit`.
    unit : str
        Energy unit.
    """
    return (
        f"the midpoint of {label} (q = 0.5) lies {shift_mv:+.1f} mV from its median voltage, "
        f"{difference:+.2g} {unit} as an energy and more than the tolerance of {limit:.2g}: its curve is not "
        "symmetric; do not compare midpoints"
    )
