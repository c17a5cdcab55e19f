"""The table of open probabilities, from whose limiting slope a total charge is had.

Tidy: one row per point, with the columns ``construct``, ``cell``, ``voltage_mV`` (or ``voltage_V``) and
``open_probability``, from 0 to 1, and if need be ``batch``. Wide: see `cornerwise.intake.layouts`. A cell of
the same name as one in ``curves`` or ``charges`` is the same cell.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from .. import plausible
from ..campaign import OpeningCurve
from ..errors import Origin
from . import allowed
from .cells import Points, cells_in, is_steady, refuse_narrow, refuse_voltages
from .findings import Findings
from .header import Field, RawTable
from .layouts import VOLTAGE, is_wide, once_only, wide_points
from .rows import BATCH, CELL, CONSTRUCT
from .table import IntArray, Table
from .voltages import read_voltages

METHOD = "limiting slope"  # as the charge it gives is called
PROBABILITY = allowed.number(least=0, most=1)
OPEN_PROBABILITY = Field(base="open_probability", values=PROBABILITY, meaning="open probability")
FIELDS = (
    CONSTRUCT,
    CELL,
    BATCH,
    VOLTAGE,
    OPEN_PROBABILITY,
)

_EXPECTED = "open probabilities from 0 to 1"
_REMEDY = "correct the value; divide by 100 if it is a percentage"


@dataclass(frozen=True, kw_only=True, slots=True)
class OpeningsRead:
    """The open probabilities of a campaign, and which constructs and cells the table names."""

    openings: tuple[OpeningCurve, ...] = ()
    seen: dict[str, Origin] = field(default_factory=dict)  # construct: where it is first named
    cells: frozenset[tuple[str, str]] = frozenset()  # construct and cell of every curve
    lost: str = ""  # text that could not be read; what it names may not be called missing
    readable: bool = True  # False when nothing could be read


def read_openings(raw: RawTable, findings: Findings) -> OpeningsRead:
    """Read the open probabilities of all cells.

    Parameters
    ----------
    raw : RawTable
        The table ``openings``, tidy or wide.
    findings : Findings
        Takes every fault.

    Returns
    -------
    OpeningsRead
        By construct and cell label, points in rising voltage.
    """
    points = wide_points(raw, findings) if is_wide(raw) else _tidy_points(raw, findings)
    if points is None:
        return OpeningsRead(readable=False)
    _refuse_no_probability(points, findings)
    return OpeningsRead(
        openings=_openings(points, findings), seen=points.seen(), cells=points.named_cells(), lost=raw.lost
    )


def _tidy_points(raw: RawTable, findings: Findings) -> Points | None:
    table = Table(raw, FIELDS, findings)
    construct, cell, batch = table.labels("construct"), table.labels("cell"), table.text("batch")
    voltage, probability = read_voltages(table, "voltage"), table.numbers("open_probability")
    table.check_decimal_mark()
    if not table.readable:
        return None
    voltage = once_only(table, construct, cell, voltage)
    n = len(table)
    return Points(
        table=table, construct=construct, cell=cell, voltage_mv=voltage, value=probability, wide=False,
        index=np.arange(n), column=np.full(n, table.found["open_probability"]), batch=batch,
        holding_mv=np.full(n, np.nan), phase=np.full(n, "", dtype=object),
    )  # fmt: skip


def _refuse_no_probability(points: Points, findings: Findings) -> None:
    """Refuse what is no probability; a table that is mostly so has the wrong unit and is told once."""
    beyond = np.flatnonzero(allowed.outside(PROBABILITY, points.value))
    if len(beyond) > max(2, len(points.value) // 2):
        first = int(beyond[np.argmin(points.index[beyond])])
        place = points.origin(first)
        findings.add(
            points.table.raw.header_origin(place.column or ""),
            found=f"{len(beyond)} of {len(points.value)} values below 0 or above 1, the first "
            f"{points.value[first]:g} in row {points.table.raw.rows[points.index[first]]}",
            expected=_EXPECTED,
            remedy="divide by 100 if they are percentages, else correct the values",
        )
        return
    for point in beyond.tolist():
        found = f"{points.value[point]:g}"
        findings.add(points.value_origin(point), found=found, expected=_EXPECTED, remedy=_REMEDY)


def _openings(points: Points, findings: Findings) -> tuple[OpeningCurve, ...]:
    named = np.flatnonzero((points.construct != "") & (points.cell != ""))
    sound = np.isfinite(points.voltage_mv) & np.isfinite(points.value)
    sound &= ~allowed.outside(PROBABILITY, points.value)
    openings, narrow = [], []
    for members in cells_in(points, named):
        if np.isfinite(points.voltage_mv[members]).all() and refuse_voltages(points, members, findings):
            continue
        if not is_steady(points, members) or not sound[members].all():
            continue
        opening = _opening(points, members)
        if _refused_short(opening, points.table.raw.lost, findings):
            continue
        if plausible.too_narrow(opening.voltage_mv):
            narrow.append(opening)
        elif not _refused_shape(opening, findings):
            openings.append(opening)
    refuse_narrow(points, narrow, others=len(openings), findings=findings)
    return tuple(sorted(openings, key=lambda opening: (opening.construct, opening.cell)))


def _opening(points: Points, members: IntArray) -> OpeningCurve:
    first = int(members[np.argmin(points.index[members])])
    return OpeningCurve(
        construct=str(points.construct[first]),
        cell=str(points.cell[first]),
        batch=str(points.batch[first]) or None,
        voltage_mv=points.voltage_mv[members],
        open_probability=points.value[members],
        origin=points.origin(first),
    )


def _refused_short(opening: OpeningCurve, lost: str, findings: Findings) -> bool:
    """Whether a cell has too few points for a slope; those at 0 have no logarithm and do not count."""
    total, usable = len(opening.voltage_mv), int(np.count_nonzero(opening.open_probability))
    if usable >= plausible.FEWEST_OPENINGS:
        return False
    if opening.cell not in lost:
        above = "" if usable == total else f" above 0 (of {total})"
        findings.add(
            opening.origin,
            found=f"{usable} points{above} of the cell {opening.construct}/{opening.cell}",
            expected=f"at least {plausible.FEWEST_OPENINGS} points with an open probability above 0, for the "
            "limiting slope of its logarithm",
            remedy="add other voltages, towards the negative end, or delete the cell",
        )
    return True


def _refused_shape(opening: OpeningCurve, findings: Findings) -> bool:
    """Whether the open probability does not rise with voltage, as that of a limiting slope must."""
    judged = plausible.direction(opening.open_probability)
    if judged == "rises":
        return False
    name = f"{opening.construct}/{opening.cell}"
    found = f"a flat curve: the open probability of the cell {name} does not rise beyond its scatter"
    remedy = "add voltages towards the negative end, or delete the cell"
    if judged == "falls":
        found = f"a curve that falls: the open probability of the cell {name} decreases with voltage"
        remedy = "flip the sign of the voltages if it is turned round, else delete the cell"
    expected = "an open probability that rises with voltage"
    findings.add(opening.origin, found=found, expected=expected, remedy=remedy)
    return True
