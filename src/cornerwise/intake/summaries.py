"""The tables of median voltages and of total charges."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np

from .. import plausible
from ..campaign import ChargeReplicate, ChargeSummary, FloatArray, MedianSummary
from ..errors import Origin
from .findings import Findings, shown
from .header import Field, RawTable
from .table import Table, TextArray
from .voltages import read_voltages

FEWEST_CELLS = 2  # a standard error needs two
VOLTS_BELOW = 0.5  # medians that are all smaller are volts in a column of millivolts

MEDIAN_FIELDS = (
    Field(base="construct"),
    Field(base="median", units=("mV",)),
    Field(base="sem", units=("mV",)),
    Field(base="n"),
)
_CHARGE = Field(base="charge", units=("e0",))
_METHOD = Field(base="method", required=False)
REPLICATE_FIELDS = (
    Field(base="construct"),
    Field(base="cell"),
    Field(base="batch", required=False),
    _CHARGE,
    _METHOD,
)
SUMMARY_FIELDS = (
    Field(base="construct"),
    _CHARGE,
    Field(base="sem", units=("e0",)),
    Field(base="n"),
    _METHOD,
)
_RAW_CHARGES = ("charge_fC", "charge_pC", "charge_nC")


@dataclass(frozen=True, kw_only=True, slots=True)
class MediansRead:
    """The medians of a campaign, and which constructs the table names."""

    medians: tuple[MedianSummary, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)  # construct: where it is first named
    lost: str = ""  # text that could not be read; what it names may not be called missing
    readable: bool = True  # False when nothing could be read


@dataclass(frozen=True, kw_only=True, slots=True)
class ChargesRead:
    """The charges of a campaign, and which constructs the table names."""

    replicates: tuple[ChargeReplicate, ...] = ()
    summaries: tuple[ChargeSummary, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)
    lost: str = ""
    readable: bool = True


def read_medians(raw: RawTable, findings: Findings) -> MediansRead:
    """Read the table ``medians``: ``construct``, ``median_mV``, ``sem_mV`` and ``n``, a row a construct."""
    table = Table(raw, MEDIAN_FIELDS, findings)
    construct = table.labels("construct")
    median = read_voltages(table, "median")
    sem = _standard_errors(table)
    n = table.whole_numbers("n", least=FEWEST_CELLS)
    table.check_decimal_mark()
    _refuse_volts(table, median)
    _refuse_repeated(table, construct)
    rows = np.flatnonzero((construct != "") & np.isfinite(median) & np.isfinite(sem) & np.isfinite(n))
    medians = (
        MedianSummary(
            construct=str(construct[i]), median_mv=float(median[i]), sem_mv=float(sem[i]), n=int(n[i]),
            origin=table.origin(int(i)),
        )
        for i in rows
    )  # fmt: skip
    seen = _first_named(table, construct)
    return MediansRead(medians=tuple(medians), seen=seen, lost=raw.lost, readable=table.readable)


def read_charges(raw: RawTable, findings: Findings) -> ChargesRead:
    """Read the table ``charges``, a row per cell or a row per construct.

    Replicates have the columns ``construct``, ``cell``, ``charge_e0``; summaries ``construct``,
    ``charge_e0``, ``sem_e0``, ``n``. A table with a column ``cell`` holds replicates.
    """
    if refused_raw_charge(raw, findings):
        return ChargesRead(readable=False)
    if "cell" in raw.header:
        if {"sem_e0", "n"} & set(raw.header):
            _refuse_both_kinds(raw, findings)
            return ChargesRead(readable=False)
        return _read_replicates(Table(raw, REPLICATE_FIELDS, findings))
    return _read_summaries(Table(raw, SUMMARY_FIELDS, findings))


def _read_replicates(table: Table) -> ChargesRead:
    construct, cell, batch = table.labels("construct"), table.labels("cell"), table.text("batch")
    charge, method = _charges(table), table.text("method")
    table.check_decimal_mark()
    _refuse_repeated(table, construct, cell)
    replicates = (
        ChargeReplicate(
            construct=str(construct[i]), cell=str(cell[i]), batch=str(batch[i]) or None,
            charge_e0=float(charge[i]), method=str(method[i]) or None, origin=table.origin(int(i)),
        )
        for i in np.flatnonzero((construct != "") & (cell != "") & np.isfinite(charge))
    )  # fmt: skip
    in_order = tuple(sorted(replicates, key=lambda replicate: (replicate.construct, replicate.cell)))
    seen = _first_named(table, construct)
    return ChargesRead(replicates=in_order, seen=seen, lost=table.raw.lost, readable=table.readable)


def _read_summaries(table: Table) -> ChargesRead:
    construct, charge, sem = table.labels("construct"), _charges(table), _standard_errors(table)
    n, method = table.whole_numbers("n", least=FEWEST_CELLS), table.text("method")
    table.check_decimal_mark()
    _refuse_repeated(table, construct)
    summaries = (
        ChargeSummary(
            construct=str(construct[i]), charge_e0=float(charge[i]), sem_e0=float(sem[i]), n=int(n[i]),
            method=str(method[i]) or None, origin=table.origin(int(i)),
        )
        for i in np.flatnonzero((construct != "") & np.isfinite(charge) & np.isfinite(sem) & np.isfinite(n))
    )  # fmt: skip
    seen = _first_named(table, construct)
    return ChargesRead(summaries=tuple(summaries), seen=seen, lost=table.raw.lost, readable=table.readable)


def _charges(table: Table) -> FloatArray:
    charge = table.numbers("charge")
    for index in np.flatnonzero(np.isfinite(charge)):
        if not plausible.possible_total_charge(float(charge[index])):
            table.refuse(
                int(index), "charge", found=f"{charge[index]:g} e0",
                expected=f"a total charge per channel above 0 and at most {plausible.CHARGE_LIMIT_E0:g} e0",
                remedy="correct the value; it must be the charge of one channel in elementary charges",
            )  # fmt: skip
    return charge


def _standard_errors(table: Table) -> FloatArray:
    sem = table.numbers("sem")
    for index in np.flatnonzero(sem < 0):
        table.refuse(
            int(index), "sem", found=f"{sem[index]:g}", expected="a standard error, not negative",
            remedy="correct the value",
        )  # fmt: skip
    return sem


def _refuse_volts(table: Table, median_mv: FloatArray) -> None:
    known = median_mv[np.isfinite(median_mv)]
    if len(known) > 2 and bool(np.all(np.abs(known) < VOLTS_BELOW)):
        table.findings.add(
            table.raw.header_origin(table.header("median")),
            found=f"all {len(known)} median voltages within {VOLTS_BELOW:g} mV of 0",
            expected="median voltages in mV",
            remedy="if the values are volts, multiply them and their standard errors by 1000",
        )


def _refuse_repeated(table: Table, *keys: TextArray) -> None:
    """Refuse a second row for the same construct, or the same cell."""
    earlier: dict[tuple[str, ...], int] = {}
    for index, key in enumerate(zip(*(column.tolist() for column in keys), strict=True)):
        first = earlier.setdefault(key, index)
        if first != index and all(key):
            table.refuse(
                index, "construct" if len(keys) == 1 else "cell",
                found=f"{shown('/'.join(key))} again, after row {table.raw.rows[first]}",
                expected="one row each", remedy="delete one of the rows, or correct its label",
            )  # fmt: skip


def _first_named(table: Table, construct: TextArray) -> dict[str, Origin]:
    seen: dict[str, Origin] = {}
    for index, label in enumerate(construct.tolist()):
        if label and label not in seen:
            seen[label] = table.origin(index, "construct")
    return seen


def refused_raw_charge(raw: RawTable, findings: Findings) -> bool:
    """Whether the table holds charge of a whole cell, which is a fault: it says nothing of one channel."""
    raw_charges = list(_raw_charges(raw))
    for header in raw_charges:
        findings.add(
            raw.header_origin(header),
            found=f"the header {shown(header)}: the charge of a whole cell",
            expected="charge_e0, the charge of one channel",
            remedy="divide each value by the number of channels in that cell and by the elementary charge, "
            "or leave the table out and state one charge in campaign.toml",
        )
    return bool(raw_charges)


def _raw_charges(raw: RawTable) -> Iterator[str]:
    return (header for header in raw.header if header in _RAW_CHARGES)


def _refuse_both_kinds(raw: RawTable, findings: Findings) -> None:
    findings.add(
        raw.header_origin("cell"),
        found="a column cell beside sem_e0 or n",
        expected="either one row per cell (cell, charge_e0) or one per construct (charge_e0, sem_e0, n)",
        remedy="keep one of the two: the values of single cells are worth more than their mean",
    )
