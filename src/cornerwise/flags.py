"""Doubt as data: the flags a cell, a construct or a cycle can carry, each a sentence with its number."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal, get_args

FlagCode = Literal[
    "unsaturated-low",
    "unsaturated-high",
    "sloping-plateau",
    "not-monotonic",
    "coarse-steps",
    "noisy",
    "area-disagrees",
    "midpoint-misleads",
    "few-cells",
    "single-batch",
    "charge-shift",
    "charge-nonadditive",
    "charge-assumed",
    "charge-methods-differ",
    "charge-lower-bound",
    "charge-implausible",
    "mixed-ranges",
    "mixed-protocol",
    "outlying-cell",
]

FLAG_CODES: tuple[FlagCode, ...] = get_args(FlagCode)


@dataclass(frozen=True, kw_only=True, slots=True)
class Flag:
    """One doubt about one subject."""

    code: FlagCode
    subject: str  # "construct/cell", a construct's label or a cycle's name
    construct: str | None = None  # the construct it is about; None for a cycle
    cell: str | None = None  # the cell of that construct it is about; None for the whole construct
    message: str  # one sentence for the user: the number that raised it and what to do
    value: float | None = None  # the number that raised it, in the unit the message names
    limit: float | None = None  # the limit it crossed, same unit


def codes(flags: Iterable[Flag], also: Iterable[str] = ()) -> tuple[FlagCode, ...]:
    """Codes of `flags` and those in `also`, each once, in the fixed order of `FLAG_CODES`."""
    present = {flag.code for flag in flags} | set(also)
    return tuple(code for code in FLAG_CODES if code in present)
