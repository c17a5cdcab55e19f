"""From points to the curve of each cell, refusing what cannot be a charge-voltage curve."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from .. import plausible
from ..campaign import Curve, FloatArray, OpeningCurve
from ..errors import Origin
from .findings import Findings, shown
from .table import IntArray, Table, TextArray, factorize

MOST_FALLING = 5  # curves that are told one by one
_RISING = "charge that rises with voltage, from resting to activated"


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Points:
    """All points of a table, flat; every array has shape (n_points,)."""

    table: Table
    construct: TextArray
    cell: TextArray
    voltage_mv: FloatArray
    value: FloatArray  # charge, or open probability
    index: IntArray  # row index in the table
    column: IntArray  # index of the column that holds the value
    wide: bool
    charge_unit: str = ""
    batch: TextArray
    holding_mv: FloatArray
    phase: TextArray

    def label_origin(self, point: int) -> Origin:
        """Return the place of a point's construct; in the wide layout, that of its cell's header."""
        return self.origin(point) if self.wide else self.table.origin(int(self.index[point]), "construct")

    def origin(self, point: int) -> Origin:
        """Return the place of a point's value; in the wide layout, that of its cell's header."""
        raw = self.table.raw
        row = raw.header_row if self.wide else int(raw.rows[self.index[point]])
        return Origin(file=raw.file, row=row, column=raw.header[self.column[point]])

    def value_origin(self, point: int) -> Origin:
        """Return the very field of a point's value, whatever the layout."""
        raw = self.table.raw
        row = int(raw.rows[self.index[point]])
        return Origin(file=raw.file, row=row, column=raw.header[self.column[point]])

    def seen(self) -> dict[str, Origin]:
        """Every construct and where it is first named."""
        labels, first = np.unique(self.construct.astype(str), return_index=True)
        return {
            str(label): self.label_origin(int(point))
            for label, point in zip(labels, first, strict=True)
            if label
        }

    def named_cells(self) -> frozenset[tuple[str, str]]:
        """Construct and cell of all points that name both."""
        pairs = {
            (str(construct), str(cell)) for construct, cell in zip(self.construct, self.cell, strict=True)
        }
        return frozenset((construct, cell) for construct, cell in pairs if construct and cell)


def curves_of(points: Points, findings: Findings) -> tuple[Curve, ...]:
    """Put together the curve of each cell.

    Parameters
    ----------
    points : Points
        All points, in any order.
    findings : Findings
        Takes cells with two batches, holding voltages or phases, voltages in two units, and curves that
        cannot be.

    Returns
    -------
    tuple of Curve
        By construct and cell label; points in rising voltage. Cells with a fault are left out.
    """
    named = np.flatnonzero((points.construct != "") & (points.cell != ""))
    sound = np.isfinite(points.voltage_mv) & np.isfinite(points.value)
    curves, narrow, falling = list[Curve](), list[Curve](), list[Curve]()
    for members in cells_in(points, named):
        curve = _curve(points, members)
        if np.isfinite(points.voltage_mv[members]).all() and refuse_voltages(points, members, findings):
            continue
        if is_steady(points, members) and sound[members].all():
            if _refuse_stray(points, members, findings):
                continue
            fault = _shape_fault(curve, points.table.raw.lost)
            if fault == "narrow":
                narrow.append(curve)
            elif fault == "falls":
                falling.append(curve)
            elif fault is not None:
                _refuse_shape(curve, fault, findings)
            else:
                curves.append(curve)
    refuse_narrow(points, narrow, others=len(curves), findings=findings)
    _refuse_falling(points, falling, others=len(curves), findings=findings)
    return tuple(sorted(curves, key=lambda curve: (curve.construct, curve.cell)))


