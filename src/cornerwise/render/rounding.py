"""Numbers for people: a value and its uncertainty to the same decimal, from full precision each time."""

from __future__ import annotations

import math
from collections.abc import Iterable


def decimals_for(uncertainty: float | None, digits: int = 2) -> int | None:
    """Decimals that show `uncertainty` with so many significant digits; None when it has no size.

    Examples
    --------
    >>> decimals_for(0.7651)
    2
    >>> decimals_for(0.0996)
    2
    """
    if uncertainty is None or not math.isfinite(uncertainty) or uncertainty <= 0:
        return None
    rounded = float(f"{uncertainty:.{digits - 1}e}")  # 0.0996 becomes 0.10 before its digits are counted
    return max(0, digits - 1 - math.floor(math.log10(rounded)))


def number(value: float | None, decimals: int | None) -> str:
    """Fixed-point text with ASCII minus, no negative zero; empty when the value is not available."""
    if value is None:
        return ""
    text = f"{value:.4g}" if decimals is None else f"{value:.{decimals}f}"
    return text.removeprefix("-") if float(text) == 0 else text


def with_uncertainty(value: float | None, uncertainty: float | None, plus_minus: str = "±") -> str:
    """Value and uncertainty, two significant digits of the uncertainty.

    Examples
    --------
    >>> with_uncertainty(2.0011, 0.7651)
    '2.00 ± 0.77'
    """
    if value is None:
        return ""
    decimals = decimals_for(uncertainty)
    if decimals is None:
        return number(value, None)
    return f"{number(value, decimals)} {plus_minus} {number(uncertainty, decimals)}"


def span(limits: Iterable[float | None], uncertainty: float | None) -> str:
    """Interval as text to the decimal of the uncertainty; empty when it is not available."""
    low, high = limits
    if low is None or high is None:
        return ""
    decimals = decimals_for(uncertainty)
    return f"{number(low, decimals)} to {number(high, decimals)}"
