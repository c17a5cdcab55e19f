"""One check of the package against something outside the project."""

from __future__ import annotations

import functools
from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import pytest

Value = float | tuple[float, ...] | str

# published: these digits were read; recomputed: arithmetic on digits that were read; memory: recalled;
# practice: what everybody in the trade would say, for which there is no source.
Standing = Literal["published", "recomputed", "memory", "practice"]

PRACTICE = "common practice, no source"


@dataclass(frozen=True, kw_only=True, eq=False)
class Check:
    """What is expected, from where, and a call that gives what the package makes of it."""

    what: str
    source: str  # its short name in tests/reference, or `PRACTICE`
    expected: Value
    obtained: Callable[[], Value]
    why: str  # the reason for the tolerance, and every known difference
    within: float = 0.0  # largest difference; 0 for words, which must be the same
    relative: bool = False  # whether `within` is a fraction of the expected value
    form: str = ".6g"  # shows what was obtained to digits that are the same on every machine
    printed: str | None = None  # the expected value as the source prints it, where that is not plain
    standing: Standing = "published"


@functools.cache
def obtained(check: Check) -> Value:
    """What the package gives, computed once for the test and the page."""
    return check.obtained()


def agrees(check: Check) -> bool:
    """Whether the package gives what is expected."""
    if isinstance(check.expected, str):
        return obtained(check) == check.expected
    allowed = {"rel": check.within, "abs": 0.0} if check.relative else {"abs": check.within, "rel": 0.0}
    return bool(obtained(check) == pytest.approx(check.expected, **allowed))
