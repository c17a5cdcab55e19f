"""What the user brought, validated and frozen: curves, charges, constructs, settings, the campaign."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from .errors import Origin
from .intervals import Adjustment
from .mutations import Cycle, CycleRequest, Mutation
from .units import EnergyNumber, EnergyUnit, convert_energy

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Curve:
    """One cell's charge-voltage (Q-V) curve, points in rising voltage."""

    construct: str
    cell: str
    batch: str | None = None
    voltage_mv: FloatArray  # (n_points,), strictly rising
    charge: FloatArray  # (n_points,), the cell's own scale and offset
    charge_unit: str = ""  # "fC", "pC", "nC", "e0" or "" for an arbitrary scale
    holding_mv: float | None = None
    phase: str | None = None  # "on", "off" or not stated
    origin: Origin = field(default_factory=Origin)


@dataclass(frozen=True, kw_only=True, slots=True)
class MedianSummary:
    """Median voltage of a construct known only as mean, standard error and number of cells."""

    construct: str
    median_mv: float
    sem_mv: float
    n: int
    origin: Origin = field(default_factory=Origin)


@dataclass(frozen=True, kw_only=True, slots=True)
class ChargeReplicate:
    """Total gating charge per channel measured in one cell."""

    construct: str
    cell: str
    batch: str | None = None
    charge_e0: float
    own_uncertainty_e0: float | None = None  # standard, from the cell's channel count
    method: str | None = None
    origin: Origin = field(default_factory=Origin)


@dataclass(frozen=True, kw_only=True, slots=True)
class ChargeSummary:
    """Total gating charge per channel known only as mean, standard error and number of values."""

    construct: str
    charge_e0: float
    sem_e0: float
    n: int | None  # None for a value from the literature whose uncertainty is taken as it stands
    method: str | None = None
    citation: str | None = None
    origin: Origin = field(default_factory=Origin)


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class OpeningCurve:
    """One cell's open probability against voltage, points in rising voltage."""

    construct: str
    cell: str
    batch: str | None = None
    voltage_mv: FloatArray  # (n_points,), strictly rising
    open_probability: FloatArray  # (n_points,), 0 to 1
    origin: Origin = field(default_factory=Origin)


@dataclass(frozen=True, kw_only=True, slots=True)
class StatedCharge:
    """One total charge for every construct, with its standard uncertainty."""

    value_e0: float
    sem_e0: float
    citation: str | None = None


IntervalKind = Literal["propagated", "monte-carlo"]
RankOrder = Literal["estimate", "lower bound"]
ChargePolicy = StatedCharge | str  # "measured", "wild-type" or a stated value


@dataclass(frozen=True, kw_only=True, slots=True)
class Construct:
    """One construct with all that was measured on it."""

    label: str
    mutations: tuple[Mutation, ...]  # against the wild type, background removed, in residue order
    curves: tuple[Curve, ...] = ()
    median: MedianSummary | None = None  # never together with curves
    charge_replicates: tuple[ChargeReplicate, ...] = ()
    charge_summaries: tuple[ChargeSummary, ...] = ()  # one a method
    openings: tuple[OpeningCurve, ...] = ()  # for the limiting slope


