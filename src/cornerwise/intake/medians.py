"""The table of median voltages: ``construct``, ``median_mV``, ``sem_mV`` and ``n``, a row a construct."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..campaign import FloatArray, MedianSummary
from ..errors import Origin
from .findings import Findings
from .header import Field, RawTable
from .rows import CONSTRUCT, COUNT, STANDARD_ERROR, first_named, refuse_repeated, standard_errors
from .table import Table
from .voltages import VOLTAGE_VALUES, read_voltages

VOLTS_BELOW = 0.5  # medians that are all smaller are volts in a column of millivolts

FIELDS = (
    CONSTRUCT,
    Field(base="median", units=("mV",), values=VOLTAGE_VALUES, meaning="mean median voltage"),
    Field(base="sem", units=("mV",), values=STANDARD_ERROR, meaning="its standard error"),
    COUNT,
)


@dataclass(frozen=True, kw_only=True, slots=True)
class MediansRead:
    """The medians of a campaign, and which constructs the table names."""

    medians: tuple[MedianSummary, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)  # construct: where it is first named
    lost: str = ""  # text that could not be read; what it names may not be called missing
    readable: bool = True  # False when nothing could be read


def read_medians(raw: RawTable, findings: Findings) -> MediansRead:
    """Read the table ``medians``; faults go to `findings`."""
    table = Table(raw, FIELDS, findings)
    construct = table.labels("construct")
    median = read_voltages(table, "median")
    sem = standard_errors(table)
    n = table.whole_numbers("n")
    table.check_decimal_mark()
    _refuse_volts(table, median)
    refuse_repeated(table, "construct", range(len(table)), [(label, "") for label in construct.tolist()])
    rows = np.flatnonzero((construct != "") & np.isfinite(median) & np.isfinite(sem) & np.isfinite(n))
    medians = (
        MedianSummary(
            construct=str(construct[i]), median_mv=float(median[i]), sem_mv=float(sem[i]), n=int(n[i]),
            origin=table.origin(int(i)),
        )
        for i in rows
    )  # fmt: skip
    seen = first_named(table, construct)
    return MediansRead(medians=tuple(medians), seen=seen, lost=raw.lost, readable=table.readable)


def _refuse_volts(table: Table, median_mv: FloatArray) -> None:
    known = median_mv[np.isfinite(median_mv)]
    if len(known) > 2 and bool(np.all(np.abs(known) < VOLTS_BELOW)):
        table.findings.add(
            table.raw.header_origin(table.header("median")),
            found=f"all {len(known)} median voltages within {VOLTS_BELOW:g} mV of 0",
            expected="median voltages in mV",
            remedy="if the values are volts, multiply them and their standard errors by 1000",
        )