def refuse_voltages(points: Points, members: IntArray, findings: Findings) -> bool:
    """Whether a cell has values in volts among its millivolts, or one out of order; each is a fault."""
    wrong = members[plausible.volts_among_millivolts(points.voltage_mv[members])]
    for point in wrong.tolist():
        value = points.voltage_mv[point]
        _refuse_voltage(
            points, point, findings, found=f"{value:g} mV, a value in volts among millivolts",
            expected=f"{1000 * value:g} mV, which the other voltages leave out",
        )  # fmt: skip
    return bool(wrong.size) or _refuse_turned(points, members, findings)


def _refuse_turned(points: Points, members: IntArray, findings: Findings) -> bool:
    """Whether one voltage of a cell stands out of the order of its rows, which is a fault."""
    rows = members[np.argsort(points.index[members])]
    place = plausible.turned_voltage(points.voltage_mv[rows])
    if place is None:
        return False
    before, value, after = points.voltage_mv[rows[place - 1 : place + 2]]
    turned = min(before, after) < -value < max(before, after)
    _refuse_voltage(
        points, int(rows[place]), findings, found=f"{value:g} mV between {before:g} and {after:g} mV",
        expected=f"{-value:g} mV" if turned else "a voltage between these two",
    )  # fmt: skip
    return True


def _refuse_voltage(points: Points, point: int, findings: Findings, *, found: str, expected: str) -> None:
    """Add a fault of a voltage; one that all cells of a wide table share is told once."""
    place = points.table.origin(int(points.index[point]), "voltage")
    cell = "" if points.wide else f" in the cell {_name(points, point)}"
    remedy = "correct the value; where it is right, sort the rows by voltage"
    findings.add_once(place, found=found + cell, expected=expected, remedy=remedy)


def _refuse_stray(points: Points, members: IntArray, findings: Findings) -> bool:
    """Whether one charge of a cell is out of all proportion to the others, which is a fault."""
    place = plausible.stray_charge(points.value[members]) if len(members) >= plausible.FEWEST_POINTS else None
    if place is None:
        return False
    others = np.delete(points.value[members], place)
    findings.add(
        points.value_origin(int(members[place])),
        found=f"{points.value[members[place]]:g} in the cell {_name(points, int(members[place]))}, whose "
        f"other charges lie between {others.min():g} and {others.max():g}",
        expected="a charge of their size",
        remedy="correct the decimal mark or the unit, or delete the row",
    )
    return True


def cells_in(points: Points, named: IntArray) -> list[IntArray]:
    """Points of each cell, in rising voltage."""
    if not named.size:
        return []
    cells, cell_labels = factorize(points.cell[named])
    group = factorize(points.construct[named])[0] * len(cell_labels) + cells
    order = np.lexsort((points.voltage_mv[named], group))
    starts = np.flatnonzero(np.diff(group[order])) + 1
    return np.split(named[order], starts)


def _curve(points: Points, members: IntArray) -> Curve:
    first = int(members[np.argmin(points.index[members])])
    holding = float(points.holding_mv[first])
    return Curve(
        construct=str(points.construct[first]),
        cell=str(points.cell[first]),
        batch=str(points.batch[first]) or None,
        voltage_mv=points.voltage_mv[members],
        charge=points.value[members],
        charge_unit=points.charge_unit,
        holding_mv=None if np.isnan(holding) else holding,
        phase=str(points.phase[first]) or None,
        origin=points.origin(first),
    )


def is_steady(points: Points, members: IntArray) -> bool:
    """Whether all points of a cell share batch, holding voltage and phase; if not, a fault each."""
    first = int(members[np.argmin(points.index[members])])
    steady = True
    for base, values in (("batch", points.batch), ("holding", points.holding_mv), ("phase", points.phase)):
        own = values[members]
        same = (own == values[first]) | ((own != own) & (values[first] != values[first]))
        if not same.all():
            steady = False
            other = int(members[~same][np.argmin(points.index[members[~same]])])
            points.table.refuse(
                int(points.index[other]),
                base,
                found=f"{_said(values[other])} for the cell {_name(points, first)}, which has "
                f"{_said(values[first])} in row {points.table.raw.rows[points.index[first]]}",
                expected=f"one {base} for all points of a cell",
                remedy="correct the value, or give the second recording a cell label of its own",
            )
    return steady