@dataclass(frozen=True, kw_only=True, slots=True)
class Settings:
    """The choices in ``campaign.toml``; every one but `wild_type` has a default."""

    wild_type: str
    title: str = ""
    temperature_c: float = 22.0
    subunits: int = 1
    energy_unit: EnergyUnit = "kcal/mol"
    confidence: float = 0.95
    replicates: int = 10_000
    seed: int = 1
    threshold: EnergyNumber | None = None  # energy_unit; None: 1 kcal/mol
    shortcut_tolerance: EnergyNumber | None = None  # energy_unit; None: 0.5 kcal/mol
    charge_margin: float = 0.10  # fraction of the wild type's total charge
    voltage_offset_mv: float = 0.0  # standard uncertainty of an offset common to all curves
    reference_voltage_mv: float = 0.0  # voltage at which energies are given
    charge: ChargePolicy = "measured"
    charge_method: str | None = None  # of charges.csv; None: the wild type's
    correct_sloping_plateaus: bool = False  # take off the line under curves that sloping plateaus call for
    interval: IntervalKind = "propagated"  # the one that verdicts go by
    adjustment: Adjustment = "holm"  # of p values for the number of cycles
    simultaneous: bool = False  # whether intervals that hold all cycles at once are formed too
    rank_by: RankOrder = "estimate"
    first: int = 3  # how many the probability of being among the first is for
    defaulted: tuple[str, ...] = ()  # keys of campaign.toml the user left out

    @property
    def energy_threshold(self) -> float:
        """Size an interaction must exceed to be called coupled, in `energy_unit`."""
        return self._in_unit(self.threshold, kcal_per_mol=1.0)

    @property
    def energy_tolerance(self) -> float:
        """Largest shortcut bias that is acceptable, in `energy_unit`."""
        return self._in_unit(self.shortcut_tolerance, kcal_per_mol=0.5)

    def _in_unit(self, stated: float | None, *, kcal_per_mol: float) -> float:
        if stated is not None:
            return stated
        return convert_energy(kcal_per_mol, "kcal/mol", self.energy_unit, self.temperature_c)


@dataclass(frozen=True, kw_only=True, slots=True)
class Exclusion:
    """A cell the user sets aside, curve and charge, with the reason."""

    construct: str
    cell: str
    reason: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Distance:
    """Distance between the side chains of two residues in a structure."""

    residues: frozenset[int]  # two residue numbers
    angstrom: float  # the shorter one of within a chain and across chains
    within_chain_angstrom: float | None = None  # both residues in one chain; None where not known
    across_chains_angstrom: float | None = None  # each residue in another chain of a homomer
    charged_angstrom: float | None = None  # between charged atoms, where both residues carry a charge
    atoms: str = ""  # the two atoms, their residues and chains
    source: str = ""  # the file, and the citation where one is given
    definition: str = ""  # what was measured
    origin: Origin = field(default_factory=Origin)


def distance_between(mutations: Sequence[Mutation], distances: Sequence[Distance]) -> Distance | None:
    """Distance between the residues of a pair; None where it is not known or there is no pair."""
    residues = {mutation.position for mutation in mutations}
    found = [one for one in distances if len(mutations) == 2 and one.residues == residues]
    return found[0] if found else None


@dataclass(frozen=True, kw_only=True, slots=True)
class InputFile:
    """A file that was read, for the record in ``result.json``."""

    name: str
    sha256: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Campaign:
    """Everything that was read, checked and put together; the input of every computation."""

    settings: Settings
    constructs: tuple[Construct, ...]  # the wild type first, then in residue order
    cycles: tuple[Cycle, ...]
    requests: tuple[CycleRequest, ...] = ()  # the [[cycle]] entries, empty when cycles were found
    background: tuple[Mutation, ...] = ()  # carried by every construct
    exclusions: tuple[Exclusion, ...] = ()
    inputs: tuple[InputFile, ...] = ()
    distances: tuple[Distance, ...] = ()
    notes: tuple[str, ...] = ()  # what a reader of the numbers should know of what was read

    def construct(self, label: str) -> Construct:
        """Return the construct called `label`.

        Raises
        ------
        KeyError
            If there is none.
        """
        for construct in self.constructs:
            if construct.label == label:
                return construct
        raise KeyError(label)


def ranked_by(campaign: Campaign, *, lower_limit: bool = False, first: int | None = None) -> Campaign:
    """The campaign with another order of its ranking or another number of first places.

    Parameters
    ----------
    campaign : Campaign
        As it was read.
    lower_limit : bool, optional
        Order by the lower limit of the absolute size.
    first : int, optional
        How many count as the first.
    """
    settings = campaign.settings
    order: RankOrder = "lower bound" if lower_limit else settings.rank_by
    defaulted = tuple(
        key
        for key in settings.defaulted
        if not (key == "rank_by" and lower_limit) and not (key == "first" and first is not None)
    )
    changed = replace(settings, rank_by=order, first=first or settings.first, defaulted=defaulted)
    return replace(campaign, settings=changed)
