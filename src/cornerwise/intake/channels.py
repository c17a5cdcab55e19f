"""Charges of whole cells to charges of one channel.

The charge of a cell in fC, pC or nC says nothing of one channel unless the cell's channels were counted. The
column ``channels`` holds their number, ``channels_sem`` its standard uncertainty (a number of channels too).
Charge per channel is then charge / (e0 channels), and its standard uncertainty from the count is that charge
times channels_sem / channels.
"""

from __future__ import annotations

import numpy as np

from .. import plausible
from ..campaign import FloatArray
from ..units import ChargeUnit, elementary_charges
from . import allowed
from .findings import Findings, nearest, shown
from .header import Field, RawTable
from .table import BoolArray, IntArray, Table

FEWEST_CHANNELS = 1
TRACE_E0 = 0.1  # per channel; one charge that crosses a tenth of the field, far below any sensor
RAW = "raw charge"
RAW_UNITS: tuple[ChargeUnit, ...] = ("fC", "pC", "nC")
CHARGE = Field(
    base="charge", units=("e0",), values=allowed.number(above=0, most=plausible.CHARGE_LIMIT_E0),
    meaning="total charge of one channel",
)  # fmt: skip
RAW_CHARGE = Field(
    base="charge", key=RAW, units=RAW_UNITS, required=False, values=allowed.number(above=0),
    meaning="charge of the whole cell, which needs its channels",
)  # fmt: skip
CHANNELS = Field(
    base="channels", required=False, values=allowed.number(least=FEWEST_CHANNELS),
    meaning="number of channels in the cell",
)  # fmt: skip
CHANNELS_SEM = Field(
    base="channels_sem", required=False, values=allowed.number(least=0),
    meaning="standard uncertainty of the number of channels",
)  # fmt: skip

_EXPECTED = f"a total charge per channel above 0 and at most {plausible.CHARGE_LIMIT_E0:g} e0"


def refused_raw_charge(raw: RawTable, findings: Findings) -> bool:
    """Whether the table holds charge of whole cells that cannot be made charge per channel: a fault."""
    headers = [header for header in raw.header if header in RAW_CHARGE.headers]
    # A misspelt header is told elsewhere, with the spelling that was meant.
    others = [header for header in raw.header if header != "channels_sem"]
    counted = any(header == "channels" or nearest(header, ("channels",)) for header in others)
    if not headers or (counted and "cell" in raw.header):
        return False
    remedy = (
        "add a column channels with the number of channels in each cell; or divide each value by that number "
        "and by the elementary charge and name the column charge_e0; or leave the table out and state one "
        "charge in campaign.toml"
    )
    expected = "charge_e0, the charge of one channel, or a column channels beside it"
    if counted:
        expected = "one row per cell, with a column cell: charge and channels are those of one cell"
        remedy = "add the column cell, or give charge_e0 with sem_e0 and n"
    for header in headers:
        findings.add(
            raw.header_origin(header),
            found=f"the header {shown(header)}: the charge of a whole cell; raw charges of two constructs "
            "may not be compared without channel counts",
            expected=expected,
            remedy=remedy,
        )
    return True


def charge_per_channel(table: Table, of_cells: BoolArray) -> tuple[FloatArray, FloatArray]:
    """Read the charge of one channel in every row.

    Parameters
    ----------
    table : Table
        With the fields `CHARGE`, `RAW_CHARGE`, `CHANNELS` and `CHANNELS_SEM`, or some of them. With both
        charges, each row fills one of the two.
    of_cells : array of bool, shape (n_rows,)
        Rows of single cells; only these may hold raw charge.

    Returns
    -------
    charge_e0, uncertainty_e0 : array, shape (n_rows,)
        NaN where there is none, which for a charge is a fault.
    """
    both = "charge" in table and RAW in table
    direct, raw = table.numbers("charge", empty=both), table.numbers(RAW, empty=both)
    if both:
        _refuse_none_or_both(table)
    is_raw = table.filled(RAW) & ~table.filled("charge") & of_cells
    channels = _channels(table, is_raw)
    sem = _counts_sem(table, channels)
    charge = np.where(is_raw, np.nan, direct)
    if RAW in table:
        # A header that is spelt wrong, and refused for that, may not say which unit it meant.
        unit = next((name for name in RAW_UNITS if name == table.unit(RAW)), RAW_UNITS[0])
        with np.errstate(over="ignore"):  # what overflows is impossible, and refused as such
            charge = np.where(is_raw, raw * elementary_charges(unit) / channels, charge)
    if _is_unclear(table):
        charge = np.full(len(table), np.nan)
    charge = _possible(table, charge, is_raw)
    return charge, charge * sem / channels


def _refuse_none_or_both(table: Table) -> None:
    names = f"{table.header('charge')} or {table.header(RAW)} with channels"
    for index in np.flatnonzero(table.filled("charge") == table.filled(RAW)):
        is_both = bool(table.filled(RAW)[index])
        table.refuse(
            int(index), RAW if is_both else "charge",
            found=f"both {table.header('charge')} and {table.header(RAW)}" if is_both else "nothing",
            expected=f"either {names}",
            remedy="delete one of the two values" if is_both else "enter one of them, or delete the row",
        )  # fmt: skip


