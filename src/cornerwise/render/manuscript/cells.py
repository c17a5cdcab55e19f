"""Fields of a table from full-precision numbers; nothing here is computed from a rounded one."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from ..rounding import (
    DIGIT_RULES,
    MOST_FREEDOM,
    SMALLEST_P,
    decimals_for,
    number,
    p_words,
    span,
    with_uncertainty,
)
from .document import MISSING, Cell
from .words import printable

Limits = tuple[float | None, float | None]


def worded(text: str | None) -> Cell:
    """A label or a word."""
    shown = None if text is None else printable(text)
    return Cell(text=shown or MISSING, values=(shown or None,))


def counted(count: int | None) -> Cell:
    """A number of things."""
    return Cell(text=MISSING if count is None else str(count), values=(count,), decimals=0)


def from_to(low: int, high: int) -> Cell:
    """Fewest and most."""
    return Cell(text=f"{low}" if low == high else f"{low} to {high}", values=(low, high), decimals=0)


def probability(p: float | None) -> Cell:
    """A p value."""
    decimals = None if p is None or p < SMALLEST_P else decimals_for(p)
    return Cell(text=p_words(p) or MISSING, values=(p,), decimals=decimals)


def to_decimals(value: float | None, decimals: int) -> Cell:
    """A number that has no uncertainty, to so many decimals."""
    return _numbers(number(value, decimals), (value,), decimals)


def freedom(dof: float | None) -> Cell:
    """Degrees of freedom; very many are told as a limit."""
    many = dof is not None and dof > MOST_FREEDOM
    return Cell(text=f"> {MOST_FREEDOM}" if many else number(dof, 1) or MISSING, values=(dof,), decimals=1)


def flag_letters(codes: Sequence[str], marks: Mapping[str, str]) -> Cell:
    """Letters of flags; their full codes are the value."""
    return Cell(text=" ".join(marks[code] for code in codes) or MISSING, values=(" ".join(codes) or None,))


@dataclass(frozen=True, slots=True)
class Rounding:
    """Fields whose numbers share the decimals that their uncertainty asks for."""

    rule: str  # one of `rounding.DIGIT_RULES`

    @property
    def _decimals(self) -> Callable[[float | None], int | None]:
        return DIGIT_RULES[self.rule]

    def measured(self, value: float | None, uncertainty: float | None) -> Cell:
        """Value ± uncertainty."""
        text = with_uncertainty(value, uncertainty, decimals=self._decimals)
        return _numbers(text, (value, uncertainty), self._decimals(uncertainty))

    def alone(self, value: float | None, uncertainty: float | None) -> Cell:
        """A value to the decimals of an uncertainty that stands elsewhere."""
        decimals = self._decimals(uncertainty)
        return _numbers(number(value, decimals), (value,), decimals)

    def interval(self, limits: Limits, uncertainty: float | None) -> Cell:
        """Limits to the decimals of the uncertainty."""
        text = span(limits, uncertainty, decimals=self._decimals)
        return _numbers(text, limits, self._decimals(uncertainty))

    def with_limits(self, value: float | None, limits: Limits) -> Cell:
        """A value and its limits, to the decimals of a quarter of their distance.

        A 95 % interval is some four standard uncertainties wide, which is what stands for one here.
        """
        low, high = limits
        quarter = None if low is None or high is None else (high - low) / 4
        between = span(limits, quarter, decimals=self._decimals)
        text = number(value, self._decimals(quarter)) + (f" ({between})" if between else "")
        return _numbers(text, (value, *limits), self._decimals(quarter))


def _numbers(text: str, values: tuple[float | None, ...], decimals: int | None) -> Cell:
    return Cell(text=text.replace("-", "−") or MISSING, values=values, decimals=decimals)
