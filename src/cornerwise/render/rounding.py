"""Numbers for people: a value and its uncertainty to the same decimal, from full precision each time."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping
from typing import TypeGuard

Decimals = Callable[[float | None], int | None]

SMALLEST_P = 1e-4  # smaller ones are told as a limit
MOST_FREEDOM = 1000  # degrees; with more Student's t is told from the normal distribution by nobody
_ONE_DIGIT_FROM, _NEXT_POWER_FROM = 3.55, 9.5


def decimals_for(uncertainty: float | None, digits: int = 2) -> int | None:
    """Decimals that show `uncertainty` with so many significant digits; None when it has no size.

    Negative where the last digit shown stands left of the decimal point.

    Examples
    --------
    >>> decimals_for(0.7651)
    2
    >>> decimals_for(0.0996)
    2
    >>> decimals_for(195.0)
    -1
    """
    if not _has_size(uncertainty):
        return None
    rounded = float(f"{uncertainty:.{digits - 1}e}")  # 0.0996 becomes 0.10 before its digits are counted
    return digits - 1 - math.floor(math.log10(rounded))


def decimals_of_one_or_two_digits(uncertainty: float | None) -> int | None:
    """Decimals that show `uncertainty` with one or two significant digits by its leading three.

    Notes
    -----
    The rule of the Particle Data Group (Review of Particle Physics, introduction, section on rounding), from
    memory: leading digits 100 to 354 keep two digits, 355 to 949 keep one, 950 to 999 are rounded up to 1000
    and keep two.

    Examples
    --------
    >>> decimals_of_one_or_two_digits(0.119), decimals_of_one_or_two_digits(0.367)
    (2, 1)
    """
    if not _has_size(uncertainty):
        return None
    mantissa, exponent = f"{uncertainty:.15e}".split("e")
    two = float(mantissa) < _ONE_DIGIT_FROM
    if float(mantissa) >= _NEXT_POWER_FROM:
        return -int(exponent)
    return (1 if two else 0) - int(exponent)


def _has_size(uncertainty: float | None) -> TypeGuard[float]:
    return uncertainty is not None and math.isfinite(uncertainty) and uncertainty > 0


DIGIT_RULES: Mapping[str, Decimals] = {
    "two": decimals_for,
    "one-or-two": decimals_of_one_or_two_digits,
}


def number(value: float | None, decimals: int | None) -> str:
    """Fixed-point text with ASCII minus, no negative zero; empty when the value is not available."""
    if value is None:
        return ""
    if decimals is None:
        text = f"{value:.4g}"
    elif decimals < 0:
        text = f"{round(value, decimals):.0f}"
    else:
        text = f"{value:.{decimals}f}"
    return text.removeprefix("-") if float(text) == 0 else text


def with_uncertainty(
    value: float | None,
    uncertainty: float | None,
    plus_minus: str = "±",
    decimals: Decimals = decimals_for,
) -> str:
    """Value and uncertainty, two significant digits of the uncertainty unless `decimals` says else.

    Examples
    --------
    >>> with_uncertainty(2.0011, 0.7651)
    '2.00 ± 0.77'
    """
    if value is None:
        return ""
    shown = decimals(uncertainty)
    if shown is None:
        return number(value, None)
    return f"{number(value, shown)} {plus_minus} {number(uncertainty, shown)}"


def span(limits: Iterable[float | None], uncertainty: float | None, decimals: Decimals = decimals_for) -> str:
    """Interval as text to the decimal of the uncertainty; empty when it is not available."""
    low, high = limits
    if low is None or high is None:
        return ""
    shown = decimals(uncertainty)
    return f"{number(low, shown)} to {number(high, shown)}"


def p_words(p: float | None) -> str:
    """P value for a table: two digits, very small ones as a limit."""
    if p is None:
        return ""
    if p < SMALLEST_P:
        return f"< {SMALLEST_P:.4f}"
    return f"{p:.2g}" if p < 0.1 else f"{p:.2f}"


def freedom_words(dof: float | None) -> str:
    """Degrees of freedom in a sentence or a list of facts; very many are told as a limit.

    Examples
    --------
    >>> freedom_words(11.42)
    '11.4 degrees of freedom'
    >>> freedom_words(715546.4)
    'more than 1000 degrees of freedom, as good as normal'
    """
    if dof is None:
        return ""
    if dof > MOST_FREEDOM:
        return f"more than {MOST_FREEDOM} degrees of freedom, as good as normal"
    return f"{dof:.1f} degrees of freedom"


def typeset(text: str) -> str:
    """Numbers for reading: a true minus sign before a digit and between terms."""
    return "".join(
        "−" if sign == "-" and _is_minus(before, after) else sign
        for before, sign, after in zip(" " + text, text, text[1:] + " ", strict=False)
    )


def _is_minus(before: str, after: str) -> bool:
    """Whether a hyphen between these two characters is a sign or an operator."""
    if before == " " and after == " ":
        return True
    return after.isdigit() and not (before.isalnum() or before in ")-")
