"""Prospects from scatters that are assumed, before a cell was recorded."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from typing import Literal

from ..errors import UsageError
from ..units import EnergyUnit, energy_per_e0_mv
from .prospects import Fixed, Prospect, Recording, Term

Charges = Literal["separate", "paired", "shared", "stated"]

_LETTERS = "ABCDEFGH"


@dataclass(frozen=True, kw_only=True, slots=True)
class Assumptions:
    """Constructs as they are expected to be; one value for all corners of a cycle, or one for each.

    Corners come by their number of mutations: wild type, A, B, A/B for a pair.
    """

    median_mv: tuple[float, ...]
    median_sd_mv: tuple[float, ...]  # between cells
    charge_e0: tuple[float, ...]
    charge_sd_e0: tuple[float, ...] = (0.0,)  # between cells
    charges: Charges = "separate"  # how they are measured; "paired": in the cells that give the curves
    charge_sem_e0: float = 0.0  # of a stated charge
    correlation: float = 0.0  # of charge and median between cells, where they are paired
    order: int = 2  # mutations of a cycle; 1 is a single difference
    pairs: int = 1  # cycles on one wild type, no mutation in two of them
    known_from: int | None = None  # cells the scatters are known from; None: taken as certain
    temperature_c: float = 22.0
    energy_unit: EnergyUnit = "kcal/mol"

    def __post_init__(self) -> None:
        """Refuse what cannot be planned with."""
        if not 1 <= self.order <= len(_LETTERS):
            raise UsageError(f"a cycle of order {self.order} cannot be planned; give 1 to {len(_LETTERS)}")
        if self.pairs < 1:
            raise UsageError("there must be 1 cycle or more")
        for words, values in (
            ("median voltage", self.median_mv), ("scatter of the median voltage", self.median_sd_mv),
            ("total charge", self.charge_e0), ("scatter of the total charge", self.charge_sd_e0),
        ):  # fmt: skip
            if len(values) not in (1, 2**self.order) or not all(map(math.isfinite, values)):
                raise UsageError(
                    f"give one {words} for all corners or {2**self.order}, one a corner; found {len(values)}"
                )
        if (
            min(*self.median_sd_mv, *self.charge_sd_e0, self.charge_sem_e0, 0.0) < 0
            or min(self.charge_e0) <= 0
        ):
            raise UsageError("scatters may not be negative and charges must be above 0")
        if max(self.median_sd_mv) == 0:
            raise UsageError("without scatter of the median voltage there is nothing to plan")
        if not -1 <= self.correlation <= 1:
            raise UsageError(f"a correlation lies between -1 and 1; found {self.correlation:g}")
        if self.known_from is not None and self.known_from < 2:
            raise UsageError("a scatter can be known from 2 cells or more")

    def at(self, values: Sequence[float], corner: int) -> float:
        """Value of a corner."""
        return values[0] if len(values) == 1 else values[corner]


@dataclass(frozen=True, kw_only=True, slots=True)
class _Corner:
    label: str
    sign: int
    median: float
    median_sd: float
    charge: float
    charge_sd: float


def _corners(assumed: Assumptions, number: int) -> list[_Corner]:
    """Corners of one cycle, the wild type first."""
    suffix = str(number) if assumed.pairs > 1 else ""
    letters = [f"{letter}{suffix}" for letter in _LETTERS[: assumed.order]]
    sets = [chosen for size in range(assumed.order + 1) for chosen in combinations(letters, size)]
    return [
        _Corner(
            label="/".join(chosen) or "WT",
            sign=(-1) ** (assumed.order - len(chosen)),
            median=assumed.at(assumed.median_mv, place),
            median_sd=assumed.at(assumed.median_sd_mv, place),
            charge=assumed.at(assumed.charge_e0, place),
            charge_sd=assumed.at(assumed.charge_sd_e0, place),
        )
        for place, chosen in enumerate(sets)
    ]


def _paired_sd(corner: _Corner, correlation: float) -> float:
    """Standard deviation of charge times median of one cell, both normal."""
    covariance = correlation * corner.charge_sd * corner.median_sd
    variance = (corner.charge * corner.median_sd) ** 2 + (corner.median * corner.charge_sd) ** 2
    variance += 2 * corner.charge * corner.median * covariance
    variance += (corner.charge_sd * corner.median_sd) ** 2 + covariance**2
    return math.sqrt(max(variance, 0.0))


def _shared_part(assumed: Assumptions, corner: _Corner) -> float:
    """Covariance of charge and median between cells, which the mean of their products holds."""
    paired = assumed.charges == "paired"
    return assumed.correlation * corner.charge_sd * corner.median_sd if paired else 0.0


def _interaction(assumed: Assumptions, corners: Sequence[_Corner]) -> Prospect:
    per = energy_per_e0_mv(assumed.energy_unit, assumed.temperature_c)
    dof = math.inf if assumed.known_from is None else assumed.known_from - 1.0
    terms, fixed = list[Term](), list[Fixed]()

    def add(recording: Recording, sd: float) -> None:
        if sd > 0:
            terms.append(Term(recording=recording, sd=per * sd, scatter_dof=dof))

    wild, medians = corners[0], math.fsum(corner.sign * corner.median for corner in corners)
    common = assumed.charges in ("shared", "stated")
    for corner in corners:
        if assumed.charges == "paired":
            add(Recording(corner.label, "curves with charges"), _paired_sd(corner, assumed.correlation))
            continue
        add(Recording(corner.label, "curves"), (wild if common else corner).charge * corner.median_sd)
        if assumed.charges == "separate":
            add(Recording(corner.label, "charges"), abs(corner.median) * corner.charge_sd)
    if assumed.charges == "shared":
        add(Recording(wild.label, "charges"), abs(medians) * wild.charge_sd)
    if assumed.charges == "stated" and assumed.charge_sem_e0 * medians:
        variance = (per * medians * assumed.charge_sem_e0) ** 2
        fixed.append(
            Fixed("stated total charge, shared by all constructs", variance, math.inf, "stated charge")
        )
    value = per * math.fsum(
        corner.sign * (corner.median * (wild if common else corner).charge + _shared_part(assumed, corner))
        for corner in corners
    )
    return Prospect(name=corners[-1].label, value=value, terms=tuple(terms), fixed=tuple(fixed))


def _ratios(assumed: Assumptions, corners: Sequence[_Corner]) -> list[Prospect]:
    """Logarithms of the mutants' charges over the wild type's."""
    if assumed.charges in ("shared", "stated") or max(assumed.charge_sd_e0) == 0:
        return []
    dof = math.inf if assumed.known_from is None else assumed.known_from - 1.0
    wild, *mutants = corners
    return [
        Prospect(
            name=mutant.label,
            value=math.log(mutant.charge / wild.charge),
            terms=tuple(
                Term(
                    recording=Recording(one.label, "charges"), sd=one.charge_sd / one.charge, scatter_dof=dof
                )
                for one in (mutant, wild)
            ),
        )
        for mutant in mutants
    ]


def assumed_prospects(assumed: Assumptions) -> tuple[list[Prospect], list[Prospect]]:
    """Interactions and charge ratios of cycles that are yet to be recorded.

    Parameters
    ----------
    assumed : Assumptions
        Constructs and scatters.

    Returns
    -------
    list of Prospect, list of Prospect
        The cycles, named after their last corner; every mutant's logarithm of its charge over the wild
        type's, none where one charge serves for all.
    """
    cycles = [_corners(assumed, number) for number in range(1, assumed.pairs + 1)]
    return (
        [_interaction(assumed, corners) for corners in cycles],
        [ratio for corners in cycles for ratio in _ratios(assumed, corners)],
    )
