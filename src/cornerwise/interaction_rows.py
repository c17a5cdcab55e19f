"""Rows of the interaction and budget tables: intervals, ranks and verdicts of every cycle."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import TypedDict

from .batches import regroup
from .campaign import Distance, Settings, distance_between
from .charge_judgement import ChargeJudgement
from .charge_trace import breakdowns, corner_charges, largest_margin, most_cells, per_10_mv, profile
from .energies import EnergyBook
from .estimates import Estimate, estimate_all
from .flags import Flag, codes
from .interactions import Interaction
from .intervals import Interval
from .ledger import Ledger
from .measurements import Measurement, protocol_flags
from .mutations import Cycle, opposite_charges
from .rows import Breakdown, BudgetRow, ConstructRow, CornerCharge, Edge, InteractionRow, ProfilePoint
from .sources import Derived, linear
from .standings import Standing, standings
from .tables import available
from .verdicts import (
    Favours,
    InteractionVerdict,
    ShortcutVerdict,
    favours,
    interaction_verdict,
    shortcut_verdict,
)

_NOT_AVAILABLE = Interval(math.nan, math.nan)


@dataclass(frozen=True, kw_only=True, slots=True)
class Corners:
    """What the rows of cycles need to know of their constructs."""

    measurements: Mapping[str, Measurement]
    rows: Mapping[str, ConstructRow]
    charges: Mapping[str, ChargeJudgement]  # of every mutant
    settings: Settings
    distances: tuple[Distance, ...] = ()


def _limits(derived: Derived | None, ledger: Ledger, confidence: float) -> Interval:
    return _NOT_AVAILABLE if derived is None else derived.interval(ledger, confidence)


def _value(derived: Derived | None) -> float | None:
    return None if derived is None else available(derived.value)


def _nonadditive(interaction: Interaction, limits: Interval, per_e0_mv: float, unit: str) -> tuple[Flag, ...]:
    if interaction.charge is None or not limits.excludes(0.0):
        return ()
    j, name = interaction.charge.value, interaction.cycle.name
    message = charges_that_do_not_add_up(name, j, limits, -10 * per_e0_mv * j, unit)
    return (Flag(code="charge-nonadditive", subject=name, message=message, value=j, limit=0.0),)


def charges_that_do_not_add_up(
    cycle: str, j_e0: float, limits: Interval, change_per_10_mv: float, unit: str
) -> str:
    """Sentence of the flag ``charge-nonadditive``.

    Parameters
    ----------
    cycle : str
        Its name.
    j_e0 : float
        Charge interaction, e0.
    limits : Interval
        Of the charge interaction.
    change_per_10_mv : float
        Of the interaction energy, in `unit`.
    unit : str
        Energy unit.
    """
    return (
        f"the total charges around {cycle} do not add up (J = {j_e0:+.2f} e0, interval {limits.low:.2f} to "
        f"{limits.high:.2f}): its interaction energy changes by {change_per_10_mv:+.2g} {unit} for every "
        "+10 mV and a common voltage error does not cancel; state the voltage beside the energy"
    )


def _charge_trace(one: Estimate, corners: Corners) -> tuple[CornerCharge, ...]:
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


def _charge_fields(
    one: Estimate, verdict: InteractionVerdict, book: EnergyBook, corners: Corners, charges: Interval
) -> _ChargeFields:
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
        "breakdown": breakdowns(
            interaction, one.interval, assumed, book, (verdict, settings.energy_threshold)
        ),
        "profile": profile(interaction, book, settings) if charges.excludes(0.0) else (),
    }


class _StandingFields(TypedDict):
    p_adjusted: float | None
    interaction_verdict: InteractionVerdict
    favours: Favours | None
    rank: int | None
    rank_low: int | None
    rank_high: int | None
    strength_low: float | None
    first_probability: float | None
    shrunken: float | None
    simultaneous_low: float | None
    simultaneous_high: float | None


def _standing_fields(one: Estimate, standing: Standing, settings: Settings) -> _StandingFields:
    order, established = one.interaction.cycle.order, standing.established
    low, high = standing.ranks or (None, None)
    return {
        "p_adjusted": available(standing.p_adjusted),
        "interaction_verdict": interaction_verdict(
            one.interval, settings.energy_threshold, established=established
        ),
        "favours": favours(one.value, one.interval, order, established=established),
        "rank": standing.rank,
        "rank_low": low,
        "rank_high": high,
        "strength_low": available(standing.strength_low),
        "first_probability": available(standing.first_probability),
        "shrunken": available(standing.shrunken),
        "simultaneous_low": available(standing.simultaneous.low),
        "simultaneous_high": available(standing.simultaneous.high),
    }


class _DistanceFields(TypedDict):
    distance_angstrom: float | None
    distance_within_chain_angstrom: float | None
    distance_across_chains_angstrom: float | None
    charged_distance_angstrom: float | None
    distance_atoms: str | None
    distance_source: str | None
    distance_definition: str | None


_NO_DISTANCE = Distance(residues=frozenset(), angstrom=math.nan)


def _distance_fields(known: Distance | None) -> _DistanceFields:
    distance = known or _NO_DISTANCE
    return {
        "distance_angstrom": available(distance.angstrom),
        "distance_within_chain_angstrom": distance.within_chain_angstrom,
        "distance_across_chains_angstrom": distance.across_chains_angstrom,
        "charged_distance_angstrom": distance.charged_angstrom,
        "distance_atoms": distance.atoms or None,
        "distance_source": distance.source or None,
        "distance_definition": distance.definition or None,
    }


def _row(
    one: Estimate, standing: Standing, book: EnergyBook, corners: Corners
) -> tuple[InteractionRow, tuple[Flag, ...]]:
    interaction, cycle, settings = one.interaction, one.interaction.cycle, corners.settings
    labels = [corner.label for corner in cycle.corners]
    charges = _limits(interaction.charge, interaction.ledger, settings.confidence)
    own = _nonadditive(interaction, charges, book.per_e0_mv, settings.energy_unit)
    own += protocol_flags(cycle.name, tuple(corners.measurements[label].construct for label in labels))
    stands = _standing_fields(one, standing, settings)
    inherited = {code for label in labels for code in corners.rows[label].flags}
    row = InteractionRow(
        cycle=cycle.name,
        order=cycle.order,
        mutations=tuple(map(str, cycle.mutations)),
        wild_type=settings.wild_type,
        corners=tuple((corner.label, corner.sign) for corner in cycle.corners),
        interaction=available(one.value),
        energy_unit=settings.energy_unit,
        std_uncertainty=available(one.std_uncertainty),
        dof=available(one.dof),
        low=available(one.interval.low),
        high=available(one.interval.high),
        boot_low=available(one.bootstrap.low),
        boot_high=available(one.bootstrap.high),
        monte_carlo_low=available(one.monte_carlo.low),
        monte_carlo_high=available(one.monte_carlo.high),
        p_value=available(one.p_value),
        shortcut=available(interaction.shortcut.value),
        flags=codes(own, also=inherited),
        units=interaction.units,
        edges=cycle_edges(cycle, book),
        opposite_charges=opposite_charges(cycle.mutations),
        **_distance_fields(distance_between(cycle.mutations, corners.distances)),
        **stands,
        **_charge_fields(one, stands["interaction_verdict"], book, corners, charges),
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


def _budget_rows(one: Estimate) -> list[BudgetRow]:
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
    estimates, deviations = estimate_all(cycles, book, corners.settings, progress)
    rows, budget, flags = [], list[BudgetRow](), list[Flag]()
    for one, standing in zip(estimates, standings(estimates, deviations, corners.settings), strict=True):
        row, own = _row(one, standing, book, corners)
        rows.append(row)
        flags.extend(own)
        budget.extend(_budget_rows(one))
    return rows, budget, flags
