"""What a plan is asked."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import median

from ..errors import UsageError
from .goals import Verdict
from .search import Criterion

DEFAULT_POWER = 0.8  # common practice, no source
_FIRST_CELLS = (4, 6, 8, 12)  # told of where there is no pilot
_TIMES_PILOT = (1.5, 2.0, 3.0)  # and as many times the usual number of its cells where there is
_MOST_DRAWN = 12


@dataclass(frozen=True, kw_only=True, slots=True)
class PlanRequest:
    """What a plan shall answer; energies in the campaign's unit."""

    cells: tuple[int, ...] = ()  # numbers of cells each, for which half-width and power are told; empty: some
    drawn: bool = False  # tell of the numbers in between too, as a figure needs
    half_width: float | None = None  # wanted
    power: float | None = None  # wanted, or the wanted probability of a charge verdict
    interaction: float | None = None  # true one against which power counts; None: the threshold
    charge_verdict: Verdict | None = None  # wanted for every mutant
    charge_ratio: float | None = None  # true one; None: as observed
    recordings: int | None = None  # further cells to be split over all constructs
    criterion: Criterion = "mean"  # of the half-widths, which the split makes smallest
    anew: bool = False  # start without the pilot's cells, of which only the scatters are used
    cycles: tuple[str, ...] = ()  # names, or mutations in any order; empty for all

    def __post_init__(self) -> None:
        """Refuse what cannot be wanted."""
        if self.cells and min(self.cells) < 3:
            raise UsageError("numbers of cells must be 3 or more")
        for words, value in (
            ("a half-width", self.half_width), ("a true interaction", self.interaction),
            ("a charge ratio", self.charge_ratio), ("the number of recordings", self.recordings),
        ):  # fmt: skip
            if value is not None and not 0 < value < math.inf:
                raise UsageError(f"{words} must be above 0; found {value:g}")
        if self.power is not None and not 0 < self.power < 1:
            raise UsageError(f"a power lies between 0 and 1; found {self.power:g}")

    @property
    def probability(self) -> float:
        """Wanted power, or probability of a verdict."""
        return DEFAULT_POWER if self.power is None else self.power

    def told_of(self, kept: Sequence[float]) -> tuple[int, ...]:
        """Numbers of cells to tell of.

        Parameters
        ----------
        kept : sequence of float
            Cells of each kind that there are already; 0 for those to be recorded anew.
        """
        if self.cells:
            return tuple(sorted(set(self.cells)))
        usual = median(kept) if kept else 0.0
        if usual < 3:
            return _FIRST_CELLS
        return tuple(dict.fromkeys(math.ceil(usual * times) for times in _TIMES_PILOT))

    def drawn_at(self, told: Sequence[int], kept: Sequence[float]) -> tuple[int, ...]:
        """Numbers of cells at which a figure is drawn, those told of among them."""
        if not self.drawn:
            return tuple(told)
        first = max(3, round(min(kept, default=0.0)))
        every = range(first, max(told) + 1)
        apart = -(-len(every) // _MOST_DRAWN)
        return tuple(sorted({*every[::apart], *told}))
