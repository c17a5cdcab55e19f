"""The table of total charges: a row per cell, a row per construct, or both kinds.

A row per cell has ``construct``, ``cell`` and ``charge_e0``, the charge of one channel; or the charge of the
whole cell, ``charge_fC``, ``charge_pC`` or ``charge_nC``, with the number of channels in ``channels`` and,
where it is known, the standard uncertainty of that number in ``channels_sem``. ``batch`` and ``method`` may
be added. Where ``charge_e0`` stands beside a column of whole cells, each row fills one of the two.

A row per construct has ``construct``, ``charge_e0``, ``sem_e0``, ``n`` and, if need be, ``method`` and
``citation``. With a citation ``n`` may be empty: the standard error is then taken as it stands.

A table with a column ``cell`` beside ``sem_e0`` holds both: a row whose cell is filled is that of a cell, and
``sem_e0``, ``n`` and ``citation`` stay empty in it; a row whose cell is empty is that of a construct.

Methods: a construct has one row for each cell and method, one for each method without cells, and no method in
both forms. Rows without a method count as one of their own, ``measured``, or ``literature`` where they have a
citation; these names may be given too.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from ..campaign import ChargeReplicate, ChargeSummary, FloatArray
from ..errors import Origin
from . import allowed
from .channels import CHANNELS, CHANNELS_SEM, CHARGE, RAW, RAW_CHARGE, charge_per_channel, refused_raw_charge
from .findings import Findings, shown
from .header import Field, RawTable
from .rows import (
    BATCH,
    CELL,
    CONSTRUCT,
    COUNT,
    FEWEST_CELLS,
    STANDARD_ERROR,
    first_named,
    refuse_repeated,
    standard_errors,
)
from .table import BoolArray, Table, TextArray

UNNAMED = "measured"
CITED = "literature"

_METHOD = Field(base="method", required=False, values=allowed.line(), meaning="how it was measured")
REPLICATE_FIELDS = (
    CONSTRUCT, CELL, BATCH, CHARGE, RAW_CHARGE, CHANNELS, CHANNELS_SEM, _METHOD,
)  # fmt: skip
SUMMARY_FIELDS = (
    CONSTRUCT, CHARGE,
    Field(base="sem", units=("e0",), values=STANDARD_ERROR, meaning="its standard error"), COUNT, _METHOD,
    Field(base="citation", required=False, values=allowed.line(), meaning="source of a published value"),
)  # fmt: skip
_OF_A_CELL = ("batch", RAW)  # columns that a row of a construct leaves empty
_OF_A_CONSTRUCT = ("sem", "n", "citation")  # columns that a row of a cell leaves empty


@dataclass(frozen=True, kw_only=True, slots=True)
class ChargesRead:
    """The charges of a campaign, and which constructs, cells and methods the table names."""

    replicates: tuple[ChargeReplicate, ...] = ()
    summaries: tuple[ChargeSummary, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)  # construct: where it is first named
    cells: frozenset[tuple[str, str]] = frozenset()  # construct and cell of every row that names one
    methods: tuple[str, ...] = ()
    lost: str = ""  # text that could not be read; what it names may not be called missing
    readable: bool = True  # False when nothing could be read


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class _Rows:
    """What says which row is which; every array has shape (n_rows,)."""

    table: Table
    construct: TextArray
    cell: TextArray
    of_cells: BoolArray
    mixed: bool  # whether the table may hold rows of cells and of constructs
    method: TextArray
    citation: TextArray

    def method_of(self, index: int) -> str:
        return method_name(self.method[index], self.citation[index])


def method_name(method: str | None, citation: str | None) -> str:
    """What a value's method is called, named or not."""
    return method or (CITED if citation else UNNAMED)


def read_charges(raw: RawTable, findings: Findings) -> ChargesRead:
    """Read the charges of cells and constructs.

    Parameters
    ----------
    raw : RawTable
        The table ``charges``.
    findings : Findings
        Takes every fault.

    Returns
    -------
    ChargesRead
        By construct, cell and method.
    """
    if refused_raw_charge(raw, findings) or _refused_both_kinds(raw, findings):
        return ChargesRead(readable=False)
    table = Table(raw, _fields(raw), findings)
    rows = _rows(table)
    charge, own = charge_per_channel(table, rows.of_cells)
    summaries = _summaries(rows, charge)
    table.check_decimal_mark()
    _refuse_strays(rows)
    _refuse_spellings(rows)
    _refuse_repeats(rows)
    _refuse_two_forms(rows)
    named = np.flatnonzero((rows.construct != "") & (rows.cell != ""))
    return ChargesRead(
        replicates=_replicates(rows, charge, own),
        summaries=summaries,
        seen=first_named(table, rows.construct),
        cells=frozenset((str(rows.construct[i]), str(rows.cell[i])) for i in named),
        methods=tuple(sorted({rows.method_of(index) for index in range(len(table))})),
        lost=raw.lost,
        readable=table.readable,
    )


