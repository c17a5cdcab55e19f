"""Rows of the interaction and budget tables: intervals, ranks and verdicts of every cycle."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TypedDict

import numpy as np
from numpy.typing import NDArray

from .batches import regroup
from .campaign import Settings
from .charge_judgement import ChargeJudgement
from .charge_trace import breakdowns, corner_charges, largest_margin, most_cells, per_10_mv, profile
from .energies import EnergyBook
from .flags import Flag, codes
from .interactions import Interaction, interact, interaction_draws, rank_intervals, strength_ranks
from .intervals import (
    Interval,
    adjusted_p_values,
    expanded_percentile_interval,
    t_interval,
    t_p_value,
    t_quantile,
)
from .ledger import Ledger
from .measurements import Measurement, protocol_flags
from .mutations import Cycle
from .result import (
    Breakdown,
    BudgetRow,
    ConstructRow,
    CornerCharge,
    Edge,
    InteractionRow,
    ProfilePoint,
    available,
)
from .sources import Derived, linear
from .verdicts import ShortcutVerdict, favours, interaction_verdict, shortcut_verdict

FloatArray = NDArray[np.float64]

_NOT_AVAILABLE = Interval(math.nan, math.nan)


@dataclass(frozen=True, kw_only=True, slots=True)
class Corners:
    """What the rows of cycles need to know of their constructs."""

    measurements: Mapping[str, Measurement]
    rows: Mapping[str, ConstructRow]
    charges: Mapping[str, ChargeJudgement]  # of every mutant
    settings: Settings


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class _Judged:
    """One cycle before it is compared with the others."""

    interaction: Interaction
    std_uncertainty: float
    dof: float
    interval: Interval
    boot: Interval
    p_value: float
    deviations: FloatArray  # of the draws from the estimate, widened to Student's t; (n_replicates,)


def _judge(cycle: Cycle, book: EnergyBook, settings: Settings) -> _Judged:
    interaction = interact(cycle, book, settings.wild_type)
    value = interaction.energy.value
    spread = interaction.ledger.spread(interaction.energy)
    u, level = math.sqrt(spread.variance), settings.confidence
    draws = interaction_draws(interaction, book)
    stretch = t_quantile(0.5 + level / 2, spread.dof) / t_quantile(0.5 + level / 2, math.inf)
    return _Judged(
        interaction=interaction,
        std_uncertainty=u,
        dof=spread.dof,
        interval=t_interval(value, u, spread.dof, level),
        boot=expanded_percentile_interval(value, draws, spread.dof, level),
        p_value=t_p_value(value, u, spread.dof),
        deviations=stretch * (draws - value),
    )


def _ranks(judged: Sequence[_Judged], confidence: float) -> list[tuple[int | None, int | None, int | None]]:
    """Rank and its limits of every cycle; None where the energy is not available."""
    known = [i for i, one in enumerate(judged) if math.isfinite(one.std_uncertainty)]
    ranks: list[tuple[int | None, int | None, int | None]] = [(None, None, None)] * len(judged)
    if not known:
        return ranks
    values = [judged[i].interaction.energy.value for i in known]
    draws = np.array([judged[i].interaction.energy.value + judged[i].deviations for i in known])
    limits = rank_intervals(draws, confidence)
    for i, rank, (low, high) in zip(known, strength_ranks(values), limits, strict=True):
        ranks[i] = (rank, min(low, rank), max(high, rank))
    return ranks


def _limits(derived: Derived | None, ledger: Ledger, confidence: float) -> Interval:
    return _NOT_AVAILABLE if derived is None else derived.interval(ledger, confidence)


def _value(derived: Derived | None) -> float | None:
    return None if derived is None else available(derived.value)


def _nonadditive(interaction: Interaction, limits: Interval, per_e0_mv: float, unit: str) -> tuple[Flag, ...]:
    if interaction.charge is None or not limits.excludes(0.0):
        return ()
    j, name = interaction.charge.value, interaction.cycle.name
    message = (
        f"the total charges around {name} do not add up (J = {j:+.2f} e0, interval {limits.low:.2f} to "
        f"{limits.high:.2f}): its interaction energy changes by {-10 * per_e0_mv * j:+.2g} {unit} for every "
        "+10 mV and a common voltage error does not cancel; state the voltage beside the energy"
    )
    return (Flag(code="charge-nonadditive", subject=name, message=message, value=j, limit=0.0),)


def _charge_trace(one: _Judged, corners: Corners) -> tuple[CornerCharge, ...]:
    mutants = [c.label for c in one.interaction.cycle.corners if c.label in corners.charges]
    return corner_charges(
        mutants,
        [corners.charges[label] for label in mutants],
        [corners.measurements[label] for label in mutants],
        corners.settings.confidence,
    )


class _ChargeFields(TypedDict):
    shortcut_bias: float | None
    shortcut_bias_low: float | None
    shortcut_bias_high: float | None
    shortcut_verdict: ShortcutVerdict
    charge_interaction_e0: float | None
    charge_interaction_low: float | None
    charge_interaction_high: float | None
    corner_charges: tuple[CornerCharge, ...]
    passing_margin: float | None
    passing_tolerance: float | None
    charge_cells_needed: int | None
    change_per_10_mv: float | None
    change_per_10_mv_low: float | None
    change_per_10_mv_high: float | None
    offset_contribution: float | None
    breakdown: tuple[Breakdown, ...]
    profile: tuple[ProfilePoint, ...]


def _charge_fields(one: _Judged, book: EnergyBook, corners: Corners, charges: Interval) -> _ChargeFields:
    settings, interaction = corners.settings, one.interaction
    trace = _charge_trace(one, corners)
    bias = _limits(interaction.shortcut_bias, interaction.ledger, settings.confidence)
    slope = per_10_mv(interaction, book.per_e0_mv)
    slope_limits = _limits(slope, interaction.ledger, settings.confidence)
    offset = None if slope is None else abs(slope.value) / 10 * settings.voltage_offset_mv
    assumed = [charge.construct for charge in trace if charge.verdict == "assumed"]
    return {
        "shortcut_bias": _value(interaction.shortcut_bias),
        "shortcut_bias_low": available(bias.low),
        "shortcut_bias_high": available(bias.high),
        "shortcut_verdict": shortcut_verdict([c.verdict for c in trace], bias, settings.energy_tolerance),
        "charge_interaction_e0": _value(interaction.charge),
        "charge_interaction_low": available(charges.low),
        "charge_interaction_high": available(charges.high),
        "corner_charges": trace,
        "passing_margin": largest_margin(trace),
        "passing_tolerance": available(max(abs(bias.low), abs(bias.high))),
        "charge_cells_needed": most_cells(trace),
        "change_per_10_mv": _value(slope),
        "change_per_10_mv_low": available(slope_limits.low),
        "change_per_10_mv_high": available(slope_limits.high),
        "offset_contribution": None if offset is None else available(offset),
        "breakdown": breakdowns(interaction, one.interval, assumed, book),
        "profile": profile(interaction, book, settings) if charges.excludes(0.0) else (),
    }


def _row(
    one: _Judged,
    ranks: tuple[int | None, int | None, int | None],
    p_adjusted: float,
    book: EnergyBook,
    corners: Corners,
) -> tuple[InteractionRow, tuple[Flag, ...]]:
    interaction, cycle, settings = one.interaction, one.interaction.cycle, corners.settings
    labels = [corner.label for corner in cycle.corners]
    charges = _limits(interaction.charge, interaction.ledger, settings.confidence)
    own = _nonadditive(interaction, charges, book.per_e0_mv, settings.energy_unit)
    own += protocol_flags(cycle.name, tuple(corners.measurements[label].construct for label in labels))
    inherited = {code for label in labels for code in corners.rows[label].flags}
    row = InteractionRow(
        cycle=cycle.name,
        order=cycle.order,
        mutations=tuple(map(str, cycle.mutations)),
        wild_type=settings.wild_type,
        corners=tuple((corner.label, corner.sign) for corner in cycle.corners),
        interaction=available(interaction.energy.value),
        energy_unit=settings.energy_unit,
        std_uncertainty=available(one.std_uncertainty),
        dof=available(one.dof),
        low=available(one.interval.low),
        high=available(one.interval.high),
        boot_low=available(one.boot.low),
        boot_high=available(one.boot.high),
        p_value=available(one.p_value),
        p_adjusted=available(p_adjusted),
        shortcut=available(interaction.shortcut.value),
        interaction_verdict=interaction_verdict(one.interval, settings.energy_threshold),
        favours=favours(interaction.energy.value, one.interval, cycle.order),
        rank=ranks[0],
        rank_low=ranks[1],
        rank_high=ranks[2],
        flags=codes(own, also=inherited),
        units=interaction.units,
        edges=cycle_edges(cycle, book),
        **_charge_fields(one, book, corners, charges),
    )
    return row, own


def cycle_edges(cycle: Cycle, book: EnergyBook) -> tuple[Edge, ...]:
    """Differences of energy along the edges of a cycle, from fewer mutations to more.

    Parameters
    ----------
    cycle : Cycle
        Complete; every corner has an entry in `book`.
    book : EnergyBook
        Energies of the campaign; what two corners share (a charge, an offset) is counted once.
    """
    found = []
    for start in cycle.corners:
        for end in cycle.corners:
            added = set(end.mutations) - set(start.mutations)
            if len(added) != 1 or len(end.mutations) != len(start.mutations) + 1:
                continue
            energies = book.energies[end.label].energy, book.energies[start.label].energy
            ledger, _ = regroup(book.ledger, [(end.label, 1.0), (start.label, -1.0)], book.shared_batches)
            difference = ledger.adjusted(linear([(1.0, energies[0]), (-1.0, energies[1])]))
            found.append(
                Edge(
                    start=start.label,
                    end=end.label,
                    mutation=str(*added),
                    difference=available(difference.value),
                    std_uncertainty=available(math.sqrt(ledger.spread(difference).variance)),
                )
            )
    return tuple(found)


def _budget_rows(one: _Judged) -> list[BudgetRow]:
    return [
        BudgetRow(
            cycle=one.interaction.cycle.name,
            source=part.source,
            contribution=available(part.contribution),
            share=available(part.share),
        )
        for part in one.interaction.ledger.budget(one.interaction.energy)
    ]


def interaction_rows(
    cycles: Sequence[Cycle],
    book: EnergyBook,
    corners: Corners,
    progress: Callable[[int, int], None] | None = None,
) -> tuple[list[InteractionRow], list[BudgetRow], list[Flag]]:
    """Rows of every cycle, their uncertainty budgets and the flags of the cycles themselves.

    Parameters
    ----------
    cycles : sequence of Cycle
        In the order the rows shall have.
    book : EnergyBook
        Energies of the campaign.
    corners : Corners
        Measurements and rows of the constructs, and the settings.
    progress : callable, optional
        Called with the number of cycles done and their total.
    """
    judged = []
    for count, cycle in enumerate(cycles, start=1):
        judged.append(_judge(cycle, book, corners.settings))
        if progress is not None:
            progress(count, len(cycles))
    adjusted = adjusted_p_values([one.p_value for one in judged])
    ranks = _ranks(judged, corners.settings.confidence)
    rows, budget, flags = [], list[BudgetRow](), list[Flag]()
    for one, rank, p_adjusted in zip(judged, ranks, adjusted, strict=True):
        row, own = _row(one, rank, p_adjusted, book, corners)
        rows.append(row)
        flags.extend(own)
        budget.extend(_budget_rows(one))
    return rows, budget, flags
