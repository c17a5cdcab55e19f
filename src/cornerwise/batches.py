"""Donors and days: what the units of a comparison are when cells were recorded in batches.

Cells of one batch share whatever that batch does to them. When the constructs that are compared were
recorded in the same batches, the effect of a batch cancels within it; when each construct has its own
batches, batch means are all there is to count. Which of the two holds is decided for each comparison.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from .blocks import BatchMeans, Blocks
from .ledger import Ledger
from .sources import CellSource, Component, Source

Rule = Literal["cells", "within batches", "batch means"]
Family = Literal["medians", "charges", "paired cells"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Units:
    """What was counted in one comparison, and why."""

    family: Family
    rule: Rule
    cells: int
    batches: int  # of all constructs together; 0 when none is stated
    reason: str  # a clause; empty when no batch is stated


def _fully_stated(source: CellSource) -> bool:
    return bool(source.batches) and None not in source.batches


def _decide(
    family: Family, sources: Sequence[CellSource], signs: Sequence[float]
) -> tuple[Units, list[Source]]:
    """Units of one family of cells, and the sources that speak in their place."""
    cells = sum(source.values.shape[1] for source in sources)
    stated = {batch for source in sources for batch in source.batches if batch is not None}

    def units(rule: Rule, reason: str) -> Units:
        return Units(family=family, rule=rule, cells=cells, batches=len(stated), reason=reason)

    if not stated:
        return units("cells", ""), []
    if not all(map(_fully_stated, sources)):
        return units("cells", "some cells have no batch"), []
    if not all(source.fully_shared for source in sources):
        return units("cells", "only some cells show both charge and median"), []
    if len(sources) > 1 and len(stated) > 1:
        blocks = Blocks(sources, signs)
        if blocks.estimable and blocks.has_scatter:
            return units("within batches", "the constructs share their batches, whose effects cancel"), [
                blocks
            ]
    if all(len(set(source.batches)) > 1 for source in sources):
        return units("batch means", "the constructs do not share their batches"), list(
            map(BatchMeans, sources)
        )
    if len(stated) == 1:
        return units("cells", "all cells come from one batch"), []
    return units("cells", "a construct has a single batch, so differences between batches are left out"), []


def regroup(
    ledger: Ledger, corners: Sequence[tuple[str, float]], shared: Collection[str] = ()
) -> tuple[Ledger, tuple[Units, ...]]:
    """Sources of a comparison, grouped by the batches its constructs were recorded in.

    Parameters
    ----------
    ledger : Ledger
        All sources of the campaign.
    corners : sequence of (str, float)
        Constructs that are compared, and the sign of each.
    shared : collection of str
        What `shared_batches` returns.

    Returns
    -------
    Ledger, tuple of Units
        The ledger to compute this comparison with, and what is counted in each family of cells. A number
        that only some of the constructs were measured for is no comparison: each is then counted as in
        `alone`.
    """
    grouped: list[Source] = []
    decided: list[Units] = []
    for family, sources, signs in _families(ledger, corners):
        if len(sources) == len(corners):
            found = [_decide(family, sources, signs)]
        else:
            found = [_decide_alone(family, source, shared) for source in sources]
        decided.extend(units for units, _ in found)
        grouped.extend(source for _, fresh in found for source in fresh)
    return ledger.regrouped(grouped), tuple(decided)


def _families(
    ledger: Ledger, corners: Sequence[tuple[str, float]]
) -> list[tuple[Family, list[CellSource], list[float]]]:
    """Cell sources of the medians (paired ones too) and of lone charges, with their constructs' signs."""
    medians: list[tuple[CellSource, float]] = []
    charges: list[tuple[CellSource, float]] = []
    for label, sign in corners:
        median = ledger.source_of(Component("median", label))
        charge = ledger.source_of(Component("charge", label))
        if isinstance(median, CellSource):
            medians.append((median, sign))
        if isinstance(charge, CellSource) and charge is not median:
            charges.append((charge, sign))
    paired = any(len(source.components) > 1 for source, _ in medians)
    named: list[tuple[Family, list[tuple[CellSource, float]]]] = [
        ("paired cells" if paired else "medians", medians),
        ("charges", charges),
    ]
    return [(family, [c for c, _ in found], [s for _, s in found]) for family, found in named if found]


