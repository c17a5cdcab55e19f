"""The table of charge-voltage curves, in its two layouts.

Tidy: one row per point, with the columns ``construct``, ``cell``, ``voltage_mV`` (or ``voltage_V``) and
``charge`` (or ``charge_fC``, ``charge_pC``, ``charge_nC``, ``charge_e0``), and if need be ``batch``,
``holding_mV`` and ``phase`` (on or off); the last three may be left empty.

Wide: see `cornerwise.intake.layouts`.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..campaign import Curve
from ..errors import Origin
from . import allowed
from .cells import Points, curves_of
from .findings import Findings, shown
from .header import Field, RawTable
from .layouts import VOLTAGE, is_wide, once_only, wide_points
from .rows import BATCH, CELL, CONSTRUCT
from .table import Table, TextArray
from .voltages import VOLTAGE_VALUES, read_voltages

PHASE = allowed.word("on", "off", "On", "Off", "ON", "OFF")
CHARGE = Field(
    base="charge", units=("", "fC", "pC", "nC", "e0"), values=allowed.number(),
    meaning="charge moved, with a scale and an offset of the cell's own",
)  # fmt: skip
FIELDS = (
    CONSTRUCT,
    CELL,
    BATCH,
    VOLTAGE,
    CHARGE,
    Field(base="holding", units=("mV",), required=False, values=VOLTAGE_VALUES, meaning="holding voltage"),
    Field(base="phase", required=False, values=PHASE, meaning="pulse phase that was integrated"),
)


@dataclass(frozen=True, kw_only=True, slots=True)
class CurvesRead:
    """The curves of a campaign, and which constructs the table names."""

    curves: tuple[Curve, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)  # construct: where it is first named
    cells: frozenset[tuple[str, str]] = frozenset()  # construct and cell of every curve
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
    points = wide_points(raw, findings) if is_wide(raw) else _tidy_points(raw, findings)
    if points is None:
        return CurvesRead(readable=False)
    return CurvesRead(
        curves=curves_of(points, findings), seen=points.seen(), cells=points.named_cells(), lost=raw.lost
    )


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
    voltage = once_only(table, construct, cell, voltage)
    n = len(table)
    return Points(
        table=table, construct=construct, cell=cell, voltage_mv=voltage, value=charge, wide=False,
        index=np.arange(n), column=np.full(n, table.found["charge"]), charge_unit=table.unit("charge"),
        batch=batch, holding_mv=holding, phase=phase,
    )  # fmt: skip


def _phases(table: Table) -> TextArray:
    phase = table.text("phase")
    for index in np.flatnonzero(np.array([text not in ("", *PHASE["enum"]) for text in phase], dtype=bool)):
        table.refuse(
            int(index), "phase", found=shown(phase[index]), expected="on, off or nothing",
            remedy="name the phase of the pulse whose charge was integrated",
        )  # fmt: skip
    return np.array([text.lower() for text in phase], dtype=object)
