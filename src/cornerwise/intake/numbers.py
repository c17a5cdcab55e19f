"""Numbers as people type them: one decimal mark, no thousands separators, the true minus sign allowed."""

from __future__ import annotations

import math
import re

from .findings import shown

COMMA_DELIMITERS = (";", "\t")  # with these a comma can only be a decimal mark

_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_THOUSANDS = re.compile(r"[+-]?[1-9][0-9]{0,2}(?:,[0-9]{3})+")
_MINUS_SIGN = "\N{MINUS SIGN}"


def parse_number(text: str, delimiter: str) -> float | None:
    """Read one finite number.

    Parameters
    ----------
    text : str
        The field as it stands in the file.
    delimiter : str
        What separates the fields of this file; "" in a workbook. A decimal comma is read only where the
        semicolon or the tab separates.

    Returns
    -------
    float or None
        None if `text` is no finite number.

    Examples
    --------
    >>> parse_number("−0,25", ";")
    -0.25
    >>> parse_number("1,500", ",") is None
    True
    """
    plain = text.strip().replace(_MINUS_SIGN, "-")
    if "," in plain:
        if delimiter not in COMMA_DELIMITERS or "." in plain:
            return None
        plain = plain.replace(",", ".")
    if not _NUMBER.fullmatch(plain):
        return None
    value = float(plain)
    return value if math.isfinite(value) else None


def refusal(text: str, delimiter: str) -> tuple[str, str, str]:
    """Say what was found, what was expected and what to do about a field that is no number."""
    plain = text.strip()
    if not plain:
        return "nothing", "a number", "enter the value or delete the row"
    if plain.lower().lstrip("+-") in ("nan", "inf", "infinity", "na", "n/a"):
        return shown(text), "a finite number", "enter the value or delete the row"
    if "," in plain and "." in plain:
        return shown(text), "a number without thousands separators", "write 1234.5, not 1,234.5"
    if "," in plain and delimiter not in COMMA_DELIMITERS:
        remedy = (
            "use a decimal point; decimal commas are read only where semicolons or tabs separate the fields"
        )
        return shown(text), "a number with a decimal point", remedy
    return shown(text), "a number", "correct the value, digits only, the unit belongs in the header"


def looks_grouped(text: str) -> bool:
    """Whether a number could be a whole one with its thousands set off by commas."""
    return _THOUSANDS.fullmatch(text.strip().replace(_MINUS_SIGN, "-")) is not None
