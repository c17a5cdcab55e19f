"""What was measured on each construct: median voltages and total charges, cell by cell or summarised."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

import numpy as np

from .campaign import Campaign, Construct, Curve
from .charges import ChargeValue, charge_values, choose, method_flags, plausibility_flags
from .flags import Flag
from .median import CellReading, read_construct
from .quantities import Quantity, Sample, Summary

SET_ASIDE = "set aside by the user: "  # how the reason of such a cell begins
FEWEST_CELLS = 4
# Corners measured over ranges that differ by more than this are flagged: 20 mV is two of the usual steps.
RANGE_DIFFERENCE_MV = 20.0


@dataclass(frozen=True, kw_only=True, slots=True)
class Measurement:
    """All that one construct gave."""

    construct: Construct
    cells: tuple[CellReading, ...]
    median_mv: Quantity
    truncation_mv: float  # standard uncertainty common to the medians of all its cells
    charge: ChargeValue | None  # the one that is used; None when never measured
    other_charges: tuple[ChargeValue, ...] = ()  # from other methods
    flags: tuple[Flag, ...]

    @property
    def label(self) -> str:
        """The construct's label."""
        return self.construct.label

    @property
    def median_uncertainty_mv(self) -> float:
        """Standard uncertainty of the median: scatter of cells, and what was extrapolated for all of them."""
        return math.hypot(self.median_mv.sem, self.truncation_mv)

    @property
    def charge_e0(self) -> Quantity | None:
        """Total charge per channel that is used; None when never measured."""
        return None if self.charge is None else self.charge.quantity


def _few_cells(label: str, what: str, n: int | None) -> list[Flag]:
    if n is None or n >= FEWEST_CELLS:
        return []
    message = (
        f"{what} of {label} rest on {n} cell{'s' if n != 1 else ''}; "
        f"record {FEWEST_CELLS} or more, or read the wide interval as it stands"
    )
    if n < 2:
        message = f"{what} of {label} rest on {n} usable cells; an uncertainty needs 2 or more"
    return [
        Flag(code="few-cells", subject=label, construct=label, message=message, value=n, limit=FEWEST_CELLS)
    ]


def _single_batch(construct: Construct) -> list[Flag]:
    batches = {curve.batch for curve in construct.curves}
    if len(construct.curves) < 2 or len(batches) != 1 or None in batches:
        return []
    message = (
        f"all cells of {construct.label} come from batch {batches.pop()}: differences between batches "
        "cannot be told from the mutation; record the construct in a second batch"
    )
    label = construct.label
    return [Flag(code="single-batch", subject=label, construct=label, message=message, value=1, limit=2)]


def _median(construct: Construct, readings: tuple[CellReading, ...]) -> Quantity:
    if construct.median is not None:
        return Summary(mean=construct.median.median_mv, sem=construct.median.sem_mv, n=construct.median.n)
    used = [reading for reading in readings if reading.used]
    return Sample(
        cells=tuple(reading.cell for reading in used),
        values=np.array([reading.median_mv for reading in used], dtype=float),
        batches=tuple(reading.batch for reading in used),
    )


def _readings(
    construct: Construct, set_aside: Mapping[str, str], *, correct: bool
) -> tuple[CellReading, ...]:
    """Read the curves in the order of the cells' names, each flag marked with its construct and cell.

    Cells the user set aside are read alone, so that they bear on no other cell.
    """
    curves = sorted(construct.curves, key=lambda curve: curve.cell)
    kept = [curve for curve in curves if curve.cell not in set_aside]
    readings = (
        [_marked(reading) for reading in read_construct(kept, correct_sloping_plateaus=correct)]
        if kept
        else []
    )
    for curve in curves:
        if curve.cell in set_aside:
            (alone,) = read_construct([curve], correct_sloping_plateaus=correct)
            reason = f"{SET_ASIDE}{set_aside[curve.cell]}"
            readings.append(replace(_marked(alone), used=False, reason=reason))
    return tuple(sorted(readings, key=lambda reading: reading.cell))


def _marked(reading: CellReading) -> CellReading:
    flags = (replace(flag, construct=reading.construct, cell=reading.cell) for flag in reading.flags)
    return replace(reading, flags=tuple(flags))


def _without(construct: Construct, set_aside: Mapping[str, str]) -> Construct:
    """The construct without the charges of cells that are set aside; their curves stay, to be shown."""
    charges = tuple(one for one in construct.charge_replicates if one.cell not in set_aside)
    openings = tuple(one for one in construct.openings if one.cell not in set_aside)
    return replace(construct, charge_replicates=charges, openings=openings)


