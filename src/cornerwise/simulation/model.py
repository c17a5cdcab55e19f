"""A gating model, what mutations do to it, and how the constructs are recorded; all of it frozen."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from itertools import combinations
from typing import Literal

from ..campaign import Settings
from ..mutations import Mutation, Mutations, joined

Order = Literal["sequence", "any"]
Scatter = Literal["normal", "skewed", "heavy-tailed"]
ChargeForm = Literal["cells", "summaries"]

REST, ACTIVATED = "rest", "activated"  # names of the two end states


@dataclass(frozen=True, kw_only=True, slots=True)
class Step:
    """One move from rest towards the activated state, or several that are equal and independent."""

    name: str
    charge_e0: float  # of one copy, not negative
    energy_mev: float  # of one copy at 0 mV, in the wild type
    copies: int = 1


@dataclass(frozen=True, kw_only=True, slots=True)
class Coupling:
    """Energy that is added for each pair of copies of two steps that are both done."""

    steps: tuple[str, str]
    energy_mev: float  # negative: each step favours the other


@dataclass(frozen=True, kw_only=True, slots=True)
class SideState:
    """A state that is entered from another without moving charge: an inactivated or a relaxed one."""

    name: str
    beside: str  # the state it is entered from
    energy_mev: float  # above that state, in the wild type


@dataclass(frozen=True, kw_only=True, slots=True)
class Effect:
    """What a mutation adds, or what several add beyond their single effects when all are present."""

    mutations: Mutations  # one for a mutation's own effect, more for an interaction
    activation_mev: float = 0.0  # to the activated state, shared by the steps in proportion to charge
    charge_e0: float = 0.0  # to the total charge, shared in the same way
    steps_mev: Mapping[str, float] = field(default_factory=dict)  # to each copy of a step
    steps_mv: Mapping[str, float] = field(default_factory=dict)  # to the voltage of a step
    step_charges_e0: Mapping[str, float] = field(default_factory=dict)  # to each copy of a step
    states_mev: Mapping[str, float] = field(default_factory=dict)  # to one state and no other


@dataclass(frozen=True, kw_only=True, slots=True)
class Recording:
    """How one construct is recorded; the defaults are those of the model file."""

    cells: int = 8  # with a curve
    scatter: Scatter = "normal"  # distribution of cells' medians and charges about the truth
    cell_sd_mv: float = 1.5  # of the medians of cells
    batches: tuple[str, ...] = ()  # cells are dealt out to them in turn
    first_mv: float = -140.0
    last_mv: float = 80.0
    step_mv: float = 10.0
    noise: float = 0.01  # standard deviation of a point, as a fraction of the whole charge
    baseline_sd: float = 0.0  # of a cell's offset, as a fraction of the whole charge
    leak_per_mv: float = 0.0  # slope that is left on both plateaus, fraction of the whole charge
    gain_pc: tuple[float, float] = (0.6, 2.4)  # whole charge of a cell, drawn between these
    holding_mv: float | None = None
    stray_mv: float = 0.0  # by which the last cell lies apart
    charge_cells: int = 8  # in which total charge is measured
    charge_sd: float = 0.025  # between cells, as a fraction of the charge
    charge_method: str | None = None
    paired: bool = False  # whether charges are measured in the cells with curves
    opening_cells: int = 0  # in which the open probability is measured
    opening_step_mv: float = 5.0
    opening_noise: float = 0.05  # standard deviation of ln Po
    opening_floor: float = 1e-6  # lowest open probability that can be seen


@dataclass(frozen=True, kw_only=True, slots=True)
class Common:
    """What all constructs of a campaign share."""

    batch_sd_mv: float = 0.0  # of the shift of all cells of a batch
    batch_charge_sd: float = 0.0  # of the factor on all charges of a batch
    charges: ChargeForm = "cells"  # a row a cell, or mean, standard error and n of each construct
    decimals: int = 6  # of the charge in curves
    charge_decimals: int = 4  # of total charges


@dataclass(frozen=True, kw_only=True, slots=True)
class Model:
    """All that a campaign is drawn from."""

    settings: Settings  # of the campaign that is made
    campaign: Mapping[str, object] = field(default_factory=dict)  # its keys as they are to be written
    note: str = ""  # heads the campaign file
    seed: int = 1
    order: Order = "sequence"  # steps one after the other, or in any order
    steps: tuple[Step, ...]
    couplings: tuple[Coupling, ...] = ()
    sides: tuple[SideState, ...] = ()
    opening: str | None = None  # step that opens; None for the last one
    mutations: tuple[Mutation, ...] = ()
    effects: tuple[Effect, ...] = ()  # of mutations and of their interactions
    cycles: tuple[tuple[Mutation, ...], ...]  # each in residue order
    recording: Recording = field(default_factory=Recording)
    own_recordings: Mapping[str, Recording] = field(default_factory=dict)  # by label
    common: Common = field(default_factory=Common)
    source: bytes = b""  # the file it was read from

    @property
    def total_charge_e0(self) -> float:
        """Charge that the wild type moves from rest to activated (e0)."""
        return sum(step.copies * step.charge_e0 for step in self.steps)

    @property
    def genotypes(self) -> dict[str, Mutations]:
        """Mutations of every construct by its label: wild type, singles as listed, then as in the cycles."""
        subsets = {
            frozenset(subset)
            for cycle in self.cycles
            for size in range(1, len(cycle) + 1)
            for subset in combinations(cycle, size)
        }
        found = [frozenset({mutation}) for mutation in self.mutations if frozenset({mutation}) in subsets]
        for size in range(2, max(map(len, self.cycles), default=0) + 1):
            for cycle in self.cycles:
                found += [s for c in combinations(cycle, size) if (s := frozenset(c)) not in found]
        return {self.settings.wild_type: frozenset(), **{joined(s): s for s in found}}

    def recording_of(self, label: str) -> Recording:
        """How the construct called `label` is recorded."""
        return self.own_recordings.get(label, self.recording)

    def effects_on(self, mutations: Mutations) -> tuple[Effect, ...]:
        """Effects of all that is present in a construct with these mutations."""
        return tuple(effect for effect in self.effects if effect.mutations <= mutations)
