"""One measured quantity: its value in each cell, or its mean with a standard error."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Sample:
    """One quantity in several cells."""

    cells: tuple[str, ...]
    values: FloatArray  # (n_cells,)
    batches: tuple[str | None, ...] = ()  # of each cell, None where not stated; empty when none is stated

    @property
    def n(self) -> int:
        """Number of cells."""
        return len(self.cells)

    @property
    def mean(self) -> float:
        """Arithmetic mean; NaN for no cell."""
        return float(np.mean(self.values)) if self.n else math.nan

    @property
    def sem(self) -> float:
        """Standard error of the mean; NaN for a single cell."""
        return float(np.std(self.values, ddof=1) / np.sqrt(self.n)) if self.n > 1 else math.nan

    @property
    def dof(self) -> float:
        """Degrees of freedom of the standard error."""
        return self.n - 1.0


@dataclass(frozen=True, kw_only=True, slots=True)
class Summary:
    """One quantity known as mean, standard uncertainty of the mean and number of cells."""

    mean: float
    sem: float
    n: int | None  # None when not known, as for a value from the literature: its uncertainty is then trusted

    @property
    def dof(self) -> float:
        """Degrees of freedom of the standard uncertainty."""
        return math.inf if self.n is None else self.n - 1.0


Quantity = Sample | Summary


def shared_cells(a: Quantity, b: Quantity | None) -> tuple[str, ...]:
    """Names of the cells that show both quantities, sorted."""
    if isinstance(a, Sample) and isinstance(b, Sample):
        return tuple(sorted(set(a.cells) & set(b.cells)))
    return ()


def in_words(quantity: Quantity) -> str:
    """How many cells a quantity rests on."""
    if quantity.n is None:
        return "stated"
    return f"{quantity.n} cell{'s' if quantity.n != 1 else ''}"
