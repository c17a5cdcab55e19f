"""Cells that a curve and a charge share by their name, and those that may have lost it to a misspelling."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection

from .parts import Parts

MOST_NAMED = 5  # cells of one kind


def unpaired_cells(parts: Parts) -> tuple[str, ...]:
    """Say which cells have a charge and no curve where others have a curve and no charge.

    Parameters
    ----------
    parts : Parts
        All that was read.

    Returns
    -------
    tuple of str
        One sentence or none. Only constructs count of which some cells have both: where none has, charges
        and curves were recorded from different cells, and where cells are left over on one side alone, not
        every cell gave both.
    """
    with_curve, with_charge = _by_construct(parts.curves.cells), _by_construct(parts.charges.cells)
    told = [
        f"{construct}: {_cells(charges - curves, 'has', 'have')} a charge and no curve, "
        f"{_cells(curves - charges)} a curve and no charge"
        for construct, curves in sorted(with_curve.items())
        if (charges := with_charge[construct]) & curves and charges - curves and curves - charges
    ]
    if not told:
        return ()
    likewise = ""
    if len(told) > 1:
        likewise = f"; likewise in {len(told) - 1} more construct{'s' * (len(told) > 2)}"
    return (f"{told[0]}; only cells of the same name are paired{likewise}",)


def _by_construct(cells: Collection[tuple[str, str]]) -> defaultdict[str, set[str]]:
    by_construct: defaultdict[str, set[str]] = defaultdict(set)
    for construct, cell in cells:
        by_construct[construct].add(cell)
    return by_construct


def _cells(names: Collection[str], one_verb: str = "", verb: str = "") -> str:
    """Cells in a sentence, with their verb."""
    named = sorted(names)
    if len(named) == 1:
        return f"cell {named[0]} {one_verb}".rstrip()
    more = f" and {len(named) - MOST_NAMED} more" if len(named) > MOST_NAMED else ""
    return f"cells {', '.join(named[:MOST_NAMED])}{more} {verb}".rstrip()
