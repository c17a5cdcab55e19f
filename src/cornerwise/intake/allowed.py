"""What a value may be, said as a fragment of JSON Schema by which it is judged.

The intake judges by the very fragments that are published, so the two cannot differ. `FORMATS` are those
that JSON Schema leaves to whoever writes a schema.

References
----------
JSON Schema, draft 2020-12: Core and Validation.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from ..campaign import FloatArray

Fragment = Mapping[str, Any]

LARGEST_WHOLE = 2**63 - 1  # what any program can keep

# Control characters, invisible ones, separators of lines and odd spaces: with them two labels look alike.
_UNSEEN = (
    r"\u0000-\u001F\u007F-\u00A0\u00AD\u1680\u2000-\u200F\u2028-\u202F\u205F-\u2064\u2066-\u206F\u3000\uFEFF"
    r"\uFFF9-\uFFFB"
)
_VISIBLE = rf"[^\s{_UNSEEN}]"
_LINE_PATTERN = rf"^\s*({_VISIBLE}([^{_UNSEEN}]*{_VISIBLE})?\s*)?$"
_LABEL_PATTERN = rf"^\s*{_VISIBLE}([^{_UNSEEN}]*{_VISIBLE})?\s*$"


def _is_number(value: object) -> bool:
    if isinstance(value, bool) or not isinstance(value, int | float):
        return False
    try:
        return math.isfinite(value)
    except OverflowError:  # a whole number of more than 300 digits
        return False


def _is_whole(value: Any) -> bool:
    return _is_number(value) and value == int(value)


_TYPES: Mapping[str, Callable[[object], bool]] = {
    "string": lambda value: isinstance(value, str),
    "boolean": lambda value: isinstance(value, bool),
    "number": _is_number,
    "integer": _is_whole,  # 4.0 is 4, as JSON Schema has it
    "array": lambda value: isinstance(value, list),
    "object": lambda value: isinstance(value, Mapping),
}

FORMATS: Mapping[str, Callable[[Any], bool]] = {
    # Rarer invisible characters than a portable pattern can name: unassigned and private ones.
    "visible-text": lambda value: value.strip().isprintable(),
}

_BOUNDS: Mapping[str, Callable[[Any, Any], Any]] = {
    "minimum": lambda value, bound: value >= bound,
    "exclusiveMinimum": lambda value, bound: value > bound,
    "maximum": lambda value, bound: value <= bound,
    "exclusiveMaximum": lambda value, bound: value < bound,
}

_KEYWORDS: Mapping[str, Callable[[Any, Any], Any]] = {
    **_BOUNDS,
    "enum": lambda value, words: value in words,
    "pattern": lambda value, pattern: re.search(pattern, value) is not None,
    "format": lambda value, name: FORMATS[name](value),
    "minItems": lambda value, least: len(value) >= least,
    "maxItems": lambda value, most: len(value) <= most,
    "items": lambda value, fragment: all(allows(fragment, one) for one in value),
}


def allows(fragment: Fragment, value: object) -> bool:
    """Whether a fragment of JSON Schema allows a value.

    Parameters
    ----------
    fragment : mapping
        Its ``type``, one word, and the keywords of `_KEYWORDS`.
    value : object
        As a TOML or JSON file gives it.

    Raises
    ------
    KeyError
        If the fragment uses a keyword that is not judged here, which is a fault of the program.

    Examples
    --------
    >>> allows({"type": "number", "exclusiveMinimum": 0}, 0)
    False
    >>> allows({"type": "integer", "minimum": 1}, 4.0)
    True
    """
    if not _TYPES[fragment["type"]](value):
        return False
    return all(_KEYWORDS[word](value, stated) for word, stated in fragment.items() if word != "type")


def outside(fragment: Fragment, values: FloatArray) -> NDArray[np.bool_]:
    """Which numbers, of any shape, are beyond the bounds of a fragment; NaN is not one of them."""
    beyond = np.zeros(values.shape, dtype=bool)
    for word, bound in fragment.items():
        if word in _BOUNDS:
            beyond |= ~_BOUNDS[word](values, bound) & ~np.isnan(values)
    return beyond


def text() -> Fragment:
    """Any text."""
    return {"type": "string"}


def line() -> Fragment:
    """A text of visible characters on one line, perhaps empty."""
    return {"type": "string", "pattern": _LINE_PATTERN, "format": "visible-text"}


def label() -> Fragment:
    """A text of visible characters on one line, at least one; outer spaces do not count."""
    return {"type": "string", "pattern": _LABEL_PATTERN, "format": "visible-text"}


def word(*words: str) -> Fragment:
    """One of a few words."""
    return {"type": "string", "enum": list(words)}


def truth() -> Fragment:
    """True or false."""
    return {"type": "boolean"}


def number(
    *, least: float | None = None, above: float | None = None, most: float | None = None,
    below: float | None = None,
) -> Fragment:  # fmt: skip
    """A finite number within bounds."""
    return {"type": "number", **_bounds(least, above, most, below)}


def whole(least: int, most: int = LARGEST_WHOLE) -> Fragment:
    """A whole number from `least` to `most`."""
    return {"type": "integer", **_bounds(least, None, most, None)}


def items(fragment: Fragment, *, least: int | None = None, most: int | None = None) -> Fragment:
    """A list of `least` to `most` values."""
    limits = {"minItems": least, "maxItems": most}
    stated = {word: limit for word, limit in limits.items() if limit is not None}
    return {"type": "array", "items": fragment, **stated}


def _bounds(
    least: float | None, above: float | None, most: float | None, below: float | None
) -> dict[str, float]:
    stated = {"minimum": least, "exclusiveMinimum": above, "maximum": most, "exclusiveMaximum": below}
    return {word: bound for word, bound in stated.items() if bound is not None}
