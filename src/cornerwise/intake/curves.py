"""The table of charge-voltage curves, in its two layouts.

Tidy: one row per point, with the columns ``construct``, ``cell``, ``voltage_mV`` (or ``voltage_V``) and
``charge`` (or ``charge_fC``, ``charge_pC``, ``charge_nC``, ``charge_e0``), and if need be ``batch``,
``holding_mV`` and ``phase`` (on or off); the last three may be left empty.

Wide: a voltage column, then one column per cell headed ``construct/cell``, the cell being what follows the
last slash. Every field must hold a number; cells with different voltages go into the tidy layout.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..campaign import Curve, FloatArray
from ..errors import Origin
from ..mutations import parse_label, parse_mutation
from .cells import Points, curves_of
from .findings import Findings, shown
from .header import Field, RawTable
from .table import Table, TextArray, factorize
from .voltages import read_voltages

VOLTAGE = Field(base="voltage", units=("mV", "V"))
FIELDS = (
    Field(base="construct"),
    Field(base="cell"),
    Field(base="batch", required=False),
    VOLTAGE,
    Field(base="charge", units=("", "fC", "pC", "nC", "e0")),
    Field(base="holding", units=("mV",), required=False),
    Field(base="phase", required=False),
)
_CELL = Field(base="construct/cell", required=False)  # for the messages
PHASES = ("", "on", "off")


@dataclass(frozen=True, kw_only=True, slots=True)
class CurvesRead:
    """The curves of a campaign, and which constructs the table names."""

    curves: tuple[Curve, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)  # construct: where it is first named
    lost: str = ""  # text that could not be read; what it names may not be called missing
    readable: bool = True  # False when nothing could be read


def read_curves(raw: RawTable, findings: Findings) -> CurvesRead:
    """Read the curves of all cells.

    Parameters
    ----------
    raw : RawTable
        The table ``curves``, tidy or wide; it is wide when it has no column ``construct`` or ``cell``
        but some header with a slash.
    findings : Findings
        Takes every fault.

    Returns
    -------
    CurvesRead
        Curves by construct and cell label, points in rising voltage.
    """
    wide = not {"construct", "cell"} & set(raw.header) and any("/" in header for header in raw.header)
    points = _wide_points(raw, findings) if wide else _tidy_points(raw, findings)
    if points is None:
        return CurvesRead(readable=False)
    labels, first = np.unique(points.construct.astype(str), return_index=True)
    seen = {
        str(label): points.label_origin(int(point))
        for label, point in zip(labels, first, strict=True)
        if label
    }
    return CurvesRead(curves=curves_of(points, findings), seen=seen, lost=raw.lost)


def _tidy_points(raw: RawTable, findings: Findings) -> Points | None:
    table = Table(raw, FIELDS, findings)
    construct, cell, batch = table.labels("construct"), table.labels("cell"), table.text("batch")
    voltage = read_voltages(table, "voltage")
    charge = table.numbers("charge")
    holding = read_voltages(table, "holding", empty=True)
    phase = _phases(table)
    table.check_decimal_mark()
    if not table.readable:
        return None
    voltage = _once_only(table, construct, cell, voltage)
    n = len(table)
    return Points(
        table=table, construct=construct, cell=cell, voltage_mv=voltage, charge=charge, wide=False,
        index=np.arange(n), column=np.full(n, table.found["charge"]), charge_unit=table.unit("charge"),
        batch=batch, holding_mv=holding, phase=phase,
    )  # fmt: skip


def _wide_points(raw: RawTable, findings: Findings) -> Points | None:
    names = _cell_names(raw, findings)
    table = Table(raw, (VOLTAGE, _CELL), findings, cells=names.keys())
    columns = [index for index, name in names.items() if name is not None]
    voltage = read_voltages(table, "voltage")
    charge = table.block(columns)
    table.check_decimal_mark()
    if not table.readable or len(columns) < len(names):
        return None
    no_label = np.full(len(table), "", dtype=object)
    voltage = _once_only(table, no_label, no_label, voltage)
    n, cells = len(table), [name for name in names.values() if name is not None]
    nothing = np.full(charge.size, "", dtype=object)
    return Points(
        table=table, voltage_mv=np.tile(voltage, len(cells)), charge=charge.ravel(), wide=True,
        construct=np.repeat(np.array([construct for construct, _ in cells], dtype=object), n),
        cell=np.repeat(np.array([cell for _, cell in cells], dtype=object), n),
        index=np.tile(np.arange(n), len(cells)), column=np.repeat(columns, n),
        batch=nothing, holding_mv=np.full(charge.size, np.nan), phase=nothing,
    )  # fmt: skip


def _cell_names(raw: RawTable, findings: Findings) -> dict[int, tuple[str, str] | None]:
    """Construct and cell of each header with a slash, by column index; None where it names no new cell."""
    names: dict[int, tuple[str, str] | None] = {}
    headers: dict[tuple[str, str], str] = {}
    for index, header in enumerate(raw.header):
        if "/" in header:
            name = _cell_of(raw, header, findings)
            if name is not None and headers.setdefault(name, header) != header:
                _refuse_cell(raw, header, f"the cell of {shown(headers[name])} again", findings)
                name = None
            names[index] = name
    return names


def _cell_of(raw: RawTable, header: str, findings: Findings) -> tuple[str, str] | None:
    """Split a header at its last slash into construct and cell; None when it names no cell."""
    construct, cell = (part.strip() for part in header.rsplit("/", 1))
    # E181A/R212Q without a cell must not become a cell R212Q of E181A.
    if parse_mutation(cell) is not None and parse_label(construct) is not None:
        _refuse_cell(raw, header, f"{shown(header)}, whose last part reads as a mutation", findings)
        return None
    if not construct or not cell:
        _refuse_cell(raw, header, shown(header), findings)
        return None
    return construct, cell


def _refuse_cell(raw: RawTable, header: str, found: str, findings: Findings) -> None:
    findings.add(
        raw.header_origin(header),
        found=found,
        expected="construct/cell, another cell in every column",
        remedy="write the construct, a slash and the cell's label, or use one row per point",
    )


def _phases(table: Table) -> TextArray:
    phase = np.array([text.lower() for text in table.text("phase")], dtype=object)
    for index in np.flatnonzero(np.array([text not in PHASES for text in phase], dtype=bool)):
        table.refuse(
            int(index), "phase", found=shown(phase[index]), expected="on, off or nothing",
            remedy="name the phase of the pulse whose charge was integrated",
        )  # fmt: skip
    return phase


def _once_only(table: Table, construct: TextArray, cell: TextArray, voltage_mv: FloatArray) -> FloatArray:
    """Refuse a second point of one cell at one voltage; return the voltages with NaN in its place."""
    group = factorize(construct)[0] * (len(cell) + 1) + factorize(cell)[0]
    order = np.lexsort((np.arange(len(table)), voltage_mv, group))
    same = (np.diff(group[order]) == 0) & (np.diff(voltage_mv[order]) == 0)
    once = voltage_mv.copy()
    for place in np.flatnonzero(same) + 1:
        once[order[place]] = np.nan
        table.refuse(
            int(order[place]),
            "voltage",
            found=f"a second value at {voltage_mv[order[place]]:g} mV, "
            f"the other in row {table.raw.rows[order[place - 1]]}",
            expected="each voltage once in a cell",
            remedy="delete one of them, average them, or give the second recording a cell label of its own",
        )
    return once
