"""Tables of frozen rows: column names, a value for each, a data frame on demand."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING, ClassVar, Generic, Protocol, TypeVar, overload

if TYPE_CHECKING:
    import pandas as pd

Value = str | int | float | bool | None


def available(value: float) -> float | None:
    """Turn NaN and infinity, which stand for "not available", into None."""
    return float(value) if math.isfinite(value) else None


class Row(Protocol):
    """What every kind of row has: column names and a value for each."""

    columns: ClassVar[tuple[str, ...]]

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        ...


RowT = TypeVar("RowT", bound=Row, covariant=True)


class Table(Sequence[RowT], Generic[RowT]):
    """Rows of one kind, in a fixed order.

    Parameters
    ----------
    kind : type
        The dataclass of the rows; gives the column names of an empty table too.
    rows : iterable
        The rows.
    """

    def __init__(self, kind: type[RowT], rows: Sequence[RowT]) -> None:
        self.kind = kind
        self._rows = tuple(rows)

    @overload
    def __getitem__(self, index: int) -> RowT: ...
    @overload
    def __getitem__(self, index: slice) -> Sequence[RowT]: ...
    def __getitem__(self, index: int | slice) -> RowT | Sequence[RowT]:
        """Return one row, or several as a tuple."""
        return self._rows[index]

    def __len__(self) -> int:
        return len(self._rows)

    def __iter__(self) -> Iterator[RowT]:
        return iter(self._rows)

    @property
    def columns(self) -> tuple[str, ...]:
        """Column names, as in the CSV file."""
        return self.kind.columns

    def to_frame(self) -> pd.DataFrame:
        """Data frame with the columns of the CSV file; fields that do not apply are missing values."""
        import pandas as pd

        return pd.DataFrame([row.cells() for row in self._rows], columns=list(self.columns))


# Columns whose name is not the field's: units are spelled as in the trade, `cells` is taken by a method.
_FIELD_OF_COLUMN = {
    "median_mV": "median_mv",
    "median_sem_mV": "median_sem_mv",
    "midpoint_mV": "midpoint_mv",
    "sigmoid_midpoint_mV": "sigmoid_midpoint_mv",
    "cells": "cells_used",
    "distance_A": "distance_angstrom",
    "distance_within_chain_A": "distance_within_chain_angstrom",
    "distance_across_chains_A": "distance_across_chains_angstrom",
    "charged_distance_A": "charged_distance_angstrom",
}

_SEPARATORS = {"mutations": "/", "background": "/", "shares": "; "}  # a space for the others


def flat_values(row: Row) -> tuple[Value, ...]:
    """Values of a row in the order of its columns; lists become text."""
    return tuple(_flat(column, getattr(row, field_of_column(column))) for column in row.columns)


def field_of_column(column: str) -> str:
    """Name of the row's field behind a column."""
    return _FIELD_OF_COLUMN.get(column, column)


def _flat(column: str, value: object) -> Value:
    if isinstance(value, tuple):
        return _SEPARATORS.get(column, " ").join(map(str, value))
    assert value is None or isinstance(value, str | int | float | bool)
    return value
