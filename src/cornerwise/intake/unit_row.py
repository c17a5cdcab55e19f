"""A row of units right under the header: refused once, and the table read on without it."""

from __future__ import annotations

from dataclasses import replace

from ..errors import Origin
from .findings import Findings
from .header import RawTable

_UNITS = frozenset(
    ("mv", "v", "fc", "pc", "nc", "\N{GREEK SMALL LETTER MU}c", "uc", "e0", "e", "nm", "a", "\xe5", "a.u.",
     "au", "norm.", "millivolt", "millivolts", "volt", "volts")
)  # fmt: skip
_NO_UNIT = frozenset(("", "-", "--", "\N{EN DASH}", "\N{EM DASH}", "1", "text", "n/a"))


def without_unit_row(raw: RawTable, findings: Findings) -> RawTable:
    """Take off a first row that holds units and nothing else, which is a fault.

    Parameters
    ----------
    raw : RawTable
        The table as text.
    findings : Findings
        Takes the row of units.

    Returns
    -------
    RawTable
        The table with rows of values alone.
    """
    if not len(raw.rows):
        return raw
    fields = [column[0].strip().strip("()[]").strip().casefold() for column in raw.columns]
    if not _UNITS & set(fields) or not set(fields) <= _UNITS | _NO_UNIT:
        return raw
    row = int(raw.rows[0])
    findings.add(
        Origin(file=raw.file, row=row),
        found=f"row {row} looks like a row of units",
        expected="values below the header",
        remedy="delete it; the unit belongs in the header, such as voltage_mV",
    )
    return replace(raw, rows=raw.rows[1:], columns=tuple(column[1:] for column in raw.columns))