def _said(value: object) -> str:
    return shown("" if value != value else str(value))


def _name(points: Points, point: int) -> str:
    return f"{points.construct[point]}/{points.cell[point]}"


def _shape_fault(curve: Curve, lost: str) -> str | None:
    if len(curve.voltage_mv) < plausible.FEWEST_POINTS:
        return None if curve.cell in lost else "short"
    if plausible.too_narrow(curve.voltage_mv):
        return "narrow"
    judged = plausible.direction(curve.charge)
    return None if judged == "rises" else judged


def _refuse_shape(curve: Curve, fault: str, findings: Findings) -> None:
    name = f"{curve.construct}/{curve.cell}"
    found, expected, remedy = {
        "short": (
            f"{len(curve.voltage_mv)} points of the cell {name}",
            f"at least {plausible.FEWEST_POINTS} points",
            "add the other voltages or delete the cell",
        ),
        "flat": (
            f"a flat curve: the charge of the cell {name} does not rise beyond its scatter",
            "charge that rises with voltage",
            "delete the cell, or correct its charges",
        ),
        "falls": (
            f"a curve that falls: the charge of the cell {name} decreases with voltage",
            _RISING,
            "flip the sign of the charges (or of the voltages, whichever is turned round)",
        ),
    }[fault]
    findings.add(curve.origin, found=found, expected=expected, remedy=remedy)


def _refuse_falling(points: Points, falling: Sequence[Curve], *, others: int, findings: Findings) -> None:
    """Refuse curves that fall; told once when they are all or many: then a whole column is inverted."""
    if len(falling) <= MOST_FALLING and (others or len(falling) < 2):
        for curve in falling:
            _refuse_shape(curve, "falls", findings)
        return
    how_many = f"{len(falling)} curves that fall" if others else f"all {len(falling)} curves falling"
    names = [f"{curve.construct}/{curve.cell}" for curve in falling]
    more = f" and {len(names) - MOST_FALLING} more" if len(names) > MOST_FALLING else ""
    table = points.table
    findings.add(
        table.raw.header_origin(table.header("voltage" if points.wide else "charge")),
        found=f"{how_many}: {', '.join(names[:MOST_FALLING])}{more}",
        expected=_RISING,
        remedy="voltages or charges are inverted: flip the sign of all charges, or of all voltages, "
        "whichever is turned round",
    )


def refuse_narrow(
    points: Points, narrow: Sequence[Curve | OpeningCurve], *, others: int, findings: Findings
) -> None:
    """Refuse curves inside a few millivolts; told once when it is every curve of the table."""
    expected = f"a curve over more than {plausible.NARROWEST_RANGE_MV:g} mV"
    header = points.table.header("voltage")
    remedy = "correct the voltages of this cell"
    if points.table.unit("voltage") == "mV":
        remedy = "if the values are volts, name the column voltage_V"
    if len(narrow) > 1 and not others:
        low = min(float(curve.voltage_mv[0]) for curve in narrow)
        high = max(float(curve.voltage_mv[-1]) for curve in narrow)
        found = f"all {len(narrow)} curves inside a few mV, between {low:g} and {high:g} mV"
        findings.add(points.table.raw.header_origin(header), found=found, expected=expected, remedy=remedy)
        return
    for curve in narrow:
        low, high = float(curve.voltage_mv[0]), float(curve.voltage_mv[-1])
        found = f"the whole curve of the cell {curve.construct}/{curve.cell} between {low:g} and {high:g} mV"
        place = Origin(file=curve.origin.file, row=curve.origin.row, column=header)
        findings.add(place, found=found, expected=expected, remedy=remedy)
