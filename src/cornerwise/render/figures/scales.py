"""From numbers to places: scales, round tick values, and the rule along which they are written."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from .lettering import signed
from .marks import Sheet
from .style import HAIRLINE, SMALL_TYPE

_TICK_MM = 0.9


@dataclass(frozen=True, kw_only=True, slots=True)
class Scale:
    """Straight map from `low`..`high` of a quantity to `start`..`end` on the sheet (mm)."""

    low: float
    high: float
    start: float
    end: float

    def __call__(self, value: float) -> float:
        """Place of a value (mm)."""
        return self.start + (value - self.low) / (self.high - self.low) * (self.end - self.start)

    def inside(self, value: float) -> float:
        """Place of a value, of the nearer end for one beyond the scale (mm)."""
        return self(min(max(value, self.low), self.high))

    def holds(self, value: float) -> bool:
        """Whether a value lies on the scale."""
        return self.low <= value <= self.high


def round_step(span: float, most: int) -> float:
    """Smallest step of 1, 2 or 5 times a power of ten that divides `span` into at most `most` parts."""
    power = 10.0 ** math.floor(math.log10(span / most))
    return next(power * factor for factor in (1.0, 2.0, 5.0, 10.0, 20.0) if span <= power * factor * most)


def ticks(low: float, high: float, most: int = 5) -> list[float]:
    """Round values between `low` and `high`, at most `most` + 1 of them."""
    step = round_step(high - low, most)
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return [i * step for i in range(first, last + 1)]


def tick_words(values: Sequence[float]) -> list[str]:
    """Tick values to the decimals their step needs, with a true minus sign."""
    step = abs(values[1] - values[0]) if len(values) > 1 else 1.0
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    return [signed(f"{value + 0.0:.{decimals}f}") for value in values]


def around(values: Iterable[float], *, share: float = 0.04) -> tuple[float, float]:
    """Smallest and largest value with a little room on either side."""
    known = list(values)
    low, high = min(known), max(known)
    room = share * (high - low) or abs(high) * 0.1 or 1.0
    return low - room, high + room


def rule_below(sheet: Sheet, scale: Scale, y: float, *, most: int = 5) -> None:
    """Horizontal rule with ticks hanging from it and their values below."""
    sheet.line([(scale.start, y), (scale.end, y)], width=HAIRLINE)
    values = ticks(scale.low, scale.high, most)
    for value, word in zip(values, tick_words(values), strict=True):
        x = scale(value)
        sheet.line([(x, y), (x, y + _TICK_MM)], width=HAIRLINE)
        sheet.words((x, y + _TICK_MM + 2.3), word, size=SMALL_TYPE, anchor="middle")


def rule_beside(sheet: Sheet, scale: Scale, x: float, *, most: int = 4, labelled: bool = True) -> None:
    """Upright rule with ticks to its left and their values beside them."""
    sheet.line([(x, scale.start), (x, scale.end)], width=HAIRLINE)
    values = ticks(scale.low, scale.high, most)
    for value, word in zip(values, tick_words(values), strict=True):
        y = scale(value)
        sheet.line([(x - _TICK_MM, y), (x, y)], width=HAIRLINE)
        if labelled:
            sheet.words((x - _TICK_MM - 0.6, y + 0.75), word, size=SMALL_TYPE, anchor="end")