def _has_both_kinds(raw: RawTable) -> bool:
    return "cell" in raw.header and bool({"sem_e0", "n"} & set(raw.header))


def _refused_both_kinds(raw: RawTable, findings: Findings) -> bool:
    """Whether every row is at once that of a cell and that of a construct, which is a fault."""
    if not _has_both_kinds(raw) or not all(text.strip() for text in raw.columns[raw.header.index("cell")]):
        return False
    findings.add(
        raw.header_origin("cell"),
        found="a column cell beside sem_e0 or n, filled in every row",
        expected="either one row per cell (cell, charge_e0) or one per construct (charge_e0, sem_e0, n)",
        remedy="keep one of the two: the values of single cells are worth more than their mean; in a table "
        "of both, leave cell empty in the rows of constructs",
    )
    return True


def _fields(raw: RawTable) -> tuple[Field, ...]:
    fields: tuple[Field, ...] = REPLICATE_FIELDS if "cell" in raw.header else SUMMARY_FIELDS
    if _has_both_kinds(raw):
        fields = tuple(dict.fromkeys((*REPLICATE_FIELDS, *SUMMARY_FIELDS)))
    left_out = set()
    if set(RAW_CHARGE.headers) & set(raw.header):
        left_out.add("charge")
    if "citation" in raw.header:
        left_out.add("n")
    return tuple(replace(field, required=False) if field.name in left_out else field for field in fields)


def _rows(table: Table) -> _Rows:
    mixed = _has_both_kinds(table.raw)
    cell = table.text("cell") if mixed else table.labels("cell")
    return _Rows(
        table=table,
        construct=table.labels("construct"),
        cell=cell,
        of_cells=np.array(cell != "", dtype=bool) if mixed else np.full(len(table), "cell" in table),
        mixed=mixed,
        method=table.text("method"),
        citation=table.text("citation"),
    )


def _replicates(rows: _Rows, charge_e0: FloatArray, own_e0: FloatArray) -> tuple[ChargeReplicate, ...]:
    batch = rows.table.text("batch")
    known = np.isfinite(own_e0)
    sound = rows.of_cells & (rows.construct != "") & (rows.cell != "") & np.isfinite(charge_e0)
    replicates = (
        ChargeReplicate(
            construct=str(rows.construct[i]), cell=str(rows.cell[i]), batch=str(batch[i]) or None,
            charge_e0=float(charge_e0[i]), own_uncertainty_e0=float(own_e0[i]) if known[i] else None,
            method=str(rows.method[i]) or None, origin=rows.table.origin(int(i)),
        )
        for i in np.flatnonzero(sound)
    )  # fmt: skip
    return tuple(sorted(replicates, key=lambda one: (one.construct, one.cell, one.method or "")))


def _summaries(rows: _Rows, charge_e0: FloatArray) -> tuple[ChargeSummary, ...]:
    table, of_constructs = rows.table, ~rows.of_cells
    sem = standard_errors(table, empty=rows.mixed)
    n = table.whole_numbers("n", empty=True)
    if table.readable:
        _refuse_incomplete(rows)
    counted = np.isfinite(n) | (~table.filled("n") & (rows.citation != ""))
    sound = of_constructs & (rows.construct != "") & np.isfinite(charge_e0) & np.isfinite(sem) & counted
    summaries = (
        ChargeSummary(
            construct=str(rows.construct[i]), charge_e0=float(charge_e0[i]), sem_e0=float(sem[i]),
            n=None if np.isnan(n[i]) else int(n[i]), method=str(rows.method[i]) or None,
            citation=str(rows.citation[i]) or None, origin=table.origin(int(i)),
        )
        for i in np.flatnonzero(sound)
    )  # fmt: skip
    return tuple(sorted(summaries, key=lambda one: (one.construct, one.method or "")))


