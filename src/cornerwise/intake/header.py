"""The header of a table: which known column stands where, in which unit."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from ..errors import Origin
from . import allowed
from .findings import Findings, listing, nearest, shown


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class RawTable:
    """A table read as text, before anything is made of it."""

    file: str  # as it is named to the user
    header: tuple[str, ...]
    header_row: int
    rows: NDArray[np.int64]  # (n_rows,), the number of each row in the file
    columns: tuple[Sequence[str], ...]  # one per header entry, each (n_rows,)
    delimiter: str = ""  # "" for a sheet of a workbook
    lost: str = ""  # text of rows that were left out; what it names may not be called missing

    def header_origin(self, column: str) -> Origin:
        """Return the place of the header `column`."""
        return Origin(file=self.file, row=self.header_row, column=column)


@dataclass(frozen=True, kw_only=True, slots=True)
class Field:
    """A column a table may have, under one name per unit."""

    base: str
    units: tuple[str, ...] = ("",)  # "" is the bare name
    required: bool = True
    key: str = ""  # what it is asked for by, where that is not `base`
    values: allowed.Fragment = field(default_factory=allowed.label, hash=False)  # numbers in the first unit
    meaning: str = ""  # for whoever reads the published schema

    @property
    def name(self) -> str:
        """What the column is asked for by."""
        return self.key or self.base

    @property
    def headers(self) -> tuple[str, ...]:
        """The header in each unit."""
        return tuple(f"{self.base}_{unit}" if unit else self.base for unit in self.units)


def match_header(
    raw: RawTable, fields: Sequence[Field], findings: Findings, *, cells: Collection[int] = ()
) -> dict[str, int]:
    """Find the known columns of a table.

    Parameters
    ----------
    raw : RawTable
        The table as text.
    fields : sequence of Field
        The columns it may have.
    findings : Findings
        Takes unknown, doubled, missing columns and missing units. A column whose header is at fault but can
        be told is read on, so that no fault in it is hidden.
    cells : collection of int
        Columns that hold one cell each (the wide layout) and need no known name.

    Returns
    -------
    dict of str to int
        Index of the column of each field that was found, by its name.
    """
    found: dict[str, int] = {}
    at_fault: dict[str, int] = {}  # columns that are there, if under a wrong name
    by_header = {header: field for field in fields for header in field.headers}
    for index, header in enumerate(raw.header):
        field = by_header.get(header)
        if index in cells:
            continue
        if field is None:
            meant = _refuse_header(raw, index, fields, findings)
            if meant is not None:
                at_fault.setdefault(meant.name, index)
        elif field.name not in found:
            found[field.name] = index
        elif raw.header[found[field.name]] != header:
            _refuse_second(raw, header, raw.header[found[field.name]], findings)
    refuse_doubled(raw, findings)
    found = at_fault | found
    for field in fields:
        if field.required and field.name not in found:
            findings.add(
                raw.header_origin(field.headers[0]),
                found=f"the columns {', '.join(map(shown, raw.header))}",
                expected=f"a column {listing(field.headers)}",
                remedy="add the column, or correct its header",
            )
    return found


def refuse_doubled(raw: RawTable, findings: Findings) -> None:
    """Refuse every header that occurs more than once."""
    for header, count in Counter(raw.header).items():
        if count > 1 and header:
            findings.add(
                raw.header_origin(header),
                found=f"{count} columns called {shown(header)}",
                expected="each header once",
                remedy="rename or delete the other one",
            )


def _refuse_second(raw: RawTable, header: str, first: str, findings: Findings) -> None:
    findings.add(
        raw.header_origin(header),
        found=f"both {first} and {header}",
        expected="this quantity in one unit",
        remedy="delete one of the two columns",
    )


def _refuse_header(raw: RawTable, index: int, fields: Sequence[Field], findings: Findings) -> Field | None:
    """Refuse an unknown header; return the column it was most likely meant to be, if it can be told."""
    header = raw.header[index]
    if not header:
        findings.add(
            raw.header_origin(f"number {index + 1}"),
            found="values below an empty header",
            expected="a header",
            remedy="name the column or delete it",
        )
        return None
    base = header.replace("(", "_").replace("[", "_").replace(" ", "_").partition("_")[0].casefold()
    same = [field for field in fields if field.base.casefold() == base and field.units != ("",)]
    if same:
        headers = [name for field in same for name in field.headers]
        findings.add(
            raw.header_origin(header),
            found=f"the header {shown(header)}",
            expected=f"the quantity with its unit, {listing(headers)}",
            remedy="put the unit the values are in into the header",
        )
        return same[0]
    by_header = {name: field for field in fields for name in field.headers}
    close = nearest(header, by_header)
    findings.add(
        raw.header_origin(header),
        found=f"the unknown column {shown(header)}",
        expected="a known column" if close else f"only the columns {listing(by_header)}",
        remedy=f"did you mean {close}?" if close else "delete the column, or move it to a file of its own",
    )
    return by_header[close] if close else None
