"""Points of cells in a table: one row per point, or one column per cell.

Tidy: one row per point. Wide: a voltage column, then one column per cell headed ``construct/cell``, the cell
being what follows the last slash. In the wide layout every field must hold a number; cells with different
voltages go into the tidy one.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection

import numpy as np

from ..campaign import FloatArray
from ..mutations import parse_label, parse_mutation
from .cells import Points
from .findings import Findings, shown
from .header import Field, RawTable
from .table import Table, TextArray, factorize
from .voltages import VOLTAGE_VALUES, read_voltages

VOLTAGE = Field(base="voltage", units=("mV", "V"), values=VOLTAGE_VALUES, meaning="membrane voltage")
_OF_MINUS = "minus signs may have been lost, no voltage has one: put them back; or "
_OF_REPEATS = "delete one of them, average them, or give the second recording a cell label of its own"
_CELL = Field(base="construct/cell", required=False)  # for the messages


def is_wide(raw: RawTable) -> bool:
    """Whether a table has no column ``construct`` or ``cell`` but some header with a slash."""
    return not {"construct", "cell"} & set(raw.header) and any("/" in header for header in raw.header)


def wide_points(raw: RawTable, findings: Findings) -> Points | None:
    """Read all points of a wide table; None when it cannot be read, which is a fault."""
    names = _cell_names(raw, findings)
    table = Table(raw, (VOLTAGE, _CELL), findings, cells=names.keys())
    columns = [index for index, name in names.items() if name is not None]
    voltage = read_voltages(table, "voltage")
    value = table.block(columns)
    table.check_decimal_mark()
    if not table.readable or len(columns) < len(names):
        return None
    no_label = np.full(len(table), "", dtype=object)
    voltage = once_only(table, no_label, no_label, voltage)
    n, cells = len(table), [name for name in names.values() if name is not None]
    nothing = np.full(value.size, "", dtype=object)
    return Points(
        table=table, voltage_mv=np.tile(voltage, len(cells)), value=value.ravel(), wide=True,
        construct=np.repeat(np.array([construct for construct, _ in cells], dtype=object), n),
        cell=np.repeat(np.array([cell for _, cell in cells], dtype=object), n),
        index=np.tile(np.arange(n), len(cells)), column=np.repeat(columns, n),
        batch=nothing, holding_mv=np.full(value.size, np.nan), phase=nothing,
    )  # fmt: skip


def _cell_names(raw: RawTable, findings: Findings) -> dict[int, tuple[str, str] | None]:
    """Construct and cell of each header with a slash, by column index; None where it names no new cell."""
    names: dict[int, tuple[str, str] | None] = {}
    headers: dict[tuple[str, str], str] = {}
    labels = {header.rsplit("/", 1)[0].strip() for header in raw.header if "/" in header} - {""}
    for index, header in enumerate(raw.header):
        if meant := _without_slash(header, labels):
            is_taken = f"{meant[0]}/{meant[1]}" in raw.header or meant in names.values()
            names[index] = _refuse_no_slash(raw, header, meant, findings, is_taken=is_taken)
        elif "/" in header:
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


def _without_slash(header: str, labels: Collection[str]) -> tuple[str, str] | None:
    """Construct and cell of a header whose slash was lost; `labels` are the constructs of the others.

    In E181A/R212Qc1 the slash stands inside the label: the longest label counts.
    """
    begun = [label for label in labels if header.startswith(label)]
    label = max(begun, key=len, default="")
    cell = header.removeprefix(label).strip(" _-.:,;|")
    if not label or header.removeprefix(label).lstrip().startswith("/") or header in VOLTAGE.headers:
        return None
    is_split = "/" in header and (not cell or parse_label(label) is None or "/" not in label)
    return None if is_split or "/" in cell else (label, cell)


def _refuse_no_slash(
    raw: RawTable, header: str, meant: tuple[str, str], findings: Findings, *, is_taken: bool
) -> tuple[str, str] | None:
    """Refuse a header whose slash was lost; return the cell it was meant to name, if that is a new one."""
    label, cell = meant if not is_taken else (meant[0], "")
    remedy = f"did you mean {label}/{cell}?" if cell else f"write {label}, a slash and the cell's label"
    findings.add(
        raw.header_origin(header), found=f"{shown(header)} without a slash before the cell",
        expected="construct/cell, another cell in every column", remedy=remedy,
    )  # fmt: skip
    return (label, cell) if cell else None


def _refuse_cell(raw: RawTable, header: str, found: str, findings: Findings) -> None:
    findings.add(
        raw.header_origin(header),
        found=found,
        expected="construct/cell, another cell in every column",
        remedy="write the construct, a slash and the cell's label, or use one row per point",
    )


def once_only(table: Table, construct: TextArray, cell: TextArray, voltage_mv: FloatArray) -> FloatArray:
    """Refuse a second point of one cell at one voltage; return the voltages with NaN in its place."""
    group = factorize(construct)[0] * (len(cell) + 1) + factorize(cell)[0]
    order = np.lexsort((np.arange(len(table)), voltage_mv, group))
    same = (np.diff(group[order]) == 0) & (np.diff(voltage_mv[order]) == 0)
    once = voltage_mv.copy()
    places = np.flatnonzero(same) + 1
    places = places[np.argsort(order[places])]
    count = Counter(group[order[places]].tolist())
    told: set[int] = set()
    for place in places:
        second, own = int(order[place]), int(group[order[place]])
        once[second] = np.nan
        if own in told:
            continue
        told.add(own)
        others = f", and {count[own] - 1} more voltages twice" if count[own] > 1 else ""
        no_minus = bool(np.all(voltage_mv[(group == own) & np.isfinite(voltage_mv)] >= 0))
        table.refuse(
            second,
            "voltage",
            found=f"a second value at {voltage_mv[second]:g} mV, "
            f"the other in row {table.raw.rows[order[place - 1]]}{others}",
            expected="each voltage once in a cell",
            remedy=_OF_MINUS * no_minus + _OF_REPEATS,
        )
    return once