@dataclass(frozen=True, kw_only=True, slots=True)
class _Choice:
    """What the settings say of every construct: which charge is used, how curves are read."""

    method: str | None
    wild_type_e0: float | None  # None while the wild type itself is measured
    confidence: float
    temperature_c: float
    correct_sloping_plateaus: bool


def _measure(construct: Construct, set_aside: Mapping[str, str], choice: _Choice) -> Measurement:
    readings = _readings(construct, set_aside, correct=choice.correct_sloping_plateaus)
    median = _median(construct, readings)
    values = charge_values(_without(construct, set_aside), choice.temperature_c)
    used = choose(values, choice.method)
    flags = _few_cells(construct.label, "the median voltages", median.n)
    if used is not None:
        flags += _few_cells(construct.label, "the total charges", used.quantity.n)
        flags += method_flags(construct, values, used, choice.confidence)
        flags += plausibility_flags(construct, used.quantity.mean, choice.wild_type_e0)
    truncations = [reading.truncation_mv for reading in readings if reading.used]
    return Measurement(
        construct=construct,
        cells=readings,
        median_mv=median,
        truncation_mv=float(np.mean(truncations)) if truncations else 0.0,
        charge=used,
        other_charges=tuple(value for value in values if value is not used),
        flags=(*flags, *_single_batch(construct)),
    )


def measure(
    campaign: Campaign, progress: Callable[[int, int], None] | None = None
) -> tuple[Measurement, ...]:
    """Reduce every construct's curves and charges.

    Parameters
    ----------
    campaign : Campaign
        What was read.
    progress : callable, optional
        Called with the number of constructs done and their total.

    Returns
    -------
    tuple of Measurement
        In the order of the campaign's constructs.
    """
    set_aside: dict[str, dict[str, str]] = {}
    for exclusion in campaign.exclusions:
        set_aside.setdefault(exclusion.construct, {})[exclusion.cell] = exclusion.reason
    settings = campaign.settings
    method, wild_type_e0 = _wild_type_charge(campaign, set_aside.get(settings.wild_type, {}))
    choice = _Choice(
        method=method,
        wild_type_e0=wild_type_e0,
        confidence=settings.confidence,
        temperature_c=settings.temperature_c,
        correct_sloping_plateaus=settings.correct_sloping_plateaus,
    )
    done = []
    for count, construct in enumerate(campaign.constructs, start=1):
        done.append(_measure(construct, set_aside.get(construct.label, {}), choice))
        if progress is not None:
            progress(count, len(campaign.constructs))
    return tuple(done)


def _wild_type_charge(campaign: Campaign, set_aside: Mapping[str, str]) -> tuple[str | None, float | None]:
    """Method that the charges of all constructs are taken from where they have it, and the wild type's."""
    wild_type = campaign.construct(campaign.settings.wild_type)
    values = charge_values(_without(wild_type, set_aside), campaign.settings.temperature_c)
    used = choose(values, campaign.settings.charge_method)
    if used is None:
        return campaign.settings.charge_method, None
    return campaign.settings.charge_method or used.method, used.quantity.mean


def _ranges(curves: tuple[Curve, ...]) -> tuple[float, float]:
    lows = [float(curve.voltage_mv[0]) for curve in curves]
    highs = [float(curve.voltage_mv[-1]) for curve in curves]
    return float(np.median(lows)), float(np.median(highs))


def protocol_flags(name: str, corners: tuple[Construct, ...]) -> tuple[Flag, ...]:
    """Flags of a cycle whose corners were not recorded alike.

    Parameters
    ----------
    name : str
        The cycle's name.
    corners : tuple of Construct
        Its constructs; those without curves are left out of the comparison.

    Returns
    -------
    tuple of Flag
        ``mixed-ranges`` and ``mixed-protocol``, where they apply.
    """
    measured = [construct for construct in corners if construct.curves]
    if not measured:
        return ()
    flags = []
    lows, highs = zip(*(_ranges(construct.curves) for construct in measured), strict=True)
    spread = max(max(lows) - min(lows), max(highs) - min(highs))
    if spread > RANGE_DIFFERENCE_MV:
        message = (
            f"the corners of {name} were recorded over voltage ranges whose ends differ by {spread:g} mV; "
            "record them over one range that reaches both plateaus of every corner"
        )
        flags.append(
            Flag(code="mixed-ranges", subject=name, message=message, value=spread, limit=RANGE_DIFFERENCE_MV)
        )
    protocols = {(curve.holding_mv, curve.phase) for construct in measured for curve in construct.curves}
    if len(protocols) > 1:
        message = (
            f"the corners of {name} mix {len(protocols)} protocols (holding voltage, on or off charge): "
            "prior inactivation or charge immobilisation may differ; record them alike"
        )
        flags.append(
            Flag(code="mixed-protocol", subject=name, message=message, value=len(protocols), limit=1)
        )
    return tuple(flags)