def shared_batches(ledger: Ledger) -> frozenset[str]:
    """Batches that more than one construct of the campaign was recorded in."""
    constructs: dict[str, set[str]] = {}
    for source in ledger.sources:
        if isinstance(source, CellSource):
            for batch in source.batches:
                if batch is not None:
                    constructs.setdefault(batch, set()).add(source.components[0].construct)
    return frozenset(batch for batch, labels in constructs.items() if len(labels) > 1)


def alone(ledger: Ledger, label: str, shared: Collection[str]) -> tuple[Ledger, tuple[Units, ...]]:
    """Sources of one construct by itself, counted by batch where its batches are its own.

    Parameters
    ----------
    ledger : Ledger
        All sources of the campaign.
    label : str
        The construct.
    shared : collection of str
        What `shared_batches` returns.

    Returns
    -------
    Ledger, tuple of Units
        A construct that shares a batch with another is counted by cells: its energy then holds for the
        batches that were recorded.
    """
    found = [
        _decide_alone(family, source, shared)
        for family, sources, _ in _families(ledger, [(label, 1.0)])
        for source in sources
    ]
    grouped = [source for _, fresh in found for source in fresh]
    return ledger.regrouped(grouped), tuple(units for units, _ in found)


def _decide_alone(family: Family, source: CellSource, shared: Collection[str]) -> tuple[Units, list[Source]]:
    units, fresh = _decide(family, [source], [1.0])
    if units.rule == "batch means" and any(batch in shared for batch in source.batches):
        reason = "other constructs share the batches, so it holds for the batches recorded"
        return replace(units, rule="cells", reason=reason), []
    if units.rule == "batch means":
        return replace(units, reason="it has batches of its own"), fresh
    return units, fresh


_CONSEQUENCES: dict[Rule, str] = {
    "cells": "cells are the units",
    "within batches": "it is formed within batches and cells are the units",
    "batch means": "batch means are the units",
}


def units_notes(what: str, counted: Sequence[tuple[str, tuple[Units, ...]]]) -> tuple[str, ...]:
    """Sentences on what was counted, for comparisons where a batch is stated.

    Parameters
    ----------
    what : str
        What is counted for, such as "interaction".
    counted : sequence of (str, tuple of Units)
        Name of each comparison and its units.

    Returns
    -------
    tuple of str
        One sentence for all comparisons that follow the same rule for the same reason, with the numbers of
        batches and cells.
    """
    groups: dict[tuple[Rule, str], list[tuple[str, Units]]] = {}
    for name, families in counted:
        for units in families:
            if units.batches:
                groups.setdefault((units.rule, units.reason), []).append((name, units))
    return tuple(
        f"{what} of {_listed([name for name, _ in group])} "
        f"({' and '.join(dict.fromkeys(units.family for _, units in group))}): {reason}; "
        f"{_CONSEQUENCES[rule]} ({_span([units.batches for _, units in group], 'batch', 'batches')}, "
        f"{_span([units.cells for _, units in group], 'cell', 'cells')})"
        for (rule, reason), group in groups.items()
    )


def _listed(names: Sequence[str]) -> str:
    """The names, each once, or the first two and how many more."""
    each = list(dict.fromkeys(names))
    return ", ".join(each) if len(each) <= 3 else f"{', '.join(each[:2])} and {len(each) - 2} more"


def _span(numbers: Sequence[int], one: str, several: str) -> str:
    low, high = min(numbers), max(numbers)
    text = f"{low}" if low == high else f"{low} to {high}"
    return f"{text} {one if high == 1 else several}"