def _refuse_incomplete(rows: _Rows) -> None:
    """Refuse rows of constructs that lack their standard error, or the number of cells and a citation too."""
    table = rows.table
    cited, counted, with_sem = rows.citation != "", table.filled("n"), table.filled("sem")
    for index in np.flatnonzero(~rows.of_cells).tolist():
        if rows.mixed and not (cited[index] or counted[index] or with_sem[index]):
            table.refuse(
                index, "cell", found="nothing, and neither sem_e0 nor n",
                expected="a cell's label, or the standard error and number of cells of a construct",
                remedy="fill in the cell, or sem_e0 and n",
            )  # fmt: skip
            continue
        if rows.mixed and not with_sem[index]:
            table.refuse(
                index, "sem", found="nothing", expected="a standard error in e0",
                remedy="enter it, or fill in the cell if this is the charge of one",
            )  # fmt: skip
        if not (counted[index] or cited[index]):
            table.refuse(
                index, "n" if "n" in table else "citation", found="nothing",
                expected=f"the number of cells in n, at least {FEWEST_CELLS}, or a citation",
                remedy="enter the number; only a value with a citation may leave n empty",
            )  # fmt: skip


def _refuse_strays(rows: _Rows) -> None:
    """Refuse what belongs to the other kind of row."""
    table = rows.table
    for bases, own, kind, remedy in (
        (_OF_A_CONSTRUCT, rows.of_cells, "the row of a cell",
         "leave it empty, or leave cell empty if this is the mean of several; the uncertainty of a cell's "
         "channel count goes into channels_sem"),
        (_OF_A_CELL, ~rows.of_cells, "the row of a construct, whose cell is empty",
         "leave it empty, or fill in the cell"),
    ):  # fmt: skip
        strays = [(i, base) for base in bases for i in np.flatnonzero(table.filled(base) & own)]
        for index in sorted({index for index, _ in strays}):
            bases_here = [base for i, base in strays if i == index]
            names = " and ".join(table.header(base) for base in bases_here)
            table.refuse(
                int(index), bases_here[0], found=f"{names} in {kind}", expected="nothing", remedy=remedy
            )


def _refuse_spellings(rows: _Rows) -> None:
    """Refuse a method spelt in two ways: they would count as two."""
    first: dict[str, int] = {}
    told = set()
    for index, method in enumerate(rows.method.tolist()):
        known = first.setdefault(method.casefold(), index)
        if method and method != rows.method[known] and method not in told:
            told.add(method)
            rows.table.refuse(
                index, "method", found=f"{shown(method)}, spelt {shown(rows.method[known])} in row "
                f"{rows.table.raw.rows[known]}", expected="one spelling of each method",
                remedy="spell them alike, or name two methods so that they differ",
            )  # fmt: skip


def _refuse_repeats(rows: _Rows) -> None:
    """Refuse a second row for the same cell, or the same construct, by the same method."""
    of_cells, others = (np.flatnonzero(own).tolist() for own in (rows.of_cells, ~rows.of_cells))
    keys = [(rows.construct[i], rows.cell[i], rows.method_of(i)) for i in of_cells]
    refuse_repeated(rows.table, "cell", of_cells, keys, unsaid=(UNNAMED, CITED))
    pairs = [(rows.construct[i], rows.method_of(i)) for i in others]
    refuse_repeated(rows.table, "construct", others, pairs, unsaid=(UNNAMED, CITED))


def _refuse_two_forms(rows: _Rows) -> None:
    """Refuse a method that gives a construct both the values of cells and a mean."""
    first: dict[tuple[str, str], int] = {}
    for index in np.flatnonzero(rows.of_cells).tolist():
        first.setdefault((rows.construct[index], rows.method_of(index)), index)
    for index in np.flatnonzero(~rows.of_cells).tolist():
        key = rows.construct[index], rows.method_of(index)
        if key in first and key[0]:
            by_method = f"by the method {shown(key[1])}" if rows.method[index] else "without a method"
            rows.table.refuse(
                index, "construct",
                found=f"a mean of {shown(key[0])} {by_method}, of which single cells stand too, the first in "
                f"row {rows.table.raw.rows[first[key]]}",
                expected="each method in one form: single cells or their mean",
                remedy="delete the mean, or name its method in a column method if it is another",
            )  # fmt: skip
