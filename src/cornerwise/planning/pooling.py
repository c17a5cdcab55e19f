"""Scatter lent to constructs that have too few cells to show one of their own."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import NamedTuple

from ..ledger import Ledger
from ..sources import CellSource, Source, StatedSource


class Scatter(NamedTuple):
    """Standard deviation between cells and the degrees of freedom it is known with."""

    sd: float
    dof: float


Scatters = Mapping[str, Scatter]  # by kind of component: "median" (mV), "charge" (e0)


def pooled_scatters(ledger: Ledger) -> Scatters:
    """Scatter of median voltages and of total charges over all constructs, by kind of component.

    Parameters
    ----------
    ledger : Ledger
        All sources of the campaign.

    Returns
    -------
    mapping of str to Scatter
        ``"median"`` (mV) and ``"charge"`` (e0), each where two cells or more of a construct show it.
    """
    squares: dict[str, list[tuple[float, float]]] = {"median": [], "charge": []}
    for source in ledger.sources:
        for place, component in enumerate(source.components):
            found = _own(source, place) if component.kind in squares else None
            if found is not None:
                squares[component.kind].append(found)
    return {
        kind: Scatter(math.sqrt(math.fsum(s for s, _ in some) / dof), dof)
        for kind, some in squares.items()
        if (dof := math.fsum(dof for _, dof in some)) > 0
    }


def _own(source: Source, place: int) -> tuple[float, float] | None:
    """Sum of squares and degrees of freedom of one number; None where it shows no scatter."""
    if isinstance(source, CellSource):
        dof = float(source.counts[place]) - 1
        return (float(source.covariance[place, place]) * dof, dof) if dof >= 1 else None
    if isinstance(source, StatedSource) and 1 <= source.dof < math.inf:
        return source.std_uncertainty**2 * (source.dof + 1) * source.dof, source.dof
    return None
