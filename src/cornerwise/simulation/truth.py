"""What is true of a simulated campaign, from the partition function of each construct's states.

Nothing here is what somebody typed. Where several states share the charge of an end (an activated and an
inactivated one, say) the energy of the end is that of all of them together. So mutations whose effects on
single states add up can have an interaction energy all the same: the one that charge times median voltage
gives (`cornerwise.gating`; linked functions, Wyman 1964).
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from ..mutations import Cycle, find_cycles, in_residue_order
from ..tables import Table, Value, flat_values
from ..units import energy_per_e0_mv
from .model import Model
from .schemes import scheme_of


@dataclass(frozen=True, kw_only=True, slots=True)
class ConstructTruth:
    """One construct."""

    columns: ClassVar[tuple[str, ...]] = (
        "construct", "mutations", "median_mV", "charge_e0", "energy", "energy_unit",
    )  # fmt: skip

    construct: str
    mutations: tuple[str, ...]
    median_mv: float
    charge_e0: float
    energy: float  # activation free energy at the reference voltage, `energy_unit` per channel
    energy_unit: str

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class CycleTruth:
    """One cycle."""

    columns: ClassVar[tuple[str, ...]] = (
        "cycle", "order", "mutations", "interaction", "energy_unit", "shortcut", "charge_interaction_e0",
    )  # fmt: skip

    cycle: str
    order: int
    mutations: tuple[str, ...]
    interaction: float  # `energy_unit` per channel
    energy_unit: str
    shortcut: float  # what median voltages with the wild type's charge would give
    charge_interaction_e0: float

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class Truth:
    """All constructs and all cycles among them."""

    constructs: Table[ConstructTruth]  # the wild type first
    cycles: Table[CycleTruth]


def truth_of(model: Model) -> Truth:
    """What is true of the campaigns that are drawn from `model`.

    Parameters
    ----------
    model : Model
        The gating model, the mutations' effects and the cycles.

    Returns
    -------
    Truth
        Median voltage, total charge and energy of each construct; interaction energy, charge interaction
        and shortcut of each complete cycle, at the reference voltage of the campaign's settings.
    """
    settings = model.settings
    per = energy_per_e0_mv(settings.energy_unit, settings.temperature_c)
    rows = []
    for label, mutations in model.genotypes.items():
        scheme = scheme_of(model, mutations)
        rows.append(
            ConstructTruth(
                construct=label,
                mutations=tuple(map(str, in_residue_order(mutations))),
                median_mv=scheme.median_mv,
                charge_e0=scheme.total_charge_e0,
                energy=per
                * (scheme.activation_energy_mev - scheme.total_charge_e0 * settings.reference_voltage_mv),
                energy_unit=settings.energy_unit,
            )
        )
    by_label = {row.construct: row for row in rows}
    cycles = find_cycles({mutations: label for label, mutations in model.genotypes.items()})
    told = [_cycle(cycle, by_label, per, settings.reference_voltage_mv) for cycle in cycles]
    return Truth(constructs=Table(ConstructTruth, rows), cycles=Table(CycleTruth, told))


def _cycle(
    cycle: Cycle, constructs: dict[str, ConstructTruth], per: float, reference_mv: float
) -> CycleTruth:
    corners = [(corner.sign, constructs[corner.label]) for corner in cycle.corners]
    wild_type = corners[0][1]
    shortcut = sum(sign * wild_type.charge_e0 * (row.median_mv - reference_mv) for sign, row in corners)
    return CycleTruth(
        cycle=cycle.name,
        order=cycle.order,
        mutations=tuple(map(str, cycle.mutations)),
        interaction=sum(sign * row.energy for sign, row in corners),
        energy_unit=wild_type.energy_unit,
        shortcut=per * shortcut,
        charge_interaction_e0=sum(sign * row.charge_e0 for sign, row in corners),
    )
