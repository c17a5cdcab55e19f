"""Columns of voltages, in mV whatever the header says, within what a membrane stands."""

from __future__ import annotations

import numpy as np
from scipy import constants

from .. import plausible
from ..campaign import FloatArray
from . import allowed
from .table import Table

VOLTAGE_VALUES = allowed.number(least=-plausible.VOLTAGE_LIMIT_MV, most=plausible.VOLTAGE_LIMIT_MV)

_LARGEST_VOLTS = 1.0  # a curve in mV goes further
_EXPECTED = f"voltages between -{plausible.VOLTAGE_LIMIT_MV:g} and {plausible.VOLTAGE_LIMIT_MV:g} mV"


def read_voltages(table: Table, base: str, *, empty: bool = False) -> FloatArray:
    """Read a column of voltages in mV, shape (n_rows,); NaN where it holds none that is possible.

    Volts are rounded to the picovolt, so that -0.12 V is -120 mV and nothing near it.
    """
    voltage = table.numbers(base, empty=empty)
    if base in table and _in_volts(table.unit(base), voltage):
        voltage = np.round(voltage * constants.kilo, 9)
    _refuse_beyond_limit(table, base, voltage)
    return np.where(table.outside(base, voltage), np.nan, voltage)


def _in_volts(unit: str, voltage: FloatArray) -> bool:
    """Whether a column holds volts; without a unit, which is a fault told elsewhere, its size must tell."""
    if unit in ("V", "mV"):
        return unit == "V"
    finite = np.abs(voltage[np.isfinite(voltage)])
    return bool(finite.size and finite.max() < _LARGEST_VOLTS)


def _refuse_beyond_limit(table: Table, base: str, voltage_mv: FloatArray) -> None:
    """Refuse impossible voltages; a column that is mostly so has the wrong unit and is told once."""
    beyond = np.flatnonzero(table.outside(base, voltage_mv))
    if len(beyond) > max(2, len(voltage_mv) // 2):
        first = int(beyond[0])
        table.findings.add(
            table.raw.header_origin(table.header(base)),
            found=f"{len(beyond)} of {len(voltage_mv)} values far outside, the first "
            f"{voltage_mv[first]:g} mV in row {table.raw.rows[first]}",
            expected=_EXPECTED,
            remedy="correct the unit in the header, or the values",
        )
        return
    for index in beyond:
        table.refuse(
            int(index),
            base,
            found=f"{voltage_mv[index]:g} mV",
            expected=_EXPECTED,
            remedy="correct the value, or the unit in the header",
        )
