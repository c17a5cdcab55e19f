"""The rows of every table that comes out: all that is needed to show them, and nothing to compute."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from .batches import Units
from .mutations import OppositeCharges
from .tables import Value, flat_values
from .units import EnergyNumber
from .verdicts import ChargeVerdict, Favours, InteractionVerdict, ShortcutVerdict


@dataclass(frozen=True, kw_only=True, slots=True)
class DrawnCurve:
    """A smooth Q-V curve at the points where it is drawn."""

    voltage_mv: tuple[float, ...]
    q: tuple[float, ...]  # scaled 0..1


@dataclass(frozen=True, kw_only=True, slots=True)
class CornerCharge:
    """Why one mutant's total charge was judged as it was."""

    construct: str
    source: str | None  # None when never measured
    ratio: float | None  # to the wild type's charge
    low: float | None
    high: float | None
    verdict: ChargeVerdict  # the error of all corners of the cycle held together
    passing_margin: float | None  # smallest margin within which it would count as equal
    cells_needed: int | None  # values on mutant and wild type each for a verdict at this scatter


@dataclass(frozen=True, kw_only=True, slots=True)
class Breakdown:
    """Changes of one assumed charge, as fractions of it, that would undo what is said of the interaction."""

    construct: str
    fraction: float | None  # brings the interaction's interval to 0; None where it includes 0 already
    verdict_fraction: float  # from here on its interval no longer bears the verdict out


@dataclass(frozen=True, kw_only=True, slots=True)
class ProfilePoint:
    """Interaction energy at one voltage, in the row's unit."""

    voltage_mv: float
    interaction: EnergyNumber
    low: EnergyNumber | None
    high: EnergyNumber | None


@dataclass(frozen=True, kw_only=True, slots=True)
class Edge:
    """What one mutation adds to the activation free energy, between two corners of a cycle."""

    start: str  # construct without the mutation
    end: str  # construct with it
    mutation: str
    difference: EnergyNumber | None  # dG(end) - dG(start), in the row's unit
    std_uncertainty: EnergyNumber | None  # what both corners share counted once


