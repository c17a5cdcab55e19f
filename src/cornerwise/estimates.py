"""One cycle's interaction energy with every kind of interval, before it is compared with the others."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .campaign import Settings
from .energies import EnergyBook
from .interactions import Interaction, interact, interaction_draws
from .intervals import Interval, expanded_percentile_interval, t_interval, t_p_value
from .mutations import Cycle

FloatArray = NDArray[np.float64]

_NOT_AVAILABLE = Interval(math.nan, math.nan)


@dataclass(frozen=True, kw_only=True, slots=True)
class Estimate:
    """An interaction energy, its uncertainty and its intervals; NaN where not available."""

    interaction: Interaction
    std_uncertainty: float
    dof: float
    propagated: Interval
    bootstrap: Interval
    monte_carlo: Interval  # NaN unless asked for
    interval: Interval  # the headline: the one of the two that the settings name
    p_value: float

    @property
    def value(self) -> float:
        """Interaction energy, in the campaign's unit."""
        return self.interaction.energy.value

    @property
    def known(self) -> bool:
        """Whether there is an uncertainty."""
        return math.isfinite(self.std_uncertainty)


def estimate(cycle: Cycle, book: EnergyBook, settings: Settings) -> tuple[Estimate, FloatArray]:
    """Estimate one cycle.

    Parameters
    ----------
    cycle : Cycle
        Complete.
    book : EnergyBook
        Energies of the campaign.
    settings : Settings
        Confidence and kind of interval.

    Returns
    -------
    Estimate, ndarray of shape (n_replicates,)
        And the deviations of the joint bootstrap replicates from it.
    """
    interaction = interact(cycle, book, settings.wild_type)
    value, level = interaction.energy.value, settings.confidence
    spread = interaction.ledger.spread(interaction.energy)
    u = math.sqrt(spread.variance)
    draws = interaction_draws(interaction, book)
    propagated = t_interval(value, u, spread.dof, level)
    conservative = _NOT_AVAILABLE
    if settings.interval == "monte-carlo":
        conservative = _percentiles(interaction_draws(interaction, book, conservative=True), level)
    found = Estimate(
        interaction=interaction,
        std_uncertainty=u,
        dof=spread.dof,
        propagated=propagated,
        bootstrap=expanded_percentile_interval(value, draws, spread.dof, level),
        monte_carlo=conservative,
        interval=conservative if settings.interval == "monte-carlo" else propagated,
        p_value=t_p_value(value, u, spread.dof),
    )
    return found, draws - value


def _percentiles(draws: FloatArray, confidence: float) -> Interval:
    if np.isnan(draws).any():
        return _NOT_AVAILABLE
    low, high = np.quantile(draws, [(1 - confidence) / 2, (1 + confidence) / 2])
    return Interval(float(low), float(high))


def estimate_all(
    cycles: Sequence[Cycle],
    book: EnergyBook,
    settings: Settings,
    progress: Callable[[int, int], None] | None = None,
) -> tuple[list[Estimate], NDArray[np.float32]]:
    """Estimate every cycle.

    Parameters
    ----------
    cycles : sequence of Cycle
        Complete.
    book : EnergyBook
        Energies of the campaign.
    settings : Settings
        Confidence, replicates and kind of interval.
    progress : callable, optional
        Called with the number of cycles done and their total.

    Returns
    -------
    list of Estimate, ndarray of shape (n_cycles, n_replicates)
        And the deviations of the joint bootstrap replicates, in single precision: they serve for
        probabilities only.
    """
    found = []
    deviations = np.empty((len(cycles), settings.replicates), dtype=np.float32)
    for row, cycle in enumerate(cycles):
        one, deviations[row] = estimate(cycle, book, settings)
        found.append(one)
        if progress is not None:
            progress(row + 1, len(cycles))
    return found, deviations
