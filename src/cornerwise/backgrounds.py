"""The lower orders inside a cycle: each pair, triple, ... in every background the cycle offers."""

from __future__ import annotations

import math
from collections.abc import Sequence
from itertools import combinations

from .campaign import Settings
from .energies import EnergyBook
from .interactions import interact
from .intervals import t_interval, t_p_value
from .mutations import Corner, Cycle, Mutation
from .rows import BackgroundRow
from .tables import available


def conditional_cycles(cycle: Cycle) -> list[tuple[Cycle, tuple[Mutation, ...]]]:
    """Cycles of lower order inside one of higher order, with the mutations that all their corners carry.

    Parameters
    ----------
    cycle : Cycle
        Of order 3 or above for there to be any.

    Returns
    -------
    list of (Cycle, tuple of Mutation)
        By order, then in residue order; the wild-type background first.

    Notes
    -----
    An interaction of one order more is the change that its additional mutation makes to one of these:
    I(a, b, c) = I(a, b with c) - I(a, b without c).
    """
    labels = {frozenset(corner.mutations): corner.label for corner in cycle.corners}
    found = []
    for order in range(2, cycle.order):
        for chosen in combinations(cycle.mutations, order):
            others = [mutation for mutation in cycle.mutations if mutation not in chosen]
            for size in range(len(others) + 1):
                found += [
                    (_inside(chosen, background, labels), background)
                    for background in combinations(others, size)
                ]
    return found


def _inside(
    chosen: tuple[Mutation, ...], background: tuple[Mutation, ...], labels: dict[frozenset[Mutation], str]
) -> Cycle:
    corners = [
        Corner(
            label=labels[frozenset(carried) | frozenset(background)],
            mutations=carried,
            sign=(-1) ** (len(chosen) - size),
        )
        for size in range(len(chosen) + 1)
        for carried in combinations(chosen, size)
    ]
    return Cycle(name="/".join(map(str, chosen)), mutations=chosen, corners=tuple(corners))


def background_rows(cycles: Sequence[Cycle], book: EnergyBook, settings: Settings) -> list[BackgroundRow]:
    """Rows of every interaction of lower order inside the cycles of order 3 and above.

    Parameters
    ----------
    cycles : sequence of Cycle
        In the order the rows shall have.
    book : EnergyBook
        Energies of the campaign.
    settings : Settings
        Confidence and unit.
    """
    rows = []
    for cycle in cycles:
        for lower, background in conditional_cycles(cycle):
            found = interact(lower, book, settings.wild_type)
            value, spread = found.energy.value, found.ledger.spread(found.energy)
            u = math.sqrt(spread.variance)
            low, high = t_interval(value, u, spread.dof, settings.confidence)
            rows.append(
                BackgroundRow(
                    cycle=cycle.name,
                    mutations=tuple(map(str, lower.mutations)),
                    background=tuple(map(str, background)),
                    order=lower.order,
                    interaction=available(value),
                    energy_unit=settings.energy_unit,
                    std_uncertainty=available(u),
                    dof=available(spread.dof),
                    low=available(low),
                    high=available(high),
                    p_value=available(t_p_value(value, u, spread.dof)),
                )
            )
    return rows