@dataclass(frozen=True, kw_only=True, slots=True)
class InteractionRow:
    """One cycle. Energies in `energy_unit` per channel; None where a field does not apply."""

    columns: ClassVar[tuple[str, ...]] = (
        "cycle", "order", "mutations", "wild_type", "interaction", "energy_unit", "std_uncertainty", "dof",
        "low", "high", "boot_low", "boot_high", "p_value", "p_adjusted", "shortcut", "shortcut_bias",
        "shortcut_bias_low", "shortcut_bias_high", "shortcut_verdict", "charge_interaction_e0",
        "charge_interaction_low", "charge_interaction_high", "interaction_verdict", "favours", "rank",
        "rank_low", "rank_high", "flags",
    )  # fmt: skip

    cycle: str
    order: int
    mutations: tuple[str, ...]
    wild_type: str
    corners: tuple[tuple[str, int], ...]  # label and sign
    interaction: EnergyNumber | None
    energy_unit: str
    std_uncertainty: EnergyNumber | None
    dof: float | None
    low: EnergyNumber | None
    high: EnergyNumber | None
    boot_low: EnergyNumber | None
    boot_high: EnergyNumber | None
    monte_carlo_low: EnergyNumber | None  # from Student's t distributions of the inputs, where asked for
    monte_carlo_high: EnergyNumber | None
    p_value: float | None
    p_adjusted: float | None
    shortcut: EnergyNumber | None
    shortcut_bias: EnergyNumber | None
    shortcut_bias_low: EnergyNumber | None
    shortcut_bias_high: EnergyNumber | None
    shortcut_verdict: ShortcutVerdict
    charge_interaction_e0: float | None
    charge_interaction_low: float | None
    charge_interaction_high: float | None
    interaction_verdict: InteractionVerdict
    favours: Favours | None
    rank: int | None
    rank_low: int | None
    rank_high: int | None
    strength_low: EnergyNumber | None  # lower limit of the absolute size; 0 where the interval includes 0
    first_probability: float | None  # of being among the first, as many as the settings say
    shrunken: EnergyNumber | None  # the interaction less what chance is likely to have added
    simultaneous_low: EnergyNumber | None  # of the interval that holds all cycles at once, where asked for
    simultaneous_high: EnergyNumber | None
    opposite_charges: OppositeCharges | None  # of the native pair
    distance_angstrom: float | None  # between the pair's side chains, where known
    distance_within_chain_angstrom: float | None = None  # both residues in one chain
    distance_across_chains_angstrom: float | None = None  # each residue in another chain
    charged_distance_angstrom: float | None = None  # between charged atoms
    distance_atoms: str | None = None  # the two atoms, their residues and chains
    distance_source: str | None = None  # file and citation
    distance_definition: str | None = None  # what was measured
    flags: tuple[str, ...]
    corner_charges: tuple[CornerCharge, ...]  # of the mutants
    passing_margin: float | None  # smallest charge margin that all mutants pass
    passing_tolerance: EnergyNumber | None  # smallest tolerance that holds the bias's interval
    charge_cells_needed: int | None  # charge values a construct for a verdict on every mutant
    change_per_10_mv: EnergyNumber | None  # of the interaction
    change_per_10_mv_low: EnergyNumber | None
    change_per_10_mv_high: EnergyNumber | None
    offset_contribution: EnergyNumber | None  # standard uncertainty from the stated voltage offset
    breakdown: tuple[Breakdown, ...]  # where a charge is assumed and the verdict says more than unresolved
    profile: tuple[ProfilePoint, ...]  # where the charges do not add up
    units: tuple[Units, ...]  # what was counted in each family of cells: cells, or batches, and why
    edges: tuple[Edge, ...] = ()  # of the square, the cube, ...

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class RankRow:
    """One cycle in order of strength, with what can be said about that order."""

    columns: ClassVar[tuple[str, ...]] = (
        "rank", "cycle", "interaction", "energy_unit", "low", "high", "strength_low", "rank_low", "rank_high",
        "first_probability", "shrunken", "p_adjusted", "interaction_verdict", "opposite_charges",
        "distance_A", "distance_within_chain_A", "distance_across_chains_A", "charged_distance_A",
        "distance_atoms", "distance_source", "distance_definition",
    )  # fmt: skip

    rank: int
    cycle: str
    interaction: EnergyNumber | None
    energy_unit: str
    low: EnergyNumber | None
    high: EnergyNumber | None
    strength_low: EnergyNumber | None
    rank_low: int | None
    rank_high: int | None
    first_probability: float | None
    shrunken: EnergyNumber | None
    p_adjusted: float | None
    interaction_verdict: InteractionVerdict
    opposite_charges: OppositeCharges | None
    distance_angstrom: float | None
    distance_within_chain_angstrom: float | None
    distance_across_chains_angstrom: float | None
    charged_distance_angstrom: float | None
    distance_atoms: str | None
    distance_source: str | None
    distance_definition: str | None

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class BackgroundRow:
    """An interaction of lower order in one background of a cycle of order 3 or above."""

    columns: ClassVar[tuple[str, ...]] = (
        "cycle", "mutations", "background", "order", "interaction", "energy_unit", "std_uncertainty", "dof",
        "low", "high", "p_value",
    )  # fmt: skip

    cycle: str  # the one of higher order
    mutations: tuple[str, ...]  # that interact
    background: tuple[str, ...]  # that every corner carries; empty for the wild type
    order: int
    interaction: EnergyNumber | None
    energy_unit: str
    std_uncertainty: EnergyNumber | None
    dof: float | None
    low: EnergyNumber | None
    high: EnergyNumber | None
    p_value: float | None  # not adjusted

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class ConstructRow:
    """One construct. Energies in `energy_unit` per channel; None where a field does not apply."""

    columns: ClassVar[tuple[str, ...]] = (
        "construct", "mutations", "cells", "median_mV", "median_sem_mV", "charge_e0", "charge_sem_e0",
        "charge_n", "charge_source", "energy", "energy_unit", "std_uncertainty", "dof", "low", "high",
        "charge_ratio", "charge_ratio_low", "charge_ratio_high", "charge_verdict", "flags",
    )  # fmt: skip

    construct: str
    mutations: tuple[str, ...]
    cells_used: int
    median_mv: float | None
    median_sem_mv: float | None
    charge_e0: float | None
    charge_sem_e0: float | None
    charge_n: int | None
    charge_source: str
    energy: EnergyNumber | None
    energy_unit: str
    std_uncertainty: EnergyNumber | None
    dof: float | None
    low: EnergyNumber | None
    high: EnergyNumber | None
    charge_ratio: float | None
    charge_ratio_low: float | None
    charge_ratio_high: float | None
    charge_verdict: ChargeVerdict | None  # None for the wild type
    charge_passing_margin: float | None  # smallest margin within which the charge counts as equal
    charge_cells_needed: int | None  # values on mutant and wild type each for a verdict at this scatter
    midpoint_mv: float | None  # mean over cells of the voltage where q = 0.5
    midpoint_energy: EnergyNumber | None  # the same charge times the midpoint
    sigmoid_midpoint_mv: float | None  # of one sigmoid fitted to each cell
    slope_charge_e0: float | None  # apparent charge from that sigmoid's slope
    sigmoid_energy: EnergyNumber | None  # apparent charge times that midpoint
    flags: tuple[str, ...]
    units: tuple[Units, ...]  # what its energy's uncertainty counts in each family of cells
    curve: DrawnCurve | None  # averaged over the cells that are used; None without curves
    charge_values: tuple[float, ...] = ()  # e0 per channel, its own cell by cell; empty for summaries
    median_uncertainty_mv: float | None = None  # of `median_mv`: cells' scatter and what was extrapolated

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class SubunitRow:
    """One cycle's energy shared by the subunits of a homomer; the only place where it is divided."""

    columns: ClassVar[tuple[str, ...]] = (
        "cycle", "subunits", "interaction_per_channel", "interaction_per_subunit",
        "std_uncertainty_per_subunit", "low_per_subunit", "high_per_subunit", "energy_unit",
    )  # fmt: skip

    cycle: str
    subunits: int
    interaction_per_channel: EnergyNumber | None
    interaction_per_subunit: EnergyNumber | None
    std_uncertainty_per_subunit: EnergyNumber | None
    low_per_subunit: EnergyNumber | None
    high_per_subunit: EnergyNumber | None
    energy_unit: str

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class MidpointRow:
    """Midpoint-based numbers of one construct beside its median-based energy."""

    columns: ClassVar[tuple[str, ...]] = (
        "construct", "median_mV", "energy", "energy_unit", "midpoint_mV", "midpoint_energy",
        "sigmoid_midpoint_mV", "slope_charge_e0", "sigmoid_energy",
    )  # fmt: skip

    construct: str
    median_mv: float | None
    energy: EnergyNumber | None
    energy_unit: str
    midpoint_mv: float | None
    midpoint_energy: EnergyNumber | None
    sigmoid_midpoint_mv: float | None
    slope_charge_e0: float | None
    sigmoid_energy: EnergyNumber | None

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class CellRow:
    """One cell's curve and what was read off it."""

    columns: ClassVar[tuple[str, ...]] = (
        "construct", "cell", "batch", "median_mV", "midpoint_mV", "low_plateau", "high_plateau", "points",
        "used", "flags",
    )  # fmt: skip

    construct: str
    cell: str
    batch: str | None
    median_mv: float | None
    midpoint_mv: float | None
    plain_median_mv: float | None  # area between plateaus without a model
    low_plateau: float | None
    high_plateau: float | None
    points: int
    used: bool
    reason: str | None  # why it is not used
    flags: tuple[str, ...]
    voltage_mv: tuple[float, ...]
    charge: tuple[float, ...]  # as recorded, the cell's own scale

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class BudgetRow:
    """What one source of error adds to one cycle's uncertainty, in the unit of its interaction."""

    columns: ClassVar[tuple[str, ...]] = ("cycle", "source", "contribution", "share")

    cycle: str
    source: str
    contribution: EnergyNumber | None
    share: float | None

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)
