"""What was measured on each construct: median voltages and total charges, cell by cell or summarised."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from .campaign import Campaign, Construct, Curve
from .flags import Flag
from .median import CellReading, read_construct

FloatArray = NDArray[np.float64]

FEWEST_CELLS = 4
# Corners measured over ranges that differ by more than this are flagged: 20 mV is two of the usual steps.
RANGE_DIFFERENCE_MV = 20.0


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Sample:
    """One quantity in several cells."""

    cells: tuple[str, ...]
    values: FloatArray  # (n_cells,)

    @property
    def n(self) -> int:
        """Number of cells."""
        return len(self.cells)

    @property
    def mean(self) -> float:
        """Arithmetic mean; NaN for no cell."""
        return float(np.mean(self.values)) if self.n else float("nan")

    @property
    def sem(self) -> float:
        """Standard error of the mean; NaN for a single cell."""
        return float(np.std(self.values, ddof=1) / np.sqrt(self.n)) if self.n > 1 else float("nan")


@dataclass(frozen=True, kw_only=True, slots=True)
class Summary:
    """One quantity known as mean, standard error of the mean and number of cells."""

    mean: float
    sem: float
    n: int


@dataclass(frozen=True, kw_only=True, slots=True)
class Measurement:
    """All that one construct gave."""

    construct: Construct
    cells: tuple[CellReading, ...]
    median_mv: Sample | Summary
    truncation_mv: float  # standard uncertainty common to the medians of all its cells
    charge_e0: Sample | Summary | None  # per channel; None when never measured
    flags: tuple[Flag, ...]

    @property
    def label(self) -> str:
        """The construct's label."""
        return self.construct.label


def _few_cells(label: str, what: str, n: int) -> list[Flag]:
    if n >= FEWEST_CELLS:
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


def _median(construct: Construct, readings: tuple[CellReading, ...]) -> Sample | Summary:
    if construct.median is not None:
        return Summary(mean=construct.median.median_mv, sem=construct.median.sem_mv, n=construct.median.n)
    used = [reading for reading in readings if reading.used]
    return Sample(
        cells=tuple(reading.cell for reading in used),
        values=np.array([reading.median_mv for reading in used], dtype=float),
    )


def _charge(construct: Construct) -> Sample | Summary | None:
    if construct.charge is not None:
        return Summary(mean=construct.charge.charge_e0, sem=construct.charge.sem_e0, n=construct.charge.n)
    if not construct.charge_replicates:
        return None
    replicates = sorted(construct.charge_replicates, key=lambda replicate: replicate.cell)
    return Sample(
        cells=tuple(replicate.cell for replicate in replicates),
        values=np.array([replicate.charge_e0 for replicate in replicates], dtype=float),
    )


def _readings(construct: Construct) -> tuple[CellReading, ...]:
    """Read the curves in the order of the cells' names, each flag marked with its construct and cell."""
    if not construct.curves:
        return ()
    curves = sorted(construct.curves, key=lambda curve: curve.cell)
    return tuple(_marked(reading) for reading in read_construct(curves))


def _marked(reading: CellReading) -> CellReading:
    flags = (replace(flag, construct=reading.construct, cell=reading.cell) for flag in reading.flags)
    return replace(reading, flags=tuple(flags))


def _measure(construct: Construct) -> Measurement:
    readings = _readings(construct)
    median, charge = _median(construct, readings), _charge(construct)
    flags = _few_cells(construct.label, "the median voltages", median.n)
    if charge is not None:
        flags += _few_cells(construct.label, "the total charges", charge.n)
    truncations = [reading.truncation_mv for reading in readings if reading.used]
    return Measurement(
        construct=construct,
        cells=readings,
        median_mv=median,
        truncation_mv=float(np.mean(truncations)) if truncations else 0.0,
        charge_e0=charge,
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
    done = []
    for count, construct in enumerate(campaign.constructs, start=1):
        done.append(_measure(construct))
        if progress is not None:
            progress(count, len(campaign.constructs))
    return tuple(done)


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
