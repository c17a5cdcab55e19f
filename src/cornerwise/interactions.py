"""Interaction energies of cycles: sums over corners of what each corner's energy is made of."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .batches import Units, regroup
from .energies import EnergyBook
from .ledger import Ledger
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
    ledger: Ledger  # the sources, grouped by batch where that is due
    units: tuple[Units, ...]  # what is counted in each family of cells


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
    ledger, units = regroup(
        book.ledger, [(corner.label, float(corner.sign)) for corner in cycle.corners], book.shared_batches
    )
    return Interaction(
        cycle=cycle,
        energy=ledger.adjusted(linear((sign, corner.energy) for sign, corner in corners)),
        shortcut=ledger.adjusted(shortcut),
        shortcut_bias=None if bias is None else ledger.adjusted(bias),
        charge=None if charge is None else ledger.adjusted(charge),
        ledger=ledger,
        units=units,
    )


def interaction_draws(
    interaction: Interaction, book: EnergyBook, *, conservative: bool = False
) -> FloatArray:
    """Replicates of a cycle's interaction energy, shape (replicates,), jointly with all others.

    Products of charge and median are drawn as products; where batches are the units or are compared within,
    the replicates are those of the energy's first-order expansion. Cells are resampled; `conservative` draws
    every source from its Student's t distribution instead.
    """
    if interaction.ledger is not book.ledger:
        ledger = interaction.ledger.conservatively() if conservative else interaction.ledger
        return ledger.linear_draws(interaction.energy)
    total = np.zeros(book.ledger.replicates)
    for corner in interaction.cycle.corners:
        total += corner.sign * book.energy_draws(corner.label, conservative=conservative)
    return total
