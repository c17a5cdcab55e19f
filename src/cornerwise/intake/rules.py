"""How a key of a TOML file is named, read and judged, and the readers of plain values.

A value is judged by a fragment of JSON Schema, the one that the published schemas are put together from.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Generic, TypeVar

from ..errors import Origin
from . import allowed
from .findings import Findings, shown

T = TypeVar("T")


@dataclass(frozen=True, slots=True)
class Reader(Generic[T]):
    """Reads the values that a fragment of JSON Schema allows."""

    schema: allowed.Fragment  # judged by, and published
    convert: Callable[[Any], T]  # what is kept; ValueError where no schema can tell the fault

    def __call__(self, value: object) -> T:
        """Return what is kept of a value; ValueError if it is not allowed."""
        if not allowed.allows(self.schema, value):
            raise ValueError
        return self.convert(value)


@dataclass(frozen=True, kw_only=True, slots=True)
class Rule:
    """How a key is named, read and judged."""

    key: str
    attribute: str  # of the dataclass that holds the value
    read: Reader[Any]
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


text = Reader(allowed.text(), str)
line = Reader(allowed.line(), str.strip)  # of visible characters, perhaps none
visible_text = Reader(allowed.label(), str.strip)  # without outer spaces
yes_or_no = Reader(allowed.truth(), bool)
number = Reader(allowed.number(), float)


def whole(least: int, most: int = allowed.LARGEST_WHOLE) -> Reader[int]:
    """Reader of whole numbers from `least` to `most`."""
    return Reader(allowed.whole(least, most), int)


def within(
    *, least: float | None = None, above: float | None = None, most: float | None = None,
    below: float | None = None,
) -> Reader[float]:  # fmt: skip
    """Reader of the numbers from `least` or above `above`, to `most` or below `below`."""
    return Reader(allowed.number(least=least, above=above, most=most, below=below), float)


def word(*words: str) -> Reader[str]:
    """Reader of one of a few words."""
    return Reader(allowed.word(*words), str)


def say(value: object) -> str:
    """Name a value and, when it is no text, its kind."""
    match value:
        case str():
            return f"the text {shown(value)}" if value.strip() else "an empty text"
        case bool():
            return f"the truth value {str(value).lower()}"
        case int() if abs(value) > allowed.LARGEST_WHOLE:
            return "a number of many digits"
        case int() | float():
            return f"the number {value}"
        case Mapping():
            return "a table"
        case list():
            return "a list"
    return f"the value {value}"
