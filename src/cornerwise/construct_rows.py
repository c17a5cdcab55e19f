"""Rows of the construct and cell tables: energies with intervals, charge ratios with verdicts."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TypedDict

import numpy as np

from .batches import alone
from .campaign import Settings, StatedCharge
from .charge_judgement import ASSUMED, ChargeJudgement, judge_charge
from .energies import Energy, EnergyBook
from .flags import Flag, codes
from .intervals import t_interval
from .measurements import Measurement
from .midpoints import midpoints
from .quantities import Sample
from .rows import CellRow, ConstructRow, DrawnCurve
from .tables import available
from .verdicts import ChargeVerdict

_DRAWN_POINTS = 121


def _charge_flags(label: str, judged: ChargeJudgement | None, shared: str, wild_type: str) -> list[Flag]:
    if judged is None:
        return []
    if judged.verdict == "assumed":
        message = (
            f"the total charge of {label} was never measured and is taken to be {shared}; measure it, or say "
            "that the interaction rests on this assumption"
        )
        return [Flag(code="charge-assumed", subject=label, construct=label, message=message)]
    if judged.verdict == "changed":
        low, high = judged.difference
        message = (
            f"{label} moves {judged.ratio:.3g} times the total charge of {wild_type} (interval {low:.3g} to "
            f"{high:.3g}): median voltages alone give wrong energies; use the full energies"
        )
        return [
            Flag(
                code="charge-shift",
                subject=label,
                construct=label,
                message=message,
                value=judged.ratio,
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


def _charge_words(energy: Energy, measurements: Mapping[str, Measurement], settings: Settings) -> str:
    """Where the charge that is used comes from, for the `charge_source` column."""
    if isinstance(settings.charge, StatedCharge):
        citation = settings.charge.citation
        return "stated" if citation is None else f"stated: {citation}"
    if energy.charge_source == "wild type":
        return "wild type"
    charge = measurements[energy.label].charge
    return "measured" if charge is None else charge.source


def construct_row(
    measurement: Measurement, book: EnergyBook, measurements: Mapping[str, Measurement], settings: Settings
) -> tuple[ConstructRow, tuple[Flag, ...], ChargeJudgement | None]:
    """One construct's row, its flags with those of its cells, and what is known of its charge.

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
    energy = book.energies[label]
    ledger, units = alone(book.ledger, label, book.shared_batches)
    own = ledger.adjusted(energy.energy)
    spread = ledger.spread(own)
    u = math.sqrt(spread.variance)
    low, high = t_interval(own.value, u, spread.dof, settings.confidence)
    judged = None if label == settings.wild_type else judge_charge(label, measurements, book, settings)
    shared = "the stated one" if isinstance(settings.charge, StatedCharge) else "the wild type's"
    middle, misled = midpoints(measurement, energy, book, settings)
    of_cells = tuple(flag for reading in measurement.cells for flag in reading.flags)
    flags = (
        *measurement.flags,
        *_charge_flags(label, judged, shared, settings.wild_type),
        *misled,
        *of_cells,
    )
    row = ConstructRow(
        construct=label,
        mutations=tuple(map(str, measurement.construct.mutations)),
        cells_used=measurement.median_mv.n or 0,
        median_mv=available(measurement.median_mv.mean),
        median_sem_mv=available(measurement.median_mv.sem),
        charge_e0=available(energy.charge.value),
        charge_sem_e0=available(math.sqrt(book.ledger.spread(energy.charge).variance)),
        charge_n=_charge_n(energy, measurements, settings),
        charge_source=_charge_words(energy, measurements, settings),
        energy=available(own.value),
        energy_unit=settings.energy_unit,
        std_uncertainty=available(u),
        dof=available(spread.dof),
        low=available(low),
        high=available(high),
        **_charge_fields(judged),
        midpoint_mv=available(middle.midpoint_mv),
        midpoint_energy=available(middle.midpoint_energy),
        sigmoid_midpoint_mv=available(middle.sigmoid_midpoint_mv),
        slope_charge_e0=available(middle.slope_charge_e0),
        sigmoid_energy=available(middle.sigmoid_energy),
        flags=codes(flags),
        units=units,
        curve=averaged_curve(measurement),
        charge_values=_charge_values(measurement),
        median_uncertainty_mv=available(measurement.median_uncertainty_mv),
    )
    return row, flags, judged


def _charge_values(measurement: Measurement) -> tuple[float, ...]:
    charge = measurement.charge_e0
    return tuple(map(float, charge.values)) if isinstance(charge, Sample) else ()


class _ChargeFields(TypedDict):
    charge_ratio: float | None
    charge_ratio_low: float | None
    charge_ratio_high: float | None
    charge_verdict: ChargeVerdict | None
    charge_passing_margin: float | None
    charge_cells_needed: int | None


def _charge_fields(judged: ChargeJudgement | None) -> _ChargeFields:
    known = ASSUMED if judged is None else judged
    return {
        "charge_ratio": available(known.ratio),
        "charge_ratio_low": available(known.difference.low),
        "charge_ratio_high": available(known.difference.high),
        "charge_verdict": None if judged is None else judged.verdict,
        "charge_passing_margin": available(known.passing_margin),
        "charge_cells_needed": known.cells_needed,
    }


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
