"""Interaction energies of cycles: sums over corners of what each corner's energy is made of."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .energies import EnergyBook
from .mutations import Cycle
from .sources import Derived, linear, product

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class Interaction:
    """What a cycle's corners add up to; None where a corner's charge was never measured."""

    cycle: Cycle
    energy: Derived  # I = sum s_k dG_k at the reference voltage, campaign's unit, per channel
    shortcut: Derived  # F Q_wt sum s_k Vm_k, same unit
    shortcut_bias: Derived | None  # I - shortcut with every corner's own measured charge, same unit
    charge: Derived | None  # J = sum s_k Q_k, e0


def interact(cycle: Cycle, book: EnergyBook, wild_type: str) -> Interaction:
    """Add up a cycle of any order.

    Parameters
    ----------
    cycle : Cycle
        Complete; every corner has an entry in `book`.
    book : EnergyBook
        Energies of the campaign.
    wild_type : str
        Label of the construct whose charge the shortcut uses for all corners.

    Returns
    -------
    Interaction
        ``I - shortcut = F sum s_k (Q_k - Q_wt) Vm_k`` when the charges are measured.
    """
    corners = [(float(corner.sign), book.energies[corner.label]) for corner in cycle.corners]
    medians = linear((sign, corner.median) for sign, corner in corners)
    reference = book.energies[wild_type]
    shortcut = linear([(book.per_e0_mv, product(reference.charge, medians))])
    bias = charge = None
    own = [(sign, corner.own_charge, corner.measured_energy) for sign, corner in corners]
    full = [(sign, q, energy) for sign, q, energy in own if q is not None and energy is not None]
    if len(full) == len(corners) and reference.own_charge is not None:
        charge = linear((sign, q) for sign, q, _ in full)
        one_charge = linear([(book.per_e0_mv, product(reference.own_charge, medians))])
        bias = linear([*((sign, energy) for sign, _, energy in full), (-1.0, one_charge)])
    return Interaction(
        cycle=cycle,
        energy=linear((sign, corner.energy) for sign, corner in corners),
        shortcut=shortcut,
        shortcut_bias=bias,
        charge=charge,
    )


def interaction_draws(cycle: Cycle, book: EnergyBook) -> FloatArray:
    """Bootstrap replicates of a cycle's interaction energy, shape (replicates,), jointly with all others."""
    total = np.zeros(book.ledger.replicates)
    for corner in cycle.corners:
        total += corner.sign * book.energy_draws(corner.label)
    return total


def strength_ranks(energies: Sequence[float]) -> list[int]:
    """Rank of each interaction by absolute size, 1 for the strongest; ties keep the order given."""
    order = np.argsort(-np.abs(np.asarray(energies, dtype=float)), kind="stable")
    ranks = np.empty(len(order), dtype=int)
    ranks[order] = np.arange(1, len(order) + 1)
    return [int(rank) for rank in ranks]


def rank_intervals(draws: FloatArray, confidence: float) -> list[tuple[int, int]]:
    """Percentile intervals of the rank by absolute size.

    Parameters
    ----------
    draws : ndarray, shape (n_cycles, n_replicates)
        Joint replicates, so that what two cycles share does not separate them.
    confidence : float
        Level, between 0 and 1.

    Returns
    -------
    list of (int, int)
        Lowest and highest rank, one pair a cycle.
    """
    order = np.argsort(-np.abs(draws), axis=0, kind="stable")
    ranks = np.empty_like(order)
    np.put_along_axis(ranks, order, np.arange(1, len(draws) + 1)[:, np.newaxis], axis=0)
    levels = [(1 - confidence) / 2, (1 + confidence) / 2]
    low = np.quantile(ranks, levels[0], axis=1, method="lower")
    high = np.quantile(ranks, levels[1], axis=1, method="higher")
    return [(int(a), int(b)) for a, b in zip(low, high, strict=True)]
