"""A look at the data before anything final is computed: what is there, what is missing, what is doubtful."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import ClassVar

from .campaign import Campaign, Settings
from .construct_rows import averaged_curve, cell_rows
from .flags import Flag, codes
from .measurements import Measurement, measure, protocol_flags
from .mutations import incomplete_cycles
from .rows import CellRow, DrawnCurve
from .tables import Table, Value, available, flat_values


@dataclass(frozen=True, kw_only=True, slots=True)
class SurveyRow:
    """One construct as it was recorded."""

    columns: ClassVar[tuple[str, ...]] = (
        "construct", "mutations", "cells", "cells_set_aside", "median_mV", "median_sem_mV", "charge_e0",
        "charge_sem_e0", "charge_n", "flags",
    )  # fmt: skip

    construct: str
    mutations: tuple[str, ...]
    cells_used: int
    cells_set_aside: int
    median_mv: float | None
    median_sem_mv: float | None
    charge_e0: float | None
    charge_sem_e0: float | None
    charge_n: int | None
    flags: tuple[str, ...]
    curve: DrawnCurve | None  # averaged over the cells that are used
    median_uncertainty_mv: float | None  # cells' scatter and what was extrapolated for all of them

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class Survey:
    """What a campaign holds."""

    settings: Settings
    background: tuple[str, ...]
    constructs: Table[SurveyRow]  # the wild type first
    cells: Table[CellRow]
    cycles: tuple[str, ...]  # complete ones, by order and residue
    incomplete: tuple[tuple[str, tuple[str, ...]], ...]  # construct, and what its cycle lacks
    flags: tuple[Flag, ...]
    notes: tuple[str, ...] = ()  # what was read and how, a sentence each


def _row(measurement: Measurement) -> tuple[SurveyRow, tuple[Flag, ...]]:
    charge = measurement.charge_e0
    flags = (*measurement.flags, *(flag for reading in measurement.cells for flag in reading.flags))
    row = SurveyRow(
        construct=measurement.label,
        mutations=tuple(map(str, measurement.construct.mutations)),
        cells_used=measurement.median_mv.n or 0,
        cells_set_aside=sum(not reading.used for reading in measurement.cells),
        median_mv=available(measurement.median_mv.mean),
        median_sem_mv=available(measurement.median_mv.sem),
        charge_e0=available(charge.mean if charge is not None else math.nan),
        charge_sem_e0=available(charge.sem if charge is not None else math.nan),
        charge_n=None if charge is None else charge.n,
        flags=codes(flags),
        curve=averaged_curve(measurement),
        median_uncertainty_mv=available(measurement.median_uncertainty_mv),
    )
    return row, flags


def survey(campaign: Campaign, progress: Callable[[str, int, int], None] | None = None) -> Survey:
    """Judge the data of a campaign without computing an energy.

    Parameters
    ----------
    campaign : Campaign
        What was read; see `cornerwise.read`.
    progress : callable, optional
        Called with a step's name, how much of it is done and how much there is.

    Returns
    -------
    Survey
        A row a construct, the cycles that are complete, those that lack a construct, and every flag.
    """
    step = None if progress is None else lambda done, total: progress("median voltages", done, total)
    measured = measure(campaign, step)
    rows = [_row(measurement) for measurement in measured]
    labels = {frozenset(construct.mutations): construct.label for construct in campaign.constructs}
    constructs = {construct.label: construct for construct in campaign.constructs}
    of_cycles = [
        flag
        for cycle in campaign.cycles
        for flag in protocol_flags(cycle.name, tuple(constructs[c.label] for c in cycle.corners))
    ]
    return Survey(
        settings=campaign.settings,
        background=tuple(map(str, campaign.background)),
        constructs=Table(SurveyRow, [row for row, _ in rows]),
        cells=Table(CellRow, [row for measurement in measured for row in cell_rows(measurement)]),
        cycles=tuple(cycle.name for cycle in campaign.cycles),
        incomplete=incomplete_cycles(labels),
        flags=(*(flag for _, flags in rows for flag in flags), *of_cycles),
        notes=campaign.notes,
    )
