"""What total charge does to a cycle: other voltages, verdicts at the corners, what would erase it."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from .campaign import Settings
from .charge_judgement import ChargeJudgement, family_verdicts
from .energies import EnergyBook
from .interactions import Interaction
from .intervals import Interval
from .measurements import Measurement
from .rows import Breakdown, CornerCharge, ProfilePoint
from .sources import Derived, linear
from .tables import available
from .verdicts import InteractionVerdict

_PROFILE_POINTS = 41
_BEYOND_MEDIANS_MV = 60.0


def per_10_mv(interaction: Interaction, per_e0_mv: float) -> Derived | None:
    """Change of the interaction energy for 10 mV more: -10 F J; None where J is not known."""
    return None if interaction.charge is None else linear([(-10 * per_e0_mv, interaction.charge)])


def profile(interaction: Interaction, book: EnergyBook, settings: Settings) -> tuple[ProfilePoint, ...]:
    """Interaction energy at other voltages, I(V) = I - F (V - V0) J, with its propagated interval.

    Parameters
    ----------
    interaction : Interaction
        Its charge interaction must be known, else there is no profile.
    book : EnergyBook
        Energies of the campaign.
    settings : Settings
        Confidence and reference voltage V0.

    Returns
    -------
    tuple of ProfilePoint
        From 60 mV below the lowest median of the corners to 60 mV above the highest.
    """
    if interaction.charge is None:
        return ()
    medians = [book.energies[corner.label].median.value for corner in interaction.cycle.corners]
    if not all(map(math.isfinite, medians)):
        return ()
    grid = np.linspace(min(medians) - _BEYOND_MEDIANS_MV, max(medians) + _BEYOND_MEDIANS_MV, _PROFILE_POINTS)
    points = []
    for voltage in map(float, grid):
        away = -book.per_e0_mv * (voltage - settings.reference_voltage_mv)
        there = linear([(1.0, interaction.energy), (away, interaction.charge)])
        low, high = there.interval(interaction.ledger, settings.confidence)
        points.append(
            ProfilePoint(
                voltage_mv=voltage, interaction=there.value, low=available(low), high=available(high)
            )
        )
    return tuple(points)


def breakdowns(
    interaction: Interaction,
    interval: Interval,
    assumed: Sequence[str],
    book: EnergyBook,
    judged: tuple[InteractionVerdict, float],
) -> tuple[Breakdown, ...]:
    """Change of each assumed charge that would undo what is said of the interaction.

    Parameters
    ----------
    interaction : Interaction
        The cycle.
    interval : Interval
        Of its energy.
    assumed : sequence of str
        Corners whose charge was never measured.
    book : EnergyBook
        Energies of the campaign.
    judged : tuple of str and float
        The verdict on the interaction, and the threshold beyond which one counts, in the campaign's unit.

    Returns
    -------
    tuple of Breakdown
        The smallest change first; empty when the verdict is ``unresolved``.
        A corner's energy is proportional to its charge, so a fraction f changes I by s f dG of that corner.
    """
    verdict, threshold = judged
    if verdict == "unresolved":
        return ()
    nearest = min(interval.low, interval.high, key=abs)
    to_zero = -nearest if interval.excludes(0.0) else None
    to_verdict = {
        "coupled": math.copysign(threshold, nearest) - nearest,
        "detected": -nearest,
        "uncoupled": min(threshold - interval.high, -threshold - interval.low, key=abs),
    }[verdict]
    found = []
    for corner in interaction.cycle.corners:
        energy = corner.sign * book.energies[corner.label].energy.value
        if corner.label in assumed and energy != 0:
            fraction = None if to_zero is None else to_zero / energy
            found.append(
                Breakdown(construct=corner.label, fraction=fraction, verdict_fraction=to_verdict / energy)
            )
    return tuple(sorted(found, key=lambda one: (abs(one.verdict_fraction), one.construct)))


def corner_charges(
    labels: Sequence[str],
    judged: Sequence[ChargeJudgement],
    measured: Sequence[Measurement],
    confidence: float,
) -> tuple[CornerCharge, ...]:
    """Trace of the charge verdicts of a cycle's mutants, one for each.

    Parameters
    ----------
    labels : sequence of str
        The mutants.
    judged : sequence of ChargeJudgement
        Each against the wild type.
    measured : sequence of Measurement
        Each one's measurement.
    confidence : float
        Of the family of verdicts.
    """
    family = family_verdicts(judged, confidence)
    return tuple(
        CornerCharge(
            construct=label,
            source=None if one.charge is None else one.charge.source,
            ratio=available(judgement.ratio),
            low=available(judgement.difference.low),
            high=available(judgement.difference.high),
            verdict=verdict,
            passing_margin=available(judgement.passing_margin),
            cells_needed=judgement.cells_needed,
        )
        for label, judgement, one, verdict in zip(labels, judged, measured, family, strict=True)
    )


def largest_margin(charges: Sequence[CornerCharge]) -> float | None:
    """Smallest margin that every corner passes; None when one was never measured."""
    margins = [one.passing_margin for one in charges if one.passing_margin is not None]
    return max(margins) if margins and len(margins) == len(charges) else None


def most_cells(charges: Sequence[CornerCharge]) -> int | None:
    """Charge values a construct that give every corner a verdict; None when no number up to 200 does."""
    numbers = [one.cells_needed for one in charges if one.cells_needed is not None]
    return max(numbers) if numbers and len(numbers) == len(charges) else None
