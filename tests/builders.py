"""Campaigns made in Python, for tests of the rooms behind the intake."""

from collections.abc import Mapping, Sequence

import numpy as np

from cornerwise.campaign import (
    Campaign,
    ChargeReplicate,
    ChargeSummary,
    Construct,
    Curve,
    MedianSummary,
    Settings,
)
from cornerwise.charges import ChargeValue
from cornerwise.measurements import Measurement
from cornerwise.mutations import find_cycles, in_residue_order, parse_label
from cornerwise.quantities import Sample, Summary

VOLTAGES = np.arange(-160.0, 81.0, 10.0)


def sigmoid_curve(construct: str, cell: str, median_mv: float, **changes: object) -> Curve:
    """Noiseless curve with this median voltage."""
    charge = 1 / (1 + np.exp(-(VOLTAGES - median_mv) / 7.0))
    return Curve(
        **{"construct": construct, "cell": cell, "voltage_mv": VOLTAGES, "charge": charge, **changes}
    )


def construct(
    label: str,
    medians: Sequence[float] | tuple[float, float, int],
    charges: Sequence[float] | ChargeSummary | None = None,
    *,
    summarised: bool = False,
    charge_cells: str = "c",
    batches: Sequence[str | None] = (),
) -> Construct:
    """Construct with one curve a median (or a median summary), and charges of cells c0, c1, ..."""
    curves: tuple[Curve, ...] = ()
    summary = None
    if summarised:
        mean, sem, n = medians
        summary = MedianSummary(construct=label, median_mv=mean, sem_mv=sem, n=int(n))
    else:
        of_cells = [*batches, *[None] * (len(medians) - len(batches))]
        curves = tuple(sigmoid_curve(label, f"c{i}", vm, batch=of_cells[i]) for i, vm in enumerate(medians))
    replicates: tuple[ChargeReplicate, ...] = ()
    if charges is not None and not isinstance(charges, ChargeSummary):
        replicates = tuple(
            ChargeReplicate(construct=label, cell=f"{charge_cells}{i}", charge_e0=q)
            for i, q in enumerate(charges)
        )
    return Construct(
        label=label,
        mutations=in_residue_order(parse_label(label) or ()),
        curves=curves,
        median=summary,
        charge_replicates=replicates,
        charge_summaries=(charges,) if isinstance(charges, ChargeSummary) else (),
    )


def campaign(constructs: Sequence[Construct], **settings: object) -> Campaign:
    """Campaign on all complete cycles of these constructs; the wild type is called WT."""
    labels = {frozenset(one.mutations): one.label for one in constructs}
    return Campaign(
        settings=Settings(**{"wild_type": "WT", "replicates": 2000, **settings}),
        constructs=tuple(constructs),
        cycles=find_cycles(labels),
    )


def measurement(
    label: str,
    medians: Mapping[str, float] | Summary | Sample,
    charges: Mapping[str, float] | Summary | Sample | None = None,
    truncation_mv: float = 0.0,
) -> Measurement:
    """Measurement from named cells, without going through curves."""
    return Measurement(
        construct=Construct(label=label, mutations=in_residue_order(parse_label(label) or ())),
        cells=(),
        median_mv=_quantity(medians),
        truncation_mv=truncation_mv,
        charge=None if charges is None else _charge(charges),
        flags=(),
    )


def _charge(given: Mapping[str, float] | Summary | Sample) -> ChargeValue:
    kind = "summary" if isinstance(given, Summary) else "cells"
    return ChargeValue(method="measured", kind=kind, quantity=_quantity(given))


def _quantity(given: Mapping[str, float] | Summary | Sample) -> Sample | Summary:
    if isinstance(given, Summary | Sample):
        return given
    return Sample(cells=tuple(given), values=np.array(list(given.values()), dtype=float))


def cells(values: Sequence[float], prefix: str = "c") -> dict[str, float]:
    """Cells c0, c1, ... with these values."""
    return {f"{prefix}{i}": float(value) for i, value in enumerate(values)}


def batched(values: Sequence[float], batches: Sequence[str | None], prefix: str = "c") -> Sample:
    """Cells c0, c1, ... with these values and the batch of each."""
    return Sample(
        cells=tuple(f"{prefix}{i}" for i in range(len(values))),
        values=np.array(values, dtype=float),
        batches=tuple(batches),
    )
