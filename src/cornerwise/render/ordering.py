"""The order in which people read interactions, and what belongs to which row."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TypeVar

from ..result import InteractionRow

ItemT = TypeVar("ItemT")


def by_strength(rows: Sequence[InteractionRow]) -> list[InteractionRow]:
    """Rows by rank, those without a rank last."""
    return sorted(rows, key=lambda row: (row.rank is None, row.rank or 0))


def grouped(pairs: Iterable[tuple[str, ItemT]]) -> dict[str, list[ItemT]]:
    """Items by key, both in the order they come in."""
    groups: dict[str, list[ItemT]] = {}
    for key, item in pairs:
        groups.setdefault(key, []).append(item)
    return groups
