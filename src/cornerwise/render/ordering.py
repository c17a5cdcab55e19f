"""The order in which people read interactions, and what belongs to which row."""

from __future__ import annotations

import string
from collections.abc import Hashable, Iterable, Sequence
from typing import TypeVar

from ..flags import FLAG_CODES
from ..result import InteractionRow

KeyT = TypeVar("KeyT", bound=Hashable)
ItemT = TypeVar("ItemT")


def by_strength(rows: Sequence[InteractionRow]) -> list[InteractionRow]:
    """Rows by rank, those without a rank last."""
    return sorted(rows, key=lambda row: (row.rank is None, row.rank or 0))


def grouped(pairs: Iterable[tuple[KeyT, ItemT]]) -> dict[KeyT, list[ItemT]]:
    """Items by key, both in the order they come in."""
    groups: dict[KeyT, list[ItemT]] = {}
    for key, item in pairs:
        groups.setdefault(key, []).append(item)
    return groups


def flag_marks(codes: Iterable[str]) -> dict[str, str]:
    """A letter for every code that occurs, in the fixed order of the codes."""
    present = set(codes)
    return dict(zip((code for code in FLAG_CODES if code in present), string.ascii_lowercase, strict=False))
