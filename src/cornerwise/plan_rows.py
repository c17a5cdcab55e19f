"""The rows of a plan: what to expect of further recordings, how many are needed, where they go."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar, Literal

from .tables import Value, flat_values
from .units import EnergyNumber

RecordingKind = Literal["curves", "charges", "curves with charges"]
GoalKind = Literal["half-width", "power", "charge equal", "charge changed"]
SettledAs = Literal["detected", "uncoupled"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Share:
    """Further cells of one kind of one construct."""

    construct: str
    kind: RecordingKind
    cells: int

    def __str__(self) -> str:
        return f"{self.cells} {self.kind} of {self.construct}"


@dataclass(frozen=True, kw_only=True, slots=True)
class OutlookRow:
    """Half-width and power of one cycle at a number of cells; energies in `energy_unit` per channel.

    Low and high hold what 8 of 10 outcomes lie between, the scatters being as uncertain as they are.
    """

    columns: ClassVar[tuple[str, ...]] = (
        "cycle", "order", "cells_each", "half_width", "half_width_low", "half_width_high", "power",
        "power_low", "power_high", "assurance", "true_interaction", "confidence", "energy_unit",
    )  # fmt: skip

    cycle: str
    order: int
    cells_each: int | None  # of every kind on every construct; None: what there is now
    half_width: EnergyNumber | None  # expected, every scatter being what it seems
    half_width_low: EnergyNumber | None
    half_width_high: EnergyNumber | None
    power: float | None  # the same, against `true_interaction`
    power_low: float | None
    power_high: float | None
    assurance: float | None  # power averaged over the possible scatters
    true_interaction: EnergyNumber
    confidence: float
    energy_unit: str

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class NeedRow:
    """Fewest further cells with which one estimate, or all of them, reach a goal."""

    columns: ClassVar[tuple[str, ...]] = (
        "subject", "goal", "wanted", "further", "further_low", "further_high", "expected", "shares", "reason",
    )  # fmt: skip

    subject: str  # a cycle, a mutant whose charge is judged, or "all"
    goal: GoalKind
    wanted: float  # half-width in the energy unit, or a probability
    further: int | None  # every scatter being what it seems; None where no number would do
    further_low: int | None  # with luck: 1 in 10 of what the scatters may be needs no more
    further_high: int | None  # to be sure: 9 in 10 need no more
    expected: float | None  # half-width or probability then
    shares: tuple[Share, ...]  # which cells
    reason: str | None  # why no number would do, or what was left out

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class SplitRow:
    """One kind of cell of one construct in the best split of a number of recordings."""

    columns: ClassVar[tuple[str, ...]] = (
        "construct", "kind", "cells_now", "further", "further_equal_split", "cycles",
    )  # fmt: skip

    construct: str
    kind: RecordingKind
    cells_now: int
    further: int
    further_equal_split: int
    cycles: int  # that it counts for

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)


@dataclass(frozen=True, kw_only=True, slots=True)
class NextStepRow:
    """What would settle one unresolved cycle, if its estimate and its scatters stay what they are."""

    columns: ClassVar[tuple[str, ...]] = (
        "cycle", "settled_as", "confidence", "half_width", "half_width_wanted", "next_construct", "next_kind",
        "half_width_after_next", "further", "shares", "limit", "remedy", "energy_unit",
    )  # fmt: skip

    cycle: str
    settled_as: SettledAs
    confidence: float  # of the interval that decides; higher than usual where many cycles are adjusted for
    half_width: EnergyNumber | None  # of that interval; None where a construct shows no scatter yet
    half_width_wanted: EnergyNumber
    next_construct: str | None  # where one further cell narrows the interval most; None without any
    next_kind: RecordingKind | None
    half_width_after_next: EnergyNumber | None
    further: int | None  # cells; None where no number would do, or more than 1000
    shares: tuple[Share, ...]
    limit: str | None  # largest source that no further cell makes smaller, where it stands in the way
    remedy: str | None  # what does make that smaller
    energy_unit: str

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return flat_values(self)