def _channels(table: Table, is_raw: BoolArray) -> FloatArray:
    """Read the channel counts, shape (n_rows,); NaN where there is none that can be."""
    channels = table.numbers("channels", empty=True)
    expected = f"the number of channels in the cell, at least {FEWEST_CHANNELS}"
    if "channels" in table:
        for index in np.flatnonzero(is_raw & ~table.filled("channels")):
            table.refuse(
                int(index), "channels", found="nothing", expected=expected,
                remedy="enter the count; without it the cell's charge is not that of a channel and may not "
                "be compared with another construct's",
            )  # fmt: skip
    too_few = is_raw & table.outside("channels", channels)
    for index in np.flatnonzero(too_few):
        table.refuse(
            int(index), "channels", found=f"{channels[index]:g}", expected=expected,
            remedy="correct the count, or delete the row",
        )  # fmt: skip
    _refuse_needless(table)
    return np.where(is_raw & ~too_few, channels, np.nan)


def _is_unclear(table: Table) -> bool:
    """Whether a charge beside counts may be a channel's or a cell's: its header, refused, lacks the unit."""
    return "channels" in table and "charge" in table and table.header("charge") not in CHARGE.headers


def _refuse_needless(table: Table) -> None:
    """Refuse channel counts beside what is the charge of one channel; told once without raw charge."""
    found = "a channel count without the cell's charge in fC, pC or nC"
    expected = "nothing beside charge_e0, which is the charge of one channel already"
    remedy = f"delete the count, or give the charge of the whole cell as {RAW_CHARGE.headers[1]}"
    if _is_unclear(table):
        return
    for base in ("channels", "channels_sem"):
        if base in table and "charge" in table and RAW not in table:
            place = table.raw.header_origin(table.header(base))
            table.findings.add(place, found=found, expected=expected, remedy=remedy)
            return
        for index in np.flatnonzero(table.filled(base) & table.filled("charge") & ~table.filled(RAW)):
            table.refuse(int(index), base, found=found, expected=expected, remedy=remedy)


def _counts_sem(table: Table, channels: FloatArray) -> FloatArray:
    """Read the standard uncertainties of the counts, shape (n_rows,); NaN where there is none that can be."""
    sem = table.numbers("channels_sem", empty=True)
    wrong = table.outside("channels_sem", sem) | (sem > channels)
    for index in np.flatnonzero(wrong):
        table.refuse(
            int(index), "channels_sem", found=f"{sem[index]:g}",
            expected="the standard uncertainty of the number of channels, from 0 to that number",
            remedy="correct the value, or leave it empty",
        )  # fmt: skip
    return np.where(wrong, np.nan, sem)


def _possible(table: Table, charge_e0: FloatArray, is_raw: BoolArray) -> FloatArray:
    """Refuse charges no channel can move and put NaN in their place; a wrong unit is told once."""
    impossible = allowed.outside(CHARGE.values, charge_e0)
    # A single trace of a charge may be a poor cell; most of a table are a unit a thousand times too small.
    is_sure = RAW in table and table.unit(RAW) in RAW_UNITS
    traces = is_raw & (charge_e0 < TRACE_E0) & is_sure
    most = max(2, int(np.count_nonzero(is_raw)) // 2)
    once = int(np.count_nonzero(is_raw & (impossible | traces))) > most
    wrong = np.flatnonzero(impossible | traces if once else impossible)
    if once:
        _refuse_unit(table, charge_e0, wrong[is_raw[wrong]], int(np.count_nonzero(is_raw)))
    for index in wrong.tolist():
        found, remedy = (
            f"{charge_e0[index]:g} e0",
            "it must be the charge of one channel in elementary charges",
        )
        if is_raw[index]:
            found = f"{charge_e0[index]:.3g} e0 a channel, from charge and number of channels"
            remedy = "mind the unit in the header and the number of channels"
        if not (once and is_raw[index]):
            base = RAW if is_raw[index] else "charge"
            table.refuse(index, base, found=found, expected=_EXPECTED, remedy=f"correct the value; {remedy}")
    possible = charge_e0.copy()
    possible[wrong] = np.nan
    return possible


def _refuse_unit(table: Table, charge_e0: FloatArray, wrong: IntArray, count: int) -> None:
    """Refuse the header of raw charge of which most values, those in the rows `wrong`, cannot be right."""
    first = int(wrong[0])
    table.findings.add(
        table.raw.header_origin(table.header(RAW)),
        found=f"{len(wrong)} of {count} charges impossible for one channel, the first "
        f"{charge_e0[first]:.3g} e0 in row {table.raw.rows[first]}",
        expected=f"{_EXPECTED}, most of them at least {TRACE_E0:g} e0",
        remedy="correct the unit in the header, or the numbers of channels",
    )
