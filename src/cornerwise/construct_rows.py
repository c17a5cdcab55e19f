"""Rows of the construct and cell tables: energies with intervals, charge ratios with verdicts."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from .campaign import Settings
from .energies import Energy, EnergyBook
from .flags import Flag, codes
from .intervals import Interval, ratio_interval, t_interval
from .measurements import Measurement
from .result import CellRow, ConstructRow, DrawnCurve, available
from .sources import log_ratio
from .verdicts import ChargeVerdict, charge_verdict

_DRAWN_POINTS = 121


def _charge_judgement(
    energy: Energy, wild_type: Energy, book: EnergyBook, settings: Settings
) -> tuple[float | None, Interval | None, ChargeVerdict | None]:
    """Ratio to the wild type's charge, its interval at the campaign's confidence, and the verdict."""
    if energy.label == wild_type.label:
        return None, None, None
    if energy.own_charge is None or wild_type.own_charge is None:
        return None, None, "assumed"
    logarithm = log_ratio(energy.own_charge, wild_type.own_charge)
    spread = book.ledger.spread(logarithm)
    ratio, u = math.exp(logarithm.value), math.sqrt(spread.variance)
    difference = ratio_interval(ratio, u, spread.dof, settings.confidence)
    # Two one-sided tests at 1 - confidence each are the interval at 1 - 2 (1 - confidence).
    equivalence = ratio_interval(ratio, u, spread.dof, 2 * settings.confidence - 1)
    return ratio, difference, charge_verdict(equivalence, difference, settings.charge_margin)


_TAKEN_FROM = {"wild type": "the wild type's", "stated": "the stated one", "measured": "the wild type's"}


def _charge_flags(label: str, verdict: ChargeVerdict | None, row: ConstructRow, wild_type: str) -> list[Flag]:
    if verdict == "assumed":
        taken = _TAKEN_FROM[row.charge_source]
        message = (
            f"the total charge of {label} was never measured and is taken to be {taken}; measure it, or say "
            "that the interaction rests on this assumption"
        )
        return [Flag(code="charge-assumed", subject=label, construct=label, message=message)]
    if verdict == "changed" and row.charge_ratio is not None:
        message = (
            f"{label} moves {row.charge_ratio:.3g} times the total charge of {wild_type} (interval "
            f"{row.charge_ratio_low:.3g} to {row.charge_ratio_high:.3g}): median voltages alone give wrong "
            "energies; use the full energies"
        )
        return [
            Flag(
                code="charge-shift",
                subject=label,
                construct=label,
                message=message,
                value=row.charge_ratio,
                limit=1.0,
            )
        ]
    return []


def _charge_n(energy: Energy, measurements: Mapping[str, Measurement], settings: Settings) -> int | None:
    if energy.charge_source == "stated":
        return None
    owner = energy.label if energy.charge_source == "measured" else settings.wild_type
    charge = measurements[owner].charge_e0
    return None if charge is None else charge.n


def construct_row(
    measurement: Measurement, book: EnergyBook, measurements: Mapping[str, Measurement], settings: Settings
) -> tuple[ConstructRow, tuple[Flag, ...]]:
    """One construct's row, and its flags with those of its cells.

    Parameters
    ----------
    measurement : Measurement
        The construct.
    book : EnergyBook
        Energies of the campaign.
    measurements : mapping of str to Measurement
        All constructs by label: a shared charge has its count from the wild type.
    settings : Settings
        Confidence, margin and unit.
    """
    label = measurement.label
    energy, wild_type = book.energies[label], book.energies[settings.wild_type]
    spread = book.ledger.spread(energy.energy)
    u = math.sqrt(spread.variance)
    low, high = t_interval(energy.energy.value, u, spread.dof, settings.confidence)
    ratio, ratio_limits, verdict = _charge_judgement(energy, wild_type, book, settings)
    row = ConstructRow(
        construct=label,
        mutations=tuple(map(str, measurement.construct.mutations)),
        cells_used=measurement.median_mv.n,
        median_mv=available(measurement.median_mv.mean),
        median_sem_mv=available(measurement.median_mv.sem),
        charge_e0=available(energy.charge.value),
        charge_sem_e0=available(math.sqrt(book.ledger.spread(energy.charge).variance)),
        charge_n=_charge_n(energy, measurements, settings),
        charge_source=energy.charge_source,
        energy=available(energy.energy.value),
        energy_unit=settings.energy_unit,
        std_uncertainty=available(u),
        dof=available(spread.dof),
        low=available(low),
        high=available(high),
        charge_ratio=ratio,
        charge_ratio_low=None if ratio_limits is None else available(ratio_limits.low),
        charge_ratio_high=None if ratio_limits is None else available(ratio_limits.high),
        charge_verdict=verdict,
        flags=(),
        curve=averaged_curve(measurement),
    )
    own = (*measurement.flags, *_charge_flags(label, verdict, row, settings.wild_type))
    of_cells = tuple(flag for reading in measurement.cells for flag in reading.flags)
    return replace(row, flags=codes(own + of_cells)), own + of_cells


def averaged_curve(measurement: Measurement) -> DrawnCurve | None:
    """Mean of the smooth curves of the cells that are used, over the voltages they were recorded at."""
    fits = [reading.fit for reading in measurement.cells if reading.used and reading.fit is not None]
    if not fits:
        return None
    curves = measurement.construct.curves
    low = min(float(curve.voltage_mv[0]) for curve in curves)
    high = max(float(curve.voltage_mv[-1]) for curve in curves)
    grid = np.linspace(low, high, _DRAWN_POINTS)
    mean = np.mean([fit.q(grid) for fit in fits], axis=0)
    return DrawnCurve(voltage_mv=tuple(map(float, grid)), q=tuple(map(float, mean)))


def cell_rows(measurement: Measurement) -> list[CellRow]:
    """One row a curve, used or not."""
    curves = {curve.cell: curve for curve in measurement.construct.curves}
    return [
        CellRow(
            construct=reading.construct,
            cell=reading.cell,
            batch=reading.batch,
            median_mv=available(reading.median_mv),
            midpoint_mv=available(reading.midpoint_mv),
            plain_median_mv=available(reading.plain_median_mv),
            low_plateau=available(reading.low_plateau),
            high_plateau=available(reading.high_plateau),
            points=reading.points,
            used=reading.used,
            reason=reading.reason,
            flags=codes(reading.flags),
            voltage_mv=tuple(map(float, curves[reading.cell].voltage_mv)),
            charge=tuple(map(float, curves[reading.cell].charge)),
        )
        for reading in measurement.cells
    ]
