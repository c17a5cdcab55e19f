"""How a key of a TOML file is named, read and judged, and the readers of plain values."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from ..errors import Origin
from .findings import Findings, shown


@dataclass(frozen=True, kw_only=True, slots=True)
class Rule:
    """How a key is named, read and judged."""

    key: str
    attribute: str  # of the dataclass that holds the value
    read: Callable[[object], object]  # the value; raises ValueError if it is none
    expected: str
    remedy: str = "correct the value"


def read_by_rules(
    values: Mapping[str, object],
    rules: Sequence[Rule],
    origin: Callable[[str], Origin],
    findings: Findings,
) -> dict[str, Any]:
    """Read the keys that are there.

    Parameters
    ----------
    values : mapping of str to object
        One table under known keys.
    rules : sequence of Rule
        Of the keys to read; others are passed over.
    origin : callable
        Gives the place of a key.
    findings : Findings
        Takes wrong types and values out of range.

    Returns
    -------
    dict of str to value
        By attribute; keys that are not there or at fault are left out.
    """
    read: dict[str, Any] = {}
    for rule in rules:
        if rule.key not in values:
            continue
        try:
            read[rule.attribute] = rule.read(values[rule.key])
        except ValueError:
            found = say(values[rule.key])
            findings.add(origin(rule.key), found=found, expected=rule.expected, remedy=rule.remedy)
    return read


def text(value: object) -> str:
    """Return a text; ValueError if it is none."""
    if not isinstance(value, str):
        raise ValueError
    return value


def visible_text(value: object) -> str:
    """Return a text without outer spaces; ValueError if there is nothing else, or what cannot be seen."""
    stripped = text(value).strip()
    if not stripped or not stripped.isprintable():
        raise ValueError
    return stripped


def yes_or_no(value: object) -> bool:
    """Return a truth value; ValueError if it is none."""
    if not isinstance(value, bool):
        raise ValueError
    return value


def number(value: object) -> float:
    """Return a finite number; ValueError if it is none."""
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise ValueError
    return float(value)


def whole(least: int, most: float = math.inf) -> Callable[[object], int]:
    """Reader of whole numbers from `least` to `most`."""

    def read(value: object) -> int:
        if isinstance(value, bool) or not isinstance(value, int) or not least <= value <= most:
            raise ValueError
        return value

    return read


def where(allowed: Callable[[float], bool]) -> Callable[[object], float]:
    """Reader of the numbers that are allowed."""

    def read(value: object) -> float:
        plain = number(value)
        if not allowed(plain):
            raise ValueError
        return plain

    return read


def word(*allowed: str) -> Callable[[object], str]:
    """Reader of one of a few words."""

    def read(value: object) -> str:
        if value not in allowed:
            raise ValueError
        return str(value)

    return read


def say(value: object) -> str:
    """Name a value and, when it is no text, its kind."""
    match value:
        case str():
            return f"the text {shown(value)}" if value.strip() else "an empty text"
        case bool():
            return f"the truth value {str(value).lower()}"
        case int() | float():
            return f"the number {value}"
        case Mapping():
            return "a table"
        case list():
            return "a list"
    return f"the value {value}"
