"""What tables with one value in a row have in common."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from ..campaign import FloatArray
from ..errors import Origin
from . import allowed
from .findings import shown
from .header import Field
from .table import Table, TextArray

FEWEST_CELLS = 2  # a standard error needs two
MOST_CELLS = 1_000_000
CONSTRUCT = Field(base="construct", meaning="label of the construct")
CELL = Field(base="cell", meaning="label of the cell, the same in every table")
BATCH = Field(base="batch", required=False, values=allowed.line(), meaning="donor or day the cell belongs to")
COUNT = Field(base="n", values=allowed.whole(FEWEST_CELLS, MOST_CELLS), meaning="number of cells")
STANDARD_ERROR = allowed.number(least=0)


def standard_errors(table: Table, *, empty: bool = False) -> FloatArray:
    """Read the column ``sem``, shape (n_rows,); NaN where it holds none that is possible."""
    sem = table.numbers("sem", empty=empty)
    negative = table.outside("sem", sem)
    for index in np.flatnonzero(negative):
        table.refuse(
            int(index), "sem", found=f"{sem[index]:g}", expected="a standard error, not negative",
            remedy="correct the value",
        )  # fmt: skip
    return np.where(negative, np.nan, sem)


def refuse_repeated(
    table: Table,
    base: str,
    rows: Sequence[int],
    keys: Sequence[tuple[str, ...]],
    *,
    unsaid: Sequence[str] = ("",),
) -> None:
    """Refuse a second row of the same key, at its column `base`.

    Parameters
    ----------
    table : Table
        The table.
    base : str
        Column at which the fault is told.
    rows : sequence of int
        Index of the row of each key.
    keys : sequence of tuple of str
        Construct and, where there is one, cell; then the method.
    unsaid : sequence of str
        Methods that are not named in the fault, since the user did not name them.
    """
    earlier: dict[tuple[str, ...], int] = {}
    for index, key in zip(rows, keys, strict=True):
        first = earlier.setdefault(key, index)
        *labels, method = key
        if first == index or not all(labels):
            continue
        by_method = f" by the same method {shown(method)}" if method not in unsaid else ""
        table.refuse(
            index, base,
            found=f"{shown('/'.join(labels))} again, after row {table.raw.rows[first]}{by_method}",
            expected="one row each", remedy="delete one of the rows, or correct its label",
        )  # fmt: skip


def first_named(table: Table, construct: TextArray) -> dict[str, Origin]:
    """Every construct of a table, and where it is first named."""
    seen: dict[str, Origin] = {}
    for index, label in enumerate(construct.tolist()):
        if label and label not in seen:
            seen[label] = table.origin(index, "construct")
    return seen
